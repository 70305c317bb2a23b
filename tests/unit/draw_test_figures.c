/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures that samples give, beside known ones. */
#include "draw_test.h"

#include <math.h>
#include <stdio.h>

enum { SETS = 400 };

/* The mean of the square over the square of the mean, set by set. */
static struct estimate square_of_mean(const struct drawing *d)
{
    static double results[SETS];
    double mean = 0, squares = 0;
    for (uint64_t set = 0; set < SETS; set++) {
        const double *x = drawing_fill(d, 0, set);
        double sum = 0;
        results[set] = 0;
        for (size_t i = 0; i < d->n; i++) {
            sum += x[i];
            results[set] += x[i] * x[i];
        }
        results[set] /= (double)d->n;
        mean += sum / (double)d->n;
    }
    mean /= SETS;
    for (int set = 0; set < SETS; set++)
        squares += results[set] /= mean * mean;
    (void)squares;
    return drawing_estimate(SETS, results);
}

/* How much the mean of x^2 exceeds the square of the mean: for lognormal rates exp(s^2), 1.56, 2.60
 * and 7.10 times (G. Apostolakis and S. Kaplan, Reliability Engineering 2 (1981) 135); for a gamma
 * of shape a, 1 + 1 / a. */
START_TEST(excess_of_squares)
{
    static const struct {
        bool gamma;
        double parameter, expected, rounding;
    } cases[] = {{false, 3, 1.56, 0.005},
                 {false, 5, 2.60, 0.005},
                 {false, 10, 7.09678, 0.000005},
                 {true, 0.5, 3, 0}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        struct draw_input in = cases[i].gamma ? drawn_gamma("x", 2e-3, cases[i].parameter)
                                              : drawn_lognormal("x", 2e-3, cases[i].parameter);
        for (int m = 0; m < METHODS; m++) {
            struct drawing d = drawing_of((enum draw_method)m, 10, 1, &in);
            struct estimate got = square_of_mean(&d);
            double off = fabs(got.mean - cases[i].expected) - cases[i].rounding;
            ck_assert_msg(off <= 3 * got.error, "case %zu, method %d: %.6g, error %.3g", i, m,
                          got.mean, got.error);
            ck_assert(got.error < 0.03 * cases[i].expected);
            drawing_free(&d);
        }
    }
}
END_TEST

void draw_test_figures(TCase *t)
{
    tcase_add_test(t, excess_of_squares);
}
