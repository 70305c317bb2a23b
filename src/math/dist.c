/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The shapes of distributions: a row of functions a shape. General source of the
 * formulas: Forbes, Evans, Hastings & Peacock, Statistical Distributions, 4th ed.
 * 2011, the chapter named after each shape. */
#include "math/dist.h"

#include <math.h>

#include "math/elementary.h"

/* Normal. */
static double normal_mean(const struct dist *d)
{
    return d->p[0];
}

static double normal_variance(const struct dist *d)
{
    return d->p[1] * d->p[1];
}

static double normal_cdf(const struct dist *d, double x)
{
    return dist_normal_probability((x - d->p[0]) / d->p[1]);
}

static double deviate(double p, double q)
{
    return p <= q ? dist_normal_deviate(p) : -dist_normal_deviate(q);
}

static double normal_quantile(const struct dist *d, double p, double q)
{
    return d->p[0] + d->p[1] * deviate(p, q);
}

/* Lognormal: log X is normal with mean log(median) and deviation s. */
static double lognormal_s(const struct dist *d)
{
    return math_log(d->p[1]) / DIST_Z95;
}

/* The cut in standard units; infinite where there is none. */
static double cut_z(const struct dist *d)
{
    return isnan(d->p[2]) ? INFINITY : math_log(d->p[2] / d->p[0]) / lognormal_s(d);
}

/* The mean of X^k below the cut c: exp(k mu + k^2 s^2/2) Phi(z - k s) / Phi(z) with
 * z = (log c - mu)/s (Johnson, Kotz & Balakrishnan, Continuous Univariate
 * Distributions 1, 2nd ed. 1994, sec. 14.6); this is the log of the last quotient. */
static double log_cut(const struct dist *d, int k)
{
    double z = cut_z(d), s = lognormal_s(d);
    if (isinf(z))
        return 0;
    return dist_normal_log_probability(z - k * s) - dist_normal_log_probability(z);
}

static double lognormal_mean(const struct dist *d)
{
    double s = lognormal_s(d);
    return d->p[0] * math_exp(s * s / 2 + log_cut(d, 1));
}

/* E(X^2) - E(X)^2 = E(X)^2 (E(X^2)/E(X)^2 - 1); without a cut exp(s^2) - 1. */
static double lognormal_variance(const struct dist *d)
{
    double s = lognormal_s(d), mean = lognormal_mean(d);
    return mean * mean * math_expm1(s * s + log_cut(d, 2) - 2 * log_cut(d, 1));
}

static double lognormal_cdf(const struct dist *d, double x)
{
    if (x <= 0)
        return 0;
    if (x >= d->p[2])
        return 1;
    double z = math_log(x / d->p[0]) / lognormal_s(d);
    return dist_normal_probability(z) / dist_normal_probability(cut_z(d));
}

static double lognormal_quantile(const struct dist *d, double p, double q)
{
    double z = cut_z(d), s = lognormal_s(d);
    double inside = dist_normal_probability(z), outside = dist_normal_probability(-z);
    double x = d->p[0] * math_exp(s * deviate(p * inside, outside + q * inside));
    return x > d->p[2] ? d->p[2] : x;
}

/* Gamma, by mean and shape: scale = mean / shape. */
static double gamma_mean(const struct dist *d)
{
    return d->p[0];
}

static double gamma_variance(const struct dist *d)
{
    return d->p[0] * d->p[0] / d->p[1];
}

static double gamma_cdf(const struct dist *d, double x)
{
    return dist_gamma_cdf(d->p[1], x / d->p[0] * d->p[1]);
}

static double gamma_quantile(const struct dist *d, double p, double q)
{
    return d->p[0] * (dist_gamma_quantile(d->p[1], p, q) / d->p[1]);
}

/* Beta. */
static double mean_of_beta(double a, double b)
{
    return a / (a + b);
}

static double variance_of_beta(double a, double b)
{
    double sum = a + b;
    return (a / sum) * (b / sum) / (sum + 1);
}

static double beta_mean(const struct dist *d)
{
    return mean_of_beta(d->p[0], d->p[1]);
}

static double beta_variance(const struct dist *d)
{
    return variance_of_beta(d->p[0], d->p[1]);
}

static double beta_cdf(const struct dist *d, double x)
{
    return dist_beta_cdf(d->p[0], d->p[1], x);
}

static double beta_quantile(const struct dist *d, double p, double q)
{
    return dist_beta_quantile(d->p[0], d->p[1], p, q);
}

/* Uniform (rectangular). */
static double between(double from, double to, double p, double q)
{
    return p <= q ? from + p * (to - from) : to - q * (to - from);
}

static double uniform_mean(const struct dist *d)
{
    return d->p[0] + (d->p[1] - d->p[0]) / 2;
}

static double uniform_variance(const struct dist *d)
{
    double width = d->p[1] - d->p[0];
    return width * width / 12;
}

static double uniform_cdf(const struct dist *d, double x)
{
    return fmax(0, fmin(1, (x - d->p[0]) / (d->p[1] - d->p[0])));
}

static double uniform_quantile(const struct dist *d, double p, double q)
{
    return between(d->p[0], d->p[1], p, q);
}

/* Triangular; the variance is (a^2 + b^2 + c^2 - ab - ac - bc)/18, written so that
 * nothing cancels. */
static double triangular_mean(const struct dist *d)
{
    return d->p[0] + ((d->p[1] - d->p[0]) + (d->p[2] - d->p[0])) / 3;
}

static double triangular_variance(const struct dist *d)
{
    double rise = d->p[1] - d->p[0], fall = d->p[2] - d->p[1];
    return (rise * rise + rise * fall + fall * fall) / 18;
}

static double triangular_cdf(const struct dist *d, double x)
{
    double from = d->p[0], top = d->p[1], to = d->p[2];
    if (x <= from)
        return 0;
    if (x >= to)
        return 1;
    if (x < top)
        return (x - from) / (to - from) * ((x - from) / (top - from));
    return 1 - (to - x) / (to - from) * ((to - x) / (to - top));
}

static double triangular_quantile(const struct dist *d, double p, double q)
{
    double width = d->p[2] - d->p[0], rise = d->p[1] - d->p[0], fall = d->p[2] - d->p[1];
    if (p * width <= rise)
        return d->p[0] + sqrt(p * width * rise);
    return d->p[2] - sqrt(q * width * fall);
}

/* PERT: a beta on from..to with a = 1 + lambda (top - from)/(to - from) and b = 1 +
 * lambda (to - top)/(to - from), lambda 4, so that the mean is (from + 4 top + to)/6
 * (Malcolm, Roseboom, Clark & Fazar, Operations Research 7 (1959) 646-669; Vose,
 * Risk Analysis, 3rd ed. 2008, appendix III). */
enum { LAMBDA = 4 };

static double pert_a(const struct dist *d)
{
    return 1 + LAMBDA * ((d->p[1] - d->p[0]) / (d->p[2] - d->p[0]));
}

static double pert_b(const struct dist *d)
{
    return 1 + LAMBDA * ((d->p[2] - d->p[1]) / (d->p[2] - d->p[0]));
}

struct dist dist_beta_of_pert(const struct dist *d)
{
    return (struct dist){DIST_BETA, {pert_a(d), pert_b(d)}, 0, NULL, NULL};
}

static double pert_mean(const struct dist *d)
{
    double rise = d->p[1] - d->p[0], width = d->p[2] - d->p[0];
    return d->p[0] + (LAMBDA * rise + width) / (LAMBDA + 2);
}

static double pert_variance(const struct dist *d)
{
    double width = d->p[2] - d->p[0];
    return width * width * variance_of_beta(pert_a(d), pert_b(d));
}

static double pert_cdf(const struct dist *d, double x)
{
    return dist_beta_cdf(pert_a(d), pert_b(d), (x - d->p[0]) / (d->p[2] - d->p[0]));
}

static double pert_quantile(const struct dist *d, double p, double q)
{
    double x = dist_beta_quantile(pert_a(d), pert_b(d), p, q);
    return d->p[0] + x * (d->p[2] - d->p[0]);
}

/* Discrete: the definitions. */
static double discrete_mean(const struct dist *d)
{
    double sum = 0;
    for (size_t i = 0; i < d->n; i++)
        sum += d->probabilities[i] * d->values[i];
    return sum;
}

static double discrete_variance(const struct dist *d)
{
    double mean = discrete_mean(d), sum = 0;
    for (size_t i = 0; i < d->n; i++)
        sum += d->probabilities[i] * (d->values[i] - mean) * (d->values[i] - mean);
    return sum;
}

static double discrete_cdf(const struct dist *d, double x)
{
    double below = 0, above = 0;
    for (size_t i = 0; i < d->n; i++)
        *(d->values[i] <= x ? &below : &above) += d->probabilities[i];
    return above == 0 ? 1 : below;
}

/* Sums from the nearer end; values without probability are never the answer. */
static double discrete_quantile(const struct dist *d, double p, double q)
{
    size_t answer = d->n;
    double sum = 0;
    for (size_t i = 0; p <= q && i < d->n; i++) {
        sum += d->probabilities[i];
        if (d->probabilities[i] > 0 && sum >= p)
            return d->values[i];
    }
    for (size_t i = d->n; i-- > 0;) {
        if (d->probabilities[i] == 0)
            continue;
        if (answer < d->n && sum > q)
            break;
        answer = i;
        sum += d->probabilities[i];
    }
    return answer < d->n ? d->values[answer] : NAN;
}

static const struct {
    double (*mean)(const struct dist *d);
    double (*variance)(const struct dist *d);
    double (*cdf)(const struct dist *d, double x);
    double (*quantile)(const struct dist *d, double p, double q);
} shapes[DIST_SHAPES] = {
    [DIST_NORMAL] = {normal_mean, normal_variance, normal_cdf, normal_quantile},
    [DIST_LOGNORMAL] = {lognormal_mean, lognormal_variance, lognormal_cdf, lognormal_quantile},
    [DIST_GAMMA] = {gamma_mean, gamma_variance, gamma_cdf, gamma_quantile},
    [DIST_BETA] = {beta_mean, beta_variance, beta_cdf, beta_quantile},
    [DIST_UNIFORM] = {uniform_mean, uniform_variance, uniform_cdf, uniform_quantile},
    [DIST_TRIANGULAR] = {triangular_mean, triangular_variance, triangular_cdf,
                         triangular_quantile},
    [DIST_PERT] = {pert_mean, pert_variance, pert_cdf, pert_quantile},
    [DIST_DISCRETE] = {discrete_mean, discrete_variance, discrete_cdf, discrete_quantile},
    [DIST_COUNTED] = {dist_counted_mean, dist_counted_variance, dist_counted_cdf,
                      dist_counted_quantile},
};

double dist_mean(const struct dist *d)
{
    return shapes[d->shape].mean(d);
}

double dist_variance(const struct dist *d)
{
    return shapes[d->shape].variance(d);
}

double dist_cdf(const struct dist *d, double x)
{
    return shapes[d->shape].cdf(d, x);
}

double dist_quantile(const struct dist *d, double p, double q)
{
    return p > 0 && p < 1 && q > 0 && q < 1 ? shapes[d->shape].quantile(d, p, q) : NAN;
}
