/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Arguments for the functions over lanes. */
#ifndef LANES_TEST_H
#define LANES_TEST_H

#include <stddef.h>

#include "elementary_test.h"

/* How many doubles a run fills at once. */
enum { LANES_TEST_MANY = 1024 };

/* Fills x, and y where a function has two arguments; `round` counts the calls. */
typedef void lanes_test_fill(struct random *r, int round, double *x, double *y);

/* Any bits at all: NaNs of all kinds, infinities, both zeros, subnormals. */
lanes_test_fill fill_bits;
/* The ends of what doubles are, and of what the functions have values for. For two arguments, in
 * LANES_TEST_ENDS_ROUNDS rounds each of them with each. */
enum { LANES_TEST_ENDS_ROUNDS = 3 };
lanes_test_fill fill_ends;

/* The ranges that matter, evenly. */
lanes_test_fill fill_exp, fill_log, fill_log1p, fill_pow;
/* Where one row of a table gives way to the next, some doubles to each side. */
lanes_test_fill fill_exp_breaks, fill_log_breaks, fill_pow_breaks;

/* x a probability and y what it lacks of 1, the smaller exact: evenly; by their bits in the tails;
 * and around the breaks of the method. */
lanes_test_fill fill_probabilities, fill_tails, fill_tail_breaks;

#endif
