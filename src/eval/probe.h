/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What some nodes (targets) would be if others had other values: point values, everything else at
 * the means, as a graph would have them in which those nodes are constants of these values, bit
 * for bit.
 *
 * A prober has a copy of the values, so that the evaluation is never disturbed. It is opened for
 * the nodes to be replaced; what depends on these and leads to a target is found once, and only
 * that is evaluated at each point. */
#ifndef EVAL_PROBE_H
#define EVAL_PROBE_H

#include "eval/mean.h"

struct prober;

/* Lives in `a`. All nodes have values (eval_point was called); those of later ones are not known
 * here. Targets have one value each (no DIAGRAM). */
struct prober *prober_new(struct arena *a, const struct eval *v, size_t n_targets,
                          const node_id *targets);

/* The same of means instead of point values (means_update was called): where nothing is moved, all
 * is at its mean over what is unknown. Nodes that are moved are certain then, and those INPUT nodes
 * among them are taken as all there are of their input. A node whose rule is linear in what is
 * still unknown has the mean that the rule makes of the means of its arguments, exactly. Any other
 * one (graph_bends; a product of several sampled means, too) that depends on what is moved has its
 * rule at those means
 * - times what its mean is to that where nothing is moved (plus the difference, where it is 0
 *   there, and for EITHER and DIAGRAM), if it does not bend in what is moved. That is exact where
 *   the node is a function of what is moved times one of all else, otherwise approximate;
 * - as it is, if it bends in what is moved, too: approximate. */
struct prober *prober_of_means(struct arena *a, const struct means *m, size_t n_targets,
                               const node_id *targets);

/* Is what the targets get at each point, apart from rounding, what the evaluation of a graph
 * makes of them in which the nodes are constants of these values: always of points, of means as
 * told above? By structure: false also where what is approximate reaches no target after all. */
bool prober_is_exact(const struct prober *p);

/* Opens it for other nodes; those before are as they were again. Nodes with one value each, and no
 * COURSE, in any order. Where one of them depends on another it is replaced all the same. */
void prober_open(struct prober *p, size_t n, const node_id *nodes);

/* Does a target depend on the node, or is it one? */
bool prober_leads(const struct prober *p, node_id n);

/* Is the node replaced, or evaluated anew at each point? */
bool prober_moves(const struct prober *p, node_id n);

/* Is each target linear in x where the nodes are x times given factors, whatever these are? By the
 * rules of the operations: false also where it merely cannot be told. */
bool prober_is_linear(const struct prober *p);

/* Nodes replaced by x[i], in the order in which they were given. False when some value on the way
 * is not finite; then the targets have no value until the next point. */
bool prober_at(struct prober *p, const double *x);

/* A target, or any other node that is no DIAGRAM, at the last point. What leads to no target is
 * as it was. */
double prober_value(const struct prober *p, node_id n);

#endif
