/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How often hazards occur: an expression of rates, the same in all years, or, where a rate or the
 * hazard itself has a trend, year by year; then the frequency is the mean over the horizon.
 *
 * The unit stands apart from the hazard's own, since elements may ask for it (revealed-by) while
 * the hazard's response asks for them. */
#include <math.h>

#include "evidence/trend.h"
#include "figure/horizon.h"
#include "figure/span.h"

/* --- what has a trend --- */

static bool quantity_is_trended(const struct building *b, const struct quantity *q);

static bool rate_is_trended(const struct building *b, const struct object *o)
{
    struct trend t;
    return trend_of(o->data, o->id, b->figures->date, &t, NULL) == OHMEN_OK && !trend_is_flat(&t);
}

static bool is_trended(const struct building *b, const char *id)
{
    const struct object *o = model_find(b->variant->model, id);
    if (!o)
        return false;
    if (o->kind == KIND_RATE)
        return rate_is_trended(b, o);
    if (o->kind == KIND_HAZARD) {
        const struct hazard *h = o->data;
        return h->growth || quantity_is_trended(b, h->frequency);
    }
    if (o->kind != KIND_VALUE)
        return false;
    const struct value *v = o->data;
    return quantity_is_trended(b, v->is ? v->is : v->varies);
}

struct looking {
    const struct building *b;
    bool found;
};

static void look_for_trend(void *ctx, const struct expr *e)
{
    struct looking *l = ctx;
    bool names = e->op == EXPR_NAME || e->op == EXPR_FREQUENCY;
    l->found = l->found || (names && is_trended(l->b, e->name));
}

static bool quantity_is_trended(const struct building *b, const struct quantity *q)
{
    struct looking l = {b, false};
    if (q->shape == SHAPE_EXPRESSION)
        expr_walk(q->expr, look_for_trend, &l);
    return l.found;
}

/* --- a year --- */

static struct window from_evaluation(const struct building *b)
{
    double today = horizon_years(b->figures->base->settings, b->figures->date);
    return (struct window){b->year->from - today, b->year->to - today};
}

static node_id times(struct building *b, node_id n, double factor)
{
    return graph_op2(b->figures->graph, OP_MULTIPLY, n, compile_const(b, factor, dim_number, NULL));
}

/* The mean of a trend over the year; before its ageing begins nothing is there to age. */
static double trend_in(const struct building *b, const struct trend *t)
{
    struct window w = from_evaluation(b);
    double begin = t->ages ? fmax(w.from, -t->age) : w.from;
    return begin < w.to ? trend_mean(t, begin, w.to) * (w.to - begin) / (w.to - w.from) : 0;
}

static node_id grown(struct building *b, node_id n, const struct hazard *h)
{
    if (!h->growth)
        return n;
    struct trend t = {.growth = expr_constant(h->growth->expr)};
    return times(b, n, trend_in(b, &t));
}

node_id compile_in_year(struct building *b, const char *id)
{
    const struct object *o = model_find(b->variant->model, id);
    struct trend t;
    switch (o->kind) {
    case KIND_RATE:
        trend_of(o->data, id, b->figures->date, &t, NULL);
        return times(b, compiled_main_node(b, id), trend_in(b, &t));
    case KIND_HAZARD:
        return grown(b, compile_expr(b, ((const struct hazard *)o->data)->frequency->expr),
                     o->data);
    default: {
        const struct value *v = o->data;
        return compile_expr(b, (v->is ? v->is : v->varies)->expr);
    }
    }
}

bool compile_has_year(const struct building *b, const char *id)
{
    return b->year && is_trended(b, id);
}

/* --- the unit --- */

static node_id add_years(struct building *b, const struct hazard *h, struct frequency_exports *x)
{
    struct figures *f = b->figures;
    uint32_t n = horizon_length(f->base->settings);
    node_id *yearly = NEW_ARRAY(f->arena, n, node_id);
    uint32_t *of_year = NEW_ARRAY(f->arena, n, uint32_t);
    struct window *windows = NEW_ARRAY(f->arena, n, struct window);
    for (uint32_t y = 0; y < n; y++) {
        of_year[y] = y;
        windows[y] = (struct window){y, y + 1.0};
        b->year = &windows[y];
        yearly[y] = grown(
            b,
            h->frequency->shape == SHAPE_EXPRESSION ? compile_expr(b, h->frequency->expr) : x->mean,
            h);
        compiled_add(b, PROPERTY_FREQUENCY, horizon_label(f->arena, f->base->settings, y), NULL,
                     yearly[y], NULL, NULL);
    }
    b->year = NULL;
    x->yearly = yearly;
    struct span all = {{n, windows}, true, n, of_year, 0};
    return span_mean(b, &all, yearly);
}

void compile_frequency_unit(struct figures *f, const struct variant *v, const struct object *o)
{
    const struct hazard *h = o->data;
    const struct quantity *q = h->frequency;
    struct frequency_exports *x = NEW(f->arena, struct frequency_exports);
    struct building b;
    compiled_begin_part(f, v, o, o->id, PART_FREQUENCY, &b);
    b.unit->exports = x;
    bool trended = is_trended(&b, o->id);
    x->mean = NODE_NONE;
    if (!trended || q->shape != SHAPE_EXPRESSION)
        x->mean = compile_quantity(&b, q);
    if (trended)
        x->mean = add_years(&b, h, x);
    b.unit->main = compiled_add(&b, PROPERTY_FREQUENCY, NULL, NULL, x->mean, h->source,
                                trended ? NULL : quantity_reads(f, q));
    compiled_end(&b);
}
