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
static const double MOST_NODES = 1e8;

/* An input, and the inputs of one name. */
struct one {
    uint32_t input;
    const char *name;
};
struct named {
    size_t first, end; /* among the inputs by name */
    const char *name;
    double influence;
};

struct places {
    struct eval *v;
    size_t n, n_names;
    const uint32_t *numbers;
    struct draw_input *inputs;
    struct one *by_name;
    struct named *names;
    double *derivative, *slope;
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
    for (size_t i = 0; i < x->n; i++)
        x->by_name[i] = (struct one){(uint32_t)i, x->inputs[i].name};
    if (x->n)
        qsort(x->by_name, x->n, sizeof *x->by_name, order_of_names);
    for (size_t i = 0, end; i < x->n; i = end) {
        const char *name = x->by_name[i].name;
        for (end = i + 1; end < x->n && text_equal(x->by_name[end].name, name);)
            end++;
        x->names[x->n_names++] = (struct named){i, end, name, 0};
    }
}

/* The slope of a root in each input, by all nodes of it. */
static void find_slopes(struct places *x, node_id root)
{
    const struct graph *g = x->v->g;
    eval_backward(x->v, root, x->derivative);
    for (size_t i = 0; i < x->n; i++)
        x->slope[i] = 0;
    for (node_id n = 0; n <= root; n++) {
        if (x->derivative[n] == 0 || graph_at(g, n)->op != OP_INPUT)
            continue;
        uint32_t i = knot_place(x->numbers, x->n, graph_at(g, n)->extra);
        if (i != UINT32_MAX)
            x->slope[i] += x->derivative[n];
    }
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

static void add_influence(struct places *x, node_id root)
{
    double greatest = 0, total = 0;
    find_slopes(x, root);
    for (size_t k = 0; k < x->n_names; k++)
        greatest = fmax(greatest, fabs(moved_by(x, &x->names[k])));
    if (greatest == 0)
        return;
    for (size_t k = 0; k < x->n_names; k++)
        total += square(moved_by(x, &x->names[k]) / greatest);
    for (size_t k = 0; k < x->n_names; k++)
        x->names[k].influence += square(moved_by(x, &x->names[k]) / greatest) / total;
}

void places_find(struct arena *a, struct eval *v, size_t n_roots, const node_id *roots, size_t n,
                 const uint32_t *numbers, struct draw_input *inputs)
{
    struct arena *scratch = arena_child(a);
    struct places x = {.v = v, .n = n, .numbers = numbers, .inputs = inputs};
    n_roots = n_roots < FIRST_ROOTS ? n_roots : FIRST_ROOTS;
    find_names(scratch, &x);
    if (x.n_names > FEW_NAMES && (double)n_roots * (double)graph_size(v->g) <= MOST_NODES) {
        x.derivative = NEW_ARRAY(scratch, graph_size(v->g), double);
        x.slope = NEW_ARRAY(scratch, n, double);
        for (size_t k = 0; k < n_roots; k++)
            add_influence(&x, roots[k]);
        qsort(x.names, x.n_names, sizeof *x.names, order_of_influence);
    }
    for (size_t k = 0; k < x.n_names; k++)
        for (size_t i = x.names[k].first; i < x.names[k].end; i++)
            inputs[x.by_name[i].input].place = (unsigned)k;
    arena_free(scratch);
}
