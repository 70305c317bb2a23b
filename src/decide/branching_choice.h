/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree of which the means may be others: see branching.h and information.h. */
#ifndef DECIDE_BRANCHING_CHOICE_H
#define DECIDE_BRANCHING_CHOICE_H

#include "decide/branching_parts.h"
#include "decide/information.h"

/* Which: the place among the alternatives of its weighing; doing nothing is worth 0. Not for
 * several threads at once. Borrows the tree; lives in `a`. */
struct choice choice_of_branching(struct arena *a, const struct branching *b);

/* Of a tree or of options. */
struct choice choice_of_decision(struct arena *a, const struct figures *f, struct weighing *w);

/* Targets that are sampled at most. */
#define BRANCHING_SAMPLED 20000

/* The targets of a choice in samples by the plan, without a precision to reach. Lives in `a`.
 * OHMEN_COMPUTE for more than BRANCHING_SAMPLED targets, and as figures_sample. */
ohmen_status branching_sample(struct figures *f, struct arena *a, const struct choice *c,
                              const struct sampling_plan *plan, struct sampling *out,
                              ohmen_error *e);

/* The unknown states of the register that have figures: those that reach something that was
 * compiled. */
size_t states_of_decision(struct arena *a, const struct figures *f,
                          const struct unknown_state **out);

#endif
