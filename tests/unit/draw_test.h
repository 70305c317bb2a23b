/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the tests of samples share. Everything is fixed by seeds, so that each statistic has one
 * value for ever; that it is an ordinary one is what is tested. */
#ifndef TESTS_DRAW_TEST_H
#define TESTS_DRAW_TEST_H

#include <check.h>

#include "math/draw.h"

enum { METHODS = DRAW_PLAIN + 1 };

/* Some draws and room to fill; in an arena of its own. */
struct drawing {
    struct arena *a;
    struct draws *draws;
    size_t n;          /* values of a set */
    double *work, **x; /* x[i]: room for one set of input i */
};

struct drawing drawing_new(struct draw_plan plan, size_t inputs, const struct draw_input *in);
/* With the seed 17 and the best instruction set. */
struct drawing drawing_of(enum draw_method method, unsigned log2, size_t inputs,
                          const struct draw_input *in);
const double *drawing_fill(const struct drawing *d, size_t input, uint64_t set);
void drawing_free(struct drawing *d);

/* Uniform on 0 .. 1. */
struct draw_input drawn_evenly(const char *name);
struct draw_input drawn_lognormal(const char *name, double median, double error_factor);
struct draw_input drawn_gamma(const char *name, double mean, double shape);

/* Fails where counts in equally likely cells are not ordinary: chi-square outside the middle
 * 99.8 % of its distribution. There are about 30 such checks. */
void drawing_check_counts(const char *what, const double *count, size_t cells, double expected);

/* Mean and its standard error from the n results of independent sets. */
struct estimate {
    double mean, error;
};
struct estimate drawing_estimate(size_t n, const double *results);

void draw_test_order(TCase *t);   /* strata, independence */
void draw_test_figures(TCase *t); /* moments, errors of means */
void draw_test_bytes(TCase *t);   /* what may and may not change the values */

#endif
