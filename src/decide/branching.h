/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decisions in several stages: trees of choices, chances and inspections, and choices that come
 * again (docs/methods.md, "Decisions in several stages").
 *
 * A branch is a list of steps in time: pay, wait, apply an option, change the register; then a
 * choice, a chance or an inspection, or the end. An option that is applied some time behind the
 * start comes into service, is paid, renewed and worn out that much later than its dates say. What
 * it costs over the horizon, and what is paid, is a cost of the branch; the damage of hazards while
 * time passes, under all that was applied so far, is its damage. Behind its last step a branch goes
 * on as it is to the end of the horizon, or to the next choice (`every`). All amounts are present
 * values by the conventions of weigh.h.
 *
 * What is unknown (states) is what it is, whatever anybody believes: figures are worked out for
 * each hidden state (world.h) and averaged with what is believed of it at the place where one
 * stands. Inspections turn beliefs by Bayes' rule: P(state | reading) = P(reading | state)
 * P(state) / P(reading). A choice can only depend on what was read or seen before, never on the
 * state itself.
 *
 * Places with the same choice before them at the same time, with the same options in service and
 * the same beliefs (to 1e-9), are one, however one came there: the tree is a graph.
 *
 * Rolling back (Raiffa & Schlaifer 1961; math/rollback.h): at a choice the branch with the least
 * expected cost and damage to come is taken, ties by the order of names; at a chance or a reading
 * branches count by their probabilities. Values follow the policy that is best for the means;
 * so that in a sample over what is unknown the policy stays as it is.
 *
 * With K hidden states the value of a point is the sum over them of what is believed of each times
 * the value given that it is the case ("alpha vectors": Smallwood & Sondik, Operations Research 21
 * (1973) 1071, from memory). */
#ifndef DECIDE_BRANCHING_H
#define DECIDE_BRANCHING_H

#include "decide/world.h"
#include "math/rollback.h"

/* Points and branches of one decision, and how often a choice may come again. */
#define BRANCHING_MOST 200000
#define STAGES_MOST 1000
#define BELIEFS_MOST 1000 /* at one choice, where the decision does not say */

enum point_kind { POINT_CHOOSE, POINT_CHANCE, POINT_READ, POINT_SEE, POINT_END };

enum move_kind { MOVE_PAY, MOVE_APPLY, MOVE_RESET, MOVE_TIME };

/* Something that happens on a branch, in order of time. */
struct move {
    enum move_kind kind;
    double at, to;               /* years from the start; `to` of MOVE_TIME */
    const struct quantity *paid; /* MOVE_PAY */
    const char *what;            /* MOVE_PAY: "pay", or the test; MOVE_APPLY: the option */
    double before;               /* MOVE_APPLY: by how much later it was applied before; -1: it was
                                    not */
    struct world *world;         /* MOVE_TIME */
    size_t span;                 /* MOVE_TIME: equal ones have the same number */
    const size_t *map;           /* MOVE_RESET: the hidden state that each becomes */
};

struct way {
    const char *label; /* as in the document; a reading; a state: "renew", "poor", "aged" */
    const char *path;  /* "survey-first/poor/renew" */
    const char *steps; /* in words; "" for none */
    ARRAY(struct move) moves;
    size_t number;                /* among all branches of the tree; that of doing nothing last */
    size_t to;                    /* point */
    const struct quantity *share; /* of a chance; NULL for the rest */
    const double *likelihood;     /* of a reading or what is seen, by hidden state; else NULL */
    double probability;           /* given that one stands at the point; of a choice 1 */
    const double *belief;         /* at its beginning */
    const node_id
        *amounts; /* cost and damage on it, by hidden state at its beginning; NODE_NONE: 0 */
    const node_id *costs; /* of that the cost */
    double amount;        /* cost and damage on it, as believed at its beginning */
    double cost;          /* of that the cost */
    double whole_cost;    /* from its beginning on, the policy followed */
    double value;         /* cost and damage from its beginning on, the policy followed */
    double reach;         /* probability of taking it, the policy followed */
    figure_id probability_figure, value_figure, reach_figure; /* or FIGURE_NONE */
};

struct point {
    enum point_kind kind;
    const char *path; /* of the branch by which it was found; "" for the first */
    double time;
    struct path done; /* what was applied and changed so far */
    const double *belief;
    size_t n;
    struct way *branches;
    size_t first_branch; /* number of the first one among all branches of the tree */
    size_t best;         /* POINT_CHOOSE: the branch to take */
    bool is_stage;       /* a choice that comes again */
    const char *state; /* of a stage: what is seen or believed, and what is in service; else NULL */
    const char *test;  /* POINT_READ: "T2-WINDING.OIL" */
    double value, reach;
    double whole_cost; /* from here on, the policy followed */
    figure_id value_figure, reach_figure;
};

/* What an alternative is worth beside the ranking. */
struct survey_worth {
    const struct alternative *of, *other; /* begins with the reading; the best of the others */
    const char *test;                     /* "T2-WINDING.OIL" */
    figure_id price;                      /* present value of what is paid before the reading */
    figure_id worth; /* what the reading is worth at most: it pays up to this price */
};

struct branching {
    struct weighing *weighing;
    struct worlds worlds;
    size_t n_spans;             /* different stretches of time in different worlds */
    ARRAY(struct point) points; /* the first is the root */
    size_t *order;              /* of points: each behind all that it leads to */
    bool repeats;
    size_t n_stages;
    const char **stages; /* "2031" */
    double every;
    struct way *nothing; /* to the end of the horizon as it is */
    ARRAY(struct survey_worth) surveys;
    const struct rollback *laid_out; /* points, then their branches in order, then nothing */
};

/* The alternative of a choice that comes again: the best branch each time. */
#define POLICY "policy"

/* Compiles a decision that is a tree: fills the weighing as weigh_compile does, with one
 * alternative a branch of the first choice beside doing nothing; of a choice that comes again
 * POLICY, and "renew-first" for each branch "renew": taken at the start, and then the policy. The
 * only option of an alternative is its branch's label. Figures that have no
 * meaning for a tree stay FIGURE_NONE. OHMEN_COMPUTE with the path where the tree cannot be
 * followed. */
ohmen_status branching_compile(struct figures *f, struct weighing *w, ohmen_error *e);

/* The number of a branch in the layout's builder. */
size_t branching_number(const struct branching *b, size_t point, size_t branch);

#endif
