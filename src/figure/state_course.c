/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How what is unknown changes over the years of the horizon: a Markov chain (graph.h, CHAIN) whose
 * rates are transitions, and failures that renew the asset.
 *
 * Rates are taken at their means (HELD): a transition as it is stated, a failure at the mean
 * frequency of the outcome in that state, other unknown states as they are at the start. What is
 * unknown at the start stays an input, in which the probability of every year is linear. Owns
 * nothing beyond the arena of the figures. */
#include "figure/states.h"

#include <math.h>

#include "figure/horizon.h"

/* A course under construction. */
struct coursing {
    struct figures *f;
    const struct variant *v; /* a stem, projected on the state */
    const struct object *object;
    const struct state *state;
    struct building b;
    ARRAY(uint32_t) from, to;
    ARRAY(node_id) rates;
    struct strmap named; /* passages that have a figure */
    struct state_course *out;
};

static size_t count_of(const struct coursing *c)
{
    return state_values(c->state)->n;
}

static size_t value_named(const struct coursing *c, const char *key)
{
    const struct rows *values = state_values(c->state);
    size_t i = 0;
    while (i < values->n && !text_equal(values->keys[i], key))
        i++;
    return i;
}

/* --- what must be there before the section is opened --- */

/* A hazard while the state has a value: in each combination of the others. */
struct failing {
    const char *hazard;
    size_t value;
    const struct combinations *combined;
    const struct compiled **units; /* NULL: no such hazard */
};
struct failings ARRAY_BODY(struct failing);

static ohmen_status compile_failing(struct coursing *c, struct failing *x, ohmen_error *e)
{
    const struct variant *in;
    ohmen_status status = variant_in_state(c->f, c->v, c->object, x->value, &in, e);
    if (status == OHMEN_OK)
        status = states_of(c->f, in, x->hazard, &x->combined, e);
    if (status != OHMEN_OK)
        return status;
    x->units = NEW_ARRAY(c->f->arena, x->combined->list.n, const struct compiled *);
    for (size_t i = 0; status == OHMEN_OK && i < x->combined->list.n; i++) {
        const struct combination *at = &x->combined->list.at[i];
        const struct compiled *unused;
        for (size_t k = 0; status == OHMEN_OK && k < at->n; k++)
            status = figures_compile(c->f, c->v->stem, at->states[k]->id, &unused, e);
        if (status == OHMEN_OK && model_find(at->variant->model, x->hazard))
            status = figures_compile(c->f, at->variant, x->hazard, &x->units[i], e);
    }
    return status;
}

static ohmen_status compile_failings(struct coursing *c, struct failings *out, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < c->state->failures.n; i++)
        for (size_t k = 0; status == OHMEN_OK && k < count_of(c); k++) {
            struct failing *x = array_push(c->f->arena, out);
            *x = (struct failing){.hazard = c->state->failures.keys[i], .value = k};
            status = compile_failing(c, x, e);
        }
    return status;
}

/* --- rates --- */

static void add_flow(struct coursing *c, size_t from, size_t to, node_id rate)
{
    if (from == to)
        return;
    *array_push(c->f->arena, &c->from) = (uint32_t)from;
    *array_push(c->f->arena, &c->to) = (uint32_t)to;
    *array_push(c->f->arena, &c->rates) = graph_op1(c->f->graph, OP_HELD, rate);
}

static void add_transitions(struct coursing *c)
{
    for (size_t r = 0; r < c->state->becomes.n; r++) {
        const struct rows *to = &((const struct rows *)c->state->becomes.at)[r];
        for (size_t k = 0; k < to->n; k++) {
            const struct quantity *q = ((const struct quantity *const *)to->at)[k];
            node_id n = compile_quantity(&c->b, q);
            compiled_add(&c->b, PROPERTY_BECOMES, c->state->becomes.keys[r], to->keys[k], n,
                         c->state->source, quantity_reads(c->f, q));
            add_flow(c, value_named(c, c->state->becomes.keys[r]), value_named(c, to->keys[k]), n);
        }
    }
}

static node_id share_node(struct coursing *c, const struct combination *at, size_t k)
{
    const struct building under = {.figures = c->f, .variant = c->v->stem};
    const struct compiled *u = compiled_of(&under, at->states[k]->id);
    const char *key = state_values(at->states[k]->data)->keys[at->values[k]];
    return figure_at(c->f, compiled_figure(c->f, u, PROPERTY_SHARE, key, NULL))->node;
}

/* How often it comes to an outcome; NODE_NONE: never. */
static node_id frequency_of(struct coursing *c, const struct failing *x, const char *outcome)
{
    struct graph *g = c->f->graph;
    node_id sum = NODE_NONE;
    for (size_t i = 0; i < x->combined->list.n; i++) {
        const struct combination *at = &x->combined->list.at[i];
        if (!x->units[i])
            continue;
        figure_id id = compiled_figure(c->f, x->units[i], PROPERTY_FREQUENCY, outcome, NULL);
        if (id == FIGURE_NONE)
            continue;
        node_id n = figure_at(c->f, id)->node;
        for (size_t k = 0; k < at->n; k++)
            n = graph_op2(g, OP_MULTIPLY, share_node(c, at, k), n);
        sum = sum == NODE_NONE ? n : graph_op2(g, OP_ADD, sum, n);
    }
    return sum;
}

static void add_failures(struct coursing *c, const struct failings *all)
{
    for (size_t i = 0; i < all->n; i++) {
        const struct failing *x = &all->at[i];
        size_t row = i / count_of(c);
        const struct rows *to = &((const struct rows *)c->state->failures.at)[row];
        for (size_t k = 0; k < to->n; k++) {
            node_id n = frequency_of(c, x, to->keys[k]);
            if (n != NODE_NONE)
                add_flow(c, x->value, value_named(c, ((const char *const *)to->at)[k]), n);
        }
    }
}

/* --- the course itself --- */

static node_id chain(struct coursing *c, double years, size_t start, size_t end, bool mean)
{
    struct chain x = {.n_states = (uint32_t)count_of(c),
                      .n_flows = (uint32_t)c->rates.n,
                      .from = c->from.at,
                      .to = c->to.at,
                      .years = years,
                      .start = (uint32_t)start,
                      .end = (uint32_t)end,
                      .mean = mean};
    return graph_chain(c->f->graph, &x, c->rates.at);
}

/* A whole year has figures of its own; a broken one at the beginning stands in the formulas. */
static node_id passage(struct coursing *c, double years, size_t start, size_t end, bool mean)
{
    const struct rows *values = state_values(c->state);
    node_id n = chain(c, years, start, end, mean);
    bool known = years != 1 || strmap_has(&c->named, arena_printf(c->f->arena, "%u", (unsigned)n));
    if (!known)
        compiled_add(&c->b, mean ? PROPERTY_SPENDS : PROPERTY_PASSES, values->keys[start],
                     values->keys[end], n, NULL, NULL);
    strmap_set(c->f->arena, &c->named, arena_printf(c->f->arena, "%u", (unsigned)n), NULL);
    return n;
}

/* From what is believed at one time to what is believed a while later, or meanwhile. */
static void carry(struct coursing *c, const node_id *from, double years, bool mean, node_id *to)
{
    struct graph *g = c->f->graph;
    size_t n = count_of(c);
    node_id *terms = NEW_ARRAY(c->f->arena, n, node_id);
    for (size_t k = 0; k < n; k++) {
        size_t m = 0;
        for (size_t i = 0; i < n; i++)
            if (from[i] != NODE_NONE)
                terms[m++] = graph_op2(g, OP_MULTIPLY, from[i], passage(c, years, i, k, mean));
        to[k] = m == 1 ? terms[0] : graph_op(g, OP_SUM, m, terms);
    }
}

/* At the start: what is unknown, or what an option sets. */
static node_id *at_start(struct coursing *c, const char *reset)
{
    size_t n = count_of(c);
    node_id *p = NEW_ARRAY(c->f->arena, n, node_id);
    const struct building under = {.figures = c->f, .variant = c->v};
    const struct compiled *u = compiled_of(&under, c->object->id);
    for (size_t k = 0; k < n; k++) {
        const char *key = state_values(c->state)->keys[k];
        p[k] = figure_at(c->f, compiled_figure(c->f, u, PROPERTY_SHARE, key, NULL))->node;
        if (reset && !text_equal(key, reset))
            p[k] = NODE_NONE;
    }
    return p;
}

static void add_mean(struct coursing *c, uint32_t first, uint32_t years)
{
    struct graph *g = c->f->graph;
    size_t n = count_of(c);
    node_id *terms = NEW_ARRAY(c->f->arena, years, node_id);
    node_id count = compile_const(&c->b, years - first, dim_number, NULL);
    node_id *mean = NEW_ARRAY(c->f->arena, n, node_id);
    for (size_t k = 0; k < n; k++) {
        for (uint32_t y = first; y < years; y++)
            terms[y - first] = c->out->in_year[y * n + k];
        node_id sum = years - first == 1 ? terms[0] : graph_op(g, OP_SUM, years - first, terms);
        mean[k] = graph_op2(g, OP_DIVIDE, sum, count);
        compiled_add(&c->b, PROPERTY_SHARE, state_values(c->state)->keys[k], "mean", mean[k], NULL,
                     NULL);
    }
    c->out->mean = mean;
}

/* Years before something sets the state have no meaning, and are as its first one. */
static void add_years(struct coursing *c, const char *reset, double when)
{
    const struct register_settings *s = c->f->base->settings;
    uint32_t years = horizon_length(s), first = 0;
    size_t n = count_of(c);
    double begin = reset ? fmax(when, 0) : 0;
    node_id *in_year = NEW_ARRAY(c->f->arena, years * n, node_id), *p = at_start(c, reset);
    if (begin >= years)
        begin = years - 1;
    first = (uint32_t)floor(begin);
    for (uint32_t y = first; y < years; y++) {
        double length = y == first ? y + 1 - begin : 1;
        node_id *next = NEW_ARRAY(c->f->arena, n, node_id);
        carry(c, p, length, true, &in_year[y * n]);
        carry(c, p, length, false, next);
        for (size_t k = 0; k < n && y + 1 < years; k++)
            compiled_add(&c->b, PROPERTY_BEGINS, state_values(c->state)->keys[k],
                         horizon_label(c->f->arena, s, y + 1), next[k], NULL, NULL);
        p = next;
    }
    for (uint32_t y = 0; y < years; y++)
        for (size_t k = 0; k < n; k++) {
            if (y < first)
                in_year[y * n + k] = in_year[first * n + k];
            else
                compiled_add(&c->b, PROPERTY_SHARE, state_values(c->state)->keys[k],
                             horizon_label(c->f->arena, s, y), in_year[y * n + k], NULL, NULL);
        }
    c->out->in_year = in_year;
    add_mean(c, first, years);
}

ohmen_status compile_state_course(struct figures *f, const struct variant *v, const char *id,
                                  const struct state_course **out, ohmen_error *e)
{
    const struct variant *projected;
    const struct compiled *own;
    struct failings failing = {0};
    double when = 0;
    ohmen_status status = figures_compile(f, v, id, &own, e);
    if (status == OHMEN_OK)
        status = variant_project(f, v, id, &projected, e);
    if (status != OHMEN_OK)
        return status;
    struct coursing c = {.f = f, .v = projected, .object = model_find(projected->model, id)};
    c.state = c.object->data;
    c.b = (struct building){.figures = f, .variant = projected};
    const struct compiled *known = compiled_part(&c.b, id, PART_STATE_COURSE);
    if (known) {
        *out = known->exports;
        return OHMEN_OK;
    }
    status = compile_failings(&c, &failing, e);
    if (status != OHMEN_OK)
        return status;
    compiled_begin_part(f, projected, c.object, id, PART_STATE_COURSE, &c.b);
    c.out = NEW(f->arena, struct state_course);
    add_transitions(&c);
    add_failures(&c, &failing);
    add_years(&c, states_reset(f, projected, c.state, &when), when);
    c.b.unit->exports = c.out;
    c.b.unit->also = own->also;
    ((struct compiled *)own)->also = c.b.unit;
    compiled_end(&c.b);
    *out = c.out;
    return OHMEN_OK;
}
