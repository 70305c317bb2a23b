/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How far what is not known of one input at a time swings the worth of the alternatives.
 *
 * Inputs: every uncertain figure that a document states (turn_unknown: what varies from occurrence
 * to occurrence has no distribution of knowledge) and that moves the net present value of some
 * alternative. One that is stated once moves wherever it stands, and multiples of it with it
 * (turn_inputs.h). Inputs whose mean is 0 or negative are left out there, and here.
 *
 * Ends: the input at its 5 % point (low) and at its 95 % point (high), as quantity_quantile gives
 * them, discrete ones too; everything else is unknown as it was, and the worth is the mean over
 * that, as it would be if the document stated the end as a certain value. This is exact (apart
 * from rounding) where the worth is linear in every other input; where what is curved in others
 * does not depend on this one; and where it is a function of this one times one of the others.
 * Otherwise what is curved in others is brought in as it is now (prober_of_means), such that the
 * mean over what is not known of the input stays the worth of today, and the swing is approximate:
 * swing.is_exact is false.
 *
 * Width: how far the swing moves the difference of the two best alternatives of today, with doing
 * nothing, which is worth 0, among them. */
#ifndef DECIDE_SWING_H
#define DECIDE_SWING_H

#include "decide/weigh.h"

#define SWING_LOW 0.05  /* what is below the low end */
#define SWING_HIGH 0.95 /* and below the high one */

enum swing_side { SWING_AT_LOW, SWING_AT_HIGH };
extern const char *const swing_sides[]; /* "low", "high" */

struct swing_end {
    double at;           /* of the input, in base units */
    const double *worth; /* money, by alternative of the weighing; 0 of doing nothing */
    size_t best;         /* index of the best alternative; ties by name */
    double difference;   /* worth of today's best less that of today's second */
};

struct input_swing {
    figure_id input;
    const char *name;         /* of that figure */
    double now;               /* its mean */
    struct swing_end ends[2]; /* by swing_side */
    double width;             /* >= 0 */
    bool turns;               /* another alternative than today's is best at an end */
    bool is_exact;
};

struct input_swings {
    ARRAY(struct input_swing) list; /* widest first, ties by name */
    const struct alternative *best, *second;
    ARRAY(figure_id)
    not_possible;  /* uncertain inputs at an end of which a probability were none,
                                      what cannot be negative were, or something not finite; by
                                      name */
    bool is_exact; /* all are */
};

/* weigh_rank has been called. Nothing swings where doing nothing is the only alternative.
 * OHMEN_COMPUTE when a percentile cannot be computed. Lives in the arena of the figures. */
ohmen_status swings_find(struct figures *f, const struct weighing *w, struct input_swings *out,
                         ohmen_error *e);

/* One end of one alternative, by name: DECISION.swing[INPUT].ALTERNATIVE.low */
struct swing_value {
    const char *name;
    struct input_swing swing;
    enum swing_side side;
    const struct alternative *of; /* has a net present value: is not doing nothing */
    double worth;
};

const char *swing_name(struct figures *f, const struct weighing *w, const struct input_swing *s,
                       const struct alternative *of, enum swing_side side);

/* Does a name have the form of swing_name? */
bool swing_is_named(const char *name);

/* Finds one by its name; compiles and ranks its decision. OHMEN_UNKNOWN with the nearest name. */
ohmen_status swing_find(struct figures *f, const char *name, struct swing_value *out,
                        ohmen_error *e);

#endif
