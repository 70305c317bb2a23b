/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What it is worth to know something before a choice is made, instead of after it.
 *
 * A choice is whatever takes the means of some figures (targets) and says what the best alternative
 * is worth by them. Then, with m the means of the targets over all that is unknown,
 *
 *   perfect information  E[best(targets)] - best(m): knowing everything (the expected value of
 *                        perfect information). From samples. Of a weighing it is the regret of the
 *                        alternative that is chosen (decide/sure.h)
 *   one quantity x       E_x[best(E[targets | x])] - best(m): knowing x exactly, everything else
 *                        staying as unknown as it is (of partial perfect information)
 *
 * (Raiffa & Schlaifer, Applied Statistical Decision Theory (1961), ch. 4, from memory; Felli &
 * Hazen, Medical Decision Making 18 (1998) 95-109, from memory.) None is negative, and none of the
 * second kind is greater than the first; their sum may be.
 *
 * Quantities: as for swings (decide/swing.h), with multiples of what is stated once; but what a
 * variant states anew of a quantity rises with it, as in samples, and both are one. And whatever
 * unknown states are given beside. E[targets | x] as there: exact by the structure, or approximate
 * (information_input.is_exact).
 *
 * The mean over x: by its values where it is discrete, exactly. Otherwise by decide/gain.h in z, x
 * = quantile(Phi(z)), of best less what the alternative chosen today is worth at the same x: so a
 * quantity at no value of which another alternative is best has exactly 0. Where the targets are
 * straight lines in x by the structure they are known at all x from two points, the places where
 * the best alternative changes are found as exactly as doubles have them, and the error is below
 * 1e-9 of the worth. Elsewhere they come from a polynomial in z (decide/unknown.h) that sets the
 * worth off by no more than 1e-3 of itself or 1e-6 of the greatest mean of a target (1e-4 of that
 * where no other alternative is met), or, where 33 points do not suffice for that, every point is
 * evaluated, with changes found to 1e-9 in z and an error of the quadrature of 1e-3 of the worth.
 *
 * Where E[targets | x] is approximate the error holds besides how far the worth is from what a
 * sample of the targets makes of it (decide/regress.h), with the standard error of that (the
 * jackknife over its sets; Efron, The Jackknife, the Bootstrap and Other Resampling Plans (1982),
 * ch. 3, from memory). Without a sample: how far from what it would be without what is missing in
 * the mean over x (decide/moving.h), which is a sign and no more.
 *
 * A choice that cannot say what an alternative is worth by itself (worth is NULL; a tree, in which
 * what is done later may change too): of straight lines the worth of today is then taken along the
 * line that touches best at the mean of x, otherwise it is best(m), so that a gain below the error
 * of the quadrature counts as none. `best` must then be convex in straight lines (as the greatest
 * of any number of linear functions is, and what is rolled back with certain probabilities). */
#ifndef DECIDE_INFORMATION_H
#define DECIDE_INFORMATION_H

#include "decide/weigh.h"
#include "figure/samples.h"

struct choice {
    void *ctx;
    size_t n_targets;
    const node_id *targets;
    /* What the best alternative is worth where the targets have these mean values, and which one it
     * is; ties by name. */
    double (*best)(void *ctx, const double *values, size_t *which);
    /* What one is worth, whether it is the best or not; or NULL. */
    double (*worth)(void *ctx, const double *values, size_t which);
};

/* The choice of a weighing between its alternatives; doing nothing is worth 0. Which: the place
 * among the alternatives. weigh_rank has been called. Lives in `a`. */
struct choice choice_of_weighing(struct arena *a, const struct figures *f, struct weighing *w);

/* Something unknown that is one of a few states: in each of them some nodes have certain values
 * (the probability of the state is 1, those of the others 0). */
struct unknown_state {
    const char *name;
    size_t n_nodes;
    const node_id *nodes; /* as prober_open wants them */
    size_t n;             /* states */
    const char *const *states;
    const double *probabilities; /* sum 1 */
    const double *values;        /* of the nodes: [state * n_nodes + node] */
};

/* Where the best alternative changes. */
enum information_side { INFORMATION_BELOW, INFORMATION_ABOVE, INFORMATION_IF };

struct information_change {
    /* Below or above `at`, in base units; of a discrete quantity: at `at` and beyond. Or if the
     * state is the one of this name. */
    enum information_side side;
    double at;
    const char *state;
    size_t beyond,
        before;         /* the best alternative there, and on the other side (of a state: today) */
    double probability; /* that the quantity lies beyond, or is in the state */
};

struct information_input {
    const char *name; /* of the figure, or the state */
    figure_id figure; /* of the fewest changes; FIGURE_NONE of a state */
    double now;       /* its mean; 0 of a state */
    double worth;     /* money, >= 0: knowing it exactly */
    double error;     /* of that: a bound as told above, not a standard error */
    bool is_exact;    /* E[targets | x] is, by the structure */
    bool is_linear;   /* the targets are straight lines in it */
    bool is_discrete; /* it has certain values */
    /* Between its 0.1 % and 99.9 % points; rising, or in the order of the states. */
    ARRAY(struct information_change) changes;
};

struct information {
    const struct choice *choice;
    const double *means;                  /* of the targets */
    double worth;                         /* best(means) */
    size_t best;                          /* chosen for the means */
    ARRAY(struct information_input) list; /* greatest worth first, ties by name */
    size_t n_turning;                     /* the first ones, of which knowing more may change the
                                             choice: all others have worth 0 */
    /* Quantities at one of whose 0.1 % and 99.9 % points a probability were none, or what cannot be
     * negative were, or that have no finite worth somewhere; by name. */
    ARRAY(const char *) not_possible;
    /* Unknown inputs of the targets that were not looked at: of mean 0 or less, or none that a
     * document states. By name. */
    ARRAY(const char *) not_seen;
    bool is_exact;    /* all are */
    bool interrupted; /* after n_looked of n_all */
    size_t n_looked, n_all;
};

/* Asked before each quantity: false ends it there. NULL: never. */
struct information_watch {
    bool (*go_on)(void *ctx, size_t done, size_t all);
    void *ctx;
};

/* A sample of the targets, which tells how far off approximate means are. */
struct information_sample {
    const struct sampling_plan *plan; /* by which it was taken */
    size_t n_roots;
    const node_id *roots; /* for which its sampler was made */
    const struct sampling *values;
    const size_t *root; /* of each target, among those of `values` */
};

/* That of a decision with options, which is sampled for decide/sure.h anyway. Lives in `a`. */
struct sure;
struct information_sample information_sample_of(struct arena *a, const struct figures *f,
                                                const struct sure *s);

/* figures_evaluate has been called. What may be NULL: the sample, the states where there are none,
 * the watch. All is borrowed. Lives in the arena of the figures. */
void information_find(struct figures *f, const struct choice *c,
                      const struct information_sample *sample, size_t n_states,
                      const struct unknown_state *states, const struct information_watch *watch,
                      struct information *out);

/* Perfect information from samples of the targets, in their order, by `best` on each: with its
 * standard error. Scratch of `a`. */
struct sampled information_perfect(struct arena *a, const struct information *x,
                                   const struct sampling *s);

/* --- of a decision --- */

/* What information is worth for a decision with options or for a tree, which is rolled back anew
 * wherever something is known; its unknown states among the rest. */
struct information_whole {
    const struct weighing *w;
    struct choice choice;
    struct information all;
    bool has_sample;           /* otherwise what follows is not known */
    struct sampled everything; /* of knowing everything */
    struct sampling sample;
};
/* weigh_rank has been called. `sure`: NULL where nothing could be sampled. Lives in `a`. */
void information_of_decision(struct figures *f, struct arena *a, struct weighing *w,
                             const struct sure *sure, const struct sampling_plan *plan,
                             const struct information_watch *watch, struct information_whole *out);

/* --- by name --- */

struct information_value {
    const char *name; /* DECISION.worth-knowing[INPUT], or DECISION.worth-knowing */
    const struct weighing *weighing;
    const struct information *information;
    const struct information_input *input; /* NULL: everything */
    struct sampled everything;             /* of everything: from this sample */
    struct sampling sample;
};

/* INPUT: NULL for everything. */
const char *information_name(struct arena *a, const struct weighing *w, const char *input);
bool information_is_named(const char *name);
/* Compiles, evaluates and ranks the decision. OHMEN_UNKNOWN with the nearest name. */
ohmen_status information_value_find(struct figures *f, const char *name,
                                    const struct sampling_plan *plan, struct information_value *out,
                                    ohmen_error *e);

#endif
