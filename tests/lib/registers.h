/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random registers for tests: whole, valid documents of any size from a seed.
 *
 * The same seed and shape give the same tree. What a register says makes no sense to an
 * engineer, but it holds everything that documents may hold: nested expressions of the
 * right dimension, schemes in schemes that share elements, splits in splits, damage that
 * depends on the clearance time, options that touch one another.
 *
 * Whatever hazards, options and decisions need can be evaluated by this version; what is
 * only stored or depends on time (priors of other forms, elements without failures on
 * demand, unwanted(...), trees) stands in objects that no hazard leads to, or in fields that
 * figures leave out. */
#ifndef TESTS_REGISTERS_H
#define TESTS_REGISTERS_H

#include "doc/node.h"
#include "model/kinds.h"
#include "random.h"

struct register_shape {
    unsigned sources, sites, groups, values, rates, types, elements, schemes, hazards, options,
        decisions;
    unsigned rows;  /* of a response, at most (the last one not counted) */
    unsigned depth; /* of expressions, structures and branches, at most */
    bool stored;    /* sprinkle fields and objects that are only stored */
};

/* A dozen objects of each kind; at most 18 different events in one hazard. */
extern const struct register_shape register_small;

/* The document: a root map of sections, scalars as text. Options alone leave a register
 * without fault; two that do not contradict do so together. */
struct node *random_register(struct arena *a, uint64_t seed, const struct register_shape *shape);

#endif
