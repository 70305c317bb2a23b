/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How far off approximate means of targets by one quantity may be, as a sample of the targets
 * tells.
 *
 * Private to src/decide. P is what unknown_values says of a target at the values that the quantity
 * has in the samples, L what the target is there. The mean of L at one value of the quantity is
 * taken to be m + b (P - m), m the mean of today, which is known; b is fitted to the sample by
 * least squares. Where a choice can say what an alternative is worth that is done for the worth of
 * today's best, and for the targets less that, which hangs less on chance. (Regression on a sample
 * of what is known: Strong, Oakley & Brennan, Medical Decision Making 34 (2014) 311-326, from
 * memory; here on the approximation itself, of which only the slope is fitted.) */
#ifndef DECIDE_REGRESS_H
#define DECIDE_REGRESS_H

#include "decide/information.h"
#include "decide/unknown.h"

struct regress; /* a sample of the targets, of which more inputs are drawn */

/* NULL where it cannot be drawn. All is borrowed; lives in the arena of the figures. */
struct regress *regress_new(struct figures *f, const struct information_sample *s);

/* What a sample makes of approximate values. */
struct correction {
    const struct choice *choice;
    const double *means; /* of the targets */
    size_t best;         /* of today */
    double base;         /* b of what it is worth */
    double *slopes;      /* b of the targets, less that */
};

/* Corrects the values of the targets in place. */
void correction_apply(const struct correction *c, double *values);

/* Corrections by all sets, and by all but one each: `sets` + 1 of them, the whole one first. NULL
 * where there are none: each point of the quantity would have to be evaluated, or the sample has no
 * values of it. */
struct correction *regress_corrections(struct regress *r, struct unknown *u, const struct choice *c,
                                       const double *means, size_t best, size_t *sets);

#endif
