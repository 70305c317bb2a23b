/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures that samples give, beside known ones: moments, means without bias, and how the error of a
 * mean depends on the method. */
#include "draw_test.h"

#include <math.h>
#include <stdlib.h>

#include "math/elementary.h"
#include "smooth.h"

enum { MOST_SETS = 6000 };

static double mean_of_power(const double *x, size_t n, int power)
{
    double sum = 0;
    for (size_t i = 0; i < n; i++)
        sum += power == 2 ? x[i] * x[i] : x[i];
    return sum / (double)n;
}

/* Over sets, in units of `unit`. */
static struct estimate power_over_sets(const struct drawing *d, size_t sets, int power, double unit)
{
    static double results[MOST_SETS];
    for (size_t set = 0; set < sets; set++)
        results[set] = mean_of_power(drawing_fill(d, 0, set), d->n, power) / unit;
    return drawing_estimate(sets, results);
}

/* How much the mean of x^2 exceeds the square of the mean: for lognormal rates exp(s^2), 1.56, 2.60
 * and 7.10 times (G. Apostolakis and S. Kaplan, Reliability Engineering 2 (1981) 135-145; 7.09678
 * computed); for a gamma of shape a, 1 + 1 / a. Half a unit of the last printed digit is allowed on
 * top of 3 standard errors, which are small. */
static const struct {
    bool gamma;
    double parameter, expected, printed, greatest_error;
} excesses[] = {{false, 3, 1.56, 0.005, 0.002},
                {false, 5, 2.60, 0.005, 0.01},
                {false, 10, 7.09678, 0.000005, 0.11},
                {true, 0.5, 3, 0, 0.005}};

START_TEST(excess_of_squares)
{
    for (size_t i = 0; i < sizeof excesses / sizeof *excesses; i++) {
        double parameter = excesses[i].parameter;
        struct draw_input in = excesses[i].gamma ? drawn_gamma("x", 2e-3, parameter)
                                                 : drawn_lognormal("x", 2e-3, parameter);
        for (int m = 0; m < METHODS; m++) {
            struct drawing d = drawing_of((enum draw_method)m, 10, 1, &in);
            double mean = power_over_sets(&d, MOST_SETS, 1, 1).mean;
            struct estimate got = power_over_sets(&d, MOST_SETS, 2, mean * mean);
            double off = fabs(got.mean - excesses[i].expected) - excesses[i].printed;
            ck_assert_msg(off <= 3 * got.error && got.error < excesses[i].greatest_error,
                          "row %zu, method %d: %.6g, error %.3g", i, m, got.mean, got.error);
            drawing_free(&d);
        }
    }
}
END_TEST

/* The error factor of a lognormal whose logarithm has the deviation s. */
static double factor_of(double s)
{
    return math_exp(s * DIST_Z95);
}

/* A lognormal of deviation 2, whose mean is exp(2) times its median: sets have no bias, where the
 * middles of their strata are more than 10 standard errors too low. */
START_TEST(means_have_no_bias)
{
    enum { SETS = 6000, N = 1024 };
    struct draw_input in = drawn_lognormal("x", 1, factor_of(2));
    double mean = math_exp(2), middles = 0;
    for (int i = 0; i < N; i++)
        middles += dist_quantile(&in.dist, (i + 0.5) / N, 1 - (i + 0.5) / N) / N;
    for (int m = 0; m < METHODS; m++) {
        struct drawing d = drawing_of((enum draw_method)m, 10, 1, &in);
        struct estimate got = power_over_sets(&d, SETS, 1, 1);
        ck_assert_msg(fabs(got.mean - mean) <= 3 * got.error, "method %d: %.6g, error %.3g", m,
                      got.mean, got.error);
        ck_assert(m == DRAW_PLAIN || middles < mean - 10 * got.error);
        drawing_free(&d);
    }
}
END_TEST

enum { SEEDS = 41, SETS = 16 };

/* Roots of the mean square of the error of a set: over sets, the middle of all seeds; over all. */
struct errors {
    double typical, over_all;
};

static int by_size(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

/* The sum of squares of the errors of a seed's sets; notes the errors themselves. */
static double squares_of_seed(struct draw_plan plan, double *errors)
{
    double squares = 0;
    struct drawing d = drawing_new(plan, SMOOTH_INPUTS, smooth_inputs);
    for (uint64_t set = 0; set < SETS; set++) {
        for (size_t i = 0; i < SMOOTH_INPUTS; i++)
            drawing_fill(&d, i, set);
        errors[set] = smooth_error(d.n, (const double *const *)d.x);
        squares += errors[set] * errors[set];
    }
    drawing_free(&d);
    return squares;
}

/* Over all seeds and sets the mean has no bias. */
static struct errors smooth_errors(enum draw_method method)
{
    static double errors[SEEDS * SETS], squares[SEEDS];
    double sum = 0;
    for (size_t seed = 0; seed < SEEDS; seed++) {
        struct draw_plan plan = {method, 10, seed, isa_best()};
        sum += squares[seed] = squares_of_seed(plan, &errors[seed * SETS]);
    }
    struct estimate all = drawing_estimate(SEEDS * SETS, errors);
    ck_assert(fabs(all.mean) <= 3 * all.error);
    qsort(squares, SEEDS, sizeof *squares, by_size);
    return (struct errors){sqrt(squares[SEEDS / 2] / SETS), sqrt(sum / (SEEDS * SETS))};
}

/* Scrambled points are at least 5 times better than independent ones, in the middle of the seeds
 * and over all of them, and hypercubes 2.5 times. */
START_TEST(errors_of_a_mean)
{
    struct errors plain = smooth_errors(DRAW_PLAIN), cube = smooth_errors(DRAW_HYPERCUBE),
                  net = smooth_errors(DRAW_SCRAMBLED);
    ck_assert_msg(cube.typical < plain.typical / 2.5 && net.typical < plain.typical / 5 &&
                      net.over_all < plain.over_all / 5,
                  "typical %.3g, %.3g, %.3g; over all %.3g, %.3g, %.3g", plain.typical,
                  cube.typical, net.typical, plain.over_all, cube.over_all, net.over_all);
}
END_TEST

void draw_test_figures(TCase *t)
{
    tcase_add_test(t, excess_of_squares);
    tcase_add_test(t, means_have_no_bias);
    tcase_add_test(t, errors_of_a_mean);
}
