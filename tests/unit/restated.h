/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Registers in which an input can be stated otherwise: the oracle of the tests of swings,
 * elasticities and maps, through documents, figures and ranking. */
#ifndef TESTS_RESTATED_H
#define TESTS_RESTATED_H

#include "decide/weigh.h"
#include "loaded.h"

/* `stated` stands in the text where `$` and the input's place in the list stand: 0..9, a.. */
struct restated_input {
    const char *figure; /* "v.value" */
    const char *stated;
    const char *unit; /* a base unit, or "" */
};

struct restated {
    const char *text;
    size_t n;
    const struct restated_input *inputs;
};

/* The place of an input by the name of its figure, SIZE_MAX. */
size_t restated_place(const struct restated *r, const char *figure);

/* The document with input i at x[i], where that is no NaN. x may be NULL: as stated. */
const char *restated_text(struct arena *a, const struct restated *r, const double *x);

/* Loads it, weighs decision D, and ranks. */
struct weighing *restated_weigh(struct loaded *l, struct arena *a, const char *text);

/* The net present value of an alternative: the mean. */
double restated_worth(const struct loaded *l, const struct weighing *w, const char *alternative);

/* Fails unless within `tolerance` of the greater of both and `size`. */
void restated_check(const char *what, double x, double expected, double size, double tolerance);

/* What their registers have in common: ten years at 5 %, and a hazard that always ends in a
 * loss. */
#define SETTINGS                                                                                   \
    "register: {title: T, currency: EUR, prices: 2026, counts: [bay], horizon: 10 a, discount: 5 " \
    "% per a}\n"
#define LOST(damage)                                                                               \
    "response: {never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: " \
    "c, is: " damage "}}}}"

/* Present value of 1 per year in the middle of each of these ten years. */
double restated_annuity(void);

#endif
