/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random structures like those of protection: schemes that need all of a supply, a tree of parts
 * of which all, any or k of n must work, and a breaker; later schemes share supply, breaker and
 * single parts with the first. The same random numbers, the same structures. */
#ifndef TESTS_BENCH_CHAINS_H
#define TESTS_BENCH_CHAINS_H

#include "graph/diagram.h"
#include "random.h"

enum { MOST_SCHEMES = 3, MOST_ELEMENTS = 60, MOST_PARTS = 6, MOST_GATES = 128 };

/* n = 0: the element of a variable works (true is failed); else at least k of n earlier gates. */
struct gate {
    uint8_t n, k, variable;
    uint8_t part[MOST_PARTS];
};

/* Variables are numbered as a walk along the schemes, depth first, meets them. */
struct chains {
    uint8_t n_elements, n_gates, n_schemes;
    uint8_t scheme[MOST_SCHEMES]; /* gates */
    struct gate gate[MOST_GATES];
};

/* Exactly n_elements (4 for each scheme at least, MOST_ELEMENTS at most) in all schemes. */
struct chains chains_draw(struct random *r, unsigned n_elements, unsigned n_schemes);

/* Scheme i works and none before it, for each scheme in order, and none works: one diagram in
 * `a` by a builder of its own, which is gone afterwards. */
const struct diagram *chains_diagram(struct arena *a, const struct chains *c);

#endif
