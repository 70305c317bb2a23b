/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Point values: the readable reference. One pass over the nodes in the order of
 * their numbers, each by the point rule of its row in the op table. Owns the values;
 * the graph is borrowed and may grow between calls. */
#include "eval/state.h"

#include <assert.h>
#include <math.h>

struct eval *eval_new(struct arena *a, const struct graph *g)
{
    struct eval *v = NEW(a, struct eval);
    v->arena = a;
    v->g = g;
    v->isa = isa_best();
    return v;
}

const double *eval_gather(struct eval *v, node_id n)
{
    size_t count = graph_at(v->g, n)->n;
    const node_id *args = graph_args(v->g, n);
    double *x = ROOM(v, &v->args, count);
    for (size_t i = 0; i < count; i++)
        x[i] = v->value.at[args[i]];
    return x;
}

static bool is_replaced(const struct eval *v, node_id n)
{
    for (size_t i = 0; i < v->n_replaced; i++)
        if (v->replaced[i] == n)
            return true;
    return false;
}

double eval_complement(const struct eval *v, node_id n)
{
    if (graph_at(v->g, n)->op == OP_COMPLEMENT && !is_replaced(v, n))
        return v->value.at[graph_args(v->g, n)[0]];
    return 1 - v->value.at[n];
}

size_t eval_results(const struct eval *v, node_id n)
{
    size_t n_windows = graph_windows_of(v->g, n).n;
    return graph_diagram_of(v->g, n)->n_roots * (n_windows ? n_windows : 1);
}

/* p and q of the variables of a DIAGRAM, in v->args and v->q. */
static void gather_probabilities(struct eval *v, node_id n)
{
    const node_id *args = graph_args(v->g, n);
    size_t count = graph_at(v->g, n)->n;
    eval_gather(v, n);
    double *q = ROOM(v, &v->q, count);
    for (size_t i = 0; i < count; i++)
        q[i] = eval_complement(v, args[i]);
}

struct averaged eval_averaged(struct eval *v, node_id n)
{
    const node_id *args = graph_args(v->g, n);
    size_t count = graph_at(v->g, n)->n;
    gather_probabilities(v, n);
    const struct course **courses = ROOM(v, &v->courses, count);
    struct course_values *values = ROOM(v, &v->course_values, count);
    for (size_t i = 0; i < count; i++) {
        bool changes = graph_at(v->g, args[i])->op == OP_COURSE;
        courses[i] = changes ? graph_course_of(v->g, args[i]) : NULL;
        for (int k = 0; changes && k < COURSE_ARGS; k++)
            values[i].x[k] = v->value.at[graph_args(v->g, args[i])[k]];
    }
    return (struct averaged){.diagram = graph_diagram_of(v->g, n),
                             .n = count,
                             .p = v->args.at,
                             .q = v->q.at,
                             .course = courses,
                             .x = (const double(*)[COURSE_ARGS])values,
                             .windows = graph_windows_of(v->g, n),
                             .isa = v->isa};
}

void eval_diagram(struct eval *v, node_id n, double *results)
{
    const struct diagram *d = graph_diagram_of(v->g, n);
    if (graph_windows_of(v->g, n).n) {
        struct averaged what = eval_averaged(v, n);
        average_values(v->arena, &what, results);
        return;
    }
    gather_probabilities(v, n);
    diagram_evaluate(d, v->args.at, v->q.at, ROOM(v, &v->work, d->n_nodes + 2), results);
}

double eval_node(struct eval *v, node_id n, size_t place)
{
    const struct graph_node *node = graph_at(v->g, n);
    switch (node->op) {
    case OP_CONST:
    case OP_INPUT: return node->constant;
    case OP_DIAGRAM: eval_diagram(v, n, v->results.at + place); return (double)place;
    case OP_PICK: return v->results.at[(size_t)v->value.at[*graph_args(v->g, n)] + node->extra];
    default: return graph_node_point(v->g, n, eval_gather(v, n));
    }
}

/* The place of a DIAGRAM's results; NaN when one of them is not finite. */
static double diagram_place(struct eval *v, node_id n)
{
    size_t count = eval_results(v, n), place = v->results.n;
    array_reserve(v->arena, &v->results, count);
    double x = eval_node(v, n, place);
    for (size_t k = 0; k < count; k++)
        if (!isfinite(v->results.at[place + k]))
            return NAN;
    v->results.n += count;
    return x;
}

static double node_value(struct eval *v, node_id n)
{
    return graph_at(v->g, n)->op == OP_DIAGRAM ? diagram_place(v, n) : eval_node(v, n, 0);
}

ohmen_status eval_point(struct eval *v, node_id *culprit, ohmen_error *e)
{
    size_t size = graph_size(v->g);
    v->value.n = v->done;
    array_reserve(v->arena, &v->value, size - v->done);
    v->value.n = size;
    for (; v->done < size; v->done++) {
        node_id n = (node_id)v->done;
        double x = node_value(v, n);
        if (!isfinite(x)) {
            if (culprit)
                *culprit = n;
            return error_set(e, OHMEN_COMPUTE,
                             "node %u (%s) of the calculation has no finite value", (unsigned)n,
                             graph_op_info(graph_at(v->g, n)->op)->name);
        }
        v->value.at[n] = x;
    }
    return OHMEN_OK;
}

double eval_value(const struct eval *v, node_id n)
{
    assert(n < v->done && graph_at(v->g, n)->op != OP_DIAGRAM);
    return v->value.at[n];
}
