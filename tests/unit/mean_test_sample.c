/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sampled means: near the closed form, with an honest error, the same wherever and in whatever
 * order nodes stand. */
#include "mean_test.h"

#include <math.h>
#include <stdio.h>
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

enum { SHARED = 5 };

static struct dist lognormal(double median, double error_factor)
{
    return (struct dist){DIST_LOGNORMAL, {median, error_factor, NAN}, 0, NULL, NULL};
}

/* The square of the product of inputs first .. first + SHARED - 1, as a diagram's two variables. */
static node_id square_of_product(uint32_t first, bool backwards)
{
    node_id product = mean_const(&w, 1);
    for (uint32_t i = 0; i < SHARED; i++) {
        uint32_t input = first + (backwards ? SHARED - 1 - i : i);
        product = graph_op2(w.g, OP_MULTIPLY, product, mean_input(&w, input));
    }
    node_id d = graph_diagram(w.g, mean_all_of(arena, 2), 2, (node_id[]){product, product});
    return graph_pick(w.g, d, 0);
}

/* Error factors from 1.3 on. */
static double set_shared(uint32_t first, double median)
{
    double want = 1;
    for (uint32_t i = 0; i < SHARED; i++) {
        double s = mean_sigma(1.3 + 0.1 * i);
        mean_world_set(&w, first + i, lognormal(median, 1.3 + 0.1 * i));
        want *= median * median * exp(2 * s * s);
    }
    return want;
}

/* ---- near and honest ---- */

/* Of 1000 sets of names: the exact value is within t standard errors (t = 2.131: 95 % for 15
 * degrees of freedom) in 92 to 98 % of them and within 4 in all but 1 %, the mean over all of
 * them within 4 of its own. */
START_TEST(the_error_is_honest)
{
    enum { NAMES = 1000 };
    int held = 0, far = 0;
    double sum = 0, squares = 0, want = 0;
    for (int k = 0; k < NAMES; k++) {
        teardown();
        setup();
        want = set_shared(0, 0.7);
        for (uint32_t i = 0; i < SHARED; i++)
            snprintf(w.names[i], sizeof w.names[i], "breaker-%d.rate%u", k, (unsigned)i);
        node_id n = square_of_product(0, false);
        double away = mean_of(&w, n) - want, se = means_error(w.m, n);
        ck_assert_int_eq(means_method(w.m, n), MEAN_SAMPLE);
        far += fabs(away) > 4 * se;
        held += fabs(away) <= 2.131 * se;
        sum += away;
        squares += away * away;
    }
    ck_assert_msg(held >= 920 && held <= 980, "%d of 1000 intervals hold", held);
    ck_assert_int_le(far, 10);
    ck_assert(fabs(sum) <= 4 * sqrt(squares));
    /* Better than as many independent points. */
    double spread = 0;
    for (uint32_t i = 0; i < SHARED; i++)
        spread += 4 * pow(mean_sigma(1.3 + 0.1 * i), 2);
    double alone = want * sqrt((exp(spread) - 1) / (MEAN_SETS * MEAN_STRATA));
    ck_assert(squares / NAMES < alone * alone);
}
END_TEST

/* A product of three with error factors of 1.5 to 2.5, squared: near it, though a sample of so
 * skewed a thing is not precise. */
START_TEST(skewed_inputs)
{
    double want = 1;
    node_id product = mean_const(&w, 1);
    for (uint32_t i = 0; i < 3; i++) {
        double s = mean_sigma(1.5 + 0.5 * i);
        mean_world_set(&w, i, lognormal(0.01, 1.5 + 0.5 * i));
        want *= 1e-4 * exp(2 * s * s);
        product = graph_op2(w.g, OP_MULTIPLY, product, mean_input(&w, i));
    }
    node_id n = graph_op2(w.g, OP_MULTIPLY, product, product);
    ck_assert(fabs(mean_of(&w, n) - want) <= 4 * means_error(w.m, n));
    ck_assert(means_error(w.m, n) < 0.1 * want);
}
END_TEST

/* ---- sums and products of sampled means ---- */

START_TEST(sums_of_sampled_means)
{
    set_shared(0, 0.7);
    set_shared(5, 1.3);
    node_id a = square_of_product(0, false), b = square_of_product(5, false);
    node_id c = graph_op1(w.g, OP_SQRT, a), x = mean_input(&w, 0);
    node_id sum = graph_op(w.g, OP_SUM, 4, (node_id[]){a, b, c, x});
    node_id none = graph_op2(w.g, OP_SUBTRACT, a, a), product = graph_op2(w.g, OP_MULTIPLY, a, b);
    double want = mean_of(&w, a) + mean_of(&w, b) + mean_of(&w, c) + mean_of(&w, x);
    ck_assert(fabs(mean_of(&w, sum) - want) <= 1e-15 * want);
    ck_assert(mean_of(&w, none) == 0 && means_error(w.m, none) == 0);
    double ea = means_error(w.m, a) / mean_of(&w, a), eb = means_error(w.m, b) / mean_of(&w, b);
    double together = means_error(w.m, product) / mean_of(&w, product);
    ck_assert(together > 0.5 * fmax(ea, eb) && together < 2 * (ea + eb));
    ck_assert_int_eq(means_method(w.m, product), MEAN_SAMPLE);
    double exact = set_shared(0, 0.7) * set_shared(5, 1.3);
    ck_assert(fabs(mean_of(&w, product) - exact) <= 4 * means_error(w.m, product));
}
END_TEST

/* ---- nothing else counts ---- */

/* (x y)^2 exp(x): two inputs. */
static node_id two_of(uint32_t x, uint32_t y)
{
    node_id xy = graph_op2(w.g, OP_MULTIPLY, mean_input(&w, x), mean_input(&w, y));
    node_id square = graph_op2(w.g, OP_MULTIPLY, xy, xy);
    return graph_op2(w.g, OP_MULTIPLY, square, graph_op1(w.g, OP_SQRT, mean_input(&w, x)));
}

struct answer {
    double sampled, error, two;
};

/* The inputs under numbers first + order[i]; what else is in the graph if it is asked for. */
static struct answer answer(uint32_t first, bool backwards, bool others)
{
    teardown();
    setup();
    set_shared(first, 0.7);
    for (uint32_t i = 0; i < SHARED; i++) {
        uint32_t input = first + (backwards ? SHARED - 1 - i : i);
        mean_world_set(&w, input, lognormal(0.7, 1.3 + 0.1 * i));
        snprintf(w.names[input], sizeof w.names[input], "name %u", (unsigned)i);
    }
    uint32_t zero = first + (backwards ? SHARED - 1 : 0), one = backwards ? zero - 1 : zero + 1;
    if (others) {
        mean_world_set(&w, 15, lognormal(0.2, 3));
        mean_of(&w, graph_op1(w.g, OP_EXP,
                              graph_op2(w.g, OP_MULTIPLY, mean_input(&w, 15),
                                        square_of_product(first, !backwards))));
        graph_section_end(w.g);
        graph_section_begin(w.g, 1);
    }
    node_id two = others ? two_of(zero, one) : NODE_NONE;
    node_id sampled = square_of_product(first, backwards);
    two = others ? two : two_of(zero, one);
    double mean = mean_of(&w, sampled);
    return (struct answer){mean, means_error(w.m, sampled), mean_of(&w, two)};
}

START_TEST(order_and_company_do_not_count)
{
    struct answer a = answer(0, false, false);
    for (int k = 1; k < 8; k++) {
        struct answer b = answer(k & 4 ? 7 : 0, k & 1, k & 2);
        ck_assert_msg(memcmp(&a, &b, sizeof a) == 0,
                      "%d: %.17g +- %g, %.17g, not %.17g +- %g, %.17g", k, b.sampled, b.error,
                      b.two, a.sampled, a.error, a.two);
    }
}
END_TEST

Suite *mean_sample_suite(void)
{
    Suite *s = suite_create("sampled means");
    TCase *t = tcase_create("sampled means");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, the_error_is_honest);
    tcase_add_test(t, skewed_inputs);
    tcase_add_test(t, sums_of_sampled_means);
    tcase_add_test(t, order_and_company_do_not_count);
    suite_add_tcase(s, t);
    return s;
}
