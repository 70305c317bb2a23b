/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means over what is unknown.
 *
 * The value at the means (eval_point) is the mean where no input enters more than once or in a
 * curve (graph_degree). Elsewhere the mean is integrated, and only where it must be: a node whose
 * arguments have no uncertain input in common and that is linear in each has the mean that its
 * rule makes of their means; so sums stay sums and products of independent things stay products.
 * The remaining nodes ("knots") are integrated over their curved inputs (graph_curved), with
 * everything below them evaluated anew at each point and the other inputs held at their means:
 *   none             (of a DIAGRAM, see below) one evaluation
 *   up to 2 inputs   quadrature: a discrete input by its atoms, any other by the trapezoidal rule
 *                    in z, x = quantile(normal(z)) (exponentially convergent for smooth x:
 *                    Trefethen, Weideman, SIAM Review 56 (2014) 385), in steps of 1, 1/2, 1/4 ...
 *                    until the last halving changed nothing by more than 1e-6 of the mean of its
 *                    absolute value
 *   more             16 independent latin hypercubes of MEAN_STRATA points each (math/draw.h),
 *                    from streams that are keyed by each input's name, so that the same input has
 *                    the same values in every knot; the standard error is that of the 16 means
 *
 * A DIAGRAM is linear in the probability of each variable, at each time. It is integrated in that
 * way over those inputs only that two of its variables have in common, and at each point every
 * variable stands at its mean over the curved inputs that it has alone (a COURSE: over time): by
 * atoms and by the trapezoidal rule, until the last halving changed no argument of the course, nor
 * its probability early and late in the longest stretch, by more than 1e-6. What a variable has
 * alone is so integrated exactly (1e-9 where it is smooth) also where the shared inputs are
 * sampled. Of more than 2 inputs of one variable, and where 5 halvings (1 with 2 inputs) do not
 * suffice, they count among the shared ones. Points are left out that have less than 1e-12 of each.
 *
 * HELD stands at the mean of its argument in all of this, does not move with inputs, and hands on
 * no standard error; what reads it has the mean that belongs to that number.
 *
 * What quadrature reaches (computed; tests hold it to closed forms): 1e-9 relative where function
 * and quantile are smooth, mostly 1e-12. One input, steps down to 1/512: 2e-6 at a kink (min, max,
 * a triangular input), 4e-4 of the height of a jump (lookup). Two inputs, steps down to 1/4: 1e-3
 * at a kink; where the last two are further apart than 1e-3, as at most jumps, the knot is
 * sampled as if it had more inputs. Pairs of points with z1^2 + z2^2 > 144 (of a
 * DIAGRAM: 72) are left out.
 *
 * What a sample reaches: for moderate spread the printed error holds (95 % intervals of Student's t
 * with 15 degrees of freedom hold the mean in 94 % of cases). It is too small where the mean hangs
 * on what 512 points hardly meet: products of several inputs with error factors of 3 and more that
 * enter twice, or combinations of atoms with a probability below 1e-3.
 *
 * Invariant: the same graph and names give the same bytes, whatever else the graph holds. Names
 * of different inputs differ. */
#ifndef EVAL_MEAN_H
#define EVAL_MEAN_H

#include "eval/eval.h"
#include "math/dist.h"

#define MEAN_SETS 16
#define MEAN_STRATA 32

/* What the graph does not know of its inputs; `input` is the number of graph_input. */
struct mean_source {
    void *ctx;
    /* The least x with P(X <= x) >= p; q = 1 - p, both in (0, 1), the smaller one exact (as in
     * dist_quantile), down to 1e-33. OHMEN_COMPUTE where there is none. */
    ohmen_status (*quantile)(void *ctx, uint32_t input, double p, double q, double *x,
                             ohmen_error *e);
    /* Atoms of a discrete input, which live as long as the means; 0: it is continuous. */
    size_t (*atoms)(void *ctx, uint32_t input, const double **values, const double **probabilities);
    /* A name that does not depend on what else is in the graph. */
    const char *(*name)(void *ctx, uint32_t input);
    /* An input is the result, times a value of *dist, whose arrays live as long as the means. */
    double (*dist)(void *ctx, uint32_t input, struct dist *dist);
    /* Does it differ from one occurrence to the next, rather than being unknown? */
    bool (*varies)(void *ctx, uint32_t input);
};

enum mean_method { MEAN_EXACT, MEAN_QUADRATURE, MEAN_SAMPLE };

struct means;
/* Lives in `a`; evaluation and source are borrowed. */
struct means *means_new(struct arena *a, struct eval *v, const struct mean_source *source);

/* Means of all nodes that have a value (eval_point was called); incremental as that is. The
 * values of the evaluation change in between and are the same at the end: not to be read
 * meanwhile. Where no node is of degree 2 nothing is computed or kept.
 * A knot that is not finite at some point of the integration is OHMEN_COMPUTE; *culprit as in
 * eval_point. */
ohmen_status means_update(struct means *m, node_id *culprit, ohmen_error *e);

/* Not for DIAGRAM. */
double means_value(const struct means *m, node_id n);
/* Standard error of a sampled mean; 0 where nothing was sampled. */
double means_error(const struct means *m, node_id n);
/* The evaluation that was given. */
struct eval *means_eval(struct means *m);

/* From point values to the values at which means are taken, which are other ones where HELD moves
 * something, and back. In between nothing may be evaluated or asked of the means. */
void means_change_over(struct means *m);
/* The worst method in what the node's mean is made of. */
enum mean_method means_method(const struct means *m, node_id n);

/* An evaluation of which each value is a mean, in `a`: of all nodes that have one. It is a copy,
 * not to be evaluated further. A DIAGRAM has for each result the mean over all sets. */
const struct eval *means_as_values(const struct means *m, struct arena *a);

#endif
