/* SPDX-License-Identifier: GPL-3.0-or-later */
/* An evaluator of its own for the formulas that figures print (grammar: docs/figures.md).
 *
 * Nothing of the product is used: own reading of the text, own table of units, long
 * double arithmetic, and enumeration of all combinations of events where the product has
 * decision diagrams. So a formula that is evaluated here and gives the figure says what
 * the figure is. */
#ifndef TESTS_FORMULA_H
#define TESTS_FORMULA_H

#include <stdbool.h>
#include <stddef.h>

/* Distinct events in one probability(...). */
#define FORMULA_EVENTS 22

/* What the names in a formula mean. */
struct formula_world {
    const char *currency;      /* "EUR" */
    const char *const *counts; /* countable units, "section" */
    size_t n_counts;
    void *ctx;
    /* The value of a name in base units (a, km, kW, one of the currency); false: unknown.
     * Asked for names as they stand in the formula, such as H-BUS.risk.slow@A+B; for the
     * events in probability(...): the probability of failure of an element as RELAY.fails,
     * and the share of faults that a row sees as sees.ROW; and for a leaf as its whole
     * text, mean(median 1 h, error factor 3). */
    bool (*find)(void *ctx, const char *name, long double *out);
};

/* false with a sentence in `error` when the text is no formula, a name is unknown, or it
 * has more than FORMULA_EVENTS events in one probability. */
#define FORMULA_ERROR 200
bool formula_evaluate(const char *formula, const struct formula_world *w, long double *out,
                      char error[FORMULA_ERROR]);

/* A `find` for a list of figures: ctx is a struct formula_inputs. RELAY.fails is also
 * RELAY.fails@VARIANT, and sees.ROW is HAZARD.share.ROW.sees with any variant. */
struct formula_inputs {
    size_t n;
    const char *const *names;
    const double *values;
};
bool formula_find_input(void *inputs, const char *name, long double *out);

#endif
