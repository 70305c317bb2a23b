/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Posteriors of rates: published values, entered as documents (evidence.txt, which explains
 * its rows, named on the command line); and, swept, gamma posteriors and fits against
 * libRmath, lognormal posteriors against an adaptive quadrature of libRmath's densities. */
#define MATHLIB_STANDALONE
#include <Rmath.h>
#include <check.h>
#include <gsl/gsl_integration.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "evidence/posterior.h"
#include "loaded.h"
#include "math/dist.h"
#include "math/gamma_fit.h"
#include "rows.h"

static const char *data_file;

enum { HOURS = 8760 /* of a year */ };

/* --- documents --- */

/* "638 for 834 and 12 for 1" as stretches that end on the day of evaluation. */
static void add_exposure(struct text *t, char *list)
{
    int n = 0;
    text_add(t, "exposure: {");
    for (char *one = list; one; n++) {
        char *next = strstr(one, " and "), amount[40], from[DATE_TEXT], to[DATE_TEXT];
        int days;
        ck_assert_int_eq(sscanf(one, " %39s for %d", amount, &days), 2);
        date_write(from, LOADED_DATE - days + 1);
        date_write(to, LOADED_DATE);
        text_printf(t, "%sx%d: {from: %s, %s%s%samount: %s}", n ? ", " : "", n, from,
                    n % 2 ? "to: " : "", n % 2 ? to : "", n % 2 ? ", " : "", amount);
        one = next ? next + 5 : NULL;
    }
    text_add(t, "}");
}

static const char *document(struct arena *a, const char *prior, const char *events, char *exposure)
{
    struct text t;
    text_init(&t, a);
    text_printf(&t,
                "register: {title: Published, currency: EUR, prices: 2026, horizon: 1 a, "
                "discount: 0 per a}\nrates:\n  r:\n    per: h\n    prior: {%s}\n",
                prior);
    if (*events != '-') {
        text_printf(&t, "    events: %s\n    ", events);
        add_exposure(&t, exposure);
        text_add(&t, "\n");
    }
    return text_str(&t);
}

static const struct quantity *learn(struct loaded *l, struct arena *a, const char *text)
{
    const struct quantity *q = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(l, a, text, NULL);
    const struct rate *r = model_get(l->model, KIND_RATE, "r");
    ck_assert_msg(posterior_rate(a, r, "r", LOADED_DATE, &q, &e) == OHMEN_OK, "%s", e.text);
    return q;
}

/* --- published values --- */

static double asked(const struct quantity *q, const char *what)
{
    double p, x = NAN;
    ohmen_error e = OHMEN_ERROR_INIT;
    if (strcmp(what, "mean") == 0)
        return quantity_mean(q) / HOURS;
    if (strcmp(what, "variance") == 0)
        return quantity_variance(q) / HOURS / HOURS;
    if (what[0] == 's' || what[0] == 'r')
        ck_assert_int_eq(q->shape, SHAPE_GAMMA);
    if (strcmp(what, "shape") == 0)
        return q->p[1];
    if (strcmp(what, "rate") == 0)
        return q->p[1] / q->p[0] * HOURS;
    ck_assert_int_eq(sscanf(what, "%lf", &p), 1);
    ck_assert_msg(quantity_quantile(q, p, &x, &e) == OHMEN_OK, "%s", e.text);
    return x / HOURS;
}

static double figure(char *inputs)
{
    char *part[4], *at = inputs;
    for (int i = 0; i < 4; i++) {
        part[i] = at + strspn(at, " ");
        at = strchr(at, ';');
        ck_assert((at != NULL) == (i < 3));
        if (at)
            *at++ = 0;
    }
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct quantity *q = learn(&l, a, document(a, part[0], part[1], part[2]));
    ck_assert_double_eq(loaded_value(&l, "r.rate"), quantity_mean(q));
    double x = asked(q, part[3]);
    arena_free(a);
    return x;
}

START_TEST(published_values)
{
    ck_assert_int_eq(rows_check(data_file, figure), 34);
}
END_TEST

/* --- gamma against libRmath --- */

static const double tails[] = {1e-6, 1e-3, 0.05, 0.3, 0.5, 0.8, 0.95, 0.999};
enum { N_TAILS = sizeof tails / sizeof tails[0] };

static void close_to(const char *what, const struct quantity *q, double got, double expected,
                     double allowed)
{
    ck_assert_msg(fabs(got - expected) <= allowed * fabs(expected),
                  "%s of %s: expected %.17g, got %.17g, relative %.3g", what, q->text, expected,
                  got, fabs(got / expected - 1));
}

static void check_gamma(double weight, double mean, int events, int days)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *prior = arena_printf(a, "mean: %.17g per a, weight: %.17g", mean, weight);
    const char *counted = arena_printf(a, "%d", events);
    char *exposure = (char *)arena_printf(a, "3.7 for %d and 0.25 for 31", days);
    const struct quantity *q = learn(&l, a, document(a, prior, counted, exposure));
    double shape = weight + events, rate = weight / mean + (3.7 * days + 0.25 * 31) / 365;
    close_to("mean", q, quantity_mean(q), shape / rate, 1e-14);
    close_to("variance", q, quantity_variance(q), shape / rate / rate, 1e-13);
    for (int i = 0; i < N_TAILS; i++) {
        double x = NAN;
        ck_assert_int_eq(quantity_quantile(q, tails[i], &x, NULL), OHMEN_OK);
        close_to("quantile", q, x, qgamma(tails[i], shape, 1 / rate, 1, 0), 1e-9);
    }
    arena_free(a);
}

START_TEST(gamma_posteriors)
{
    static const double weights[] = {0.3, 0.5, 1.5, 12}, means[] = {1e-5, 2.5e-3, 0.4};
    static const int events[] = {0, 1, 3, 40}, days[] = {1, 1500, 20000};
    for (size_t i = 0; i < 4; i++)
        for (size_t j = 0; j < 3; j++)
            for (size_t k = 0; k < 4; k++)
                check_gamma(weights[i], means[j], events[k], days[(i + j + k) % 3]);
}
END_TEST

/* --- fits --- */

static const struct gamma_level levels[] = {{0.05, 0.95}, {0.5, 0.5}, {0.95, 0.05}, {0.99, 0.01}};

static void check_quotient(int low, int high, double shape)
{
    double above = qgamma(levels[high].p, shape, 1, 1, 0);
    double below = qgamma(levels[low].p, shape, 1, 1, 0), got = NAN;
    if (below < 1e-280)
        return; /* libRmath underflows */
    ck_assert(gamma_fit_quotient(levels[low], levels[high], above / below, &got));
    double back = qgamma(levels[high].p, got, 1, 1, 0) / qgamma(levels[low].p, got, 1, 1, 0);
    ck_assert_msg(fabs(back / (above / below) - 1) < 1e-9, "shape %g: %.17g", shape, got);
    ck_assert_msg(fabs(got / shape - 1) < 1e-6, "shape %g: %.17g", shape, got);
}

/* One of the solutions is the shape from which the percentile came. */
static void check_ratio(int level, double shape)
{
    double ratio = qgamma(levels[level].p, shape, 1, 1, 0) / shape, shapes[2] = {NAN, NAN};
    if (ratio < 1e-280)
        return;
    int n = gamma_fit_mean(levels[level], ratio, shapes), found = 0;
    ck_assert_int_eq(n, level >= 2 && ratio > 1 ? 2 : 1);
    for (int i = 0; i < n; i++) {
        double back = qgamma(levels[level].p, shapes[i], 1, 1, 0) / shapes[i];
        ck_assert_msg(fabs(back / ratio - 1) < 1e-9, "shape %g: %.17g", shape, shapes[i]);
        found += fabs(shapes[i] / shape - 1) < 1e-5;
    }
    ck_assert_msg(found == 1, "level %d, shape %g: %d of %d", level, shape, found, n);
    ck_assert(n < 2 || shapes[0] < shapes[1]);
}

START_TEST(fits)
{
    static const double shapes[] = {0.0016, 0.00361,  0.02, 0.238193, 0.5,
                                    1,      2.863055, 40,   900,      8e3};
    for (size_t i = 0; i < sizeof shapes / sizeof shapes[0]; i++)
        for (int high = 0; high < 4; high++) {
            check_ratio(high, shapes[i]);
            for (int low = 0; low < high; low++)
                check_quotient(low, high, shapes[i]);
        }
}
END_TEST

START_TEST(what_has_no_fit)
{
    double shape = 7, shapes[2] = {7, 7};
    ck_assert(!gamma_fit_quotient(levels[1], levels[2], 1.01, &shape));
    ck_assert(!gamma_fit_quotient(levels[1], levels[2], 1, &shape));
    ck_assert_int_eq(gamma_fit_mean(levels[1], 1, shapes), 0);
    ck_assert_int_eq(gamma_fit_mean(levels[0], 1.5, shapes), 0);
    /* the greatest 95 % point over the mean is about 5.07, that of 99 % about 22 (computed) */
    ck_assert_int_eq(gamma_fit_mean(levels[2], 6, shapes), 0);
    ck_assert_int_eq(gamma_fit_mean(levels[3], 30, shapes), 0);
    ck_assert(shape == 7 && shapes[0] == 7 && shapes[1] == 7);
}
END_TEST

/* --- lognormal --- */

struct integrand {
    double log_median, s, exposure, top; /* top: log of the density's scale */
    int events, power;
    double about;
};

/* In u = log x: x^power-th moment about a point of prior times likelihood. */
static double log_density(const struct integrand *f, double u)
{
    return dnorm4(u, f->log_median, f->s, 1) + dpois(f->events, f->exposure * exp(u), 1);
}

static double value(double u, void *ctx)
{
    const struct integrand *f = ctx;
    return exp(log_density(f, u) - f->top) * pow(exp(u) - f->about, f->power);
}

static double area(struct integrand f, int power, double about, const double *breaks, size_t n)
{
    double sum = 0;
    gsl_integration_workspace *w = gsl_integration_workspace_alloc(2000);
    gsl_function g = {value, &f};
    f.power = power;
    f.about = about;
    for (size_t i = 0; i + 1 < n; i++) {
        double part, error;
        gsl_integration_qag(&g, breaks[i], breaks[i + 1], 0, 1e-12, 2000, GSL_INTEG_GAUSS61, w,
                            &part, &error);
        sum += part;
    }
    gsl_integration_workspace_free(w);
    return sum;
}

static double quantile_of(const struct dist *d, double p)
{
    double x = dist_quantile(d, p, 1 - p);
    ck_assert(isfinite(x) && x > 0);
    return x;
}

/* The product's own quantiles only say where to cut the line into pieces. */
static void check_counted(double median, double factor, int events, double exposure)
{
    struct dist d = {.shape = DIST_COUNTED, .p = {median, factor, events, exposure}};
    struct integrand f = {log(median), log(factor) / qnorm5(0.95, 0, 1, 1, 0), exposure, 0, events,
                          0, 0};
    double middle = log(quantile_of(&d, 0.5)), breaks[9];
    double left = middle - log(quantile_of(&d, 1e-3)), right = log(quantile_of(&d, 0.999)) - middle;
    f.top = log_density(&f, middle);
    for (int i = 0; i < 9; i++)
        breaks[i] = middle + (i - 4) * (i < 4 ? left : right);
    double total = area(f, 0, 0, breaks, 9), mean = area(f, 1, 0, breaks, 9) / total;
    double variance = area(f, 2, mean, breaks, 9) / total;
    struct quantity q = {.shape = SHAPE_COUNTED,
                         .times = 1,
                         .p = {median, factor, events, exposure},
                         .text = "counted"};
    close_to("mean", &q, quantity_mean(&q), mean, 1e-9);
    close_to("variance", &q, quantity_variance(&q), variance, 1e-9);
    for (int i = 1; i < N_TAILS; i++) {
        double x = quantile_of(&d, tails[i]), cut[4] = {breaks[0], breaks[2], log(x), 0};
        double lower = area(f, 0, 0, cut, 3) / total;
        ck_assert_msg(fabs(lower / tails[i] - 1) < 1e-9, "%g %g %d %g at %g: %.12g", median, factor,
                      events, exposure, tails[i], lower);
        ck_assert(fabs(dist_cdf(&d, x) - tails[i]) < 1e-11);
    }
}

START_TEST(lognormal_posteriors)
{
    static const double factors[] = {1.1, 2, 5, 14, 200};
    static const int events[] = {0, 1, 7, 300};
    static const double expected[] = {1e-3, 0.3, 5, 2e4};
    for (size_t i = 0; i < 5; i++)
        for (size_t j = 0; j < 4; j++)
            for (size_t k = 0; k < 4; k++)
                check_counted(2.5e-3, factors[i], events[j], expected[k] / 2.5e-3);
}
END_TEST

/* Without much exposure it is the prior; with much, the counted events alone. */
START_TEST(limits)
{
    struct dist prior = {.shape = DIST_LOGNORMAL, .p = {2e-3, 5, NAN}};
    struct dist nearly = {.shape = DIST_COUNTED, .p = {2e-3, 5, 0, 1e-12}};
    ck_assert_double_eq_tol(dist_mean(&nearly) / dist_mean(&prior), 1, 1e-12);
    ck_assert_double_eq_tol(dist_variance(&nearly) / dist_variance(&prior), 1, 1e-12);
    for (int i = 0; i < N_TAILS; i++)
        ck_assert_double_eq_tol(quantile_of(&nearly, tails[i]) / quantile_of(&prior, tails[i]), 1,
                                1e-12);
    struct dist much = {.shape = DIST_COUNTED, .p = {2e-3, 1e6, 1e6, 1e9}};
    ck_assert_double_eq_tol(dist_mean(&much), 1e-3, 2e-9);
    ck_assert(dist_cdf(&much, 0) == 0 && dist_cdf(&much, 1) == 1);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s evidence.txt\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    Suite *s = suite_create("published evidence");
    TCase *t = tcase_create("evidence");
    tcase_set_timeout(t, 0);
    tcase_add_test(t, published_values);
    tcase_add_test(t, gamma_posteriors);
    tcase_add_test(t, fits);
    tcase_add_test(t, what_has_no_fit);
    tcase_add_test(t, lognormal_posteriors);
    tcase_add_test(t, limits);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
