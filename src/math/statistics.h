/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a sample says, each with its standard error.
 *
 * A sample comes in independent sets of as many values each (math/draw.h): value i of set s is
 * x[s * points + i]. Inside a set values hang together, so that only sets tell the error: at least
 * 2 of them, and 16 for an error that means something. Sums are in the order of the values. */
#ifndef MATH_STATISTICS_H
#define MATH_STATISTICS_H

#include <stdbool.h>
#include <stddef.h>

#include "base/arena.h"

struct sampled {
    double value, error; /* its standard error */
};

/* The mean; its error is that of the means of the sets: sqrt(sum (m_s - m)^2 / (S (S - 1))). */
struct sampled statistics_mean(size_t sets, size_t points, const double *x);
/* The mean of the means of S sets, given themselves. */
struct sampled statistics_of_sets(size_t sets, const double *mean);

/* Quantiles at n probabilities, 0 < p < 1: the order statistics of all values together, between
 * two of which it is linear (of N values the k-th from 0 stands at (k + 1/2) / N). The error is by
 * sectioning: sqrt(sum (q_s - q)^2 / (S (S - 1))), q_s those of the sets alone, q that of all
 * (Asmussen & Glynn, Stochastic Simulation (2007), III.5, from memory). Scratch of `a`. */
void statistics_quantiles(struct arena *a, size_t sets, size_t points, const double *x, size_t n,
                          const double *p, struct sampled *out);

/* Spearman's rank correlation of two samples of n values, equal values having their mean rank
 * (Kendall & Gibbons, Rank Correlation Methods, 5th ed. 1990, ch. 3); 0 where all values of one
 * are equal. Scratch of `a`. */
double statistics_rank_correlation(struct arena *a, size_t n, const double *x, const double *y);

/* The factor of a standard error from `sets` sets for an interval that holds the value with 95 %:
 * Student's t with sets - 1 degrees of freedom. 2.131 for 16. */
double statistics_t95(size_t sets);

#endif
