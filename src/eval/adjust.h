/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What brings the rules of curved nodes to their means, inside src/eval (see probe.h).
 *
 * A node of which the mean is not what its rule makes of the means of its arguments is adjusted by
 * their quotient where nothing is moved, unless all that it bends in is moved, and so certain.
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

/* Does no step have one? */
bool adjustments_none(const struct adjustments *x);

/* Adjusts what the rule of a step made: its value; all results of a DIAGRAM. */
void adjust(const struct adjustments *x, node_id n, double *results);

#endif
