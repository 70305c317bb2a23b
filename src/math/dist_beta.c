/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The beta distribution. Both tails are kept as logarithms, and an argument as
 * log x, so that shapes such as (0.01, 5) or (3.24, 189075) neither underflow nor
 * cancel. Own code: library inverses fail for such shapes. */
#include <float.h>
#include <math.h>
#include <stdbool.h>

#include "math/dist.h"
#include "math/elementary.h"

/* The fraction converges in about the root of the greater parameter. */
enum { MOST_TERMS = 400000 };

static double away_from_zero(double x)
{
    return fabs(x) < DBL_MIN / DBL_EPSILON ? DBL_MIN / DBL_EPSILON : x;
}

/* Coefficient k of the continued fraction of DLMF 8.17.22 and 8.17.23. */
static double coefficient(double a, double b, double x, int k)
{
    double m = k / 2;
    if (k % 2 == 0)
        return m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m));
    return -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1));
}

/* 1 / (1 + d1 / (1 + d2 / ...)) by the modified Lentz method (Thompson & Barnett,
 * J. Comput. Phys. 64 (1986) 490-509). Converges for x < (a + 1) / (a + b + 2). */
static double fraction(double a, double b, double x)
{
    double f = 1, c = 1, d = 0;
    for (int k = 1; k <= MOST_TERMS; k++) {
        double term = coefficient(a, b, x, k);
        d = 1 / away_from_zero(1 + term * d);
        c = away_from_zero(1 + term / c);
        f *= c * d;
        if (fabs(c * d - 1) < 2 * DBL_EPSILON)
            return 1 / f;
    }
    return NAN;
}

/* log(1 - exp(x)) for x <= 0. */
static double log_complement(double x)
{
    return x > -0.69314718055994531 ? math_log(-math_expm1(x)) : math_log1p(-math_exp(x));
}

/* A logarithm of a probability that rounding may have pushed above 0; NAN stays. */
static double at_most_one(double x)
{
    return x > 0 ? 0 : x;
}

struct tails {
    double lower, upper; /* log P(X <= x), log P(X > x) */
};

/* The tails at x, given log x and log(1 - x). */
static struct tails tails_at(double a, double b, double log_beta, double lx, double ly)
{
    double x = math_exp(lx), common = a * lx + b * ly - log_beta;
    if (x < (a + 1) / (a + b + 2)) {
        double lower = common - math_log(a) + math_log(fraction(a, b, x));
        lower = at_most_one(lower);
        return (struct tails){lower, log_complement(lower)};
    }
    double upper = common - math_log(b) + math_log(fraction(b, a, math_exp(ly)));
    upper = at_most_one(upper);
    return (struct tails){log_complement(upper), upper};
}

double dist_beta_cdf(double a, double b, double x)
{
    if (x <= 0)
        return 0;
    if (x >= 1)
        return 1;
    return math_exp(tails_at(a, b, dist_log_beta(a, b), math_log(x), math_log1p(-x)).lower);
}

struct target {
    double a, b, log_beta;
    double log_p; /* of the tail that is sought */
    bool upper;
};

/* The log of the sought tail minus its target, against u = log x; no number from x = 1 on. */
static void distance(const void *ctx, double u, double *value, double *slope)
{
    const struct target *t = ctx;
    if (u >= 0) {
        *value = *slope = NAN;
        return;
    }
    double ly = log_complement(u);
    struct tails tails = tails_at(t->a, t->b, t->log_beta, u, ly);
    double tail = t->upper ? tails.upper : tails.lower;
    double density = t->a * u + (t->b - 1) * ly - t->log_beta; /* log of x f(x) */
    *value = tail - t->log_p;
    *slope = math_exp(density - tail) * (t->upper ? -1 : 1);
}

/* log x of the quantile, which lies at or below the mean. */
static double log_quantile(double a, double b, double log_beta, double p, double q)
{
    struct target t = {a, b, log_beta, math_log(p <= q ? p : q), p > q};
    /* I_x(a, b) is about x^a / (a B) for small x */
    double small = (math_log(p) + math_log(a) + log_beta) / a;
    double mean = math_log(a / (a + b));
    struct dist_function f = {distance, &t, t.upper ? -1 : 1};
    return dist_root(&f, t.upper ? mean : fmin(small, mean), 0);
}

double dist_beta_quantile(double a, double b, double p, double q)
{
    double log_beta = dist_log_beta(a, b), sum = a + b;
    double below = tails_at(a, b, log_beta, math_log(a / sum), math_log(b / sum)).lower;
    if (math_log(p) <= below)
        return math_exp(log_quantile(a, b, log_beta, p, q));
    return -math_expm1(log_quantile(b, a, log_beta, q, p));
}

double dist_beta_log_quantile(double a, double b, double p, double q, double near)
{
    struct target t = {a, b, dist_log_beta(a, b), math_log(p <= q ? p : q), p > q};
    double u = dist_root_near(distance, &t, near), sum = a + b;
    if (u < 0)
        return u;
    double below = tails_at(a, b, t.log_beta, math_log(a / sum), math_log(b / sum)).lower;
    if (math_log(p) <= below)
        return log_quantile(a, b, t.log_beta, p, q);
    return log_complement(log_quantile(b, a, t.log_beta, q, p));
}
