/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Markov chains of the graph (graph/chain.c) against closed forms, against the exponential of
 * matrices by GSL, and against what must hold of any: rows add up to 1, a stretch is its two parts
 * one after the other, a mean is an integral, slopes are quotients of differences. Closed forms are
 * worked out beside the tests. Owns nothing. */
#include <check.h>
#include <gsl/gsl_integration.h>
#include <gsl/gsl_linalg.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "graph/ops.h"
#include "random.h"

enum { MOST_STATES = 15, MOST_FLOWS = 60 };

struct world {
    struct chain c;
    uint32_t from[MOST_FLOWS], to[MOST_FLOWS];
    double x[MOST_FLOWS];
};

static void flow(struct world *w, uint32_t from, uint32_t to, double rate)
{
    ck_assert_uint_lt(w->c.n_flows, MOST_FLOWS);
    w->from[w->c.n_flows] = from;
    w->to[w->c.n_flows] = to;
    w->x[w->c.n_flows++] = rate;
}

static double at(const struct world *w, double years, uint32_t start, uint32_t end, bool mean)
{
    struct chain c = w->c;
    c.from = w->from, c.to = w->to;
    c.years = years, c.start = start, c.end = end, c.mean = mean;
    return chain_point(&c, w->x);
}

/* Rates from rare to fast, about two flows a state, some pairs twice. */
static void draw(struct random *r, struct world *w, double most)
{
    memset(w, 0, sizeof *w);
    w->c.n_states = (uint32_t)random_range(r, 2, MOST_STATES);
    size_t flows = (size_t)random_range(r, 1, 3 * w->c.n_states);
    for (size_t k = 0; k < flows; k++) {
        uint32_t from = (uint32_t)random_index(r, w->c.n_states);
        uint32_t by = 1 + (uint32_t)random_index(r, w->c.n_states - 1);
        flow(w, from, (from + by) % w->c.n_states, random_log_uniform(r, 1e-5, most));
    }
}

static void expect(double got, double want, double relative)
{
    ck_assert_msg(fabs(got - want) <= relative * fabs(want), "%.17g, not %.17g: %g off, of %g", got,
                  want, got / want - 1, relative);
}

/* ---- closed forms ---- */

/* dp/dt = q (1 - p) - r p, p(0) = 0:  p = q / (q + r) (1 - exp(-s)), s = (q + r) t; its mean is
 * q / (q + r) (1 - (1 - exp(-s)) / s), the bracket being the sum of -(-s)^k / (k + 1)!, k > 0. */
START_TEST(two_states)
{
    struct random r = random_seed(91);
    for (int i = 0; i < 3000; i++) {
        struct world w = {.c.n_states = 2};
        double years = random_log_uniform(&r, 1e-3, 40), most = i % 10 ? 1 : 1000;
        flow(&w, 0, 1, random_log_uniform(&r, 1e-9, most));
        flow(&w, 1, 0, random_log_uniform(&r, 1e-9, most));
        long double q = w.x[0], s = (q + w.x[1]) * years, lost = -expm1l(-s);
        long double bracket =
            s < 1e-3L ? s / 2 * (1 - s / 3 * (1 - s / 4 * (1 - s / 5))) : 1 - lost / s;
        double off = 1e-14;
        expect(at(&w, years, 0, 1, false), (double)(q / (q + w.x[1]) * lost), off);
        expect(at(&w, years, 0, 1, true), (double)(q / (q + w.x[1]) * bracket), off);
    }
}
END_TEST

/* By hand: q = 0.02 / a, r = 2 / a, t = 0.5 a: s = 1.01, 1 - exp(-1.01) = 0.63578102042847668,
 * times 0.02 / 2.02 = 1 / 101. (Computed, with thirty decimals.) */
START_TEST(two_states_by_hand)
{
    struct world w = {.c.n_states = 2};
    flow(&w, 0, 1, 0.02);
    flow(&w, 1, 0, 2);
    expect(at(&w, 0.5, 0, 1, false), 0.0062948615884007592, 1e-14);
}
END_TEST

/* n steps of equal rates: the number of steps is Poisson distributed, so that state k < n has
 * exp(-m) m^k / k!, m = rate * years, however small that is. */
START_TEST(tiny_probabilities_keep_their_digits)
{
    struct world w = {.c.n_states = MOST_STATES};
    for (double m = 1e-15; m < 600; m *= 7.3) {
        w.c.n_flows = 0;
        for (uint32_t k = 0; k + 1 < MOST_STATES; k++)
            flow(&w, k, k + 1, m / 2.5);
        long double p = expl(-m);
        for (uint32_t k = 0; k + 1 < MOST_STATES; k++, p *= m / (long double)k) {
            double got = at(&w, 2.5, 0, k, false);
            if (p > 1e-250L)
                expect(got, (double)p, 1e-12);
        }
    }
}
END_TEST

/* The last of five such steps, in the mean over m = 1e-7: five steps or more have the probability
 * u^5 / 5! (1 - 5 u / 6 ...), whose mean over 0 .. m is m^5 / 6! (1 - 5 m / 7 ...). */
START_TEST(tiny_means_keep_their_digits)
{
    struct world w = {.c.n_states = 6};
    double m = 1e-7;
    for (uint32_t k = 0; k < 5; k++)
        flow(&w, k, k + 1, m / 4);
    expect(at(&w, 4, 0, 5, true), m * m * m * m * m / 720 * (1 - 5 * m / 7), 1e-12);
}
END_TEST

/* Fast both ways, up to the limit: half the time in each. Beyond it there is no value. */
START_TEST(limits)
{
    struct world w = {.c.n_states = 2};
    flow(&w, 0, 1, 50000);
    flow(&w, 1, 0, 50000);
    expect(at(&w, 2, 0, 1, false), 0.5, 1e-11);
    expect(at(&w, 2, 0, 1, true), 0.5 * (1 - 1 / 2e5), 1e-11);
    ck_assert(isnan(at(&w, nextafter(2, 3), 0, 1, false)));
    w.x[0] = -1e-300;
    ck_assert(isnan(at(&w, 0.1, 0, 1, false)));
    w.x[0] = NAN;
    ck_assert(isnan(at(&w, 0.1, 0, 1, false)));
    w.x[0] = INFINITY;
    ck_assert(isnan(at(&w, 0.1, 0, 1, false)));
    w.x[0] = w.x[1] = 0;
    ck_assert(at(&w, 2, 0, 1, false) == 0 && at(&w, 2, 1, 1, false) == 1);
    ck_assert(at(&w, 2, 0, 1, true) == 0 && at(&w, 2, 0, 0, true) == 1);
    w.x[0] = 3;
    ck_assert(at(&w, 0, 0, 1, false) == 0 && at(&w, 0, 0, 0, false) == 1);
}
END_TEST

/* ---- matrices ---- */

static void exponential(const struct world *w, double years, gsl_matrix *out)
{
    uint32_t n = w->c.n_states;
    gsl_matrix *q = gsl_matrix_calloc(n, n);
    for (uint32_t f = 0; f < w->c.n_flows; f++) {
        double x = w->x[f] * years;
        gsl_matrix_set(q, w->from[f], w->to[f], gsl_matrix_get(q, w->from[f], w->to[f]) + x);
        gsl_matrix_set(q, w->from[f], w->from[f], gsl_matrix_get(q, w->from[f], w->from[f]) - x);
    }
    gsl_linalg_exponential_ss(q, out, GSL_PREC_DOUBLE);
    gsl_matrix_free(q);
}

START_TEST(as_the_exponential_of_a_matrix)
{
    struct random r = random_seed(92);
    struct world w;
    for (int round = 0; round < 150; round++) {
        draw(&r, &w, 6);
        double years = random_log_uniform(&r, 0.01, 3);
        gsl_matrix *e = gsl_matrix_calloc(w.c.n_states, w.c.n_states);
        exponential(&w, years, e);
        for (uint32_t i = 0; i < w.c.n_states; i++)
            for (uint32_t j = 0; j < w.c.n_states; j++) {
                double got = at(&w, years, i, j, false);
                ck_assert_msg(fabs(got - gsl_matrix_get(e, i, j)) <= 1e-13, "%.17g, not %.17g", got,
                              gsl_matrix_get(e, i, j));
            }
        gsl_matrix_free(e);
    }
}
END_TEST

START_TEST(rows_add_up_to_one)
{
    struct random r = random_seed(93);
    struct world w;
    for (int round = 0; round < 300; round++) {
        draw(&r, &w, 12);
        double years = random_log_uniform(&r, 1e-3, 2);
        for (int mean = 0; mean < 2; mean++) {
            double sum = 0;
            for (uint32_t j = 0; j < w.c.n_states; j++)
                sum += at(&w, years, 0, j, mean);
            ck_assert_msg(fabs(sum - 1) <= 1e-14, "%g off", sum - 1);
        }
    }
}
END_TEST

START_TEST(one_stretch_after_another)
{
    struct random r = random_seed(94);
    struct world w;
    for (int round = 0; round < 100; round++) {
        draw(&r, &w, 20);
        double first = random_log_uniform(&r, 1e-3, 1), second = random_log_uniform(&r, 1e-3, 1);
        for (uint32_t j = 0; j < w.c.n_states; j++) {
            double sum = 0;
            for (uint32_t i = 0; i < w.c.n_states; i++)
                sum += at(&w, first, 0, i, false) * at(&w, second, i, j, false);
            expect(at(&w, first + second, 0, j, false), sum, 1e-13);
        }
    }
}
END_TEST

/* ---- means ---- */

START_TEST(means_are_integrals)
{
    enum { POINTS = 32, PIECES = 12 };
    struct random r = random_seed(95);
    struct world w;
    gsl_integration_glfixed_table *rule = gsl_integration_glfixed_table_alloc(POINTS);
    for (int round = 0; round < 60; round++) {
        draw(&r, &w, 8);
        double years = random_log_uniform(&r, 1e-2, 3), sum = 0, x = 0, weight = 0;
        uint32_t end = (uint32_t)random_index(&r, w.c.n_states);
        for (int piece = 0; piece < PIECES; piece++)
            for (size_t i = 0; i < POINTS; i++) {
                gsl_integration_glfixed_point(years * piece / PIECES, years * (piece + 1) / PIECES,
                                              i, &x, &weight, rule);
                sum += weight / years * at(&w, x, 0, end, false);
            }
        expect(at(&w, years, 0, end, true), sum, 1e-13);
    }
    gsl_integration_glfixed_table_free(rule);
}
END_TEST

/* ---- slopes ---- */

/* Fourth-order central differences. */
static double slope_of(struct world *w, uint32_t f, double years, uint32_t end, bool mean)
{
    double x = w->x[f], h = 1e-3 * x, y[4] = {0};
    for (int k = 0; k < 4; k++) {
        w->x[f] = x + (k < 2 ? k - 2 : k - 1) * h;
        y[k] = at(w, years, 0, end, mean);
    }
    w->x[f] = x;
    return (y[0] - 8 * y[1] + 8 * y[2] - y[3]) / (12 * h);
}

START_TEST(slopes_are_quotients_of_differences)
{
    struct random r = random_seed(96);
    struct world w;
    int moving = 0;
    for (int round = 0; round < 200; round++) {
        draw(&r, &w, 4);
        double years = random_log_uniform(&r, 0.05, 3), back[MOST_FLOWS] = {0};
        uint32_t end = (uint32_t)random_index(&r, w.c.n_states);
        struct chain c = w.c;
        c.from = w.from, c.to = w.to, c.years = years, c.end = end, c.mean = round % 2;
        double y = chain_point(&c, w.x);
        chain_backward(&c, w.x, 2, back);
        for (uint32_t f = 0; f < c.n_flows; f++) {
            double want = 2 * slope_of(&w, f, years, end, c.mean);
            ck_assert_msg(fabs(back[f] - want) <= 1e-9 * fabs(want) + 4e-12 * y / w.x[f],
                          "%.12g, not %.12g", back[f], want);
            moving += want != 0;
        }
    }
    ck_assert_int_gt(moving, 500);
}
END_TEST

/* A chain of two slow steps at rates x and y: p = x y t^2 / 2 (1 - ...), whose slopes are p / x and
 * p / y; and of rates that are 0: the direct way grows as t, the mean as t / 2. */
START_TEST(slopes_of_small_rates)
{
    struct world w = {.c = {.n_states = 3, .years = 2, .end = 2}};
    double back[2] = {0};
    w.c.from = w.from, w.c.to = w.to;
    flow(&w, 0, 1, 1e-9);
    flow(&w, 1, 2, 3e-12);
    chain_backward(&w.c, w.x, 1, back);
    expect(back[0], 6e-12, 1e-8);
    expect(back[1], 2e-9, 1e-8);
    w.x[0] = w.x[1] = 0;
    w.c.end = 1;
    for (int mean = 0; mean < 2; mean++) {
        w.c.mean = mean;
        back[0] = back[1] = 0;
        chain_backward(&w.c, w.x, 1, back);
        expect(back[0], mean ? 1 : 2, 1e-14);
        ck_assert(back[1] == 0);
    }
}
END_TEST

/* Around a ring of equal rates r, back to the beginning: the slope by the last rate is the integral
 * of being in the last state, r^14 u^14 / 14!, which is r^14 t^15 / 15! but for parts of r t. It
 * needs 15 jumps where the value needs none. */
START_TEST(slopes_keep_their_digits)
{
    struct world w = {.c = {.n_states = MOST_STATES, .years = 2}};
    double back[MOST_FLOWS] = {0}, want = 2;
    w.c.from = w.from, w.c.to = w.to;
    for (uint32_t k = 0; k < MOST_STATES; k++)
        flow(&w, k, (k + 1) % MOST_STATES, 1e-7);
    for (int k = 2; k <= 15; k++)
        want *= 2e-7 / k;
    chain_backward(&w.c, w.x, 1, back);
    expect(back[MOST_STATES - 1], want, 1e-6);
}
END_TEST

/* ---- nodes ---- */

START_TEST(equal_chains_are_one_node)
{
    struct arena *a = arena_new(NULL);
    struct graph *g = graph_new(a);
    struct dim per = dim_divide((struct dim){{0}}, (struct dim){{0, 1}});
    uint32_t from[] = {0, 1}, to[] = {1, 2};
    struct chain c = {3, 2, from, to, 2.5, 0, 2, true}, d = c;
    graph_section_begin(g, 0);
    node_id x[] = {graph_input(g, 1, 0.1, per), graph_input(g, 2, 0.2, per)};
    node_id n = graph_chain(g, &c, x);
    d.mean = false;
    ck_assert_uint_ne(graph_chain(g, &d, x), n);
    d = c, d.years = 3;
    ck_assert_uint_ne(graph_chain(g, &d, x), n);
    from[0] = to[0] = 9; /* what was given has been copied */
    ck_assert_uint_eq(graph_chain_of(g, n)->from[0], 0);
    from[0] = 0, to[0] = 1;
    ck_assert_uint_eq(graph_chain(g, &c, x), n);
    struct text out = {0};
    text_init(&out, a);
    graph_dump(&out, g);
    ck_assert_msg(strstr(out.at, "2 chain (0; 1) of 3 states 0>1 1>2 over 2.5 from 0 to 2 mean\n"),
                  "%s", out.at);
    ck_assert_int_eq(graph_degree(g, n), 2);
    ck_assert(dim_is_number(graph_dim(g, n)));
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("chain");
    TCase *t = tcase_create("chain");
    tcase_set_timeout(t, 120);
    tcase_add_test(t, two_states);
    tcase_add_test(t, two_states_by_hand);
    tcase_add_test(t, tiny_probabilities_keep_their_digits);
    tcase_add_test(t, tiny_means_keep_their_digits);
    tcase_add_test(t, limits);
    tcase_add_test(t, as_the_exponential_of_a_matrix);
    tcase_add_test(t, rows_add_up_to_one);
    tcase_add_test(t, one_stretch_after_another);
    tcase_add_test(t, means_are_integrals);
    tcase_add_test(t, slopes_are_quotients_of_differences);
    tcase_add_test(t, slopes_of_small_rates);
    tcase_add_test(t, slopes_keep_their_digits);
    tcase_add_test(t, equal_chains_are_one_node);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
