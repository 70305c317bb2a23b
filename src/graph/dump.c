/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The graph as text, one line a node: number, operation, arguments, what is extra,
 * dimension. For people and for the golden strings of tests; nothing reads it back.
 *
 *     0 const 2.385 {0:1 3:-1}
 *     1 input #7 0.25
 *     2 multiply (0; 1) {0:1 3:-1}
 *     4 diagram #0 (1; 1)
 *     5 pick (4) root 1                                                            */
#include "graph/graph.h"

#include <math.h>

static void dump_number(struct text *out, double x)
{
    char buf[40];
    text_byte(out, ' ');
    if (isnan(x))
        text_add(out, "nan");
    else if (isinf(x))
        text_add(out, x < 0 ? "-inf" : "inf");
    else
        text_add(out, text_double(buf, x));
}

static void dump_arguments(struct text *out, const node_id *args, uint32_t n)
{
    text_add(out, " (");
    for (uint32_t i = 0; i < n; i++)
        text_printf(out, i ? "; %u" : "%u", (unsigned)args[i]);
    text_add(out, ")");
}

static void dump_dim(struct text *out, struct dim d)
{
    if (dim_is_number(d))
        return;
    text_add(out, " {");
    const char *gap = "";
    for (int i = 0; i < DIM_SLOTS; i++)
        if (d.e[i]) {
            text_printf(out, "%s%d:%d", gap, i, d.e[i]);
            gap = " ";
        }
    text_add(out, "}");
}

static void dump_node(struct text *out, const struct graph *g, node_id id)
{
    const struct graph_node *n = graph_at(g, id);
    text_printf(out, "%u %s", (unsigned)id, graph_op_info(n->op)->name);
    if (n->op == OP_INPUT || n->op == OP_DIAGRAM)
        text_printf(out, " #%u", (unsigned)n->extra);
    if (n->op == OP_CONST || n->op == OP_INPUT)
        dump_number(out, n->constant);
    else
        dump_arguments(out, graph_args(g, id), n->n);
    if (n->op == OP_PICK)
        text_printf(out, " root %u", (unsigned)n->extra);
    dump_dim(out, graph_dim(g, id));
    text_byte(out, '\n');
}

void graph_dump(struct text *out, const struct graph *g)
{
    for (node_id i = 0; i < graph_size(g); i++)
        dump_node(out, g, i);
}
