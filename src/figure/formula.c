/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Formulas: the text of a figure in the names of other figures, made from the graph
 * when somebody asks. The grammar is in docs/figures.md; tests/lib has an evaluator of
 * its own for it. */
#include "figure/compile.h"

#include <math.h>
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

static const struct hazard *hazard_of(const struct compiled *u)
{
    return u->object->kind == KIND_HAZARD ? u->object->data : NULL;
}

static void write_scheme(struct writing *w, const struct compiled *u, const char *id, bool bare,
                         bool trips)
{
    struct wording words = {w->f, u->variant, hazard_of(u), trips};
    wiring_text(w->out, &words, id, bare);
}

/* "(A.trips ... )": that the protection operates whose breaker is backed up. */
static void write_called(struct writing *w, const struct compiled *u, const struct condition *c)
{
    if (!c->tripped_by)
        return;
    if (c->tripped_row)
        text_printf(w->out, "sees.%s and ", c->tripped_row);
    write_scheme(w, u, c->tripped_by, false, true);
    text_add(w->out, " and ");
}

/* A scheme stands without parentheses only where it is the whole condition. */
static void write_condition(struct writing *w, const struct compiled *u, const struct condition *c,
                            bool whole)
{
    if (!c)
        return;
    write_condition(w, u, c->before, false);
    if (c->before)
        text_add(w->out, " and ");
    text_add(w->out, c->works ? "" : "not ");
    bool joined = c->sees_row || c->tripped_by;
    text_add(w->out, joined ? "(" : "");
    if (c->sees_row)
        text_printf(w->out, "sees.%s and ", c->sees_row);
    write_called(w, u, c);
    write_scheme(w, u, c->id, whole && !c->before && c->works && !joined, false);
    text_add(w->out, joined ? ")" : "");
}

static bool is_of_name(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '-';
}

static bool mentions(const char *text, const char *name)
{
    size_t n = strlen(name);
    for (const char *p = strstr(text, name); p; p = strstr(p + 1, name))
        if (!is_of_name(p[-1]) && p[-1] != '.' && !is_of_name(p[n]) && p[n] != '.')
            return true;
    return false;
}

/* The probabilities behind the events that a condition names: those of the elements
 * themselves, even where they only repeat their type's. */
static void meet_events(struct writing *w, size_t n, const struct event *events, bool over,
                        const char *text)
{
    for (size_t i = 0; i < n; i++)
        if (mentions(text, events[i].name))
            meet(w, over && events[i].fails.timed ? events[i].fails.course : events[i].fails.fails);
}

static const struct compiled *unit_of_node(const struct writing *w, node_id n)
{
    uint32_t tag;
    node_id first;
    size_t count;
    graph_section(w->f->graph, graph_section_of(w->f->graph, n), &first, &count, &tag);
    return w->f->units.at[tag];
}

static void write_hazard_pick(struct writing *w, const struct compiled *u, uint32_t root, bool over)
{
    const struct hazard_exports *x = u->exports;
    size_t i = 0, from = w->out->n;
    while (x->ends[i].root != root)
        i++;
    text_add(w->out, "probability(");
    if (!x->ends[i].condition)
        text_add(w->out, "certain");
    write_condition(w, u, x->ends[i].condition, true);
    text_byte(w->out, ')');
    meet_events(w, x->n_events, x->events, over, text_str(w->out) + from);
}

static void write_scheme_pick(struct writing *w, const struct compiled *u, bool over)
{
    const struct scheme_exports *x = u->exports;
    size_t from = w->out->n;
    text_add(w->out, "probability(not ");
    write_scheme(w, u, u->id, false, false);
    text_byte(w->out, ')');
    meet_events(w, x->n_events, x->events, over, text_str(w->out) + from);
}

/* The average of one course: of an element or of a shock. */
static void write_course_pick(struct writing *w, node_id diagram)
{
    node_id course = graph_args(w->f->graph, diagram)[0];
    figure_id id = w->f->of_node.at[course];
    meet(w, id);
    text_add(w->out, figure_name(w->f, w->arena, id));
}

/* A diagram of a part that says itself what its roots are. */
static void write_stated_pick(struct writing *w, const struct conditions *c, uint32_t root,
                              bool over)
{
    text_printf(w->out, "probability(%s)", c->texts[root]);
    if (c->texts[root][0] != '"')
        meet_events(w, c->n_events, c->events, over,
                    arena_printf(w->arena, "(%s)", c->texts[root]));
}

static const struct conditions *conditions_of(const struct compiled *u, node_id diagram)
{
    for (size_t i = 0; i < u->conditions.n; i++)
        if (u->conditions.at[i].diagram == diagram)
            return &u->conditions.at[i];
    return NULL;
}

static void write_condition_of(struct writing *w, const struct compiled *u, node_id diagram,
                               uint32_t root, bool over)
{
    const struct conditions *c = conditions_of(u, diagram);
    if (c) {
        write_stated_pick(w, c, root, over);
        return;
    }
    switch (u->object ? u->object->kind : KIND_COUNT) {
    case KIND_HAZARD: write_hazard_pick(w, u, root, over); break;
    case KIND_SCHEME: write_scheme_pick(w, u, over); break;
    default: write_course_pick(w, diagram); break;
    }
}

/* "probability(...)" of the condition under which an end is reached; "over(0 a; 1 a; ...)" its
 * average over that time. */
static void write_pick(struct writing *w, node_id n)
{
    const struct graph *g = w->f->graph;
    node_id diagram = graph_args(g, n)[0];
    struct windows windows = graph_windows_of(g, diagram);
    const struct compiled *u = unit_of_node(w, n);
    uint32_t window, root;
    char from[32], to[32];
    graph_pick_of(g, n, &window, &root);
    if (windows.n)
        text_printf(w->out, "over(%s a; %s a; ", text_double(from, windows.at[window].from),
                    text_double(to, windows.at[window].to));
    write_condition_of(w, u, diagram, root, windows.n > 0);
    text_add(w->out, windows.n ? ")" : "");
}

/* --- over the years --- */

/* "course(standing; rate; ending; left; unreset; from 2 a; first 3 a; every 4 a; born 2 a)", and
 * "fresh" behind it. */
static void write_course(struct writing *w, node_id n)
{
    const struct course *c = graph_course_of(w->f->graph, n);
    char from[32], first[32], every[32], born[32];
    text_add(w->out, "course(");
    for (int i = 0; i < 5; i++) {
        write_node(w, graph_args(w->f->graph, n)[i], WEAKEST);
        text_add(w->out, "; ");
    }
    text_printf(w->out, "from %s a", text_double(from, c->from));
    if (isfinite(c->first))
        text_printf(w->out, "; first %s a; every %s a", text_double(first, c->first),
                    text_double(every, c->every));
    text_printf(w->out, "; born %s a%s)", text_double(born, c->born), c->fresh ? "; fresh" : "");
}

/* "chain(2; from 0; 2.5 a; 0 to 1 at RATE; 1 to 2 at RATE)", or "chain(share of 2; ...)" for the
 * mean share of the time: states have numbers, since the graph knows no names of theirs. */
static void write_chain(struct writing *w, node_id n)
{
    const struct chain *c = graph_chain_of(w->f->graph, n);
    char years[32];
    text_printf(w->out, "chain(%s%u; from %u; %s a", c->mean ? "share of " : "", (unsigned)c->end,
                (unsigned)c->start, text_double(years, c->years));
    for (uint32_t i = 0; i < c->n_flows; i++) {
        text_printf(w->out, "; %u to %u at ", (unsigned)c->from[i], (unsigned)c->to[i]);
        write_node(w, graph_args(w->f->graph, n)[i], WEAKEST);
    }
    text_byte(w->out, ')');
}

/* How many years in a row hold the same value. */
static uint32_t alike(const struct years *y, uint32_t i)
{
    uint32_t n = 1;
    while (i + n < y->n_years && y->of_year[i + n] == y->of_year[i])
        n++;
    return n;
}

/* Without interest, "7 * A + 6 * B", each value once; with it, a sum of annuities. */
static void write_plain_years(struct writing *w, node_id n, const struct years *y)
{
    const node_id *args = graph_args(w->f->graph, n);
    char number[32];
    bool any = false;
    for (uint32_t v = 0; v + 1 < graph_at(w->f->graph, n)->n; v++) {
        double length = 0;
        for (uint32_t i = 0; i < y->n_years; i++)
            if (y->of_year[i] == v)
                length += fmin(floor(y->from) + i + 1, y->to) - fmax(floor(y->from) + i, y->from);
        if (length == 0)
            continue;
        text_add(w->out, any ? " + " : "");
        any = true;
        if (length != 1)
            text_printf(w->out, "%s * ", text_double(number, length));
        write_node(w, args[v + 1], 3);
    }
}

static void write_discounted_years(struct writing *w, node_id n, const struct years *y)
{
    const node_id *args = graph_args(w->f->graph, n);
    char from[32], to[32];
    for (uint32_t i = 0, run; i < y->n_years; i += run) {
        run = alike(y, i);
        text_add(w->out, i ? " + annuity(" : "annuity(");
        write_node(w, args[0], WEAKEST);
        text_printf(w->out, "; %s; %s) * ", text_double(from, fmax(floor(y->from) + i, y->from)),
                    text_double(to, fmin(floor(y->from) + i + run, y->to)));
        write_node(w, args[y->of_year[i] + 1], 3);
    }
}

static void write_years(struct writing *w, node_id n, unsigned around)
{
    const struct years *y = graph_years_of(w->f->graph, n);
    const struct graph_node *rate = graph_at(w->f->graph, graph_args(w->f->graph, n)[0]);
    bool wrap = around > 1;
    text_add(w->out, wrap ? "(" : "");
    if (y->n_years == 0)
        text_byte(w->out, '0');
    else if (rate->op == OP_CONST && rate->constant == 0)
        write_plain_years(w, n, y);
    else
        write_discounted_years(w, n, y);
    text_add(w->out, wrap ? ")" : "");
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

/* The parts of a ratio are taken at their means as a matter of course: see docs/figures.md. */
static node_id part_of_ratio(const struct graph *g, node_id n)
{
    return graph_at(g, n)->op == OP_HELD ? graph_args(g, n)[0] : n;
}

static void write_call(struct writing *w, node_id n, const struct graph_op_info *op)
{
    const struct graph *g = w->f->graph;
    const node_id *args = graph_args(g, n);
    bool ratio = graph_at(g, n)->op == OP_RATIO;
    text_printf(w->out, "%s(", op->symbol);
    for (uint32_t i = 0; i < graph_at(g, n)->n; i++) {
        text_add(w->out, i ? "; " : "");
        write_node(w, ratio ? part_of_ratio(g, args[i]) : args[i], WEAKEST);
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
    case OP_COURSE: write_course(w, n); break;
    case OP_YEARS: write_years(w, n, around); break;
    case OP_CHAIN: write_chain(w, n); break;
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
