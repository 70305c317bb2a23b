/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Expressions as trees: walking, comparing, replacing `was`, and the value of
 * expressions of literals. Owns nothing; trees belong to their arenas. */
#include "quantity/expr.h"

#include <math.h>
#include <string.h>

#include "math/elementary.h"
#include "quantity/expr_spine.h"
#include "quantity/quantity.h"

static bool same_text(const char *a, const char *b)
{
    return a == b || (a && b && text_equal(a, b));
}

bool expr_equal(const struct expr *a, const struct expr *b)
{
    for (;; a = a->args[0], b = b->args[0]) {
        if (a->op != b->op || a->n != b->n || !same_text(a->name, b->name) ||
            !same_text(a->text, b->text))
            return false;
        for (size_t i = 1; i < a->n; i++)
            if (!expr_equal(a->args[i], b->args[i]))
                return false;
        if (a->n == 0)
            return true;
    }
}

void expr_walk(const struct expr *e, void (*visit)(void *ctx, const struct expr *e), void *ctx)
{
    const struct expr *nodes[SPINE];
    size_t n = expr_spine(e, nodes);
    for (size_t i = 0; i < n; i++)
        visit(ctx, nodes[i]);
    if (n > 0) {
        expr_walk(nodes[n - 1]->args[0], visit, ctx);
        while (n-- > 0)
            expr_walk(nodes[n]->args[1], visit, ctx);
        return;
    }
    visit(ctx, e);
    if (e->op == EXPR_UNWANTED)
        return;
    for (size_t i = 0; i < e->n; i++)
        expr_walk(e->args[i], visit, ctx);
}

struct count {
    enum expr_op op;
    size_t n;
};

static void count_op(void *ctx, const struct expr *e)
{
    struct count *c = ctx;
    c->n += e->op == c->op;
}

bool expr_uses(const struct expr *e, enum expr_op op)
{
    struct count c = {op, 0};
    expr_walk(e, count_op, &c);
    return c.n > 0;
}

static struct expr *copy_node(struct arena *a, const struct expr *e)
{
    struct expr *copy = arena_copy(a, e, sizeof *e);
    copy->args = NEW_ARRAY(a, e->n, struct expr *);
    return copy;
}

/* A copy of e, in which `was` is a copy of `before` unless that is NULL. */
static struct expr *copy_tree(struct arena *a, const struct expr *e, const struct expr *before)
{
    const struct expr *nodes[SPINE];
    size_t n = expr_spine(e, nodes);
    if (n > 0) {
        struct expr *left = copy_tree(a, nodes[n - 1]->args[0], before);
        while (n-- > 0) {
            struct expr *copy = copy_node(a, nodes[n]);
            copy->args[0] = left;
            copy->args[1] = copy_tree(a, nodes[n]->args[1], before);
            left = copy;
        }
        return left;
    }
    if (e->op == EXPR_WAS && before)
        return copy_tree(a, before, NULL);
    struct expr *copy = copy_node(a, e);
    for (size_t i = 0; i < e->n; i++)
        copy->args[i] = copy_tree(a, e->args[i], before);
    return copy;
}

struct expr *expr_replace_was(struct arena *a, const struct expr *e, const struct expr *before)
{
    return copy_tree(a, e, before);
}

bool expr_was_is_factor(const struct expr *e)
{
    for (;;) {
        switch (e->op) {
        case EXPR_WAS:
            return true;
        case EXPR_NEGATE:
            e = e->args[0];
            break;
        case EXPR_DIVIDE:
            if (expr_uses(e->args[1], EXPR_WAS))
                return false;
            e = e->args[0];
            break;
        case EXPR_MULTIPLY: {
            bool right = expr_uses(e->args[1], EXPR_WAS);
            if (right && expr_uses(e->args[0], EXPR_WAS))
                return false;
            e = e->args[right ? 1 : 0];
            break;
        }
        default:
            return false;
        }
    }
}

static double binary_value(enum expr_op op, double x, double y)
{
    switch (op) {
    case EXPR_ADD:
        return x + y;
    case EXPR_SUBTRACT:
        return x - y;
    case EXPR_MULTIPLY:
        return x * y;
    default:
        return x / y;
    }
}

/* The least (or greatest) of the arguments; not a number if any is not. */
static double extreme_value(const struct expr *e)
{
    double best = expr_constant(e->args[0]);
    for (size_t i = 1; i < e->n; i++) {
        double x = expr_constant(e->args[i]);
        if (isnan(x) || isnan(best))
            return NAN;
        if (e->op == EXPR_MIN ? x < best : x > best)
            best = x;
    }
    return best;
}

static double lookup_value(const struct expr *e)
{
    double x = expr_constant(e->args[0]);
    if (isnan(x))
        return NAN;
    const struct expr *reached = e->args[2];
    for (size_t i = 1; i + 1 < e->n; i += 2)
        if (x >= expr_constant(e->args[i]))
            reached = e->args[i + 1];
    return expr_constant(reached);
}

static double other_value(const struct expr *e)
{
    switch (e->op) {
    case EXPR_LITERAL:
        return e->value;
    case EXPR_NEGATE:
        return -expr_constant(e->args[0]);
    case EXPR_POWER:
        return math_pow(expr_constant(e->args[0]), e->args[1]->value);
    case EXPR_MIN:
    case EXPR_MAX:
        return extreme_value(e);
    case EXPR_EXP:
        return math_exp(expr_constant(e->args[0]));
    case EXPR_LOG:
        return math_log(expr_constant(e->args[0]));
    case EXPR_SQRT:
        return sqrt(expr_constant(e->args[0]));
    case EXPR_LOOKUP:
        return lookup_value(e);
    default:
        return NAN;
    }
}

double expr_constant(const struct expr *e)
{
    const struct expr *nodes[SPINE];
    size_t n = expr_spine(e, nodes);
    if (n == 0)
        return other_value(e);
    double x = expr_constant(nodes[n - 1]->args[0]);
    while (n-- > 0)
        x = binary_value(nodes[n]->op, x, expr_constant(nodes[n]->args[1]));
    return x;
}
