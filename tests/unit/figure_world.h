/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One random hazard with its elements and schemes, as plain arrays, as a document, and by
 * full enumeration: the oracle of the figure tests.
 *
 * Invariant: schemes only hold schemes with smaller numbers; the numbers of the arrays are
 * the numbers in the names (element E3, scheme S0, row r1, outcome o2, item i0, type T1).
 * Probabilities are enumerated over all states of the elements, in quad precision. */
#ifndef TESTS_FIGURE_WORLD_H
#define TESTS_FIGURE_WORLD_H

#include "base/text.h"
#include "random.h"

__extension__ typedef __float128 quad;

enum { ELEMENTS = 16, SCHEMES = 7, ROWS = 3, ENDS = 48 };
enum { OUTCOMES = 4, ITEMS = 4, TYPES = 3, BOUNDS = 3 };

enum part_op { PART_ELEMENT, PART_SCHEME, PART_AT_LEAST };
struct part {
    enum part_op op;
    size_t index; /* of the element or scheme */
    size_t k, n;  /* at least k of n */
    struct part **of;
};

struct twig; /* a branch of the response */

struct world_row {
    struct part *cleared_by; /* an element or a scheme; NULL in the last row */
    double seconds;          /* -1: none */
    double sees;             /* -1: not said */
    struct twig *then;
};

struct twig {
    enum { TWIG_OUTCOME, TWIG_SPLIT, TWIG_QUESTION } kind;
    size_t outcome, end; /* TWIG_OUTCOME; outcome n_outcomes: none */
    size_t n, rest;      /* TWIG_SPLIT; rest n: no share is the rest */
    double share[3];
    struct twig *child[3]; /* of a question: 0 yes, 1 no */
    struct part *question;
};

/* A damage item: euros, euros for each second of clearance time, or a step function. */
struct world_item {
    enum { ITEM_PLAIN, ITEM_TIMED, ITEM_LOOKUP } kind;
    size_t category; /* c0, c1, c2 */
    double euros;
    double bound[BOUNDS], step[BOUNDS];
};

struct world_end {
    const char *path; /* "r1.b0.yes" */
    size_t row;       /* n_rows: the last */
    size_t outcome;
    quad probability;
};

struct world {
    struct arena *arena;
    struct random random;
    size_t n_elements, n_schemes, n_rows, n_outcomes, n_ends;
    double q[ELEMENTS];
    size_t type[ELEMENTS];   /* TYPES: none */
    double type_q[TYPES];
    struct part *scheme[SCHEMES]; /* NULL: absent */
    struct world_row row[ROWS + 1];
    size_t order[ROWS + 1]; /* by clearance time, the last row at the end */
    size_t n_items[OUTCOMES];
    struct world_item item[OUTCOMES][ITEMS];
    struct world_end end[ENDS];
    double frequency;
    quad scheme_fails[SCHEMES];
};

/* A world of at most `elements` elements. */
struct world *world_random(struct arena *a, uint64_t seed, size_t elements);
/* Its document. Perspectives: first (c0, c1) and second (c1, c2). */
const char *world_text(const struct world *w);
/* Fills in the probabilities of ends and the failures of schemes. */
void world_enumerate(struct world *w);
/* Damage of an outcome at an end, in the categories of which the bits are set. */
quad world_damage(const struct world *w, size_t end, unsigned categories);
bool world_is_damaging(const struct world *w, size_t outcome, unsigned categories);
bool world_is_timed(const struct world *w, size_t outcome, unsigned categories);

#endif
