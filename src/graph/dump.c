/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The graph as text, one line a node: number, operation, arguments, what is extra,
 * dimension. For people and for the golden strings of tests; nothing reads it back.
 *
 *     0 const 2.385 {0:1 3:-1}
 *     1 input #7 0.25
 *     2 multiply (0; 1) {0:1 3:-1}
 *     4 diagram #0 (1; 1)
 *     5 pick (4) root 1
 *     6 course (1; 0; 0; 1; 0) from 0 first 0.5 every 4 born 0 fresh
 *     7 diagram #0 (6; 6) over 0 1; 1 2
 *     8 pick (7) window 1 root 0
 *     9 years (1; 2; 2) from 0.5 to 2 of 0 1
 *     10 chain (1; 2) of 3 states 0>1 1>2 over 2.5 from 0 to 2 mean                 */
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

static void dump_named(struct text *out, const char *name, double x)
{
    text_byte(out, ' ');
    text_add(out, name);
    dump_number(out, x);
}

static void dump_course(struct text *out, const struct course *c)
{
    dump_named(out, "from", c->from);
    if (c->first < INFINITY) {
        dump_named(out, "first", c->first);
        dump_named(out, "every", c->every);
    }
    dump_named(out, "born", c->born);
    text_add(out, c->fresh ? " fresh" : "");
}

static void dump_years(struct text *out, const struct years *y)
{
    dump_named(out, "from", y->from);
    dump_named(out, "to", y->to);
    text_add(out, " of");
    for (size_t i = 0; i < y->n_years; i++)
        text_printf(out, " %u", (unsigned)y->of_year[i]);
}

static void dump_chain(struct text *out, const struct chain *c)
{
    text_printf(out, " of %u states", (unsigned)c->n_states);
    for (uint32_t f = 0; f < c->n_flows; f++)
        text_printf(out, " %u>%u", (unsigned)c->from[f], (unsigned)c->to[f]);
    dump_named(out, "over", c->years);
    text_printf(out, " from %u to %u%s", (unsigned)c->start, (unsigned)c->end,
                c->mean ? " mean" : "");
}

static void dump_windows(struct text *out, struct windows w)
{
    for (size_t k = 0; k < w.n; k++) {
        text_add(out, k ? ";" : " over");
        dump_number(out, w.at[k].from);
        dump_number(out, w.at[k].to);
    }
}

static void dump_pick(struct text *out, const struct graph *g, node_id id)
{
    uint32_t window, root;
    graph_pick_of(g, id, &window, &root);
    if (graph_windows_of(g, *graph_args(g, id)).n)
        text_printf(out, " window %u", (unsigned)window);
    text_printf(out, " root %u", (unsigned)root);
}

static void dump_extra(struct text *out, const struct graph *g, node_id id)
{
    switch (graph_at(g, id)->op) {
    case OP_PICK: dump_pick(out, g, id); break;
    case OP_DIAGRAM: dump_windows(out, graph_windows_of(g, id)); break;
    case OP_YEARS: dump_years(out, graph_years_of(g, id)); break;
    case OP_COURSE: dump_course(out, graph_course_of(g, id)); break;
    case OP_CHAIN: dump_chain(out, graph_chain_of(g, id)); break;
    default: break;
    }
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
    dump_extra(out, g, id);
    dump_dim(out, graph_dim(g, id));
    text_byte(out, '\n');
}

void graph_dump(struct text *out, const struct graph *g)
{
    for (node_id i = 0; i < graph_size(g); i++)
        dump_node(out, g, i);
}
