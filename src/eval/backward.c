/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Derivatives of one node with respect to all before it: one pass from the root
 * down, each node handing its derivative on by the backward rule of its row. The
 * derivative with respect to a DIAGRAM is kept apart for each of its results, in
 * `weights`, since the node itself is no number; its entry stays 0. A DIAGRAM over
 * windows hands on to the arguments of its courses, past the courses themselves. */
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

/* The weights of a DIAGRAM's results; NULL where all are 0. */
static const double *weights_of(const struct eval *v, node_id n)
{
    const double *weight = v->weights.at + (size_t)v->value.at[n];
    size_t n_results = eval_results(v, n);
    for (size_t k = 0; k < n_results; k++)
        if (weight[k] != 0)
            return weight;
    return NULL;
}

/* Adds to dp what each probability of a DIAGRAM without windows does. */
static void still_backward(struct eval *v, node_id n, const double *weight, double *dp)
{
    const struct diagram *d = graph_diagram_of(v->g, n);
    v->work_back.at = cleared(v->arena, v->work_back.at, d->n_nodes + 2, &v->work_back.cap);
    eval_diagram(v, n, v->results.at + (size_t)v->value.at[n]);
    diagram_backward(d, v->args.at, v->q.at, v->work.at, weight, v->work_back.at, dp);
}

static void averaged_backward(struct eval *v, node_id n, const double *weight, double *derivative)
{
    struct averaged what = eval_averaged(v, n);
    struct course_values *back = v->course_back.at =
        array_room(v->arena, v->course_back.at, 0, &v->course_back.cap, what.n, sizeof *back);
    if (what.n)
        memset(back, 0, what.n * sizeof *back);
    struct average_slopes out = {.gain = v->arg_back.at, .by = (double(*)[COURSE_ARGS])back};
    average_slopes(v->arena, &what, weight, &out);
    for (size_t i = 0; i < what.n; i++) {
        node_id arg = graph_args(v->g, n)[i];
        if (!what.course[i])
            derivative[arg] += v->arg_back.at[i];
        for (int k = 0; what.course[i] && k < COURSE_ARGS; k++)
            derivative[graph_args(v->g, arg)[k]] += back[i].x[k];
    }
}

static void diagram_node_backward(struct eval *v, node_id n, double *derivative)
{
    const double *weight = weights_of(v, n);
    if (!weight)
        return;
    if (graph_windows_of(v->g, n).n) {
        averaged_backward(v, n, weight, derivative);
        return;
    }
    still_backward(v, n, weight, v->arg_back.at);
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
    graph_node_backward(v->g, n, eval_gather(v, n), v->value.at[n], derivative[n], v->arg_back.at);
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

/* Of nodes that fall, the first of which is the root. */
void eval_backward_over(struct eval *v, size_t n, const node_id *nodes, double *derivative)
{
    v->weights.at = array_room(v->arena, v->weights.at, 0, &v->weights.cap, v->results.n,
                               sizeof *v->weights.at);
    for (size_t i = 0; i < n; i++) {
        derivative[nodes[i]] = i == 0;
        if (graph_at(v->g, nodes[i])->op == OP_DIAGRAM)
            array_zero(v->weights.at + (size_t)v->value.at[nodes[i]],
                       eval_results(v, nodes[i]) * sizeof *v->weights.at);
    }
    for (size_t i = 0; i < n; i++)
        node_backward(v, nodes[i], derivative);
}

void eval_effects(struct eval *v, node_id diagram, double *gain, double *share)
{
    size_t n = graph_at(v->g, diagram)->n;
    assert(diagram < v->done && v->weights.at);
    for (size_t i = 0; i < n; i++)
        gain[i] = share[i] = 0;
    const double *weight = weights_of(v, diagram);
    if (!weight)
        return;
    if (graph_windows_of(v->g, diagram).n) {
        struct averaged what = eval_averaged(v, diagram);
        average_slopes(v->arena, &what, weight, &(struct average_slopes){gain, share, NULL});
        return;
    }
    still_backward(v, diagram, weight, gain);
    for (size_t i = 0; i < n; i++)
        share[i] = v->args.at[i] * gain[i];
}
