/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What an evaluation holds, inside src/eval.
 *
 * Invariant: value[i] is that of node i for i < done. A DIAGRAM has many results:
 * its value is where they begin in `results`, a whole number that PICK adds to.
 * The scratch arrays are as long as the longest list of arguments and the largest
 * diagram met so far. */
#ifndef EVAL_STATE_H
#define EVAL_STATE_H

#include "eval/eval.h"
#include "graph/average.h"
#include "graph/diagram.h"

struct course_values {
    double x[COURSE_ARGS];
};

struct eval {
    struct arena *arena;
    const struct graph *g;
    enum isa isa; /* of averages over windows */
    ARRAY(double) value;
    size_t done;
    ARRAY(double) results;                /* of all DIAGRAM nodes */
    ARRAY(double) weights;                /* backward: of results */
    ARRAY(double) args;                   /* scratch: values of arguments, p of a diagram */
    ARRAY(double) q;                      /* scratch: complements of p */
    ARRAY(double) arg_back;               /* scratch: derivatives of arguments */
    ARRAY(double) work;                   /* scratch: probabilities of a diagram's nodes */
    ARRAY(double) work_back;              /* scratch: derivatives of them */
    ARRAY(const struct course *) courses; /* scratch: of a diagram over windows */
    ARRAY(struct course_values) course_values;
    ARRAY(struct course_values) course_back; /* scratch: derivatives of them */
    size_t n_replaced;       /* of a prober (probe.h), else 0: nodes whose value is not */
    const node_id *replaced; /* what their operation makes of their arguments */
};

/* The arguments of node n as numbers, in v->args. */
const double *eval_gather(struct eval *v, node_id n);

/* 1 less the value of n. Where n was made as a complement, what it is the complement of is more
 * accurate than 1 - p. */
double eval_complement(const struct eval *v, node_id n);

/* Makes an array of n, not cleared, in place of what was there. */
#define ROOM(v, arr, want)                                                                         \
    ((arr)->n = 0, array_reserve((v)->arena, (arr), (want)), (arr)->n = (want), (arr)->at)

/* How many results a DIAGRAM has: roots, for each window. */
size_t eval_results(const struct eval *v, node_id n);

/* Computes all results of DIAGRAM node n into `results` (room for them is there);
 * leaves p in v->args, q in v->q and, without windows, the nodes' probabilities in v->work. */
void eval_diagram(struct eval *v, node_id n, double *results);

/* What DIAGRAM node n averages over its windows, of which it has some; in v->args, v->q,
 * v->courses and v->course_values. */
struct averaged eval_averaged(struct eval *v, node_id n);

/* Computes node n from the values of its arguments, as eval_point does, and returns its value,
 * finite or not: an INPUT's mean; of a DIAGRAM `place`, where its results go into v->results,
 * which is long enough. */
double eval_node(struct eval *v, node_id n, size_t place);

#endif
