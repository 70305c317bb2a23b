/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Kernels of averages (average_kernels.h), for one instruction set. Owns nothing.
 *
 * Loops are over all lanes, which compilers turn into vectors; lanes that are not in use hold
 * copies of one that is. */
#include "graph/average_kernels.h"

static double positive(double x)
{
    return x > 0 ? x : 0;
}

static double greater(double x, double y)
{
    return x > y ? x : y;
}

/* ---- where courses are ---- */

/* What one run needs is written FILL lanes at a time, over the beginning of the next. */
enum { FILL = LEGENDRE_MOST };

static inline void fill(double *lane, size_t n, double x)
{
    for (size_t k = 0; k < n; k += FILL)
        for (int i = 0; i < FILL; i++)
            lane[k + i] = x;
}

static void times_since(const double *restrict t, const double *restrict origin,
                        double *restrict since)
{
    for (int k = 0; k < LANES; k++)
        since[k] = positive(t[k] - origin[k]);
}

static void times_of_age(const double *restrict t, double born, double *restrict age)
{
    for (int k = 0; k < LANES; k++)
        age[k] = positive(t[k] - born);
}

/* at->left, which is 1 but where the first stretch is fresh. */
static void set_left(const struct run *runs, size_t timing, double *left)
{
    for (size_t k = 0; k < LANES; k = runs++->end)
        for (size_t i = k; i < runs->end; i++)
            left[i] = !runs->now[timing].fresh;
}

static void moments(const double *t, const struct run *runs, size_t timing, double born, bool fresh,
                    struct moments *at)
{
    double origin[LANES + FILL], last = t[0], since = 0;
    if (fresh)
        set_left(runs, timing, at->left);
    for (size_t k = 0; k < LANES; k = runs++->end) {
        double latest = t[runs->end - 1], from = runs->now[timing].origin;
        fill(origin + k, runs->end - k, from);
        since = greater(since, latest - from);
        last = greater(last, latest);
    }
    times_since(t, origin, at->since);
    times_of_age(t, born, at->age);
    at->latest_since = since;
    at->latest_age = positive(last - born);
}

/* ---- the diagram ---- */

static void mix_arms(double *restrict to, const double *restrict p, const double *restrict q,
                     const double *restrict high, const double *restrict low)
{
    for (int i = 0; i < LANES; i++)
        to[i] = p[i] * high[i] + q[i] * low[i];
}

static void evaluate_rows(size_t n, const struct row *rows, const double *const *p,
                          const double *const *q, lanes *work)
{
    for (size_t i = 0; i < n; i++) {
        const struct row *row = &rows[i];
        mix_arms(work[row->to], p[row->variable], q[row->variable], work[row->high],
                 work[row->low]);
    }
}

static void add_root(size_t begin, size_t end, const double *restrict weight,
                     const double *restrict root, double *restrict sum)
{
    double total = *sum;
    for (size_t i = begin; i < end; i++)
        total += weight[i] * root[i];
    *sum = total;
}

static void add_roots(size_t begin, size_t end, const double *weight, size_t n_roots,
                      const uint32_t *roots, lanes *work, double *sums)
{
    for (size_t k = 0; k < n_roots; k++)
        add_root(begin, end, weight, work[roots[k]], &sums[k]);
}

/* ---- orders ---- */

enum { LAST = LEGENDRE_ORDERS - 1 };

static void set_arm(double *restrict to, const double *restrict arm, double p, bool grows)
{
    if (grows) {
        to[0] = 0;
        for (int j = 0; j < LAST; j++)
            to[j + 1] = p * arm[j];
        to[LAST] += p * arm[LAST];
    } else
        for (int j = 0; j <= LAST; j++)
            to[j] = p * arm[j];
}

static void add_arm(double *restrict to, const double *restrict arm, double p, bool grows)
{
    if (grows) {
        for (int j = 0; j < LAST; j++)
            to[j + 1] += p * arm[j];
        to[LAST] += p * arm[LAST];
    } else
        for (int j = 0; j <= LAST; j++)
            to[j] += p * arm[j];
}

static void set_orders(size_t n, const struct row *rows, const struct extreme *extremes,
                       orders *part)
{
    for (size_t i = 0; i < n; i++) {
        const struct row *row = &rows[i];
        const struct extreme *e = &extremes[row->variable];
        set_arm(part[row->to], part[row->high], e->p, e->grows_true);
        add_arm(part[row->to], part[row->low], e->q, e->grows_false);
    }
}

const struct average_kernels ISA_NAME(average_kernels) = {
    ISA_NAME(course_lanes), moments, evaluate_rows, add_roots, set_orders,
};
