/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Characters, words, reserved words and names of the expression grammar, and
 * columns counted in characters. Owns the table of reserved words. */
#include <string.h>

#include "base/utf8.h"
#include "quantity/expr_parser.h"

static const char *const reserved[] = {
    "per", "in", "was", "within", "clearance-time", "min", "max", "exp", "log", "sqrt",
    "lookup", "unwanted", "fails", "frequency", "share", "yes", "no", "none", "all", "any", "of",
    "at-least", "absent", "rest", "at", "sees",
};

enum { N_RESERVED = sizeof reserved / sizeof reserved[0] };

bool is_letter(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z');
}

bool is_digit(char c)
{
    return c >= '0' && c <= '9';
}

bool is_blank(char c)
{
    return c == ' ' || c == '\t' || c == '\n' || c == '\r';
}

void skip_blanks(struct parser *ps)
{
    while (is_blank(*ps->p))
        ps->p++;
}

size_t word_length(const char *p)
{
    if (!is_letter(*p))
        return 0;
    size_t n = 1;
    while (is_letter(p[n]) || is_digit(p[n]) || (p[n] == '-' && p[n + 1] != '>'))
        n++;
    return n;
}

bool opens_call(const char *p)
{
    while (is_blank(*p))
        p++;
    return *p == '(';
}

bool word_is(const char *p, const char *word)
{
    size_t n = strlen(word);
    return word_length(p) == n && memcmp(p, word, n) == 0;
}

bool word_is_reserved(const char *p, size_t n)
{
    for (size_t i = 0; i < N_RESERVED; i++)
        if (strlen(reserved[i]) == n && memcmp(reserved[i], p, n) == 0)
            return true;
    return false;
}

size_t unit_at(const struct parser *ps, const char *p, struct unit *out)
{
    size_t n = *p == '%' ? 1 : word_length(p);
    if (n == 0 || (is_call_word(p, n) && opens_call(p + n)))
        return 0; /* min(a; b) is no minute */
    return unit_find(ps->u, p, n, out) ? n : 0;
}

uint32_t column_of(struct parser *ps, const char *where)
{
    if (where < ps->mark) {
        ps->mark = ps->s;
        ps->mark_column = 0;
    }
    ps->mark_column += (uint32_t)utf8_count(ps->mark, (size_t)(where - ps->mark));
    ps->mark = where;
    return ps->mark_column;
}

bool name_is_valid(const struct units *u, const char *s)
{
    struct unit unit;
    size_t n = word_length(s);
    return n > 0 && n <= NAME_BYTES && s[n] == 0 && s[n - 1] != '-' && !word_is_reserved(s, n) &&
           !unit_find(u, s, n, &unit);
}

const char *name_objection(const struct units *u, const char *s)
{
    struct unit unit;
    if (unit_find(u, s, strlen(s), &unit))
        return "it is a unit";
    if (word_is_reserved(s, strlen(s)))
        return "it is a reserved word";
    return "names are letters, digits and hyphens, begin with a letter and do not end in a hyphen, "
           "and have at most 64 characters";
}

void reserved_words(void (*offer)(void *ctx, const char *name), void *ctx)
{
    for (size_t i = 0; i < N_RESERVED; i++)
        offer(ctx, reserved[i]);
}

struct place place_inside(struct place at, uint32_t column)
{
    if (at.line != 0 && !at.whole)
        at.column += column;
    return at;
}
