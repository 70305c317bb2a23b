/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reduced ordered binary decision diagrams (Bryant, IEEE Trans. Computers C-35
 * (1986) 677): exact probabilities of Boolean functions of independent variables
 * that share parts.
 *
 * A builder makes functions; diagram_freeze turns chosen ones into an immutable
 * diagram whose nodes are in an order of evaluation. Variables are numbered by the
 * caller; their order in the diagram is their number. Because all arms are added
 * and never subtracted, the probability of a root is accurate to a few units in
 * the last place per level, however small it is. */
#ifndef GRAPH_DIAGRAM_H
#define GRAPH_DIAGRAM_H

#include "base/error.h"
#include "base/array.h"

#include <stdbool.h>

/* Nodes of one builder beyond this number are refused (DIAGRAM_FULL). */
#define DIAGRAM_NODES (1u << 22)

typedef uint32_t bfun; /* a function in a builder */
enum { BFUN_FALSE = 0, BFUN_TRUE = 1 };
#define DIAGRAM_FULL UINT32_MAX /* what every operation returns once the limit is hit */

struct diagram_builder;
struct diagram_builder *diagram_builder_new(struct arena *a);

/* All of these return the one function that is equal; the depth of their recursion
 * is at most the number of variables. */
bfun diagram_variable(struct diagram_builder *b, uint32_t variable);
bfun diagram_not(struct diagram_builder *b, bfun f);
bfun diagram_and(struct diagram_builder *b, bfun f, bfun g);
bfun diagram_or(struct diagram_builder *b, bfun f, bfun g);
/* At least k of the n functions (k = 0 is true, k > n is false). */
bfun diagram_at_least(struct diagram_builder *b, uint32_t k, size_t n, const bfun *f);
bfun diagram_ite(struct diagram_builder *b, bfun f, bfun g, bfun h);

struct diagram_node {
    uint32_t variable;
    uint32_t high, low; /* 0 false, 1 true, else 2 + index of an earlier node */
};

struct diagram {
    uint32_t n_variables; /* greatest variable + 1 (or 0) */
    size_t n_nodes;
    const struct diagram_node *nodes; /* children before parents */
    size_t n_roots;
    const uint32_t *roots; /* coded like high and low */
    uint64_t hash;         /* of the structure: equal diagrams are equal bytes */
};

/* NULL when one of the roots is DIAGRAM_FULL. Lives in `a`. The variables that
 * occur and the structure are canonical: the same functions give the same bytes. */
const struct diagram *diagram_freeze(struct arena *a, const struct diagram_builder *b,
                                     size_t n_roots, const bfun *roots);

bool diagram_equal(const struct diagram *a, const struct diagram *b);

/* results[k] = probability of root k. p[v] and q[v] = 1 - p[v] for each variable;
 * work holds n_nodes + 2 doubles. */
void diagram_evaluate(const struct diagram *d, const double *p, const double *q, double *work,
                      double *results);

/* Adds to dp[v] the derivative of sum_k weight[k] * root k with respect to p[v]
 * (with q = 1 - p). `work` as filled by diagram_evaluate; back holds n_nodes + 2
 * doubles. */
void diagram_backward(const struct diagram *d, const double *p, const double *q,
                      const double *work, const double *weight, double *back, double *dp);

#endif
