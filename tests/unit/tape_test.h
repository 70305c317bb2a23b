/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Graphs for tests of tapes, and what every lane must be: the point rules themselves, one node
 * after the other, with the values of that lane. */
#ifndef TESTS_TAPE_TEST_H
#define TESTS_TAPE_TEST_H

#include "eval/tape_parts.h"

#include "random.h"

#include <check.h>

/* Inputs that are any numbers, and behind them those that are rates of courses. */
enum { TAPE_NUMBERS = 4, TAPE_RATES = 2, TAPE_INPUTS = TAPE_NUMBERS + TAPE_RATES };
enum { TAPE_MOST_LANES = 1000 };

struct tape_world {
    struct arena *arena;
    struct graph *g;
    struct eval *v;
    struct random r;
    ARRAY(node_id) pool; /* nodes with one value each */
};

/* The graph has its inputs, and an open section. */
void tape_world_open(struct tape_world *w, struct arena *a, uint64_t seed);
/* Adds one node of the operation, whose value is tame at the means, with arguments from the pool
 * or constants; returns it, or for operations that are part of others a node that uses it. */
node_id tape_world_add(struct tape_world *w, enum graph_op op);

/* Values of inputs and given nodes in lanes: special ones among them. Rows are not aligned. */
struct tape_lanes {
    size_t n, n_in;
    double **in;
    bool at_once; /* run for all n only, not for smaller numbers of lanes */
};
struct tape_lanes tape_lanes_draw(struct tape_world *w, size_t n, size_t n_in);

/* Makes tapes in every way, for every instruction set, and compares all lanes of all roots with the
 * point rules, for sizes up to n. block 0: that of the tape. */
void tape_check(struct tape_world *w, const struct tape_inputs *in, size_t n_roots,
                const node_id *roots, const struct tape_lanes *values, size_t block);

/* All inputs. */
extern const struct tape_inputs tape_all_inputs;

bool tape_same(double x, double y);

#define EACH_ISA(isa)                                                                              \
    for (enum isa isa = ISA_plain; isa < ISA_COUNT; isa++)                                         \
        if (isa_runs(isa))

/* The sample's documents. */
extern const char *tape_figures_folder;
Suite *tape_figures_suite(void);

#endif
