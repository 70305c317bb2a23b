/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What some nodes (targets) are worth in the mean if one unknown quantity has a certain value.
 *
 * Private to src/decide; the means are those of decide/moving.h. A quantity is one or more inputs
 * that rise together: what is stated, and what variants state anew in its place, which samples take
 * as one (math/draw.h). A value is told by z, of which each input is a function: x =
 * quantile(Phi(z)) of its own distribution.
 *
 * Three ways, from fast to slow:
 *   line    one input in which the targets are straight lines by the structure: from two points
 *   nodes   from a polynomial in z through 17 or 33 points of Chebyshev's between -UNKNOWN_FAR and
 *           UNKNOWN_FAR (barycentric form; Berrut & Trefethen, SIAM Review 46 (2004) 501-517),
 *           which converges fast where the targets are smooth. `off` tells how far it may set the
 *           difference of two targets, or a target, off in the mean over z. Of the polynomials
 *           through a half and a quarter of the points that is known at those which they leave out;
 *           the last one is taken to better the half by as much as that betters the quarter
 *   points  each evaluated
 *
 * What is missing where the means are not exact (decide/moving.h) is found for nodes so that the
 * mean of the polynomial over z is the mean of today, by the trapezoidal rule in steps of 1/4. */
#ifndef DECIDE_UNKNOWN_H
#define DECIDE_UNKNOWN_H

#include "decide/moving.h"

#define UNKNOWN_FAR 6.

enum unknown_way { UNKNOWN_LINE, UNKNOWN_NODES, UNKNOWN_POINTS };
enum { UNKNOWN_LEAST = 16, UNKNOWN_MOST = 32 }; /* nodes, without the last one */

struct unknown {
    struct moving *moving; /* of the targets */
    size_t n;
    const struct turn_input **parts; /* by name: the first one under no variant, if there is one */
    const struct quantity **spread;  /* of each */
    bool is_linear, is_exact;        /* by the structure */
    bool is_discrete;                /* one input of certain values */
    enum unknown_way way;
    double *x;               /* of each part, where it was put last */
    double *values;          /* of the targets there */
    double end[2];           /* line: the two points */
    const double *at_end[2]; /* targets there */
    size_t n_nodes;
    const double *node[UNKNOWN_MOST + 1]; /* targets, without what is missing */
    double off, half_off; /* of the polynomial, of the one through half of the nodes */
    bool bare;            /* values are without what is missing (moving.missing) */
};

/* Is input i of the moving unknown, and the first one of its quantity? */
bool unknown_is_first(const struct moving *m, size_t i);

/* The quantity of which it is the first one. What is moved is this one from now on. False where it
 * reaches no target. Lives in the arena of the figures. */
bool unknown_take(struct moving *m, size_t first, struct unknown *out);

/* x of each part at z. False where some quantile cannot be computed. */
bool unknown_put(struct unknown *u, double z);

/* Looks along it in one of these ways. False where it is not possible between the 0.1 % and the
 * 99.9 % point, or has no finite value between them (nodes: somewhere). A line is taken only where
 * is_linear; `n` of nodes is UNKNOWN_LEAST or UNKNOWN_MOST: the latter behind the former. */
bool unknown_line(struct unknown *u);
bool unknown_nodes(struct unknown *u, size_t n);

/* The targets where it was put, or at z of that place; NULL where there are none: not finite, or,
 * unless it is `far`, not possible. They may be written over, and hold until the next time. */
double *unknown_values(struct unknown *u, double z, bool far);

#endif
