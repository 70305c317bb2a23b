/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Minimal cut sets of a Boolean function that is held as a decision diagram: which
 * few things, when they come together, make it true.
 *
 * A true-set of a function f is a set T of variables such that f is true when the
 * variables of T are true and ALL others are false. A minimal cut set is a true-set
 * of which no proper subset is a true-set. Exactly these are found, for any f:
 *
 *   - f monotone: the usual minimal cut sets. (Removing any one member makes f false.)
 *   - f not monotone: the minimal cut sets of its monotone hull, the least monotone
 *     function above f, "some subset of what is true is a true-set". These are also the
 *     minimal ones among the positive parts of the prime implicants of f: negated
 *     literals are dropped, then what contains another one. Further members may make f
 *     false again, and removing one member makes it false, but so might removing one of
 *     a set that is not minimal: only the definition decides.
 *   - f true when all variables are false: one set, the empty one. f never true: none.
 *
 * The sets are held as a zero-suppressed decision diagram and made by the recursion of
 * A. Rauzy, New algorithms for fault trees analysis, Reliability Engineering and System
 * Safety 40 (1993) 203-211:
 *   min(x ? f1 : f0) = min(f0)  and  x + s for each s of min(f1) that contains no set
 *                      of min(f0).
 * So they need not be listed to be counted, and their number may be beyond any list.
 *
 * The product of a set is that of the probabilities of its members (1 of the empty
 * set): the probability that all of them are true, if they are independent. Sets are
 * compared by their products as real numbers, exactly, not as they come out when rounded
 * factor by factor. */
#ifndef GRAPH_CUTS_H
#define GRAPH_CUTS_H

#include "graph/diagram.h"

/* What one search may take; whichever is hit first ends it (too_many). Both depend on
 * the diagram alone, never on time or machine. The steps take some seconds at most. */
#define CUTS_NODES (1u << 22) /* nodes of the families of sets, those in between included */
#define CUTS_STEPS (1u << 25) /* differences of two families that had to be worked out */

#define CUTS_NEVER UINT32_MAX

struct cut {
    double product; /* rounded once from the exact product; 0 where that is below all doubles */
    uint32_t n_members;
    const uint32_t *members; /* variables, ascending */
};

struct cuts {
    bool too_many;      /* a limit was hit: nothing is known, all below is 0 */
    uint64_t n_all;     /* minimal cut sets there are; UINT64_MAX: that many or more */
    uint32_t n_singles; /* of these, with one member */
    size_t n;           /* sets returned: the lesser of limit and n_all */
    const struct cut *sets;
};

/* The `limit` most probable minimal cut sets of root number `root` (< d->n_roots).
 * p[v] in 0..1 for each variable v that is in a minimal cut set; others are not read.
 * The order, which is total: fewer members with p = 0 first (so products of 0 last);
 * then the greater product of the other members; then fewer members; then the lesser
 * variable where the ascending members first differ. Products therefore never rise.
 *
 * The result lives in `a`; scratch memory is given back: at most about 100 bytes for
 * each node of the families, and for each set returned about 100 times the number of
 * variables. `limit` may be 0: only the counts, and p is not read. The sets are found
 * best first, not by listing all. Recursion is no deeper than the number of variables. */
struct cuts cuts_find(struct arena *a, const struct diagram *d, size_t root, const double *p,
                      size_t limit);

/* The least number of members of a true-set, which is that of the smallest minimal cut
 * set: 0 when all false makes the function true, CUTS_NEVER when nothing does. Takes
 * one pass and has no limits. `a` is for scratch memory, which is given back. */
uint32_t cuts_order(struct arena *a, const struct diagram *d, size_t root);

#endif
