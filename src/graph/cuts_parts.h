/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The parts of the search for minimal cut sets (graph/cuts.h): families of sets as
 * zero-suppressed decision diagrams, the exact order of products, and the best sets of
 * a family. Internal to these files. */
#ifndef GRAPH_CUTS_PARTS_H
#define GRAPH_CUTS_PARTS_H

#include "graph/cuts.h"

/* ---- families (cuts_family.c) ---- */

/* A family of sets of variables is 0 (no set), 1 (the empty set alone), or 2 + the
 * index of a node: the sets of `low`, and those of `high` with `variable` added
 * (S. Minato, Zero-suppressed BDDs, DAC 1993). high is never 0; variables increase
 * downwards; arms come before their node; no two nodes are equal. All families here are
 * antichains: no set contains another. So 1 is the only one that has the empty set. */
enum { FAMILY_NONE = 0, FAMILY_UNIT = 1 };

struct family {
    size_t n_nodes; /* all of them below the root */
    const struct diagram_node *nodes;
    uint32_t root;
};

/* The minimal true-sets of the function `root` (coded as d->roots); false when there
 * are too many. The nodes live in `a`. */
bool family_of(struct arena *a, const struct diagram *d, uint32_t root, struct family *out);

/* ---- products (cuts_product.c) ---- */

/* About mantissa * 2^exponent, mantissa in [0.5, 1): the product of those members that
 * are not 0, to a relative error of n_members units of 2^-52. Cannot underflow. */
struct product {
    double mantissa;
    int64_t exponent;
    uint32_t n_zero, n_members;
};

struct product product_one(void);
struct product product_of(double p);
struct product product_join(struct product x, struct product y);

/* By number of zeros and by product as far as the roundings let it be seen: < 0 when x
 * is better (comes first), > 0 when y is, 0 when only exact figures can tell. */
int product_compare(struct product x, struct product y);

/* Exact comparison of sets. Equal probabilities cancel; only what is left is multiplied
 * out. */
struct exact;
struct exact *exact_new(struct arena *a, const struct family *f, uint32_t n_variables,
                        const double *p);

/* < 0 when the product of the members of x that are not 0 is the greater, 0 when equal. */
int exact_compare(struct exact *e, size_t nx, const uint32_t *x, size_t ny, const uint32_t *y);

/* The product of all members, rounded to the nearest double (twice when subnormal). */
double exact_product(struct exact *e, size_t n, const uint32_t *members);

/* ---- the best sets (cuts_best.c) ---- */

/* At most `limit` sets of a family in the order of cuts_find, in `a`; returns how many. */
size_t family_best(struct arena *a, const struct family *f, uint32_t n_variables, const double *p,
                   size_t limit, const struct cut **out);

#endif
