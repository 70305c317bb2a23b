/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How elements fail: on demand, in repair, in tests, and undetected until a test or a demand
 * shows it. Formulas in docs/methods.md ("Elements in time").
 *
 * What an element does not state it takes from its type, by the same node: so elements of one
 * type share what is unknown of it. */
#include <math.h>

#include "evidence/posterior.h"
#include "figure/horizon.h"
#include "figure/span.h"
#include "figure/states.h"

/* One element under construction. */
struct element_building {
    struct building *b;
    const struct object *object;
    const struct element *x;
    const struct element_type *t; /* or NULL */
    const struct compiled *type;  /* its unit, or NULL */
    struct element_exports *out;
};

/* --- what is stated --- */

static node_id stated(struct building *b, enum property p, const struct quantity *q,
                      const char *source)
{
    node_id n = compile_quantity(b, q);
    compiled_add(b, p, NULL, NULL, n, source, quantity_reads(b->figures, q));
    return n;
}

static const char *first_source(const char *own, const char *of_object)
{
    return own ? own : of_object;
}

static node_id stated_estimate(struct building *b, enum property p, const struct estimate *e,
                               const char *source)
{
    return e ? stated(b, p, e->is, first_source(e->source, source)) : NODE_NONE;
}

static node_id stated_record(struct building *b, enum property p, const struct demand_record *r,
                             const char *source)
{
    if (!r)
        return NODE_NONE;
    return stated(b, p, posterior_demands(b->figures->arena, r), first_source(r->source, source));
}

/* The node of the type's figure. */
static node_id of_type(const struct element_building *m, enum property p)
{
    if (!m->type)
        return NODE_NONE;
    figure_id id = compiled_figure(m->b->figures, m->type, p, NULL, NULL);
    return id == FIGURE_NONE ? NODE_NONE : figure_at(m->b->figures, id)->node;
}

static node_id own_or_type(node_id own, const struct element_building *m, enum property p)
{
    return own != NODE_NONE ? own : of_type(m, p);
}

/* --- kinds --- */

int element_kind(const struct model *m, const struct element *x)
{
    const struct element_type *t = x->type ? model_get(m, KIND_TYPE, x->type) : NULL;
    return x->kind >= 0 || !t ? x->kind : t->kind;
}

static bool is_kind(const struct model *m, const struct element *x, const char *word)
{
    int kind = element_kind(m, x);
    return kind >= 0 && text_equal(element_kinds[kind], word);
}

bool element_is_breaker(const struct model *m, const struct element *x)
{
    return is_kind(m, x, "breaker");
}

bool element_is_tripped(const struct model *m, const struct element *x)
{
    return is_kind(m, x, "breaker") || is_kind(m, x, "trip-circuit");
}

/* --- types --- */

ohmen_status compile_type(struct figures *f, const struct variant *v, const struct object *o,
                          struct compiled **out, ohmen_error *e)
{
    const struct element_type *t = o->data;
    struct building b;
    (void)e;
    compiled_begin(f, v, o, o->id, &b);
    stated_record(&b, PROPERTY_FAILS, t->per_demand, t->source);
    stated_estimate(&b, PROPERTY_UNDETECTED, t->undetected, t->source);
    stated_estimate(&b, PROPERTY_DETECTED, t->detected, t->source);
    if (t->repair)
        stated(&b, PROPERTY_REPAIR, t->repair, t->source);
    if (b.unit->n)
        b.unit->main = b.unit->first;
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- parts that do not change with time --- */

static node_id share_in_repair(const struct element_building *m)
{
    const struct element_exports *x = m->out;
    if (x->detected == NODE_NONE || x->repair == NODE_NONE || m->x->out_while_repaired)
        return NODE_NONE;
    node_id n = graph_op2(m->b->figures->graph, OP_MULTIPLY, x->detected, x->repair);
    compiled_add(m->b, PROPERTY_IN_REPAIR, NULL, NULL, n, NULL, NULL);
    return n;
}

static node_id share_in_test(const struct element_building *m)
{
    const struct test *t = m->x->test;
    if (!t || !t->takes)
        return NODE_NONE;
    node_id takes = compile_quantity(m->b, t->takes), every = compile_quantity(m->b, t->every);
    node_id n = graph_op2(m->b->figures->graph, OP_DIVIDE, takes, every);
    compiled_add(m->b, PROPERTY_IN_TEST, NULL, NULL, n, first_source(t->source, m->x->source),
                 NULL);
    return n;
}

static node_id either(struct graph *g, node_id p, node_id q)
{
    if (p == NODE_NONE || q == NODE_NONE)
        return p == NODE_NONE ? q : p;
    return graph_op2(g, OP_EITHER, p, q);
}

/* --- demands and operations that show failures --- */

static const struct compiled *frequency_unit(const struct building *b, const char *hazard)
{
    return compiled_part(b, hazard, PART_FREQUENCY);
}

/* How often hazards call on the element, taken at its mean: the rate at which demands reveal what
 * has failed does not move with what is unknown of the demands. NODE_NONE for none. */
static node_id called_on(const struct element_building *m)
{
    struct figures *f = m->b->figures;
    const struct names *by = &m->x->revealed_by;
    node_id *parts = NEW_ARRAY(f->arena, by->n, node_id);
    for (size_t i = 0; i < by->n; i++)
        parts[i] = figure_at(f, frequency_unit(m->b, by->at[i])->main)->node;
    if (by->n == 0)
        return NODE_NONE;
    node_id sum = by->n == 1 ? parts[0] : graph_op(f->graph, OP_SUM, by->n, parts);
    return graph_op1(f->graph, OP_HELD, sum);
}

static node_id revealed(const struct element_building *m)
{
    struct figures *f = m->b->figures;
    const struct quantity *often = m->x->exercised;
    node_id called = called_on(m), exercised = NODE_NONE;
    if (often)
        exercised = compile_quantity(m->b, often);
    if (!often && called == NODE_NONE)
        return NODE_NONE;
    node_id sum = !often ? called : exercised;
    if (often && called != NODE_NONE)
        sum = graph_op2(f->graph, OP_ADD, exercised, called);
    const char *reads = called == NODE_NONE ? quantity_reads(f, often) : NULL;
    compiled_add(m->b, PROPERTY_REVEALED, NULL, NULL, sum, m->x->source, reads);
    return sum;
}

/* --- instants --- */

static day later_of(day a, day b)
{
    if (a == DAY_NONE || b == DAY_NONE)
        return a == DAY_NONE ? b : a;
    return a > b ? a : b;
}

/* The first planned test: as stated, or the first whole number of intervals behind `from` that
 * lies behind the day of evaluation. */
static double first_test(const struct figures *f, const struct test *t, double from, double every)
{
    const struct register_settings *s = f->base->settings;
    if (t->next != DAY_NONE)
        return fmax(horizon_years(s, t->next), from);
    double today = horizon_years(s, f->date);
    double k = floor((today - from) / every + 1e-9) + 1; /* on that very day: the one behind it */
    return from + fmax(k, 1) * every;
}

void element_instants(const struct building *b, const struct element *x, struct making *m)
{
    const struct figures *f = b->figures;
    const struct register_settings *s = f->base->settings;
    const struct test *t = x->test;
    day sound = later_of(x->since, x->known), last = t ? t->last : DAY_NONE;
    double every = t ? expr_constant(t->every->expr) : 0;
    struct course c = {.first = INFINITY, .every = every, .fresh = true};
    m->dated = sound != DAY_NONE || last != DAY_NONE || (t && t->next != DAY_NONE);
    if (sound != DAY_NONE)
        c.from = c.born = horizon_years(s, sound);
    if (last != DAY_NONE && (sound == DAY_NONE || last >= sound)) {
        c.from = horizon_years(s, last);
        c.fresh = false;
    } else if (t && sound == DAY_NONE) {
        c.fresh = false;
        if (t->next != DAY_NONE)
            c.from = fmin(horizon_years(s, t->next) - every, 0);
    }
    if (t)
        c.first = m->dated ? first_test(f, t, c.from, every) : every;
    double there = variant_begins(f, b->variant); /* what comes later is taken to be there then */
    c.from = fmin(c.from, there);
    c.born = fmin(c.born, there);
    m->tested = t != NULL;
    m->when = c;
}

/* --- the behaviour --- */

static node_id rate_or_zero(struct building *b, node_id n)
{
    return n == NODE_NONE ? compile_const(b, 0, dim_frequency, NULL) : n;
}

/* What remains in the long run of failures that only demands show: all, where none do. */
static node_id long_run(struct building *b, node_id rate, node_id ending)
{
    struct graph *g = b->figures->graph;
    return graph_op2(g, OP_RATIO, rate, graph_op2(g, OP_ADD, rate, rate_or_zero(b, ending)));
}

struct rates {
    node_id tested, untested; /* or NODE_NONE */
};

static struct rates split_by_test(struct building *b, const struct making *m)
{
    struct graph *g = b->figures->graph;
    if (m->undetected == NODE_NONE)
        return (struct rates){NODE_NONE, NODE_NONE};
    if (!m->tested)
        return (struct rates){NODE_NONE, m->undetected};
    if (m->finds == NODE_NONE)
        return (struct rates){m->undetected, NODE_NONE};
    struct rates r = {
        graph_op2(g, OP_MULTIPLY, m->undetected, m->finds),
        graph_op2(g, OP_MULTIPLY, m->undetected, graph_op1(g, OP_COMPLEMENT, m->finds))};
    compiled_add(b, PROPERTY_TESTED, m->q1, m->q2, r.tested, NULL, NULL);
    compiled_add(b, PROPERTY_UNTESTED, m->q1, m->q2, r.untested, NULL, NULL);
    return r;
}

/* The behaviour as a COURSE; `standing` and the rates are there. */
static void add_course(struct building *b, const struct making *m, node_id standing, struct rates r,
                       struct behaviour *out)
{
    struct figures *f = b->figures;
    node_id none = compile_const(b, 0, dim_number, NULL);
    node_id args[5] = {standing == NODE_NONE ? none : standing, rate_or_zero(b, r.tested),
                       rate_or_zero(b, m->revealed), m->left == NODE_NONE ? none : m->left,
                       rate_or_zero(b, r.untested)};
    out->when = m->when;
    out->timed = true;
    out->ages = r.untested != NODE_NONE;
    out->dated = m->dated || out->ages;
    out->node = graph_course(f->graph, &m->when, args);
    out->course = compiled_add(b, PROPERTY_COURSE, m->q1, m->q2, out->node, NULL, NULL);
}

const struct diagram *variable_itself(struct figures *f)
{
    if (!f->itself) {
        struct arena *scratch = arena_child(f->arena);
        struct diagram_builder *d = diagram_builder_new(scratch);
        bfun fails = diagram_variable(d, 0);
        f->itself = diagram_freeze(f->arena, d, 1, &fails);
        arena_free(scratch);
    }
    return f->itself;
}

/* Failures that no test finds: the mean of their course over the horizon. In the long run alone
 * they would be certain, where demands do not show them either. */
static node_id unfound(struct building *b, const struct making *m, node_id untested)
{
    struct figures *f = b->figures;
    const char *q = m->q1 ? arena_printf(f->arena, "%s.unfound", m->q1) : "unfound";
    struct course when = {m->when.from, INFINITY, 0, m->when.born, true};
    struct window horizon = {fmax(fmax(m->when.from, m->when.born), 0),
                             horizon_length(f->base->settings)};
    struct windows over = {1, &horizon};
    node_id none = compile_const(b, 0, dim_number, NULL);
    node_id args[5] = {none, rate_or_zero(b, NODE_NONE), rate_or_zero(b, m->revealed), none,
                       untested};
    node_id course = graph_course(f->graph, &when, args);
    compiled_add(b, PROPERTY_COURSE, q, m->q2, course, NULL, NULL);
    node_id d = graph_diagram_over(f->graph, variable_itself(f), 1, &course, &over);
    node_id mean = graph_pick_in(f->graph, d, 0, 0);
    compiled_add(b, PROPERTY_STANDING, q, m->q2, mean, NULL, NULL);
    return mean;
}

static node_id standing_of(struct building *b, const struct making *m, struct rates *r)
{
    struct graph *g = b->figures->graph;
    node_id standing = NODE_NONE;
    for (size_t i = 0; i < m->n_standing; i++)
        standing = either(g, standing, m->standing[i]);
    bool settled = !m->dated && m->revealed != NODE_NONE; /* nothing tells when it was sound */
    bool cycles = b->figures->whole_cycles && !settled;
    bool steady = b->figures->base->settings->steady || settled || cycles;
    if (!steady || r->untested == NODE_NONE)
        return standing;
    standing = either(g, standing,
                      cycles ? unfound(b, m, r->untested) : long_run(b, r->untested, m->revealed));
    r->untested = NODE_NONE;
    return standing;
}

/* The mean of a course over its own span, and its value in each year. */
static void add_mean(struct building *b, const struct making *m, struct behaviour *out,
                     struct span *span)
{
    struct figures *f = b->figures;
    const struct behaviour *self = out;
    *span = span_of(f, 1, &self);
    node_id diagram =
        graph_diagram_over(f->graph, variable_itself(f), 1, &out->node, &span->windows);
    node_id *values = NEW_ARRAY(f->arena, span->windows.n, node_id);
    for (uint32_t w = 0; w < span->windows.n; w++) {
        const char *label = span_label(f, span, w);
        values[w] = graph_pick_in(f->graph, diagram, w, 0);
        if (label)
            compiled_add(b, PROPERTY_FAILS,
                         m->q1 ? arena_printf(f->arena, "%s.%s", m->q1, label) : label, m->q2,
                         values[w], NULL, NULL);
    }
    out->fails =
        compiled_add(b, PROPERTY_FAILS, m->q1, m->q2, span_mean(b, span, values), NULL, NULL);
}

struct behaviour compile_behaviour(struct building *b, const struct making *m, struct span *span)
{
    struct behaviour out = {.course = FIGURE_NONE};
    struct rates r = split_by_test(b, m);
    node_id standing = standing_of(b, m, &r);
    bool timed =
        r.tested != NODE_NONE || r.untested != NODE_NONE || (m->tested && m->left != NODE_NONE);
    *span = (struct span){.years = horizon_length(b->figures->base->settings)};
    if (timed) {
        if (standing != NODE_NONE)
            compiled_add(b, PROPERTY_STANDING, m->q1, m->q2, standing, NULL, NULL);
        add_course(b, m, standing, r, &out);
        add_mean(b, m, &out, span);
        return out;
    }
    out.node = standing == NODE_NONE ? compile_const(b, 0, dim_number, NULL) : standing;
    out.fails = compiled_figure(b->figures, b->unit, PROPERTY_FAILS, m->q1, m->q2);
    if (out.fails == FIGURE_NONE)
        out.fails = compiled_add(b, PROPERTY_FAILS, m->q1, m->q2, out.node, NULL, NULL);
    return out;
}

/* --- elements --- */

static bool has_time(const struct element_building *m)
{
    const struct element *x = m->x;
    const struct element_type *t = m->t;
    return x->undetected || x->detected || x->out_of_service || (t && t->undetected) ||
           (t && t->detected) || (x->test && (x->test->takes || x->test->leaves_failed));
}

static bool has_record(const struct element_building *m)
{
    return m->x->per_demand || (m->t && m->t->per_demand);
}

/* Parts of the element as nodes; the failure on demand is the whole where nothing else is. */
static void compile_parts(struct element_building *m)
{
    struct element_exports *x = m->out;
    const struct element *e = m->x;
    enum property p = has_time(m) ? PROPERTY_ON_DEMAND : PROPERTY_FAILS;
    x->on_demand = own_or_type(stated_record(m->b, p, e->per_demand, e->source), m, PROPERTY_FAILS);
    x->undetected =
        own_or_type(stated_estimate(m->b, PROPERTY_UNDETECTED, e->undetected, e->source), m,
                    PROPERTY_UNDETECTED);
    x->detected = own_or_type(stated_estimate(m->b, PROPERTY_DETECTED, e->detected, e->source), m,
                              PROPERTY_DETECTED);
    x->repair =
        own_or_type(e->repair ? stated(m->b, PROPERTY_REPAIR, e->repair, e->source) : NODE_NONE, m,
                    PROPERTY_REPAIR);
    x->finds = x->left = NODE_NONE;
    if (e->test && e->test->finds)
        x->finds = stated(m->b, PROPERTY_FINDS, e->test->finds, e->test->source);
    if (e->test && e->test->leaves_failed)
        x->left = stated(m->b, PROPERTY_LEFT, e->test->leaves_failed, e->test->source);
    x->revealed = revealed(m);
    x->in_repair = share_in_repair(m);
    x->tested = e->test != NULL;
    x->every = e->test ? expr_constant(e->test->every->expr) : 0;
}

static void push(struct making *m, node_id n)
{
    if (n != NODE_NONE)
        m->standing[m->n_standing++] = n;
}

static struct making making_of(struct element_building *m)
{
    struct element_exports *x = m->out;
    struct building *b = m->b;
    struct making k = {
        .undetected = x->undetected, .finds = x->finds, .revealed = x->revealed, .left = x->left};
    node_id out = stated_estimate(b, PROPERTY_OUT, m->x->out_of_service, m->x->source);
    push(&k, x->on_demand);
    push(&k, x->in_repair);
    x->other = either(b->figures->graph, out, share_in_test(m));
    push(&k, x->other);
    element_instants(b, m->x, &k);
    return k;
}

/* Behind all else of the element, whose unknowns keep their numbers. */
static void add_test_costs(const struct element_building *m)
{
    const struct test *t = m->x->test;
    if (!t || !t->costs)
        return;
    node_id costs = compile_quantity(m->b, t->costs), every = compile_quantity(m->b, t->every);
    node_id n = graph_op2(m->b->figures->graph, OP_DIVIDE, costs, every);
    compiled_add(m->b, PROPERTY_TEST_COSTS, NULL, NULL, n, first_source(t->source, m->x->source),
                 NULL);
}

static ohmen_status nothing_known(const struct object *o, ohmen_error *e)
{
    return error_set(
        e, OHMEN_COMPUTE,
        "nothing tells how the element \"%s\" fails: it has neither \"per-demand\" nor "
        "\"undetected\", \"detected\" or \"out-of-service\", nor has its type",
        o->id);
}

ohmen_status compile_element(struct figures *f, const struct variant *v, const struct object *o,
                             struct compiled **out, ohmen_error *e)
{
    struct building b;
    struct element_exports *x = NEW(f->arena, struct element_exports);
    const struct element *data = o->data;
    struct element_building m = {.b = &b, .object = o, .x = data, .out = x};
    m.t = data->type ? model_get(v->model, KIND_TYPE, data->type) : NULL;
    if (!has_time(&m) && !has_record(&m))
        return nothing_known(o, e);
    compiled_begin(f, v, o, o->id, &b);
    m.type = m.t ? compiled_of(&b, data->type) : NULL;
    b.unit->exports = x;
    compile_parts(&m);
    struct making k = making_of(&m);
    x->whole = compile_behaviour(&b, &k, &x->span);
    b.unit->main = x->whole.fails;
    add_test_costs(&m);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}
