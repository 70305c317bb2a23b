/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Streams of even numbers: their bits, evenness, independence of names. All is fixed, so each
 * statistic has one value for ever; that it is an ordinary one is what is tested. */
#include "math/stream.h"

#include "mean_test.h"

#include <math.h>
#include <stdio.h>

/* Expected bits from an independent implementation with whole numbers of any length, whose
 * FNV-1a gives 0xAF63DC4C8601EC8C for "a", its published test vector (from memory). */
START_TEST(first_numbers)
{
    static const struct {
        const char *name;
        uint64_t number, want[2];
    } rows[] = {
        {"", 0, {UINT64_C(0x5bf940ae612238f8), UINT64_C(0xc961b394ec919583)}},
        {"bus-fault.rate", 0, {UINT64_C(0x3782f6d47c2f9b0a), UINT64_C(0x8dc761cd55aaebcd)}},
        {"bus-fault.rate", 15, {UINT64_C(0x6c94b97dba38c69e), UINT64_C(0xc0209b81a6770ace)}},
    };
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        struct stream s = stream_of(rows[i].name, rows[i].number);
        ck_assert(stream_next(&s) == rows[i].want[0]);
        ck_assert(stream_next(&s) == rows[i].want[1]);
    }
}
END_TEST

/* The chi-square distribution with n degrees of freedom is a gamma of shape n / 2, scale 2. */
static void check_chi_square(const double *count, size_t cells, double expected)
{
    double chi = 0;
    for (size_t i = 0; i < cells; i++)
        chi += (count[i] - expected) * (count[i] - expected) / expected;
    double p = dist_gamma_cdf((double)(cells - 1) / 2, chi / 2);
    ck_assert_msg(p > 0.01 && p < 0.99, "chi-square %g of %zu cells: %g", chi, cells, p);
}

enum { CELLS = 256, DRAWS = 256 * 400 };

START_TEST(numbers_are_even)
{
    double count[CELLS] = {0}, first[CELLS] = {0};
    struct stream s = stream_of("one stream", 3);
    for (int i = 0; i < DRAWS; i++) {
        double u = stream_uniform(&s);
        ck_assert(u > 0 && u < 1 && 1 - (1 - u) == u);
        count[(size_t)(u * CELLS)]++;
        char name[16];
        snprintf(name, sizeof name, "x%d", i / MEAN_SETS);
        struct stream t = stream_of(name, (uint64_t)(i % MEAN_SETS));
        first[(size_t)(stream_uniform(&t) * CELLS)]++;
    }
    check_chi_square(count, CELLS, DRAWS / CELLS);
    check_chi_square(first, CELLS, DRAWS / CELLS);
}
END_TEST

START_TEST(permutations_are_even)
{
    enum { ORDERS = 24, TIMES = 24 * 500 };
    double count[ORDERS] = {0};
    struct stream s = stream_of("orders", 0);
    for (int k = 0; k < TIMES; k++) {
        uint32_t at[4], code = 0, seen = 0;
        stream_permutation(&s, 4, at);
        for (uint32_t i = 0; i < 4; i++) {
            uint32_t below = 0;
            for (uint32_t j = i + 1; j < 4; j++)
                below += at[j] < at[i];
            code = code * (4 - i) + below;
            seen |= 1u << at[i];
        }
        ck_assert_uint_eq(seen, 15);
        count[code]++;
    }
    check_chi_square(count, ORDERS, TIMES / ORDERS);
}
END_TEST

/* Names that differ in one character, and sets of one name: no correlation beyond 5 / sqrt(n). */
START_TEST(streams_are_not_correlated)
{
    enum { STREAMS = 48, LENGTH = 4096 };
    static double u[STREAMS][LENGTH];
    for (int k = 0; k < STREAMS; k++) {
        char name[24];
        snprintf(name, sizeof name, "rate-%d", k / 2);
        struct stream s = stream_of(name, (uint64_t)(k % 2));
        for (int i = 0; i < LENGTH; i++)
            u[k][i] = (stream_uniform(&s) - 0.5) * sqrt(12);
    }
    for (int a = 0; a < STREAMS; a++)
        for (int b = 0; b < a; b++) {
            double sum = 0;
            for (int i = 0; i < LENGTH; i++)
                sum += u[a][i] * u[b][i];
            ck_assert_msg(fabs(sum) <= 5 * sqrt(LENGTH), "%d and %d: %g", a, b, sum / LENGTH);
        }
}
END_TEST

Suite *stream_suite(void)
{
    Suite *s = suite_create("streams");
    TCase *t = tcase_create("streams");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, first_numbers);
    tcase_add_test(t, numbers_are_even);
    tcase_add_test(t, permutations_are_even);
    tcase_add_test(t, streams_are_not_correlated);
    suite_add_tcase(s, t);
    return s;
}
