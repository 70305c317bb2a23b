/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Parts of an element's probability of failure, compiled beside it where somebody asks. Owns
 * nothing: the figures live with the others, but no formula names them. */
#include "figure/contributions.h"

#include "figure/compile.h"
#include "figure/span.h"

#define PART_SHARES "shares"

/* Arguments of graph_course. */
enum { STANDING, RATE, ENDING, LEFT, UNRESET, ARGUMENTS };

static const char *const part_words[CONTRIBUTIONS] = {
    [CONTRIBUTION_LEFT] = "left-failed",
    [CONTRIBUTION_TESTED] = "tested",
    [CONTRIBUTION_UNTESTED] = "untested",
};

static const struct element_exports *exports_of(const struct compiled *u)
{
    return u->exports;
}

static bool is_zero(const struct graph *g, node_id n)
{
    return graph_at(g, n)->op == OP_CONST && graph_at(g, n)->constant == 0;
}

/* The mean of a probability over time, in the windows of the element. */
static node_id mean_of(struct building *b, node_id course, const struct span *s)
{
    struct figures *f = b->figures;
    node_id diagram = graph_diagram_over(f->graph, variable_itself(f), 1, &course, &s->windows);
    node_id *values = NEW_ARRAY(f->arena, s->windows.n, node_id);
    for (uint32_t w = 0; w < s->windows.n; w++)
        values[w] = graph_pick_in(f->graph, diagram, w, 0);
    return span_mean(b, s, values);
}

/* The course with one of its parts only, all else as it is. */
static void add_course_part(struct building *b, const struct element_exports *x,
                            enum contribution c, size_t kept)
{
    struct graph *g = b->figures->graph;
    const node_id *all = graph_args(g, x->whole.node);
    if (is_zero(g, all[kept]))
        return;
    node_id none = compile_const(b, 0, dim_number, NULL);
    node_id never = compile_const(b, 0, dim_frequency, NULL);
    node_id args[ARGUMENTS] = {none, never, all[ENDING], none, never};
    args[kept] = all[kept];
    node_id course = graph_course(g, &x->whole.when, args);
    compiled_add(b, PROPERTY_FAILS, part_words[c], NULL, mean_of(b, course, &x->span), NULL, NULL);
}

/* Undetected failures that no test finds and only demands show, in the long run: rate over rate
 * and how often they show it. Those that the course has are added there. */
static void add_long_run(struct building *b, const struct compiled *element)
{
    struct graph *g = b->figures->graph;
    const struct element_exports *x = exports_of(element);
    figure_id split = compiled_figure(b->figures, element, PROPERTY_UNTESTED, NULL, NULL);
    node_id rate = split != FIGURE_NONE ? figure_at(b->figures, split)->node
                   : x->tested          ? NODE_NONE
                                        : x->undetected;
    bool in_course = x->whole.timed && !is_zero(g, graph_args(g, x->whole.node)[UNRESET]);
    if (rate == NODE_NONE || in_course)
        return;
    node_id ending =
        x->revealed != NODE_NONE ? x->revealed : compile_const(b, 0, dim_frequency, NULL);
    node_id share = graph_op2(g, OP_RATIO, rate, graph_op2(g, OP_ADD, rate, ending));
    compiled_add(b, PROPERTY_FAILS, part_words[CONTRIBUTION_UNTESTED], NULL, share, NULL, NULL);
}

static const struct compiled *parts_of(struct figures *f, const struct compiled *element)
{
    struct building b = {.figures = f, .variant = element->variant};
    const struct element_exports *x = exports_of(element);
    const struct compiled *known = compiled_part(&b, element->id, PART_SHARES);
    if (known)
        return known;
    compiled_begin_part(f, element->variant, element->object, element->id, PART_SHARES, &b);
    if (x->whole.timed) {
        add_course_part(&b, x, CONTRIBUTION_LEFT, LEFT);
        add_course_part(&b, x, CONTRIBUTION_TESTED, RATE);
        add_course_part(&b, x, CONTRIBUTION_UNTESTED, UNRESET);
    }
    add_long_run(&b, element);
    compiled_end(&b);
    return b.unit;
}

void element_contributions(struct figures *f, const struct compiled *element,
                           struct contributions *out)
{
    static const enum property own[] = {[CONTRIBUTION_IN_REPAIR] = PROPERTY_IN_REPAIR,
                                        [CONTRIBUTION_IN_TEST] = PROPERTY_IN_TEST,
                                        [CONTRIBUTION_OUT] = PROPERTY_OUT};
    const struct compiled *parts = parts_of(f, element);
    node_id on_demand = exports_of(element)->on_demand;
    for (enum contribution c = 0; c < CONTRIBUTIONS; c++) {
        out->named[c] = c < CONTRIBUTION_LEFT;
        out->at[c] = c == CONTRIBUTION_ON_DEMAND
                         ? (on_demand == NODE_NONE ? FIGURE_NONE : f->of_node.at[on_demand])
                     : c < CONTRIBUTION_LEFT
                         ? compiled_figure(f, element, own[c], NULL, NULL)
                         : compiled_figure(f, parts, PROPERTY_FAILS, part_words[c], NULL);
    }
}
