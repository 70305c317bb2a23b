/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Derivatives of one node with respect to all before it: one pass from the root
 * down, each node handing its derivative on by the backward rule of its row. The
 * derivative with respect to a DIAGRAM is kept apart for each of its results, in
 * `weights`, since the node itself is no number; its entry stays 0. */
#include "eval/state.h"

#include <assert.h>
#include <string.h>

static double *cleared(struct arena *a, double *at, size_t n, size_t *cap)
{
    at = array_room(a, at, 0, cap, n, sizeof *at);
    if (n)
        memset(at, 0, n * sizeof *at);
    return at;
}

/* Adds v->arg_back to the derivatives of node n's arguments. */
static void hand_on(const struct eval *v, node_id n, double *derivative)
{
    const node_id *args = graph_args(v->g, n);
    for (uint32_t i = 0; i < graph_at(v->g, n)->n; i++)
        derivative[args[i]] += v->arg_back.at[i];
}

static void diagram_node_backward(struct eval *v, node_id n, double *derivative)
{
    const struct diagram *d = graph_diagram_of(v->g, n);
    size_t place = (size_t)v->value.at[n];
    const double *weight = v->weights.at + place;
    bool any = false;
    for (size_t k = 0; k < d->n_roots; k++)
        any = any || weight[k] != 0;
    if (!any)
        return;
    v->work_back.at = cleared(v->arena, v->work_back.at, d->n_nodes + 2, &v->work_back.cap);
    eval_diagram(v, n, v->results.at + place);
    diagram_backward(d, v->args.at, v->q.at, v->work.at, weight, v->work_back.at,
                     v->arg_back.at);
    hand_on(v, n, derivative);
}

static void node_backward(struct eval *v, node_id n, double *derivative)
{
    const struct graph_node *node = graph_at(v->g, n);
    if (node->op == OP_CONST || node->op == OP_INPUT)
        return;
    if (node->op == OP_PICK) {
        v->weights.at[(size_t)v->value.at[*graph_args(v->g, n)] + node->extra] += derivative[n];
        return;
    }
    if (node->op != OP_DIAGRAM && derivative[n] == 0)
        return;
    v->arg_back.at = cleared(v->arena, v->arg_back.at, node->n, &v->arg_back.cap);
    if (node->op == OP_DIAGRAM) {
        diagram_node_backward(v, n, derivative);
        return;
    }
    graph_backward(node->op, node->n, eval_gather(v, n), v->value.at[n], derivative[n],
                   v->arg_back.at);
    hand_on(v, n, derivative);
}

void eval_backward(struct eval *v, node_id root, double *derivative)
{
    assert(root < v->done && graph_at(v->g, root)->op != OP_DIAGRAM);
    memset(derivative, 0, graph_size(v->g) * sizeof *derivative);
    v->weights.at = cleared(v->arena, v->weights.at, v->results.n, &v->weights.cap);
    derivative[root] = 1;
    for (node_id n = root + 1; n-- > 0;)
        node_backward(v, n, derivative);
}
