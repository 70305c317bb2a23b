/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Worlds: variants of the register in each hidden state. Owns nothing beyond the arena of the
 * figures. */
#include "decide/world.h"

#include <math.h>

#include "figure/consequences.h"
#include "figure/states.h"

/* --- hidden states --- */

static size_t values_of(const struct hidden *h, size_t state)
{
    return state_values(h->states[state]->data)->n;
}

/* The last state changes fastest. */
static size_t stride_of(const struct hidden *h, size_t state)
{
    size_t stride = 1;
    for (size_t i = state + 1; i < h->n_states; i++)
        stride *= values_of(h, i);
    return stride;
}

size_t hidden_value(const struct hidden *h, size_t hidden, size_t state)
{
    return hidden / stride_of(h, state) % values_of(h, state);
}

size_t hidden_with(const struct hidden *h, size_t hidden, size_t state, size_t value)
{
    size_t stride = stride_of(h, state);
    return hidden - hidden_value(h, hidden, state) * stride + value * stride;
}

static const char *value_name(const struct hidden *h, size_t hidden, size_t state)
{
    return state_values(h->states[state]->data)->keys[hidden_value(h, hidden, state)];
}

static const char *hidden_name(struct arena *a, const struct hidden *h, size_t hidden)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < h->n_states; i++)
        text_printf(&t, "%s%s", i ? ", " : "", value_name(h, hidden, i));
    return text_str(&t);
}

static figure_id share_at(const struct worlds *x, size_t hidden, size_t state)
{
    const struct building under = {.figures = x->f, .variant = x->w->alternatives.at[0].variant};
    const struct compiled *u = compiled_of(&under, x->hidden.states[state]->id);
    return compiled_figure(x->f, u, PROPERTY_SHARE, value_name(&x->hidden, hidden, state), NULL);
}

/* The shares of states that are independent multiply, in a section of their own. */
static ohmen_status find_shares(struct worlds *x, ohmen_error *e)
{
    struct hidden *h = &x->hidden;
    struct building b;
    struct graph *g = x->f->graph;
    h->share = NEW_ARRAY(x->f->arena, h->n, node_id);
    h->start = NEW_ARRAY(x->f->arena, h->n, double);
    compiled_begin_part(x->f, x->w->alternatives.at[0].variant, model_find(x->f->base, x->w->id),
                        x->w->id, "hidden states", &b);
    for (size_t k = 0; k < h->n; k++) {
        h->share[k] = h->n_states ? figure_at(x->f, share_at(x, k, 0))->node
                                  : compile_const(&b, 1, dim_number, NULL);
        for (size_t i = 1; i < h->n_states; i++)
            h->share[k] =
                graph_op2(g, OP_MULTIPLY, h->share[k], figure_at(x->f, share_at(x, k, i))->node);
    }
    compiled_end(&b);
    ohmen_status status = figures_evaluate(x->f, e);
    for (size_t k = 0; status == OHMEN_OK && k < h->n; k++)
        h->start[k] = means_value(x->f->means, h->share[k]);
    return status;
}

ohmen_status worlds_begin(struct worlds *x, struct figures *f, struct weighing *w, size_t n,
                          const struct object *const *states, ohmen_error *e)
{
    struct hidden *h = &x->hidden;
    *x = (struct worlds){.f = f, .w = w};
    h->states = arena_copy(f->arena, states, n * sizeof *states);
    h->n_states = n;
    h->n = 1;
    for (size_t i = 0; i < n; i++) {
        const struct compiled *unused;
        ohmen_status status =
            figures_compile(f, w->alternatives.at[0].variant, states[i]->id, &unused, e);
        if (status != OHMEN_OK)
            return status;
        h->n *= values_of(h, i);
        if (h->n > HIDDEN_MOST)
            return error_set(e, OHMEN_COMPUTE,
                             "the unknown states that \"%s\" follows have more than %d values "
                             "together",
                             w->id, HIDDEN_MOST);
    }
    h->names = NEW_ARRAY(f->arena, h->n, const char *);
    for (size_t k = 0; k < h->n; k++)
        h->names[k] = hidden_name(f->arena, h, k);
    return find_shares(x, e);
}

/* --- hazards in hidden states --- */

/* The variant with every followed state fixed. */
static ohmen_status variant_in(struct worlds *x, const struct variant *v, size_t hidden,
                               const struct variant **out, ohmen_error *e)
{
    const struct hidden *h = &x->hidden;
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < h->n_states; i++) {
        const struct object *o = model_find(v->stem->model, h->states[i]->id);
        status = variant_in_state(x->f, v, o ? o : h->states[i], hidden_value(h, hidden, i), &v, e);
    }
    *out = v;
    return status;
}

static ohmen_status compile_hidden(struct worlds *x, struct world *w, size_t hidden, ohmen_error *e)
{
    const struct variant *v;
    size_t n = x->w->hazards.n;
    ohmen_status status = variant_in(x, w->variant, hidden, &v, e);
    for (size_t i = 0; status == OHMEN_OK && i < n; i++) {
        const char *id = x->w->hazards.at[i].id;
        const struct compiled *unused;
        if (!model_find(v->model, id))
            continue;
        status = figures_compile(x->f, v, id, &w->hazards[hidden * n + i], e);
        if (status == OHMEN_OK)
            status = figures_consequences(x->f, v, id, &unused, e);
    }
    return status;
}

/* --- how hidden states follow each other --- */

/* The section of a world's rates under construction. */
struct flowing_states {
    struct worlds *x;
    struct world *w;
    struct building *b;
};

static void add_flow(struct flowing_states *s, size_t from, size_t to, node_id rate)
{
    if (from != to)
        *array_push(s->x->f->arena, &s->w->flows) =
            (struct flow_of_states){(uint32_t)from, (uint32_t)to, rate};
}

static size_t row_named(const struct rows *rows, const char *key)
{
    size_t i = 0;
    while (i < rows->n && !text_equal(rows->keys[i], key))
        i++;
    return i;
}

/* One transition of a state, whatever the others are. */
static void add_transition(struct flowing_states *s, size_t state, size_t from, size_t to,
                           node_id rate)
{
    const struct hidden *h = &s->x->hidden;
    for (size_t k = 0; k < h->n; k++)
        if (hidden_value(h, k, state) == from)
            add_flow(s, k, hidden_with(h, k, state, to), rate);
}

static void add_transitions(struct flowing_states *s, size_t i)
{
    struct figures *f = s->x->f;
    const struct state *state = s->x->hidden.states[i]->data;
    const struct rows *values = state_values(state);
    for (size_t r = 0; r < state->becomes.n; r++) {
        const struct rows *to = &((const struct rows *)state->becomes.at)[r];
        size_t from = row_named(values, state->becomes.keys[r]);
        for (size_t k = 0; k < to->n; k++) {
            const struct quantity *q = ((const struct quantity *const *)to->at)[k];
            const char *name =
                arena_printf(f->arena, "%s/%s", s->x->hidden.states[i]->id, state->becomes.keys[r]);
            node_id n = compile_quantity(s->b, q);
            compiled_add(s->b, PROPERTY_BECOMES, name, to->keys[k], n, state->source,
                         quantity_reads(f, q));
            add_transition(s, i, from, row_named(values, to->keys[k]),
                           graph_op1(f->graph, OP_HELD, n));
        }
    }
}

/* How often a hazard comes to an outcome in a hidden state; NODE_NONE: never. */
static node_id failure_frequency(const struct flowing_states *s, size_t hidden, const char *hazard,
                                 const char *outcome)
{
    const struct worlds *x = s->x;
    for (size_t i = 0; i < x->w->hazards.n; i++) {
        const struct compiled *c = s->w->hazards[hidden * x->w->hazards.n + i];
        if (!c || !text_equal(c->id, hazard))
            continue;
        const struct hazard_exports *y = c->exports;
        size_t k = row_named(&((const struct hazard *)c->object->data)->outcomes, outcome);
        return k < y->n_outcomes ? figure_at(x->f, y->frequency_of[k])->node : NODE_NONE;
    }
    return NODE_NONE;
}

static void add_failures_of(struct flowing_states *s, size_t i, const char *hazard,
                            const char *outcome, size_t to)
{
    const struct hidden *h = &s->x->hidden;
    for (size_t k = 0; k < h->n; k++) {
        node_id n = failure_frequency(s, k, hazard, outcome);
        if (n != NODE_NONE)
            add_flow(s, k, hidden_with(h, k, i, to), graph_op1(s->x->f->graph, OP_HELD, n));
    }
}

static void add_failures(struct flowing_states *s, size_t i)
{
    const struct state *state = s->x->hidden.states[i]->data;
    for (size_t r = 0; r < state->failures.n; r++) {
        const struct rows *to = &((const struct rows *)state->failures.at)[r];
        for (size_t k = 0; k < to->n; k++)
            add_failures_of(s, i, state->failures.keys[r], to->keys[k],
                            row_named(state_values(state), ((const char *const *)to->at)[k]));
    }
}

static ohmen_status enough_flows(const struct worlds *x, const struct world *w, ohmen_error *e)
{
    if (w->flows.n <= CHAIN_MOST_FLOWS)
        return OHMEN_OK;
    return error_set(
        e, OHMEN_COMPUTE,
        "the unknown states that \"%s\" follows have %zu transitions together, at most "
        "%d are possible",
        x->w->id, w->flows.n, CHAIN_MOST_FLOWS);
}

static ohmen_status compile_flows(struct worlds *x, struct world *w, ohmen_error *e)
{
    const struct hidden *h = &x->hidden;
    struct building b;
    struct flowing_states s = {x, w, &b};
    bool evolves = false;
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < h->n_states; i++) {
        evolves = evolves || state_evolves(h->states[i]->data);
        status = compile_references(x->f, w->variant, h->states[i], e);
    }
    if (!evolves || status != OHMEN_OK)
        return status;
    compiled_begin_part(x->f, w->variant, model_find(x->f->base, x->w->id), x->w->id, "transitions",
                        &b);
    for (size_t i = 0; i < h->n_states; i++) {
        add_transitions(&s, i);
        add_failures(&s, i);
    }
    w->unit = b.unit;
    compiled_end(&b);
    return enough_flows(x, w, e);
}

ohmen_status world_of(struct worlds *x, const struct variant *v, struct world **out, ohmen_error *e)
{
    const char *key = arena_printf(x->f->arena, "%p", (const void *)v);
    struct world *w = strmap_get(&x->by_variant, key);
    ohmen_status status = OHMEN_OK;
    *out = w;
    if (w)
        return OHMEN_OK;
    w = NEW(x->f->arena, struct world);
    w->variant = v;
    w->hazards = NEW_ARRAY(x->f->arena, x->hidden.n * x->w->hazards.n, const struct compiled *);
    for (size_t k = 0; status == OHMEN_OK && k < x->hidden.n; k++)
        status = compile_hidden(x, w, k, e);
    if (status == OHMEN_OK)
        status = compile_flows(x, w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(x->f, e);
    if (status != OHMEN_OK)
        return status;
    strmap_set(x->f->arena, &x->by_variant, key, w);
    *out = w;
    return OHMEN_OK;
}

/* --- passages --- */

/* Years are told where it is not one. */
static node_id chain(struct worlds *x, struct building *b, struct chain *c, const node_id *rates,
                     size_t from, size_t to, bool mean)
{
    const struct hidden *h = &x->hidden;
    struct arena *a = x->f->arena;
    const char *end =
        c->years == 1 ? h->names[to] : arena_printf(a, "%s in %.4g a", h->names[to], c->years);
    c->start = (uint32_t)from;
    c->end = (uint32_t)to;
    c->mean = mean;
    node_id n = graph_chain(x->f->graph, c, rates);
    compiled_add(b, mean ? PROPERTY_SPENDS : PROPERTY_PASSES, h->names[from], end, n, NULL, NULL);
    return n;
}

static struct passage *compile_passage(struct worlds *x, struct world *w, double years)
{
    struct arena *a = x->f->arena;
    size_t n = x->hidden.n, n_flows = w->flows.n;
    struct passage *p = NEW(a, struct passage);
    node_id *to = NEW_ARRAY(a, n * n, node_id), *time = NEW_ARRAY(a, n * n, node_id);
    node_id *rates = NEW_ARRAY(a, n_flows, node_id);
    uint32_t *froms = NEW_ARRAY(a, n_flows, uint32_t), *tos = NEW_ARRAY(a, n_flows, uint32_t);
    struct building b;
    for (size_t i = 0; i < n_flows; i++) {
        rates[i] = w->flows.at[i].rate;
        froms[i] = w->flows.at[i].from;
        tos[i] = w->flows.at[i].to;
    }
    struct chain c = {.n_states = (uint32_t)n,
                      .n_flows = (uint32_t)n_flows,
                      .from = froms,
                      .to = tos,
                      .years = years};
    compiled_begin_part(x->f, w->variant, model_find(x->f->base, x->w->id), x->w->id,
                        arena_printf(a, "passage of %g a", years), &b);
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < n; k++) {
            to[i * n + k] = chain(x, &b, &c, rates, i, k, false);
            time[i * n + k] = chain(x, &b, &c, rates, i, k, true);
        }
    b.unit->also = w->unit;
    w->unit = b.unit;
    compiled_end(&b);
    *p = (struct passage){.years = years, .to = to, .time = time};
    return p;
}

static ohmen_status evaluate_passage(struct worlds *x, struct passage *p, ohmen_error *e)
{
    size_t n = x->hidden.n;
    double *values = NEW_ARRAY(x->f->arena, n * n, double);
    double *spent = NEW_ARRAY(x->f->arena, n * n, double);
    ohmen_status status = figures_evaluate(x->f, e);
    for (size_t i = 0; status == OHMEN_OK && i < n * n; i++) {
        values[i] = means_value(x->f->means, p->to[i]);
        spent[i] = means_value(x->f->means, p->time[i]);
    }
    p->p = values;
    p->spent = spent;
    return status;
}

const struct passage *world_passage_known(const struct world *w, double years)
{
    for (size_t i = 0; i < w->passages.n; i++)
        if (w->passages.at[i]->years == years)
            return w->passages.at[i];
    return NULL;
}

ohmen_status world_passage(struct worlds *x, struct world *w, double years,
                           const struct passage **out, ohmen_error *e)
{
    *out = world_passage_known(w, years);
    if (*out)
        return OHMEN_OK;
    struct passage *p = compile_passage(x, w, years);
    *array_push(x->f->arena, &w->passages) = p;
    *out = p;
    return evaluate_passage(x, p, e);
}

node_id world_measure(struct worth *at, const struct worlds *x, const struct world *w,
                      size_t hidden, const struct measure *m, double from, double to)
{
    size_t n = x->w->hazards.n;
    const struct compiled *const *hazards = &w->hazards[hidden * n];
    double year = floor(from);
    if (from == year)
        return measure_over(at, m, n, hazards, from, to);
    node_id before = measure_over(at, m, n, hazards, year, from);
    node_id all = measure_over(at, m, n, hazards, year, to);
    return all == NODE_NONE ? NODE_NONE : graph_op2(at->f->graph, OP_SUBTRACT, all, before);
}
