/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What every alternative would be worth if stated quantities had other values; or what any other
 * nodes would be.
 *
 * Private to src/decide. Worth is the net present value; doing nothing is worth 0. By means over
 * what is unknown (prober_of_means), with what is moved certain; where the figures are values at
 * the means (figures.points_only), by those.
 *
 * Where that is not exact (prober_is_exact), what is missing is taken to be the same wherever the
 * inputs stand, and so that the mean over what is not known of them is the worth of today. That
 * mean is taken by the atoms of a discrete input, for any other one by the trapezoidal rule in z,
 * x = quantile(normal(z)), from -3.75 to 3.75 in steps of 1.25 (computed: the variance of a uniform
 * one comes out 2 % too small, the mean of a lognormal one with error factor 3 right within 1e-4).
 */
#ifndef DECIDE_MOVING_H
#define DECIDE_MOVING_H

#include "decide/turn_inputs.h"

struct moving {
    struct figures *f;
    const struct weighing *w; /* or NULL, of other nodes */
    struct prober *prober;
    struct turn_inputs inputs; /* only those that documents state, by name */
    size_t n;                  /* alternatives of the weighing, or nodes */
    const node_id *nodes;      /* of their net present values; NODE_NONE: always 0 */
    double *worth;             /* of these, at the last point */
    double *missing;           /* the same: what is added to what the prober gives */
    double *x;                 /* of the nodes that are moved */
    size_t n_moved;
    const struct turn_input **moved;
    figure_id *checked; /* figures that move and must stay possible */
    size_t n_checked;
};

/* weigh_rank has been called. Lives in the arena of the figures. */
void moving_open(struct moving *m, struct figures *f, const struct weighing *w);

/* The same of any nodes, whose values stand for worths then. figures_evaluate has been called; the
 * list is borrowed. */
void moving_open_nodes(struct moving *m, struct figures *f, size_t n, const node_id *nodes);

/* The mean of a node, or its value at the means where the figures are those. */
double moving_mean(const struct moving *m, node_id n);

/* What will be moved: one input, or two. */
void moving_take(struct moving *m, size_t n, const struct turn_input *const *inputs);

/* The same of any number of inputs, for who finds himself what is missing: nothing is, until he
 * says so in `missing`. */
void moving_take_bare(struct moving *m, size_t n, const struct turn_input *const *inputs);

/* Does an input reach a net present value at all, and not only the rest of a share? Nothing has
 * been taken then. */
bool moving_reaches(struct moving *m, const struct turn_input *in);

/* Moves them; false where something is not finite, or a probability is none, or what cannot be
 * negative is. */
bool moving_to(struct moving *m, const double *at);

/* The same, however improbable: false only where something is not finite. */
bool moving_far(struct moving *m, const double *at);

/* The best alternative of the weighing at these worths; ties by name. */
size_t moving_best(const struct moving *m, const double *worth);

#endif
