/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The mean of what knowing one quantity gains, and where another choice becomes the best one.
 *
 * Private to src/decide. The quantity is told by z, of which it is a function: z is standard
 * normal, so that the probability of lying below z is Phi(z). At each z somebody says what is
 * gained there and which choice is the best one.
 *
 * Changes: the best choice is looked up at up to GAIN_POINTS places from -far to far, and where it
 * differs between two neighbours the interval is halved, on both sides of whatever is found in
 * between, until it is narrower than `narrow`. A choice that is best only between two neighbours at
 * which one and the same other choice is best is not seen; there is none where what every choice is
 * worth is a straight line in the quantity, since then the places at which one is best hang
 * together.
 *
 * Mean: Gauss-Legendre quadrature of 8 points in z, with the density of z, between the changes and
 * in pieces of at most 2; each is compared with its two halves, which are kept, and halved further
 * until both differ by at most `tolerance` of the whole or GAIN_DEPTH times. The differences are
 * the error: that of the coarser rule, so mostly far greater than that of the mean. Beyond `far`
 * nothing is counted. */
#ifndef DECIDE_GAIN_H
#define DECIDE_GAIN_H

#include <stdbool.h>

#include "base/arena.h"
#include "base/array.h"

#define GAIN_FAR 10. /* the greatest `far`; what lies beyond has the probability 1.5e-23 */
/* Of the 0.1 % and the 99.9 % point (computed). */
#define GAIN_RANGE 3.0902323061678135

enum { GAIN_POINTS = 23, GAIN_DEPTH = 14 };

struct gain_curve {
    void *ctx;
    /* False where there is no value: then there is no mean. */
    bool (*at)(void *ctx, double z, double *gain, size_t *best);
    size_t none; /* where this choice is best the gain is 0, and is not asked for; or SIZE_MAX */
    double far;  /* one of the places: GAIN_FAR, 8, 6, 5 or 4 */
    double narrow, tolerance;
};

struct gain_change {
    double z;
    size_t below, above; /* the best choice on each side */
};

struct gain {
    double mean, error;
    ARRAY(struct gain_change) changes; /* rising */
};

/* False where some place has no value. The changes live in `a`. */
bool gain_find(struct arena *a, const struct gain_curve *c, struct gain *out);

#endif
