/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Literals: numbers with their units, `3 per 100 km a`, `1 in 340 a`.
 *
 * Invariant: a literal's value is its number times whole numbers divided by whole
 * numbers, so that `1 h` and `90 %` are correctly rounded; its text is canonical:
 * the digits as written without needless zeros, one blank between units. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "quantity/expr_parser.h"

struct number {
    double value;
    const char *text; /* canonical */
};

/* What the units of a literal multiply and divide by. */
struct factor {
    double up, down;
    struct dim dim;
};

enum { GREATEST_UNIT_POWER = 9 };

static const char *skip_digits(const char *p)
{
    while (is_digit(*p))
        p++;
    return p;
}

/* The end of the number at p, which begins with a digit. "2..3" ends before "..". */
static const char *number_end(const char *p)
{
    p = skip_digits(p);
    if (*p == '.' && is_digit(p[1]))
        p = skip_digits(p + 1);
    if (*p == 'e' || *p == 'E') {
        const char *q = p + 1;
        if (*q == '+' || *q == '-')
            q++;
        if (is_digit(*q))
            p = skip_digits(q);
    }
    return p;
}

/* Copies digits from s up to `end` without zeros in front, but at least one. */
static void add_whole(struct text *t, const char *s, const char *end)
{
    while (s < end - 1 && *s == '0')
        s++;
    text_addn(t, s, (size_t)(end - s));
}

static const char *canonical_number(struct arena *a, const char *s, const char *end)
{
    struct text t;
    text_init(&t, a);
    const char *p = skip_digits(s);
    add_whole(&t, s, p);
    if (p < end && *p == '.') {
        const char *fraction = p + 1;
        p = skip_digits(fraction);
        const char *last = p;
        while (last > fraction && last[-1] == '0')
            last--;
        if (last > fraction) {
            text_byte(&t, '.');
            text_addn(&t, fraction, (size_t)(last - fraction));
        }
    }
    if (p < end) { /* e or E */
        text_byte(&t, 'e');
        p++;
        if (*p == '-')
            text_byte(&t, '-');
        if (!is_digit(*p))
            p++;
        add_whole(&t, p, end);
    }
    return text_str(&t);
}

/* Is any digit of the number's mantissa not zero? */
static bool is_not_zero(const char *number)
{
    size_t zeros = strspn(number, "0.");
    return is_digit(number[zeros]);
}

static bool number_slip(struct parser *ps, const char *end)
{
    if (*end == ',' && is_digit(end[1]))
        return parse_fail(ps, end, "the decimal mark is a point, not a comma"), true;
    if (*end == '.' && end[1] != '.')
        return parse_fail(ps, end, is_digit(end[1]) ? "a number has only one decimal point"
                          : "a number needs a digit behind its point: not 5. but 5 or 5.0"), true;
    return false;
}

/* Reads the number at the cursor, which begins with a digit. */
static bool read_number(struct parser *ps, struct number *out)
{
    const char *start = ps->p, *end = number_end(start);
    if (number_slip(ps, end))
        return false;
    struct number x = {.text = canonical_number(ps->a, start, end)};
    if (!text_to_double(x.text, x.text + strlen(x.text), &x.value))
        return parse_fail(ps, start, "the number is too large or has too many digits; "
                          "expected at most 1.79e308"), false;
    if (is_not_zero(x.text) && x.value == 0)
        return parse_fail(ps, start, "the number is too small to be told from zero; "
                          "expected at least 4.95e-324"), false;
    ps->p = end;
    size_t n = word_length(end);
    if (n)
        return parse_fail(ps, end, "a blank is needed between a number and the word behind it: "
                          "%s %.*s", x.text, (int)n, end), false;
    *out = x;
    return true;
}

/* Reads "^2" or "^-1" behind a unit; 1 when there is none, 0 when it is wrong. */
static int read_unit_power(struct parser *ps, bool percent)
{
    const char *back = ps->p;
    skip_blanks(ps);
    if (*ps->p != '^') {
        ps->p = back;
        return 1;
    }
    if (percent)
        return parse_fail(ps, ps->p, "a percentage takes no power; write (5 %%)^2"), 0;
    ps->p++;
    skip_blanks(ps);
    const char *start = ps->p;
    int sign = *ps->p == '-' ? -1 : 1;
    if (sign < 0)
        ps->p++;
    const char *end = number_end(ps->p);
    int power = *ps->p - '0';
    if (end != ps->p + 1 || power < 1 || power > GREATEST_UNIT_POWER)
        return parse_fail(ps, start, "the power of a unit is a whole number from 1 to %d or "
                          "-1 to -%d", GREATEST_UNIT_POWER, GREATEST_UNIT_POWER), 0;
    ps->p = end;
    return sign * power;
}

static void multiply_by(struct factor *f, const struct unit *unit, int power)
{
    for (int i = 0; i < abs(power); i++) {
        f->up *= power > 0 ? unit->up : unit->down;
        f->down *= power > 0 ? unit->down : unit->up;
    }
    f->dim = dim_multiply(f->dim, dim_raise(unit->dim, power));
}

/* Reads units side by side, as many as there are, and adds them to `text`, the
 * first behind `before`. Returns their number, or -1 when one is wrong. */
static int read_units(struct parser *ps, struct factor *f, struct text *text, const char *before)
{
    struct unit unit;
    size_t n;
    int count = 0;
    for (skip_blanks(ps); (n = unit_at(ps, ps->p, &unit)) > 0; skip_blanks(ps)) {
        text_add(text, count++ ? " " : before);
        text_addn(text, ps->p, n);
        bool percent = *ps->p == '%';
        ps->p += n;
        int power = read_unit_power(ps, percent);
        if (power == 0)
            return -1;
        if (power != 1)
            text_printf(text, "^%d", power);
        multiply_by(f, &unit, power);
    }
    return count;
}

/* Is there a "/" at the cursor with a unit behind it? Then where that unit is. */
static const char *unit_below(const struct parser *ps)
{
    struct unit unit;
    if (*ps->p != '/')
        return NULL;
    const char *p = ps->p + 1;
    while (is_blank(*p))
        p++;
    return unit_at(ps, p, &unit) ? p : NULL;
}

static void divide_by(struct factor *f, const struct factor *by)
{
    f->up *= by->down;
    f->down *= by->up;
    f->dim = dim_divide(f->dim, by->dim);
}

/* Reads "/ units" behind the units (n_above of them) of a literal. */
static bool read_below(struct parser *ps, struct factor *f, struct text *text, int n_above)
{
    const char *below = unit_below(ps);
    if (!below)
        return true;
    ps->p = below;
    struct factor by = {1, 1, dim_number};
    if (read_units(ps, &by, text, n_above ? "/" : " per ") < 0)
        return false;
    divide_by(f, &by);
    if (n_above == 0 && word_is(ps->p, "per"))
        return parse_fail(ps, ps->p, "'/' and 'per' together are not understood; write the "
                          "units side by side: per km a"), false;
    if (!unit_below(ps))
        return true;
    return parse_fail(ps, ps->p, "a second '/' between units is not understood; all units "
                      "behind the first are below it: EUR/kW a"), false;
}

/* Reads "[number] units" behind `per` or `1 in`. */
static bool read_base(struct parser *ps, struct factor *f, struct text *text, bool needs_unit)
{
    struct number n = {.value = 1};
    skip_blanks(ps);
    if (is_digit(*ps->p)) {
        const char *start = ps->p;
        if (!read_number(ps, &n))
            return false;
        if (n.value == 0)
            return parse_fail(ps, start, "nothing can be counted per 0"), false;
        text_printf(text, " %s", n.text);
    }
    struct factor by = {1, 1, dim_number};
    int count = read_units(ps, &by, text, " ");
    if (count < 0)
        return false;
    if (count == 0 && needs_unit) {
        if (word_length(ps->p))
            return parse_no_unit(ps, n.text ? n.text : "1"), false;
        return parse_unexpected(ps, "a unit behind 'per', such as per a or per 100 km a"), false;
    }
    if (unit_below(ps))
        return parse_fail(ps, ps->p, "'/' behind 'per' or 'in' can be read in two ways; write "
                          "the units side by side: per km a"), false;
    by.up *= n.value;
    divide_by(f, &by);
    return true;
}

static bool read_per(struct parser *ps, struct factor *f, struct text *text)
{
    skip_blanks(ps);
    if (!word_is(ps->p, "per"))
        return true;
    ps->p += strlen("per");
    text_add(text, " per");
    if (!read_base(ps, f, text, true))
        return false;
    if (!word_is(ps->p, "per"))
        return true;
    return parse_fail(ps, ps->p, "a second 'per' is not understood; write the units side by "
                      "side: per km a"), false;
}

/* Reads what follows the number: units, "per ...", or "in ...". */
static bool read_tail(struct parser *ps, const struct number *x, struct factor *f,
                      struct text *text)
{
    skip_blanks(ps);
    if (word_is(ps->p, "in")) {
        if (!text_equal(x->text, "1"))
            return parse_fail(ps, ps->p, "only '1 in' is understood, such as 1 in 340 a; write "
                              "%s per 340 a", x->text), false;
        ps->p += strlen("in");
        text_add(text, " in");
        skip_blanks(ps);
        if (!is_digit(*ps->p))
            return parse_unexpected(ps, "a number behind '1 in', such as 1 in 340 a"), false;
        return read_base(ps, f, text, false);
    }
    int count = read_units(ps, f, text, " ");
    return count >= 0 && read_below(ps, f, text, count) && read_per(ps, f, text);
}

static struct expr *literal_node(struct parser *ps, const char *start, double value,
                                 struct dim dim, const char *text)
{
    struct expr *e = parse_node(ps, EXPR_LITERAL, start);
    e->value = value;
    e->dim = dim;
    e->text = text;
    return e;
}

struct expr *parse_literal(struct parser *ps)
{
    const char *start = ps->p;
    struct number x;
    if (!read_number(ps, &x))
        return NULL;
    struct factor f = {1, 1, dim_number};
    struct text text;
    text_init(&text, ps->a);
    text_add(&text, x.text);
    if (!read_tail(ps, &x, &f, &text))
        return NULL;
    skip_blanks(ps);
    if (word_length(ps->p))
        return parse_no_unit(ps, x.text);
    double value = x.value * f.up / f.down;
    if (!isfinite(value))
        return parse_fail(ps, start, "the quantity is too large to be computed with");
    if (value == 0 && x.value != 0)
        return parse_fail(ps, start, "the quantity is too small to be told from zero");
    return literal_node(ps, start, value, f.dim, text_str(&text));
}

struct expr *parse_exponent(struct parser *ps)
{
    skip_blanks(ps);
    const char *start = ps->p;
    bool negative = *ps->p == '-';
    if (negative)
        ps->p++;
    if (!is_digit(*ps->p))
        return parse_unexpected(ps, "a plain number as exponent, such as x^2 or x^-0.5");
    struct number x;
    if (!read_number(ps, &x))
        return NULL;
    const char *text = negative ? arena_printf(ps->a, "-%s", x.text) : x.text;
    return literal_node(ps, start, negative ? -x.value : x.value, dim_number, text);
}
