/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The tree of tests/bench/rollback.c rolled back by a loop written by hand, compiled once for each
 * instruction set, with the options of the kernels. It knows the tree: level l, of size[l] nodes
 * that begin at start[l], has three children a node up to its last level, level 0 chooses, and
 * chances and choices change by turns. */
#ifndef TESTS_BENCH_ROLLBACK_MODEL_H
#define TESTS_BENCH_ROLLBACK_MODEL_H

#include <stddef.h>

#include "base/isa.h"

enum { MODEL_ARITY = 3, MODEL_MOST_LEVELS = 24 };

struct rollback_model {
    int levels; /* the last are ends */
    size_t start[MODEL_MOST_LEVELS], size[MODEL_MOST_LEVELS];
};

typedef void rollback_model(const struct rollback_model *m, const double *amount, const double *p,
                            double *value);

#define X(name, needs) rollback_model rollback_model_##name;
ISAS(X)
#undef X

#endif
