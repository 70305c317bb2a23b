/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Probing (probe.h): a second evaluation of the same graph, in which nodes are replaced.
 *
 * Owns a copy of the values, and the lists of who uses a node on the way to a target. Invariant:
 * between two openings the copy is the evaluation's, apart from the steps of the open one; steps
 * are sorted, so that arguments come before what uses them. */
#include "eval/probe.h"

#include "eval/adjust.h"
#include "eval/state.h"

#include <assert.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

struct nodes ARRAY_BODY(node_id);

/* Averages of a DIAGRAM over windows, and the values of its arguments when they were last taken:
 * from point to point, and from one opening to the next, few of these change. */
struct kept {
    struct averages *averages;
    size_t n;
    double *p, *q;
    struct course_values *x;
    bool *changed;
};
/* Each may take a few megabytes. */
enum { MOST_KEPT = 64 };

struct prober {
    struct arena *arena;
    const struct eval *of;
    struct eval own;
    size_t size; /* nodes */
    /* Who uses node i on the way to a target: users[first_user[i]] .. [first_user[i + 1] - 1] */
    uint32_t *first_user;
    node_id *users;
    bool *leads; /* to a target */
    bool *meets; /* the open one: depends on what is replaced, or is replaced */
    struct nodes replaced, steps;
    unsigned char *order; /* of the steps, and of what is replaced: see order_of */
    bool linear;
    ARRAY(struct kept) kept;         /* of DIAGRAM nodes over windows that were evaluated */
    uint32_t *kept_of;               /* by node: number of its kept one from 1 on; 0: none */
    struct adjustments *adjustments; /* of means; NULL: of points */
};

/* ---- who uses whom ---- */

static void find_leading(struct prober *p, size_t n_targets, const node_id *targets)
{
    const struct graph *g = p->of->g;
    for (size_t i = 0; i < n_targets; i++)
        p->leads[targets[i]] = true;
    for (node_id n = (node_id)p->size; n-- > 0;)
        for (uint32_t i = 0; p->leads[n] && i < graph_at(g, n)->n; i++)
            p->leads[graph_args(g, n)[i]] = true;
}

/* Counts first, then fills; a node that uses another twice stands there twice. */
static void list_users(struct prober *p)
{
    const struct graph *g = p->of->g;
    uint32_t *first = p->first_user = NEW_ARRAY(p->arena, p->size + 2, uint32_t);
    for (node_id n = 0; n < p->size; n++)
        for (uint32_t i = 0; p->leads[n] && i < graph_at(g, n)->n; i++)
            first[graph_args(g, n)[i] + 2]++;
    for (size_t n = 2; n < p->size + 2; n++)
        first[n] += first[n - 1];
    p->users = NEW_ARRAY(p->arena, first[p->size + 1], node_id);
    for (node_id n = 0; n < p->size; n++)
        for (uint32_t i = 0; p->leads[n] && i < graph_at(g, n)->n; i++)
            p->users[first[graph_args(g, n)[i] + 1]++] = n;
}

static void copy_values(struct prober *p, const struct eval *v)
{
    p->own = (struct eval){.arena = p->arena, .g = v->g, .isa = v->isa, .done = v->done};
    array_reserve(p->arena, &p->own.value, p->size);
    array_reserve(p->arena, &p->own.results, v->results.n);
    p->own.value.n = p->size;
    p->own.results.n = v->results.n;
    if (p->size)
        memcpy(p->own.value.at, v->value.at, p->size * sizeof *v->value.at);
    if (v->results.n)
        memcpy(p->own.results.at, v->results.at, v->results.n * sizeof *v->results.at);
}

struct prober *prober_new(struct arena *a, const struct eval *v, size_t n_targets,
                          const node_id *targets)
{
    struct prober *p = NEW(a, struct prober);
    *p = (struct prober){.arena = a, .of = v, .size = v->done};
    p->leads = NEW_ARRAY(a, p->size, bool);
    p->meets = NEW_ARRAY(a, p->size, bool);
    p->order = NEW_ARRAY(a, p->size, unsigned char);
    p->kept_of = NEW_ARRAY(a, p->size, uint32_t);
    copy_values(p, v);
    find_leading(p, n_targets, targets);
    list_users(p);
    return p;
}

struct prober *prober_of_means(struct arena *a, const struct means *m, size_t n_targets,
                               const node_id *targets)
{
    struct prober *p = prober_new(a, means_as_values(m, a), n_targets, targets);
    p->adjustments = adjustments_new(a, m, p->of);
    return p;
}

/* ---- the order of a node in what is replaced ---- */

enum { ORDER_NONE, ORDER_LINEAR, ORDER_CURVED };

struct met {
    unsigned greatest, n; /* of the orders of arguments; how many of these depend */
};

static struct met met_by(const struct prober *p, node_id n)
{
    struct met m = {0};
    for (uint32_t i = 0; i < graph_at(p->of->g, n)->n; i++) {
        unsigned order = p->order[graph_args(p->of->g, n)[i]];
        m.greatest = order > m.greatest ? order : m.greatest;
        m.n += order > ORDER_NONE;
    }
    return m;
}

static unsigned order_of_arg(const struct prober *p, node_id n, uint32_t i)
{
    return p->order[graph_args(p->of->g, n)[i]];
}

/* Linear in `standing` and in `left`, but not in both together. */
static unsigned order_of_course(const struct prober *p, node_id n)
{
    unsigned standing = order_of_arg(p, n, COURSE_STANDING), left = order_of_arg(p, n, COURSE_LEFT);
    return met_by(p, n).n > 1 || standing + left == 0 ? ORDER_CURVED : standing + left;
}

/* What a node is in the things replaced: linear with whatever else is constant, or perhaps not.
 * The rules are those of the degrees of graph_degree. */
static unsigned order_of(const struct prober *p, node_id n)
{
    struct met m = met_by(p, n);
    switch (graph_at(p->of->g, n)->op) {
    case OP_ADD:
    case OP_SUBTRACT:
    case OP_NEGATE:
    case OP_COMPLEMENT:
    case OP_SUM:
    case OP_HELD:
    case OP_PICK: return m.greatest;
    case OP_MULTIPLY:
    case OP_EITHER:
    case OP_DIAGRAM: return m.n == 1 ? m.greatest : ORDER_CURVED;
    case OP_DIVIDE:
    case OP_RATIO: return order_of_arg(p, n, 1) ? ORDER_CURVED : m.greatest;
    case OP_LOOKUP:
    case OP_YEARS: return order_of_arg(p, n, 0) ? ORDER_CURVED : m.greatest;
    case OP_COURSE: return order_of_course(p, n);
    default: return ORDER_CURVED;
    }
}

/* ---- opening ---- */

static void put_back(struct prober *p)
{
    for (size_t i = 0; i < p->steps.n; i++) {
        node_id n = p->steps.at[i];
        p->meets[n] = false;
        p->order[n] = ORDER_NONE;
        p->own.value.at[n] = p->of->value.at[n];
        if (graph_at(p->of->g, n)->op != OP_DIAGRAM)
            continue;
        size_t place = (size_t)p->of->value.at[n];
        memcpy(p->own.results.at + place, p->of->results.at + place,
               eval_results(p->of, n) * sizeof *p->own.results.at);
    }
    for (size_t i = 0; i < p->replaced.n; i++) {
        node_id n = p->replaced.at[i];
        p->meets[n] = false;
        p->order[n] = ORDER_NONE;
        p->own.value.at[n] = p->of->value.at[n];
    }
    p->steps.n = p->replaced.n = 0;
}

static void add_users(struct prober *p, node_id n)
{
    for (uint32_t i = p->first_user[n]; i < p->first_user[n + 1]; i++) {
        node_id user = p->users[i];
        if (p->meets[user])
            continue;
        p->meets[user] = true;
        *array_push(p->arena, &p->steps) = user;
    }
}

static int by_number(const void *p, const void *q)
{
    node_id a = *(const node_id *)p, b = *(const node_id *)q;
    return (a > b) - (a < b);
}

static void find_steps(struct prober *p)
{
    for (size_t i = 0; i < p->replaced.n; i++)
        add_users(p, p->replaced.at[i]);
    for (size_t i = 0; i < p->steps.n; i++)
        add_users(p, p->steps.at[i]);
    if (p->steps.n > 1)
        qsort(p->steps.at, p->steps.n, sizeof *p->steps.at, by_number);
}

void prober_open(struct prober *p, size_t n, const node_id *nodes)
{
    put_back(p);
    for (size_t i = 0; i < n; i++) {
        enum graph_op op = graph_at(p->of->g, nodes[i])->op;
        assert(nodes[i] < p->size && op != OP_DIAGRAM && op != OP_COURSE);
        (void)op;
        p->meets[nodes[i]] = true;
        p->order[nodes[i]] = ORDER_LINEAR;
        *array_push(p->arena, &p->replaced) = nodes[i];
    }
    p->own.n_replaced = n;
    p->own.replaced = p->replaced.at;
    find_steps(p);
    p->linear = true;
    for (size_t i = 0; i < p->steps.n; i++) {
        node_id step = p->steps.at[i];
        p->order[step] = (unsigned char)order_of(p, step);
        p->linear = p->linear && p->order[step] == ORDER_LINEAR;
    }
    if (p->adjustments)
        adjustments_open(p->adjustments, n, nodes, p->steps.n, p->steps.at);
}

bool prober_leads(const struct prober *p, node_id n)
{
    return n < p->size && p->leads[n];
}

bool prober_moves(const struct prober *p, node_id n)
{
    return n < p->size && p->meets[n];
}

bool prober_is_linear(const struct prober *p)
{
    return p->linear;
}

bool prober_is_exact(const struct prober *p)
{
    return !p->adjustments || adjustments_are_exact(p->adjustments);
}

/* ---- diagrams over windows ---- */

static struct kept *keep(struct prober *p, node_id n, const struct averaged *what)
{
    if (p->kept_of[n])
        return &p->kept.at[p->kept_of[n] - 1];
    if (p->kept.n == MOST_KEPT)
        return NULL;
    struct kept *k = array_push(p->arena, &p->kept);
    p->kept_of[n] = (uint32_t)p->kept.n;
    *k = (struct kept){.averages = averages_new(p->arena, what), .n = what->n};
    k->p = NEW_ARRAY(p->arena, what->n, double);
    k->q = NEW_ARRAY(p->arena, what->n, double);
    k->x = NEW_ARRAY(p->arena, what->n, struct course_values);
    k->changed = NEW_ARRAY(p->arena, what->n, bool);
    for (size_t i = 0; i < what->n; i++)
        k->p[i] = NAN; /* nothing was taken: equal to nothing */
    return k;
}

/* Which arguments differ from those of the last time, which they become. */
static void find_changed(struct kept *k, const struct averaged *what)
{
    for (size_t i = 0; i < k->n; i++) {
        k->changed[i] = k->p[i] != what->p[i] || k->q[i] != what->q[i];
        k->p[i] = what->p[i];
        k->q[i] = what->q[i];
        if (!what->course[i])
            continue;
        size_t size = sizeof what->x[i];
        k->changed[i] = k->changed[i] || memcmp(k->x[i].x, what->x[i], size) != 0;
        memcpy(k->x[i].x, what->x[i], size);
    }
}

static void take_average(struct prober *p, node_id n, double *results)
{
    struct averaged what = eval_averaged(&p->own, n);
    struct kept *k = keep(p, n, &what);
    if (!k) {
        average_values(p->arena, &what, results);
        return;
    }
    find_changed(k, &what);
    averages_take(k->averages, &what, k->changed, results);
}

/* ---- points ---- */

static bool take_diagram(struct prober *p, node_id n)
{
    struct eval *v = &p->own;
    size_t place = (size_t)v->value.at[n];
    if (graph_windows_of(v->g, n).n)
        take_average(p, n, v->results.at + place);
    else
        eval_node(v, n, place);
    if (p->adjustments)
        adjust(p->adjustments, n, v->results.at + place);
    for (size_t k = 0; k < eval_results(v, n); k++)
        if (!isfinite(v->results.at[place + k]))
            return false;
    return true;
}

static bool take_step(struct prober *p, node_id n)
{
    struct eval *v = &p->own;
    if (graph_at(v->g, n)->op == OP_DIAGRAM)
        return take_diagram(p, n);
    v->value.at[n] = eval_node(v, n, 0);
    if (p->adjustments)
        adjust(p->adjustments, n, &v->value.at[n]);
    return isfinite(v->value.at[n]);
}

bool prober_at(struct prober *p, const double *x)
{
    for (size_t i = 0; i < p->replaced.n; i++)
        p->own.value.at[p->replaced.at[i]] = x[i];
    for (size_t i = 0; i < p->steps.n; i++)
        if (!take_step(p, p->steps.at[i]))
            return false;
    return true;
}

double prober_value(const struct prober *p, node_id n)
{
    assert(n < p->size && graph_at(p->of->g, n)->op != OP_DIAGRAM);
    return p->own.value.at[n];
}
