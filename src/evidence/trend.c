/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means of a rate that grows and ages. Owns nothing. Invariant: short stretches keep their
 * digits, so no mean is a difference of two integrals from elsewhere.
 *
 * Growth and ageing together have no closed form. With u the age and k = log(1 + g),
 * exp(k u) u^(b - 1) is integrated by Gauss and Legendre's rule of eight points (DLMF 3.5.v)
 * on pieces on which neither factor changes by more than exp(1/2) and u by no more than
 * exp(0.4): the nearest singularity, at u = 0, then lies so far outside that the error of a
 * piece is below 1e-14. Where u begins at 0 the first piece is a power series. */
#include "evidence/trend.h"

#include <math.h>

#include "math/elementary.h"

#define DAYS_PER_YEAR 365

enum { POINTS = 4 /* on each side of the middle */ };

static const double points[POINTS] = {0.18343464249564980494, 0.52553240991632898582,
                                      0.79666647741362673959, 0.96028985649753623168};
static const double weights[POINTS] = {0.36268378337836198297, 0.31370664587788728734,
                                       0.22238103445337447054, 0.10122853629037625915};

/* --- trends --- */

static ohmen_status refuse_age(const char *id, day since, day date, ohmen_error *e)
{
    char then[DATE_TEXT], now[DATE_TEXT];
    return error_set(e, OHMEN_COMPUTE,
                     "rates/%s ages since %s, which is not before the day of evaluation, %s", id,
                     date_write(then, since), date_write(now, date));
}

ohmen_status trend_of(const struct rate *r, const char *id, day date, struct trend *out,
                      ohmen_error *e)
{
    struct trend t = {.growth = r->growth ? expr_constant(r->growth->expr) : 0};
    if (r->ageing) {
        if (r->since >= date)
            return refuse_age(id, r->since, date, e);
        t.ages = true;
        t.exponent = expr_constant(r->ageing->expr);
        t.age = t.reference = ((double)date - (double)r->since) / DAYS_PER_YEAR;
    }
    *out = t;
    return OHMEN_OK;
}

struct trend trend_renewed(const struct trend *t, double begin)
{
    struct trend renewed = *t;
    renewed.age = -begin;
    return renewed;
}

static bool grows(const struct trend *t)
{
    return t->growth != 0;
}

static bool ages(const struct trend *t)
{
    return t->ages && t->exponent != 1;
}

bool trend_is_flat(const struct trend *t)
{
    return !grows(t) && !ages(t);
}

/* --- ages --- */

/* What the sum of a time and an age may be wrong by. */
static double rounding(const struct trend *t, double years)
{
    return 4e-16 * (fabs(years) + fabs(t->age));
}

bool trend_is_before(const struct trend *t, double years)
{
    return t->ages && years + t->age < -rounding(t, years);
}

/* 0 where it cannot be told from 0: powers near 0 are steep. */
static double age_at(const struct trend *t, double years)
{
    double u = years + t->age;
    return u > rounding(t, years) ? u : 0;
}

/* --- one of the two --- */

/* The mean of exp(k t): k t is counted from the end where it is greatest. */
static double mean_of_growth(double k, double from, double to)
{
    double x = -fabs(k * (to - from));
    return math_exp(k * (k > 0 ? to : from)) * (x == 0 ? 1 : math_expm1(x) / x);
}

/* With v the age at the end and x the stretch as a part of it: the mean of (u/r)^(b - 1) is
 * (v/r)^(b - 1) (1 - (1 - x)^b) / (b x). */
static double mean_of_ageing(const struct trend *t, double from, double to)
{
    double u = age_at(t, from), v = age_at(t, to), x = (to - from) / v;
    double left = x < 0.5 ? math_log1p(-x) : math_log(u / v); /* log(1 - x) */
    double part = -math_expm1(t->exponent * left) / (t->exponent * x);
    return math_pow(v / t->reference, t->exponent - 1) * part;
}

/* --- both --- */

static double level(const struct trend *t, double k, double u)
{
    return math_exp(k * (u - t->age)) * math_pow(u / t->reference, t->exponent - 1);
}

/* Over the ages u .. u + h. */
static double piece(const struct trend *t, double k, double u, double h)
{
    double half = h / 2, middle = u + half, sum = 0;
    for (int i = 0; i < POINTS; i++)
        sum += weights[i] *
               (level(t, k, middle - half * points[i]) + level(t, k, middle + half * points[i]));
    return half * sum;
}

/* From age 0 to the age c, |k c| at most 1:
 *     integral of exp(k u) u^(b - 1) = c^b x sum of (k c)^n / (n! (b + n)). */
static double first_piece(const struct trend *t, double k, double c)
{
    double term = 1, sum = 0;
    for (int n = 0; n < 24; n++) {
        sum += term / (t->exponent + n);
        term *= k * c / (n + 1);
    }
    double scale = math_exp(-k * t->age) * math_pow(c / t->reference, t->exponent - 1);
    return scale * c * sum;
}

/* Over the ages u .. u + h. The pieces share their ends, so nothing adds up. */
static double integral_of_both(const struct trend *t, double k, double u, double h)
{
    double sum = 0, done = 0, longest = 0.5 / fabs(k);
    double widening = math_expm1(fmin(0.4, 0.5 / fabs(t->exponent - 1)));
    while (done < h) {
        double from = u + done, step = from > 0 ? fmin(longest, widening * from) : longest;
        double end = fmin(done + step, h);
        sum += from > 0 ? piece(t, k, from, end - done) : first_piece(t, k, end - done);
        done = end;
    }
    return sum;
}

double trend_mean(const struct trend *t, double from, double to)
{
    double k = math_log1p(t->growth);
    if (trend_is_flat(t))
        return 1;
    if (!ages(t))
        return mean_of_growth(k, from, to);
    if (!grows(t))
        return mean_of_ageing(t, from, to);
    return integral_of_both(t, k, age_at(t, from), to - from) / (to - from);
}
