/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means: one pass over the nodes in the order of their numbers. A node without curved inputs has
 * its point value for a mean and is not kept. Of the others, one that bends is integrated
 * (knot.c); any other gets what its rule makes of the means of its arguments, for which these
 * are put in place of the point values for a moment.
 *
 * HELD stands at the mean of its argument while means are taken, and so does all that it moves:
 * such nodes get other values for that time (`moved`), computed anew from there. What is certain
 * apart from that has its other value for a mean.
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
    ARRAY(bool) is_moved;          /* by node; none before the first that is */
    ARRAY(struct dressed) moved;   /* and its value at other times, or just then */
};

struct means *means_new(struct arena *a, struct eval *v, const struct mean_source *source)
{
    struct means *m = NEW(a, struct means);
    m->arena = a;
    m->v = v;
    knots_init(&m->knots, a, v, source);
    return m;
}

struct eval *means_eval(struct means *m)
{
    return m->v;
}

struct spreads *means_spreads(struct means *m)
{
    return &m->knots.spreads;
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

/* Of a curved node, over all sets. */
static double means_of(const struct means *m, node_id n)
{
    const struct curved *c = curved_of(m, n);
    double sum = 0;
    for (size_t s = 0; s < c->sets; s++)
        sum += mean_in(m, c, s);
    return sum / c->sets;
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

static ohmen_status no_mean(const struct means *m, node_id n, ohmen_error *e)
{
    return error_set(e, OHMEN_COMPUTE, "node %u (%s) of the calculation has no finite mean",
                     (unsigned)n, graph_op_info(graph_at(m->v->g, n)->op)->name);
}

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
            return no_mean(m, n, e);
        *array_push(m->arena, &m->mean) = x;
    }
    return OHMEN_OK;
}

/* ---- what HELD moves ---- */

static bool is_moved(const struct means *m, node_id n)
{
    return n < m->is_moved.n && m->is_moved.at[n];
}

/* Whether node n reads what is moved, or holds what has another mean than its value. */
static bool moves(const struct means *m, node_id n)
{
    const struct graph *g = m->v->g;
    const node_id *args = graph_args(g, n);
    if (graph_at(g, n)->op == OP_HELD && curved_of(m, args[0]))
        return true;
    for (uint32_t i = 0; i < graph_at(g, n)->n && m->moved.n; i++)
        if (is_moved(m, args[i]))
            return true;
    return false;
}

static double moved_value(struct means *m, node_id n)
{
    struct eval *v = m->v;
    size_t place = v->results.n;
    if (graph_at(v->g, n)->op == OP_HELD)
        return means_of(m, graph_args(v->g, n)[0]);
    if (graph_at(v->g, n)->op == OP_DIAGRAM) {
        array_reserve(v->arena, &v->results, eval_results(v, n));
        v->results.n += eval_results(v, n);
    }
    return eval_node(v, n, place);
}

/* Moves node n; false when it is not finite there. */
static bool move(struct means *m, node_id n)
{
    double x = moved_value(m, n);
    if (!isfinite(x))
        return false;
    size_t had = m->is_moved.n;
    array_reserve(m->arena, &m->is_moved, n + 1 - had);
    array_zero(m->is_moved.at + had, (n + 1 - had) * sizeof *m->is_moved.at);
    m->is_moved.n = n + 1;
    m->is_moved.at[n] = true;
    *array_push(m->arena, &m->moved) = (struct dressed){n, m->v->value.at[n]};
    m->v->value.at[n] = x;
    return true;
}

void means_change_over(struct means *m)
{
    for (size_t i = 0; i < m->moved.n; i++) {
        struct dressed *d = &m->moved.at[i];
        double x = m->v->value.at[d->node];
        m->v->value.at[d->node] = d->value;
        d->value = x;
    }
}

/* The mean of what is certain and moved. */
static void remember_moved(struct means *m, node_id n)
{
    enum mean_method method = MEAN_EXACT;
    const node_id *args = graph_args(m->v->g, n);
    for (uint32_t i = 0; i < graph_at(m->v->g, n)->n; i++)
        if (curved_of(m, args[i]) && curved_of(m, args[i])->method > method)
            method = curved_of(m, args[i])->method;
    remember(m, n, 1, method);
    *array_push(m->arena, &m->mean) = m->v->value.at[n];
}

/* ---- questions ---- */

static ohmen_status update_node(struct means *m, node_id n, ohmen_error *e)
{
    bool moved = is_moved(m, n);
    if (!moved && moves(m, n)) {
        if (!move(m, n))
            return no_mean(m, n, e);
        moved = true;
    }
    if (graph_degree(m->v->g, n) >= 2)
        return graph_bends(m->v->g, n) ? integrate(m, n, e) : propagate(m, n, e);
    if (moved)
        remember_moved(m, n);
    return OHMEN_OK;
}

ohmen_status means_update(struct means *m, node_id *culprit, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    means_change_over(m);
    for (; m->done < m->v->done && status == OHMEN_OK; m->done++) {
        status = update_node(m, (node_id)m->done, e);
        if (status != OHMEN_OK && culprit)
            *culprit = (node_id)m->done;
    }
    if (status != OHMEN_OK)
        m->done--;
    means_change_over(m);
    return status;
}

double means_value(const struct means *m, node_id n)
{
    assert(n < m->done && graph_at(m->v->g, n)->op != OP_DIAGRAM);
    return curved_of(m, n) ? means_of(m, n) : eval_value(m->v, n);
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

/* ---- as values ---- */

/* The means of a DIAGRAM's results, behind those of the copy; their place. */
static double results_as_values(const struct means *m, node_id n, struct eval *to)
{
    const struct curved *c = curved_of(m, n);
    size_t place = to->results.n, n_results = eval_results(m->v, n);
    for (size_t k = 0; k < n_results; k++) {
        double sum = 0;
        for (size_t s = 0; s < c->sets; s++)
            sum += m->v->results.at[(size_t)mean_in(m, c, s) + k];
        *array_push(to->arena, &to->results) = sum / c->sets;
    }
    return (double)place;
}

const struct eval *means_as_values(const struct means *m, struct arena *a)
{
    struct eval *to = NEW(a, struct eval);
    *to = (struct eval){.arena = a, .g = m->v->g, .done = m->done};
    array_reserve(a, &to->value, m->done);
    array_reserve(a, &to->results, m->v->results.n);
    for (size_t i = 0; i < m->v->results.n; i++)
        *array_push(a, &to->results) = m->v->results.at[i];
    for (node_id n = 0; n < m->done; n++) {
        double x = m->v->value.at[n];
        if (curved_of(m, n))
            x = graph_at(to->g, n)->op == OP_DIAGRAM ? results_as_values(m, n, to) : means_of(m, n);
        *array_push(a, &to->value) = x;
    }
    return to;
}
