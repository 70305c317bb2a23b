/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The parser of expressions: recursive descent over one text, a function a rule
 * of the grammar in expr.h. Chains (a + b + c, a * b / c) are loops, so that the
 * recursion is as deep as parentheses are nested, at most EXPR_DEPTH. */
#include <string.h>

#include "quantity/expr_parser.h"

struct expr *parse_node(struct parser *ps, enum expr_op op, const char *where)
{
    struct expr *e = NEW(ps->a, struct expr);
    e->op = op;
    e->column = column_of(ps, where);
    return e;
}

static struct expr *binary(struct parser *ps, enum expr_op op, const char *where,
                           struct expr *left, struct expr *right)
{
    struct expr *e = parse_node(ps, op, where);
    e->n = 2;
    e->args = NEW_ARRAY(ps->a, 2, struct expr *);
    e->args[0] = left;
    e->args[1] = right;
    return e;
}

bool parse_open(struct parser *ps)
{
    if (ps->depth == EXPR_DEPTH)
        return parse_fail(ps, ps->p, "parentheses are nested deeper than %d", EXPR_DEPTH), false;
    ps->depth++;
    ps->p++;
    return true;
}

bool parse_close(struct parser *ps, const char *expected)
{
    skip_blanks(ps);
    if (*ps->p != ')')
        return parse_unexpected(ps, expected), false;
    ps->depth--;
    ps->p++;
    return true;
}

static struct expr *parse_parentheses(struct parser *ps)
{
    if (!parse_open(ps))
        return NULL;
    struct expr *e = parse_expression(ps);
    return e && parse_close(ps, "')' or one of + - * / ^") ? e : NULL;
}

const char *parse_name(struct parser *ps, size_t n)
{
    struct unit unit;
    int length = (int)n;
    if (n > NAME_BYTES)
        return parse_fail(ps, ps->p, "a name has at most %d characters, this one has %zu",
                          NAME_BYTES, n);
    if (ps->p[n - 1] == '-')
        return parse_fail(ps, ps->p + n - 1, "a '-' that subtracts needs a blank on both sides, "
                          "and no name ends in one");
    if (unit_find(ps->u, ps->p, n, &unit))
        return parse_fail(ps, ps->p, "'%.*s' is a unit and cannot be a name", length, ps->p);
    if (word_is_reserved(ps->p, n))
        return parse_fail(ps, ps->p, "'%.*s' is a reserved word and cannot be a name", length,
                          ps->p);
    const char *name = arena_strn(ps->a, ps->p, n);
    ps->p += n;
    return name;
}

/* A word: a call, a reserved value, or a name. */
static struct expr *parse_word(struct parser *ps, size_t n)
{
    struct unit unit;
    const char *start = ps->p;
    int length = (int)n;
    if (is_call_word(start, n)) {
        if (opens_call(start + n))
            return parse_call(ps, n);
        return parse_fail(ps, start, "'%.*s' needs its arguments in parentheses", length, start);
    }
    if (word_is(start, "was") || word_is(start, "clearance-time")) {
        ps->p += n;
        return parse_node(ps, *start == 'w' ? EXPR_WAS : EXPR_CLEARANCE, start);
    }
    if (word_is_reserved(start, n) || unit_find(ps->u, start, n, &unit))
        return parse_unexpected(ps, "a value");
    if (opens_call(start + n))
        return parse_fail(ps, start, "'%.*s' is not a function; the functions are min max exp "
                          "log sqrt lookup unwanted fails frequency", length, start);
    const char *name = parse_name(ps, n);
    if (!name)
        return NULL;
    struct expr *e = parse_node(ps, EXPR_NAME, start);
    e->name = name;
    return e;
}

static struct expr *parse_primary(struct parser *ps)
{
    skip_blanks(ps);
    size_t n = word_length(ps->p);
    if (n)
        return parse_word(ps, n);
    if (is_digit(*ps->p))
        return parse_literal(ps);
    if (*ps->p == '(')
        return parse_parentheses(ps);
    return parse_unexpected(ps, "a value, such as 180 kEUR, a name, or '('");
}

static struct expr *parse_power(struct parser *ps)
{
    struct expr *base = parse_primary(ps);
    if (!base)
        return NULL;
    skip_blanks(ps);
    if (*ps->p != '^')
        return base;
    const char *where = ps->p++;
    struct expr *exponent = parse_exponent(ps);
    if (!exponent)
        return NULL;
    skip_blanks(ps);
    if (*ps->p == '^')
        return parse_fail(ps, ps->p, "a power of a power needs parentheses: (x^2)^3");
    return binary(ps, EXPR_POWER, where, base, exponent);
}

static struct expr *parse_factor(struct parser *ps)
{
    skip_blanks(ps);
    if (*ps->p != '-' || ps->p[1] == '>')
        return parse_power(ps);
    const char *where = ps->p++;
    struct expr *inner = parse_power(ps);
    if (!inner)
        return NULL;
    struct expr *e = parse_node(ps, EXPR_NEGATE, where);
    e->n = 1;
    e->args = NEW_ARRAY(ps->a, 1, struct expr *);
    e->args[0] = inner;
    return e;
}

static struct expr *parse_term(struct parser *ps)
{
    struct expr *e = parse_factor(ps);
    while (e) {
        skip_blanks(ps);
        const char *where = ps->p;
        if (*where != '*' && *where != '/')
            return e;
        ps->p++;
        struct expr *right = parse_factor(ps);
        if (!right)
            return NULL;
        e = binary(ps, *where == '*' ? EXPR_MULTIPLY : EXPR_DIVIDE, where, e, right);
    }
    return NULL;
}

/* "+" or "-" at the cursor as an operator between two values? */
static bool is_sum_sign(const char *p)
{
    return *p == '+' || (*p == '-' && p[1] != '>');
}

struct expr *parse_expression(struct parser *ps)
{
    struct expr *e = parse_term(ps);
    while (e) {
        skip_blanks(ps);
        const char *where = ps->p;
        if (!is_sum_sign(where))
            return e;
        if (*where == '-' && !(is_blank(where[-1]) && is_blank(where[1])))
            return parse_fail(ps, where, "a '-' that subtracts needs a blank on both sides, "
                              "because names may hold a '-'");
        ps->p++;
        struct expr *right = parse_term(ps);
        if (!right)
            return NULL;
        e = binary(ps, *where == '+' ? EXPR_ADD : EXPR_SUBTRACT, where, e, right);
    }
    return NULL;
}

/* The canonical text, which is what a register keeps, must be parsable again. */
static struct expr *check_size(struct parser *ps, struct expr *e)
{
    struct arena *scratch = arena_child(ps->a);
    struct text t;
    text_init(&t, scratch);
    expr_write(&t, e);
    size_t n = t.n;
    arena_free(scratch);
    if (n <= EXPR_BYTES)
        return e;
    return parse_fail(ps, ps->s, "an expression has at most %d bytes with blanks around its "
                      "signs, this one has %zu", EXPR_BYTES, n);
}

struct expr *expr_parse(struct arena *a, const struct units *u, const char *s, struct place at,
                        struct diags *d)
{
    struct parser ps = {.a = a, .u = u, .s = s, .p = s, .at = at, .d = d, .mark = s};
    size_t n = strlen(s);
    if (n > EXPR_BYTES)
        return parse_fail(&ps, s, "an expression has at most %d bytes, this one has %zu",
                          EXPR_BYTES, n);
    struct expr *e = parse_expression(&ps);
    if (!e)
        return NULL;
    skip_blanks(&ps);
    if (*ps.p)
        return parse_unexpected(&ps, "one of + - * / ^ or the end");
    return n <= EXPR_BYTES / 2 ? e : check_size(&ps, e); /* blanks at most double it */
}
