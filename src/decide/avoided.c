/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sums over hazards and time of what they do, now and under options. All hazards and their
 * consequences were compiled before, under every variant of a stretch. */
#include "decide/avoided.h"

#include <math.h>

#include "figure/consequences.h"

/* What a hazard does: over the horizon, and by slot of its years. */
struct doing {
    node_id mean; /* NODE_NONE: nothing */
    size_t n;
    const figure_id *yearly;
    const uint32_t *of_year; /* NULL: all years are alike */
};

node_id worth_sum(struct worth *x, size_t n, const node_id *nodes, struct dim d)
{
    if (n == 0)
        return compile_const(&x->b, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(x->f->graph, OP_SUM, n, nodes);
}

/* --- one hazard --- */

static struct doing of_risk(const struct worth *x, const struct compiled *hazard)
{
    const struct hazard_exports *h = hazard->exports;
    return (struct doing){figure_at(x->f, hazard->main)->node, h->n_yearly, h->yearly, h->of_year};
}

/* NULL: there is no such hazard, which does nothing. */
static struct doing doing_of(const struct worth *x, const struct measure *m,
                             const struct compiled *hazard)
{
    struct doing nothing = {.mean = NODE_NONE};
    if (!hazard)
        return nothing;
    if (m->property == PROPERTY_RISK)
        return of_risk(x, hazard);
    const struct hazard_exports *h = hazard->exports;
    struct building under = {.figures = x->f, .variant = hazard->variant};
    const struct compiled *part = compiled_part(&under, hazard->id, PART_CONSEQUENCES);
    const struct consequence *c = consequence_of(part, m->property, m->of);
    if (!c)
        return nothing;
    return (struct doing){figure_at(x->f, c->mean)->node, h->n_yearly, c->yearly, h->of_year};
}

/* Is it counted by the year, or per time? */
static bool is_per_time(const struct measure *m)
{
    return !dim_equal(m->dim, m->sum);
}

/* What is counted by the year is that per time, over time. */
static node_id as_counted(struct worth *x, const struct measure *m, node_id worth)
{
    return is_per_time(m) ? worth : graph_op2(x->f->graph, OP_DIVIDE, worth, x->money.one_year);
}

/* The same in each year between two times. */
static node_id steadily(struct worth *x, const struct measure *m, node_id each, double from,
                        double to)
{
    node_id years = money_annuity(&x->money, from, to);
    return as_counted(x, m, graph_op2(x->f->graph, OP_MULTIPLY, years, each));
}

/* Present value of what is one of each year. */
static node_id by_year(struct worth *x, const struct measure *m, const struct doing *d, double from,
                       double to)
{
    node_id *nodes = NEW_ARRAY(x->f->arena, d->n, node_id);
    for (size_t i = 0; i < d->n; i++)
        nodes[i] = figure_at(x->f, d->yearly[i])->node;
    struct years y = {.from = from, .to = to, .of_year = d->of_year + (size_t)floor(from)};
    y.n_years = to > from ? (size_t)(ceil(to) - floor(from)) : 0;
    return as_counted(x, m, money_years(&x->money, d->n, nodes, &y));
}

/* NODE_NONE where nothing is done. */
static node_id over(struct worth *x, const struct measure *m, const struct doing *d, double from,
                    double to)
{
    if (d->mean == NODE_NONE)
        return NODE_NONE;
    if (d->of_year)
        return by_year(x, m, d, from, to);
    return steadily(x, m, d->mean, from, to);
}

/* before - after, either of which may be nothing, but not both. */
static node_id less(struct worth *x, node_id before, node_id after)
{
    if (after == NODE_NONE)
        return before;
    if (before == NODE_NONE)
        return graph_op1(x->f->graph, OP_NEGATE, after);
    return graph_op2(x->f->graph, OP_SUBTRACT, before, after);
}

/* --- all hazards --- */

node_id measure_over(struct worth *x, const struct measure *m, size_t n_hazards,
                     const struct compiled *const *hazards, double from, double to)
{
    node_id *alike = NEW_ARRAY(x->f->arena, n_hazards, node_id);
    node_id *parts = NEW_ARRAY(x->f->arena, n_hazards + 1, node_id);
    size_t n = 0, n_parts = 0;
    for (size_t i = 0; i < n_hazards; i++) {
        struct doing d = doing_of(x, m, hazards[i]);
        if (d.mean != NODE_NONE && d.of_year)
            parts[n_parts++] = by_year(x, m, &d, from, to);
        else if (d.mean != NODE_NONE)
            alike[n++] = d.mean;
    }
    if (n > 0)
        parts[n_parts++] = steadily(x, m, worth_sum(x, n, alike, m->dim), from, to);
    return n_parts ? worth_sum(x, n_parts, parts, m->sum) : NODE_NONE;
}

node_id measure_now(struct worth *x, const struct measure *m)
{
    const struct compiled **now = NEW_ARRAY(x->f->arena, x->w->hazards.n, const struct compiled *);
    for (size_t i = 0; i < x->w->hazards.n; i++)
        now[i] = x->w->hazards.at[i].now;
    node_id sum = measure_over(x, m, x->w->hazards.n, now, 0, x->w->horizon);
    if (sum == NODE_NONE)
        sum = steadily(x, m, worth_sum(x, 0, NULL, m->dim), 0, x->w->horizon);
    return sum;
}

/* The hazard under a variant; NULL where that has no such hazard. */
static const struct compiled *hazard_under(struct worth *x, const struct variant *v, const char *id)
{
    struct building under = {.figures = x->f, .variant = v};
    return model_find(v->model, id) ? compiled_of(&under, id) : NULL;
}

struct nodes ARRAY_BODY(node_id);

/* Avoided of one hazard between two times; appends nothing where it does nothing. */
static void add_between(struct worth *x, const struct measure *m, const struct compiled *now,
                        const struct compiled *then, double from, double to, struct nodes *out)
{
    struct doing p = doing_of(x, m, now), q = doing_of(x, m, then);
    if (p.mean == NODE_NONE && q.mean == NODE_NONE)
        return;
    node_id avoided;
    if (p.of_year || q.of_year)
        avoided = less(x, over(x, m, &p, from, to), over(x, m, &q, from, to));
    else
        avoided = steadily(x, m, less(x, p.mean, q.mean), from, to);
    *array_push(x->f->arena, out) = avoided;
}

/* One term for each time in which the same options change the hazard. Times of options that do
 * not reach it do not cut it, so that options on different hazards are worth together what they
 * are worth alone. */
static void add_avoided(struct worth *x, const struct measure *m, const struct weighed_hazard *h,
                        const struct stretches *s, struct nodes *out)
{
    for (size_t i = 0, end; i < s->n; i = end) {
        const struct compiled *then = hazard_under(x, s->at[i].variant, h->id);
        end = i + 1;
        while (end < s->n && hazard_under(x, s->at[end].variant, h->id) == then)
            end++;
        if (then != h->now)
            add_between(x, m, h->now, then, s->at[i].from, s->at[end - 1].to, out);
    }
}

node_id measure_avoided(struct worth *x, const struct measure *m, const struct stretches *s)
{
    struct nodes parts = {0};
    for (size_t i = 0; i < x->w->hazards.n; i++)
        add_avoided(x, m, &x->w->hazards.at[i], s, &parts);
    return worth_sum(x, parts.n, parts.at, m->sum);
}

node_id measure_avoided_yearly(struct worth *x, const struct measure *m,
                               const struct alternative *alt)
{
    struct nodes parts = {0};
    for (size_t i = 0; i < x->w->hazards.n; i++) {
        const struct compiled *now = x->w->hazards.at[i].now, *then = alt->hazards[i];
        struct doing p = doing_of(x, m, now), q = doing_of(x, m, then);
        if (now != then && (p.mean != NODE_NONE || q.mean != NODE_NONE))
            *array_push(x->f->arena, &parts) = less(x, p.mean, q.mean);
    }
    return worth_sum(x, parts.n, parts.at, m->dim);
}
