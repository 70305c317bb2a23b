/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A random decision in several stages, as a document and worked out by itself: the oracle of the
 * tests of trees. It knows what documents mean and nothing of src/decide.
 *
 * No beliefs are formed and no rule of Bayes is used. Every policy has a cost given each hidden
 * state; what lies behind a step is the set of these, one row a policy (rows that are nowhere
 * better than another are left out). A choice unites sets, a chance or a reading takes one row of
 * each branch in all ways. The value is the least mean over the hidden states at the start. States
 * that change with time do so by the exponential of their matrix (GSL), and the time spent in each
 * by Gauss and Legendre's rule over it. Nothing is merged.
 *
 * Invariant: with a discount all happens at whole years, so that no convention about parts of
 * years enters. */
#ifndef TESTS_BRANCHING_WORLD_H
#define TESTS_BRANCHING_WORLD_H

#include <stdbool.h>

#include "base/text.h"
#include "random.h"

enum { TREE_HAZARDS = 2, TREE_OPTIONS = 4, TREE_STATES = 2, TREE_VALUES = 3, TREE_HIDDEN = 9 };
enum { TREE_BRANCHES = 3, READINGS = 2 };

struct tree_option {
    double invest, on, service, running, residual, life, early; /* 0: none, but for dates: NAN */
    bool renewed, bare; /* bare: it changes nothing but states */
    double factor[TREE_HAZARDS], early_factor;
    int sets[TREE_STATES]; /* -1: not */
};

struct tree_state {
    size_t n;
    double p[TREE_VALUES], factor[TREE_VALUES][TREE_HAZARDS];
    double becomes[TREE_VALUES][TREE_VALUES]; /* per a; 0: not */
    double given[TREE_VALUES][READINGS], costs;
    int renewed_by_failure; /* of the first hazard: to this state; -1: not */
};

enum tree_step_kind {
    TREE_PAY,
    TREE_WAIT,
    TREE_APPLY,
    TREE_CHANGE,
    TREE_CHOOSE,
    TREE_CHANCE,
    TREE_READ
};

struct tree_steps;
struct tree_step {
    enum tree_step_kind kind;
    double number; /* EUR, a, or a factor of the first hazard */
    size_t which;  /* option, or state */
    size_t n;
    struct tree_steps *branches[TREE_BRANCHES];
    double p[TREE_BRANCHES];
};
struct tree_steps ARRAY_BODY(struct tree_step);

struct tree_world {
    struct arena *a;
    struct random *r;
    bool *too_many; /* set where there are too many policies to be listed: no value */
    bool evolves, repeats, fractions, sees[TREE_STATES];
    bool exclude; /* the first two options each other */
    double horizon, discount, every;
    double frequency[TREE_HAZARDS], damage[TREE_HAZARDS];
    size_t n_options, n_states;
    struct tree_option options[TREE_OPTIONS];
    struct tree_state states[TREE_STATES];
    size_t n;
    struct tree_steps *choose[TREE_BRANCHES];
};

enum tree_sort { TREE_ONCE, TREE_EVOLVING, TREE_REPEATED, TREE_SORTS };

/* Draws a world, and writes its document. */
const char *tree_world_draw(struct tree_world *w, enum tree_sort sort);

/* The name of the k-th branch of a choice. */
const char *tree_branch(size_t k);

/* The least expected cost and damage; with the first choice fixed where first is below w->n. Of
 * doing nothing at all where `nothing`. */
double tree_world_value(struct tree_world *w, size_t first);
double tree_world_nothing(struct tree_world *w);

#endif
