/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sets of numbers, each kept once: equal sets have one number, so that most questions about
 * them are a comparison. Set 0 is empty. Members rise without repetition. */
#ifndef GRAPH_SETS_H
#define GRAPH_SETS_H

#include "base/array.h"

struct set {
    uint32_t first, n;
};

struct sets {
    struct arena *arena;
    ARRAY(struct set) all;
    ARRAY(uint32_t) members;
    uint32_t *slots; /* set + 1, or 0 */
    size_t n_slots;
};

/* Lives in `a`. */
void sets_init(struct sets *s, struct arena *a);

/* The number of the set with these members, which rise. */
uint32_t sets_number(struct sets *s, const uint32_t *at, size_t n);

/* The members of a set; they stay readable while sets are added. */
const uint32_t *sets_members(const struct sets *s, uint32_t set, size_t *n);

#endif
