/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Moving inputs (moving.h). Owns nothing beyond the arena of the figures. */
#include "decide/moving.h"

#include <stdlib.h>

#include "math/elementary.h"

/* Of the trapezoidal rule in z, on each side. */
enum { STEPS = 3 };
static const double STEP = 1.25;
static const double SQRT_HALF = 0.70710678118654752440;

struct targets ARRAY_BODY(node_id);

static void add_nodes(const struct moving *m, struct targets *to)
{
    for (size_t i = 0; i < m->n; i++)
        if (m->nodes[i] != NODE_NONE)
            *array_push(m->f->arena, to) = m->nodes[i];
}

static int by_name(const void *p, const void *q)
{
    const struct turn_input *a = p, *b = q;
    return text_compare(a->name, b->name);
}

/* How often a hazard occurs is left out where it is made of what is stated. */
static void find_inputs(struct moving *m)
{
    struct turn_inputs all = {0};
    turn_inputs_of(m->f, m->w, m->prober, &all);
    for (size_t i = 0; i < all.n; i++)
        if (turn_is_stated(m->f, all.at[i].figure))
            *array_push(m->f->arena, &m->inputs) = all.at[i];
    if (m->inputs.n > 1)
        qsort(m->inputs.at, m->inputs.n, sizeof *m->inputs.at, by_name);
}

static void open_moving(struct moving *m)
{
    struct figures *f = m->f;
    struct targets targets = {0};
    add_nodes(m, &targets);
    /* What is left of other shares must be seen, whether damage follows from it or not. */
    for (figure_id i = 0; i < f->list.n; i++)
        if (figure_at(f, i)->property == PROPERTY_SHARE && !figure_at(f, i)->text)
            *array_push(f->arena, &targets) = figure_at(f, i)->node;
    m->prober = f->points_only ? prober_new(f->arena, f->eval, targets.n, targets.at)
                               : prober_of_means(f->arena, f->means, targets.n, targets.at);
    m->worth = NEW_ARRAY(f->arena, m->n, double);
    m->missing = NEW_ARRAY(f->arena, m->n, double);
    m->checked = NEW_ARRAY(f->arena, f->list.n, figure_id);
    find_inputs(m);
}

void moving_open(struct moving *m, struct figures *f, const struct weighing *w)
{
    node_id *nodes = NEW_ARRAY(f->arena, w->alternatives.n, node_id);
    for (size_t i = 0; i < w->alternatives.n; i++) {
        figure_id net = w->alternatives.at[i].net;
        nodes[i] = net == FIGURE_NONE ? NODE_NONE : figure_at(f, net)->node;
    }
    *m = (struct moving){.f = f, .w = w, .n = w->alternatives.n, .nodes = nodes};
    open_moving(m);
}

void moving_open_nodes(struct moving *m, struct figures *f, size_t n, const node_id *nodes)
{
    *m = (struct moving){.f = f, .n = n, .nodes = nodes};
    open_moving(m);
}

double moving_mean(const struct moving *m, node_id n)
{
    return m->f->points_only ? eval_value(m->f->eval, n) : means_value(m->f->means, n);
}

/* Properties that may have any value need no check. */
static bool is_limited(enum property p)
{
    return !property_allows(p, -1);
}

static void find_checked(struct moving *m)
{
    m->n_checked = 0;
    for (figure_id i = 0; i < m->f->list.n; i++) {
        const struct figure *g = figure_at(m->f, i);
        if (is_limited(g->property) && prober_moves(m->prober, g->node) &&
            graph_at(m->f->graph, g->node)->op != OP_DIAGRAM)
            m->checked[m->n_checked++] = i;
    }
}

static void open_for(struct moving *m, size_t n, const struct turn_input *const *inputs)
{
    struct targets nodes = {0};
    const struct turn_input **moved = NEW_ARRAY(m->f->arena, n, const struct turn_input *);
    m->n_moved = n;
    m->moved = moved;
    for (size_t i = 0; i < n; i++) {
        moved[i] = inputs[i];
        for (size_t k = 0; k < inputs[i]->nodes.n; k++)
            *array_push(m->f->arena, &nodes) = inputs[i]->nodes.at[k].node;
    }
    m->x = NEW_ARRAY(m->f->arena, nodes.n, double);
    prober_open(m->prober, nodes.n, nodes.at);
    find_checked(m);
    for (size_t i = 0; i < m->n; i++)
        m->missing[i] = 0;
}

bool moving_reaches(struct moving *m, const struct turn_input *in)
{
    open_for(m, 1, &in);
    for (size_t i = 0; i < m->n; i++)
        if (m->nodes[i] != NODE_NONE && prober_moves(m->prober, m->nodes[i]))
            return true;
    return false;
}

static bool is_possible(const struct moving *m)
{
    for (size_t i = 0; i < m->n_checked; i++) {
        const struct figure *g = figure_at(m->f, m->checked[i]);
        if (!property_allows(g->property, prober_value(m->prober, g->node)))
            return false;
    }
    return true;
}

bool moving_far(struct moving *m, const double *at)
{
    size_t node = 0;
    for (size_t i = 0; i < m->n_moved; i++)
        for (size_t k = 0; k < m->moved[i]->nodes.n; k++)
            m->x[node++] = m->moved[i]->nodes.at[k].times * at[i];
    if (!prober_at(m->prober, m->x))
        return false;
    for (size_t i = 0; i < m->n; i++) {
        m->worth[i] = m->missing[i];
        if (m->nodes[i] != NODE_NONE)
            m->worth[i] += prober_value(m->prober, m->nodes[i]);
    }
    return true;
}

bool moving_to(struct moving *m, const double *at)
{
    return moving_far(m, at) && is_possible(m);
}

/* --- what is missing --- */

struct weighted {
    double at, weight;
};
struct spread_points ARRAY_BODY(struct weighted);

static void add_normal_points(const struct moving *m, const struct quantity *q,
                              struct spread_points *out)
{
    for (int i = -STEPS; i <= STEPS; i++) {
        double z = i * STEP, x;
        ohmen_error unused = OHMEN_ERROR_INIT;
        double p = math_erfc(-z * SQRT_HALF) / 2, rest = math_erfc(z * SQRT_HALF) / 2;
        if (quantity_tail(q, p, rest, &x, &unused) == OHMEN_OK)
            *array_push(m->f->arena, out) = (struct weighted){x, math_exp(-z * z / 2)};
    }
}

/* Where an input may stand; at its mean alone where it is certain, or all is a line in it. */
static void find_spread(struct moving *m, const struct turn_input *in, struct spread_points *out)
{
    const struct quantity *q = turn_unknown(m->f, in->figure);
    open_for(m, 1, &in);
    if (!q || prober_is_linear(m->prober))
        *array_push(m->f->arena, out) = (struct weighted){in->now, 1};
    else if (q->shape == SHAPE_DISCRETE)
        for (size_t i = 0; i < q->n; i++)
            *array_push(m->f->arena, out) =
                (struct weighted){q->values[i] * q->times, q->probabilities[i]};
    else
        add_normal_points(m, q, out);
}

/* Adds up what the prober gives, over all points of one or two inputs; the weight of those that
 * are possible. */
static double add_up(struct moving *m, const struct spread_points *spread, double *sum)
{
    static const struct weighted nowhere = {0, 1};
    size_t n = m->n_moved > 1 ? spread[1].n : 1;
    double weight = 0;
    for (size_t i = 0; i < spread[0].n; i++)
        for (size_t k = 0; k < n; k++) {
            struct weighted x = spread[0].at[i], y = m->n_moved > 1 ? spread[1].at[k] : nowhere;
            if (!moving_to(m, (double[]){x.at, y.at}))
                continue;
            weight += x.weight * y.weight;
            for (size_t j = 0; j < m->n; j++)
                sum[j] += x.weight * y.weight * m->worth[j];
        }
    return weight;
}

static void find_missing(struct moving *m, const struct spread_points *spread)
{
    double *sum = NEW_ARRAY(m->f->arena, m->n, double);
    double weight = add_up(m, spread, sum);
    for (size_t i = 0; i < m->n && weight > 0; i++)
        if (m->nodes[i] != NODE_NONE)
            m->missing[i] = moving_mean(m, m->nodes[i]) - sum[i] / weight;
}

void moving_take(struct moving *m, size_t n, const struct turn_input *const *inputs)
{
    struct spread_points spread[2] = {0};
    const struct turn_input *all[] = {inputs[0], n > 1 ? inputs[1] : NULL};
    open_for(m, n, all);
    if (prober_is_exact(m->prober))
        return;
    for (size_t i = 0; i < n; i++)
        find_spread(m, all[i], &spread[i]);
    open_for(m, n, all);
    find_missing(m, spread);
}

void moving_take_bare(struct moving *m, size_t n, const struct turn_input *const *inputs)
{
    open_for(m, n, inputs);
}

size_t moving_best(const struct moving *m, const double *worth)
{
    const struct alternative *all = m->w->alternatives.at;
    size_t best = 0;
    for (size_t i = 1; i < m->w->alternatives.n; i++)
        if (worth[i] > worth[best] ||
            (worth[i] == worth[best] && text_compare(all[i].name, all[best].name) < 0))
            best = i;
    return best;
}
