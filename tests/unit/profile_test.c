/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Profiles (math/profile.h): hand examples, and random ones whose probabilities are whole numbers
 * of 64ths and whose values are whole, so that a sum over everything, in whole numbers, tells what
 * is right without a rounding. Owns an arena for each test. */
#include <check.h>
#include <math.h>
#include <stdlib.h>

#include "math/profile.h"
#include "math/rollback.h"
#include "random.h"

enum { PARTS = 64, VALUES = 12, ROUNDS = 20000, MANY = 1 << 20 };

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

static void near(double got, double want, double off)
{
    ck_assert_msg(fabs(got - want) <= off, "%.17g, not %.17g", got, want);
}

static void is(struct profile p, size_t n, const double *value, const double *probability)
{
    ck_assert_uint_eq(p.n, n);
    for (size_t i = 0; i < n; i++) {
        ck_assert(p.value[i] == value[i] && !signbit(p.value[i]) == !signbit(value[i]));
        near(p.probability[i], probability[i], 1e-16);
    }
}

/* ---- whole numbers ---- */

/* weight[x] 64ths of the value x. */
struct whole {
    int weight[VALUES];
};

static struct whole draw_whole(struct random *r)
{
    struct whole w = {{0}};
    size_t few = 1 + random_index(r, 5);
    int at[5] = {0};
    for (size_t i = 0; i < few; i++)
        at[i] = (int)random_index(r, VALUES);
    for (int i = 0; i < PARTS; i++)
        w.weight[at[random_index(r, few)]]++;
    return w;
}

/* In an order of its own, with equal values apart. */
static struct profile profile_of_whole(struct random *r, const struct whole *w)
{
    double value[2 * VALUES] = {0}, p[2 * VALUES] = {0};
    size_t n = 0;
    int first = (int)random_index(r, VALUES);
    for (int k = 0; k < VALUES; k++) {
        int x = (first + k) % VALUES, part = w->weight[x] / 2;
        value[n] = x, p[n++] = (double)part / PARTS;
        value[n] = x, p[n++] = (double)(w->weight[x] - part) / PARTS;
    }
    return profile_of(arena, n, value, p, MANY);
}

/* ---- by hand ---- */

START_TEST(making_by_hand)
{
    double x[] = {7, -0.0, 2.5, 0, 7}, p[] = {0.125, 0.25, 0, 0.5, 0.125};
    struct profile one = profile_of(arena, 5, x, p, 4);
    is(one, 2, (double[]){0, 7}, (double[]){0.75, 0.25});
    ck_assert(!one.is_merged);
    is(profile_shift(arena, &one, -7), 2, (double[]){-7, 0}, (double[]){0.75, 0.25});
    is(profile_add(arena, &one, &one, 4), 3, (double[]){0, 7, 14},
       (double[]){0.5625, 0.375, 0.0625});
    struct profile parts[] = {one, profile_point(arena, 7), profile_point(arena, -3)};
    is(profile_mix(arena, 3, parts, (double[]){0.5, 0.25, 0.25}, 4), 3, (double[]){-3, 0, 7},
       (double[]){0.25, 0.375, 0.375});
}
END_TEST

/* 0 and 7 with 3/4 and 1/4: mean 7/4, variance 49 * 3/16; with R = 7 / ln 2 the equivalent is
 * -R ln(3/4 + 1/8) = 7 log2(8/7). */
START_TEST(moments_by_hand)
{
    double x[] = {0, 7}, p[] = {0.75, 0.25};
    struct profile one = profile_of(arena, 2, x, p, 4);
    near(profile_mean(&one), 1.75, 0);
    near(profile_deviation(&one), 7 * sqrt(3) / 4, 1e-15);
    near(profile_equivalent(&one, 7 / log(2)), 7 * log2(8.0 / 7), 2e-15);
    near(profile_equivalent(&one, INFINITY), 1.75, 0);
    struct profile rare = profile_of(arena, 2, (double[]){-4000, 4000}, (double[]){0x1p-60, 1}, 4);
    near(profile_equivalent(&rare, 1 / log(2)), -4000 + 60, 1e-12); /* -log2(2^4000 2^-60) */
    near(profile_at_most(&one, -1e-9), 0, 0);
    near(profile_at_most(&one, 0), 0.75, 0);
    near(profile_at_most(&one, 7), 1, 0);
    near(profile_above(&one, 0), 0.25, 0);
    near(profile_above(&one, 7), 0, 0);
    near(profile_quantile(&one, 0), 0, 0);
    near(profile_quantile(&one, 0.75), 0, 0);
    near(profile_quantile(&one, nextafter(0.75, 1)), 7, 0);
    near(profile_quantile(&one, 1), 7, 0);
}
END_TEST

/* A: 1 or 3, B: 0 or 4, evenly: equal means, A dominates second. C: 1 or 4: first over both. D: 0
 * for certain and 0.01 more at times is first over 0. */
START_TEST(dominance_by_hand)
{
    double half[] = {0.5, 0.5};
    struct profile a = profile_of(arena, 2, (double[]){1, 3}, half, 4);
    struct profile b = profile_of(arena, 2, (double[]){0, 4}, half, 4);
    struct profile c = profile_of(arena, 2, (double[]){1, 4}, half, 4);
    struct profile d =
        profile_of(arena, 2, (double[]){0, 0.01}, (double[]){1 - 0x1p-40, 0x1p-40}, 4);
    struct profile zero = profile_point(arena, 0);
    ck_assert_int_eq(profile_dominates(&a, &b), PROFILE_SECOND);
    ck_assert_int_eq(profile_dominates(&b, &a), PROFILE_NONE);
    ck_assert_int_eq(profile_dominates(&c, &a), PROFILE_FIRST);
    ck_assert_int_eq(profile_dominates(&c, &b), PROFILE_FIRST);
    ck_assert_int_eq(profile_dominates(&a, &c), PROFILE_NONE);
    ck_assert_int_eq(profile_dominates(&a, &a), PROFILE_NONE);
    ck_assert_int_eq(profile_dominates(&d, &zero), PROFILE_FIRST);
    ck_assert_int_eq(profile_dominates(&zero, &d), PROFILE_NONE);
}
END_TEST

/* ---- against everything ---- */

/* What utilities that are steps or hinges say: none worse, one better. */
static enum profile_dominance by_all_utilities(const struct whole *p, const struct whole *q)
{
    bool worse[2] = {false}, better[2] = {false};
    for (int t = 0; t < VALUES; t++) {
        int step = 0, hinge = 0;
        for (int x = 0; x < VALUES; x++) {
            step += (p->weight[x] - q->weight[x]) * (x >= t);
            hinge += (p->weight[x] - q->weight[x]) * (x < t ? x : t);
        }
        worse[0] = worse[0] || step < 0;
        better[0] = better[0] || step > 0;
        worse[1] = worse[1] || hinge < 0;
        better[1] = better[1] || hinge > 0;
    }
    if (better[0] && !worse[0])
        return PROFILE_FIRST;
    return better[1] && !worse[1] ? PROFILE_SECOND : PROFILE_NONE;
}

START_TEST(dominance_is_what_all_utilities_say)
{
    struct random r = random_seed(61);
    int count[3] = {0};
    for (int i = 0; i < ROUNDS; i++) {
        struct whole w[] = {draw_whole(&r), draw_whole(&r)};
        struct profile p = profile_of_whole(&r, &w[0]), q = profile_of_whole(&r, &w[1]);
        enum profile_dominance want = by_all_utilities(&w[0], &w[1]);
        ck_assert_int_eq(profile_dominates(&p, &q), want);
        count[want]++;
    }
    ck_assert_int_gt(count[PROFILE_SECOND], ROUNDS / 50);
    ck_assert_int_gt(count[PROFILE_FIRST], ROUNDS / 10);
}
END_TEST

/* The same with values that are not whole and far from 0, where a sum of doubles would round. */
START_TEST(dominance_does_not_round)
{
    struct random r = random_seed(62);
    for (int i = 0; i < 2000; i++) {
        struct whole w[] = {draw_whole(&r), draw_whole(&r)};
        struct profile p = profile_of_whole(&r, &w[0]), q = profile_of_whole(&r, &w[1]);
        double steps[] = {0.1, 0x1p-20, 1e6};
        struct profile shifted[2];
        double by = random_uniform(&r, -1e9, 1e9), step = random_pick(&r, steps);
        for (int k = 0; k < 2; k++) {
            const struct profile *of = k ? &q : &p;
            double *value = NEW_ARRAY(arena, of->n, double);
            for (size_t j = 0; j < of->n; j++)
                value[j] = step == 0.1 ? of->value[j] : of->value[j] * step + floor(by);
            shifted[k] = profile_of(arena, of->n, value, of->probability, MANY);
        }
        ck_assert_int_eq(profile_dominates(&shifted[0], &shifted[1]),
                         by_all_utilities(&w[0], &w[1]));
    }
}
END_TEST

/* What falls behind by u and v and makes it up by v and u is level again, whatever their sum rounds
 * to; and 1 for certain has less than the mean of 2^-60 and 2. */
START_TEST(dominance_of_ties_to_the_last_bit)
{
    struct random r = random_seed(68);
    for (int i = 0; i < 2000; i++) {
        double u = random_uniform(&r, 0.01, 0.4), v = random_uniform(&r, 0.01, 0.4);
        struct profile low =
            profile_of(arena, 3, (double[]){0, 1, 10}, (double[]){u, v, 1 - u - v}, 4);
        struct profile high =
            profile_of(arena, 3, (double[]){2, 3, 10}, (double[]){v, u, 1 - u - v}, 4);
        ck_assert_int_eq(profile_dominates(&high, &low), PROFILE_FIRST);
        ck_assert_int_eq(profile_dominates(&low, &high), PROFILE_NONE);
    }
    struct profile one = profile_point(arena, 1);
    struct profile two = profile_of(arena, 2, (double[]){0x1p-60, 2}, (double[]){0.5, 0.5}, 4);
    ck_assert_int_eq(profile_dominates(&one, &two), PROFILE_NONE);
}
END_TEST

/* Probabilities whose sum is 1 but for rounding: above all values that does not count. */
START_TEST(sums_that_round)
{
    double x[10], p[10];
    for (int i = 0; i < 10; i++) {
        x[i] = i;
        p[i] = 0.1;
    }
    struct profile tenths = profile_of(arena, 10, x, p, MANY), nine = profile_point(arena, 9);
    ck_assert_int_eq(profile_dominates(&nine, &tenths), PROFILE_FIRST);
    x[9] = 9.5;
    tenths = profile_of(arena, 10, x, p, MANY);
    struct profile best = profile_point(arena, 9.5);
    ck_assert_int_eq(profile_dominates(&best, &tenths), PROFILE_FIRST);
    struct profile thrice = profile_of(arena, 3, x, (double[]){1.0 / 3, 1.0 / 3, 1.0 / 3}, 4);
    struct profile two = profile_point(arena, 2);
    ck_assert_int_eq(profile_dominates(&two, &thrice), PROFILE_FIRST);
}
END_TEST

START_TEST(sums_and_mixtures_are_those_of_all_pairs)
{
    struct random r = random_seed(63);
    for (int i = 0; i < 2000; i++) {
        struct whole w[] = {draw_whole(&r), draw_whole(&r)};
        struct profile p[] = {profile_of_whole(&r, &w[0]), profile_of_whole(&r, &w[1])};
        struct profile sum = profile_add(arena, &p[0], &p[1], MANY);
        struct profile mix = profile_mix(arena, 2, p, (double[]){0.375, 0.625}, MANY);
        for (int x = 0; x < 2 * VALUES; x++) {
            int pairs = 0, mixed = 0;
            for (int k = 0; k < VALUES; k++) {
                for (int m = 0; m < VALUES; m++)
                    pairs += (k + m <= x) * w[0].weight[k] * w[1].weight[m];
                mixed += (k <= x) * (3 * w[0].weight[k] + 5 * w[1].weight[k]);
            }
            ck_assert(profile_at_most(&sum, x) == (double)pairs / PARTS / PARTS);
            ck_assert(profile_above(&sum, x) == 1 - (double)pairs / PARTS / PARTS);
            ck_assert(profile_at_most(&mix, x) == (double)mixed / PARTS / 8);
        }
        for (size_t k = 1; k < sum.n; k++)
            ck_assert(sum.value[k - 1] < sum.value[k] && sum.probability[k] > 0);
    }
}
END_TEST

/* Moments of independent sums; quantiles turn the distribution function round. */
START_TEST(moments_and_quantiles)
{
    struct random r = random_seed(64);
    for (int i = 0; i < 2000; i++) {
        struct whole w[] = {draw_whole(&r), draw_whole(&r)};
        struct profile p = profile_of_whole(&r, &w[0]), q = profile_of_whole(&r, &w[1]);
        struct profile sum = profile_add(arena, &p, &q, MANY);
        double variance = pow(profile_deviation(&p), 2) + pow(profile_deviation(&q), 2);
        double tolerance = random_log_uniform(&r, 0.3, 1e5);
        near(profile_mean(&sum), profile_mean(&p) + profile_mean(&q), 1e-14);
        near(pow(profile_deviation(&sum), 2), variance, 1e-13);
        near(profile_equivalent(&sum, tolerance),
             profile_equivalent(&p, tolerance) + profile_equivalent(&q, tolerance), 4e-14);
        for (int k = 1; k <= PARTS; k++) {
            double u = (double)k / PARTS, x = profile_quantile(&p, u);
            ck_assert(profile_at_most(&p, x) >= u);
            ck_assert(profile_at_most(&p, nextafter(x, -1)) < u);
        }
    }
}
END_TEST

/* One chance of a tree is the same lottery. */
START_TEST(equivalents_are_those_of_trees)
{
    struct random r = random_seed(65);
    for (int i = 0; i < 500; i++) {
        struct whole w = draw_whole(&r);
        struct profile p = profile_of_whole(&r, &w);
        struct rollback_builder *b = rollback_new(arena);
        size_t child[VALUES] = {0}, circle = 0;
        for (size_t k = 0; k < p.n; k++)
            child[k] = rollback_add(b, ROLLBACK_END, p.value[k], 0, NULL, NULL);
        size_t root = rollback_add(b, ROLLBACK_CHANCE, 0, (uint32_t)p.n, child, p.probability);
        const struct rollback *tree = rollback_lay_out(b, root, &circle);
        double value[VALUES + 1] = {0}, tolerance = random_log_uniform(&r, 0.05, 1e4);
        rollback_equivalents(tree, isa_best(), tolerance, value);
        near(profile_equivalent(&p, tolerance), value[0], 4e-15 * VALUES);
    }
}
END_TEST

/* ---- fewer points ---- */

static double hinge(const struct profile *p, double t)
{
    double sum = 0;
    for (size_t i = 0; i < p->n; i++)
        sum += p->probability[i] * fmin(p->value[i], t);
    return sum;
}

START_TEST(merging_keeps_what_it_says)
{
    enum { POINTS = 400 };
    struct random r = random_seed(66);
    for (int i = 0; i < 300; i++) {
        double x[POINTS], p[POINTS], all = 0;
        size_t n = 5 + random_index(&r, POINTS - 5), most = 4 + random_index(&r, 60);
        for (size_t k = 0; k < n; k++) {
            x[k] = random_uniform(&r, -40, 90);
            all += p[k] = random_log_uniform(&r, 1e-6, 1);
        }
        for (size_t k = 0; k < n; k++)
            p[k] /= all;
        struct profile whole = profile_of(arena, n, x, p, MANY);
        struct profile few = profile_of(arena, n, x, p, most);
        ck_assert(!whole.is_merged && few.is_merged == (n > most));
        ck_assert_uint_eq(few.n, n > most ? most : n);
        ck_assert(few.value[0] == whole.value[0]);
        ck_assert(few.value[few.n - 1] == whole.value[whole.n - 1]);
        near(profile_mean(&few), profile_mean(&whole), 1e-13);
        ck_assert(profile_deviation(&few) <= profile_deviation(&whole) + 1e-13);
        ck_assert(profile_equivalent(&few, 20) >= profile_equivalent(&whole, 20) - 1e-13);
        for (double t = -40; t < 90; t += 3.1) /* dislikes of risk find it no worse */
            ck_assert(hinge(&few, t) >= hinge(&whole, t) - 1e-13);
        struct profile again = profile_shift(arena, &few, 1);
        ck_assert(again.is_merged == few.is_merged && again.n == few.n);
        again = profile_mix(arena, 2, (struct profile[]){few, whole}, (double[]){0, 1}, MANY);
        ck_assert(!again.is_merged);
        again = profile_add(arena, &few, &few, MANY);
        ck_assert(again.is_merged == few.is_merged);
    }
}
END_TEST

/* What lies close together goes first: fifty groups of twenty, of which no two are merged. */
START_TEST(merging_takes_the_nearest)
{
    enum { GROUPS = 50, EACH = 20 };
    double x[GROUPS * EACH], p[GROUPS * EACH];
    for (int i = 0; i < GROUPS * EACH; i++) {
        x[i] = i / EACH * 100 + i % EACH * 1e-3;
        p[i] = 1.0 / (GROUPS * EACH);
    }
    struct profile few = profile_of(arena, GROUPS * EACH, x, p, GROUPS + 2);
    ck_assert_uint_eq(few.n, GROUPS + 2);
    for (size_t i = 0; i < few.n; i++)
        ck_assert(fmod(few.value[i], 100) < 1);
}
END_TEST

/* Equal values are added up by size of their probabilities, however they came. */
START_TEST(ties_do_not_depend_on_order)
{
    struct random r = random_seed(67);
    double x[64], p[64], y[64], q[64];
    for (int i = 0; i < 64; i++) {
        x[i] = (double)random_index(&r, 8);
        p[i] = random_uniform(&r, 0.001, 0.03);
    }
    for (int i = 0; i < 64; i++) {
        y[i] = x[(i * 37 + 11) % 64];
        q[i] = p[(i * 37 + 11) % 64];
    }
    struct profile a = profile_of(arena, 64, x, p, MANY), b = profile_of(arena, 64, y, q, MANY);
    ck_assert_uint_eq(a.n, 8);
    for (size_t i = 0; i < a.n; i++)
        ck_assert(a.value[i] == b.value[i] && a.probability[i] == b.probability[i]);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("profile");
    TCase *t = tcase_create("profile");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, making_by_hand);
    tcase_add_test(t, moments_by_hand);
    tcase_add_test(t, dominance_by_hand);
    tcase_add_test(t, dominance_is_what_all_utilities_say);
    tcase_add_test(t, dominance_does_not_round);
    tcase_add_test(t, dominance_of_ties_to_the_last_bit);
    tcase_add_test(t, sums_that_round);
    tcase_add_test(t, sums_and_mixtures_are_those_of_all_pairs);
    tcase_add_test(t, moments_and_quantiles);
    tcase_add_test(t, equivalents_are_those_of_trees);
    tcase_add_test(t, merging_keeps_what_it_says);
    tcase_add_test(t, merging_takes_the_nearest);
    tcase_add_test(t, ties_do_not_depend_on_order);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
