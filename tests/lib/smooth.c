/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A function to sample (smooth.h). Owns nothing.
 * Invariant: it is of the first degree in each input, so that its mean is its value at theirs. */
#include "smooth.h"

#include <math.h>

const struct draw_input smooth_inputs[SMOOTH_INPUTS] = {
    {"rate", {DIST_GAMMA, {2e-2, 3.24}}, 1, 0},
    {"first", {DIST_BETA, {2, 5}}, 1, 1},
    {"second", {DIST_BETA, {3.5, 4}}, 1, 2},
    {"repair", {DIST_LOGNORMAL, {40, 2, NAN}}, 1, 3},
    {"supply", {DIST_GAMMA, {30, 1.6}}, 1, 4},
    {"fine", {DIST_TRIANGULAR, {5, 20, 60}}, 1, 5},
    {"hours", {DIST_LOGNORMAL, {1, 1.6, NAN}}, 1, 6}};

static double value(const double x[SMOOTH_INPUTS])
{
    return x[0] * (1 - x[1] * x[2]) * (x[3] + x[4] * x[6] + x[5]);
}

double smooth_error(size_t n, const double *const x[SMOOTH_INPUTS])
{
    double at[SMOOTH_INPUTS], sum = 0;
    for (size_t k = 0; k < n; k++) {
        for (size_t i = 0; i < SMOOTH_INPUTS; i++)
            at[i] = x[i][k];
        sum += value(at);
    }
    for (size_t i = 0; i < SMOOTH_INPUTS; i++)
        at[i] = dist_mean(&smooth_inputs[i].dist);
    return sum / (double)n / value(at) - 1;
}
