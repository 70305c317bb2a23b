/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The calculation graph: nodes of operations, in sections.
 *
 * A node is an operation on earlier nodes, with a dimension. Nodes are appended
 * and never changed; their arguments always have smaller numbers, so the order of
 * numbers is an order of evaluation. A section is a contiguous range of nodes that
 * was built together; it may read exports of earlier sections only (any node of
 * theirs). Inside a section equal operations on equal arguments are one node.
 * Nothing is computed while building, so that what was written can be explained.
 * Constants and inputs are nodes of each section that uses them.
 *
 * There is no domain word here: what a node stands for is the caller's business.
 * Names and formulas are made on demand by src/figure. */
#ifndef GRAPH_GRAPH_H
#define GRAPH_GRAPH_H

#include "base/error.h"
#include "base/text.h"
#include "math/dim.h"

#include <stdbool.h>

typedef uint32_t node_id;
#define NODE_NONE UINT32_MAX

/* The op table: one row an operation. Columns: name, least and greatest number of
 * arguments (255 = any), symbol in formulas, binding strength of the symbol (0: a
 * call such as `min(a; b)`). Point rules, backward rules, unit rules and `lower`
 * are in ops.c beside one another; a loop over the table fails in tests for a row
 * without one of them.
 *
 * SUM of nothing is the number 0. MIN and MAX of a NaN are NaN, and -0 is below +0.
 * LOOKUP is v of the last b that x reaches (x >= b), and v1 below b1; the b rise.
 * HELD is x, and certain: what reads it meets the mean of x, however x varies. */
#define GRAPH_OPS(X)                                                                   \
    X(CONST, "const", 0, 0, "", 9)      /* a number                                */  \
    X(INPUT, "input", 0, 0, "", 9)      /* an uncertain input, by its mean         */  \
    X(ADD, "add", 2, 2, "+", 1)                                                        \
    X(SUBTRACT, "subtract", 2, 2, "-", 1)                                              \
    X(MULTIPLY, "multiply", 2, 2, "*", 2)                                              \
    X(DIVIDE, "divide", 2, 2, "/", 2)                                                  \
    X(NEGATE, "negate", 1, 1, "-", 3)                                                  \
    X(POWER, "power", 2, 2, "^", 4)     /* exponent: a CONST                        */ \
    X(COMPLEMENT, "complement", 1, 1, "1 - ", 1) /* 1 - x                           */ \
    X(RATIO, "ratio", 2, 2, "ratio", 0) /* x / y; 0 where x is 0: a mean over nothing */    \
    X(SUM, "sum", 0, 255, "+", 1)       /* in the order of arguments, compensated   */ \
    X(MIN, "min", 1, 255, "min", 0)                                                    \
    X(MAX, "max", 1, 255, "max", 0)                                                    \
    X(EXP, "exp", 1, 1, "exp", 0)                                                      \
    X(LOG, "log", 1, 1, "log", 0)                                                      \
    X(SQRT, "sqrt", 1, 1, "sqrt", 0)                                                   \
    X(LOOKUP, "lookup", 3, 255, "lookup", 0) /* x, b1, v1, b2, v2, ...; b CONST     */ \
    X(ANNUITY, "annuity", 3, 3, "annuity", 0) /* rate, from, to: see graph_annuity  */ \
    X(EITHER, "either", 1, 255, "either", 0) /* 1 - (1 - x)(1 - y)...: independent events */ \
    X(HELD, "held", 1, 1, "at-mean", 0) /* x, but its mean where means are taken     */ \
    X(YEARS, "years", 2, 255, "years", 0) /* rate, values: see graph_years           */ \
    X(COURSE, "course", 5, 5, "course", 0) /* a probability over time: graph_course   */ \
    X(CHAIN, "chain", 1, 255, "chain", 0) /* a Markov chain in time: graph_chain      */ \
    X(DIAGRAM, "diagram", 0, 255, "diagram", 0) /* a decision diagram: many results  */\
    X(PICK, "pick", 1, 1, "pick", 0)    /* one result of a DIAGRAM                  */

enum graph_op {
#define X(op, name, least, most, symbol, strength) OP_##op,
    GRAPH_OPS(X)
#undef X
    OP_COUNT
};

struct graph_node {
    uint16_t op;
    uint16_t dim;     /* index: graph_dim */
    uint32_t n;       /* arguments */
    uint32_t first;   /* index of the first argument: graph_args */
    uint32_t extra;   /* INPUT: caller's number of the input; PICK: graph_pick_of;
                         DIAGRAM: index of the diagram: graph_diagram_of; others:
                         the number of graph_apart, or 0 */
    union {
        double constant; /* CONST: the value; INPUT: the mean */
        uint64_t table;  /* YEARS, COURSE, CHAIN, DIAGRAM over windows: which table;
                            others: 0 */
    };
};

struct graph;

/* Lives in `a`. Single-threaded while it is built; afterwards readers may share it
 * (graph_degree excepted). */
struct graph *graph_new(struct arena *a);

/* Sections. `tag` is the caller's number for it. Sections do not nest. */
typedef uint32_t section_id;
section_id graph_section_begin(struct graph *g, uint32_t tag);
void graph_section_end(struct graph *g);
size_t graph_sections(const struct graph *g);
/* The nodes of a section: first .. first + count - 1. */
void graph_section(const struct graph *g, section_id s, node_id *first, size_t *count,
                   uint32_t *tag);
section_id graph_section_of(const struct graph *g, node_id n);

/* Building, inside a section. Dimensions are checked by each op's unit rule; a
 * mismatch is a programming error of the caller (documents were checked before)
 * and asserts. All return an existing node where one is equal. */
node_id graph_const(struct graph *g, double value, struct dim dim);
node_id graph_input(struct graph *g, uint32_t input, double mean, struct dim dim);
node_id graph_op(struct graph *g, enum graph_op op, size_t n, const node_id *args);
/* The constant or the operation n once more, equal only to what has the same number (> 0):
 * for what is the same by chance. n itself where it is an input, a diagram, a result of one,
 * or not of the open section. */
node_id graph_apart(struct graph *g, node_id n, uint32_t number);
node_id graph_op1(struct graph *g, enum graph_op op, node_id x);
node_id graph_op2(struct graph *g, enum graph_op op, node_id x, node_id y);

/* Present value of 1 per year paid in the middle of each year from `from` to `to`
 * (years from now, whole or not, from <= to) at interest `rate` per year:
 * sum over the years of length d starting at t of d (1 + rate)^-(t + d/2);
 * broken years at the ends count with their length at their own middle.
 * Years begin at whole numbers; a stretch inside one year is one broken year.
 * Not a number where from > to, rate <= -1 or a year is beyond 2^53.
 * For whole years n from 0: (1 - (1+r)^-n)/r * (1+r)^0.5, the uniform series
 * present worth factor times half a year's interest (any engineering economy
 * text, e.g. the (P/A, i, n) tables). rate 0 gives to - from. All pure numbers. */
node_id graph_annuity(struct graph *g, node_id rate, node_id from, node_id to);

/* Present value of something that differs from year to year: the sum over the years that
 * `from` .. `to` touches of d (1 + rate)^-m v, where d and m are the length and the middle of
 * that part of the year which lies inside (as graph_annuity), and v is the value that holds in
 * the year: values[of_year[i]] in year floor(from) + i. With rate 0 it is the plain sum of v
 * times length. Values have one dimension, which is the result's; rate is a number. Linear in
 * the values. The table is copied. from <= to, both finite and within 2^53; n_years is the
 * number of years that are touched (0 where from = to). */
struct years {
    double from, to;
    size_t n_years;
    const uint32_t *of_year;
};
node_id graph_years(struct graph *g, node_id rate, size_t n, const node_id *values,
                    const struct years *y);
const struct years *graph_years_of(const struct graph *g, node_id n);

/* A probability over time t, by which variables of a diagram may change (graph_diagram_over).
 * Three independent parts, of which any one makes it true:
 *     standing                                     the same at all times
 *     h  that starts at `left` after each reset (at 0 in the first stretch where it is fresh),
 *        and follows dh/dt = rate (1 - h) - ending h:
 *            h = start exp(-s x) + rate (1 - exp(-s x)) / s,  s = rate + ending, x = time since
 *     m  that is never reset: dm/dt = unreset (1 - m) - ending m, m = 0 at `born`
 * p(t) = 1 - (1 - standing)(1 - h)(1 - m). Resets: at `first`, `first` + `every`, ...; before
 * `first` time counts from `from`. At the instant of a reset p is what it is right after it.
 * s = 0 gives h = start. Rausand, Reliability of Safety-Critical Systems (2014), ch. 8: the
 * undetected failures of an item that is tested at intervals and also found by demands.
 *
 * args: standing, rate, ending, left, unreset; standing and left are numbers, the three rates
 * have one dimension, whose inverse is that of the times in `struct course`.
 * The value of the node itself is p(0); what begins later is as it is at its beginning.
 * from <= first; every > 0 where first is finite. */
struct course {
    double from, first, every; /* first: INFINITY for none */
    double born;
    bool fresh;
};
node_id graph_course(struct graph *g, const struct course *c, const node_id args[5]);
const struct course *graph_course_of(const struct graph *g, node_id n);
/* p(t); before `from` and `born` as at these. x: values of the args. */
double course_at(const struct course *c, const double x[5], double t);

/* A Markov chain in continuous time: states 0 .. n_states - 1, and n_flows flows between two
 * different ones, arg f being the rate of going from[f] to to[f]; several flows between the same
 * two add. All args have one dimension, whose inverse is that of `years`. The value, a number, is
 * the probability of being in `end` `years` after being in `start`; with `mean` the mean share of
 * that time which is spent in `end`.
 *
 * A sum of terms none of which is negative (uniformization: Jensen, Skandinavisk Aktuarietidskrift
 * 36 (1953) 87; Grassmann, Computers & Operations Research 4 (1977) 47; both from memory): however
 * small it is, it is within 1e-12 of itself, so long as it is above 1e-250. Not a number where a
 * rate is negative, or where years times the greatest sum of rates out of one state is above 1e5.
 * years >= 0 and finite; > 0 with `mean`. The table is copied. 1 <= n_states <= CHAIN_MOST_STATES,
 * 1 <= n_flows <= CHAIN_MOST_FLOWS. */
enum { CHAIN_MOST_STATES = 64, CHAIN_MOST_FLOWS = 256 };
struct chain {
    uint32_t n_states, n_flows;
    const uint32_t *from, *to;
    double years;
    uint32_t start, end;
    bool mean;
};
node_id graph_chain(struct graph *g, const struct chain *c, const node_id *args);
const struct chain *graph_chain_of(const struct graph *g, node_id n);

/* A decision diagram over Boolean variables with independent probabilities (see
 * diagram.h) as an operation: args[i] is the probability that variable i is true,
 * n is at least the diagram's n_variables. Where args[i] is a COMPLEMENT node, the
 * probability of false is its argument, however small, and not 1 - (1 - x).
 * The diagram is borrowed for the life of the graph; equal ones are kept once.
 * Returns the DIAGRAM node; graph_pick takes the probability of root k. */
struct diagram;
node_id graph_diagram(struct graph *g, const struct diagram *d, size_t n, const node_id *args);
node_id graph_pick(struct graph *g, node_id diagram, uint32_t root);

/* The same with probabilities that change with time: args may also be COURSE nodes (not
 * complements of them). Results are averages over each window (from < to) of the probability of
 * each root. The integrals are exact to 1e-11 relative (Gauss-Legendre between the resets of all
 * variables, of an order that the exponents and the least number of variables that make a root
 * true ask for). Windows lie behind `from` and `born` of every course. Windows are copied;
 * without them (NULL or n = 0) it is graph_diagram. graph_pick is of window 0. A window with
 * more than a million resets of one course has no finite value. */
struct window {
    double from, to;
};
struct windows {
    size_t n;
    const struct window *at;
};
node_id graph_diagram_over(struct graph *g, const struct diagram *d, size_t n, const node_id *args,
                           const struct windows *w);
node_id graph_pick_in(struct graph *g, node_id diagram, uint32_t window, uint32_t root);
/* n = 0: none. */
struct windows graph_windows_of(const struct graph *g, node_id diagram);
/* Which window and root a PICK takes. */
void graph_pick_of(const struct graph *g, node_id pick, uint32_t *window, uint32_t *root);

/* Reading. The pointers stay readable while the graph grows, since nodes never
 * change and an arena keeps what it gave. */
size_t graph_size(const struct graph *g);
const struct graph_node *graph_at(const struct graph *g, node_id n);
const node_id *graph_args(const struct graph *g, node_id n);
struct dim graph_dim(const struct graph *g, node_id n);
const struct diagram *graph_diagram_of(const struct graph *g, node_id n);

/* One row of the op table as data. */
struct graph_op_info {
    const char *name, *symbol;
    unsigned least, most, strength;
};
const struct graph_op_info *graph_op_info(enum graph_op op);

/* The point rule of an operation (not for CONST, INPUT, DIAGRAM, PICK, nor for YEARS, COURSE
 * and CHAIN, which need their tables); and its backward rule: adds
 * weight * d result / d args[i] to back[i]. At a tie of min or max the first arm
 * takes it all. */
double graph_point(enum graph_op op, size_t n, const double *args);
void graph_backward(enum graph_op op, size_t n, const double *args, double result, double weight,
                    double *back);
/* The same for the operation of a node, with YEARS, COURSE and CHAIN: what src/eval asks for. */
double graph_node_point(const struct graph *g, node_id n, const double *args);
void graph_node_backward(const struct graph *g, node_id n, const double *args, double result,
                         double weight, double *back);

/* Copies `root` and what it needs into the open section of `to`, every macro
 * operation (ANNUITY, DIAGRAM, SUM, LOOKUP, COMPLEMENT ...) replaced by its
 * expansion into scalar operations: the oracle of the tests. Inputs keep their
 * numbers. An ANNUITY whose `from` or `to` is not constant, or which is longer than
 * 4096 years, has no such expansion and stays, as does a CHAIN of more than 8 states or 16 flows;
 * that of a CHAIN is exact while the sum of its rates times years is at most 15. Not for a DIAGRAM;
 * `from` may be `to`. */
node_id graph_lower(struct graph *to, const struct graph *from, node_id root);

/* The degree of `root` in its uncertain inputs: 0 none, 1 at most once each (then
 * the value at the means is the mean, exactly, for independent inputs), 2 more
 * (an input that enters twice, or a curved operation). A DIAGRAM counts each
 * argument once per path, so shared independent arguments keep degree 1; two
 * variables whose probabilities share an input make 2, whether or not a path meets
 * both. Nodes are worked through once for all questions, and what was found is kept
 * in the graph's arena: not to be asked from several threads at once. */
int graph_degree(const struct graph *g, node_id root);

/* The inputs over which the mean of `root` must be integrated, in rising order: those that enter
 * it more than once or in a curve. All others may be held at their means, whatever these are, as
 * the root is linear in each of them for all values of the rest. n = 0 exactly where the degree
 * is below 2. The list lives with the graph. A COURSE is curved in its rates and linear in
 * `standing` and `left`; a DIAGRAM is linear in each variable. */
const uint32_t *graph_curved(const struct graph *g, node_id root, size_t *n);
/* All uncertain inputs of `root`, in rising order: linear ones and curved ones. */
const uint32_t *graph_uncertain(const struct graph *g, node_id root, size_t *n);
/* Whether the mean of `root` may differ from what its rule makes of the means of its arguments:
 * it is curved in an uncertain argument, or a product of arguments that have an uncertain input
 * in common (of a DIAGRAM: it has an argument that is a COURSE with uncertain rates, too). False
 * where the rule is linear, however curved the arguments are. */
bool graph_bends(const struct graph *g, node_id root);

/* One line a node, for people and tests: number, op, arguments, constant, dim (see
 * dump.c for examples). */
void graph_dump(struct text *out, const struct graph *g);

#endif
