/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the worth of a decision leans on: stated quantities by how much one per cent more of each
 * moves the net present value.
 *
 * Of the best alternative against doing nothing (where doing nothing is best: of the best option).
 * By the derivative of the difference at the means of what is unknown, summed over all nodes in
 * which the input stands (turn_inputs.h): 0.01 x now x d(difference) / d(input). So it is the
 * slope at today's value; for what a larger step does see decide/turn.h. */
#ifndef DECIDE_LEAN_H
#define DECIDE_LEAN_H

#include "decide/weigh.h"

struct lean {
    const char *name; /* DECISION.leans-on[INPUT].ALTERNATIVE */
    figure_id input;
    const struct alternative *of; /* whose net present value moves */
    double now;                   /* the input, in base units */
    double one_percent;           /* money */
};
struct leans ARRAY_BODY(struct lean);

/* Greatest movement first, ties by name; inputs that move nothing are left out. weigh_rank has been
 * called. Lives in the arena of the figures. */
void leans_find(struct figures *f, const struct weighing *w, struct leans *out);

/* Does a name have the form of lean.name? */
bool lean_is_named(const char *name);

/* Finds one by its name; compiles and ranks its decision. OHMEN_UNKNOWN with the nearest name. */
ohmen_status lean_find(struct figures *f, const char *name, struct lean *out, ohmen_error *e);

#endif
