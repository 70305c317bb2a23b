/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compound distributions against closed forms, the two methods against each other, and brackets
 * against what they must hold. */
#include "math/aggregate.h"

#include <check.h>
#include <math.h>
#include <string.h>

#include "math/dist.h"
#include "math/fft.h"
#include "math/severity.h"
#include "random.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* One source whose severity is on the lattice; its expected number by sample. */
struct one_source {
    size_t n;
    const double *p; /* of the points 0 .. n - 1 */
    const double *expected;
};

static void add_one(void *ctx, size_t worker, size_t sample, struct intensity *to)
{
    const struct one_source *s = ctx;
    (void)worker;
    to->expected += s->expected[sample];
    for (size_t j = 0; j < s->n; j++) {
        to->down[j] += s->expected[sample] * s->p[j];
        to->up[j] += s->expected[sample] * s->p[j];
    }
}

static struct aggregate_plan plan_of(unsigned log2_points, enum aggregate_method method)
{
    return (struct aggregate_plan){log2_points, 1, 1, 1, isa_best(), method};
}

static struct aggregate find(const struct aggregate_plan *p, struct one_source *s)
{
    struct aggregate x;
    aggregate_find(arena, p, add_one, s, &x, NULL);
    return x;
}

/* ---- the transform itself ---- */

START_TEST(transform_is_the_sum_of_turned_numbers)
{
    struct random r = random_seed(5);
    for (unsigned log2 = 0; log2 <= 9; log2++) {
        size_t n = (size_t)1 << log2;
        double *x = NEW_ARRAY(arena, 2 * n, double), *work = NEW_ARRAY(arena, 2 * n, double);
        double *y = NEW_ARRAY(arena, 2 * n, double);
        struct fft *fft = fft_new(arena, log2);
        for (size_t i = 0; i < 2 * n; i++)
            x[i] = y[i] = random_uniform(&r, -1, 1);
        fft_forward(fft, x, work);
        for (size_t k = 0; k < n; k++) {
            double re = 0, im = 0;
            for (size_t j = 0; j < n; j++) {
                double turn = -2 * M_PI * (double)(j * k % n) / (double)n;
                re += y[2 * j] * cos(turn) - y[2 * j + 1] * sin(turn);
                im += y[2 * j] * sin(turn) + y[2 * j + 1] * cos(turn);
            }
            ck_assert_double_le(fabs(re - x[2 * k]) + fabs(im - x[2 * k + 1]), 1e-12);
        }
        fft_inverse(fft, x, work);
        for (size_t i = 0; i < 2 * n; i++)
            ck_assert_double_le(fabs(x[i] - y[i]), 1e-15);
    }
}
END_TEST

/* ---- closed forms ---- */

static const double methods_agree = 1e-10;

/* Severities that are 1 alone: the number itself is Poisson. */
START_TEST(poisson_is_its_own_sum)
{
    double one[] = {0, 1}, expected = 2.385;
    struct one_source s = {2, one, &expected};
    for (int m = AGGREGATE_USUAL; m <= AGGREGATE_RECURSION; m++) {
        struct aggregate_plan plan = plan_of(6, (enum aggregate_method)m);
        struct aggregate x = find(&plan, &s);
        double p = exp(-expected);
        for (size_t k = 0; k < 40; k++) {
            ck_assert_double_le(fabs(x.low.p[k] - p), 1e-13);
            ck_assert_double_le(fabs(x.high.p[k] - p), 1e-13);
            p *= expected / (double)(k + 1);
        }
    }
}
END_TEST

/* Logarithmic severities make a negative binomial sum (Klugman, Panjer, Willmot, Loss Models,
 * ch. 6.6, from memory): -r log(1 - q) occurrences with P(X = k) = -q^k / (k log(1 - q)) give
 * P(S = k) = Gamma(r + k) / (Gamma(r) k!) (1 - q)^r q^k. */
START_TEST(logarithmic_severities_give_a_negative_binomial)
{
    enum { N = 512 };
    double r = 1.7, q = 0.835, severity[N] = {0}, power = q;
    double expected = -r * log1p(-q);
    for (size_t k = 1; k < N; k++, power *= q)
        severity[k] = -power / ((double)k * log1p(-q));
    struct one_source s = {N, severity, &expected};
    struct aggregate_plan plan = plan_of(9, AGGREGATE_TRANSFORM);
    struct aggregate x = find(&plan, &s);
    double p = pow(1 - q, r);
    for (size_t k = 0; k < N; k++) {
        ck_assert_double_le(fabs(x.low.p[k] - p), methods_agree);
        p *= (r + (double)k) / (double)(k + 1) * q;
    }
}
END_TEST

/* A Poisson number whose mean is gamma with shape r and scale q / (1 - q) is negative binomial. The
 * mean over 16 x 4096 equally probable parts, each at its middle: computed, 4e-7 are left. */
START_TEST(gamma_mixed_poisson_is_a_negative_binomial)
{
    enum { SETS = 16, POINTS = 4096, ALL = SETS * POINTS };
    double r = 1.7, q = 0.435, one[] = {0, 1}, *expected = NEW_ARRAY(arena, ALL, double);
    for (size_t i = 0; i < ALL; i++) {
        double p = ((double)i + 0.5) / ALL;
        expected[i] = dist_gamma_quantile(r, p, 1 - p) * q / (1 - q);
    }
    struct one_source s = {2, one, expected};
    struct aggregate_plan plan = {5, SETS, POINTS, 1, isa_best(), AGGREGATE_USUAL};
    struct aggregate x = find(&plan, &s);
    double p = pow(1 - q, r);
    for (size_t k = 0; k < 20; k++) {
        ck_assert_double_le(fabs(x.low.p[k] - p), 1e-6);
        p *= (r + (double)k) / (double)(k + 1) * q;
    }
}
END_TEST

/* ---- both methods ---- */

static struct one_source random_source(struct random *r, size_t n, double *expected)
{
    double *p = NEW_ARRAY(arena, n, double), sum = 0;
    for (size_t j = 0; j < n; j++)
        sum += p[j] = random_uniform(r, 0, 1) < 0.7 ? 0 : random_uniform(r, 0, 1);
    p[n - 1] += 0.1;
    for (size_t j = 0; j < n; j++)
        p[j] /= sum + 0.1 + random_uniform(r, 0, 0.1); /* some is beyond the lattice */
    *expected = random_uniform(r, 0, 40);
    return (struct one_source){n, p, expected};
}

START_TEST(methods_give_the_same)
{
    struct random r = random_seed(11);
    for (int i = 0; i < 40; i++) {
        double expected;
        unsigned log2 = 4 + (unsigned)i % 7;
        size_t n = (size_t)1 << log2;
        struct one_source s = random_source(&r, n, &expected);
        struct aggregate_plan transform = plan_of(log2, AGGREGATE_TRANSFORM);
        struct aggregate_plan recursion = plan_of(log2, AGGREGATE_RECURSION);
        struct aggregate x = find(&transform, &s), y = find(&recursion, &s);
        for (size_t j = 0; j < n; j++)
            ck_assert_double_le(fabs(x.high.p[j] - y.high.p[j]), methods_agree);
        ck_assert_double_le(fabs(x.high.beyond - y.high.beyond), methods_agree);
    }
}
END_TEST

/* The same bits by every instruction set and any number of threads. */
START_TEST(bits_are_the_same)
{
    enum { SETS = 16, POINTS = 4 };
    struct random r = random_seed(3);
    double expected[SETS * POINTS], unused;
    struct one_source s = random_source(&r, 1000, &unused);
    for (size_t i = 0; i < SETS * POINTS; i++)
        expected[i] = random_uniform(&r, 0, 100);
    s.expected = expected;
    struct aggregate_plan plan = {10, SETS, POINTS, 1, ISA_plain, AGGREGATE_TRANSFORM};
    struct aggregate x = find(&plan, &s);
    for (int i = 0; i < ISA_COUNT; i++)
        for (size_t threads = 1; threads <= 3; threads++) {
            plan.threads = threads;
            plan.isa = isa_runs((enum isa)i) ? (enum isa)i : ISA_plain;
            struct aggregate y = find(&plan, &s);
            ck_assert_mem_eq(x.low.p, y.low.p, x.n * sizeof *x.low.p);
            ck_assert_mem_eq(x.high.below, y.high.below, x.n * sizeof *x.high.below);
        }
}
END_TEST

/* ---- brackets ---- */

struct two_sources {
    struct lattice lattice;
    struct severity of[2];
    double expected[2];
};

static void add_two(void *ctx, size_t worker, size_t sample, struct intensity *to)
{
    const struct two_sources *s = ctx;
    (void)worker;
    (void)sample;
    for (int k = 0; k < 2; k++) {
        to->expected += s->expected[k];
        severity_add(&s->lattice, &s->of[k], s->expected[k], (struct severity_place){0, 0},
                     to->down, to->up);
    }
}

/* A single occurrence of a gamma of shape 3 and a constant between points. */
static struct aggregate bracketed(unsigned log2, double step)
{
    struct dist gamma = {.shape = DIST_GAMMA, .p = {2.385, 3}};
    double constant = 1.437;
    struct two_sources s = {.lattice = {step, (size_t)1 << log2}, .expected = {0.83, 1.71}};
    s.of[0] = severity_of_dist(arena, &s.lattice, &gamma, 1.3, 0.21);
    s.of[1] = severity_of_amounts(arena, &s.lattice, 1, &constant);
    struct aggregate_plan plan = plan_of(log2, AGGREGATE_TRANSFORM);
    struct aggregate x;
    aggregate_find(arena, &plan, add_two, &s, &x, NULL);
    return x;
}

/* The exact one lies between the ends of every lattice; so the ends of a finer one lie between
 * those of a coarser one. And P(S = 0) = exp(-expected number) in the upper end. */
START_TEST(finer_ends_lie_inside_coarser_ones)
{
    struct aggregate coarse = bracketed(8, 0.16), fine = bracketed(12, 0.01);
    for (size_t j = 0; j < coarse.n; j++) {
        size_t k = 16 * j;
        ck_assert_double_le(fine.low.below[k], coarse.low.below[j] + 1e-12);
        ck_assert_double_ge(fine.high.below[k], coarse.high.below[j] - 1e-12);
        ck_assert_double_ge(fine.low.below[k], fine.high.below[k]);
    }
    ck_assert_double_le(fabs(fine.high.p[0] - exp(-2.54)), 1e-15);
    ck_assert_double_le(fine.low.below[200] - fine.high.below[200], 0.02);
}
END_TEST

/* P(S <= 1.4) by hand: nothing, or the gamma once (S = 1.3 X + 0.21) or twice below 1.4; the
 * constant is above. Twice: by a sum over the first. */
START_TEST(ends_hold_the_exact_value)
{
    struct dist gamma = {.shape = DIST_GAMMA, .p = {2.385, 3}};
    struct aggregate x = bracketed(12, 0.01);
    double at = 1.4, l = 0.83, once = dist_cdf(&gamma, (at - 0.21) / 1.3), twice = 0;
    enum { PARTS = 20000 };
    for (int i = 0; i < PARTS; i++) {
        double p0 = dist_cdf(&gamma, (at - 0.42) / 1.3 * i / PARTS);
        double p1 = dist_cdf(&gamma, (at - 0.42) / 1.3 * (i + 1) / PARTS);
        twice += (p1 - p0) * dist_cdf(&gamma, (at - 0.42) / 1.3 * (1 - (i + 0.5) / PARTS));
    }
    double exact = exp(-2.54) * (1 + l * once + l * l / 2 * twice);
    /* three times: below 1.4 - 0.63; the probability is below that of all three below it */
    double more = exp(-2.54) * pow(l * dist_cdf(&gamma, (at - 0.63) / 1.3), 3) / 6;
    ck_assert_double_ge(x.low.below[140] + 1e-9, exact);
    ck_assert_double_le(x.high.below[140], exact + more + 1e-9);
    ck_assert_double_le(x.low.below[140] - x.high.below[140], 0.003);
}
END_TEST

/* Two independent uniform amounts: triangular. */
START_TEST(sums_of_severities)
{
    struct dist uniform = {.shape = DIST_UNIFORM, .p = {0, 1}};
    for (unsigned k = 6; k <= 10; k += 4) {
        struct lattice l = {1.0 / (1 << k), (size_t)4 << k};
        struct severity x = severity_of_dist(arena, &l, &uniform, 1, 0);
        struct severity y = severity_of_dist(arena, &l, &uniform, -1, 1);
        struct severity s = severity_sum(arena, &l, &x, &y);
        double down = 0, up = 0;
        for (size_t j = s.first; j < s.end; j++) {
            double z = (double)j * l.step;
            down += s.down[j - s.first];
            up += s.up[j - s.first];
            double exact = z <= 1 ? z * z / 2 : z < 2 ? 1 - (2 - z) * (2 - z) / 2 : 1;
            ck_assert_double_ge(down, exact - 1e-12);
            ck_assert_double_le(up, exact + 1e-12);
            ck_assert_double_le(down - up, 3 * l.step);
        }
        ck_assert_double_le(fabs(down - 1) + fabs(up - 1), 1e-12);
    }
}
END_TEST

START_TEST(amounts_at_points_stay_exact)
{
    struct lattice l = {0.2, 64};
    for (size_t j = 0; j < 70; j++) {
        struct severity_place at = severity_place_of(&l, 0.2 * (double)j);
        ck_assert_uint_eq(at.down, j < 64 ? j : 64);
        ck_assert_uint_eq(at.up, at.down);
    }
    struct severity_place between = severity_place_of(&l, 0.5), below = severity_place_of(&l, -3);
    ck_assert(between.down == 2 && between.up == 3 && below.down == 0 && below.up == 0);
}
END_TEST

/* ---- what is read off ---- */

/* 0 with 1/2, 1 with 3/10, 2 with 1/5: the worst 40 % are all of 2 and half of 40 % of 1. */
START_TEST(quantiles_and_shortfall_by_hand)
{
    double p[] = {0.5, 0.3, 0.2, 0}, below[] = {0.5, 0.8, 1, 1};
    struct aggregate x = {4, {p, below, 0}, {p, below, 0}};
    ck_assert_uint_eq(aggregate_quantile(&x, &x.low, 0.5), 0);
    ck_assert_uint_eq(aggregate_quantile(&x, &x.low, 0.51), 1);
    ck_assert_uint_eq(aggregate_quantile(&x, &x.low, 0.99), 2);
    ck_assert_double_le(fabs(aggregate_exceedance(&x.low, 0) - 0.5), 1e-15);
    ck_assert_double_le(fabs(aggregate_shortfall(&x, &x.low, 0.7, 0.6) - 1.5), 1e-14);
    ck_assert_double_le(fabs(aggregate_shortfall(&x, &x.low, 0.7, 0.9) - 2), 1e-14);
}
END_TEST

/* One occurrence at most is likely: the tail of S is that of X, and beyond the lattice the mean
 * tells what is there. Exponential X with mean 1, expected 1e-3 times: the worst 1e-4 have by hand
 * a mean of log(10) + 1, but for what two occurrences add, less than 1e-3 of that, and for a step.
 * Rounded up, X has the mean 1 / (1 - exp(-step)) in steps. */
START_TEST(shortfall_reaches_beyond_the_lattice)
{
    struct dist exponential = {.shape = DIST_GAMMA, .p = {1, 1}};
    double expected = 1e-3;
    struct lattice l = {1.0 / 256, 1024};
    struct two_sources s = {.lattice = l, .expected = {expected, 0}};
    s.of[0] = s.of[1] = severity_of_dist(arena, &l, &exponential, 1, 0);
    struct aggregate_plan plan = plan_of(10, AGGREGATE_TRANSFORM);
    struct aggregate x;
    aggregate_find(arena, &plan, add_two, &s, &x, NULL);
    double es = aggregate_shortfall(&x, &x.high, expected / -expm1(-l.step), 1 - 1e-4) * l.step;
    ck_assert_double_gt(x.high.beyond, 1e-5);
    ck_assert_double_le(fabs(es - (log(10) + 1)), 0.01);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("aggregate");
    TCase *t = tcase_create("aggregate");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, transform_is_the_sum_of_turned_numbers);
    tcase_add_test(t, poisson_is_its_own_sum);
    tcase_add_test(t, logarithmic_severities_give_a_negative_binomial);
    tcase_add_test(t, gamma_mixed_poisson_is_a_negative_binomial);
    tcase_add_test(t, methods_give_the_same);
    tcase_add_test(t, bits_are_the_same);
    tcase_add_test(t, finer_ends_lie_inside_coarser_ones);
    tcase_add_test(t, ends_hold_the_exact_value);
    tcase_add_test(t, sums_of_severities);
    tcase_add_test(t, amounts_at_points_stay_exact);
    tcase_add_test(t, quantiles_and_shortfall_by_hand);
    tcase_add_test(t, shortfall_reaches_beyond_the_lattice);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
