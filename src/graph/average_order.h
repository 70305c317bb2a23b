/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How finely to integrate a diagram over time, inside src/graph. */
#ifndef GRAPH_AVERAGE_ORDER_H
#define GRAPH_AVERAGE_ORDER_H

#include "graph/average.h"
#include "graph/legendre.h"

/* The greatest sum of exponents times length that each rule integrates. */
struct reach {
    double of[LEGENDRE_RULES];
};

/* From how many changing variables at a time make a root true, at the times when they are most
 * probable. `scratch` keeps nothing. */
struct reach average_reach(struct arena *scratch, const struct averaged *what);

/* The rule and the number of equal parts with the fewest points for a sum x. */
const struct legendre_rule *average_rule(const struct reach *r, double x, double *parts);

#endif
