/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sampling: closed forms, honest errors, averages over what varies, and the same bytes whatever
 * computes them. */
#include "eval/sampling.h"

#include "base/parallel.h"
#include "math/statistics.h"
#include "mean_test.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static struct mean_world w;
static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
    mean_world_open(&w, arena);
}

static void teardown(void)
{
    arena_free(arena);
}

static struct dist lognormal(double median, double error_factor)
{
    return (struct dist){DIST_LOGNORMAL, {median, error_factor, NAN}, 0, NULL, NULL};
}

static struct dist gamma_of(double mean, double shape)
{
    return (struct dist){DIST_GAMMA, {mean, shape}, 0, NULL, NULL};
}

static node_id times(node_id x, node_id y)
{
    return graph_op2(w.g, OP_MULTIPLY, x, y);
}

/* Samples of some nodes; the evaluation and the means are brought up to date. */
static struct sampling sample(const struct sampling_plan *p, size_t n, const node_id *roots)
{
    struct sampling s;
    struct sampler *sampler;
    mean_of(&w, roots[0]);
    ck_assert_int_eq(sampler_new(arena, w.m, p, n, roots, &sampler, NULL), OHMEN_OK);
    ck_assert_int_eq(sampler_run(arena, sampler, n, roots, &s, NULL, NULL), OHMEN_OK);
    ck_assert_uint_eq(s.n_roots, n);
    return s;
}

static struct sampled mean_in(const struct sampling *s, size_t k)
{
    return statistics_mean(s->sets, s->points, s->values[k]);
}

/* ---- closed forms ---- */

/* A rate that two relays of one type share, its square, and the risk of a hazard: of the 5, 50 and
 * 95 % points of lognormals the sample must be within 4 standard errors. */
START_TEST(points_of_a_product)
{
    struct sampling_plan p = sampling_defaults();
    mean_world_set(&w, 0, lognormal(0.01, 5));
    mean_world_set(&w, 1, lognormal(3, 2));
    node_id x = mean_input(&w, 0), y = mean_input(&w, 1);
    node_id roots[] = {times(times(x, x), y), x};
    double s = sqrt(4 * pow(mean_sigma(5), 2) + pow(mean_sigma(2), 2)), z = 1.6448536269514722;
    double want[] = {3e-4 * exp(-z * s), 3e-4, 3e-4 * exp(z * s)};
    double mean = 3e-4 * exp(s * s / 2), probability[] = {0.05, 0.5, 0.95};
    struct sampled q[3];
    p.log2_points = 9;
    struct sampling got = sample(&p, 2, roots);
    ck_assert_uint_eq(got.sets, 16);
    statistics_quantiles(arena, got.sets, got.points, got.values[0], 3, probability, q);
    for (int k = 0; k < 3; k++)
        ck_assert_msg(fabs(q[k].value - want[k]) <= 4 * q[k].error && q[k].error < 0.05 * want[k],
                      "%g +- %g, not %g", q[k].value, q[k].error, want[k]);
    struct sampled m = mean_in(&got, 0);
    ck_assert(fabs(m.value - mean) <= 4 * m.error && m.error < 0.1 * mean);
    /* The second root is the input itself. */
    m = mean_in(&got, 1);
    ck_assert(fabs(m.value - dist_mean(&w.dist[0])) <= 4 * m.error);
}
END_TEST

/* The 95 % interval of the mean over 400 seeds holds the exact value in 92 to 98 %. */
static int intervals_that_hold(struct sampling_plan p, node_id root, double want)
{
    enum { SEEDS = 400 };
    int held = 0;
    for (uint64_t seed = 1; seed <= SEEDS; seed++) {
        p.seed = seed;
        struct sampling got = sample(&p, 1, &root);
        struct sampled m = mean_in(&got, 0);
        held += fabs(m.value - want) <= statistics_t95(got.sets) * m.error;
    }
    return held;
}

/* x^2 y / (1 + z) with z uniform on 0 .. 1: E[x^2] E[y] ln 2. */
START_TEST(errors_are_honest)
{
    static const enum draw_method methods[] = {DRAW_SCRAMBLED, DRAW_HYPERCUBE, DRAW_PLAIN};
    mean_world_set(&w, 0, gamma_of(0.3, 4.5));
    mean_world_set(&w, 1, lognormal(2, 1.5));
    mean_world_set(&w, 2, (struct dist){DIST_UNIFORM, {0, 1}, 0, NULL, NULL});
    node_id x = mean_input(&w, 0), one = mean_const(&w, 1);
    node_id below = graph_op2(w.g, OP_ADD, one, mean_input(&w, 2));
    node_id root = graph_op2(w.g, OP_DIVIDE, times(times(x, x), mean_input(&w, 1)), below);
    double want = 0.09 * (1 + 1 / 4.5) * dist_mean(&w.dist[1]) * log(2);
    for (int k = 0; k < 3; k++) {
        struct sampling_plan p = sampling_defaults();
        p.method = methods[k];
        int held = intervals_that_hold(p, root, want);
        ck_assert_msg(held >= 368 && held <= 392, "method %d: %d of 400 intervals hold", k, held);
    }
}
END_TEST

/* The heavy tail of a lognormal with sigma 2 is not cut: its mean within 4 standard errors of
 * 4096 sets. */
START_TEST(heavy_tails)
{
    struct sampling_plan p = sampling_defaults();
    p.log2_points = 8;
    p.most_batches = 256;
    mean_world_set(&w, 0, lognormal(1, exp(2 * 1.6448536269514722)));
    node_id x = mean_input(&w, 0);
    struct sampling got = sample(&p, 1, &x);
    struct sampled m = mean_in(&got, 0);
    ck_assert_msg(fabs(m.value - exp(2)) <= 4 * m.error && m.error < 0.01 * exp(2),
                  "%.6g +- %.3g, not %.6g", m.value, m.error, exp(2));
}
END_TEST

/* ---- what varies ---- */

/* The load v of each fault varies, its price k is unknown. */
START_TEST(what_varies_is_averaged_over)
{
    struct sampling_plan p = sampling_defaults();
    mean_world_set(&w, 0, lognormal(2, 3));
    mean_world_set(&w, 1, lognormal(5, 1.8));
    mean_world_set(&w, 2, gamma_of(1.5, 2));
    w.varies[1] = w.varies[2] = true;
    node_id k = mean_input(&w, 0), v = mean_input(&w, 1), u = mean_input(&w, 2);
    node_id square = times(times(v, k), v), both = times(times(v, u), square);
    node_id roots[] = {times(k, v),
                       square,
                       graph_op2(w.g, OP_ADD, square, times(k, u)),
                       both,
                       graph_op1(w.g, OP_SQRT, times(k, v)),
                       k};
    struct sampling got = sample(&p, 6, roots);
    double s = mean_sigma(1.8), v1 = 5 * exp(s * s / 2), v2 = 25 * exp(2 * s * s);
    double v3 = 125 * exp(4.5 * s * s), root = sqrt(5) * exp(s * s / 8);
    for (size_t i = 0; i < got.sets * got.points; i++) {
        double x = got.values[5][i];
        ck_assert(got.values[0][i] == eval_value(w.v, v) * x);
        ck_assert(fabs(got.values[0][i] - v1 * x) <= 1e-12 * v1 * x);
        ck_assert(fabs(got.values[1][i] - v2 * x) <= 1e-9 * v2 * x);
        ck_assert(fabs(got.values[2][i] - (v2 + 1.5) * x) <= 1e-9 * v2 * x);
        ck_assert(fabs(got.values[3][i] - v3 * 1.5 * x) <= 1e-7 * v3 * x);
        ck_assert(fabs(got.values[4][i] - root * sqrt(x)) <= 1e-9 * root * sqrt(x));
    }
}
END_TEST

/* Three that vary, twice each: by the points that are the same in all samples. */
START_TEST(three_that_vary)
{
    struct sampling_plan p = sampling_defaults();
    double want = 1;
    node_id product = mean_const(&w, 1);
    for (uint32_t i = 0; i < 3; i++) {
        mean_world_set(&w, i, gamma_of(1, 9));
        w.varies[i] = true;
        product = times(product, mean_input(&w, i));
        want *= 1 + 1 / 9.0;
    }
    mean_world_set(&w, 3, lognormal(2, 3));
    node_id roots[] = {times(times(product, product), mean_input(&w, 3)), mean_input(&w, 3)};
    struct sampling got = sample(&p, 2, roots);
    double ratio = got.values[0][0] / got.values[1][0];
    ck_assert_msg(fabs(ratio - want) <= 0.01 * want, "%g, not %g", ratio, want);
    for (size_t i = 0; i < got.sets * got.points; i++)
        ck_assert(fabs(got.values[0][i] - ratio * got.values[1][i]) <= 1e-12 * got.values[0][i]);
}
END_TEST

/* ---- the same bytes ---- */

enum { ROOTS = 4 };

/* Products, a diagram whose two variables share a rate, and an average over what varies. */
static void make_roots(node_id roots[ROOTS])
{
    for (uint32_t i = 0; i < 6; i++)
        mean_world_set(&w, i, i % 2 ? gamma_of(0.1, 0.5 + i) : lognormal(0.02, 1.5 + 0.3 * i));
    w.varies[5] = true;
    node_id x[6];
    for (uint32_t i = 0; i < 6; i++)
        x[i] = mean_input(&w, i);
    node_id d = graph_diagram(w.g, mean_all_of(arena, 2), 2, (node_id[]){x[0], times(x[0], x[2])});
    roots[0] = times(times(x[0], x[1]), x[2]);
    roots[1] = graph_pick(w.g, d, 1);
    roots[2] = times(times(x[5], x[3]), x[5]);
    roots[3] = graph_op(w.g, OP_SUM, 3, (node_id[]){roots[0], roots[1], roots[2]});
}

static bool same_values(const struct sampling *a, const struct sampling *b, size_t k, size_t l)
{
    return a->sets == b->sets && a->points == b->points &&
           memcmp(a->values[k], b->values[l], a->sets * a->points * sizeof(double)) == 0;
}

START_TEST(threads_blocks_and_kernels_do_not_count)
{
    static const size_t threads[] = {1, 2, 3, PARALLEL_MOST}, blocks[] = {0, 1, 7, 64, 100, 4096};
    node_id roots[ROOTS];
    make_roots(roots);
    struct sampling_plan p = sampling_defaults();
    p.isa = ISA_plain;
    struct sampling want = sample(&p, ROOTS, roots);
    for (int isa = 0; isa < ISA_COUNT; isa++)
        for (size_t t = 0; t < 4 && isa_runs((enum isa)isa); t++)
            for (size_t b = 0; b < 6; b++) {
                p.isa = (enum isa)isa;
                p.threads = threads[t];
                p.block = blocks[b];
                struct sampling got = sample(&p, ROOTS, roots);
                for (size_t k = 0; k < ROOTS; k++)
                    ck_assert(same_values(&want, &got, k, k));
            }
}
END_TEST

START_TEST(company_does_not_count)
{
    node_id roots[ROOTS];
    make_roots(roots);
    struct sampling_plan p = sampling_defaults();
    struct sampling all = sample(&p, ROOTS, roots), one;
    struct sampler *sampler;
    ck_assert_int_eq(sampler_new(arena, w.m, &p, ROOTS, roots, &sampler, NULL), OHMEN_OK);
    for (size_t k = 0; k < ROOTS; k++) {
        ck_assert_int_eq(sampler_run(arena, sampler, 1, &roots[k], &one, NULL, NULL), OHMEN_OK);
        ck_assert(same_values(&all, &one, k, 0));
        ck_assert(fabs(all.values[3][k] - (all.values[0][k] + all.values[1][k] +
                                           all.values[2][k])) <= 1e-15 * all.values[3][k]);
    }
    p.seed++;
    struct sampling other = sample(&p, ROOTS, roots);
    ck_assert(!same_values(&all, &other, 0, 0));
}
END_TEST

/* More batches leave those before as they are. */
START_TEST(batches_come_one_after_the_other)
{
    node_id roots[ROOTS];
    make_roots(roots);
    struct sampling_plan p = sampling_defaults();
    struct sampling one = sample(&p, ROOTS, roots);
    p.most_batches = 3;
    struct sampling three = sample(&p, ROOTS, roots);
    ck_assert_uint_eq(three.sets, 3 * one.sets);
    for (size_t k = 0; k < ROOTS; k++)
        ck_assert(memcmp(one.values[k], three.values[k], one.sets * one.points * sizeof(double)) ==
                  0);
}
END_TEST

/* ---- when to stop ---- */

START_TEST(stops_when_precise)
{
    node_id roots[ROOTS];
    make_roots(roots);
    struct sampling_plan p = sampling_defaults();
    p.most_batches = 64;
    p.precision = 0.004;
    p.n_judged = 1;
    struct sampling got = sample(&p, ROOTS, roots);
    struct sampled m = mean_in(&got, 0);
    ck_assert(got.reached && got.batches > 1 && got.batches < 64);
    ck_assert(m.error <= 0.004 * m.value);
    m = statistics_mean(got.sets - SAMPLING_BATCH, got.points, got.values[0]);
    ck_assert(m.error > 0.004 * m.value);
    p.precision = 1e-9;
    p.most_batches = 2;
    got = sample(&p, ROOTS, roots);
    ck_assert(!got.reached && !got.interrupted && got.batches == 2);
}
END_TEST

struct watcher {
    size_t calls, stop_at;
};

static bool watch(void *ctx, size_t batches, size_t most)
{
    struct watcher *x = ctx;
    ck_assert_uint_eq(batches, x->calls++);
    ck_assert_uint_eq(most, 5);
    return batches != x->stop_at;
}

START_TEST(stops_when_told)
{
    node_id roots[ROOTS];
    make_roots(roots);
    struct watcher x = {0, 3};
    struct sampling_plan p = sampling_defaults();
    p.most_batches = 5;
    p.watch = watch;
    p.watch_ctx = &x;
    struct sampling got = sample(&p, ROOTS, roots);
    ck_assert(got.interrupted && got.batches == 3 && got.sets == 3 * SAMPLING_BATCH);
    x = (struct watcher){0, 5};
    got = sample(&p, ROOTS, roots);
    ck_assert(!got.interrupted && got.batches == 5);
}
END_TEST

/* ---- what cannot be sampled ---- */

START_TEST(what_is_not_finite)
{
    struct sampling_plan p = sampling_defaults();
    struct sampling s = {.sets = 7};
    struct sampler *sampler;
    ohmen_error e = OHMEN_ERROR_INIT;
    node_id culprit = NODE_NONE;
    mean_world_set(&w, 0, lognormal(1, 3));
    node_id x = mean_input(&w, 0), fine = times(x, x);
    node_id half = graph_op2(w.g, OP_SUBTRACT, x, mean_const(&w, 0.5));
    node_id roots[] = {fine, graph_op1(w.g, OP_SQRT, half)};
    ck_assert_int_eq(eval_point(w.v, NULL, NULL), OHMEN_OK);
    ck_assert_int_eq(sampler_new(arena, w.m, &p, 2, roots, &sampler, &e), OHMEN_OK);
    ck_assert_int_eq(sampler_run(arena, sampler, 2, roots, &s, &culprit, &e), OHMEN_COMPUTE);
    ck_assert_uint_eq(culprit, roots[1]);
    ck_assert_uint_eq(s.sets, 7);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("sampling");
    TCase *t = tcase_create("sampling");
    tcase_set_timeout(t, 240);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, points_of_a_product);
    tcase_add_test(t, errors_are_honest);
    tcase_add_test(t, heavy_tails);
    tcase_add_test(t, what_varies_is_averaged_over);
    tcase_add_test(t, three_that_vary);
    tcase_add_test(t, threads_blocks_and_kernels_do_not_count);
    tcase_add_test(t, company_does_not_count);
    tcase_add_test(t, batches_come_one_after_the_other);
    tcase_add_test(t, stops_when_precise);
    tcase_add_test(t, stops_when_told);
    tcase_add_test(t, what_is_not_finite);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
