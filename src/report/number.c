/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Numbers as text. The digits come from printf's exact conversion of the double;
 * all the rest (place of the point, exponent, prefix) moves these digits about
 * as text, so that no display adds a rounding error of its own. Only the digits
 * are taken from printf, never the locale's point. Owns nothing. */
#include "report/number.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum {
    USUAL_DIGITS = 3,
    MOST_DIGITS = 12, /* a number that is the same to so many has no error of rounding */
    YEAR_DECIMALS = 2,
    NEAR_ONE_DECIMALS = 6,
    GROUP = 3,
    DIGITS_BEFORE_POINT = 4 /* of an amount of money: a lower prefix is not worth more */
};

/* From here to 1 it matters how much is missing. */
static const double NEAR_ONE = 0.99;

/* |x| = d.ddd * 10^exponent, of n digits. */
struct decimal {
    char digits[MOST_DIGITS + 1];
    int n, exponent;
};

/* x to n digits, zeros at the end left out. */
static struct decimal decimal_of(double x, int n)
{
    char raw[64];
    snprintf(raw, sizeof raw, "%.*e", n - 1, fabs(x));
    char *e = strchr(raw, 'e');
    struct decimal d = {.n = n, .exponent = atoi(e + 1)};
    d.digits[0] = raw[0];
    memcpy(d.digits + 1, e - (n - 1), (size_t)n - 1);
    while (d.n > 1 && d.digits[d.n - 1] == '0')
        d.n--;
    return d;
}

static bool is_one(const struct decimal *d)
{
    return d->n == 1 && d->digits[0] == '1' && d->exponent == 0;
}

static int between(int n, int least, int most)
{
    return n < least ? least : n > most ? most : n;
}

static struct decimal decimal_of_year(double x)
{
    int before = decimal_of(x, MOST_DIGITS).exponent + 1;
    return decimal_of(x, between(before + YEAR_DECIMALS, 1, MOST_DIGITS));
}

/* Three digits of what is missing to 1. */
static struct decimal decimal_near_one(double x)
{
    int missing = USUAL_DIGITS - 1 - decimal_of(1 - x, USUAL_DIGITS).exponent;
    return decimal_of(x, between(missing, NEAR_ONE_DECIMALS, MOST_DIGITS));
}

/* Whether the digits of d, zeros at its end left out, are all that x has. */
static bool is_exact(const struct decimal *d, double x)
{
    return decimal_of(x, MOST_DIGITS).n <= d->n;
}

/* A chance below 1 never reads as 1 (down to a complement of 1e-12): 0.9999, not 1. What
 * was rounded keeps the zeros at its end. */
static struct decimal decimal_in_style(double x, enum number_style style)
{
    if (style == STYLE_YEAR)
        return decimal_of_year(x);
    if (style == STYLE_GROUPED && x >= NEAR_ONE && x < 1)
        return decimal_near_one(x);
    int n = USUAL_DIGITS;
    struct decimal d = decimal_of(x, n);
    bool chance = style == STYLE_PROBABILITY || style == STYLE_PERCENT;
    while (chance && x < 1 && is_one(&d) && n < MOST_DIGITS)
        d = decimal_of(x, ++n);
    if (!is_exact(&d, x))
        d.n = n;
    return d;
}

/* Rounded exponents from `low` to below `high` are written without an exponent. */
static bool is_fixed(int exponent, enum number_style style)
{
    int low = style == STYLE_FREQUENCY ? -1 : style == STYLE_MONEY ? -3 : -2;
    int high = style == STYLE_GROUPED                        ? MOST_DIGITS
               : style == STYLE_MONEY || style == STYLE_YEAR ? 9
                                                             : 5;
    return exponent >= low && exponent < high;
}

static char *put_digits(char *to, const struct decimal *d, int from, int until)
{
    for (int i = from; i < until; i++)
        *to++ = i < 0 || i >= d->n ? '0' : d->digits[i];
    return to;
}

static char *put_fixed(char *to, const struct decimal *d)
{
    if (d->exponent < 0)
        *to++ = '0';
    else
        to = put_digits(to, d, 0, d->exponent + 1);
    if (d->n > d->exponent + 1) {
        *to++ = '.';
        to = put_digits(to, d, d->exponent + 1, d->n);
    }
    return to;
}

/* Blanks between groups of three digits before the point; `text` has room for them. */
static void group_digits(char *text)
{
    size_t n = strspn(text, "0123456789");
    for (size_t i = n; i > GROUP; i -= GROUP) {
        char *rest = text + i - GROUP;
        memmove(rest + 1, rest, strlen(rest) + 1);
        *rest = ' ';
    }
}

static char *put_scientific(char *to, const struct decimal *d)
{
    struct decimal mantissa = *d;
    mantissa.exponent = 0;
    to = put_fixed(to, &mantissa);
    return to + sprintf(to, "e%d", d->exponent);
}

static char *put_special(char *buf, double x)
{
    return strcpy(buf, isnan(x) ? "undefined" : x < 0 ? "-infinite" : x > 0 ? "infinite" : "0");
}

char *number_scaled(char *buf, double x, enum number_style style, int shift)
{
    if (!isfinite(x) || x == 0)
        return put_special(buf, x);
    struct decimal d = decimal_in_style(x, style);
    d.exponent -= shift;
    char *to = buf;
    if (x < 0)
        *to++ = '-';
    char *from = to;
    to = is_fixed(d.exponent, style) ? put_fixed(to, &d) : put_scientific(to, &d);
    *to = 0;
    if (style == STYLE_GROUPED)
        group_digits(from);
    return buf;
}

char *number_text(char *buf, double x, enum number_style style)
{
    return number_scaled(buf, x, style, style == STYLE_PERCENT ? -2 : 0);
}

char *number_digits(char *buf, double x, int n, int shift)
{
    if (!isfinite(x) || x == 0)
        return put_special(buf, x);
    struct decimal d = decimal_of(x, between(n, 1, MOST_DIGITS));
    d.exponent -= shift;
    char *to = buf;
    if (x < 0)
        *to++ = '-';
    bool fixed = d.exponent >= -MOST_DIGITS / 2 && d.exponent <= MOST_DIGITS;
    to = fixed ? put_fixed(to, &d) : put_scientific(to, &d);
    *to = 0;
    return buf;
}

int number_exponent(double x)
{
    return decimal_of(x, USUAL_DIGITS).exponent;
}

int money_shift(int largest, int smallest)
{
    int shift = largest < 3 ? 0 : largest < 6 ? 3 : largest < 9 ? 6 : 9;
    bool small = smallest - shift < -1, room = largest - (shift - 3) < DIGITS_BEFORE_POINT;
    return shift > 0 && small && room ? shift - 3 : shift;
}

int number_shift(enum number_style style, const char *unit, double least, double greatest)
{
    double largest = fmax(fabs(least), fabs(greatest));
    double smallest = fmin(fabs(least), fabs(greatest));
    if (style == STYLE_PERCENT)
        return -2;
    if (style != STYLE_MONEY || !*unit || largest == 0)
        return 0;
    return money_shift(number_exponent(largest),
                       number_exponent(smallest > 0 ? smallest : largest));
}

const char *money_prefix(int shift)
{
    static const char *const prefixes[] = {"", "k", "M", "G"};
    return prefixes[shift / 3];
}

const char *money_text(struct arena *a, double x, const char *unit)
{
    char buf[32];
    int shift = 0;
    if (isfinite(x) && x != 0 && *unit)
        shift = money_shift(number_exponent(x), number_exponent(x));
    number_scaled(buf, x, STYLE_MONEY, shift);
    return *unit ? arena_printf(a, "%s %s%s", buf, money_prefix(shift), unit) : arena_str(a, buf);
}

char *return_period_text(char *buf, double per_year)
{
    char number[32];
    if (per_year == 0)
        return strcpy(buf, "never");
    if (isnan(per_year) || per_year < 0)
        return strcpy(buf, "undefined");
    if (per_year >= 1)
        sprintf(buf, "%s per a", number_text(number, per_year, STYLE_PLAIN));
    else if (isinf(1 / per_year))
        strcpy(buf, "1 in over 1e308 a");
    else
        sprintf(buf, "1 in %s a", number_text(number, 1 / per_year, STYLE_PLAIN));
    return buf;
}
