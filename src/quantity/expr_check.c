/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dimensions of expressions: sets them bottom-up and compares what must agree.
 * One mistake gives one diagnostic: a part that is wrong silences what is above
 * it, but not what stands beside it. */
#include <math.h>

#include "quantity/expr_spine.h"

struct checker {
    struct arena *a;
    const struct units *u;
    const struct expr_names *names;
    struct place at;
    struct diags *d;
};

static bool check(struct checker *c, struct expr *e);

static struct place place_of(const struct checker *c, const struct expr *e)
{
    return place_inside(c->at, e->column);
}

static const char *words(const struct checker *c, const struct expr *e)
{
    return dim_words(c->a, c->u, e->dim);
}

static bool check_sum(struct checker *c, struct expr *e)
{
    e->dim = e->args[0]->dim;
    if (dim_equal(e->dim, e->args[1]->dim))
        return true;
    diag_add(c->d, place_of(c, e), "both sides of '%s' must be of one kind, but the left is %s "
             "and the right is %s", e->op == EXPR_ADD ? "+" : "-", words(c, e->args[0]),
             words(c, e->args[1]));
    return false;
}

/* A binary e whose arguments are checked. */
static bool check_binary(struct checker *c, struct expr *e)
{
    struct dim left = e->args[0]->dim, right = e->args[1]->dim;
    switch (e->op) {
    case EXPR_MULTIPLY:
        e->dim = dim_multiply(left, right);
        return true;
    case EXPR_DIVIDE:
        e->dim = dim_divide(left, right);
        return true;
    default:
        return check_sum(c, e);
    }
}

enum { GREATEST_POWER = 9 }; /* of a quantity with a dimension */

static bool check_power(struct checker *c, struct expr *e)
{
    const struct expr *base = e->args[0], *power = e->args[1];
    e->dim = base->dim;
    if (dim_is_number(base->dim))
        return true;
    if (floor(power->value) != power->value || fabs(power->value) > GREATEST_POWER) {
        diag_add(c->d, place_of(c, power), "%s can only be raised to a whole number from -%d to "
                 "%d, not to %s", words(c, base), GREATEST_POWER, GREATEST_POWER, power->text);
        return false;
    }
    e->dim = dim_raise(base->dim, (int)power->value);
    return true;
}

static bool check_pure(struct checker *c, struct expr *e)
{
    e->dim = dim_number;
    if (dim_is_number(e->args[0]->dim))
        return true;
    diag_add(c->d, place_of(c, e->args[0]), "%s takes a pure number, but this is %s",
             e->op == EXPR_EXP ? "exp" : "log", words(c, e->args[0]));
    return false;
}

static bool check_sqrt(struct checker *c, struct expr *e)
{
    if (dim_root(e->args[0]->dim, &e->dim))
        return true;
    diag_add(c->d, place_of(c, e->args[0]), "sqrt takes a pure number or a square, but this is "
             "%s", words(c, e->args[0]));
    return false;
}

/* Is args[i] of the kind of args[like]? */
static bool check_like(struct checker *c, const struct expr *e, size_t i, size_t like,
                       const char *what)
{
    const struct expr *x = e->args[i], *first = e->args[like];
    if (dim_equal(x->dim, first->dim))
        return true;
    diag_add(c->d, place_of(c, x), "%s must be of one kind, but the first is %s and this is %s",
             what, words(c, first), words(c, x));
    return false;
}

static bool check_extreme(struct checker *c, struct expr *e)
{
    e->dim = e->args[0]->dim;
    const char *what = e->op == EXPR_MIN ? "the arguments of min" : "the arguments of max";
    for (size_t i = 1; i < e->n; i++)
        if (!check_like(c, e, i, 0, what))
            return false;
    return true;
}

static bool check_lookup(struct checker *c, struct expr *e)
{
    e->dim = e->args[2]->dim;
    for (size_t i = 1; i + 1 < e->n; i += 2)
        if (!check_like(c, e, i, 0, "what lookup looks up and its bounds") ||
            !check_like(c, e, i + 1, 2, "the values of lookup"))
            return false;
    return true;
}

/* The frequencies of stress classes; the classes' names are no values. */
static bool check_stress(struct checker *c, const struct expr *e)
{
    bool good = true;
    for (size_t i = 1; i < e->n; i += 2) {
        if (dim_equal(e->args[i]->dim, dim_frequency))
            continue;
        diag_add(c->d, place_of(c, e->args[i]), "the frequency of '%s' must be a number per "
                 "time, such as 14 per a, but this is %s", e->args[i - 1]->name,
                 words(c, e->args[i]));
        good = false;
    }
    return good;
}

static bool check_named(struct checker *c, struct expr *e)
{
    bool good = e->op != EXPR_UNWANTED || check_stress(c, e);
    struct dim dim = dim_number;
    if (!c->names->dim(c->names->ctx, e, place_of(c, e), &dim))
        return false;
    e->dim = dim;
    return good;
}

/* An e that is neither binary nor named, whose arguments are checked. */
static bool check_call(struct checker *c, struct expr *e)
{
    switch (e->op) {
    case EXPR_NEGATE:
        e->dim = e->args[0]->dim;
        return true;
    case EXPR_POWER:
        return check_power(c, e);
    case EXPR_MIN:
    case EXPR_MAX:
        return check_extreme(c, e);
    case EXPR_EXP:
    case EXPR_LOG:
        return check_pure(c, e);
    case EXPR_SQRT:
        return check_sqrt(c, e);
    default:
        return check_lookup(c, e);
    }
}

static bool check_other(struct checker *c, struct expr *e)
{
    switch (e->op) {
    case EXPR_LITERAL:
        return true;
    case EXPR_NAME:
    case EXPR_WAS:
    case EXPR_CLEARANCE:
    case EXPR_UNWANTED:
    case EXPR_FAILS:
    case EXPR_FREQUENCY:
    case EXPR_SHARE:
        return check_named(c, e);
    default:
        break;
    }
    bool good = true;
    for (size_t i = 0; i < e->n; i++)
        good &= check(c, e->args[i]);
    return good && check_call(c, e);
}

static bool check(struct checker *c, struct expr *e)
{
    struct expr *nodes[SPINE];
    size_t n = 0;
    for (; n < SPINE && expr_is_binary(e); e = e->args[0])
        nodes[n++] = e;
    if (n == 0)
        return check_other(c, e);
    bool good = check(c, e);
    while (n-- > 0) {
        bool right = check(c, nodes[n]->args[1]);
        good = good && right && check_binary(c, nodes[n]);
    }
    return good;
}

bool expr_check(struct arena *a, const struct units *u, struct expr *e,
                const struct expr_names *names, struct place at, struct diags *d)
{
    struct checker c = {a, u, names, at, d};
    return check(&c, e);
}
