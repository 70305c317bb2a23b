/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a parser says: the diagnostics of expressions, with the slips that people
 * who write them by hand make most often. Every message is one sentence. */
#include <string.h>

#include "quantity/expr_parser.h"

void *parse_fail(struct parser *ps, const char *where, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    const char *text = arena_vprintf(ps->a, format, args);
    va_end(args);
    diag_add(ps->d, place_inside(ps->at, column_of(ps, where)), "%s", text);
    return NULL;
}

/* Characters that are not of the grammar but easily typed or pasted. */
static const struct {
    const char *character, *advice;
} foreign[] = {
    {"\u00d7", "write * to multiply"},
    {"\u00b7", "write * to multiply"},
    {"\u22c5", "write * to multiply"},
    {"\u00f7", "write / to divide"},
    {"\u2212", "write - with a blank on both sides to subtract"},
    {"\u2013", "write - with a blank on both sides to subtract, or .. for a range"},
    {"\u2014", "write - with a blank on both sides to subtract, or .. for a range"},
    {"\u2026", "write two points for a range: A .. B"},
    {"\u00b2", "write ^2"},
    {"\u00b3", "write ^3"},
    {"\u20ac", "write the code of the currency behind the number, such as 180 kEUR"},
    {"$", "write the code of the currency behind the number, such as 180 kUSD"},
    {"\u00a3", "write the code of the currency behind the number, such as 180 kGBP"},
    {"\u2030", "write per mille as a number, such as 2e-3"},
    {"\u00a0", "write an ordinary blank instead of the no-break space"},
    {"\u202f", "write an ordinary blank instead of the narrow no-break space"},
    {"\u2192", "write ->"},
};

enum { N_FOREIGN = sizeof foreign / sizeof foreign[0] };

/* The UTF-8 sequence at p as a string. */
static const char *one_character(struct parser *ps, const char *p)
{
    size_t n = 1;
    while (((unsigned char)p[n] & 0xC0) == 0x80)
        n++;
    return arena_strn(ps->a, p, n);
}

static const char *foreign_advice(const char *p)
{
    for (size_t i = 0; i < N_FOREIGN; i++)
        if (text_starts(p, foreign[i].character))
            return foreign[i].advice;
    return NULL;
}

static void *unexpected_word(struct parser *ps, size_t n, const char *expected)
{
    struct unit unit;
    int length = (int)n;
    if (word_is(ps->p, "within") || word_is(ps->p, "as"))
        return parse_fail(ps, ps->p, "a range (90 %% within A .. B) cannot be part of an "
                          "expression; expected %s", expected);
    if (word_is(ps->p, "per") || word_is(ps->p, "in"))
        return parse_fail(ps, ps->p, "'%.*s' belongs directly behind a number, as in "
                          "3 per 100 km a or 1 in 340 a", length, ps->p);
    if (unit_at(ps, ps->p, &unit))
        return parse_fail(ps, ps->p, "the unit '%.*s' must stand behind a number, such as "
                          "1 %.*s", length, ps->p, length, ps->p);
    return parse_fail(ps, ps->p, "'%.*s' is not expected here; expected %s", length, ps->p,
                      expected);
}

static void *unexpected_comma(struct parser *ps)
{
    bool decimal = ps->p > ps->s && is_digit(ps->p[-1]) && is_digit(ps->p[1]);
    return parse_fail(ps, ps->p, decimal ? "the decimal mark is a point, not a comma"
                      : "no expression needs a comma; the arguments of a call are parted by ';'");
}

static void *unexpected_point(struct parser *ps, const char *expected)
{
    if (ps->p[1] == '.')
        return parse_fail(ps, ps->p, "a range begins with its level: 90 %% within A .. B");
    if (is_digit(ps->p[1]))
        return parse_fail(ps, ps->p, "a number needs a digit before its point: 0.5, not .5");
    return parse_fail(ps, ps->p, "the point is not expected here; expected %s", expected);
}

static void *unexpected_sign(struct parser *ps, const char *expected)
{
    switch (*ps->p) {
    case ',':
        return unexpected_comma(ps);
    case '.':
        return unexpected_point(ps, expected);
    case ':':
        return parse_fail(ps, ps->p, "no expression needs a colon; expected %s", expected);
    case ';':
        return parse_fail(ps, ps->p, "';' parts the arguments of a call and is not expected "
                          "here; expected %s", expected);
    case ')':
        return parse_fail(ps, ps->p, ps->depth ? "')' is not expected here; expected %s"
                          : "')' has no '(' before it; expected %s", expected);
    case '*':
        if (ps->p > ps->s && ps->p[-1] == '*')
            return parse_fail(ps, ps->p, "a power is written ^, not **");
    }
    const char *advice = foreign_advice(ps->p);
    if (advice)
        return parse_fail(ps, ps->p, "'%s' is not known; %s", one_character(ps, ps->p), advice);
    return parse_fail(ps, ps->p, "'%s' is not expected here; expected %s",
                      one_character(ps, ps->p), expected);
}

void *parse_unexpected(struct parser *ps, const char *expected)
{
    skip_blanks(ps);
    if (*ps->p == 0)
        return parse_fail(ps, ps->p, "the text ends too early; expected %s", expected);
    size_t n = word_length(ps->p);
    if (n)
        return unexpected_word(ps, n, expected);
    if (is_digit(*ps->p))
        return parse_fail(ps, ps->p, "a number is not expected here (digits are not grouped by "
                          "blanks); expected %s", expected);
    if (*ps->p == '%')
        return parse_fail(ps, ps->p, "'%%' must stand behind a number, such as 5 %%");
    return unexpected_sign(ps, expected);
}

void *parse_no_unit(struct parser *ps, const char *number)
{
    size_t n = word_length(ps->p);
    const char *word = arena_strn(ps->a, ps->p, n);
    if (word_is_reserved(ps->p, n) || text_equal(word, "as"))
        return unexpected_word(ps, n, "a unit or one of + - * /");
    const char *near = unit_nearest(ps->a, ps->u, word);
    if (near)
        return parse_fail(ps, ps->p, "'%s' is not a unit; the nearest unit is '%s' "
                          "(a named value needs a '*': %s * %s)", word, near, number, word);
    return parse_fail(ps, ps->p, "'%s' is not a unit; for a named value write %s * %s", word,
                      number, word);
}
