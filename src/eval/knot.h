/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The integration of one node over its curved inputs, inside src/eval (see mean.h). */
#ifndef EVAL_KNOT_H
#define EVAL_KNOT_H

#include "eval/spread.h"
#include "eval/state.h"

/* One operation of a walk: an input that is integrated over, or a node that depends on one. */
struct knot_step {
    node_id node;
    uint32_t input; /* place in the list of inputs, or UINT32_MAX */
};

/* A node that is being searched, and how many of its arguments were. */
struct knot_frame {
    node_id node;
    uint32_t next;
    bool depends;
};

/* Searches for what depends on inputs; owned by the knots. */
struct knot_search {
    struct arena *arena;
    const struct graph *g;
    ARRAY(struct knot_frame) stack;
    ARRAY(uint32_t) seen; /* by node: 2 * search, + 1 where it depends */
    uint32_t search;
};

/* In order of evaluation. */
struct knot_steps ARRAY_BODY(struct knot_step);

/* Adds the nodes from the inputs, which rise, up to the roots: arguments before what uses them. */
void knot_find_steps(struct knot_search *k, size_t n_roots, const node_id *roots, size_t n_inputs,
                     const uint32_t *inputs, struct knot_steps *to);

/* Computes them, the inputs at x[place], or at their means where x is NULL. */
void knot_walk(struct eval *v, const struct knot_steps *steps, const double *x);

/* Place of an input in a list that rises, or UINT32_MAX. */
uint32_t knot_place(const uint32_t *inputs, size_t n, uint32_t input);

struct blend;
struct memo;

/* A DIAGRAM among the steps whose results are looked up; x: values of its inputs, which are at
 * `place` among the knot's. */
struct knot_lookup {
    size_t step;
    struct memo *memo;
    size_t n;
    uint32_t *place;
    double *x;
};

/* Of the last diagrams. */
enum { KNOT_MEMOS = 4 };
struct knot_memo {
    struct arena *arena;
    struct memo *memo;
    uint64_t used; /* by which knot, last */
};

struct knots {
    struct arena *arena;
    struct arena *scratch; /* for one knot */
    struct eval *v;
    struct spreads spreads;
    struct knot_search search;
    /* The last knot's: */
    node_id node;
    size_t n_inputs, n_results; /* results: 1, or those of a DIAGRAM */
    ARRAY(struct spread *) inputs;
    struct knot_steps steps; /* the last is the knot itself, unless it is blended */
    struct blend *blend;     /* of a DIAGRAM (blend.h) */
    struct memo *blend_memo; /* NULL where it has inputs of its own */
    ARRAY(struct knot_lookup) lookups;
    struct knot_memo memos[KNOT_MEMOS];
    uint64_t knot;        /* its number */
    ARRAY(double) x;      /* values of the inputs */
    ARRAY(double) size;   /* of each result: the integral of its absolute value */
    ARRAY(double) before; /* each mean as it was a level before */
    double weight;        /* of all points so far */
    ARRAY(double) mean;   /* result k of set s: mean[s * n_results + k] */
};

void knots_init(struct knots *k, struct arena *a, struct eval *v, const struct mean_source *source);

/* The mean of node n, which is curved, in k->mean: *sets is 1, or MEAN_SETS where it was
 * sampled. The values of the evaluation are other ones in between, and the same again at the
 * end, also after a failure. OHMEN_COMPUTE when the node is not finite at some point. */
ohmen_status knot_integrate(struct knots *k, node_id n, size_t *sets, ohmen_error *e);

#endif
