/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What figures hinge on: importance measures of elements, and minimal cut sets.
 *
 * With R a risk (or the failure of a scheme) as a function of the probability that an event
 * happens, R1 where it is sure and R0 where it is impossible, at all times:
 *     Birnbaum importance           R1 - R0
 *     Fussell-Vesely importance     (R - R0) / R
 *     risk achievement worth        R1 / R
 *     risk reduction worth          R / R0
 * (Vesely et al., Measures of risk importance and their applications, NUREG/CR-3385, 1983.) For a
 * single element (R - R0) / R is the same as its criticality importance. An element with common
 * causes counts by itself; its shocks are events of their own. All are taken at the means of what
 * is unknown.
 *
 * Minimal cut sets are sets of events that are enough for nobody to clear the fault although
 * every function sees it (of a hazard), or for it not to operate (of a scheme), and of which none
 * can be spared; their probabilities are products of the mean probabilities of the events. */
#ifndef FIGURE_IMPORTANCE_H
#define FIGURE_IMPORTANCE_H

#include "figure/figure.h"

struct effect {
    struct event event;
    const char *hazard; /* whose own event it is (EVENT_DISABLED); NULL: of all that rest on it */
    size_t n_hazards;   /* in how many hazards it has any effect */
    double gain;        /* R1 - R0 */
    double share;       /* R - R0 */
};
struct effects {
    double whole; /* R */
    size_t n;
    struct effect *at; /* by falling share; ties by name */
};

/* On the risk of one hazard, which may be a mean over operating states. figures_evaluate was
 * called. Functions that see or miss the fault (EVENT_SEES) are left out. */
void importance_in_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                          struct effects *out);
/* On the risk of all these hazards together: one pass for all. OHMEN_COMPUTE as
 * figures_evaluate. */
ohmen_status importance_in_all(struct figures *f, struct arena *a, size_t n,
                               const struct compiled *const *hazards, struct effects *out,
                               ohmen_error *e);
/* The same, and on the risk of each of them: each[i] of hazards[i]. figures_total of these hazards
 * and then figures_evaluate were called. One pass for all. */
void importance_in_each(struct figures *f, struct arena *a, size_t n,
                        const struct compiled *const *hazards, struct effects *out,
                        struct effects *each);
/* On the failure of a scheme. */
void importance_in_scheme(struct figures *f, struct arena *a, const struct compiled *scheme,
                          struct effects *out);

double effect_fussell_vesely(const struct effects *all, const struct effect *x);
double effect_achievement(const struct effects *all, const struct effect *x);
double effect_reduction(const struct effects *all, const struct effect *x); /* may be infinite */

/* The risk of all these hazards together, as figure register.risk: compiled once for a struct
 * figures. figures_evaluate must be called afterwards. */
figure_id figures_total(struct figures *f, size_t n, const struct compiled *const *hazards);

struct cut_set {
    double probability;
    size_t n;
    const struct event *const *events;
};
struct cut_sets {
    bool too_many;  /* nothing is known */
    uint64_t n_all; /* there are so many, UINT64_MAX: at least */
    size_t n;       /* of which these are the most probable, by falling probability */
    struct cut_set *at;
};
void cut_sets_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                        size_t limit, struct cut_sets *out);
void cut_sets_of_scheme(struct figures *f, struct arena *a, const struct compiled *scheme,
                        size_t limit, struct cut_sets *out);

/* The minimal cut sets of one event, all of them: found without a search, so never too_many. */
void single_failures_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                               struct cut_sets *out);
void single_failures_of_scheme(struct figures *f, struct arena *a, const struct compiled *scheme,
                               struct cut_sets *out);

#endif
