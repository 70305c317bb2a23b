/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rolling back what is laid out (rollback.h): run by run, from the last to the first. Owns nothing
 * beyond its blocks. */
#include "math/rollback.h"

#include <assert.h>
#include <math.h>

#include "math/elementary.h"
#include "math/lanes.h"
#include "math/rollback_kernels.h"

static const struct rollback_kernels *kernels(enum isa i)
{
    static const struct rollback_kernels *const tables[ISA_COUNT] = {
#define X(name, needs) &rollback_kernels_##name,
        ISAS(X)
#undef X
    };
    return tables[i];
}

static void follow_links(const struct rollback_run *run, const size_t *link, double *value)
{
    for (size_t i = 0; i < run->n; i++)
        value[run->first + i] = value[link[run->first_child + i]];
}

/* ---- values ---- */

/* All kinds but CHANCE. */
static void sure_run(const struct rollback *r, const struct rollback_run *run,
                     const struct rollback_kernels *k, double *value)
{
    const double *amount = r->amount + run->first;
    if (run->kind == ROLLBACK_END)
        k->end(run->n, amount, value + run->first);
    else if (run->kind == ROLLBACK_LINK)
        follow_links(run, r->link, value);
    else
        k->choose(run->n, run->arity, amount, value + run->first_child, value + run->first);
}

void rollback_values(const struct rollback *r, enum isa isa, double *value)
{
    const struct rollback_kernels *k = kernels(isa);
    for (size_t i = r->n_runs; i-- > 0;) {
        const struct rollback_run *run = &r->runs[i];
        if (run->kind == ROLLBACK_CHANCE)
            k->chance(run->n, run->arity, r->amount + run->first, r->probability + run->first_child,
                      value + run->first_child, value + run->first);
        else
            sure_run(r, run, k, value);
    }
}

/* ---- certainty equivalents ---- */

/* With x = (least - value) / R <= 0, where `least` is the least value of the children that can
 * happen,
 *
 *     equivalent = least - R ln(sum of p exp(x)) = least - R ln(1 + sum of p (exp(x) - 1)),
 *
 * the second form where the sum is near 1, since it does not lose what is small beside R; the
 * first where the least is unlikely, since the second loses p there. */
#define NEAR_ONE (-0.5) /* of the sum of p (exp(x) - 1) */

enum { NODES = 128, BLOCK = 512 }; /* of a run at a time; of their children at a time */

/* Nodes of one run, and their children, which lie side by side. */
struct lotteries {
    size_t n, arity;
    const double *p, *value;
    double tolerance, least[NODES];
    const struct lanes_functions *f;
};

static void find_least(struct lotteries *l)
{
    for (size_t i = 0; i < l->n; i++) {
        l->least[i] = INFINITY;
        for (size_t k = i * l->arity; k < (i + 1) * l->arity; k++)
            if (l->p[k] > 0 && l->value[k] < l->least[i])
                l->least[i] = l->value[k];
    }
}

/* x of n children, the first being child k of node i; of one that cannot happen 0. */
static void fill_x(const struct lotteries *l, size_t i, size_t k, size_t n, double *x)
{
    size_t first = i * l->arity + k;
    for (size_t j = 0; j < n; j++) {
        double down = (l->least[i] - l->value[first + j]) / l->tolerance;
        x[j] = l->p[first + j] > 0 ? down : 0;
        if (++k == l->arity) {
            k = 0;
            i++;
        }
    }
}

static void add_x(const struct lotteries *l, size_t i, size_t k, size_t n, const double *x,
                  double *sum)
{
    size_t first = i * l->arity + k;
    for (size_t j = 0; j < n; j++) {
        sum[i] += l->p[first + j] * x[j];
        if (++k == l->arity) {
            k = 0;
            i++;
        }
    }
}

/* For each node the sum of p f(x) over its children, in their order. */
static void sums_of(const struct lotteries *l, lanes_function *f, double *sum)
{
    double x[BLOCK];
    size_t all = l->n * l->arity;
    for (size_t i = 0; i < l->n; i++)
        sum[i] = 0;
    for (size_t from = 0; from < all; from += BLOCK) {
        size_t n = all - from < BLOCK ? all - from : BLOCK;
        fill_x(l, from / l->arity, from % l->arity, n, x);
        f(n, x, x);
        add_x(l, from / l->arity, from % l->arity, n, x, sum);
    }
}

static void equivalents_of(struct lotteries *l, const double *amount, double *to)
{
    double less_one[NODES], sum[NODES];
    bool far = false;
    find_least(l);
    sums_of(l, l->f->expm1, less_one);
    for (size_t i = 0; i < l->n; i++)
        far |= less_one[i] <= NEAR_ONE;
    if (far)
        sums_of(l, l->f->exp, sum);
    for (size_t i = 0; i < l->n; i++) {
        double log = less_one[i] > NEAR_ONE ? math_log1p(less_one[i]) : math_log(sum[i]);
        to[i] = amount[i] + (l->least[i] - l->tolerance * log);
    }
}

static void equivalents_run(const struct rollback *r, const struct rollback_run *run,
                            double tolerance, const struct lanes_functions *f, double *value)
{
    struct lotteries l = {.arity = run->arity, .tolerance = tolerance, .f = f};
    for (size_t i = 0; i < run->n; i += l.n) {
        size_t child = run->first_child + i * run->arity;
        l.n = run->n - i < NODES ? run->n - i : NODES;
        l.p = r->probability + child;
        l.value = value + child;
        equivalents_of(&l, r->amount + run->first + i, value + run->first + i);
    }
}

void rollback_equivalents(const struct rollback *r, enum isa isa, double tolerance,
                          double *equivalent)
{
    assert(tolerance > 0);
    if (isinf(tolerance)) {
        rollback_values(r, isa, equivalent);
        return;
    }
    for (size_t i = r->n_runs; i-- > 0;) {
        const struct rollback_run *run = &r->runs[i];
        if (run->kind == ROLLBACK_CHANCE)
            equivalents_run(r, run, tolerance, lanes_functions(isa), equivalent);
        else
            sure_run(r, run, kernels(isa), equivalent);
    }
}

/* ---- what is chosen, and where that leads ---- */

void rollback_policy(const struct rollback *r, enum isa isa, const double *value, uint32_t *chosen)
{
    const struct rollback_kernels *k = kernels(isa);
    for (size_t i = 0; i < r->n_runs; i++) {
        const struct rollback_run *run = &r->runs[i];
        if (run->kind == ROLLBACK_CHOOSE)
            k->pick(run->n, run->arity, value + run->first_child, chosen + run->first);
        else
            for (size_t j = 0; j < run->n; j++)
                chosen[run->first + j] = 0;
    }
}

static void reach_children(const struct rollback *r, const struct rollback_run *run, size_t i,
                           uint32_t chosen, double *reach)
{
    size_t child = run->first_child + i * run->arity;
    double p = reach[run->first + i];
    if (run->kind == ROLLBACK_LINK)
        reach[r->link[child]] += p;
    else if (run->kind == ROLLBACK_CHANCE)
        for (uint32_t k = 0; k < run->arity; k++)
            reach[child + k] += p * r->probability[child + k];
    else if (run->kind != ROLLBACK_END)
        reach[child + chosen] += p;
}

void rollback_reach(const struct rollback *r, const uint32_t *chosen, double *reach)
{
    for (size_t i = 0; i < r->n; i++)
        reach[i] = i == 0;
    for (size_t j = 0; j < r->n_runs; j++) {
        const struct rollback_run *run = &r->runs[j];
        for (size_t i = 0; i < run->n; i++)
            reach_children(r, run, i, chosen[run->first + i], reach);
    }
}
