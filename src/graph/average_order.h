/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How finely to integrate a diagram over time, inside src/graph. */
#ifndef GRAPH_AVERAGE_ORDER_H
#define GRAPH_AVERAGE_ORDER_H

#include "graph/average.h"
#include "graph/legendre.h"

/* How likely a variable is at the most, and on which of its arms something grows from 0. */
struct extreme {
    double p, q;
    bool grows_true, grows_false;
};
struct extreme average_still(double p, double q);
struct extreme average_extreme(const struct course *c, const struct mixture *m,
                               const struct windows *w);

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
 * probable. `part` is scratch, as long as the diagram has nodes, and 2 more. */
struct reach average_reach(const struct diagram *d, const struct extreme *extremes,
                           double (*part)[LEGENDRE_ORDERS]);

/* The rule and the number of equal parts with the fewest points for the sums x. */
const struct legendre_rule *average_rule(const struct reach *r, const double x[PACES],
                                         double *parts);

#endif
