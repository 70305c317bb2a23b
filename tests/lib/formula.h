/* SPDX-License-Identifier: GPL-3.0-or-later */
/* An evaluator of its own for the formulas that figures print (grammar: docs/figures.md).
 *
 * Nothing of the product is used: own reading of the text, own table of units, long double
 * arithmetic, enumeration of all combinations of events where the product has decision diagrams,
 * and adaptive quadrature where it has a rule of fixed order. So a formula that is evaluated here
 * and gives the figure says what the figure is. */
#ifndef TESTS_FORMULA_H
#define TESTS_FORMULA_H

#include <stdbool.h>
#include <stddef.h>

/* Distinct events in one probability(...). */
#define FORMULA_EVENTS 40

/* A probability over time in years: course(...) of docs/figures.md. */
struct formula_course {
    long double standing, rate, ending, left, unreset;
    long double from, first, every, born; /* first, every: only where it is tested */
    bool tested, fresh;
};
long double formula_course_at(const struct formula_course *c, long double t);

/* What the names in a formula mean. */
struct formula_world {
    const char *currency;      /* "EUR" */
    const char *const *counts; /* countable units, "section" */
    size_t n_counts;
    void *ctx;
    /* The value of a name in base units (a, km, kW, one of the currency); false: unknown.
     * Asked for names as they stand in the formula, such as H-BUS.risk.slow@A+B; for the
     * events in probability(...): the probability of failure as RELAY.fails, RELAY.fails.alone or
     * CAUSE.fails.RELAY.OTHER, the share of faults that a row sees as sees.ROW, and how likely
     * a hazard puts an element out of action as disabled.RELAY, that an element does not assert
     * itself as asserts.RELAY.fails, and that it is in repair as up.RELAY.fails; and for a
     * leaf as its whole
     * text, mean(median 1 h, error factor 3). */
    bool (*find)(void *ctx, const char *name, long double *out);
    /* The course of that name, RELAY.course.alone; false: it has none. Asked for in over(...),
     * before the probability of failure. NULL: nothing changes with time. */
    bool (*course)(void *ctx, const char *name, struct formula_course *out);
};

/* false with a sentence in `error` when the text is no formula, a name is unknown, or it
 * has more than FORMULA_EVENTS events in one probability. */
#define FORMULA_ERROR 200
bool formula_evaluate(const char *formula, const struct formula_world *w, long double *out,
                      char error[FORMULA_ERROR]);
/* The same of a formula that is course(...), or the name of such a figure. */
bool formula_course(const char *formula, const struct formula_world *w, struct formula_course *out,
                    char error[FORMULA_ERROR]);

/* A `find` for a list of figures: ctx is a struct formula_inputs. RELAY.fails is also
 * RELAY.fails@VARIANT, sees.ROW is HAZARD.share.ROW.sees with any variant, disabled.RELAY
 * is HAZARD.share.RELAY.disabled, up.RELAY.fails is RELAY.in-repair, and asserts.RELAY.fails is
 * 1 less SCHEME.asserts.CLASS.RELAY. */
struct formula_inputs {
    size_t n;
    const char *const *names;
    const double *values;
};
bool formula_find_input(void *inputs, const char *name, long double *out);

#endif
