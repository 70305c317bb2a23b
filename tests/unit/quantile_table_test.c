/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tables of quantiles beside libRmath, which computes them by code of its own, and beside
 * dist_quantile where libRmath has no such distribution. */
#define MATHLIB_STANDALONE
#include <Rmath.h>
#include <check.h>
#include <math.h>
#include <stdio.h>

#include "math/quantile_table.h"
#include "random.h"

#define ALLOWED 1e-8 /* what the header promises, for probabilities in 1e-9 .. 1 - 1e-9 */
#define LEAST 1e-9

typedef double oracle(const struct dist *d, double p, int lower_tail);

static double r_gamma(const struct dist *d, double p, int lower)
{
    return qgamma(p, d->p[1], d->p[0] / d->p[1], lower, 0);
}

static double r_beta(const struct dist *d, double p, int lower)
{
    return qbeta(p, d->p[0], d->p[1], lower, 0);
}

static double r_pert(const struct dist *d, double p, int lower)
{
    double width = d->p[2] - d->p[0];
    return d->p[0] + width * qbeta(p, 1 + 4 * (d->p[1] - d->p[0]) / width,
                                   1 + 4 * (d->p[2] - d->p[1]) / width, lower, 0);
}

static double r_normal(const struct dist *d, double p, int lower)
{
    return qnorm(p, d->p[0], d->p[1], lower, 0);
}

static double r_uniform(const struct dist *d, double p, int lower)
{
    return qunif(p, d->p[0], d->p[1], lower, 0);
}

/* The two tails of a lognormal, cut at p[2] where that is a number. */
static double r_lognormal(const struct dist *d, double p, int lower)
{
    double mean = log(d->p[0]), s = log(d->p[1]) / qnorm(0.95, 0, 1, 1, 0);
    if (isnan(d->p[2]))
        return qlnorm(p, mean, s, lower, 0);
    double inside = plnorm(d->p[2], mean, s, 1, 0), outside = plnorm(d->p[2], mean, s, 0, 0);
    return lower ? qlnorm(p * inside, mean, s, 1, 0) : qlnorm(p * inside + outside, mean, s, 0, 0);
}

/* Of a triangle, by its formula. */
static double by_hand_triangle(const struct dist *d, double p, int lower)
{
    double width = d->p[2] - d->p[0], rise = d->p[1] - d->p[0], q = 1 - p;
    double u = lower ? p : q, v = lower ? q : p;
    return u * width <= rise ? d->p[0] + sqrt(u * width * rise)
                             : d->p[2] - sqrt(v * width * (width - rise));
}

static double own(const struct dist *d, double p, int lower)
{
    return lower ? dist_quantile(d, p, 1 - p) : dist_quantile(d, 1 - p, p);
}

static const struct {
    struct dist dist;
    oracle *oracle;
    bool scaled; /* errors are relative to the deviation: the support is not positive */
} rows[] = {
    {{DIST_GAMMA, {2.385e-3, 0.03}}, r_gamma},
    {{DIST_GAMMA, {2.385e-3, 0.05}}, r_gamma},
    {{DIST_GAMMA, {2.385e-3, 0.238193}}, r_gamma},
    {{DIST_GAMMA, {2.385e-3, 0.5}}, r_gamma},
    {{DIST_GAMMA, {2.385e-3, 1}}, r_gamma},
    {{DIST_GAMMA, {2.385e-3, 1.24}}, r_gamma},
    {{DIST_GAMMA, {2.385e-3, 1.6}}, r_gamma},
    {{DIST_GAMMA, {17.1, 3.24}}, r_gamma},
    {{DIST_GAMMA, {17.1, 20}}, r_gamma},
    {{DIST_GAMMA, {17.1, 340}}, r_gamma},
    {{DIST_GAMMA, {17.1, 1e4}}, r_gamma},
    {{DIST_BETA, {0.5, 0.5}}, r_beta},
    {{DIST_BETA, {0.05, 0.2}}, r_beta},
    {{DIST_BETA, {0.3, 12}}, r_beta},
    {{DIST_BETA, {1e4, 3e5}}, r_beta},
    {{DIST_BETA, {0.5, 189075.5}}, r_beta},
    {{DIST_BETA, {1.24, 189075}}, r_beta},
    {{DIST_BETA, {3.24, 189358}}, r_beta},
    {{DIST_BETA, {1, 1}}, r_beta},
    {{DIST_BETA, {2, 5}}, r_beta},
    {{DIST_BETA, {50, 3}}, r_beta},
    {{DIST_BETA, {213.5, 1.5}}, r_beta},
    {{DIST_BETA, {12, 0.3}}, r_beta},
    {{DIST_BETA, {1000, 1000}}, r_beta},
    {{DIST_PERT, {1, 2.385, 9}}, r_pert},
    {{DIST_PERT, {1, 1, 9}}, r_pert},
    {{DIST_PERT, {0, 9, 9}}, r_pert},
    {{DIST_NORMAL, {2.385, 0.7}}, r_normal, true},
    {{DIST_NORMAL, {0, 3}}, r_normal, true},
    {{DIST_UNIFORM, {2.385, 7.1}}, r_uniform},
    {{DIST_TRIANGULAR, {1, 2.385, 9}}, by_hand_triangle},
    {{DIST_TRIANGULAR, {1, 9, 9}}, by_hand_triangle},
    {{DIST_LOGNORMAL, {0.01, 1.01, NAN}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 3, NAN}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 10, NAN}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 26.8, NAN}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 1e4, NAN}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 10, 0.02}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 3, 0.1}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 3, 0.001}}, r_lognormal},
    {{DIST_LOGNORMAL, {0.01, 1.5, 0.0103}}, r_lognormal},
    {{DIST_COUNTED, {0.01, 3, 2, 340}}, own},
    {{DIST_COUNTED, {0.01, 10, 0, 23.85}}, own},
    {{DIST_COUNTED, {0.01, 30, 17, 2385}}, own},
};

enum { ROWS = sizeof rows / sizeof *rows };

struct worst {
    double error, p;
};

static double deviate(double p, double q)
{
    return p <= q ? dist_normal_deviate(p) : -dist_normal_deviate(q);
}

/* Notes the error at p (lower) or 1 - p, by whatever way the table has, and by deviates; relative
 * to `scale` where that is not 0. */
static void compare(const struct dist *d, oracle *reference, double scale,
                    const struct quantile_table *t, const struct quantile_standard *s, double p,
                    int lower, struct worst *worst)
{
    double u = lower ? p : 1 - p, v = lower ? 1 - p : p, at[2] = {quantile_at(t, u, v)};
    double expected = reference(d, p, lower);
    if (expected >= 0 && expected < 1e-290) { /* it underflows, and so must we */
        ck_assert(s->scale * at[0] >= 0 && s->scale * at[0] < 1e-280);
        return;
    }
    at[1] = t->way == QUANTILE_TABLE ? quantile_at_deviate(t, deviate(u, v)) : at[0];
    for (int form = 0; form < 2; form++) {
        double error = fabs(s->location + s->scale * at[form] - expected);
        error /= scale > 0 ? scale : fabs(expected);
        if (!(error <= worst->error))
            *worst = (struct worst){error, u};
    }
}

static void compare_row(size_t row, const struct quantile_table *t,
                        const struct quantile_standard *s, double p, int lower, struct worst *worst)
{
    double scale = rows[row].scaled ? sqrt(dist_variance(&rows[row].dist)) : 0;
    compare(&rows[row].dist, rows[row].oracle, scale, t, s, p, lower, worst);
}

/* Over all sizes of p, and over all places in cells. */
static struct worst sweep(size_t row, const struct quantile_table *t,
                          const struct quantile_standard *s)
{
    struct worst worst = {0, 0};
    for (int i = 0; i < 1400; i++)
        for (int lower = 0; lower <= 1; lower++) {
            double p = i < 700 ? LEAST * pow(0.5 / LEAST, i / 699.0) : (i - 699.618) / 1401;
            compare_row(row, t, s, p, lower, &worst);
        }
    return worst;
}

static const struct quantile_table *table_of_row(struct arena *a, size_t row,
                                                 struct quantile_standard *s)
{
    struct quantile_edges *edges = NEW(a, struct quantile_edges);
    struct quantile_table *t = NEW(a, struct quantile_table);
    quantile_edges(edges);
    *s = quantile_standard(&rows[row].dist);
    quantile_table_new(a, edges, &s->dist, t);
    return t;
}

START_TEST(quantiles)
{
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < ROWS; i++) {
        struct quantile_standard s;
        const struct quantile_table *t = table_of_row(a, i, &s);
        struct worst w = sweep(i, t, &s);
        ck_assert_msg(w.error <= ALLOWED, "row %zu: %.3g at %.9g", i, w.error, w.p);
        ck_assert_msg(t->way != QUANTILE_EXACT, "row %zu has no table", i);
    }
    arena_free(a);
}
END_TEST

static struct dist random_dist(struct random *r, int i)
{
    double factor = random_log_uniform(r, 1.02, 1e4);
    switch (i % 4) {
    case 0: return (struct dist){DIST_GAMMA, {1, random_log_uniform(r, 1e-3, 3e4)}};
    case 1:
        return (struct dist){DIST_BETA,
                             {random_log_uniform(r, 0.02, 1e4), random_log_uniform(r, 0.02, 1e6)}};
    case 2:
        return (struct dist){DIST_LOGNORMAL,
                             {1, factor, pow(factor, random_uniform(r, -2.5, 2.5))}};
    default:
        return (struct dist){
            DIST_COUNTED,
            {1, factor, floor(random_log_uniform(r, 0.5, 1e4)), random_log_uniform(r, 1e-6, 1e6)}};
    }
}

/* Beside dist_quantile, at some random probabilities. Of 1,600 shapes all but a few have tables. */
START_TEST(random_shapes)
{
    enum { SHAPES = 1600, FEW = 8, EACH = 12 };
    struct quantile_edges edges;
    struct random r = random_seed(11);
    int exact = 0;
    quantile_edges(&edges);
    for (int i = 0; i < SHAPES; i++) {
        struct arena *a = arena_new(NULL);
        struct dist d = random_dist(&r, i);
        struct quantile_table t;
        struct worst w = {0, 0};
        quantile_table_new(a, &edges, &d, &t);
        exact += t.way == QUANTILE_EXACT;
        for (int k = 0; k < EACH; k++)
            compare(&d, own, 0, &t, &(struct quantile_standard){d, 0, 1},
                    random_log_uniform(&r, LEAST, 0.5), k % 2, &w);
        ck_assert_msg(w.error <= ALLOWED, "shape %d (%.9g, %.9g, %.9g, %.9g): %.3g at %.9g",
                      (int)d.shape, d.p[0], d.p[1], d.p[2], d.p[3], w.error, w.p);
        arena_free(a);
    }
    ck_assert_int_le(exact, FEW);
}
END_TEST

/* Down to half of the least part that a sample knows, 2^-45. */
START_TEST(far_ends)
{
    static const double far[] = {9e-10, 1e-10, 2e-11, 3e-12, 1e-13, 0x1p-45};
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < ROWS; i++) {
        struct quantile_standard s;
        struct worst w = {0, 0};
        const struct quantile_table *t = table_of_row(a, i, &s);
        for (size_t k = 0; k < sizeof far / sizeof *far; k++)
            for (int lower = 0; lower <= 1; lower++)
                compare_row(i, t, &s, far[k], lower, &w);
        ck_assert_msg(w.error <= 1e-4, "row %zu: %.3g at %.9g", i, w.error, w.p);
    }
    arena_free(a);
}
END_TEST

/* One table for all that differ by location and scale, and values that come back. */
START_TEST(standards)
{
    static const struct dist same[][2] = {
        {{DIST_GAMMA, {2.385, 3.24}}, {DIST_GAMMA, {7, 3.24}}},
        {{DIST_NORMAL, {2.385, 3.24}}, {DIST_NORMAL, {-7, 0.5}}},
        {{DIST_UNIFORM, {2.385, 3.24}}, {DIST_UNIFORM, {-7, 0.5}}},
        {{DIST_LOGNORMAL, {2.385, 3.24, NAN}}, {DIST_LOGNORMAL, {7, 3.24, NAN}}},
        {{DIST_LOGNORMAL, {2, 3, 5}}, {DIST_LOGNORMAL, {8, 3, 20}}},
        {{DIST_TRIANGULAR, {0, 2, 5}}, {DIST_TRIANGULAR, {-1, 3, 9}}},
        {{DIST_PERT, {0, 2, 5}}, {DIST_PERT, {-1, 3, 9}}},
        {{DIST_COUNTED, {2, 5, 3, 8}}, {DIST_COUNTED, {4, 5, 3, 4}}}};
    for (size_t i = 0; i < sizeof same / sizeof *same; i++) {
        struct quantile_standard one = quantile_standard(&same[i][0]);
        struct quantile_standard other = quantile_standard(&same[i][1]);
        ck_assert_int_eq(one.dist.shape, other.dist.shape);
        ck_assert_mem_eq(one.dist.p, other.dist.p, sizeof one.dist.p);
        for (int k = 0; k < 2; k++) {
            struct quantile_standard s = k == 0 ? one : other;
            double x = s.location + s.scale * dist_quantile(&s.dist, 0.238, 0.762);
            double expected = dist_quantile(&same[i][k], 0.238, 0.762);
            ck_assert_double_eq_tol(x, expected, 1e-12 * fabs(expected));
        }
    }
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("quantile tables");
    TCase *t = tcase_create("tables");
    tcase_set_timeout(t, 0);
    tcase_add_test(t, quantiles);
    tcase_add_test(t, random_shapes);
    tcase_add_test(t, far_ends);
    tcase_add_test(t, standards);
    suite_add_tcase(suite, t);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), ran = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && ran > 0 ? 0 : 1;
}
