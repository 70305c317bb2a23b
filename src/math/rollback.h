/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rolling back trees and graphs of choices and chances, from their ends to their root.
 *
 *     value of a node = its amount + what comes after:
 *       END     nothing
 *       CHOOSE  the greatest value of its children; of equal ones the first is chosen
 *       CHANCE  the sum of probability times value over its children, added in their order;
 *               with a risk tolerance R their certainty equivalent under exponential utility,
 *               -R ln(sum of probability exp(-value / R))
 *       STEP    the value of its one child
 *
 * Backward induction: H. Raiffa & R. Schlaifer, Applied Statistical Decision Theory (1961);
 * certainty equivalents can be rolled back node by node since exponential utility has the delta
 * property: R. A. Howard, "Decision analysis: practice and promise", Management Science 34 (1988)
 * 679-695. Both from memory.
 *
 * A builder takes nodes in any order; children may be shared, which makes a graph of the tree. It
 * lays them out level by level, so that all loops are over numbers that lie side by side.
 *
 * Invariant of what is laid out: number 0 is the root; children have larger numbers than their
 * parents and lie side by side, those of the next node of a run behind those of the one before;
 * nothing of a run is a child of the same run. A child that has several parents lies under the
 * last of them; under the others lies a LINK, whose value is that of the child. The bits of all
 * results are the same for every instruction set and compiler, and those of a recursion that
 * adds in the order of the children.
 *
 * Amounts are finite, probabilities are in 0 .. 1 and those of the children of a CHANCE add up to
 * 1; who builds answers for that. */
#ifndef MATH_ROLLBACK_H
#define MATH_ROLLBACK_H

#include <stddef.h>
#include <stdint.h>

#include "base/arena.h"
#include "base/isa.h"

enum rollback_kind { ROLLBACK_END, ROLLBACK_CHOOSE, ROLLBACK_CHANCE, ROLLBACK_STEP, ROLLBACK_LINK };

#define ROLLBACK_NOWHERE SIZE_MAX

/* Nodes first .. first + n - 1 of one kind and arity. The children of the first begin at
 * first_child, those of each further one `arity` behind; an END has none. Of LINKs the one child
 * of the first is link[first_child], and so on. */
struct rollback_run {
    enum rollback_kind kind;
    uint32_t arity;
    size_t n, first, first_child;
};

struct rollback {
    size_t n, n_runs, n_links;
    const struct rollback_run *runs; /* in the order of their nodes */
    const size_t *link;
    /* By number of the layout. These may be changed between evaluations: */
    double *amount;
    double *probability; /* of a child of a CHANCE, where it lies or its LINK lies; else 0 */
    /* By the builder's number of a node: where it lies, NOWHERE when the root does not lead
     * there. */
    const size_t *place;
};

/* ---- building ---- */

struct rollback_builder;

/* What it holds, and all that it lays out, lives in the arena. */
struct rollback_builder *rollback_new(struct arena *a);

/* Adds a node and returns its number: the first has 0, the next 1 ... `child`, of `arity` numbers,
 * may name nodes that are added later, and one node twice. `probability` is NULL but for a CHANCE.
 * Both are copied. END has arity 0, STEP 1, the others 1 or more; a LINK cannot be added. */
size_t rollback_add(struct rollback_builder *b, enum rollback_kind kind, double amount,
                    uint32_t arity, const size_t *child, const double *probability);

/* What `root` leads to. All children must have been added. NULL when nodes stand in a circle; then
 * *circle is one of them. */
const struct rollback *rollback_lay_out(struct rollback_builder *b, size_t root, size_t *circle);

/* Where child k of the node at `at` lies, which may be a LINK; its probability lies there. */
size_t rollback_child(const struct rollback *r, size_t at, uint32_t k);
/* The node that is meant by what lies at `at`: the child of a LINK, else itself. */
size_t rollback_meant(const struct rollback *r, size_t at);

/* ---- evaluating: arrays have room for r->n, by number of the layout ---- */

void rollback_values(const struct rollback *r, enum isa isa, double *value);

/* The same with a risk tolerance > 0, in the unit of the amounts; INFINITY gives rollback_values.
 * Nothing overflows, and what is small beside the tolerance keeps its digits. */
void rollback_equivalents(const struct rollback *r, enum isa isa, double tolerance,
                          double *equivalent);

/* Which child each CHOOSE takes, by values or equivalents; 0 elsewhere. */
void rollback_policy(const struct rollback *r, enum isa isa, const double *value, uint32_t *chosen);

/* The probability of coming to each node when choices are made so. A node with several parents
 * has the sum over them; a LINK has what comes through it. */
void rollback_reach(const struct rollback *r, const uint32_t *chosen, double *reach);

#endif
