/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The shape of a gamma distribution from what is known of its percentiles.
 *
 * Only shapes between GAMMA_FIT_LEAST and GAMMA_FIT_GREATEST are looked for. Plain numbers,
 * nothing allocates. Percentiles are those of dist_gamma_quantile; a shape is found by
 * closing a bracket until its logarithm is known to 1e-15 or to neighbouring doubles, so
 * that it carries the error of the percentiles alone: they are met again within 1e-9, held
 * by tests against libRmath. */
#ifndef MATH_GAMMA_FIT_H
#define MATH_GAMMA_FIT_H

#include <stdbool.h>

#define GAMMA_FIT_LEAST 1e-3
#define GAMMA_FIT_GREATEST 1e4

/* A probability with its complement, both exact: {0.95, 0.05}. */
struct gamma_level {
    double p, q;
};

/* The shape whose percentiles at `high` and `low` (low.p < high.p) have this quotient,
 * which falls as the shape grows; false where no shape has it. The error factor is the
 * quotient of the 95 % point and the median. */
bool gamma_fit_quotient(struct gamma_level low, struct gamma_level high, double quotient,
                        double *shape);

/* The shapes for which the percentile is `ratio` times the mean; returns how many, at most
 * two, in rising order.
 *
 * For a level above one half the percentile over the mean rises from 0 to a greatest value
 * above 1 and falls back towards 1 as the shape grows: two shapes for a ratio between 1 and
 * that, one up to 1. For a level of one half or less it rises towards 1: one shape for a
 * ratio below 1. (NASA/SP-2009-569, example 8, has two: .00361 and .238193.) */
int gamma_fit_mean(struct gamma_level level, double ratio, double shapes[2]);

#endif
