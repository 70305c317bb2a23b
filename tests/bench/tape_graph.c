/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The model of tape_model.h as nodes (tape_graph.h). Owns nothing. */
#include "tape_graph.h"

static const struct dim number;

static node_id times(struct graph *g, node_id a, node_id b)
{
    return graph_op2(g, OP_MULTIPLY, a, b);
}

static node_id blend(struct graph *g, node_id p, node_id q, node_id a, node_id b)
{
    return graph_op2(g, OP_ADD, times(g, p, a), times(g, q, b));
}

node_id tape_graph(struct graph *g, uint32_t first, const double means[MODEL_INPUTS],
                   const double constants[MODEL_CONSTANTS])
{
    node_id x[MODEL_INPUTS], c[MODEL_CONSTANTS], p[4], q[3], one = graph_const(g, 1, number);
    for (uint32_t i = 0; i < MODEL_INPUTS; i++)
        x[i] = graph_input(g, first + i, means[i], number);
    for (int i = 0; i < MODEL_CONSTANTS; i++)
        c[i] = graph_const(g, constants[i], number);
    node_id rate = times(g, x[0], c[0]), exposed = times(g, rate, c[1]);
    for (int i = 0; i < 4; i++)
        p[i] = graph_op2(g, OP_MIN, times(g, x[1 + i], c[2 + i]), one);
    for (int i = 0; i < 3; i++)
        q[i] = graph_op1(g, OP_COMPLEMENT, p[i]);
    node_id a = blend(g, p[1], q[1], c[6], c[7]), b = blend(g, p[2], q[2], c[8], c[9]);
    node_id harm = blend(g, p[0], q[0], a, b);
    node_id people = times(g, x[5], c[10]), money = times(g, x[6], c[11]);
    node_id e1 = times(g, exposed, p[0]), e2 = times(g, exposed, q[0]);
    node_id terms[] = {
        times(g, times(g, e1, p[3]), people),     times(g, times(g, e1, money), a),
        times(g, times(g, e2, people), b),        times(g, times(g, e2, money), c[12]),
        times(g, times(g, exposed, harm), c[13]), times(g, times(g, rate, money), c[12])};
    return times(g, graph_op(g, OP_SUM, sizeof terms / sizeof *terms, terms), c[14]);
}
