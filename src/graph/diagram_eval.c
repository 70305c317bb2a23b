/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Probabilities and derivatives of a frozen diagram, in one pass over its nodes
 * each: upwards the probability of every node, downwards the probability of coming
 * to it. Owns nothing. Only products and additions of what is not negative: each
 * level adds at most a few units in the last place to the relative error. */
#include "graph/diagram.h"

void diagram_evaluate(const struct diagram *d, const double *p, const double *q, double *work,
                      double *results)
{
    work[0] = 0;
    work[1] = 1;
    for (size_t i = 0; i < d->n_nodes; i++) {
        const struct diagram_node *n = &d->nodes[i];
        work[i + 2] = p[n->variable] * work[n->high] + q[n->variable] * work[n->low];
    }
    for (size_t k = 0; k < d->n_roots; k++)
        results[k] = work[d->roots[k]];
}

void diagram_backward(const struct diagram *d, const double *p, const double *q,
                      const double *work, const double *weight, double *back, double *dp)
{
    for (size_t i = 0; i < d->n_nodes + 2; i++)
        back[i] = 0;
    for (size_t k = 0; k < d->n_roots; k++)
        back[d->roots[k]] += weight[k];
    for (size_t i = d->n_nodes; i-- > 0;) {
        const struct diagram_node *n = &d->nodes[i];
        double w = back[i + 2];
        dp[n->variable] += w * (work[n->high] - work[n->low]);
        back[n->high] += w * p[n->variable];
        back[n->low] += w * q[n->variable];
    }
}
