/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The mean of a distribution from the text that a formula prints, for formula_all_test. */
#ifndef TESTS_FORMULA_ALL_H
#define TESTS_FORMULA_ALL_H

#include "formula.h"

/* mean(TEXT), in base units: "90 % within 14 MW .. 22 MW", "median 1 h, error factor 3",
 * "0.6 times (...)", ... Lognormal means by quadrature, the others in closed form.
 * `literals` reads the numbers. false: not such a text. */
bool mean_of_text(const char *text, const struct formula_world *literals, long double *out);

#endif
