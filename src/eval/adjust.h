/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What brings the rules of curved nodes to their means, inside src/eval (see probe.h).
 *
 * A node of which the mean is not what its rule makes of the means of its arguments, also with what
 * is moved certain, is adjusted by their quotient where nothing is moved; EITHER and DIAGRAM by
 * their difference, since what shares nothing with others mostly stands beside them (A or (B and
 * C)). One that bends in what is moved as well is left as its rule makes it, since either holds the
 * spread of what is moved.
 * Invariant: an adjustment is worked out once, when a step first needs it, and does not depend on
 * what is moved. */
#ifndef EVAL_ADJUST_H
#define EVAL_ADJUST_H

#include "eval/mean.h"

struct adjustments;
/* Lives in `a`. `at_means` is that of means_as_values; both are borrowed. */
struct adjustments *adjustments_new(struct arena *a, const struct means *m,
                                    const struct eval *at_means);

/* For these nodes to be moved, and the steps that follow from them. */
void adjustments_open(struct adjustments *x, size_t n_moved, const node_id *moved, size_t n_steps,
                      const node_id *steps);

/* Are all steps the means that they stand for, apart from rounding? */
bool adjustments_are_exact(const struct adjustments *x);

/* Adjusts what the rule of a step made: its value; all results of a DIAGRAM. */
void adjust(const struct adjustments *x, node_id n, double *results);

#endif
