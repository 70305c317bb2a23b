/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Formulas: the text of a figure in the names of other figures, made from the graph
 * when somebody asks. The grammar is in docs/figures.md; tests/lib has an evaluator of
 * its own for it. */
#include "figure/compile.h"

#include <string.h>

#include "base/text.h"

/* Binding strength of what stands alone. */
enum { WEAKEST = 0, ALONE = 9 };

struct writing {
    struct figures *f;
    struct text *out;
    struct figure_ids *names; /* figures met, or NULL */
    struct arena *arena;
    node_id root;
    figure_id self;
    bool root_is_named; /* by an earlier figure */
};

static void write_node(struct writing *w, node_id n, unsigned around);

static void meet(struct writing *w, figure_id id)
{
    if (!w->names)
        return;
    for (size_t i = 0; i < w->names->n; i++)
        if (w->names->at[i] == id)
            return;
    *array_push(w->arena, w->names) = id;
}

/* A constant that is no stated number, such as a sum of nothing, is nobody's. */
static bool is_nobodys(const struct writing *w, node_id n)
{
    const struct graph_node *node = graph_at(w->f->graph, n);
    return node->op == OP_CONST && node->extra == 0;
}

static figure_id named(const struct writing *w, node_id n)
{
    if (is_nobodys(w, n))
        return FIGURE_NONE;
    figure_id id = n < w->f->of_node.n ? w->f->of_node.at[n] : FIGURE_NONE;
    return id == w->self ? FIGURE_NONE : id;
}

static const char *literal(const struct writing *w, node_id n)
{
    return n < w->f->literals.n ? w->f->literals.at[n] : NULL;
}

static bool is_compound_literal(const char *text)
{
    return strstr(text, " per ") || text_starts(text, "1 in ") || text[0] == '-';
}

static void write_const(struct writing *w, node_id n, unsigned around)
{
    const char *text = literal(w, n);
    char number[32];
    if (!text) {
        struct dim d = graph_dim(w->f->graph, n);
        const char *unit = dim_unit(w->arena, &w->f->base->units, d);
        text = arena_printf(w->arena, "%s%s%s",
                            text_double(number, graph_at(w->f->graph, n)->constant),
                            *unit ? " " : "", unit);
    }
    bool wrap = around > WEAKEST && is_compound_literal(text);
    text_printf(w->out, "%s%s%s", wrap ? "(" : "", text, wrap ? ")" : "");
}

static void write_input(struct writing *w, node_id n)
{
    const struct quantity *q = w->f->inputs.at[graph_at(w->f->graph, n)->extra];
    text_printf(w->out, "mean(%s)", quantity_reads(w->f, q));
}

/* --- ends of event trees and failures of schemes --- */

/* A scheme stands without parentheses only where it is the whole condition. */
static void write_condition(struct text *t, const struct compiled *u, const struct condition *c,
                            bool whole)
{
    if (!c)
        return;
    write_condition(t, u, c->before, false);
    if (c->before)
        text_add(t, " and ");
    text_add(t, c->works ? "" : "not ");
    if (c->sees_row)
        text_printf(t, "(sees.%s and ", c->sees_row);
    wiring_text(t, u->variant->model, c->id, whole && !c->before && c->works && !c->sees_row);
    if (c->sees_row)
        text_byte(t, ')');
}

static bool is_of_name(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '-';
}

static bool mentions(const char *text, const char *name)
{
    size_t n = strlen(name);
    for (const char *p = strstr(text, name); p; p = strstr(p + 1, name))
        if (!is_of_name(p[-1]) && !is_of_name(p[n]))
            return true;
    return false;
}

/* The probabilities behind the events that a condition names: those of the elements
 * themselves, even where they only repeat their type's. */
static void meet_variables(struct writing *w, const struct compiled *u, const char *text)
{
    const struct building under = {.figures = w->f, .variant = u->variant};
    const struct hazard_exports *x = u->exports;
    const struct scheme_exports *y = u->exports;
    bool hazard = u->object->kind == KIND_HAZARD;
    for (size_t i = 0; i < (hazard ? x->n_variables : y->n_variables); i++) {
        const char *name = hazard ? x->variables[i] : y->variables[i];
        if (!mentions(text, name))
            continue;
        bool sees = hazard && x->is_sees[i];
        meet(w, sees ? compiled_figure(w->f, u, PROPERTY_SHARE, name, "sees")
                     : compiled_of(&under, name)->main);
    }
}

/* "probability(...)" of the condition under which an end is reached. */
static void write_pick(struct writing *w, node_id n)
{
    uint32_t tag;
    node_id first;
    size_t count;
    graph_section(w->f->graph, graph_section_of(w->f->graph, n), &first, &count, &tag);
    const struct compiled *u = w->f->units.at[tag];
    uint32_t root = graph_at(w->f->graph, n)->extra;
    size_t from = w->out->n;
    text_add(w->out, "probability(");
    if (u->object->kind == KIND_SCHEME) {
        text_add(w->out, "not ");
        wiring_text(w->out, u->variant->model, u->id, false);
    } else {
        const struct hazard_exports *x = u->exports;
        size_t i = 0;
        while (x->ends[i].root != root)
            i++;
        if (!x->ends[i].condition)
            text_add(w->out, "certain");
        write_condition(w->out, u, x->ends[i].condition, true);
    }
    text_byte(w->out, ')');
    meet_variables(w, u, text_str(w->out) + from);
}

/* --- operations --- */

static void write_infix(struct writing *w, node_id n, const struct graph_op_info *op)
{
    const struct graph_node *node = graph_at(w->f->graph, n);
    const node_id *args = graph_args(w->f->graph, n);
    for (uint32_t i = 0; i < node->n; i++) {
        if (i)
            text_printf(w->out, " %s ", op->symbol);
        bool associative = node->op == OP_SUM;
        write_node(w, args[i], op->strength + (i > 0 && !associative));
    }
}

static void write_lookup(struct writing *w, node_id n)
{
    const node_id *args = graph_args(w->f->graph, n);
    text_add(w->out, "lookup(");
    write_node(w, args[0], WEAKEST);
    for (uint32_t i = 1; i + 1 < graph_at(w->f->graph, n)->n; i += 2) {
        text_add(w->out, "; ");
        write_node(w, args[i], WEAKEST);
        text_add(w->out, " -> ");
        write_node(w, args[i + 1], WEAKEST);
    }
    text_byte(w->out, ')');
}

static void write_call(struct writing *w, node_id n, const struct graph_op_info *op)
{
    const node_id *args = graph_args(w->f->graph, n);
    text_printf(w->out, "%s(", op->symbol);
    for (uint32_t i = 0; i < graph_at(w->f->graph, n)->n; i++) {
        text_add(w->out, i ? "; " : "");
        write_node(w, args[i], WEAKEST);
    }
    text_byte(w->out, ')');
}

static void write_operation(struct writing *w, node_id n, unsigned around)
{
    const struct graph_node *node = graph_at(w->f->graph, n);
    const struct graph_op_info *op = graph_op_info((enum graph_op)node->op);
    if (op->strength == 0) {
        write_call(w, n, op);
        return;
    }
    bool wrap = op->strength < around;
    text_add(w->out, wrap ? "(" : "");
    if (node->op == OP_COMPLEMENT || node->op == OP_NEGATE) {
        text_add(w->out, op->symbol);
        write_node(w, graph_args(w->f->graph, n)[0], op->strength + 1);
    } else {
        write_infix(w, n, op);
    }
    text_add(w->out, wrap ? ")" : "");
}

static void write_node(struct writing *w, node_id n, unsigned around)
{
    figure_id id = named(w, n);
    if (id != FIGURE_NONE && (n != w->root || w->root_is_named)) {
        meet(w, id);
        text_add(w->out, figure_name(w->f, w->arena, id));
        return;
    }
    switch (graph_at(w->f->graph, n)->op) {
    case OP_CONST: write_const(w, n, around); break;
    case OP_INPUT: write_input(w, n); break;
    case OP_PICK: write_pick(w, n); break;
    case OP_LOOKUP: write_lookup(w, n); break;
    default: write_operation(w, n, around); break;
    }
}

static void write_formula(struct figures *f, struct arena *a, figure_id id, struct text *out,
                          struct figure_ids *names)
{
    const struct figure *g = figure_at(f, id);
    figure_id first = f->of_node.at[g->node];
    struct writing w = {
        .f = f, .out = out, .names = names, .arena = a, .root = g->node, .self = id};
    w.root_is_named = first != id;
    write_node(&w, g->node, WEAKEST);
}

const char *figure_formula(struct figures *f, struct arena *a, figure_id id)
{
    struct text t;
    text_init(&t, a);
    write_formula(f, a, id, &t, NULL);
    return text_str(&t);
}

void figure_inputs(struct figures *f, struct arena *a, figure_id id, struct figure_ids *out)
{
    struct text t;
    text_init(&t, a);
    write_formula(f, a, id, &t, out);
}
