/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Distributions of amounts on a lattice, rounded down and up: what aggregate.h takes.
 *
 * An amount within 1e-9 of a point (of its size in steps) is at the point, in both ends: so
 * amounts that are whole numbers of steps stay exact. What is beyond the last point is at no point;
 * an amount below 0 is taken as 0. */
#ifndef MATH_SEVERITY_H
#define MATH_SEVERITY_H

#include "base/arena.h"
#include "math/dist.h"

struct severity {
    size_t first, end; /* points from first to end - 1 are not 0, in one of them at least */
    double *down, *up; /* probabilities of the points first .. end - 1 */
};

/* The lattice: points 0 .. n - 1, a step apart. */
struct lattice {
    double step;
    size_t n;
};

/* times X + shift, where X has the distribution. Lives in `a`. */
struct severity severity_of_dist(struct arena *a, const struct lattice *l, const struct dist *d,
                                 double times, double shift);

/* Equally probable amounts. */
struct severity severity_of_amounts(struct arena *a, const struct lattice *l, size_t n,
                                    const double *amounts);

/* The sum of two independent amounts. */
struct severity severity_sum(struct arena *a, const struct lattice *l, const struct severity *x,
                             const struct severity *y);

/* The points between which an amount lies, equal where it is at one; n for what is beyond. */
struct severity_place {
    size_t down, up;
};
struct severity_place severity_place_of(const struct lattice *l, double amount);

/* Adds the severity `weight` times, moved by as many points down and up, to whole lattices. */
void severity_add(const struct lattice *l, const struct severity *x, double weight,
                  struct severity_place shift, double *down, double *up);

#endif
