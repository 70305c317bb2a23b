/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Small random registers for tests of interruptions and harm: as plain arrays, as a document, and
 * by enumeration of every state of the elements. Numbers of the arrays are those of the names:
 * element E1, hazard H0, outcome o2, group G0, interruption i1. */
#ifndef TESTS_CONSEQUENCES_WORLD_H
#define TESTS_CONSEQUENCES_WORLD_H

#include <stdbool.h>

#include "base/arena.h"
#include "random.h"

enum { HAZARDS = 3, ELEMENTS = 5, ROWS = 3, OUTCOMES = 3, CUTS = 3, GROUPS = 3 };
enum { NO_OUTCOME = OUTCOMES + 1 }; /* an end without damage; outcome OUTCOMES is an option's */
enum { NEW_ELEMENT = ELEMENTS };    /* of the option */

/* Customers and load that an outcome interrupts, for whole seconds; 0: not said. */
struct cut {
    unsigned customers, kilowatts, seconds;
};
struct harmed {
    bool is; /* does the outcome harm the group? */
    double present, death, injury;
};
struct world_outcome {
    unsigned n_cuts;
    struct cut cut[CUTS];
    struct harmed harm[GROUPS];
};
/* Clears when its elements work (all of them, or any), and sees the fault. */
struct world_row {
    unsigned elements; /* as bits */
    bool any;
    double sees;
};
struct world_end {
    unsigned outcome, other; /* of a split: `share` of the cases in outcome, the rest in other */
    double share;
};
struct world_hazard {
    double frequency;
    unsigned n_rows;
    bool fitted; /* the option's row acts before all others */
    struct world_row row[ROWS];
    struct world_end end[ROWS + 2]; /* by row, then of what nothing clears, then of the option */
    struct world_outcome outcome[OUTCOMES + 1];
};
struct world {
    struct arena *arena;
    double fails[ELEMENTS + 1];
    struct world_hazard hazard[HAZARDS];
    unsigned persons[GROUPS];
    unsigned served;        /* customers; 0: not said */
    unsigned limit;         /* seconds that a momentary interruption lasts at most */
    const char *limit_text; /* NULL: the standard's own */
    double bad;             /* share of time of the state ST=bad */
    struct cut bad_cut;     /* what it makes of cut 0 of outcome 0 of hazard 0 */
    double bad_death;       /* and of the harm to group 0 there */
};

struct world *world_random(struct arena *a, uint64_t seed);
/* Its document, with option FIT and state ST. */
const char *world_text(const struct world *w);
/* The world with the option in service, or in the bad state. */
void world_fit(struct world *w);
void world_turn_bad(struct world *w);

/* What a hazard does in one year, by group where there are several. */
struct done {
    long double interruptions, momentary, customer_seconds, kilowatt_seconds;
    long double death[GROUPS], injury[GROUPS];
};
struct done world_enumerate(const struct world *w, unsigned hazard);

#endif
