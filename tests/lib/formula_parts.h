/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the formula evaluator share. Private to formula*.c. */
#ifndef TESTS_FORMULA_PARTS_H
#define TESTS_FORMULA_PARTS_H

#include "formula.h"

struct reader {
    const char *start, *p;
    const struct formula_world *world;
    char *error; /* empty: none so far */
    int depth;
};

#define NAME_BYTES 400

/* Sets the error, with the offset, unless there is one; returns false. */
bool formula_fail(struct reader *r, const char *what);

void formula_blanks(struct reader *r);
/* Takes a sign of punctuation; false when another thing stands there. */
bool formula_take(struct reader *r, char sign);
bool formula_expect(struct reader *r, char sign);
/* Takes a whole word. */
bool formula_take_word(struct reader *r, const char *word);
bool formula_is_letter(char c);
bool formula_is_digit(char c);
/* Reads a number such as 2.5e-3. */
bool formula_number(struct reader *r, long double *out);
/* Copies a name with its dots and its variant; false where none stands. */
bool formula_name(struct reader *r, char out[NAME_BYTES]);

/* Behind a number: its units, as the factor to base units. */
bool formula_units(struct reader *r, long double *factor);

/* A sum, up to what cannot belong to it. */
bool formula_sum(struct reader *r, long double *out);

/* Behind "probability(": the events up to the closing parenthesis, which is left. */
bool formula_probability(struct reader *r, long double *out);
/* The same as an average over time. */
bool formula_probability_over(struct reader *r, long double from, long double to, long double *out);

/* Behind "course(" and "over(", with the closing parenthesis. */
bool formula_read_course(struct reader *r, struct formula_course *out);
bool formula_over(struct reader *r, long double *out);
/* Behind "chain(", with the closing parenthesis. */
bool formula_chain(struct reader *r, long double *out);
/* What the world knows of a course by its name; false without an error. */
bool formula_find_course(struct reader *r, const char *name, struct formula_course *out);

/* A value over time that is smooth between the resets of the courses. */
struct formula_timed {
    size_t n;
    struct formula_course course[FORMULA_EVENTS];
    long double (*value)(struct formula_timed *self, long double t);
    const void *of; /* for `value` */
};
long double formula_average(struct formula_timed *x, long double from, long double to);

#endif
