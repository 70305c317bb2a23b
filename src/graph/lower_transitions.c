/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Lowering a CHAIN: the exponential of its matrix, by Taylor's series over eight equal steps. What
 * would be negative in the matrix is made up for by adding the sum of all rates, and taking it off
 * again as a factor: exp(Q h) = exp(-c h) exp(Q h + c h I), where c less the rates out of a state
 * is the sum of the other rates. The mean share of time is one more state, into which `end` flows
 * at the rate 1 / years without getting less. Owns nothing. */
#include "graph/ops.h"

enum { STEPS = 8, TERMS = 28, MOST_STATES = 8, MOST_FLOWS = 16 };

static const struct dim number = {{0}};

/* A chain with each state, and the one that gathers. NODE_NONE stands for 0. */
struct matrix {
    struct lowering *l;
    const struct chain *c;
    size_t n;
    node_id stay[MOST_STATES + 1], go[MOST_FLOWS], gather, all;
};

static node_id plus(struct lowering *l, node_id x, node_id y)
{
    if (x == NODE_NONE || y == NODE_NONE)
        return x == NODE_NONE ? y : x;
    return graph_op2(l->to, OP_ADD, x, y);
}

static node_id times(struct lowering *l, node_id x, node_id y)
{
    if (x == NODE_NONE || y == NODE_NONE)
        return NODE_NONE;
    return graph_op2(l->to, OP_MULTIPLY, x, y);
}

/* The matrix times one step of time. */
static void make(struct matrix *m, const node_id *rates)
{
    struct lowering *l = m->l;
    const struct chain *c = m->c;
    struct dim time = dim_divide(number, graph_dim(l->to, rates[0]));
    node_id step = graph_const(l->to, c->years / STEPS, time);
    m->n = c->n_states + c->mean;
    m->gather = m->all = c->mean ? lowered_number(l, 1.0 / STEPS) : NODE_NONE;
    for (size_t i = 0; i < m->n; i++)
        m->stay[i] = m->all;
    for (uint32_t f = 0; f < c->n_flows; f++) {
        m->go[f] = times(l, rates[f], step);
        m->all = plus(l, m->all, m->go[f]);
        for (size_t i = 0; i < m->n; i++)
            if (i != c->from[f])
                m->stay[i] = plus(l, m->stay[i], m->go[f]);
    }
}

static void multiply(const struct matrix *m, const node_id *v, double by, node_id *out)
{
    const struct chain *c = m->c;
    node_id factor = lowered_number(m->l, by);
    for (size_t i = 0; i < m->n; i++)
        out[i] = times(m->l, v[i], m->stay[i]);
    for (uint32_t f = 0; f < c->n_flows; f++)
        out[c->to[f]] = plus(m->l, out[c->to[f]], times(m->l, v[c->from[f]], m->go[f]));
    if (c->mean)
        out[m->n - 1] = plus(m->l, out[m->n - 1], times(m->l, v[c->end], m->gather));
    for (size_t i = 0; i < m->n; i++)
        out[i] = times(m->l, factor, out[i]);
}

static void take_step(const struct matrix *m, node_id decay, node_id *v)
{
    node_id terms[2][MOST_STATES + 1];
    for (size_t i = 0; i < m->n; i++)
        terms[0][i] = v[i];
    for (unsigned k = 1; k <= TERMS; k++) {
        node_id *next = terms[k % 2];
        multiply(m, terms[(k - 1) % 2], 1.0 / k, next);
        for (size_t i = 0; i < m->n; i++)
            v[i] = plus(m->l, v[i], next[i]);
    }
    for (size_t i = 0; i < m->n; i++)
        v[i] = times(m->l, v[i], decay);
}

node_id lower_transitions(struct lowering *l, node_id n)
{
    struct matrix m = {.l = l, .c = graph_chain_of(l->from, n)};
    const node_id *rates = lowered_args(l, n);
    node_id v[MOST_STATES + 1];
    if (m.c->n_states > MOST_STATES || m.c->n_flows > MOST_FLOWS)
        return graph_chain(l->to, m.c, rates);
    make(&m, rates);
    node_id decay = graph_op1(l->to, OP_EXP, graph_op1(l->to, OP_NEGATE, m.all));
    for (size_t i = 0; i < m.n; i++)
        v[i] = i == m.c->start ? lowered_number(l, 1) : NODE_NONE;
    for (int k = 0; k < STEPS; k++)
        take_step(&m, decay, v);
    node_id result = v[m.c->mean ? m.n - 1 : m.c->end];
    return result == NODE_NONE ? lowered_number(l, 0) : result;
}
