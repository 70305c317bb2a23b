/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Probability distributions on plain doubles: mean, variance, distribution
 * function and quantile of each shape.
 *
 * Parameters are finite and in range, as stated at each shape; src/quantity has
 * checked them. Nothing allocates. Where no value can be computed (a series that
 * does not converge, parameters out of range) a function returns NAN, which
 * callers treat as an error. Variances may be infinite where they overflow.
 *
 * Accuracy, held by tests against libRmath for p in 1e-9 .. 1 - 1e-9: quantiles
 * 1e-9 relative, moments 1e-12, distribution functions 1e-10. Distribution functions
 * lose digits for great shapes: gamma above 1e3 to 2e-9 at 2e4 (1e-6 at 1e5, and
 * NAN is possible beyond that); beta, when both are great, to 1e-8 at 1e6 and 1e-5 at 1e9. */
#ifndef MATH_DIST_H
#define MATH_DIST_H

#include <stddef.h>

/* The 95 % point of the standard normal, exactly rounded; error factors are the
 * ratio of the 95 % point to the median with this value, not with 1.645. */
#define DIST_Z95 1.6448536269514722

enum dist_shape {
    DIST_NORMAL,     /* p: mean, standard deviation > 0 */
    DIST_LOGNORMAL,  /* p: median > 0, error factor > 1, at-most > 0 or NAN: the distribution is
                        then truncated: no probability above it, the rest scaled up to 1 */
    DIST_GAMMA,      /* p: mean > 0, shape > 0 */
    DIST_BETA,       /* p: a > 0, b > 0 */
    DIST_UNIFORM,    /* p: from < to */
    DIST_TRIANGULAR, /* p: from <= most likely <= to, from < to */
    DIST_PERT,       /* the same, lambda 4 */
    DIST_DISCRETE,   /* values rise, probabilities sum to 1 */
    DIST_COUNTED,    /* lognormal, learnt from events that were counted. p: median > 0, error
                        factor > 1, events >= 0, exposure > 0; see dist_counted.c */
    DIST_SHAPES
};

struct dist {
    enum dist_shape shape;
    double p[4];
    size_t n; /* DIST_DISCRETE */
    const double *values, *probabilities;
};

double dist_mean(const struct dist *d);
double dist_variance(const struct dist *d);
/* P(X <= x). */
double dist_cdf(const struct dist *d, double x);
/* The least x with P(X <= x) >= p, 0 < p < 1. q is 1 - p: give the smaller of the
 * two exactly and the other rounded, and both tails are equally accurate. */
double dist_quantile(const struct dist *d, double p, double q);

/* Standard normal: P(Z <= z), its logarithm, and its inverse for 0 < p < 1
 * (Wichura, Algorithm AS 241, PPND16, Applied Statistics 37 (1988) 477-484). */
double dist_normal_probability(double z);
double dist_normal_log_probability(double z);
double dist_normal_deviate(double p);

/* The regularized incomplete beta function I_x(a, b) by its continued fraction
 * (DLMF 8.17.22) and its inverse by bracketed Newton steps on its logarithm. */
double dist_beta_cdf(double a, double b, double x);
double dist_beta_quantile(double a, double b, double p, double q);
/* Its logarithm; `near` is a guess of that, or NAN. A good guess makes it much faster. */
double dist_beta_log_quantile(double a, double b, double p, double q, double near);

/* Gamma with mean = shape (scale 1): P(shape, x) and its inverse. gsl_gamma.c. */
double dist_gamma_cdf(double shape, double x);
double dist_gamma_quantile(double shape, double p, double q);
/* As of beta. */
double dist_gamma_log_quantile(double shape, double p, double q, double near);
/* log B(a, b), log Gamma(x) */
double dist_log_beta(double a, double b);
double dist_log_gamma(double x);

/* The beta distribution of which a DIST_PERT is a stretch. */
struct dist dist_beta_of_pert(const struct dist *d);

/* DIST_COUNTED, the posterior of a rate x with a lognormal prior after n events in the
 * exposure T: density proportional to that of the prior times x^n exp(-T x) (NUREG/CR-6823,
 * section 6.2.2; NASA/SP-2009-569, example 6). By fixed quadrature: the relative error is
 * below 1e-12 for moments and below 1e-10 for probabilities and quantiles (computed; held by
 * tests against an adaptive quadrature), for error factors up to 1e6. */
double dist_counted_mean(const struct dist *d);
double dist_counted_variance(const struct dist *d);
double dist_counted_cdf(const struct dist *d, double x);
double dist_counted_quantile(const struct dist *d, double p, double q);

/* log x, and there the density of log x: its logarithm, and the derivative of that by log x. */
struct dist_point {
    double log_x, log_density, slope;
};

/* Many quantiles at once, which is much faster than one by one. */
void dist_counted_quantiles(const struct dist *d, size_t n, const double *p, const double *q,
                            struct dist_point *at);

/* A monotone function for dist_root: its value and slope at u. Either may be
 * infinite, and the slope 0, where they overflow. */
struct dist_function {
    void (*at)(const void *ctx, double u, double *value, double *slope);
    const void *ctx;
    int direction; /* 1 when it rises, -1 when it falls */
};

/* Its root below `high` (which may be infinite), by Newton's steps kept inside a
 * bracket that is widened first; the last step is below 1e-13 max(1, |u|). NAN when
 * it fails. */
double dist_root(const struct dist_function *f, double start, double high);

/* The same by a few of Newton's steps alone, from a point that is near: to about 1e-13. NAN when
 * they do not come to rest, or `near` is NAN. */
double dist_root_near(void (*at)(const void *ctx, double u, double *value, double *slope),
                      const void *ctx, double near);

#endif
