/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree of which the means may be others: see branching.h and information.h. */
#ifndef DECIDE_BRANCHING_CHOICE_H
#define DECIDE_BRANCHING_CHOICE_H

#include "decide/branching_parts.h"
#include "decide/information.h"

/* Which: the place among the alternatives of its weighing; doing nothing is worth 0. Not for
 * several threads at once. Borrows the tree; lives in `a`. */
struct choice choice_of_branching(struct arena *a, const struct branching *b);

#endif
