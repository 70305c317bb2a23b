/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Evaluating the graph: point values and derivatives.
 *
 * The readable reference: one value a node, in the order of node numbers, each by
 * the point rule of its row in the op table. Evaluation is incremental: nodes that
 * were appended since the last call are computed, the others kept. */
#ifndef EVAL_EVAL_H
#define EVAL_EVAL_H

#include "graph/graph.h"

struct eval;
struct eval *eval_new(struct arena *a, const struct graph *g);

/* Computes all nodes that have no value yet, inputs at their means. A result that
 * is not a number or infinite is OHMEN_COMPUTE; *culprit (may be NULL) gets the
 * node; the nodes before it have their values, and a further call fails there again. */
ohmen_status eval_point(struct eval *v, node_id *culprit, ohmen_error *e);

/* The value of a node in base units; eval_point has been called. Not for DIAGRAM. */
double eval_value(const struct eval *v, node_id n);

/* Derivatives of `root` with respect to every node before it, at the point:
 * derivative[i] for i <= root; the array holds graph_size doubles and is
 * overwritten. At a tie of min or max the first arm takes it all. */
void eval_backward(struct eval *v, node_id root, double *derivative);

/* The same where nodes[0 .. n) are the root and all nodes that it asks for, from the last number to
 * the first: sets the derivatives of these, and leaves the others alone. */
void eval_backward_over(struct eval *v, size_t n, const node_id *nodes, double *derivative);

/* What each variable of a DIAGRAM does to the root of the last eval_backward, to which the
 * diagram belongs: with R the root, linear in the diagram's results around the point,
 *     gain[i]  = R(variable i true at all times) - R(variable i false at all times)
 *     share[i] = R - R(variable i false at all times)
 * Birnbaum importance is gain; Fussell-Vesely importance (R - R0) / R is share / R; risk
 * achievement worth is 1 + (gain - share) / R; risk reduction worth R / (R - share)
 * (Vesely et al., NUREG/CR-3385, 1983). gain and share hold as many as the diagram has args. */
void eval_effects(struct eval *v, node_id diagram, double *gain, double *share);

#endif
