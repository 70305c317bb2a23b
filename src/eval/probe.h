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

#include "eval/eval.h"

struct prober;

/* Lives in `a`. All nodes have values (eval_point was called); those of later ones are not known
 * here. Targets have one value each (no DIAGRAM). */
struct prober *prober_new(struct arena *a, const struct eval *v, size_t n_targets,
                          const node_id *targets);

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
