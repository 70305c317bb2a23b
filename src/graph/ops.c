/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The op table: the rules of every operation, one row each, at the end of the file;
 * above it the point and backward rules, operation by operation, then the unit
 * rules. Owns nothing.
 *
 * Minimum and maximum have rules
 * of their own: a NaN among the arguments is the result, -0 is below +0, and a tie
 * is the first argument's. */
#include "graph/ops.h"

#include "graph/course.h"
#include "math/elementary.h"

#include <assert.h>
#include <math.h>

/* ---- arithmetic ---- */

static double add_point(size_t n, const double *x)
{
    (void)n;
    return x[0] + x[1];
}

static void add_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)x, (void)y;
    back[0] += w;
    back[1] += w;
}

static double subtract_point(size_t n, const double *x)
{
    (void)n;
    return x[0] - x[1];
}

static void subtract_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)x, (void)y;
    back[0] += w;
    back[1] -= w;
}

static double multiply_point(size_t n, const double *x)
{
    (void)n;
    return x[0] * x[1];
}

static void multiply_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)y;
    back[0] += w * x[1];
    back[1] += w * x[0];
}

static double divide_point(size_t n, const double *x)
{
    (void)n;
    return x[0] / x[1];
}

static void divide_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n;
    back[0] += w / x[1];
    back[1] -= w * y / x[1];
}

/* A part of nothing is nothing, so that a mean over cases that cannot occur is 0. */
static double ratio_point(size_t n, const double *x)
{
    (void)n;
    return x[0] == 0 ? 0 : x[0] / x[1];
}

static void ratio_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n;
    if (x[1] == 0)
        return;
    back[0] += w / x[1];
    back[1] -= w * y / x[1];
}

static double negate_point(size_t n, const double *x)
{
    (void)n;
    return -x[0];
}

static double held_point(size_t n, const double *x)
{
    (void)n;
    return x[0];
}

static void held_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)x, (void)y;
    back[0] += w;
}

static double complement_point(size_t n, const double *x)
{
    (void)n;
    return 1 - x[0];
}

static void minus_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)x, (void)y;
    back[0] -= w;
}

static double power_point(size_t n, const double *x)
{
    (void)n;
    return math_pow(x[0], x[1]);
}

/* The exponent's derivative exists for a positive base only. */
static void power_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n;
    if (x[1] != 0)
        back[0] += w * x[1] * math_pow(x[0], x[1] - 1);
    if (x[0] > 0)
        back[1] += w * y * math_log(x[0]);
}

/* ---- sum: compensated, in the order of arguments ---- */

void compensated_add(struct compensated *c, double x)
{
    double t = c->sum + x;
    c->lost += fabs(c->sum) >= fabs(x) ? (c->sum - t) + x : (x - t) + c->sum;
    c->sum = t;
}

static double sum_point(size_t n, const double *x)
{
    struct compensated c = {0};
    for (size_t i = 0; i < n; i++)
        compensated_add(&c, x[i]);
    return c.sum + c.lost;
}

static void sum_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)x, (void)y;
    for (size_t i = 0; i < n; i++)
        back[i] += w;
}

/* ---- minimum and maximum ---- */

static bool below(double a, double b)
{
    return a < b || (a == b && signbit(a) && !signbit(b));
}

static double min_point(size_t n, const double *x)
{
    double y = x[0];
    for (size_t i = 0; i < n; i++) {
        if (isnan(x[i]))
            return x[i];
        if (below(x[i], y))
            y = x[i];
    }
    return y;
}

static double max_point(size_t n, const double *x)
{
    double y = x[0];
    for (size_t i = 0; i < n; i++) {
        if (isnan(x[i]))
            return x[i];
        if (below(y, x[i]))
            y = x[i];
    }
    return y;
}

static void chosen_backward(size_t n, const double *x, double y, double w, double *back)
{
    for (size_t i = 0; i < n; i++)
        if (x[i] == y) {
            back[i] += w;
            return;
        }
}

/* ---- functions ---- */

static double exp_point(size_t n, const double *x)
{
    (void)n;
    return math_exp(x[0]);
}

static void exp_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)x;
    back[0] += w * y;
}

static double log_point(size_t n, const double *x)
{
    (void)n;
    return math_log(x[0]);
}

static void log_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)y;
    back[0] += w / x[0];
}

static double sqrt_point(size_t n, const double *x)
{
    (void)n;
    return sqrt(x[0]);
}

static void sqrt_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n, (void)x;
    back[0] += w / (2 * y);
}

/* ---- lookup: v of the last b that x reaches, v1 below b1 ---- */

/* Where the value in force stands among the arguments. */
static size_t lookup_arm(size_t n, const double *x)
{
    size_t arm = 2;
    for (size_t i = 3; i + 1 < n; i += 2)
        if (x[0] >= x[i])
            arm = i + 1;
    return arm;
}

static double lookup_point(size_t n, const double *x)
{
    return isnan(x[0]) ? x[0] : x[lookup_arm(n, x)];
}

static void lookup_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)y;
    back[lookup_arm(n, x)] += w;
}

/* ---- either ---- */

/* y + x - y x, as a sum of what is not negative. */
static double either_point(size_t n, const double *x)
{
    double y = 0;
    for (size_t i = 0; i < n; i++)
        y += x[i] * (1 - y);
    return y;
}

/* The product of 1 - x over the others; where one x is 1 only that one has a slope. */
static void either_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)y;
    double product = 1;
    size_t sure = 0;
    for (size_t i = 0; i < n; i++) {
        sure += x[i] == 1;
        product *= x[i] == 1 ? 1 : 1 - x[i];
    }
    for (size_t i = 0; i < n; i++)
        if (sure == (x[i] == 1))
            back[i] += w * (x[i] == 1 ? product : product / (1 - x[i]));
}

/* ---- unit rules ---- */

static bool is_number(const struct graph *g, node_id n)
{
    return dim_is_number(graph_dim(g, n));
}

static bool same_from(const struct graph *g, size_t n, const node_id *args, size_t step)
{
    for (size_t i = step; i < n; i += step)
        if (!dim_equal(graph_dim(g, args[i]), graph_dim(g, args[0])))
            return false;
    return true;
}

/* An empty sum is a pure number. */
static bool unit_same(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    *out = n ? graph_dim(g, args[0]) : (struct dim){{0}};
    return same_from(g, n, args, 1);
}

static bool unit_multiply(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    (void)n;
    *out = dim_multiply(graph_dim(g, args[0]), graph_dim(g, args[1]));
    return true;
}

static bool unit_divide(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    (void)n;
    *out = dim_divide(graph_dim(g, args[0]), graph_dim(g, args[1]));
    return true;
}

static bool unit_number(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    *out = (struct dim){{0}};
    for (size_t i = 0; i < n; i++)
        if (!is_number(g, args[i]))
            return false;
    return true;
}

static bool unit_root(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    (void)n;
    return dim_root(graph_dim(g, args[0]), out);
}

/* A number to any power; a quantity to a whole or half power where that exists. */
static bool unit_power(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    (void)n;
    const struct graph_node *exponent = graph_at(g, args[1]);
    if (exponent->op != OP_CONST || !is_number(g, args[1]))
        return false;
    double twice = 2 * exponent->constant;
    struct dim base = graph_dim(g, args[0]);
    *out = base;
    if (dim_is_number(base))
        return true;
    if (!(fabs(twice) <= 200) || twice != floor(twice))
        return false;
    if (fmod(twice, 2) == 0) {
        *out = dim_raise(base, (int)(twice / 2));
        return true;
    }
    return dim_root(dim_raise(base, (int)twice), out);
}

static bool unit_lookup(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    if (n % 2 == 0)
        return false;
    for (size_t i = 1; i < n; i += 2)
        if (graph_at(g, args[i])->op != OP_CONST ||
            !dim_equal(graph_dim(g, args[i]), graph_dim(g, args[0])))
            return false;
    *out = graph_dim(g, args[2]);
    return same_from(g, n - 2, args + 2, 2);
}

/* A rate, and values of one dimension. */
static bool unit_years(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    *out = graph_dim(g, args[1]);
    return is_number(g, args[0]) && same_from(g, n - 1, args + 1, 1);
}

static bool unit_course(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    (void)n;
    *out = (struct dim){{0}};
    struct dim rate = graph_dim(g, args[COURSE_RATE]);
    return is_number(g, args[COURSE_STANDING]) && is_number(g, args[COURSE_LEFT]) &&
           dim_equal(graph_dim(g, args[COURSE_ENDING]), rate) &&
           dim_equal(graph_dim(g, args[COURSE_UNRESET]), rate);
}

/* Rates, whose inverse is the dimension of the chain's time. */
static bool unit_rates(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    *out = (struct dim){{0}};
    return same_from(g, n, args, 1);
}

static bool unit_pick(const struct graph *g, size_t n, const node_id *args, struct dim *out)
{
    *out = (struct dim){{0}};
    return n == 1 && graph_at(g, args[0])->op == OP_DIAGRAM;
}

/* ---- the table ---- */

/* clang-format off */
#define ROW(op, point, backward, unit, lower, degree) \
    [OP_##op] = {point, backward, unit, lower_##lower, DEGREE_##degree}

static const struct op_rule rules[OP_COUNT] = {
    /*  operation   point             backward           unit           lower       degree */
    ROW(CONST,      NULL,             NULL,              NULL,          const,      LEAF),
    ROW(INPUT,      NULL,             NULL,              NULL,          input,      LEAF),
    ROW(ADD,        add_point,        add_backward,      unit_same,     keep,       UNION),
    ROW(SUBTRACT,   subtract_point,   subtract_backward, unit_same,     keep,       UNION),
    ROW(MULTIPLY,   multiply_point,   multiply_backward, unit_multiply, keep,       PRODUCT),
    ROW(DIVIDE,     divide_point,     divide_backward,   unit_divide,   keep,       QUOTIENT),
    ROW(NEGATE,     negate_point,     minus_backward,    unit_same,     keep,       UNION),
    ROW(POWER,      power_point,      power_backward,    unit_power,    keep,       POWER),
    ROW(COMPLEMENT, complement_point, minus_backward,    unit_number,   complement, UNION),
    ROW(RATIO,      ratio_point,      ratio_backward,    unit_divide,   keep,       QUOTIENT),
    ROW(SUM,        sum_point,        sum_backward,      unit_same,     sum,        UNION),
    ROW(MIN,        min_point,        chosen_backward,   unit_same,     chain,      CURVED),
    ROW(MAX,        max_point,        chosen_backward,   unit_same,     chain,      CURVED),
    ROW(EXP,        exp_point,        exp_backward,      unit_number,   keep,       CURVED),
    ROW(LOG,        log_point,        log_backward,      unit_number,   keep,       CURVED),
    ROW(SQRT,       sqrt_point,       sqrt_backward,     unit_root,     keep,       CURVED),
    ROW(LOOKUP,     lookup_point,     lookup_backward,   unit_lookup,   lookup,     CHOICE),
    ROW(ANNUITY,    annuity_point,    annuity_backward,  unit_number,   annuity,    CURVED),
    ROW(EITHER,     either_point,     either_backward,   unit_number,   either,     PRODUCT),
    ROW(HELD,       held_point,       held_backward,     unit_same,     keep,       HELD),
    ROW(YEARS,      NULL,             NULL,              unit_years,    years,      CHOICE),
    ROW(COURSE,     NULL,             NULL,              unit_course,   course,     COURSE),
    ROW(CHAIN,      NULL,             NULL,              unit_rates,    transitions, CURVED),
    ROW(DIAGRAM,    NULL,             NULL,              unit_number,   diagram,    PRODUCT),
    ROW(PICK,       NULL,             NULL,              unit_pick,     pick,       UNION),
};
#undef ROW
/* clang-format on */

const struct op_rule *op_rule(enum graph_op op)
{
    return &rules[op];
}

const struct graph_op_info *graph_op_info(enum graph_op op)
{
    static const struct graph_op_info infos[OP_COUNT] = {
#define X(op, name, least, most, symbol, strength) {name, symbol, least, most, strength},
        GRAPH_OPS(X)
#undef X
    };
    return &infos[op];
}

double graph_point(enum graph_op op, size_t n, const double *args)
{
    assert(rules[op].point);
    return rules[op].point(n, args);
}

void graph_backward(enum graph_op op, size_t n, const double *args, double result, double weight,
                    double *back)
{
    assert(rules[op].backward);
    rules[op].backward(n, args, result, weight, back);
}

double graph_node_point(const struct graph *g, node_id n, const double *args)
{
    const struct graph_node *node = graph_at(g, n);
    if (node->op == OP_YEARS)
        return years_point(graph_years_of(g, n), args);
    if (node->op == OP_COURSE)
        return course_at(graph_course_of(g, n), args, 0);
    if (node->op == OP_CHAIN)
        return chain_point(graph_chain_of(g, n), args);
    return graph_point(node->op, node->n, args);
}

void graph_node_backward(const struct graph *g, node_id n, const double *args, double result,
                         double weight, double *back)
{
    const struct graph_node *node = graph_at(g, n);
    if (node->op == OP_YEARS)
        years_backward(graph_years_of(g, n), args, weight, back);
    else if (node->op == OP_COURSE)
        course_backward(graph_course_of(g, n), args, weight, back);
    else if (node->op == OP_CHAIN)
        chain_backward(graph_chain_of(g, n), args, weight, back);
    else
        graph_backward(node->op, node->n, args, result, weight, back);
}
