/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How what an alternative of a tree comes to is distributed over the ways that it may go: over
 * chances and readings, the policy followed.
 *
 * Of each way the present value of what is paid, and of the damage that is expected on it as
 * believed at the beginning of each branch; its mean over the ways is the total of the alternative.
 * How much the damage itself varies beyond that is another matter (loss.h). */
#ifndef DECIDE_PROFILE_OF_H
#define DECIDE_PROFILE_OF_H

#include "decide/branching.h"
#include "math/profile.h"

/* Ways that come to different amounts; beyond it neighbours are merged (math/profile.h). */
#define PROFILE_WAYS 200

/* By alternative of the weighing: what it is worth, which is the amount with its sign turned, so
 * that more is better. Lives in `a`. */
struct profile *branching_profiles(struct arena *a, const struct branching *b);

#endif
