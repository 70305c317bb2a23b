/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Distributions against published values (distributions.txt, named on the command
 * line) and, swept, against libRmath. */
#define MATHLIB_STANDALONE
#include <Rmath.h>
#include <check.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "math/dist.h"

static const char *data_file;

static const struct {
    const char *name;
    enum dist_shape shape;
    int least, most; /* parameters */
} names[] = {
    {"normal", DIST_NORMAL, 2, 2},   {"lognormal", DIST_LOGNORMAL, 2, 3},
    {"gamma", DIST_GAMMA, 2, 2},     {"beta", DIST_BETA, 2, 2},
    {"uniform", DIST_UNIFORM, 2, 2}, {"triangular", DIST_TRIANGULAR, 3, 3},
    {"pert", DIST_PERT, 3, 3},
};

/* A number, or two joined by / * or -. */
static double number(const char *s)
{
    char *end;
    double x = strtod(s, &end);
    ck_assert_msg(end != s, "not a number: %s", s);
    if (*end == 0)
        return x;
    double y = strtod(end + 1, NULL);
    if (*end == '/')
        return x / y;
    if (*end == '*')
        return x * y;
    ck_assert_msg(*end == '-', "not a number: %s", s);
    return x - y;
}

static double figure(char *inputs)
{
    char *word = strtok(inputs, " ");
    struct dist d = {.p = {0, 0, NAN}};
    int row = -1, n = 0;
    for (int i = 0; i < (int)(sizeof names / sizeof names[0]); i++)
        if (strcmp(names[i].name, word) == 0)
            row = i;
    ck_assert_msg(row >= 0, "no shape: %s", word);
    d.shape = names[row].shape;
    for (word = strtok(NULL, " "); word && (*word < 'a' || *word > 'z'); word = strtok(NULL, " "))
        d.p[n++] = number(word);
    ck_assert_int_ge(n, names[row].least);
    ck_assert_int_le(n, names[row].most);
    ck_assert_ptr_nonnull(word);
    if (strcmp(word, "mean") == 0)
        return dist_mean(&d);
    if (strcmp(word, "variance") == 0)
        return dist_variance(&d);
    char *argument = strtok(NULL, " ");
    ck_assert_ptr_nonnull(argument);
    double x = number(argument);
    if (strcmp(word, "quantile") == 0)
        return dist_quantile(&d, x, 1 - x);
    ck_assert_str_eq(word, "cdf");
    return dist_cdf(&d, x);
}

static char *trimmed(char *s)
{
    s += strspn(s, " ");
    size_t n = strlen(s);
    while (n > 0 && strchr(" \n", s[n - 1]))
        s[--n] = 0;
    return s;
}

static void check_line(char *line)
{
    char *field[5], *at = line;
    for (int i = 0; i < 5; i++) {
        field[i] = at;
        at = strchr(at, '|');
        ck_assert_msg((at != NULL) == (i < 4), "five fields expected: %s", line);
        if (at)
            *at++ = 0;
        field[i] = trimmed(field[i]);
    }
    double expected = number(field[3]);
    char *tolerance = field[4];
    bool absolute = strncmp(tolerance, "abs ", 4) == 0;
    double allowed = number(absolute ? tolerance + 4 : tolerance);
    if (!absolute)
        allowed *= fabs(expected);
    double got = figure(field[2]);
    ck_assert_msg(fabs(got - expected) <= allowed, "%s: expected %.17g, got %.17g", field[0],
                  expected, got);
}

START_TEST(published_values)
{
    char line[1000];
    int n = 0;
    FILE *f = fopen(data_file, "r");
    ck_assert_msg(f != NULL, "cannot read %s", data_file);
    while (fgets(line, sizeof line, f)) {
        if (line[0] == '#' || line[0] == '\n')
            continue;
        check_line(line);
        n++;
    }
    fclose(f);
    ck_assert_int_ge(n, 30);
}
END_TEST

/* p and 1 - p, the smaller exact, over 1e-9 .. 1 - 1e-9. */
static const double small_tails[] = {1e-9, 3e-9, 1e-8, 1e-7, 1e-6, 2.385e-5, 1e-4, 1e-3,
                                     5e-3, 0.01, 0.025, 0.05, 0.1, 0.17, 0.25, 0.333, 0.4,
                                     0.4725, 0.5};
enum { N_TAILS = sizeof small_tails / sizeof small_tails[0] };

static void close_to(const char *what, const struct dist *d, double at, double got,
                     double expected, double allowed)
{
    ck_assert_msg(fabs(got - expected) <= allowed * fabs(expected),
                  "%s of shape %d (%.17g, %.17g, %.17g) at %.17g: expected %.17g, got %.17g, "
                  "relative %.3g", what, (int)d->shape, d->p[0], d->p[1], d->p[2], at, expected,
                  got, fabs(got / expected - 1));
}

typedef double oracle(const struct dist *d, double p, int lower_tail);

/* Compares both tails of the quantile, and the distribution function at each. Where
 * the reference underflows (shapes near 0), ours must do so as well. */
static void sweep(const struct dist *d, oracle *quantile, oracle *cdf, double for_quantile,
                  double for_cdf)
{
    for (int i = 0; i < N_TAILS; i++)
        for (int lower = 0; lower <= 1; lower++) {
            double p = small_tails[i];
            double x = lower ? dist_quantile(d, p, 1 - p) : dist_quantile(d, 1 - p, p);
            double expected = quantile(d, p, lower);
            if (fabs(expected) < 1e-290) {
                ck_assert(x >= 0 && x < 1e-280);
                continue;
            }
            close_to(lower ? "lower quantile" : "upper quantile", d, p, x, expected,
                     for_quantile);
            close_to("distribution function", d, x, dist_cdf(d, x), cdf(d, x, 1), for_cdf);
        }
}

static double r_qbeta(const struct dist *d, double p, int lower)
{
    return qbeta(p, d->p[0], d->p[1], lower, 0);
}

static double r_pbeta(const struct dist *d, double x, int lower)
{
    return pbeta(x, d->p[0], d->p[1], lower, 0);
}

static double r_qgamma(const struct dist *d, double p, int lower)
{
    return qgamma(p, d->p[1], d->p[0] / d->p[1], lower, 0);
}

static double r_pgamma(const struct dist *d, double x, int lower)
{
    return pgamma(x, d->p[1], d->p[0] / d->p[1], lower, 0);
}

static double r_qnorm(const struct dist *d, double p, int lower)
{
    return qnorm(p, d->p[0], d->p[1], lower, 0);
}

static double r_pnorm(const struct dist *d, double x, int lower)
{
    return pnorm(x, d->p[0], d->p[1], lower, 0);
}

/* The definition of the error factor: sigma = log EF / z(0.95). */
static double sigma(const struct dist *d)
{
    return log(d->p[1]) / qnorm(0.95, 0, 1, 1, 0);
}

static double r_qlnorm(const struct dist *d, double p, int lower)
{
    return qlnorm(p, log(d->p[0]), sigma(d), lower, 0);
}

static double r_plnorm(const struct dist *d, double x, int lower)
{
    return plnorm(x, log(d->p[0]), sigma(d), lower, 0);
}

/* The two tails of a lognormal cut at p[2]. */
static double r_qcut(const struct dist *d, double p, int lower)
{
    double inside = r_plnorm(d, d->p[2], 1);
    return lower ? r_qlnorm(d, p * inside, 1)
                 : r_qlnorm(d, p * inside + r_plnorm(d, d->p[2], 0), 0);
}

static double r_pcut(const struct dist *d, double x, int lower)
{
    (void)lower;
    return r_plnorm(d, x, 1) / r_plnorm(d, d->p[2], 1);
}

static double r_qpert(const struct dist *d, double p, int lower)
{
    double width = d->p[2] - d->p[0];
    return d->p[0] + width * qbeta(p, 1 + 4 * (d->p[1] - d->p[0]) / width,
                                   1 + 4 * (d->p[2] - d->p[1]) / width, lower, 0);
}

static double r_ppert(const struct dist *d, double x, int lower)
{
    double width = d->p[2] - d->p[0];
    return pbeta((x - d->p[0]) / width, 1 + 4 * (d->p[1] - d->p[0]) / width,
                 1 + 4 * (d->p[2] - d->p[1]) / width, lower, 0);
}

static double r_qunif(const struct dist *d, double p, int lower)
{
    return qunif(p, d->p[0], d->p[1], lower, 0);
}

static double r_punif(const struct dist *d, double x, int lower)
{
    return punif(x, d->p[0], d->p[1], lower, 0);
}

START_TEST(beta_sweep)
{
    static const double shapes[][2] = {
        {3.24, 189075}, {1.24, 189075}, {0.5, 0.5}, {0.5, 189075.5}, {1, 1}, {1, 340},
        {2.385, 7.1}, {8, 21}, {213.5, 1.5}, {40, 3}, {1000, 1000}, {0.3, 12}, {12, 0.3},
        {0.05, 0.2}, {1e4, 3e5}};
    for (size_t i = 0; i < sizeof shapes / sizeof shapes[0]; i++) {
        struct dist d = {DIST_BETA, {shapes[i][0], shapes[i][1]}, 0, NULL, NULL};
        sweep(&d, r_qbeta, r_pbeta, 1e-9, 1e-10);
    }
    struct dist great = {DIST_BETA, {1e6, 1e6}, 0, NULL, NULL};
    sweep(&great, r_qbeta, r_pbeta, 1e-9, 1e-8);
    struct dist tiny = {DIST_BETA, {0.01, 5}, 0, NULL, NULL};
    sweep(&tiny, r_qbeta, r_pbeta, 1e-9, 1e-10);
}
END_TEST

START_TEST(gamma_sweep)
{
    static const double shapes[] = {0.05, 0.238193, 0.5, 1, 1.6, 2.863055, 8.6, 33.3, 340,
                                    1000, 1e4, 18907.5};
    for (size_t i = 0; i < sizeof shapes / sizeof shapes[0]; i++) {
        struct dist d = {DIST_GAMMA, {2.385e-3, shapes[i]}, 0, NULL, NULL};
        /* GSL's incomplete gamma function loses digits for great shapes */
        sweep(&d, r_qgamma, r_pgamma, 1e-10, shapes[i] > 1e3 ? 2e-9 : 1e-11);
    }
}
END_TEST

START_TEST(other_sweeps)
{
    static const double factors[] = {1.01, 1.5, 3, 5, 10, 14, 100};
    struct dist normal = {DIST_NORMAL, {2.385, 0.7}, 0, NULL, NULL};
    struct dist uniform = {DIST_UNIFORM, {2.385, 7.1}, 0, NULL, NULL};
    struct dist pert = {DIST_PERT, {1, 2.385, 9}, 0, NULL, NULL};
    sweep(&normal, r_qnorm, r_pnorm, 1e-13, 1e-12);
    sweep(&uniform, r_qunif, r_punif, 1e-14, 1e-6);
    sweep(&pert, r_qpert, r_ppert, 1e-11, 1e-10);
    for (size_t i = 0; i < sizeof factors / sizeof factors[0]; i++) {
        struct dist d = {DIST_LOGNORMAL, {0.01, factors[i], NAN}, 0, NULL, NULL};
        sweep(&d, r_qlnorm, r_plnorm, 1e-13, 1e-11);
        d.p[2] = 0.01 * factors[i] * 1.3;
        sweep(&d, r_qcut, r_pcut, 1e-12, 1e-11);
    }
}
END_TEST

static void add_all(Suite *s)
{
    TCase *t = tcase_create("distributions");
    tcase_set_timeout(t, 0);
    tcase_add_test(t, published_values);
    tcase_add_test(t, beta_sweep);
    tcase_add_test(t, gamma_sweep);
    tcase_add_test(t, other_sweeps);
    suite_add_tcase(s, t);
}

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s distributions.txt\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    Suite *s = suite_create("published distributions");
    add_all(s);
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    int failed = srunner_ntests_failed(sr), ran = srunner_ntests_run(sr);
    srunner_free(sr);
    return failed == 0 && ran > 0 ? 0 : 1;
}
