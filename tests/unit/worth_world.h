/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random registers in which much is worth something: what tests/lib/registers.h makes, with
 * interruptions and harm in many outcomes, options that cost and come and go, hazards that grow,
 * and an operating state that reaches some. And what is avoided in them, year by year in long
 * double, from what hazards do in each year. */
#ifndef TESTS_WORTH_WORLD_H
#define TESTS_WORTH_WORLD_H

#include "figure/consequences.h"
#include "loaded.h"
#include "registers.h"

struct node *worth_register(struct arena *a, uint64_t seed);

struct worth_sum {
    long double avoided, size; /* size: of all that was added up, without signs */
};

/* As a present value: PROPERTY_RISK, or an effect that is kept year by year. */
struct worth_sum worth_present(struct loaded *l, const struct weighing *w,
                               const struct alternative *x, enum property p, const char *of);

/* In a mean year, with all options of the alternative in service: any effect. */
struct worth_sum worth_mean(struct loaded *l, const struct weighing *w, const struct alternative *x,
                            enum property p, const char *of);

#endif
