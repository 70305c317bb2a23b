/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The test interval of an element that costs least.
 *
 * Seldom tests leave failures undetected for long; frequent ones cost money, take the element out
 * of service, may leave it failed and may trip the plant. For each interval T,
 *
 *     cost per year(T) = cost of a test / T + sum of the risks of all hazards that T changes
 *
 * (mean cost of a policy of inspection by its interval: Barlow and Proschan 1965, chapter 4, from
 * memory; with one element, one hazard of frequency f and damage D, and tests that cost c, the
 * least is near T = sqrt(2 c / (f D u)), u the rate of undetected failures). The risks are those
 * of the whole register: of schemes, of common causes, and of trips by tests where the frequency
 * of a hazard counts them by unwanted(...).
 *
 * They are averages over whole cycles of all tests, so that they do not depend on which tests
 * happen to fall into the horizon; what no test ever finds is averaged over the horizon, since it
 * would be certain in the long run. No change of a register can ask for that, as the settings hold
 * for all variants alike; so a search has a `struct figures` of its own, with whole_cycles. Its
 * figures are named by their change, [ELEMENT.test.every=T, whole cycles], and cannot be taken for
 * those of the register as it stands. Dates of tests are kept: the tests of the element follow its
 * last one, or its planned one, at the new interval.
 *
 * Intervals are round ones, since tests are planned by the calendar; so a common cycle with the
 * tests of other elements mostly exists. An interval is left out when it does not (SPAN_CYCLE in
 * figure/span.h), and when a test takes longer. */
#ifndef DECIDE_INTERVAL_H
#define DECIDE_INTERVAL_H

#include "figure/figure.h"

#define INTERVAL_LEAST 0.125 /* of the present interval: the shortest one that is tried */
#define INTERVAL_MOST 32.    /* the longest */
#define INTERVAL_NEAR 0.05   /* costs this share above the least are near it */

struct tried_interval {
    const char *every; /* as in documents: "18 month", the present one as the register says it */
    double years;
    bool today;
    const struct variant *variant;
    const struct compiled **hazards; /* in the order of interval_search.hazards */
    figure_id tests;             /* cost of the tests per year; FIGURE_NONE: they cost nothing */
    double costs, faults, trips; /* money per year: tests; risk of hazards without unwanted()
                                        and with it. Set by interval_rank, as is: */
    double total;
};

struct interval_hazard {
    const char *id;
    bool by_trips; /* its frequency counts unwanted operations */
};
struct interval_left_out {
    const char *id, *why;
};

struct interval_search {
    struct figures *figures; /* over whole cycles; the caller evaluates them */
    const struct object *element;
    ARRAY(struct interval_hazard) hazards;    /* that the interval changes, in byte order */
    ARRAY(struct interval_left_out) left_out; /* hazards that cannot be evaluated */
    ARRAY(struct tried_interval) tried;       /* in rising order */
    size_t today, best, near_from, near_to;   /* indices; the last three by interval_rank:
                                                  near_from to near_to are near the least */
};

/* Compiles every interval. figures: of the register, whose perspective and date are taken.
 * OHMEN_UNKNOWN when there is no such element; OHMEN_COMPUTE when it has no test, when no hazard
 * that can be evaluated depends on the interval, and when the present interval has no common cycle
 * with other tests. */
ohmen_status interval_compile(const struct figures *figures, const char *element,
                              struct interval_search **out, ohmen_error *e);

/* Sums the costs and finds the least; of equal ones the shortest interval.
 * figures_evaluate has been called for s->figures. */
void interval_rank(struct interval_search *s);

/* Does the name of a figure hold a change [ELEMENT.test.every=T, whole cycles]? */
bool interval_is_named(const char *figure);

/* Finds such a figure: *figures are new ones over whole cycles, *out is one of them.
 * OHMEN_UNKNOWN, OHMEN_COMPUTE: as figures_find and figures_variant_with. */
ohmen_status interval_find(const struct figures *of_register, const char *name,
                           struct figures **figures, figure_id *out, ohmen_error *e);

#endif
