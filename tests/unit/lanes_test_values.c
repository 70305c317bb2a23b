/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Arguments for the functions over lanes (lanes_test.h). Owns nothing. */
#include "lanes_test.h"

#include <float.h>
#include <math.h>

enum { MANY = LANES_TEST_MANY, ROUNDS = 512 / ELEMENTARY_SLOWER, NEAR = 8 };

void fill_bits(struct random *r, int round, double *x, double *y)
{
    (void)round;
    for (int i = 0; i < MANY; i++) {
        x[i] = double_of(random_next(r));
        y[i] = double_of(random_next(r));
    }
}

/* With their negatives, and the doubles next to them. */
static const double ends[] = {0,
                              DBL_MIN,
                              DBL_MAX,
                              INFINITY,
                              1,
                              2,
                              3,
                              0.5,
                              0.25,
                              60,
                              708.39641853226411,
                              709.782712893384,
                              745.13321910194122,
                              750,
                              0x1p-53,
                              0x1p-54,
                              0x1p52,
                              0x1p53,
                              0x1p1000,
                              0x1.6a09e667f3bcdp0};
enum { ENDS = 6 * (int)(sizeof ends / sizeof *ends) + 2 };

static double end_of(int i)
{
    static const uint64_t nans[] = {UINT64_C(0x7ff8000000000001), UINT64_C(0xfff8000000000bad)};
    if (i < 2)
        return double_of(nans[i]);
    double size = ends[(i - 2) / 6], x[] = {size, nextafter(size, 0), nextafter(size, INFINITY)};
    return i % 2 ? x[i / 2 % 3] : -x[i / 2 % 3];
}

void fill_ends(struct random *r, int round, double *x, double *y)
{
    (void)r;
    for (int i = 0; i < MANY; i++) {
        int pair = round * MANY + i;
        x[i] = end_of(pair % ENDS);
        y[i] = end_of(pair / ENDS % ENDS);
    }
}

/* Evenly from lo to hi, all the rounds together; the last digits are random. */
static void fill_evenly(struct random *r, int round, double lo, double hi, double *x)
{
    double step = (hi - lo) / (ROUNDS * (double)MANY);
    for (int i = 0; i < MANY; i++)
        x[i] = lo + (round % ROUNDS * (double)MANY + i + random_uniform(r, 0, 1)) * step;
}

struct range {
    double lo, hi;
};

/* Round by round another. */
#define FILL_RANGES(r, round, ranges, x)                                                           \
    do {                                                                                           \
        enum { N = sizeof(ranges) / sizeof *(ranges) };                                            \
        const struct range *of = &(ranges)[(round) % N];                                           \
        fill_evenly(r, (round) / N * N, of->lo, of->hi, x);                                        \
    } while (0)

void fill_exp(struct random *r, int round, double *x, double *y)
{
    static const struct range ranges[] = {{-750, 720}, {-40, 40}, {-1, 1}, {-0.004, 0.004}};
    (void)y;
    FILL_RANGES(r, round, ranges, x);
}

void fill_log(struct random *r, int round, double *x, double *y)
{
    static const struct range ranges[] = {{0, 2}, {0.99, 1.01}, {0, 1e6}, {0, 4 * DBL_MIN}};
    (void)y;
    FILL_RANGES(r, round, ranges, x);
    for (int i = 0; i < MANY; i += 2)
        x[i] = random_between(r, 0, DBL_MAX);
}

void fill_log1p(struct random *r, int round, double *x, double *y)
{
    static const struct range ranges[] = {{-1, 1}, {-0.01, 0.01}, {-1, 1e6}, {-1e-12, 1e-12}};
    (void)y;
    FILL_RANGES(r, round, ranges, x);
}

void fill_pow(struct random *r, int round, double *x, double *y)
{
    static const struct range ranges[] = {{0, 2}, {0.5, 1}, {0, 1000}, {1, 1.01}};
    FILL_RANGES(r, round, ranges, x);
    for (int i = 0; i < MANY; i++)
        y[i] = i % 2 ? random_uniform(r, -750, 750) / (fabs(x[i] - 1) + 1)
                     : (double)random_range(r, -40, 40) / 4;
}

/* x moved by a few doubles. */
static double near(struct random *r, double x)
{
    return double_of(bits_of(x) + (uint64_t)random_range(r, -NEAR, NEAR));
}

/* Halfway between steps of ln 2 / 128. */
void fill_exp_breaks(struct random *r, int round, double *x, double *y)
{
    const double step = 0x1.62e42fefa39efp-8;
    (void)y;
    for (int i = 0; i < MANY; i++) {
        int64_t n = round % 2 ? random_range(r, -138000, 132000) : random_range(r, -300, 300);
        x[i] = near(r, ((double)n + 0.5) * step);
    }
}

/* Halfway between 1 + j/128, and at powers of two; less 1 in every other round. */
void fill_log_breaks(struct random *r, int round, double *x, double *y)
{
    (void)y;
    for (int i = 0; i < MANY; i++) {
        double middle = 1 + (double)random_range(r, -1, 255) / 256;
        int scale = round % 2 ? (int)random_range(r, -2, 2) : (int)random_range(r, -1070, 1022);
        x[i] = near(r, ldexp(middle, scale)) - (round / 2 % 2 ? 1 : 0);
    }
}

void fill_pow_breaks(struct random *r, int round, double *x, double *y)
{
    fill_log_breaks(r, round & 1, x, y);
    for (int i = 0; i < MANY; i++)
        y[i] = near(r, ((double)random_range(r, -1000, 1000) + 0.5) / 128);
}

static void put_probability(double small, int above, double *p, double *q)
{
    *p = above ? 1 - small : small;
    *q = above ? small : 1 - small;
}

void fill_probabilities(struct random *r, int round, double *x, double *y)
{
    (void)round;
    for (int i = 0; i < MANY; i++) {
        double p = random_uniform(r, 0, 1);
        put_probability(p < 0.5 ? p + 0x1p-60 : 1 - p, p >= 0.5, &x[i], &y[i]);
    }
}

void fill_tails(struct random *r, int round, double *x, double *y)
{
    double least = round % 2 ? 0x1p-53 : 0x1p-1074; /* from there on p, too, is below 1 */
    for (int i = 0; i < MANY; i++) {
        double small = random_between(r, least, 0.5);
        put_probability(small, 1 - small < 1 && random_next(r) & 1, &x[i], &y[i]);
    }
}

/* The centre ends at 0.075, the near tail at exp(-25), the probabilities at 1/2. */
void fill_tail_breaks(struct random *r, int round, double *x, double *y)
{
    static const double breaks[] = {0.075, 0x1.e8a37a45fc32ep-37, 0.5};
    (void)round;
    for (int i = 0; i < MANY; i++) {
        double p = near(r, breaks[i % 3]);
        put_probability(p < 0.5 ? p : 0.5, random_next(r) & 1, &x[i], &y[i]);
    }
}
