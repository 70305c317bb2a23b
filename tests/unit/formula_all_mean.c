/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means of stated distributions, read from their texts. Nothing of the product is used. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "formula_all.h"

enum { TEXT = 400, PARTS = 8 };

struct reading {
    const struct formula_world *literals;
    char text[TEXT]; /* cut into parts at ", " */
    char *part[PARTS];
    size_t n;
    bool wrong;
};

/* --- numbers --- */

static long double number(struct reading *r, const char *text)
{
    char error[FORMULA_ERROR];
    long double x = NAN;
    if (!text || !formula_evaluate(text, r->literals, &x, error))
        r->wrong = true;
    return x;
}

/* The number behind a word that begins one of the parts; NAN where there is none. */
static long double optional(struct reading *r, const char *word)
{
    size_t n = strlen(word);
    for (size_t i = 0; i < r->n; i++)
        if (strncmp(r->part[i], word, n) == 0 && r->part[i][n] == ' ')
            return number(r, r->part[i] + n + 1);
    return NAN;
}

static long double needed(struct reading *r, const char *word)
{
    long double x = optional(r, word);
    if (isnan(x))
        r->wrong = true;
    return x;
}

static bool has(const struct reading *r, size_t i, const char *word)
{
    return i < r->n && strncmp(r->part[i], word, strlen(word)) == 0;
}

/* --- lognormal --- */

/* The standard normal point with probability p below it, by halving; p from 1/2 on. */
static long double normal_point(long double p)
{
    long double low = 0, high = 10;
    for (int i = 0; i < 100; i++) {
        long double middle = (low + high) / 2;
        if (erfcl(middle / sqrtl(2)) / 2 > 1 - p)
            low = middle;
        else
            high = middle;
    }
    return (low + high) / 2;
}

/* Integral of exp(s x) (or 1) times the normal density from -14 to `to`, by Simpson's rule. */
static long double integral(long double s, long double to)
{
    enum { STEPS = 20000 };
    long double from = -14, h = (to - from) / STEPS, sum = 0;
    for (int i = 0; i <= STEPS; i++) {
        long double x = from + i * h, weight = i == 0 || i == STEPS ? 1 : i % 2 ? 4 : 2;
        sum += weight * expl(s * x - x * x / 2);
    }
    return sum * h / 3;
}

/* Mean of exp(log median + s x) over x below the cap, if there is one. */
static long double lognormal(long double median, long double s, long double at_most)
{
    long double to = isnan(at_most) ? 14 + s : logl(at_most / median) / s;
    to = fminl(to, 14 + s);
    return median * integral(s, to) / integral(0, to);
}

static long double within(struct reading *r)
{
    char *rest = strstr(r->part[0], " within "), *dots = strstr(r->part[0], " .. ");
    char *as = strstr(r->part[0], " as ");
    if (!dots)
        return NAN;
    *rest = *dots = 0;
    if (as)
        *as = 0;
    long double level = number(r, r->part[0]);
    long double a = number(r, rest + 8), b = number(r, dots + 4);
    if (as && strcmp(as + 4, "normal") == 0)
        return (a + b) / 2;
    return lognormal(sqrtl(a * b), logl(b / a) / (2 * normal_point((1 + level) / 2)), NAN);
}

static long double with_error_factor(struct reading *r)
{
    long double s = logl(needed(r, "error factor")) / normal_point(0.95L);
    return lognormal(needed(r, "median"), s, optional(r, "at most"));
}

/* --- the others --- */

/* "jeffreys prior with 2 failures in 118 demands": the mean of beta(c + f, c + n - f). */
static long double counted(struct reading *r, long double c)
{
    char *failures = strstr(r->part[0], " with "), *demands = strstr(r->part[0], " in ");
    if (!failures || !demands) {
        r->wrong = true;
        return NAN;
    }
    return (strtold(failures + 6, NULL) + c) / (strtold(demands + 4, NULL) + 2 * c);
}

static long double between(struct reading *r, long double weight)
{
    return (needed(r, "from") + weight * needed(r, "most likely") + needed(r, "to")) / (2 + weight);
}

/* "one of 10 kEUR (0.7), 90 kEUR (0.3)" */
static long double one_of(struct reading *r)
{
    long double sum = 0;
    for (size_t i = 0; i < r->n; i++) {
        char *value = r->part[i] + (i == 0 ? strlen("one of ") : 0), *p = strrchr(value, '(');
        if (!p || p == value) {
            r->wrong = true;
            return NAN;
        }
        p[-1] = 0;
        sum += number(r, value) * strtold(p + 1, NULL);
    }
    return sum;
}

static long double simple(struct reading *r)
{
    if (has(r, 0, "jeffreys prior with "))
        return counted(r, 0.5L);
    if (has(r, 0, "uniform prior with "))
        return counted(r, 1);
    if (has(r, 0, "one of "))
        return one_of(r);
    if (has(r, 0, "uniform"))
        return (needed(r, "from") + needed(r, "to")) / 2;
    if (has(r, 0, "triangular"))
        return between(r, 1);
    if (has(r, 0, "pert"))
        return between(r, 4);
    if (has(r, 0, "beta"))
        return needed(r, "a") / (needed(r, "a") + needed(r, "b"));
    if (has(r, 0, "median "))
        return with_error_factor(r);
    static const char *const stated[] = {"gamma prior with mean", "lognormal prior with mean",
                                         "constrained non-informative prior with mean", "mean"};
    for (size_t i = 0; i < sizeof stated / sizeof *stated; i++)
        if (has(r, 0, stated[i]))
            return needed(r, stated[i]);
    r->wrong = true;
    return NAN;
}

/* "14 bay for 9466 d and 2 bay for 90 d" */
static long double exposure(struct reading *r, char *at)
{
    long double sum = 0;
    while (at) {
        char *next = strstr(at, " and "), *days = strstr(at, " for ");
        if (next)
            *next = 0;
        if (!days || (next && days > next)) {
            r->wrong = true;
            return NAN;
        }
        *days = 0;
        sum += number(r, at) * strtold(days + 5, NULL) / 365;
        at = next ? next + 5 : NULL;
    }
    return sum;
}

/* "gamma prior with mean M, weight W; 1 event in ...": (W + n) / (W / M + T). */
static long double learnt(struct reading *r, char *events)
{
    char *in = strstr(events, " in ");
    if (!has(r, 0, "gamma prior with mean") || !in) {
        r->wrong = true;
        return NAN;
    }
    long double mean = needed(r, "gamma prior with mean"), weight = needed(r, "weight");
    long double n = strtold(events, NULL);
    return (weight + n) / (weight / mean + exposure(r, in + 4));
}

static void cut(struct reading *r)
{
    char *at = r->text;
    while (r->n < PARTS) {
        r->part[r->n++] = at;
        at = strstr(at, ", ");
        if (!at)
            return;
        *at = 0;
        at += 2;
    }
    r->wrong = true;
}

/* "0.6 times (...)" */
static bool scaled(const char *text, const char *times, const struct formula_world *literals,
                   long double *out)
{
    struct reading r = {.literals = literals};
    char inner[TEXT];
    size_t n = strlen(times);
    memcpy(r.text, text, (size_t)(times - text));
    long double factor = number(&r, r.text);
    if (n < 10 || times[n - 1] != ')')
        return false;
    memcpy(inner, times + 8, n - 9);
    inner[n - 9] = 0;
    if (r.wrong || !mean_of_text(inner, literals, out))
        return false;
    *out *= factor;
    return true;
}

bool mean_of_text(const char *text, const struct formula_world *literals, long double *out)
{
    struct reading r = {.literals = literals};
    const char *times = strstr(text, " times (");
    if (strlen(text) >= TEXT)
        return false;
    if (times)
        return scaled(text, times, literals, out);
    memcpy(r.text, text, strlen(text) + 1);
    char *events = strstr(r.text, "; ");
    if (events)
        *events = 0;
    cut(&r);
    long double x = events                            ? learnt(&r, events + 2)
                    : strstr(r.part[0], " within ") ? within(&r)
                                                      : simple(&r);
    if (r.wrong || isnan(x))
        return false;
    *out = x;
    return true;
}
