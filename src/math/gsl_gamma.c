/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The gamma distribution, on GSL's incomplete gamma functions; the only file that
 * includes GSL for them. GSL's error handler would abort, so it is switched off
 * once before the first call; whatever GSL cannot compute becomes NAN here. */
#include <gsl/gsl_errno.h>
#include <gsl/gsl_sf_gamma.h>
#include <math.h>
#include <pthread.h>
#include <stdbool.h>

#include "math/dist.h"
#include "math/elementary.h"

static pthread_once_t handler_off = PTHREAD_ONCE_INIT;

static void switch_handler_off(void)
{
    gsl_set_error_handler_off();
}

/* Underflow to 0 is a value, everything else an error. */
static double value_of(int status, const gsl_sf_result *r)
{
    return status == GSL_SUCCESS || status == GSL_EUNDRFLW ? r->val : NAN;
}

static double call_two(int (*f)(double, double, gsl_sf_result *), double a, double x)
{
    gsl_sf_result r = {NAN, 0};
    pthread_once(&handler_off, switch_handler_off);
    return value_of(f(a, x, &r), &r);
}

double dist_log_gamma(double x)
{
    gsl_sf_result r = {NAN, 0};
    pthread_once(&handler_off, switch_handler_off);
    return value_of(gsl_sf_lngamma_e(x, &r), &r);
}

double dist_log_beta(double a, double b)
{
    return call_two(gsl_sf_lnbeta_e, a, b);
}

double dist_gamma_cdf(double shape, double x)
{
    return x <= 0 ? 0 : call_two(gsl_sf_gamma_inc_P_e, shape, x);
}

struct target {
    double shape, log_gamma;
    double log_p; /* of the tail that is sought */
    bool upper;
};

/* log P(X <= x), x = exp(u). For tiny x, where P may underflow, the first two terms
 * of its series (DLMF 8.7.1): x^a / Gamma(a + 1) (1 - a x / (a + 1)). */
static double log_lower(const struct target *t, double u)
{
    double x = math_exp(u);
    if (x < 1e-9)
        return t->shape * u - t->log_gamma - math_log(t->shape) - t->shape * x / (t->shape + 1);
    return math_log(call_two(gsl_sf_gamma_inc_P_e, t->shape, x));
}

/* Near the mean, where GSL's fraction for the upper tail may not converge, the lower
 * tail is as good. */
static double log_upper(const struct target *t, double u)
{
    double x = math_exp(u);
    double upper = x < t->shape ? NAN : call_two(gsl_sf_gamma_inc_Q_e, t->shape, x);
    return isnan(upper) ? math_log1p(-math_exp(log_lower(t, u))) : math_log(upper);
}

static void distance(const void *ctx, double u, double *value, double *slope)
{
    const struct target *t = ctx;
    double tail = t->upper ? log_upper(t, u) : log_lower(t, u);
    double density = t->shape * u - math_exp(u) - t->log_gamma; /* log of x f(x) */
    *value = tail - t->log_p;
    *slope = math_exp(density - tail) * (t->upper ? -1 : 1);
}

/* Where to start: Wilson & Hilferty, Proc. Nat. Acad. Sci. 17 (1931) 684, or the
 * first term of the series where that is not positive. */
static double first_guess(const struct target *t, double p, double q)
{
    double z = p <= q ? dist_normal_deviate(p) : -dist_normal_deviate(q);
    double v = 1 / (9 * t->shape), root = 1 - v + z * sqrt(v);
    if (root > 0.2)
        return math_log(t->shape) + 3 * math_log(root);
    return (math_log(p) + t->log_gamma + math_log(t->shape)) / t->shape;
}

static struct target target_of(double shape, double p, double q)
{
    return (struct target){shape, dist_log_gamma(shape), math_log(p <= q ? p : q), p > q};
}

static double log_quantile(const struct target *t, double p, double q)
{
    struct dist_function f = {distance, t, t->upper ? -1 : 1};
    return dist_root(&f, first_guess(t, p, q), INFINITY);
}

double dist_gamma_quantile(double shape, double p, double q)
{
    struct target t = target_of(shape, p, q);
    return math_exp(log_quantile(&t, p, q));
}

double dist_gamma_log_quantile(double shape, double p, double q, double near)
{
    struct target t = target_of(shape, p, q);
    double u = dist_root_near(distance, &t, near);
    return isnan(u) ? log_quantile(&t, p, q) : u;
}
