/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How bad it may get: the distribution of all damage over the horizon, as the chosen perspective
 * bears it, summed and not discounted.
 *
 * Each outcome of each hazard with damage is a source: it occurs a Poisson number of times,
 * expected by its frequency in each year (in each operating state by its share of time, under the
 * variant of each stretch), and each occurrence does an amount of damage of its own, independent of
 * the others: what `varies` is drawn anew, and an input that varies in two items of one occurrence
 * has one value in both. The sum is compound Poisson (math/aggregate.h). What is unknown is the
 * same for all of the horizon and for all cases: the result is the mean of the distributions over
 * samples of it, whose spread between sets gives a standard error. As in the graph, a frequency
 * stands at its mean over what varies.
 *
 * The damage of an occurrence is
 *   an amount     where nothing varies in it;
 *   affine        b + a1 Z1 + a2 Z2 + ...: by the distribution functions of the Z, on the lattice
 *                 convolved; where a single Z has a factor that is unknown, by parts of equal
 *                 probability;
 *   drawn         anything else: LOSS_DRAWS scrambled points of what varies through a tape. Not
 *                 bracketed.
 * Both others are rounded down and up to the lattice, so that the two ends of each result hold it,
 * up to the standard error of the sample.
 *
 * The mean of the damage is a figure of the graph, OWNER.horizon-damage, and none of the sample.
 *
 * Names of results: OWNER.no-damage[CASE], OWNER.exceeded-10[CASE] (-5, -1): damage that is
 * exceeded with so many per cent; OWNER.worst-5[CASE] (-1): mean damage in the worst so many per
 * cent (expected shortfall). OWNER is a decision and CASE an alternative, or `register` and
 * `today`. */
#ifndef DECIDE_LOSS_H
#define DECIDE_LOSS_H

#include "decide/weigh.h"
#include "figure/samples.h"

enum { LOSS_DRAWS = 1024 };

/* One way in which damage comes about. */
struct loss_source {
    const char *hazard, *outcome;
    const char *where; /* end of the event tree and operating state, or "" */
    double from, to;   /* years of the horizon */
    size_t n_rates;    /* occurrences per year: one, or by slot of the years */
    const node_id *rates;
    const uint32_t *of_year; /* slot that holds in year floor(from) + i; NULL: rates[0] */
    node_id damage;          /* of an occurrence */
};
struct loss_sources ARRAY_BODY(struct loss_source);

/* What may come: with this probability just these sources. */
struct loss_path {
    double probability;
    const struct loss_sources *sources;
};

/* An alternative, or the register as it is. */
struct loss_case {
    const char *name;
    size_t n_paths;
    const struct loss_path *paths; /* whose probabilities add up to 1 */
    figure_id expected;            /* damage over the horizon, or FIGURE_NONE */
};

enum loss_kind {
    LOSS_NONE,        /* probability of no damage */
    LOSS_EXCEEDED_10, /* damage that is exceeded with 10, 5, 1 % */
    LOSS_EXCEEDED_5,
    LOSS_EXCEEDED_1,
    LOSS_WORST_5, /* mean damage in the worst 5, 1 % */
    LOSS_WORST_1,
    LOSS_KINDS
};
/* The probability of being above the point, or of the tail; 0 for LOSS_NONE. */
extern const double loss_tail[LOSS_KINDS];

/* Between two ends; the error is the standard error of the sample, 0 where there is none. */
struct loss_number {
    double low, high, error;
};
/* The middle of both ends. */
double loss_middle(const struct loss_number *x);

/* Probability that a damage is exceeded. */
struct loss_point {
    double damage, low, high;
};

struct loss_result {
    const struct loss_case *of;
    struct loss_number at[LOSS_KINDS];
    struct loss_number mean;        /* of both ends */
    ARRAY(struct loss_point) curve; /* by rising damage, to where LOSS_RAREST exceed it */
    double step;                    /* of the lattice, in money; 0: nothing can do damage */
    size_t points;                  /* of the lattice */
    bool is_drawn;                  /* some damage of an occurrence was drawn */
    bool is_below_zero;             /* some may be below 0, and was taken as 0 */
};
#define LOSS_RAREST 1e-3

/* The same samples of what is unknown for all cases, LOSS_SAMPLES of them; seed, method, threads
 * and instructions are those of the plan. figures_evaluate has been called behind the compiling of
 * the cases, which are borrowed. Lives in `a`. OHMEN_COMPUTE where something has no finite value or
 * happens too often. */
#define LOSS_SAMPLES 256
struct loss_world;
ohmen_status loss_world_new(struct figures *f, struct arena *a, size_t n,
                            const struct loss_case *cases, const struct sampling_plan *plan,
                            struct loss_world **out, ohmen_error *e);
/* Without values that mean anything to others; NULL: nothing is unknown. */
const struct sampling *loss_world_sample(const struct loss_world *w);
/* How often a source is expected over its time, and its mean damage, as means over the samples. */
double loss_source_expected(const struct loss_world *w, const struct loss_source *s);
double loss_source_damage(const struct loss_world *w, const struct loss_source *s);
/* The distribution of one of the cases. Lives in `a`. */
void loss_find_case(struct loss_world *w, struct arena *a, const struct loss_case *of,
                    struct loss_result *out);

/* The cases of a decision: its alternatives in their order. Compiled once; the caller
 * evaluates. */
ohmen_status loss_of_weighing(struct figures *f, struct weighing *w, const struct loss_case **out,
                              ohmen_error *e);
/* The case of the register as it is: of these hazards. */
ohmen_status loss_of_register(struct figures *f, size_t n, const struct compiled *const *hazards,
                              const struct loss_case **out, ohmen_error *e);

/* ---- names ---- */

#define LOSS_REGISTER "register"
#define LOSS_TODAY "today"

/* "D-BUS.exceeded-1[FIT-87B]" */
const char *loss_name(struct arena *a, const char *owner, enum loss_kind kind, const char *of);
bool loss_is_named(const char *name);
/* Is it the rest of a figure OWNER.horizon-damage, which is compiled when it is asked for? */
bool loss_is_figure(const char *rest);
/* Splits such a name; false where it is none. */
bool loss_name_parts(struct arena *a, const char *name, const char **owner, enum loss_kind *kind,
                     const char **of);

#endif
