/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of branching share. Private to src/decide. */
#ifndef DECIDE_BRANCHING_PARTS_H
#define DECIDE_BRANCHING_PARTS_H

#include <string.h>

#include "decide/branching.h"
#include "decide/cost.h"

/* A tree that is being grown. */
struct growing {
    struct figures *f;
    struct branching *b;
    double horizon;
    struct strmap points;    /* key of a place -> (void *)(number + 1) */
    struct strmap stretches; /* what a path applied -> struct stretches */
    struct strmap paths;     /* of points that were named so */
    struct strmap believed;  /* stage and belief */
    struct strmap spans;     /* world and time -> (void *)(number + 1) */
    ARRAY(size_t) order;     /* points, each behind what it leads to */
    size_t n_branches;
    size_t *beliefs; /* by stage */
};

/* Grows the whole tree: points, branches, moves, beliefs, and the order. */
ohmen_status branching_grow(struct growing *g, ohmen_error *e);

/* The value of a certain quantity of the decision. */
ohmen_status branching_certain(struct figures *f, const struct weighing *w,
                               const struct quantity *q, double *out, ohmen_error *e);

/* Nodes by hidden state; NODE_NONE is 0, or not asked for. */
struct by_state {
    node_id *at;
};

/* Nodes of one measure in each span of time (NULL: not yet), by hidden state. */
struct measured {
    struct measure of;
    node_id **in_span;
};

/* The section of a tree's figures under construction. */
struct rolling {
    struct worth worth;
    struct branching *b;
    ARRAY(struct measured) measured; /* measures of worlds that have nodes already */
    struct strmap stated;            /* quantities of the document that have a node already */
    struct strmap *told; /* figures on the way that are there already; NULL: none are made */
};

/* Gives what is to come on the way a figure for each hidden state, "to-come.PATH.damage, aged at
 * 3 a": derivations name it there instead of unfolding what follows, which doubles with each year.
 * at: years from the start; below 0 at a point. */
void branching_tell(struct rolling *r, const char *path, const struct measure *m, double at,
                    const struct by_state *x);

/* A quantity of the decision: one node, wherever it is asked for. */
node_id branching_stated(struct rolling *r, const struct quantity *q);

/* What comes to pass from the beginning of a branch on, if `end` (NULL: nothing) comes behind it:
 * the cost where m is NULL, else the measure. Only of hidden states that are possible at its
 * beginning. */
struct by_state branching_back(struct rolling *r, const struct way *b, const struct measure *m,
                               const struct by_state *end);

/* Values, policy, reach, as numbers; then figures of all of it, and the alternatives. */
ohmen_status branching_roll_back(struct branching *b, struct figures *f, ohmen_error *e);
ohmen_status branching_figures(struct branching *b, struct figures *f, ohmen_error *e);

/* All branches: number 0 of point 0 first. `nothing` is not among them. */
size_t branching_count(const struct branching *b);

#endif
