/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Estimates from samples (statistics.h); quantiles are in quantiles.c. Owns nothing beyond its
 * scratch. */
#include "math/statistics.h"

#include <math.h>
#include <stdlib.h>

#include "math/dist.h"

/* ---- means ---- */

static double error_of(size_t sets, double squares)
{
    return sqrt(squares / (double)sets / (double)(sets - 1));
}

struct sampled statistics_of_sets(size_t sets, const double *mean)
{
    double sum = 0, squares = 0;
    for (size_t s = 0; s < sets; s++)
        sum += mean[s];
    double all = sum / (double)sets;
    for (size_t s = 0; s < sets; s++)
        squares += (mean[s] - all) * (mean[s] - all);
    return (struct sampled){all, error_of(sets, squares)};
}

static double mean_of_set(size_t points, const double *x)
{
    double sum = 0;
    for (size_t i = 0; i < points; i++)
        sum += x[i];
    return sum / (double)points;
}

struct sampled statistics_mean(size_t sets, size_t points, const double *x)
{
    double sum = 0, squares = 0;
    for (size_t s = 0; s < sets; s++)
        sum += mean_of_set(points, x + s * points);
    double all = sum / (double)sets;
    for (size_t s = 0; s < sets; s++) {
        double away = mean_of_set(points, x + s * points) - all;
        squares += away * away;
    }
    return (struct sampled){all, error_of(sets, squares)};
}

/* ---- rank correlation ---- */

struct ranked {
    double x;
    size_t at;
};

static int by_x(const void *p, const void *q)
{
    const struct ranked *a = p, *b = q;
    if (a->x != b->x)
        return a->x < b->x ? -1 : 1;
    return (a->at > b->at) - (a->at < b->at);
}

/* Ranks less their mean, doubled: whole numbers. */
static void rank(size_t n, const double *x, struct ranked *order, double *to)
{
    for (size_t i = 0; i < n; i++)
        order[i] = (struct ranked){x[i], i};
    if (n)
        qsort(order, n, sizeof *order, by_x);
    for (size_t i = 0, end; i < n; i = end) {
        for (end = i + 1; end < n && order[end].x == order[i].x;)
            end++;
        for (size_t k = i; k < end; k++)
            to[order[k].at] = (double)(i + end - 1) - (double)(n - 1);
    }
}

double statistics_rank_correlation(struct arena *a, size_t n, const double *x, const double *y)
{
    struct arena *scratch = arena_child(a);
    struct ranked *order = NEW_ARRAY(scratch, n, struct ranked);
    double *rx = NEW_ARRAY(scratch, n, double), *ry = NEW_ARRAY(scratch, n, double);
    double xx = 0, yy = 0, xy = 0;
    rank(n, x, order, rx);
    rank(n, y, order, ry);
    for (size_t i = 0; i < n; i++) {
        xx += rx[i] * rx[i];
        yy += ry[i] * ry[i];
        xy += rx[i] * ry[i];
    }
    arena_free(scratch);
    return xx > 0 && yy > 0 ? xy / sqrt(xx) / sqrt(yy) : 0;
}

/* ---- Student's t ---- */

/* With B beta distributed with v/2 and 1/2: t^2 = v (1 - B) / B (DLMF 8.17, the distribution of
 * Student's t as an incomplete beta function). */
double statistics_t95(size_t sets)
{
    double v = (double)(sets - 1);
    double b = dist_beta_quantile(v / 2, 0.5, 0.05, 0.95);
    return sqrt(v * (1 - b) / b);
}
