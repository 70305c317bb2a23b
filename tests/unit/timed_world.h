/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One random register in which protection fails in time: elements of all behaviours with types,
 * tests, dates and common causes, a hazard that several rows answer, growth; as plain arrays and
 * as a document. Everything is a certain number.
 *
 * Invariant: numbers of the arrays are numbers in the names (element E3, type T1, common cause
 * CC0, scheme S1, row r2, outcome o1). A number below 0 is not stated; a date of year 0 neither. */
#ifndef TESTS_TIMED_WORLD_H
#define TESTS_TIMED_WORLD_H

#include "base/text.h"
#include "random.h"

enum { TW_ELEMENTS = 7, TW_TYPES = 2, TW_CAUSES = 2, TW_SCHEMES = 4, TW_ROWS = 3, TW_MEMBERS = 5 };
enum { TW_OUTCOMES = 3, TW_ENDS = 16 };

struct tw_date {
    int year, month, day;
};

struct tw_rates {
    double per_demand, undetected, detected, repair_h;
};

struct tw_element {
    size_t type; /* TW_TYPES: none */
    struct tw_rates own;
    double out, exercised;
    bool breaker, plant_out, revealed_by;
    struct tw_date since, known;
    int months; /* between tests; 0: none */
    struct tw_date last, next;
    double takes_h, finds, leaves;
};

struct tw_cause {
    size_t n, member[TW_MEMBERS]; /* rising */
    double beta, beta_detected;   /* beta < 0: by factors */
    double factor[TW_MEMBERS];
    bool staggered, settings;
    size_t found_by; /* place among the members; n: none */
};

/* k of n elements and schemes with smaller numbers: below TW_ELEMENTS an element. */
struct tw_scheme {
    size_t k, n, of[4];
};

struct tw_row {
    size_t cleared_by; /* as `of` of a scheme */
    double sees;
    size_t backs_up; /* the row whose breaker it backs up; TW_ROWS: none */
    /* What follows: an outcome; a split of two; a question. */
    enum { TW_OUTCOME, TW_SPLIT, TW_QUESTION } kind;
    double share;
    size_t question, outcome[2]; /* TW_OUTCOMES: none */
};

struct timed_world {
    struct arena *arena;
    struct random random;
    bool steady;
    int start, years;
    size_t n_elements, n_causes, n_schemes, n_rows;
    struct tw_rates type[TW_TYPES];
    bool type_is_breaker[TW_TYPES];
    struct tw_element element[TW_ELEMENTS];
    struct tw_cause cause[TW_CAUSES];
    struct tw_scheme scheme[TW_SCHEMES];
    struct tw_row row[TW_ROWS + 1]; /* in the order of clearance times; the last clears nothing */
    double disabled[TW_ELEMENTS];
    double euros[TW_OUTCOMES];
    double rate, rate_growth, growth; /* per a; growth: of the hazard */
};

struct timed_world *timed_world_random(struct arena *a, uint64_t seed);
const char *timed_world_text(const struct timed_world *w);

#endif
