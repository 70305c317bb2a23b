/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means over what is unknown.
 *
 * The value at the means (eval_point) is the mean where no input enters more than once or in a
 * curve (graph_degree). Elsewhere the mean is integrated, and only where it must be: a node whose
 * arguments have no uncertain input in common and that is linear in each has the mean that its
 * rule makes of their means; so sums stay sums and products of independent things stay products.
 * The remaining nodes ("knots") are integrated over their curved inputs (graph_curved), with
 * everything below them evaluated anew at each point and the other inputs held at their means:
 *   up to 2 inputs   quadrature: a discrete input by its atoms, any other by the trapezoidal rule
 *                    in z, x = quantile(normal(z)) (exponentially convergent for smooth x)
 *   more             16 independent latin hypercubes of MEAN_STRATA points each, from streams that
 *                    are keyed by each input's name, so that the same input has the same values in
 *                    every knot; the standard error is that of the 16 means
 *
 * Invariant: the same graph and names give the same bytes, whatever else the graph holds. */
#ifndef EVAL_MEAN_H
#define EVAL_MEAN_H

#include "eval/eval.h"

#define MEAN_SETS 16
#define MEAN_STRATA 64

/* What the graph does not know of its inputs; `input` is the number of graph_input. */
struct mean_source {
    void *ctx;
    /* The least x with P(X <= x) >= p; q = 1 - p. OHMEN_COMPUTE where there is none. */
    ohmen_status (*quantile)(void *ctx, uint32_t input, double p, double q, double *x,
                             ohmen_error *e);
    /* Atoms of a discrete input; 0: it is continuous. */
    size_t (*atoms)(void *ctx, uint32_t input, const double **values, const double **probabilities);
    /* A name that does not depend on what else is in the graph. */
    const char *(*name)(void *ctx, uint32_t input);
};

enum mean_method { MEAN_EXACT, MEAN_QUADRATURE, MEAN_SAMPLE };

struct means;
struct means *means_new(struct arena *a, struct eval *v, const struct mean_source *source);

/* Means of all nodes that have a value (eval_point was called); incremental as that is.
 * A knot that is not finite at some point of the integration is OHMEN_COMPUTE; *culprit as in
 * eval_point. */
ohmen_status means_update(struct means *m, node_id *culprit, ohmen_error *e);

/* Not for DIAGRAM. */
double means_value(const struct means *m, node_id n);
/* Standard error of a sampled mean; 0 where nothing was sampled. */
double means_error(const struct means *m, node_id n);
/* The worst method in what the node's mean is made of. */
enum mean_method means_method(const struct means *m, node_id n);

#endif
