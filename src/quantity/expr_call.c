/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Calls: the functions of numbers, lookup, and the four calls that name an
 * object. Owns the table of functions. */
#include <string.h>

#include "quantity/expr_parser.h"

struct args ARRAY_BODY(struct expr *);

static struct expr *parse_function(struct parser *ps, struct expr *e);
static struct expr *parse_lookup(struct parser *ps, struct expr *e);
static struct expr *parse_unwanted(struct parser *ps, struct expr *e);
static struct expr *parse_object(struct parser *ps, struct expr *e);
static struct expr *parse_share(struct parser *ps, struct expr *e);

static const struct call_row {
    const char *word;
    enum expr_op op;
    /* Reads what stands between the parentheses and fills e. */
    struct expr *(*inside)(struct parser *ps, struct expr *e);
} calls[] = {
    {"min", EXPR_MIN, parse_function},
    {"max", EXPR_MAX, parse_function},
    {"exp", EXPR_EXP, parse_function},
    {"log", EXPR_LOG, parse_function},
    {"sqrt", EXPR_SQRT, parse_function},
    {"lookup", EXPR_LOOKUP, parse_lookup},
    {"unwanted", EXPR_UNWANTED, parse_unwanted},
    {"fails", EXPR_FAILS, parse_object},
    {"frequency", EXPR_FREQUENCY, parse_object},
    {"share", EXPR_SHARE, parse_share},
};

enum { N_CALLS = sizeof calls / sizeof calls[0] };

static const struct call_row *find_call(const char *p, size_t n)
{
    for (size_t i = 0; i < N_CALLS; i++)
        if (strlen(calls[i].word) == n && memcmp(calls[i].word, p, n) == 0)
            return &calls[i];
    return NULL;
}

bool is_call_word(const char *p, size_t n)
{
    return find_call(p, n) != NULL;
}

static struct expr *with_arguments(struct expr *e, const struct args *args)
{
    e->n = args->n;
    e->args = args->at;
    return e;
}

/* Eats a ";" at the cursor. */
static bool next_argument(struct parser *ps)
{
    skip_blanks(ps);
    if (*ps->p != ';')
        return false;
    ps->p++;
    return true;
}

static struct expr *parse_function(struct parser *ps, struct expr *e)
{
    bool many = e->op == EXPR_MIN || e->op == EXPR_MAX;
    struct args args = {0};
    do {
        struct expr *x = parse_expression(ps);
        if (!x)
            return NULL;
        *array_push(ps->a, &args) = x;
    } while (many && next_argument(ps));
    if (many && args.n < 2 && *ps->p == ')')
        return parse_unexpected(ps, "';' and at least two arguments, such as min(a; b)");
    if (!parse_close(ps, many ? "';' or ')' or one of + - * / ^" : "')' or one of + - * / ^"))
        return NULL;
    return with_arguments(e, &args);
}

static struct expr *parse_bound(struct parser *ps, const struct expr *last)
{
    skip_blanks(ps);
    if (!is_digit(*ps->p))
        return parse_unexpected(ps, "a number as bound, such as 5 MW -> 3 h");
    const char *where = ps->p;
    struct expr *bound = parse_literal(ps);
    if (!bound)
        return NULL;
    if (last && dim_equal(last->dim, bound->dim) && !(last->value < bound->value))
        return parse_fail(ps, where, "the bounds of lookup must rise: '%s' does not exceed '%s'",
                          bound->text, last->text);
    skip_blanks(ps);
    if (ps->p[0] != '-' || ps->p[1] != '>')
        return parse_unexpected(ps, "'->' and a value behind the bound of lookup");
    ps->p += 2;
    return bound;
}

static struct expr *parse_lookup(struct parser *ps, struct expr *e)
{
    struct args args = {0};
    struct expr *x = parse_expression(ps), *bound = NULL;
    if (!x)
        return NULL;
    *array_push(ps->a, &args) = x;
    while (next_argument(ps)) {
        bound = parse_bound(ps, bound);
        if (!bound)
            return NULL;
        *array_push(ps->a, &args) = bound;
        struct expr *value = parse_expression(ps);
        if (!value)
            return NULL;
        *array_push(ps->a, &args) = value;
    }
    if (args.n < 2)
        return parse_unexpected(ps, "';' and pairs of bound and value: lookup(x; 0 MW -> 1 h; "
                                "5 MW -> 3 h)");
    if (!parse_close(ps, "';' or ')' or one of + - * / ^"))
        return NULL;
    return with_arguments(e, &args);
}

/* Reads a name as the first thing inside a call or a pair. */
static const char *object_name(struct parser *ps, const char *expected)
{
    skip_blanks(ps);
    size_t n = word_length(ps->p);
    if (n == 0)
        return parse_unexpected(ps, expected);
    return parse_name(ps, n);
}

static struct expr *parse_object(struct parser *ps, struct expr *e)
{
    bool fails = e->op == EXPR_FAILS;
    e->name = object_name(ps, fails ? "the name of an element" : "the name of a hazard");
    if (!e->name || !parse_close(ps, "')'"))
        return NULL;
    return e;
}

static struct expr *parse_share(struct parser *ps, struct expr *e)
{
    e->name = object_name(ps, "the name of a rate");
    if (!e->name)
        return NULL;
    if (!next_argument(ps))
        return parse_unexpected(ps, "';' and a kind of fault, such as share(cable-fault; earth)");
    e->text = object_name(ps, "the name of a kind of fault");
    return e->text && parse_close(ps, "')'") ? e : NULL;
}

/* A stress class and how often it comes: through-fault 14 per a. */
static bool parse_stress(struct parser *ps, struct args *args)
{
    skip_blanks(ps);
    const char *where = ps->p;
    const char *name = object_name(ps, "the name of a stress class and its frequency");
    if (!name)
        return false;
    struct expr *stress = parse_node(ps, EXPR_NAME, where);
    stress->name = name;
    skip_blanks(ps);
    if (!is_digit(*ps->p))
        return parse_unexpected(ps, "the frequency of the stress class, such as 14 per a"), false;
    struct expr *frequency = parse_literal(ps);
    if (!frequency)
        return false;
    *array_push(ps->a, args) = stress;
    *array_push(ps->a, args) = frequency;
    return true;
}

static struct expr *parse_unwanted(struct parser *ps, struct expr *e)
{
    struct args args = {0};
    e->name = object_name(ps, "the name of a scheme");
    if (!e->name)
        return NULL;
    while (next_argument(ps))
        if (!parse_stress(ps, &args))
            return NULL;
    if (!parse_close(ps, "';' or ')'"))
        return NULL;
    return with_arguments(e, &args);
}

struct expr *parse_call(struct parser *ps, size_t n)
{
    const struct call_row *row = find_call(ps->p, n);
    struct expr *e = parse_node(ps, row->op, ps->p);
    ps->p += n;
    skip_blanks(ps);
    return parse_open(ps) ? row->inside(ps, e) : NULL;
}
