/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which worlds an alternative of a tree goes through, in which hidden states, how long: what may
 * come, with its probability, where the policy is followed.
 *
 * Each path through chances and readings, in each hidden state, is one of the things that may come:
 * so that what is certain once a path is taken is not averaged. Where states change with time, and
 * beyond SPELL_PATHS of them, there is one path only, on which the expected share of each year
 * stands for what happens; the frequencies of hazards are right then, and only what would make bad
 * years come together is missing. */
#ifndef DECIDE_BRANCHING_SPELLS_H
#define DECIDE_BRANCHING_SPELLS_H

#include "decide/branching.h"

#define SPELL_PATHS 64

struct spell {
    const struct world *world;
    size_t hidden;
    double *share; /* by year of the horizon: of the year */
};
struct spell_path {
    double probability;
    ARRAY(struct spell) spells;
};
struct spell_paths ARRAY_BODY(struct spell_path);

/* Of an alternative, by its place; 0: doing nothing. */
void branching_spells(struct arena *a, const struct branching *b, size_t alternative,
                      struct spell_paths *out);

#endif
