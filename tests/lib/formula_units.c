/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The units of literals: own table, own reading. A blank between units multiplies; the
 * `/` of a literal touches the unit behind it, that of a division does not. */
#include <math.h>
#include <string.h>

#include "formula_parts.h"

struct own_unit {
    const char *name;
    long double factor;
};

static const struct own_unit table[] = {
    {"a", 1},
    {"month", 1 / 12.0L},
    {"week", 168 / 8760.0L},
    {"d", 24 / 8760.0L},
    {"h", 1 / 8760.0L},
    {"min", 1 / 525600.0L},
    {"s", 1 / 31536000.0L},
    {"ms", 1 / 31536000000.0L},
    {"km", 1},
    {"m", 1e-3L},
    {"W", 1e-3L},
    {"kW", 1},
    {"MW", 1e3L},
    {"GW", 1e6L},
    {"Wh", 1e-3L / 8760},
    {"kWh", 1 / 8760.0L},
    {"MWh", 1e3L / 8760},
    {"GWh", 1e6L / 8760},
    {"%", 1e-2L},
};

static bool is(const char *text, size_t n, const char *word)
{
    return strlen(word) == n && memcmp(text, word, n) == 0;
}

static bool money(const struct formula_world *w, const char *text, size_t n, long double *factor)
{
    bool kilo = n > 1 && text[0] == 'k', mega = n > 1 && text[0] == 'M';
    if (is(text, n, w->currency))
        *factor = 1;
    else if ((kilo || mega) && is(text + 1, n - 1, w->currency))
        *factor = kilo ? 1e3L : 1e6L;
    else
        return false;
    return true;
}

static bool factor_of(const struct formula_world *w, const char *text, size_t n,
                      long double *factor)
{
    for (size_t i = 0; i < sizeof table / sizeof *table; i++)
        if (is(text, n, table[i].name)) {
            *factor = table[i].factor;
            return true;
        }
    for (size_t i = 0; i < w->n_counts; i++)
        if (is(text, n, w->counts[i])) {
            *factor = 1;
            return true;
        }
    return money(w, text, n, factor);
}

/* Bytes of the word at p, 0 when it is a name with dots or calls a function. */
static size_t unit_word(const char *p)
{
    if (*p == '%')
        return 1;
    size_t n = 0;
    while (formula_is_letter(p[n]) ||
           (n && (formula_is_digit(p[n]) || (p[n] == '-' && p[n + 1] != '>'))))
        n++;
    return p[n] == '.' || p[n] == '(' ? 0 : n;
}

/* A whole power right behind a unit: km^2, a^-1. */
static int unit_power(struct reader *r)
{
    const char *p = r->p;
    bool negative = p[0] == '^' && p[1] == '-';
    if (p[0] != '^' || !formula_is_digit(p[1 + negative]))
        return 1;
    int power = p[1 + negative] - '0';
    r->p += 2 + negative;
    return negative ? -power : power;
}

/* Units side by side; how many. */
static int product(struct reader *r, long double *factor)
{
    int count = 0;
    for (;;) {
        const char *before = r->p;
        long double one;
        formula_blanks(r);
        size_t n = unit_word(r->p);
        if (n == 0 || !factor_of(r->world, r->p, n, &one)) {
            r->p = before;
            return count;
        }
        r->p += n;
        *factor *= powl(one, unit_power(r));
        count++;
    }
}

/* "per 100 km a", "in 340 a": divides. */
static bool base(struct reader *r, long double *factor)
{
    long double by = 1;
    formula_blanks(r);
    if (formula_is_digit(*r->p) && !formula_number(r, &by))
        return false;
    product(r, &by);
    *factor /= by;
    return true;
}

/* A word that stands behind the number, blanks skipped; nothing is taken otherwise. */
static bool word_follows(struct reader *r, const char *word)
{
    const char *before = r->p;
    formula_blanks(r);
    if (formula_take_word(r, word))
        return true;
    r->p = before;
    return false;
}

bool formula_units(struct reader *r, long double *factor)
{
    *factor = 1;
    if (word_follows(r, "in"))
        return base(r, factor);
    const char *before = r->p;
    formula_blanks(r);
    if (r->p[0] == '1' && r->p[1] == '/') { /* 1/section a: nothing above */
        r->p++;
    } else {
        r->p = before;
        product(r, factor);
    }
    if (r->p[0] == '/' && (formula_is_letter(r->p[1]) || r->p[1] == '%')) {
        long double below = 1;
        r->p++;
        product(r, &below);
        *factor /= below;
    }
    return word_follows(r, "per") ? base(r, factor) : true;
}
