/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Comparing the arguments of diagrams by what they are. Owns nothing beyond the arena of the
 * figures. Invariant: nodes that are alike have the same value, and move alike with every input of
 * the same name. */
#include "figure/likeness.h"

#include <string.h>

struct kept ARRAY_BODY(node_id);

/* Deeper ones are taken to differ, which only costs time. */
enum { DEPTH = 32 };

/* The same unknown under two variants. */
static bool same_input(const struct figures *f, uint32_t p, uint32_t q)
{
    const struct quantity *a = f->inputs.at[p], *b = f->inputs.at[q];
    if (p == q || a == b)
        return true;
    return text_equal(f->input_names.at[p], f->input_names.at[q]) && a->shape == b->shape &&
           a->text && b->text && text_equal(a->text, b->text) &&
           quantity_mean(a) == quantity_mean(b);
}

static bool same_rule(const struct figures *f, const struct graph_node *p,
                      const struct graph_node *q)
{
    if (p->op != q->op || p->dim != q->dim || p->n != q->n)
        return false;
    if (p->op == OP_INPUT)
        return same_input(f, p->extra, q->extra);
    if ((p->op == OP_PICK || p->op == OP_DIAGRAM) && p->extra != q->extra)
        return false;
    return p->op == OP_CONST ? memcmp(&p->constant, &q->constant, sizeof p->constant) == 0
                             : p->table == q->table;
}

static bool alike(const struct figures *f, node_id x, node_id y, unsigned depth)
{
    const struct graph *g = f->graph;
    if (x == y)
        return true;
    const struct graph_node *p = graph_at(g, x), *q = graph_at(g, y);
    if (depth == DEPTH || !same_rule(f, p, q))
        return false;
    for (uint32_t i = 0; i < p->n; i++)
        if (!alike(f, graph_args(g, x)[i], graph_args(g, y)[i], depth + 1))
            return false;
    return true;
}

static bool same_windows(const struct windows *a, const struct windows *b)
{
    return a->n == b->n && (a->n == 0 || memcmp(a->at, b->at, a->n * sizeof *a->at) == 0);
}

static bool same_arguments(const struct figures *f, node_id diagram, size_t n, const node_id *args)
{
    if (graph_at(f->graph, diagram)->n != n)
        return false;
    for (size_t i = 0; i < n; i++)
        if (!alike(f, graph_args(f->graph, diagram)[i], args[i], 0))
            return false;
    return true;
}

node_id likeness_find(const struct figures *f, const char *hazard, const struct diagram *d,
                      size_t n, const node_id *args, const struct windows *w)
{
    const struct kept *all = strmap_get(&f->responses, hazard);
    for (size_t i = 0; all && i < all->n; i++) {
        struct windows of = graph_windows_of(f->graph, all->at[i]);
        if (diagram_equal(graph_diagram_of(f->graph, all->at[i]), d) && same_windows(&of, w) &&
            same_arguments(f, all->at[i], n, args))
            return all->at[i];
    }
    return NODE_NONE;
}

void likeness_keep(struct figures *f, const char *hazard, node_id diagram)
{
    struct kept *all = strmap_get(&f->responses, hazard);
    if (!all) {
        all = NEW(f->arena, struct kept);
        strmap_set(f->arena, &f->responses, hazard, all);
    }
    *array_push(f->arena, all) = diagram;
}
