/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Adjustments (adjust.h). Owns a copy of the means, behind whose results there is room for those
 * of one DIAGRAM. */
#include "eval/adjust.h"

#include "eval/state.h"

#include <math.h>
#include <string.h>

/* Of one node: result k times factor[first + k], and added[first + k] to that. A PICK is a sum and
 * never adjusted, so that no rule here reads results. */
struct adjustment {
    size_t first, n;
    bool is_open;
};

/* What a node is in what is moved. Separable: a function of that alone times one of the rest, so
 * that the quotient of its mean to its rule stays the same, wherever that is moved to. */
enum { UNMOVED, MOVED, SEPARABLE };

struct adjustments {
    struct arena *arena;
    const struct means *means;
    struct eval own;       /* values are means; results are those of one DIAGRAM */
    const struct eval *at; /* the same with all results */
    uint32_t *of_node;     /* number of its adjustment from 1 on; 0: none yet */
    ARRAY(struct adjustment) list;
    ARRAY(double) factor, added;
    ARRAY(uint32_t) certain; /* inputs that are moved */
    ARRAY(uint32_t) marked;  /* scratch: inputs */
    ARRAY(uint32_t) open;    /* adjustments of the steps */
    unsigned char *state;    /* by node */
    ARRAY(node_id) touched;  /* whose state is not UNMOVED */
    bool is_exact;
};

struct adjustments *adjustments_new(struct arena *a, const struct means *m,
                                    const struct eval *at_means)
{
    struct adjustments *x = NEW(a, struct adjustments);
    *x = (struct adjustments){.arena = a, .means = m, .at = at_means};
    x->own = *at_means;
    x->own.results.at = NULL;
    x->own.results.n = x->own.results.cap = 0;
    x->of_node = NEW_ARRAY(a, at_means->done, uint32_t);
    x->state = NEW_ARRAY(a, at_means->done, unsigned char);
    x->is_exact = true;
    return x;
}

bool adjustments_are_exact(const struct adjustments *x)
{
    return x->is_exact;
}

/* ---- which nodes ---- */

/* Is the mean of sums what the rule makes of means, whatever these are made of? */
static bool is_sum(enum graph_op op)
{
    switch (op) {
    case OP_ADD:
    case OP_SUBTRACT:
    case OP_NEGATE:
    case OP_COMPLEMENT:
    case OP_SUM:
    case OP_HELD:
    case OP_YEARS:
    case OP_PICK: return true;
    default: return false;
    }
}

/* Is it a product of several means that were sampled, and so not independent of each other? */
static bool is_of_samples(const struct adjustments *x, node_id n)
{
    const struct graph *g = x->own.g;
    size_t sampled = 0;
    if (means_method(x->means, n) != MEAN_SAMPLE || is_sum(graph_at(g, n)->op))
        return false;
    for (uint32_t i = 0; i < graph_at(g, n)->n; i++)
        sampled += means_method(x->means, graph_args(g, n)[i]) == MEAN_SAMPLE;
    return sampled > 1;
}

static bool is_certain(const struct adjustments *x, uint32_t input)
{
    for (size_t i = 0; i < x->certain.n; i++)
        if (x->certain.at[i] == input)
            return true;
    return false;
}

static bool are_certain(const struct adjustments *x, size_t n, const uint32_t *inputs)
{
    for (size_t i = 0; i < n; i++)
        if (!is_certain(x, inputs[i]))
            return false;
    return true;
}

/* Has a list of inputs one that is not moved and is marked? Those that are not moved are marked. */
static bool meets_marked(struct adjustments *x, size_t n, const uint32_t *inputs)
{
    bool meets = false;
    for (size_t i = 0; i < n; i++) {
        if (is_certain(x, inputs[i]))
            continue;
        for (size_t k = 0; k < x->marked.n && !meets; k++)
            meets = x->marked.at[k] == inputs[i];
        *array_push(x->arena, &x->marked) = inputs[i];
    }
    return meets;
}

/* Have two arguments something unknown in common that is not moved? Is a COURSE among them curved
 * in such? */
static bool shares_still(struct adjustments *x, node_id n)
{
    const struct graph *g = x->own.g;
    x->marked.n = 0;
    for (uint32_t i = 0; i < graph_at(g, n)->n; i++) {
        size_t count;
        node_id arg = graph_args(g, n)[i];
        const uint32_t *inputs = graph_uncertain(g, arg, &count);
        if (meets_marked(x, count, inputs))
            return true;
        inputs = graph_curved(g, arg, &count);
        if (graph_at(g, arg)->op == OP_COURSE && !are_certain(x, count, inputs))
            return true;
    }
    return false;
}

static bool has_certain(const struct adjustments *x, node_id n)
{
    size_t count;
    const uint32_t *inputs = graph_uncertain(x->own.g, n, &count);
    return are_certain(x, count, inputs);
}

/* Does the node bend, with what is moved certain? For other operations than those here: perhaps. */
static bool bends_still(struct adjustments *x, node_id n)
{
    const node_id *args = graph_args(x->own.g, n);
    if (!graph_bends(x->own.g, n) || has_certain(x, n))
        return false;
    switch (graph_at(x->own.g, n)->op) {
    case OP_MULTIPLY:
    case OP_EITHER:
    case OP_DIAGRAM: return shares_still(x, n);
    case OP_DIVIDE:
    case OP_RATIO: return !has_certain(x, args[1]);
    case OP_YEARS: return !has_certain(x, args[0]);
    default: return true;
    }
}

/* Is what is moved a part of what it bends in? Then the quotient of its mean to its rule is not
 * what the rest alone adds. */
static bool bends_in_moved(const struct adjustments *x, node_id n)
{
    size_t count;
    const uint32_t *curved = graph_curved(x->own.g, n, &count);
    for (size_t i = 0; i < count; i++)
        if (is_certain(x, curved[i]))
            return true;
    return false;
}

/* ---- what is separable ---- */

static bool has_only_separable(const struct adjustments *x, node_id n)
{
    for (uint32_t i = 0; i < graph_at(x->own.g, n)->n; i++)
        if (x->state[graph_args(x->own.g, n)[i]] == MOVED)
            return false;
    return true;
}

static bool is_separable(const struct adjustments *x, node_id n)
{
    switch (graph_at(x->own.g, n)->op) {
    case OP_MULTIPLY:
    case OP_DIVIDE:
    case OP_RATIO:
    case OP_NEGATE:
    case OP_POWER:
    case OP_SQRT:
    case OP_HELD: return has_only_separable(x, n);
    case OP_DIAGRAM: return false;
    default: return has_certain(x, n);
    }
}

static void touch(struct adjustments *x, node_id n, unsigned char state)
{
    x->state[n] = state;
    *array_push(x->arena, &x->touched) = n;
}

/* ---- working out ---- */

static void add_factor(struct adjustments *x, double mean, double rule)
{
    double factor = mean / rule;
    bool fits = rule != 0 && isfinite(factor);
    *array_push(x->arena, &x->factor) = fits ? factor : 1;
    *array_push(x->arena, &x->added) = fits ? 0 : mean - rule;
}

static void add_difference(struct adjustments *x, double mean, double rule)
{
    *array_push(x->arena, &x->factor) = 1;
    *array_push(x->arena, &x->added) = mean - rule;
}

static void work_out_diagram(struct adjustments *x, node_id n)
{
    struct eval *v = &x->own;
    const double *mean = x->at->results.at + (size_t)x->at->value.at[n];
    size_t count = eval_results(v, n);
    v->results.n = 0;
    array_reserve(x->arena, &v->results, count);
    eval_node(v, n, 0);
    for (size_t k = 0; k < count; k++)
        add_difference(x, mean[k], v->results.at[k]);
}

static void work_out(struct adjustments *x, node_id n)
{
    struct eval *v = &x->own;
    enum graph_op op = graph_at(v->g, n)->op;
    size_t count = op == OP_DIAGRAM ? eval_results(v, n) : 1;
    *array_push(x->arena, &x->list) = (struct adjustment){.first = x->factor.n, .n = count};
    x->of_node[n] = (uint32_t)x->list.n;
    if (op == OP_DIAGRAM)
        work_out_diagram(x, n);
    else if (op == OP_EITHER)
        add_difference(x, v->value.at[n], eval_node(v, n, 0));
    else
        add_factor(x, v->value.at[n], eval_node(v, n, 0));
}

/* ---- opening ---- */

static void find_certain(struct adjustments *x, size_t n, const node_id *moved)
{
    x->certain.n = 0;
    for (size_t i = 0; i < n; i++) {
        const struct graph_node *node = graph_at(x->own.g, moved[i]);
        if (node->op == OP_INPUT && !is_certain(x, node->extra))
            *array_push(x->arena, &x->certain) = node->extra;
    }
}

static void close_all(struct adjustments *x)
{
    for (size_t i = 0; i < x->open.n; i++)
        x->list.at[x->open.at[i]].is_open = false;
    for (size_t i = 0; i < x->touched.n; i++)
        x->state[x->touched.at[i]] = UNMOVED;
    x->open.n = x->touched.n = 0;
    x->is_exact = true;
}

static void open_step(struct adjustments *x, node_id n)
{
    touch(x, n, is_separable(x, n) ? SEPARABLE : MOVED);
    if (!bends_still(x, n) && !is_of_samples(x, n))
        return;
    if (bends_in_moved(x, n)) {
        x->is_exact = false;
        return;
    }
    if (!x->of_node[n])
        work_out(x, n);
    uint32_t number = x->of_node[n] - 1;
    x->list.at[number].is_open = true;
    *array_push(x->arena, &x->open) = number;
    x->is_exact = x->is_exact && x->state[n] == SEPARABLE;
}

void adjustments_open(struct adjustments *x, size_t n_moved, const node_id *moved, size_t n_steps,
                      const node_id *steps)
{
    close_all(x);
    find_certain(x, n_moved, moved);
    for (size_t i = 0; i < n_moved; i++)
        touch(x, moved[i], SEPARABLE);
    for (size_t i = 0; i < n_steps; i++)
        open_step(x, steps[i]);
}

/* Results of a DIAGRAM are probabilities and stay so. */
void adjust(const struct adjustments *x, node_id n, double *results)
{
    const struct adjustment *a = x->of_node[n] ? &x->list.at[x->of_node[n] - 1] : NULL;
    if (!a || !a->is_open)
        return;
    bool is_diagram = graph_at(x->own.g, n)->op == OP_DIAGRAM;
    for (size_t k = 0; k < a->n; k++) {
        double y = results[k] * x->factor.at[a->first + k] + x->added.at[a->first + k];
        results[k] = is_diagram ? fmin(fmax(y, 0), 1) : y;
    }
}
