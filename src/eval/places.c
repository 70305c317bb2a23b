/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Places of inputs (places.h): names are brought together first, then ordered. Owns nothing beyond
 * its scratch. Invariant: the order depends on names, distributions and slopes, not on numbers. */
#include "eval/places.h"

#include "eval/knot.h"
#include "math/dist.h"

#include <float.h>
#include <math.h>
#include <stdlib.h>

/* Names for which all places are good, roots that decide, and nodes that may be gone through. */
enum { FEW_NAMES = 8, FIRST_ROOTS = 3 };
static const size_t MOST_NODES = 100000000;

/* An input, and the inputs of one name. */
struct one {
    uint32_t input;
    const char *name;
};
struct named {
    size_t first, end; /* among the inputs by name */
    const char *name;
    double influence;
    bool is_met; /* below the root at hand */
};

struct numbers ARRAY_BODY(uint32_t);

struct places {
    struct eval *v;
    size_t n, n_names;
    const uint32_t *numbers;
    struct draw_input *inputs;
    struct one *by_name;
    struct named *names;
    double *derivative, *slope;
    struct arena *arena;    /* scratch */
    uint32_t *root_of_last; /* by node: the last root that asked for it, from 1 */
    uint32_t *name_of;      /* by input */
    struct numbers below;   /* the nodes of a root */
    struct numbers met;     /* the names of its inputs */
    size_t n_visited;       /* nodes of all roots */
};

static int order_of_names(const void *p, const void *q)
{
    const struct one *a = p, *b = q;
    int order = text_compare(a->name, b->name);
    return order ? order : (a->input > b->input) - (a->input < b->input);
}

static int order_of_influence(const void *p, const void *q)
{
    const struct named *a = p, *b = q;
    if (a->influence != b->influence)
        return a->influence > b->influence ? -1 : 1;
    return text_compare(a->name, b->name);
}

static void find_names(struct arena *a, struct places *x)
{
    x->by_name = NEW_ARRAY(a, x->n, struct one);
    x->names = NEW_ARRAY(a, x->n, struct named);
    x->name_of = NEW_ARRAY(a, x->n, uint32_t);
    for (size_t i = 0; i < x->n; i++)
        x->by_name[i] = (struct one){(uint32_t)i, x->inputs[i].name};
    if (x->n)
        qsort(x->by_name, x->n, sizeof *x->by_name, order_of_names);
    for (size_t i = 0, end; i < x->n; i = end) {
        const char *name = x->by_name[i].name;
        for (end = i + 1; end < x->n && text_equal(x->by_name[end].name, name);)
            end++;
        for (size_t k = i; k < end; k++)
            x->name_of[x->by_name[k].input] = (uint32_t)x->n_names;
        x->names[x->n_names++] = (struct named){.first = i, .end = end, .name = name};
    }
}

static int falling(const void *p, const void *q)
{
    uint32_t a = *(const uint32_t *)p, b = *(const uint32_t *)q;
    return (a < b) - (a > b);
}

static void meet(struct places *x, node_id n, uint32_t number)
{
    if (x->root_of_last[n] == number)
        return;
    x->root_of_last[n] = number;
    *array_push(x->arena, &x->below) = n;
}

/* All nodes that a root asks for, from the last to the first. */
static void find_below(struct places *x, node_id root, uint32_t number)
{
    const struct graph *g = x->v->g;
    x->below.n = 0;
    meet(x, root, number);
    for (size_t i = 0; i < x->below.n; i++) {
        node_id n = x->below.at[i];
        for (uint32_t k = 0; k < graph_at(g, n)->n; k++)
            meet(x, graph_args(g, n)[k], number);
    }
    qsort(x->below.at, x->below.n, sizeof *x->below.at, falling);
    x->n_visited += x->below.n;
}

/* The inputs of a name move together: the slopes of all of them are wanted. */
static void meet_name(struct places *x, uint32_t k)
{
    if (x->names[k].is_met)
        return;
    x->names[k].is_met = true;
    *array_push(x->arena, &x->met) = k;
    for (size_t i = x->names[k].first; i < x->names[k].end; i++)
        x->slope[x->by_name[i].input] = 0;
}

/* The slope of a root in each input, by all nodes of it. */
static void find_slopes(struct places *x)
{
    const struct graph *g = x->v->g;
    for (size_t k = 0; k < x->met.n; k++)
        x->names[x->met.at[k]].is_met = false;
    x->met.n = 0;
    eval_backward_over(x->v, x->below.n, x->below.at, x->derivative);
    for (size_t k = x->below.n; k-- > 0;) {
        node_id n = x->below.at[k];
        if (x->derivative[n] == 0 || graph_at(g, n)->op != OP_INPUT)
            continue;
        uint32_t i = knot_place(x->numbers, x->n, graph_at(g, n)->extra);
        if (i == UINT32_MAX)
            continue;
        meet_name(x, x->name_of[i]);
        x->slope[i] += x->derivative[n];
    }
    if (x->met.n > 1)
        qsort(x->met.at, x->met.n, sizeof *x->met.at, falling);
}

/* What one standard deviation of all inputs of a name moves; they move together. */
static double moved_by(const struct places *x, const struct named *name)
{
    double moved = 0;
    for (size_t k = name->first; k < name->end; k++) {
        const struct draw_input *in = &x->inputs[x->by_name[k].input];
        double variance = dist_variance(&in->dist);
        double deviation = sqrt(isfinite(variance) ? variance : DBL_MAX);
        moved += x->slope[x->by_name[k].input] * in->times * deviation;
    }
    return isfinite(moved) ? moved : sqrt(DBL_MAX) / (double)x->n;
}

static double square(double x)
{
    return x * x;
}

/* Names are taken in the order of their numbers. */
static void add_influence(struct places *x, node_id root, uint32_t number)
{
    double greatest = 0, total = 0;
    find_below(x, root, number);
    find_slopes(x);
    for (size_t k = x->met.n; k-- > 0;)
        greatest = fmax(greatest, fabs(moved_by(x, &x->names[x->met.at[k]])));
    if (greatest == 0)
        return;
    for (size_t k = x->met.n; k-- > 0;)
        total += square(moved_by(x, &x->names[x->met.at[k]]) / greatest);
    for (size_t k = x->met.n; k-- > 0;) {
        struct named *name = &x->names[x->met.at[k]];
        name->influence += square(moved_by(x, name) / greatest) / total;
    }
}

/* By influence, unless that would take too long. */
static void order_names(struct places *x, size_t n_roots, const node_id *roots)
{
    size_t size = graph_size(x->v->g);
    x->derivative = NEW_ARRAY(x->arena, size, double);
    x->root_of_last = NEW_ARRAY(x->arena, size, uint32_t);
    x->slope = NEW_ARRAY(x->arena, x->n, double);
    for (size_t k = 0; k < n_roots && x->n_visited <= MOST_NODES; k++)
        add_influence(x, roots[k], (uint32_t)k + 1);
    if (x->n_visited <= MOST_NODES)
        qsort(x->names, x->n_names, sizeof *x->names, order_of_influence);
}

void places_find(struct arena *a, struct eval *v, size_t n_roots, const node_id *roots, size_t n,
                 const uint32_t *numbers, struct draw_input *inputs)
{
    struct arena *scratch = arena_child(a);
    struct places x = {.v = v, .n = n, .numbers = numbers, .inputs = inputs, .arena = scratch};
    n_roots = n_roots < FIRST_ROOTS ? n_roots : FIRST_ROOTS;
    find_names(scratch, &x);
    if (x.n_names > FEW_NAMES)
        order_names(&x, n_roots, roots);
    for (size_t k = 0; k < x.n_names; k++)
        for (size_t i = x.names[k].first; i < x.names[k].end; i++)
            inputs[x.by_name[i].input].place = (unsigned)k;
    arena_free(scratch);
}
