/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The rules of the operations, inside src/graph: one row an operation.
 *
 * Adding an operation is one row in GRAPH_OPS (graph.h: name, arguments, symbol)
 * and one row in the table of ops.c: how it is computed, differentiated, checked
 * and expanded, and how it changes the degree. The tests loop over both.
 *
 * Exceptions, and the only ones: CONST and INPUT are leaves, whose value and
 * dimension the caller gives; DIAGRAM and PICK have no point and backward rule on
 * plain numbers, since a DIAGRAM has many results: src/eval calls
 * diagram_evaluate and diagram_backward, or average_values and average_slopes, for
 * them; YEARS, COURSE and CHAIN need their tables: graph_node_point and
 * graph_node_backward know their rules. */
#ifndef GRAPH_OPS_H
#define GRAPH_OPS_H

#include "graph/graph.h"

#include <stdbool.h>

/* What an operation does to the degree (see graph_degree). */
enum degree_rule {
    DEGREE_MISSING,  /* a row without a rule */
    DEGREE_LEAF,     /* 0, or 1 for an input */
    DEGREE_UNION,    /* linear: the inputs of all arguments together */
    DEGREE_PRODUCT,  /* multilinear: 2 when arguments share an input */
    DEGREE_QUOTIENT, /* linear in the first, curved in the second */
    DEGREE_POWER,    /* exponent 1 keeps, another is curved */
    DEGREE_CHOICE,   /* curved in the first, linear in the others */
    DEGREE_COURSE,   /* linear in the first and the fourth, curved in the others */
    DEGREE_HELD,     /* 0, whatever is uncertain below */
    DEGREE_CURVED    /* 2 when anything is uncertain */
};

struct lowering;

struct op_rule {
    double (*point)(size_t n, const double *x);
    /* y is the result; adds w * dy/dx[i] to back[i]. */
    void (*backward)(size_t n, const double *x, double y, double w, double *back);
    /* False on a mismatch. */
    bool (*unit)(const struct graph *g, size_t n, const node_id *args, struct dim *out);
    /* Copies node n of l->from into l->to, expanded; l->map has its arguments. */
    node_id (*lower)(struct lowering *l, node_id n);
    enum degree_rule degree;
};

const struct op_rule *op_rule(enum graph_op op);

/* One graph_lower: what node of `to` stands for each node of `from`. */
struct lowering {
    const struct graph *from;
    struct graph *to;
    struct arena *scratch;
    node_id *map; /* of a DIAGRAM: where its roots begin in picks */
    ARRAY(node_id) picks;
};

node_id lower_const(struct lowering *l, node_id n);
node_id lower_input(struct lowering *l, node_id n);
node_id lower_keep(struct lowering *l, node_id n);  /* is scalar already */
node_id lower_chain(struct lowering *l, node_id n); /* many arguments: two at a time */
node_id lower_sum(struct lowering *l, node_id n);
node_id lower_complement(struct lowering *l, node_id n);
node_id lower_lookup(struct lowering *l, node_id n);
node_id lower_annuity(struct lowering *l, node_id n);
node_id lower_years(struct lowering *l, node_id n);
node_id lower_either(struct lowering *l, node_id n);
node_id lower_course(struct lowering *l, node_id n);
node_id lower_transitions(struct lowering *l, node_id n); /* CHAIN */
node_id lower_diagram(struct lowering *l, node_id n);
node_id lower_pick(struct lowering *l, node_id n);

/* What the expansions share: the arguments of node n in `to`; a pure number; 1 - x; x + y for what
 * excludes one another and for independent events (x first, or not x and then y). */
node_id *lowered_args(struct lowering *l, node_id n);
node_id lowered_number(struct lowering *l, double x);
node_id lowered_complement(struct lowering *l, node_id x);
node_id lowered_either(struct lowering *l, node_id x, node_id y);

/* The roots of a diagram, as nodes of `to`, where variable i has probabilities p[i] of true and
 * q[i] of false. */
void lowered_roots(struct lowering *l, const struct diagram *d, const node_id *p, const node_id *q,
                   node_id *roots);
/* A DIAGRAM over windows (lower_average.c); q[i] counts for what does not change. */
node_id lowered_average(struct lowering *l, node_id n, const node_id *p, const node_id *q);

/* A sum that keeps what rounding takes (Neumaier, ZAMM 54 (1974) 39): sum + lost. */
struct compensated {
    double sum, lost;
};
void compensated_add(struct compensated *c, double x);

/* 1 for d years around `middle`, at math_log1p(rate); 0 for d = 0. */
double annuity_worth(double d, double middle, double log_rate);

/* YEARS' rules (years.c), and the length and middle of part i. */
double years_point(const struct years *y, const double *x);
void years_backward(const struct years *y, const double *x, double w, double *back);
double years_length(const struct years *y, size_t i, double *middle);

/* CHAIN's rules (chain.c). */
double chain_point(const struct chain *c, const double *x);
void chain_backward(const struct chain *c, const double *x, double w, double *back);

/* ANNUITY's rules (annuity.c); arguments: rate, from, to. */
double annuity_point(size_t n, const double *x);
void annuity_backward(size_t n, const double *x, double y, double w, double *back);

/* The graph's arena, and the place where degree.c keeps what it has found out. */
struct degrees;
struct arena *graph_arena(const struct graph *g);
struct degrees **graph_degrees(const struct graph *g);

#endif
