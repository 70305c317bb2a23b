/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where values stand: each stratum has one, single values are even, and inputs, sets and places in
 * strata are independent. */
#include "draw_test.h"

#include <math.h>
#include <stdio.h>
#include <string.h>

static const unsigned sizes[] = {DRAW_LEAST_LOG2, 5, 7, 9, 10, 11, DRAW_MOST_LOG2};
enum { N_SIZES = sizeof sizes / sizeof *sizes };

/* The values that each of the n equal parts has. */
static void count_parts(const double *x, size_t n, double *count)
{
    memset(count, 0, n * sizeof *count);
    for (size_t i = 0; i < n; i++) {
        ck_assert(x[i] > 0 && x[i] < 1);
        count[(size_t)(x[i] * (double)n)]++;
    }
}

START_TEST(each_stratum_has_one)
{
    static double count[1 << DRAW_MOST_LOG2];
    struct draw_input in = drawn_evenly("line.rate");
    for (int m = 0; m < METHODS; m++)
        for (int k = 0; k < N_SIZES; k++) {
            struct drawing d = drawing_of((enum draw_method)m, sizes[k], 1, &in);
            for (uint64_t set = 0; set < 50; set++) {
                size_t other = 0;
                count_parts(drawing_fill(&d, 0, set), d.n, count);
                for (size_t i = 0; i < d.n; i++)
                    other += count[i] != 1;
                ck_assert(m == DRAW_PLAIN ? other > 0 : other == 0);
            }
            drawing_free(&d);
        }
}
END_TEST

/* The strata again, of shapes that come through tables: by the distribution function. */
START_TEST(strata_of_shapes)
{
    static double count[1 << DRAW_MOST_LOG2];
    struct draw_input in[] = {drawn_gamma("a", 3.1, 0.5),
                              drawn_gamma("b", 3.1, 20),
                              drawn_lognormal("c", 0.01, 10),
                              {"d", {DIST_BETA, {2, 5}}, 1},
                              {"e", {DIST_PERT, {-1, 2.385, 9}}, 1},
                              {"f", {DIST_NORMAL, {-3, 2}}, 1},
                              {"g", {DIST_TRIANGULAR, {-1, 2.385, 9}}, 1},
                              {"h", {DIST_LOGNORMAL, {1, 10, 2}}, 1},
                              {"i", {DIST_COUNTED, {0.01, 10, 2, 238.5}}, 1}};
    enum { N = sizeof in / sizeof *in };
    for (int k = 0; k < N_SIZES; k++) {
        struct drawing d = drawing_of(DRAW_SCRAMBLED, sizes[k], N, in);
        for (size_t i = 0; i < N; i++) {
            const double *x = drawing_fill(&d, i, 5);
            memset(count, 0, sizeof count);
            for (size_t j = 0; j < d.n; j++)
                count[(size_t)(dist_cdf(&in[i].dist, x[j]) * (double)d.n)]++;
            for (size_t j = 0; j < d.n; j++)
                ck_assert_msg(count[j] == 1, "%s: stratum %zu of %zu has %g", in[i].name, j, d.n,
                              count[j]);
        }
        drawing_free(&d);
    }
}
END_TEST

enum { CELLS = 256, EACH = 400 };

/* Of every value alone: that at a fixed place, over sets. */
START_TEST(single_values_are_even)
{
    struct draw_input in = drawn_evenly("line.rate");
    for (int m = 0; m < METHODS; m++) {
        struct drawing d = drawing_of((enum draw_method)m, 6, 1, &in);
        double first[CELLS] = {0}, last[CELLS] = {0};
        for (uint64_t set = 0; set < CELLS * EACH; set++) {
            const double *x = drawing_fill(&d, 0, set);
            first[(size_t)(x[0] * CELLS)]++;
            last[(size_t)(x[d.n - 1] * CELLS)]++;
        }
        drawing_check_counts("the first value", first, CELLS, EACH);
        drawing_check_counts("the last value", last, CELLS, EACH);
        drawing_free(&d);
    }
}
END_TEST

static double part_of(double x, double n)
{
    return x * n - floor(x * n);
}

/* Places inside strata: even, independent of the next stratum's and of the next set's, down to the
 * bits that a stratum of 2^-10 leaves. */
START_TEST(places_in_strata_are_even)
{
    struct draw_input in[] = {drawn_evenly("a"), drawn_evenly("b")};
    struct drawing d = drawing_of(DRAW_SCRAMBLED, 10, 2, in);
    double top[CELLS] = {0}, low[CELLS] = {0}, pair[CELLS] = {0}, inputs[CELLS] = {0},
           sets[CELLS] = {0}, row[1024], before[1024] = {0};
    enum { SETS = 200 };
    for (uint64_t set = 0; set <= SETS; set++) {
        const double *x = drawing_fill(&d, 0, set), *y = drawing_fill(&d, 1, set);
        for (size_t i = 0; i < 1024; i++)
            row[(size_t)(x[i] * 1024)] = part_of(x[i], 1024);
        for (size_t i = 0; i < 1024 && set > 0; i++) {
            top[(size_t)(row[i] * CELLS)]++;
            low[(size_t)(part_of(row[i], 0x1p24) * CELLS)]++;
            pair[(size_t)(row[i] * 16) * 16 + (size_t)(row[(i + 1) % 1024] * 16)]++;
            inputs[(size_t)(part_of(x[i], 1024) * 16) * 16 + (size_t)(part_of(y[i], 1024) * 16)]++;
            sets[(size_t)(row[i] * 16) * 16 + (size_t)(before[i] * 16)]++;
        }
        memcpy(before, row, sizeof before);
    }
    drawing_check_counts("places", top, CELLS, SETS * 4);
    drawing_check_counts("their last bits", low, CELLS, SETS * 4);
    drawing_check_counts("places of neighbours", pair, CELLS, SETS * 4);
    drawing_check_counts("places of two inputs", inputs, CELLS, SETS * 4);
    drawing_check_counts("places of two sets", sets, CELLS, SETS * 4);
    drawing_free(&d);
}
END_TEST

/* The values of two inputs at one place, and of one input in two sets, over many sets. */
static void check_independent(enum draw_method method, const char *one, const char *other)
{
    struct draw_input in[] = {drawn_evenly(one), drawn_evenly(other)};
    struct drawing d = drawing_of(method, 6, 2, in);
    double pair[CELLS] = {0}, sets[CELLS] = {0}, before = 0;
    for (uint64_t set = 0; set <= CELLS * EACH; set++) {
        double x = drawing_fill(&d, 0, set)[7], y = drawing_fill(&d, 1, set)[7];
        if (set > 0) {
            pair[(size_t)(x * 16) * 16 + (size_t)(y * 16)]++;
            sets[(size_t)(x * 16) * 16 + (size_t)(before * 16)]++;
        }
        before = x;
    }
    drawing_check_counts("two inputs", pair, CELLS, EACH);
    drawing_check_counts("two sets", sets, CELLS, EACH);
    drawing_free(&d);
}

START_TEST(inputs_and_sets_are_independent)
{
    for (int m = 0; m < METHODS; m++) {
        check_independent((enum draw_method)m, "a", "b");
        check_independent((enum draw_method)m, "line.rate", "line.ratf");
    }
}
END_TEST

void draw_test_order(TCase *t)
{
    tcase_add_test(t, each_stratum_has_one);
    tcase_add_test(t, strata_of_shapes);
    tcase_add_test(t, single_values_are_even);
    tcase_add_test(t, places_in_strata_are_even);
    tcase_add_test(t, inputs_and_sets_are_independent);
}
