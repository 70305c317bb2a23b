/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What would turn a decision: values of stated quantities, one at a time, at which another
 * alternative draws level with the best one.
 *
 * Pairs: the best alternative against doing nothing (where doing nothing is best: against the best
 * option), and against the second where that is not doing nothing.
 *
 * Inputs: every figure that a document states on which a pair depends, and how often a weighed
 * hazard occurs also where that is a formula (without a trend), as a whole. One that is stated once
 * and compiled for several variants or operating states moves in all of them; where a change makes
 * it a multiple (`0.5 * was`), the multiple moves with it. What a change states anew is an input by
 * itself. Times of tests, lives and dates are no figures, and are left alone.
 *
 * The function of which a root is sought, with the input at x and all else as it is, is
 *
 *     d(x) = point(x) + (mean - point(now))
 *
 * where point is the difference of the two net present values at the means of what is unknown
 * (eval/probe.h) and mean the difference of their means, which the ranking goes by. So d(now) is
 * the difference that is printed. d is exact where no unknown enters more than once or in a curve;
 * otherwise the part that this adds is taken to stay as it is now (turns.shifted). An uncertain
 * input is moved by its mean, as if it were certain then.
 *
 * Range: 0 to 1 for probabilities and shares, above 0 for all else; a clearance time stays between
 * those of its neighbours, whose order decides what acts first. Nearer than the factor `reach`.
 * The nearest root on each side: where d is linear in x by its structure (prober_is_linear), by its
 * two-point line; otherwise steps of a factor of 10^(1/4) outward until the sign changes: two roots
 * within one step are not seen, nor any where going to the end of the range changes no difference
 * by as much as TURN_QUIET of it. Then a bracket of TURN_TOLERANCE of the root. A root at which a
 * probability or a frequency would be none is not one. Inputs that are 0 or negative now are left
 * out: there is no factor to them. */
#ifndef DECIDE_TURN_H
#define DECIDE_TURN_H

#include "decide/weigh.h"

#define TURN_FAR 1000. /* the greatest reach */
#define TURN_NEAR 10.  /* the reach of reports */
#define TURN_QUIET 0.1
#define TURN_TOLERANCE 1e-10 /* of a bracket, of its root */

enum turn_side { TURN_BELOW, TURN_ABOVE }; /* of its value now */
extern const char *const turn_sides[];     /* "below", "above" */

/* Is the root between the 5 % and the 95 % point of what is not known of the input? */
enum turn_spread { TURN_CERTAIN, TURN_WITHIN, TURN_OUTSIDE }; /* certain, or varies: no answer */

struct turn {
    const char *name; /* DECISION.turns-at[INPUT].BEST.OTHER.SIDE */
    figure_id input;
    const struct alternative *best, *other; /* best is better now, other beyond the root */
    enum turn_side side;
    double now, at, factor;   /* of the input, in base units; factor: at / now */
    double low, high;         /* a bracket of the root: d has another sign at each end */
    double difference, there; /* d(now) > 0; d(at), about 0 unless d jumps there */
    bool is_linear;           /* d is, in this input */
    enum turn_spread spread;
};

struct turns {
    ARRAY(struct turn) list; /* nearest first, by |log(factor)|; ties by name */
    double reach;
    bool shifted; /* mean is not point(now) in a pair: something is curved */
};

/* 1 < reach <= TURN_FAR. weigh_rank has been called. Alternatives that are level have nothing that
 * turns them. OHMEN_COMPUTE when a percentile cannot be computed. Lives in the arena of the
 * figures. */
ohmen_status turns_find(struct figures *f, const struct weighing *w, double reach,
                        struct turns *out, ohmen_error *e);

/* Does a name have the form of turn.name? */
bool turn_is_named(const char *name);

/* Finds one by its name. The figures of its decision are compiled and evaluated, and the weighing
 * ranked. OHMEN_UNKNOWN with the nearest name where nothing of that name turns the decision. */
ohmen_status turn_find(struct figures *f, const char *name, struct turn *out, ohmen_error *e);

#endif
