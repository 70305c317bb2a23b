/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the tests of units, expressions and quantities share. */
#ifndef TESTS_QUANTITY_TEST_H
#define TESTS_QUANTITY_TEST_H

#include <check.h>

#include "quantity/quantity.h"

/* Currency EUR; counts section, bay, feeder-bay. */
extern const struct units test_units;
/* Line 1, column 1 of a document, so that a column in a message is offset + 1. */
extern const struct place test_place;
/* Names of the tests: `bus-load` power, `rate` per time, `x`, `y`, `was` pure numbers,
 * clearance-time a time, `money` money; calls on objects as expr.h says; others are
 * unknown. ctx: struct diags. */
bool test_dim(void *ctx, const struct expr *e, struct place at, struct dim *out);

/* Fails unless d holds exactly one diagnostic, with this column and text. */
void one_diagnostic(const struct diags *d, unsigned column, const char *text, const char *about);
const char *written(struct arena *a, const struct expr *e);

Suite *suite_units(void);
Suite *suite_parse(void);
Suite *suite_slips(void);
Suite *suite_trees(void);
Suite *suite_random(void);
Suite *suite_quantity(void);

#endif
