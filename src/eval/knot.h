/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The integration of one node over its curved inputs, inside src/eval (see mean.h). */
#ifndef EVAL_KNOT_H
#define EVAL_KNOT_H

#include "eval/spread.h"
#include "eval/state.h"

/* One operation of a walk: an input that is integrated over, or a node that depends on one. */
struct knot_step {
    node_id node;
    uint32_t input; /* place among the curved inputs, or UINT32_MAX */
};

/* A node that is being searched, and how many of its arguments were. */
struct knot_frame {
    node_id node;
    uint32_t next;
    bool depends;
};

struct knots {
    struct arena *arena;
    struct eval *v;
    struct spreads spreads;
    /* The last knot's: */
    size_t n_inputs, n_results; /* results: 1, or those of a DIAGRAM */
    ARRAY(struct spread *) inputs;
    ARRAY(struct knot_step) steps; /* in order of evaluation; the last is the knot itself */
    ARRAY(double) x;               /* values of the inputs */
    ARRAY(double) size;            /* of each result: the integral of its absolute value */
    ARRAY(double) before;          /* each mean as it was a level before */
    double weight;                 /* of all points so far */
    ARRAY(double) mean;            /* result k of set s: mean[s * n_results + k] */
    /* Of the search: */
    ARRAY(struct knot_frame) stack;
    ARRAY(uint32_t) seen; /* by node: 2 * search, + 1 where it depends */
    uint32_t search;
};

/* The mean of node n, which is curved, in k->mean: *sets is 1, or MEAN_SETS where it was
 * sampled. The values of the evaluation are other ones in between, and the same again at the
 * end, also after a failure. OHMEN_COMPUTE when the node is not finite at some point. */
ohmen_status knot_integrate(struct knots *k, node_id n, size_t *sets, ohmen_error *e);

#endif
