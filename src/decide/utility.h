/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Exponential utility: what a spread of damage is worth to somebody with the risk tolerance R.
 *
 * The certainty equivalent of a damage D is the certain amount that is as bad:
 *     R log E[exp(D / R)]
 * (Howard, Management Science 34 (1988) 679-695; Raiffa, Decision Analysis (1968), ch. 4; from
 * memory). It is the mean for great R, and more for small ones. Of the damage over the horizon,
 * discounted as present values are (decide/weigh.h: factor v_y in year y), with n_ky occurrences of
 * source k expected in year y and M_k(t) = E[exp(t X_k)] of one of them, it is
 *     R log mean over what is unknown of exp(sum over k and y of n_ky (M_k(v_y / R) - 1))
 * to which the present cost is added, which is certain here: what is unknown in it counts by its
 * mean. M is in closed form for amounts, normal, gamma, uniform and discrete distributions; others
 * are integrated by the trapezoidal rule over normal deviates in steps of 1/32; drawn damage is
 * averaged over its draws.
 *
 * It does not exist where a tail is too heavy, which is refused: a lognormal without `at-most`; a
 * gamma with v_y / R at or beyond 1 / scale; a rate that is unknown as a gamma, once a unit of it
 * adds 1 / scale or more to the sum (judged at the means of all else); a damage with an unknown
 * that has no upper limit; one that is drawn with something that has none. What enters by
 * protection that fails is bounded by 1, and may have any distribution.
 *
 * Name: DECISION.certainty-equivalent[ALTERNATIVE], of damage and cost together. */
#ifndef DECIDE_UTILITY_H
#define DECIDE_UTILITY_H

#include "decide/loss.h"

struct utility {
    double damage, cost;
    double error; /* standard error of the damage; 0 where nothing is unknown */
};

/* E[exp(x X)] of a distribution: INFINITY where it does not exist. */
double utility_transform(const struct dist *d, double x);

/* R log mean exp(x / R). */
double utility_equivalent(size_t n, const double *x, double tolerance);

/* Of a case of the world. OHMEN_COMPUTE where it does not exist: one sentence names the hazard, the
 * outcome and what has the tail. Scratch of `a`. */
ohmen_status utility_find(struct loss_world *w, struct arena *a, const struct loss_case *of,
                          double tolerance, struct utility *out, ohmen_error *e);

/* Where another alternative becomes the best one, as the risk tolerance falls or grows, between
 * UTILITY_RANGE times less and as many times more than the given one; 0: nowhere there. Of
 * alternatives whose costs are given, in the order of the cases. `other` is which it is then. */
#define UTILITY_RANGE 1000.
struct utility_turn {
    double below, above;
    size_t below_other, above_other;
    double least; /* below this it does not exist, or 0 */
};
ohmen_status utility_turns(struct loss_world *w, struct arena *a, size_t n,
                           const struct loss_case *cases, const double *costs, double tolerance,
                           struct utility_turn *out, ohmen_error *e);

/* The risk tolerance of a decision; 0: none is stated. */
double utility_tolerance(const struct weighing *w);

#endif
