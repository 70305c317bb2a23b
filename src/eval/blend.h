/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A DIAGRAM at means of its variables, inside src/eval.
 *
 * What a DIAGRAM says is linear in the probability of each variable, at each time. So an input that
 * enters one variable only can be integrated inside of that: the variable's probability (over time,
 * where it is a COURSE) becomes its mean over such inputs, for given values of the inputs that
 * several variables share. That is exact, and leaves only the shared ones to be integrated over.
 *
 * Up to two inputs of a variable are taken that way, as long as the trapezoidal rule of mean.h gets
 * there in a few levels; the others are counted among the shared ones. Points of less than 1e-12 of
 * everything that the variable is made of are left out. */
#ifndef EVAL_BLEND_H
#define EVAL_BLEND_H

#include "eval/spread.h"
#include "eval/state.h"

struct knot_search;
struct blend;

/* Of DIAGRAM n at the values of now, which are point values. Lives in `a`. OHMEN_COMPUTE when a
 * spread fails. */
ohmen_status blend_new(struct arena *a, struct eval *v, struct spreads *s,
                       struct knot_search *search, node_id n, struct blend **out, ohmen_error *e);

/* The inputs that remain, in rising order. */
const uint32_t *blend_inputs(const struct blend *b, size_t *n);

/* Whether a variable has inputs of its own, so that results are means over these. */
bool blend_has_own(const struct blend *b);

/* The DIAGRAM's results at values x of these. The values of the evaluation are other ones
 * afterwards, those of the DIAGRAM and its results excepted. */
const double *blend_at(struct blend *b, const double *x);

/* Puts the point values back. */
void blend_end(struct blend *b);

#endif
