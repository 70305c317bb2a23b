/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Lowering: a macro operation as the scalar operations that it stands for. Each
 * expansion follows the definition of the operation and not the rule that computes
 * it, which makes it an oracle: an annuity is a sum over years, a diagram is p times
 * one arm plus q times the other, node by node.
 *
 * Owns a child arena for the time of one graph_lower. */
#include "graph/diagram.h"
#include "graph/ops.h"

#include <assert.h>
#include <float.h>
#include <math.h>

/* An annuity over more years than this stays one. */
enum { MOST_YEARS = 4096 };

static const struct dim number = {{0}};

static node_id const_like(struct lowering *l, double value, node_id like)
{
    return graph_const(l->to, value, graph_dim(l->from, like));
}

/* The arguments of node n in `to`. */
node_id *lowered_args(struct lowering *l, node_id n)
{
    uint32_t count = graph_at(l->from, n)->n;
    const node_id *args = graph_args(l->from, n);
    node_id *out = NEW_ARRAY(l->scratch, count, node_id);
    for (uint32_t i = 0; i < count; i++)
        out[i] = l->map[args[i]];
    return out;
}

node_id lower_const(struct lowering *l, node_id n)
{
    return const_like(l, graph_at(l->from, n)->constant, n);
}

node_id lower_input(struct lowering *l, node_id n)
{
    const struct graph_node *input = graph_at(l->from, n);
    return graph_input(l->to, input->extra, input->constant, graph_dim(l->from, n));
}

node_id lower_keep(struct lowering *l, node_id n)
{
    const struct graph_node *node = graph_at(l->from, n);
    return graph_op(l->to, node->op, node->n, lowered_args(l, n));
}

static node_id chain(struct lowering *l, enum graph_op op, size_t n, const node_id *args)
{
    node_id so_far = args[0];
    for (size_t i = 1; i < n; i++)
        so_far = graph_op2(l->to, op, so_far, args[i]);
    return so_far;
}

node_id lower_chain(struct lowering *l, node_id n)
{
    const struct graph_node *node = graph_at(l->from, n);
    return chain(l, node->op, node->n, lowered_args(l, n));
}

node_id lower_sum(struct lowering *l, node_id n)
{
    const struct graph_node *node = graph_at(l->from, n);
    return node->n ? chain(l, OP_ADD, node->n, lowered_args(l, n)) : const_like(l, 0, n);
}

node_id lowered_complement(struct lowering *l, node_id x)
{
    return graph_op2(l->to, OP_SUBTRACT, graph_const(l->to, 1, number), x);
}

node_id lowered_number(struct lowering *l, double x)
{
    return graph_const(l->to, x, number);
}

node_id lowered_either(struct lowering *l, node_id x, node_id y)
{
    return graph_op2(l->to, OP_ADD, x,
                     graph_op2(l->to, OP_MULTIPLY, lowered_complement(l, x), y));
}

/* The first that happens: x1, or x2 and not x1, or x3 and neither ... */
node_id lower_either(struct lowering *l, node_id n)
{
    const node_id *args = lowered_args(l, n);
    node_id total = args[0], none = lowered_complement(l, args[0]);
    for (uint32_t i = 1; i < graph_at(l->from, n)->n; i++) {
        total = graph_op2(l->to, OP_ADD, total, graph_op2(l->to, OP_MULTIPLY, none, args[i]));
        none = graph_op2(l->to, OP_MULTIPLY, none, lowered_complement(l, args[i]));
    }
    return total;
}

node_id lower_complement(struct lowering *l, node_id n)
{
    return lowered_complement(l, *lowered_args(l, n));
}

/* 1 where x >= b, else 0, exactly: 1 + max(-s; min(0; x - b)) / s, where s is
 * positive and not greater than the distance from b to the next number below. */
static node_id reaches(struct lowering *l, node_id x, node_id b)
{
    double s = fmax(fabs(graph_at(l->to, b)->constant) * 0x1p-54, DBL_TRUE_MIN);
    struct dim dim = graph_dim(l->to, x);
    node_id gap = graph_op2(l->to, OP_MIN, graph_const(l->to, 0, dim),
                            graph_op2(l->to, OP_SUBTRACT, x, b));
    node_id held = graph_op2(l->to, OP_MAX, graph_const(l->to, -s, dim), gap);
    return graph_op2(l->to, OP_ADD, graph_const(l->to, 1, number),
                     graph_op2(l->to, OP_DIVIDE, held, graph_const(l->to, s, dim)));
}

/* Sum of the values, each times 1 where it is in force and 0 elsewhere. */
node_id lower_lookup(struct lowering *l, node_id n)
{
    size_t count = graph_at(l->from, n)->n;
    const node_id *args = lowered_args(l, n);
    node_id here = graph_const(l->to, 1, number), total = NODE_NONE;
    for (size_t i = 1; i + 1 < count; i += 2) {
        node_id next = i + 3 < count ? reaches(l, args[0], args[i + 2])
                                     : graph_const(l->to, 0, number);
        node_id part = graph_op2(l->to, OP_MULTIPLY, graph_op2(l->to, OP_SUBTRACT, here, next),
                                 args[i + 1]);
        total = total == NODE_NONE ? part : graph_op2(l->to, OP_ADD, total, part);
        here = next;
    }
    return total;
}

/* One year, or a broken one: length times (1 + rate) to the minus its middle. */
static node_id one_year(struct lowering *l, node_id growth, double begin, double end)
{
    double middle = begin + (end - begin) / 2;
    node_id factor = graph_op2(l->to, OP_POWER, growth, graph_const(l->to, -middle, number));
    return graph_op2(l->to, OP_MULTIPLY, graph_const(l->to, end - begin, number), factor);
}

node_id lower_annuity(struct lowering *l, node_id n)
{
    const node_id *args = lowered_args(l, n);
    const struct graph_node *from = graph_at(l->to, args[1]), *to = graph_at(l->to, args[2]);
    if (from->op != OP_CONST || to->op != OP_CONST ||
        !(from->constant <= to->constant && to->constant - from->constant <= MOST_YEARS))
        return lower_keep(l, n);
    double begin = from->constant, last = to->constant;
    node_id growth = graph_op2(l->to, OP_ADD, graph_const(l->to, 1, number), args[0]);
    node_id total = graph_const(l->to, 0, number);
    while (begin < last) {
        double end = fmin(floor(begin) + 1, last);
        total = graph_op2(l->to, OP_ADD, total, one_year(l, growth, begin, end));
        begin = end;
    }
    return total;
}

node_id lower_years(struct lowering *l, node_id n)
{
    const node_id *args = lowered_args(l, n);
    const struct years *y = graph_years_of(l->from, n);
    node_id growth = graph_op2(l->to, OP_ADD, graph_const(l->to, 1, number), args[0]);
    node_id total = const_like(l, 0, n);
    for (size_t i = 0; i < y->n_years; i++) {
        double middle, length = years_length(y, i, &middle);
        node_id one = one_year(l, growth, middle - length / 2, middle + length / 2);
        node_id part = graph_op2(l->to, OP_MULTIPLY, one, args[1 + y->of_year[i]]);
        total = graph_op2(l->to, OP_ADD, total, part);
    }
    return total;
}

/* What stands for false, true and each node of a diagram. */
static node_id *lower_diagram_nodes(struct lowering *l, const struct diagram *d,
                                    const node_id *p, const node_id *q)
{
    node_id *values = NEW_ARRAY(l->scratch, d->n_nodes + 2, node_id);
    values[0] = graph_const(l->to, 0, number);
    values[1] = graph_const(l->to, 1, number);
    for (size_t i = 0; i < d->n_nodes; i++) {
        const struct diagram_node *node = &d->nodes[i];
        uint32_t v = node->variable;
        values[i + 2] = graph_op2(
            l->to, OP_ADD, graph_op2(l->to, OP_MULTIPLY, p[v], values[node->high]),
            graph_op2(l->to, OP_MULTIPLY, q[v], values[node->low]));
    }
    return values;
}

void lowered_roots(struct lowering *l, const struct diagram *d, const node_id *p, const node_id *q,
                   node_id *roots)
{
    const node_id *values = lower_diagram_nodes(l, d, p, q);
    for (size_t k = 0; k < d->n_roots; k++)
        roots[k] = values[d->roots[k]];
}

node_id lower_diagram(struct lowering *l, node_id n)
{
    const struct diagram *d = graph_diagram_of(l->from, n);
    const node_id *args = graph_args(l->from, n), *p = lowered_args(l, n);
    node_id *q = NEW_ARRAY(l->scratch, graph_at(l->from, n)->n, node_id);
    for (uint32_t i = 0; i < graph_at(l->from, n)->n; i++)
        q[i] = graph_at(l->from, args[i])->op == OP_COMPLEMENT
                   ? l->map[graph_args(l->from, args[i])[0]]
                   : lowered_complement(l, p[i]);
    if (graph_windows_of(l->from, n).n)
        return lowered_average(l, n, p, q);
    node_id place = (node_id)l->picks.n;
    array_reserve(l->scratch, &l->picks, d->n_roots);
    lowered_roots(l, d, p, q, l->picks.at + place);
    l->picks.n += d->n_roots;
    return place;
}

node_id lower_pick(struct lowering *l, node_id n)
{
    return l->picks.at[*lowered_args(l, n) + graph_at(l->from, n)->extra];
}

/* Marks what root needs, root itself included. */
static bool *needed_by(struct arena *a, const struct graph *g, node_id root)
{
    bool *needed = NEW_ARRAY(a, (size_t)root + 1, bool);
    needed[root] = true;
    for (node_id i = root + 1; i-- > 0;)
        for (uint32_t k = 0; needed[i] && k < graph_at(g, i)->n; k++)
            needed[graph_args(g, i)[k]] = true;
    return needed;
}

node_id graph_lower(struct graph *to, const struct graph *from, node_id root)
{
    assert(graph_at(from, root)->op != OP_DIAGRAM);
    struct arena *scratch = arena_child(graph_arena(to));
    struct lowering l = {.from = from, .to = to, .scratch = scratch};
    const bool *needed = needed_by(scratch, from, root);
    l.map = NEW_ARRAY(scratch, (size_t)root + 1, node_id);
    for (node_id i = 0; i <= root; i++)
        if (needed[i])
            l.map[i] = op_rule(graph_at(from, i)->op)->lower(&l, i);
    node_id lowered = l.map[root];
    arena_free(scratch);
    return lowered;
}
