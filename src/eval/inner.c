/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages over what varies (inner.h): which nodes, their points, and the evaluation. Owns what it
 * makes in the arena it was given.
 *
 * Going down from a root, rules that are linear in arguments without an uncertain input in common
 * let averages through: the average of the node is the rule of the averages of its arguments. The
 * first node on the way of which that cannot be said, and in which a varying input is curved, is
 * integrated as a whole. */
#include "eval/inner.h"

#include "math/draw.h"

#include <stdlib.h>
#include <string.h>

/* Levels of the rules of one and of two inputs (steps of 1/8 and 1/2), and what is left out. */
static const size_t level_of[3] = {0, 3, 1};
#define LEAST_WEIGHT 1e-15

/* Of more inputs: one set of scrambled points. */
enum { INNER_LOG2 = 10, INNER_SEED = 2 };

/* ---- which nodes ---- */

struct search {
    const struct graph *g;
    const struct mean_source *source;
    ARRAY(node_id) stack;
    ARRAY(bool) seen;
};

static size_t varying_of(const struct mean_source *source, size_t n, const uint32_t *inputs,
                         uint32_t *out)
{
    size_t kept = 0;
    for (size_t i = 0; i < n; i++)
        if (source->varies(source->ctx, inputs[i])) {
            if (out)
                out[kept] = inputs[i];
            kept++;
        }
    return kept;
}

static bool is_curved_in_varying(const struct search *x, node_id n)
{
    size_t count;
    const uint32_t *curved = graph_curved(x->g, n, &count);
    return varying_of(x->source, count, curved, NULL) > 0;
}

/* A result of a DIAGRAM stands for it: a DIAGRAM has no single value. */
static bool bends(const struct graph *g, node_id n)
{
    if (graph_at(g, n)->op == OP_PICK)
        return graph_bends(g, graph_args(g, n)[0]);
    return graph_bends(g, n);
}

static void push(struct arena *a, struct search *x, node_id n)
{
    if (x->seen.at[n])
        return;
    x->seen.at[n] = true;
    *array_push(a, &x->stack) = n;
}

static int by_number(const void *p, const void *q)
{
    node_id a = *(const node_id *)p, b = *(const node_id *)q;
    return (a > b) - (a < b);
}

void inner_find(struct arena *a, const struct graph *g, const struct mean_source *source,
                size_t n_roots, const node_id *roots, struct inner_nodes *out)
{
    struct search x = {.g = g, .source = source};
    size_t first = 0;
    while (first < n_roots && !is_curved_in_varying(&x, roots[first]))
        first++;
    if (first == n_roots)
        return;
    array_reserve(a, &x.seen, graph_size(g));
    for (size_t i = 0; i < n_roots; i++)
        push(a, &x, roots[i]);
    while (x.stack.n) {
        node_id n = x.stack.at[--x.stack.n];
        if (graph_at(g, n)->op == OP_HELD || !is_curved_in_varying(&x, n))
            continue;
        if (bends(g, n)) {
            *array_push(a, out) = n;
            continue;
        }
        for (uint32_t i = 0; i < graph_at(g, n)->n; i++)
            push(a, &x, graph_args(g, n)[i]);
    }
    if (out->n > 1)
        qsort(out->at, out->n, sizeof *out->at, by_number);
}

/* ---- points ---- */

static void add_rule_point(struct inner *x, double weight, const double *at)
{
    x->weight[x->n_points] = weight;
    memcpy(x->x + x->n_points * x->n_varying, at, x->n_varying * sizeof *at);
    x->n_points++;
}

static void normalise(struct inner *x)
{
    double total = 0;
    for (size_t i = 0; i < x->n_points; i++)
        total += x->weight[i];
    for (size_t i = 0; i < x->n_points; i++)
        x->weight[i] /= total;
}

static void make_room(struct arena *a, struct inner *x, size_t n)
{
    x->weight = NEW_ARRAY(a, n, double);
    x->x = NEW_ARRAY(a, n * x->n_varying, double);
}

static void one_rule(struct arena *a, struct inner *x, const struct spread *s)
{
    size_t n = s->n[level_of[1]];
    make_room(a, x, n);
    for (size_t i = 0; i < n; i++)
        if (s->is_discrete || s->weight[i] >= LEAST_WEIGHT)
            add_rule_point(x, s->weight[i], &s->x[i]);
    normalise(x);
}

static void two_rules(struct arena *a, struct inner *x, const struct spread *s,
                      const struct spread *t)
{
    size_t n = s->n[level_of[2]], m = t->n[level_of[2]];
    make_room(a, x, n * m);
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < m; k++) {
            double weight = s->weight[i] * t->weight[k];
            if (weight >= LEAST_WEIGHT || (s->is_discrete && t->is_discrete))
                add_rule_point(x, weight, (double[]){s->x[i], t->x[k]});
        }
    normalise(x);
}

static ohmen_status scrambled_points(struct arena *a, struct inner *x, const struct spreads *s,
                                     const uint32_t *varying, ohmen_error *e)
{
    enum { POINTS = 1 << INNER_LOG2 };
    const struct mean_source *source = s->source;
    struct draw_plan plan = {DRAW_SCRAMBLED, INNER_LOG2, INNER_SEED, ISA_plain};
    struct draw_input *inputs = NEW_ARRAY(a, x->n_varying, struct draw_input);
    struct draws *d;
    for (size_t i = 0; i < x->n_varying; i++) {
        inputs[i].name = source->name(source->ctx, varying[i]);
        inputs[i].times = source->dist(source->ctx, varying[i], &inputs[i].dist);
        inputs[i].place = (unsigned)i;
    }
    ohmen_status status = draws_new(a, &plan, x->n_varying, inputs, &d, e);
    if (status != OHMEN_OK)
        return status;
    double *work = NEW_ARRAY(a, draws_work(d), double), *at = NEW_ARRAY(a, POINTS, double);
    make_room(a, x, POINTS);
    x->n_points = POINTS;
    for (size_t i = 0; i < x->n_varying; i++) {
        draws_fill(d, i, 0, work, at);
        for (size_t k = 0; k < POINTS; k++)
            x->x[k * x->n_varying + i] = at[k];
    }
    for (size_t k = 0; k < POINTS; k++)
        x->weight[k] = 1.0 / POINTS;
    return OHMEN_OK;
}

static ohmen_status find_points(struct arena *a, struct inner *x, struct spreads *s,
                                const uint32_t *varying, ohmen_error *e)
{
    struct spread *of[2];
    if (x->n_varying > 2)
        return scrambled_points(a, x, s, varying, e);
    for (size_t i = 0; i < x->n_varying; i++) {
        of[i] = spreads_find(s, varying[i]);
        ohmen_status status = spread_rule(s, of[i], level_of[x->n_varying], e);
        if (status != OHMEN_OK)
            return status;
    }
    if (x->n_varying == 1)
        one_rule(a, x, of[0]);
    else
        two_rules(a, x, of[0], of[1]);
    return OHMEN_OK;
}

/* ---- beginning ---- */

/* The inputs of the tape: the unknown ones and those that are averaged over, in rising order. */
static uint32_t *merge_inputs(struct arena *a, struct inner *x, const uint32_t *varying)
{
    size_t n = x->n_unknown + x->n_varying;
    uint32_t *all = NEW_ARRAY(a, n, uint32_t);
    x->place = NEW_ARRAY(a, n, uint32_t);
    for (size_t i = 0, u = 0, v = 0; i < n; i++) {
        bool takes = v == x->n_varying || (u < x->n_unknown && x->unknown[u] < varying[v]);
        all[i] = takes ? x->unknown[u] : varying[v];
        x->place[i] = (uint32_t)(takes ? u++ : x->n_unknown + v++);
    }
    return all;
}

ohmen_status inner_new(struct arena *a, struct eval *v, struct spreads *s, enum isa isa,
                       node_id node, struct inner **out, ohmen_error *e)
{
    struct inner *x = NEW(a, struct inner);
    size_t n_all, n_curved;
    const uint32_t *all = graph_uncertain(v->g, node, &n_all);
    const uint32_t *curved = graph_curved(v->g, node, &n_curved);
    uint32_t *varying = NEW_ARRAY(a, n_curved, uint32_t);
    x->node = node;
    x->n_varying = varying_of(s->source, n_curved, curved, varying);
    x->unknown = NEW_ARRAY(a, n_all, uint32_t);
    for (size_t i = 0; i < n_all; i++)
        if (!s->source->varies(s->source->ctx, all[i]))
            x->unknown[x->n_unknown++] = all[i];
    ohmen_status status = find_points(a, x, s, varying, e);
    if (status != OHMEN_OK)
        return status;
    struct tape_inputs in = {.n = x->n_unknown + x->n_varying};
    in.inputs = merge_inputs(a, x, varying);
    x->tape = tape_new(a, v, isa, &in, 1, &node);
    *out = x;
    return OHMEN_OK;
}

/* ---- lanes ---- */

struct inner_work {
    struct tape_work *tape;
    const double **in;
    double **varying; /* rows of the varying inputs */
    double *at;
};

struct inner_work *inner_work_new(struct arena *a, const struct inner *x, size_t block)
{
    struct inner_work *w = NEW(a, struct inner_work);
    w->tape = tape_work_new(a, x->tape, block);
    w->in = NEW_ARRAY(a, x->n_unknown + x->n_varying, const double *);
    w->varying = NEW_ARRAY(a, x->n_varying, double *);
    for (size_t i = 0; i < x->n_varying; i++)
        w->varying[i] = NEW_ARRAY(a, block, double);
    w->at = NEW_ARRAY(a, block, double);
    return w;
}

void inner_run(const struct inner *x, struct inner_work *w, size_t n, const double *const *rows,
               double *out)
{
    for (size_t i = 0; i < x->n_unknown + x->n_varying; i++)
        w->in[i] =
            x->place[i] < x->n_unknown ? rows[x->place[i]] : w->varying[x->place[i] - x->n_unknown];
    for (size_t k = 0; k < n; k++)
        out[k] = 0;
    for (size_t p = 0; p < x->n_points; p++) {
        for (size_t i = 0; i < x->n_varying; i++)
            for (size_t k = 0; k < n; k++)
                w->varying[i][k] = x->x[p * x->n_varying + i];
        tape_run(x->tape, w->tape, n, w->in, &w->at);
        for (size_t k = 0; k < n; k++)
            out[k] += x->weight[p] * w->at[k];
    }
}
