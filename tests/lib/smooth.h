/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A smooth function of seven uncertain inputs whose mean is known, on which methods of sampling are
 * tried. It is like a yearly damage: a rate, two probabilities that multiply, three parts of a cost
 * that add, one of them with a factor. */
#ifndef TESTS_SMOOTH_H
#define TESTS_SMOOTH_H

#include "math/draw.h"

enum { SMOOTH_INPUTS = 7 };

extern const struct draw_input smooth_inputs[SMOOTH_INPUTS];

/* Its mean over n points, whose values of input i are x[i], over its exact mean, less 1. */
double smooth_error(size_t n, const double *const x[SMOOTH_INPUTS]);

#endif
