/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Gamma shapes from percentiles, by halving on the logarithm of the shape. Owns nothing.
 * Invariant: every bracket holds a change of sign, so that halving cannot lose its root. */
#include "math/gamma_fit.h"

#include <math.h>

#include "math/dist.h"
#include "math/elementary.h"

/* What is sought: percentile `high` over percentile `low`, or over the mean. */
struct sought {
    struct gamma_level low, high;
    bool over_mean;
};

/* Percentiles of small shapes may underflow: a quotient over 0 is taken as infinite. */
static double quotient_at(const struct sought *s, double u)
{
    double shape = math_exp(u), high = dist_gamma_quantile(shape, s->high.p, s->high.q);
    if (s->over_mean)
        return high / shape;
    double low = dist_gamma_quantile(shape, s->low.p, s->low.q);
    return low > 0 ? high / low : INFINITY;
}

/* The root of quotient_at = wanted between two logarithms of shapes, between which the
 * quotient rises (or falls); false where it is not between its values there. */
static bool halve(const struct sought *s, double from, double to, bool rises, double wanted,
                  double *shape)
{
    double first = quotient_at(s, from), last = quotient_at(s, to);
    if (!(rises ? first <= wanted && wanted <= last : last <= wanted && wanted <= first))
        return false;
    while (to - from > 1e-15 && from + (to - from) / 2 > from && from + (to - from) / 2 < to) {
        double middle = from + (to - from) / 2;
        if ((quotient_at(s, middle) < wanted) == rises)
            from = middle;
        else
            to = middle;
    }
    *shape = math_exp(from + (to - from) / 2);
    return true;
}

bool gamma_fit_quotient(struct gamma_level low, struct gamma_level high, double quotient,
                        double *shape)
{
    struct sought s = {low, high, false};
    return halve(&s, math_log(GAMMA_FIT_LEAST), math_log(GAMMA_FIT_GREATEST), false, quotient,
                 shape);
}

/* Where a percentile over the mean is greatest, by golden section. */
static double top(const struct sought *s, double from, double to)
{
    const double golden = 0.6180339887498949;
    double a = to - golden * (to - from), b = from + golden * (to - from);
    double at_a = quotient_at(s, a), at_b = quotient_at(s, b);
    while (to - from > 1e-9) {
        if (at_a < at_b) {
            from = a;
            a = b;
            at_a = at_b;
            b = from + golden * (to - from);
            at_b = quotient_at(s, b);
        } else {
            to = b;
            b = a;
            at_b = at_a;
            a = to - golden * (to - from);
            at_a = quotient_at(s, a);
        }
    }
    return from + (to - from) / 2;
}

int gamma_fit_mean(struct gamma_level level, double ratio, double shapes[2])
{
    struct sought s = {.high = level, .over_mean = true};
    double least = math_log(GAMMA_FIT_LEAST), greatest = math_log(GAMMA_FIT_GREATEST);
    int n = 0;
    if (level.p <= level.q)
        return halve(&s, least, greatest, true, ratio, &shapes[0]) ? 1 : 0;
    double middle = top(&s, least, greatest);
    n += halve(&s, least, middle, true, ratio, &shapes[n]);
    n += halve(&s, middle, greatest, false, ratio, &shapes[n]);
    return n;
}
