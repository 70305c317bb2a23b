/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Distributions of an amount with finitely many values: what may come of a choice.
 *
 * Invariant: values rise, are finite and below 1e100 in size; probabilities are above 0, and those
 * that are given add up to 1 (who gives them answers for that; nothing is divided by their sum).
 * Profiles never change; they live in the arena that they are made in.
 *
 * Values that are equal, to the bit (-0 is 0), are one. Up to a stated number of points everything
 * is kept. Beyond it neighbours are merged, those first by which the variance loses least: both
 * take their common mean. The least and the greatest value stay, as does the mean but for rounding;
 * all that dislikes risk finds the result a little too good (its standard deviation is too small,
 * its certainty equivalent too high). `is_merged` says that this has happened, here or to a profile
 * that this one was made of. */
#ifndef MATH_PROFILE_H
#define MATH_PROFILE_H

#include <stdbool.h>
#include <stddef.h>

#include "base/arena.h"

struct profile {
    size_t n;
    const double *value, *probability;
    bool is_merged;
};

/* The fewest points that one may ask for. */
enum { PROFILE_FEWEST = 4 };

/* n values in any order, n > 0, with probabilities >= 0, one of them above 0; at most `most` points
 * (>= PROFILE_FEWEST) are kept. */
struct profile profile_of(struct arena *a, size_t n, const double *value, const double *probability,
                          size_t most);
/* For certain. */
struct profile profile_point(struct arena *a, double value);
/* Each value and `by`. */
struct profile profile_shift(struct arena *a, const struct profile *p, double by);
/* The sum of two that are independent of each other: all pairs are made. */
struct profile profile_add(struct arena *a, const struct profile *p, const struct profile *q,
                           size_t most);
/* One of n profiles, parts[i] with the probability weight[i]. */
struct profile profile_mix(struct arena *a, size_t n, const struct profile *parts,
                           const double *weight, size_t most);

/* The probability of x or less, and of more than x: each a sum of what it counts, so that the
 * smaller keeps its digits. */
double profile_at_most(const struct profile *p, double x);
double profile_above(const struct profile *p, double x);
/* The least value with at_most >= u, 0 <= u <= 1. */
double profile_quantile(const struct profile *p, double u);
double profile_mean(const struct profile *p);
double profile_deviation(const struct profile *p); /* standard deviation */
/* -R ln E exp(-X / R) for a risk tolerance R > 0; INFINITY gives the mean. As rollback.h. */
double profile_equivalent(const struct profile *p, double tolerance);

/* Whether p dominates q.
 *     FIRST   p is at least x at least as probably as q, for all x, and more so for one: better for
 *             all who want more
 *     SECOND  not that, but the mean of the lesser of p and x is at least that of the lesser of q
 *             and x, for all x, and greater for one: better for all who want more and dislike risk
 * J. Hadar & W. R. Russell, "Rules for ordering uncertain prospects", American Economic Review 59
 * (1969) 25-34; G. Hanoch & H. Levy, "The efficiency analysis of choices involving risk", Review of
 * Economic Studies 36 (1969) 335-346 (from memory). Both are steps and straight lines between
 * values, so that only these are compared; sums are carried in two doubles. The tolerance is 0:
 * what is equal speaks for neither, and what differs by as little as the rounding of a probability
 * differs. Equal profiles do not dominate each other. */
enum profile_dominance { PROFILE_NONE, PROFILE_SECOND, PROFILE_FIRST };
enum profile_dominance profile_dominates(const struct profile *p, const struct profile *q);

#endif
