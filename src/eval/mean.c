/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means: one pass over the nodes in the order of their numbers. A node without curved inputs has
 * its point value for a mean and is not kept. Of the others, one that bends is integrated
 * (knot.c); any other gets what its rule makes of the means of its arguments, for which these
 * are put in place of the point values for a moment.
 *
 * Owns the means of curved nodes. Those of a DIAGRAM, which has many, lie in the results of the
 * evaluation, and its mean is their place, as its value is. Invariant: outside means_update the
 * values of the evaluation are point values. */
#include "eval/mean.h"

#include "eval/knot.h"

#include <assert.h>
#include <math.h>

/* The mean of one curved node: mean[first], or as many as there are sets where something below
 * it was sampled. */
struct curved {
    size_t first;
    uint32_t sets;
    enum mean_method method;
};

/* A node that has its mean in place of its point value. */
struct dressed {
    node_id node;
    double value;
};

struct means {
    struct arena *arena;
    struct eval *v;
    struct knots knots;
    size_t done;
    ARRAY(uint32_t) place; /* by node: curved + 1, or 0; none before the first curved node */
    ARRAY(struct curved) curved;
    ARRAY(double) mean;
    ARRAY(struct dressed) dressed; /* scratch */
};

struct means *means_new(struct arena *a, struct eval *v, const struct mean_source *source)
{
    struct means *m = NEW(a, struct means);
    m->arena = a;
    m->v = v;
    m->knots.arena = a;
    m->knots.v = v;
    m->knots.spreads = (struct spreads){.arena = a, .source = source};
    return m;
}

/* NULL where the mean is the point value. */
static const struct curved *curved_of(const struct means *m, node_id n)
{
    return n < m->place.n && m->place.at[n] ? &m->curved.at[m->place.at[n] - 1] : NULL;
}

static double mean_in(const struct means *m, const struct curved *c, size_t set)
{
    return m->mean.at[c->first + (c->sets > 1 ? set : 0)];
}

/* Begins the record of node n; `sets` means are still to be pushed. */
static void remember(struct means *m, node_id n, size_t sets, enum mean_method method)
{
    size_t had = m->place.n;
    array_reserve(m->arena, &m->place, n + 1 - had);
    array_zero(m->place.at + had, (n + 1 - had) * sizeof *m->place.at);
    m->place.n = n + 1;
    *array_push(m->arena, &m->curved) = (struct curved){m->mean.n, (uint32_t)sets, method};
    m->place.at[n] = (uint32_t)m->curved.n;
}

/* ---- knots ---- */

/* Results of a DIAGRAM, behind all others of the evaluation; their place. */
static double keep_results(struct means *m, const double *at, size_t n)
{
    size_t place = m->v->results.n;
    for (size_t i = 0; i < n; i++)
        *array_push(m->v->arena, &m->v->results) = at[i];
    return (double)place;
}

static ohmen_status integrate(struct means *m, node_id n, ohmen_error *e)
{
    size_t sets;
    const struct knots *k = &m->knots;
    ohmen_status status = knot_integrate(&m->knots, n, &sets, e);
    if (status != OHMEN_OK)
        return status;
    remember(m, n, sets, sets > 1 ? MEAN_SAMPLE : MEAN_QUADRATURE);
    bool is_diagram = graph_at(m->v->g, n)->op == OP_DIAGRAM;
    for (size_t s = 0; s < sets; s++) {
        const double *at = k->mean.at + s * k->n_results;
        *array_push(m->arena, &m->mean) = is_diagram ? keep_results(m, at, k->n_results) : *at;
    }
    return OHMEN_OK;
}

/* ---- other nodes ---- */

static void find_curved(struct means *m, node_id n)
{
    if (curved_of(m, n))
        *array_push(m->arena, &m->dressed) = (struct dressed){n, m->v->value.at[n]};
}

/* What node n reads and what has another mean than its value. A DIAGRAM reads arguments of
 * complements, too. */
static void find_dressed(struct means *m, node_id n)
{
    const struct graph *g = m->v->g;
    const node_id *args = graph_args(g, n);
    m->dressed.n = 0;
    for (uint32_t i = 0; i < graph_at(g, n)->n; i++) {
        find_curved(m, args[i]);
        if (graph_at(g, n)->op == OP_DIAGRAM && graph_at(g, args[i])->op == OP_COMPLEMENT)
            find_curved(m, graph_args(g, args[i])[0]);
    }
}

/* Node n at the means of set `set`. */
static double value_at_means(struct means *m, node_id n, size_t set)
{
    double *value = m->v->value.at;
    size_t place = m->v->results.n;
    if (graph_at(m->v->g, n)->op == OP_DIAGRAM) {
        array_reserve(m->v->arena, &m->v->results, eval_results(m->v, n));
        m->v->results.n += eval_results(m->v, n);
    }
    for (size_t i = 0; i < m->dressed.n; i++)
        value[m->dressed.at[i].node] = mean_in(m, curved_of(m, m->dressed.at[i].node), set);
    double x = eval_node(m->v, n, place);
    for (size_t i = 0; i < m->dressed.n; i++)
        value[m->dressed.at[i].node] = m->dressed.at[i].value;
    return x;
}

static ohmen_status propagate(struct means *m, node_id n, ohmen_error *e)
{
    size_t sets = 1;
    enum mean_method method = MEAN_EXACT;
    find_dressed(m, n);
    for (size_t i = 0; i < m->dressed.n; i++) {
        const struct curved *c = curved_of(m, m->dressed.at[i].node);
        sets = c->sets > sets ? c->sets : sets;
        method = c->method > method ? c->method : method;
    }
    remember(m, n, sets, method);
    for (size_t s = 0; s < sets; s++) {
        double x = value_at_means(m, n, s);
        if (!isfinite(x))
            return error_set(e, OHMEN_COMPUTE, "node %u (%s) of the calculation has no finite mean",
                             (unsigned)n, graph_op_info(graph_at(m->v->g, n)->op)->name);
        *array_push(m->arena, &m->mean) = x;
    }
    return OHMEN_OK;
}

/* ---- questions ---- */

ohmen_status means_update(struct means *m, node_id *culprit, ohmen_error *e)
{
    for (; m->done < m->v->done; m->done++) {
        node_id n = (node_id)m->done;
        if (graph_degree(m->v->g, n) < 2)
            continue;
        ohmen_status status = graph_bends(m->v->g, n) ? integrate(m, n, e) : propagate(m, n, e);
        if (status == OHMEN_OK)
            continue;
        if (culprit)
            *culprit = n;
        return status;
    }
    return OHMEN_OK;
}

double means_value(const struct means *m, node_id n)
{
    assert(n < m->done && graph_at(m->v->g, n)->op != OP_DIAGRAM);
    const struct curved *c = curved_of(m, n);
    if (!c)
        return eval_value(m->v, n);
    double sum = 0;
    for (size_t s = 0; s < c->sets; s++)
        sum += mean_in(m, c, s);
    return sum / c->sets;
}

double means_error(const struct means *m, node_id n)
{
    const struct curved *c = curved_of(m, n);
    if (!c || c->sets == 1)
        return 0;
    double mean = means_value(m, n), squares = 0;
    for (size_t s = 0; s < c->sets; s++) {
        double away = mean_in(m, c, s) - mean;
        squares += away * away;
    }
    return sqrt(squares / (c->sets - 1) / c->sets);
}

enum mean_method means_method(const struct means *m, node_id n)
{
    const struct curved *c = curved_of(m, n);
    return c ? c->method : MEAN_EXACT;
}
