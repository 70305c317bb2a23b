/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Formulas by recursive descent, evaluated while they are read: sums, terms, powers,
 * calls, names and literals. Owns nothing; depth is bounded. */
#include "formula.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

#include "formula_parts.h"

#define DEPTH 500

static bool total(struct reader *r, long double *out);

bool formula_sum(struct reader *r, long double *out)
{
    return total(r, out);
}

/* --- reading --- */

bool formula_fail(struct reader *r, const char *what)
{
    if (!*r->error)
        snprintf(r->error, FORMULA_ERROR, "%s at %td: \"%.40s\"", what, r->p - r->start, r->p);
    return false;
}

bool formula_is_letter(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z');
}

bool formula_is_digit(char c)
{
    return c >= '0' && c <= '9';
}

void formula_blanks(struct reader *r)
{
    while (*r->p == ' ' || *r->p == '\n')
        r->p++;
}

bool formula_take(struct reader *r, char sign)
{
    formula_blanks(r);
    bool there = *r->p == sign;
    r->p += there;
    return there;
}

bool formula_expect(struct reader *r, char sign)
{
    char what[] = "expected ?";
    what[sizeof what - 2] = sign;
    return formula_take(r, sign) || formula_fail(r, what);
}

static bool in_name(char c)
{
    return formula_is_letter(c) || formula_is_digit(c) || c == '-';
}

bool formula_take_word(struct reader *r, const char *word)
{
    size_t n = strlen(word);
    if (strncmp(r->p, word, n) != 0 || in_name(r->p[n]) || r->p[n] == '.' || r->p[n] == '@')
        return false;
    r->p += n;
    return true;
}

bool formula_number(struct reader *r, long double *out)
{
    long double x = 0;
    int scale = 0, exponent = 0;
    formula_blanks(r);
    if (!formula_is_digit(*r->p))
        return formula_fail(r, "expected a number");
    for (; formula_is_digit(*r->p); r->p++)
        x = 10 * x + (*r->p - '0');
    if (r->p[0] == '.' && formula_is_digit(r->p[1]))
        for (r->p++; formula_is_digit(*r->p); r->p++, scale--)
            x = 10 * x + (*r->p - '0');
    bool sign = (r->p[0] == 'e' || r->p[0] == 'E') && (r->p[1] == '-' || r->p[1] == '+');
    if ((r->p[0] == 'e' || r->p[0] == 'E') && formula_is_digit(r->p[1 + sign])) {
        bool negative = r->p[1] == '-';
        for (r->p += 1 + sign; formula_is_digit(*r->p); r->p++)
            exponent = exponent > 9999 ? exponent : 10 * exponent + (*r->p - '0');
        exponent = negative ? -exponent : exponent;
    }
    x = exponent + scale < 0 ? x / powl(10, -(exponent + scale)) : x * powl(10, exponent + scale);
    *out = (double)x; /* what is printed is a double: a difference of two is exact only so */
    return true;
}

/* ".", "@", "+" and "=" belong to a name where they touch what stands on both sides. */
static bool joins(const char *p)
{
    return (*p == '.' || *p == '@' || *p == '+' || *p == '=' || *p == ':') &&
           (in_name(p[1]) || p[1] == '[');
}

/* Bytes of a made-up change, "[...]" behind @ or +, which may hold anything; else 0. */
static size_t made_up(const char *p)
{
    return *p == '[' && (p[-1] == '@' || p[-1] == '+') && strchr(p, ']') ? strcspn(p, "]") + 1 : 0;
}

bool formula_name(struct reader *r, char out[NAME_BYTES])
{
    size_t n = 0;
    formula_blanks(r);
    if (!formula_is_letter(*r->p))
        return false;
    while (in_name(r->p[n]) || joins(r->p + n) || (n && made_up(r->p + n)))
        n += in_name(r->p[n]) || joins(r->p + n) ? 1 : made_up(r->p + n);
    if (n >= NAME_BYTES)
        return formula_fail(r, "a name that is too long");
    memcpy(out, r->p, n);
    out[n] = 0;
    r->p += n;
    return true;
}

/* --- calls --- */

enum { ARGUMENTS = 64 };

/* "a; b; c" up to the closing parenthesis. */
static bool arguments(struct reader *r, long double *args, size_t *n)
{
    *n = 0;
    do {
        if (*n == ARGUMENTS)
            return formula_fail(r, "too many arguments");
        if (!total(r, &args[(*n)++]))
            return false;
    } while (formula_take(r, ';'));
    return formula_expect(r, ')');
}

/* v of the last b that x reaches, and v1 below b1. */
static bool lookup(struct reader *r, long double *out)
{
    long double x, b, v;
    if (!total(r, &x))
        return false;
    for (bool first = true; formula_take(r, ';'); first = false) {
        if (!total(r, &b) || !formula_expect(r, '-') || !formula_expect(r, '>') || !total(r, &v))
            return false;
        if (first || x >= b)
            *out = v;
    }
    return formula_expect(r, ')');
}

/* Years of length d that start at t, each worth d (1 + rate)^-(t + d/2). */
static long double annuity(long double rate, long double from, long double to)
{
    long double sum = 0;
    while (from < to) {
        long double end = fminl(floorl(from) + 1, to), d = end - from;
        sum += d * powl(1 + rate, -(from + d / 2));
        from = end;
    }
    return sum;
}

static bool extreme(struct reader *r, bool least, long double *out)
{
    long double x[ARGUMENTS];
    size_t n;
    if (!arguments(r, x, &n))
        return false;
    *out = x[0];
    for (size_t i = 1; i < n; i++)
        *out = least ? fminl(*out, x[i]) : fmaxl(*out, x[i]);
    return true;
}

/* 1 - (1 - x)(1 - y) ..., in the form that keeps the digits of small ones. */
static bool independent(struct reader *r, long double *out)
{
    long double x[ARGUMENTS];
    size_t n;
    if (!arguments(r, x, &n))
        return false;
    *out = 0;
    for (size_t i = 0; i < n; i++)
        *out += x[i] - *out * x[i];
    return true;
}

static bool course_at_start(struct reader *r, long double *out)
{
    struct formula_course c;
    if (!formula_read_course(r, &c))
        return false;
    *out = formula_course_at(&c, 0);
    return true;
}

enum call {
    MIN,
    MAX,
    EXP,
    LOG,
    SQRT,
    HELD,
    RATIO,
    ANNUITY,
    LOOKUP,
    EITHER,
    COURSE,
    CHAIN,
    OVER,
    PROBABILITY,
    CALLS
};
static const struct {
    const char *word;
    size_t n; /* arguments; 0: reads its own */
} calls[CALLS] = {
    [MIN] = {"min", 0},       [MAX] = {"max", 0},
    [EXP] = {"exp", 1},       [LOG] = {"log", 1},
    [SQRT] = {"sqrt", 1},     [HELD] = {"at-mean", 1},
    [RATIO] = {"ratio", 2},   [ANNUITY] = {"annuity", 3},
    [LOOKUP] = {"lookup", 0}, [PROBABILITY] = {"probability", 0},
    [EITHER] = {"either", 0}, [COURSE] = {"course", 0},
    [OVER] = {"over", 0},     [CHAIN] = {"chain", 0},
};

static bool own_call(struct reader *r, enum call c, long double *out)
{
    switch (c) {
    case MIN:
    case MAX: return extreme(r, c == MIN, out);
    case LOOKUP: return lookup(r, out);
    case EITHER: return independent(r, out);
    case COURSE: return course_at_start(r, out);
    case CHAIN: return formula_chain(r, out);
    case OVER: return formula_over(r, out);
    default: return formula_probability(r, out) && formula_expect(r, ')');
    }
}

static bool call(struct reader *r, enum call c, long double *out)
{
    long double x[ARGUMENTS];
    size_t n;
    if (calls[c].n == 0)
        return own_call(r, c, out);
    if (!arguments(r, x, &n))
        return false;
    if (n != calls[c].n)
        return formula_fail(r, "the wrong number of arguments");
    switch (c) {
    case EXP: *out = expl(x[0]); break;
    case LOG: *out = logl(x[0]); break;
    case SQRT: *out = sqrtl(x[0]); break;
    case HELD: *out = x[0]; break;
    case RATIO: *out = x[0] == 0 ? 0 : x[0] / x[1]; break;
    default: *out = annuity(x[0], x[1], x[2]); break;
    }
    return true;
}

/* --- names and literals --- */

static bool find(struct reader *r, const char *what, long double *out)
{
    char error[NAME_BYTES + 40];
    if (r->world->find(r->world->ctx, what, out))
        return true;
    snprintf(error, sizeof error, "unknown name \"%.150s\"", what);
    return formula_fail(r, error);
}

/* mean(...): a leaf, whose text is its name. */
static bool leaf(struct reader *r, long double *out)
{
    char text[NAME_BYTES];
    const char *end = r->p;
    for (int open = 0; *end; end++) {
        open += (*end == '(') - (*end == ')');
        if (*end == ')' && open == 0)
            break;
    }
    size_t n = (size_t)(end - r->p) + 1;
    if (!*end || n >= NAME_BYTES)
        return formula_fail(r, "a mean without an end");
    memcpy(text, r->p, n);
    text[n] = 0;
    r->p = end + 1;
    return find(r, text, out);
}

static bool word(struct reader *r, long double *out)
{
    char text[NAME_BYTES];
    if (strncmp(r->p, "mean(", 5) == 0)
        return leaf(r, out);
    for (int c = 0; c < CALLS; c++) {
        size_t n = strlen(calls[c].word);
        if (strncmp(r->p, calls[c].word, n) == 0 && r->p[n] == '(') {
            r->p += n + 1;
            return call(r, (enum call)c, out);
        }
    }
    return formula_name(r, text) ? find(r, text, out)
                                 : formula_fail(r, "expected a number or a name");
}

static bool primary(struct reader *r, long double *out)
{
    formula_blanks(r);
    if (formula_take(r, '('))
        return total(r, out) && formula_expect(r, ')');
    if (!formula_is_digit(*r->p))
        return word(r, out);
    long double factor;
    if (!formula_number(r, out) || !formula_units(r, &factor))
        return false;
    *out *= factor;
    return true;
}

/* --- operators --- */

/* x ^ y, from left to right; the exponent may have a sign. */
static bool power(struct reader *r, long double *out)
{
    if (!primary(r, out))
        return false;
    while (formula_take(r, '^')) {
        long double y;
        bool negative = formula_take(r, '-');
        if (!primary(r, &y))
            return false;
        *out = powl(*out, negative ? -y : y);
    }
    return true;
}

static bool signed_power(struct reader *r, long double *out)
{
    bool negative = formula_take(r, '-');
    if (!power(r, out))
        return false;
    *out = negative ? -*out : *out;
    return true;
}

static bool term(struct reader *r, long double *out)
{
    if (!signed_power(r, out))
        return false;
    for (;;) {
        bool times = formula_take(r, '*');
        long double y;
        if (!times && !formula_take(r, '/'))
            return true;
        if (!signed_power(r, &y))
            return false;
        *out = times ? *out * y : *out / y;
    }
}

/* An arrow is no minus. */
static bool take_minus(struct reader *r)
{
    formula_blanks(r);
    return r->p[0] == '-' && r->p[1] != '>' && formula_take(r, '-');
}

static bool total(struct reader *r, long double *out)
{
    if (++r->depth > DEPTH)
        return formula_fail(r, "nested too deep");
    if (!term(r, out))
        return false;
    for (;;) {
        bool plus = formula_take(r, '+');
        long double y;
        if (!plus && !take_minus(r))
            break;
        if (!term(r, &y))
            return false;
        *out = plus ? *out + y : *out - y;
    }
    r->depth--;
    return true;
}

bool formula_evaluate(const char *formula, const struct formula_world *w, long double *out,
                      char error[FORMULA_ERROR])
{
    struct reader r = {.start = formula, .p = formula, .world = w, .error = error};
    long double x = 0;
    *error = 0;
    if (!total(&r, &x))
        return false;
    formula_blanks(&r);
    if (*r.p)
        return formula_fail(&r, "something is left over");
    *out = x;
    return true;
}

/* --- names from a list --- */

/* Is `figure` the name `wanted`, or that with a variant behind it? */
static bool is_figure(const char *figure, const char *wanted)
{
    size_t n = strlen(wanted);
    return strncmp(figure, wanted, n) == 0 && (figure[n] == 0 || figure[n] == '@');
}

/* The first figure for which `fits` holds. */
static bool first_input(const struct formula_inputs *inputs, const char *wanted,
                        bool (*fits)(const char *figure, const char *wanted), long double *out)
{
    for (size_t i = 0; i < inputs->n; i++)
        if (fits(inputs->names[i], wanted)) {
            *out = inputs->values[i];
            return true;
        }
    return false;
}

static bool is_exactly(const char *figure, const char *wanted)
{
    return strcmp(figure, wanted) == 0;
}

/* HAZARD.share.ROW.sees for ".share.ROW.sees" */
static bool is_share(const char *figure, const char *wanted)
{
    const char *rest = strchr(figure, '.');
    return rest && is_figure(rest, wanted);
}

/* Does a figure stand for an event: RELAY.fails, CAUSE.fails.A.B? */
static bool is_failure(const char *wanted)
{
    const char *dot = strchr(wanted, '.');
    return dot && strncmp(dot, ".fails", 6) == 0 && (dot[6] == 0 || dot[6] == '.');
}

/* HAZARD.share.NAME.QUALIFIER for QUALIFIER.NAME */
static bool find_share(const struct formula_inputs *inputs, const char *name, const char *qualifier,
                       long double *out)
{
    char share[NAME_BYTES + 40];
    snprintf(share, sizeof share, ".share.%.300s.%s", name, qualifier);
    return first_input(inputs, share, is_share, out);
}

/* Is `figure` SCHEME.asserts.CLASS.ELEMENT, with or without a variant? */
static bool is_assertion(const char *figure, const char *element)
{
    const char *dot = strchr(figure, '.');
    if (!dot || strncmp(dot, ".asserts.", 9) != 0)
        return false;
    dot = strchr(dot + 9, '.');
    return dot && is_figure(dot + 1, element);
}

/* asserts.ELEMENT.fails: that it does not assert itself, where SCHEME.asserts.CLASS.ELEMENT says
 * that it does. */
static bool find_assertion(const struct formula_inputs *inputs, const char *name, long double *out)
{
    char element[NAME_BYTES];
    long double asserts;
    snprintf(element, sizeof element, "%.*s", (int)(strlen(name) - strlen(".fails")), name);
    if (!first_input(inputs, element, is_assertion, &asserts))
        return false;
    *out = 1 - asserts;
    return true;
}

/* up.FAILURE.fails: ELEMENT.in-repair, ELEMENT.in-repair.alone or CAUSE.in-repair.A.B */
static bool find_repair(const struct formula_inputs *inputs, const char *name, long double *out)
{
    char figure[NAME_BYTES + 40];
    int object = (int)strcspn(name, "."), rest = (int)(strlen(name) - strlen(".fails")) - object;
    snprintf(figure, sizeof figure, "%.*s.in-repair%.*s", object, name, rest, name + object);
    return first_input(inputs, figure, is_figure, out);
}

bool formula_find_input(void *ctx, const char *wanted, long double *out)
{
    if (strncmp(wanted, "asserts.", 8) == 0)
        return find_assertion(ctx, wanted + 8, out);
    if (strncmp(wanted, "up.", 3) == 0)
        return find_repair(ctx, wanted + 3, out);
    if (strncmp(wanted, "sees.", 5) == 0)
        return find_share(ctx, wanted + 5, "sees", out);
    if (strncmp(wanted, "disabled.", 9) == 0)
        return find_share(ctx, wanted + 9, "disabled", out);
    return first_input(ctx, wanted, is_exactly, out) ||
           (is_failure(wanted) && first_input(ctx, wanted, is_figure, out));
}
