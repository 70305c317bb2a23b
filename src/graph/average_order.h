/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How finely to integrate a diagram over time, inside src/graph. */
#ifndef GRAPH_AVERAGE_ORDER_H
#define GRAPH_AVERAGE_ORDER_H

#include "graph/average.h"
#include "graph/average_kernels.h"
#include "graph/legendre.h"

struct extreme average_still(double p, double q);

/* When a variable is most probable: right after the beginning, right after a reset, and just before
 * the next. */
struct extreme_times {
    struct moments at;
    bool fresh;
};
void average_times(const struct course *c, const struct windows *w, struct extreme_times *to);
struct extreme average_extreme(const struct average_kernels *k, const struct extreme_times *t,
                               const struct mixture *m);

/* The exponents of a course, for rules of up to 4, 8 and 16 nodes: those of the fastest version
 * that counts for so many; and the slowest exponents. Of what is reset, and of what is not (0 where
 * there is nothing of it). */
enum { PACES = 3 };
struct pace {
    double reset[PACES], unreset[PACES];
    double slowest_reset, slowest_unreset;
};
struct pace average_pace(const struct mixture *m);

/* The greatest sum of exponents times length that each rule integrates. */
struct reach {
    double of[LEGENDRE_RULES];
};

/* From how many changing variables at a time make a root true, at the times when they are most
 * probable: `part` is that of each node and of the constants before them. */
struct reach average_reach(size_t n_roots, const uint32_t *roots, orders *part);

/* The rule and the number of equal parts with the fewest points for the sums x. */
const struct legendre_rule *average_rule(const struct reach *r, const double x[PACES],
                                         double *parts);

#endif
