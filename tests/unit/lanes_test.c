/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The functions over lanes against the scalar ones, bit by bit, with every instruction set that
 * this processor runs; which those are is printed. (How close the scalar ones are to the true
 * values is what elementary_test_sweep.c holds against MPFR: so close are these.) */
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "lanes_test.h"
#include "math/dist.h"
#include "math/elementary.h"
#include "math/lanes.h"

enum { MANY = LANES_TEST_MANY, ROUNDS = 512 / ELEMENTARY_SLOWER, BIT_ROUNDS = ROUNDS / 2 };

/* A function of one or two arguments, scalar and over lanes. */
struct subject {
    const char *name;
    double (*scalar)(double, double);
    void (*lanes)(const struct lanes_functions *f, size_t n, const double *x, const double *y,
                  double *z);
    struct {
        lanes_test_fill *fill;
        int rounds;
    } from[6];
};

#define ONE(name)                                                                                  \
    static double scalar_##name(double x, double y)                                                \
    {                                                                                              \
        (void)y;                                                                                   \
        return math_##name(x);                                                                     \
    }                                                                                              \
    static void lanes_##name(const struct lanes_functions *f, size_t n, const double *x,           \
                             const double *y, double *z)                                           \
    {                                                                                              \
        (void)y;                                                                                   \
        f->name(n, x, z);                                                                          \
    }

ONE(exp)
ONE(log)
ONE(log10)
ONE(expm1)
ONE(log1p)

static void lanes_pow(const struct lanes_functions *f, size_t n, const double *x, const double *y,
                      double *z)
{
    f->pow(n, x, y, z);
}

static double scalar_deviate(double p, double q)
{
    return p <= q ? dist_normal_deviate(p) : -dist_normal_deviate(q);
}

static void lanes_deviate(const struct lanes_functions *f, size_t n, const double *p,
                          const double *q, double *z)
{
    f->deviate(n, p, q, z);
}

#define ANY                                                                                        \
    {fill_bits, BIT_ROUNDS},                                                                       \
    {                                                                                              \
        fill_ends, LANES_TEST_ENDS_ROUNDS                                                          \
    }

static const struct subject subjects[] = {
    {"exp", scalar_exp, lanes_exp, {ANY, {fill_exp, ROUNDS}, {fill_exp_breaks, ROUNDS}}},
    {"expm1", scalar_expm1, lanes_expm1, {ANY, {fill_exp, ROUNDS}, {fill_exp_breaks, ROUNDS}}},
    {"log", scalar_log, lanes_log, {ANY, {fill_log, ROUNDS}, {fill_log_breaks, ROUNDS}}},
    {"log10", scalar_log10, lanes_log10, {ANY, {fill_log, ROUNDS}, {fill_log_breaks, ROUNDS}}},
    {"log1p", scalar_log1p, lanes_log1p, {ANY, {fill_log1p, ROUNDS}, {fill_log_breaks, ROUNDS}}},
    {"pow",
     math_pow,
     lanes_pow,
     {{fill_bits, BIT_ROUNDS}, {fill_ends, 16}, {fill_pow, ROUNDS}, {fill_pow_breaks, ROUNDS}}},
    {"deviate",
     scalar_deviate,
     lanes_deviate,
     {{fill_probabilities, ROUNDS}, {fill_tails, ROUNDS}, {fill_tail_breaks, ROUNDS}}},
};
enum { SUBJECTS = sizeof subjects / sizeof *subjects };

static void check_bits(const struct subject *s, enum isa isa, size_t n, const double *x,
                       const double *y, const double *z, const double *expected)
{
    if (memcmp(z, expected, n * sizeof *z) == 0)
        return;
    for (size_t i = 0; i < n; i++)
        ck_assert_msg(bits_of(z[i]) == bits_of(expected[i]),
                      "%s, %s, %zu of %zu: of %a and %a %a instead of %a", s->name, isa_name(isa),
                      i, n, x[i], y[i], z[i], expected[i]);
}

static void expect(const struct subject *s, size_t n, const double *x, const double *y, double *z)
{
    for (size_t i = 0; i < n; i++)
        z[i] = s->scalar(x[i], y[i]);
}

/* Millions of values. */
START_TEST(same_bits_as_the_scalar)
{
    const struct subject *s = &subjects[_i];
    struct random r = random_seed(20271 + (uint64_t)_i);
    double x[MANY], y[MANY], z[MANY], expected[MANY];
    for (int k = 0; s->from[k].fill; k++)
        for (int round = 0; round < s->from[k].rounds; round++) {
            s->from[k].fill(&r, round, x, y);
            expect(s, MANY, x, y, expected);
            for (int i = 0; i < ISA_COUNT; i++)
                if (isa_runs((enum isa)i)) {
                    s->lanes(lanes_functions((enum isa)i), MANY, x, y, z);
                    check_bits(s, (enum isa)i, MANY, x, y, z, expected);
                }
        }
}
END_TEST

/* n values from a place that no vector is aligned to: into another place, and onto each of the
 * arguments; what stands before and behind is left alone. */
static void check_size(const struct subject *s, enum isa isa, size_t n, const double *x,
                       const double *y)
{
    enum { AROUND = 16 };
    const struct lanes_functions *f = lanes_functions(isa);
    double expected[MANY], room[AROUND + MANY + AROUND], *at = room + AROUND;
    expect(s, n, x, y, expected);
    for (int where = 0; where < 3; where++) {
        for (size_t i = 0; i < sizeof room / sizeof *room; i++)
            room[i] = -123;
        if (where)
            memcpy(at, where == 1 ? x : y, n * sizeof *x);
        s->lanes(f, n, where == 1 ? at : x, where == 2 ? at : y, at);
        check_bits(s, isa, n, x, y, at, expected);
        for (size_t i = 0; i < AROUND; i++)
            ck_assert(room[i] == -123 && at[n + i] == -123);
    }
}

static const size_t sizes[] = {0,  1,  2,  3,  4,  5,   7,   8,   9,    15,  16,
                               17, 31, 63, 64, 65, 255, 256, 257, 1023, 1024};

START_TEST(any_size_and_place)
{
    const struct subject *s = &subjects[_i];
    struct random r = random_seed(20281 + (uint64_t)_i);
    double x[MANY + 1], y[MANY + 1];
    for (int k = 0; s->from[k].fill; k++)
        for (size_t j = 0; j < sizeof sizes / sizeof *sizes; j++) {
            s->from[k].fill(&r, (int)j, x + 1, y + 1);
            for (int i = 0; i < ISA_COUNT; i++)
                if (isa_runs((enum isa)i))
                    check_size(s, (enum isa)i, sizes[j], x + 1, y + 1);
        }
}
END_TEST

/* An independent look at a few, so that lanes and scalar are not both wrong. */
START_TEST(known_values)
{
    const double x[] = {0, 1, 100}, y[] = {2, 0.5, -1}, p[] = {0.975, 0.5, 1e-10};
    const double q[] = {0.025, 0.5, 1};
    double z[3];
    for (int i = 0; i < ISA_COUNT; i++) {
        if (!isa_runs((enum isa)i))
            continue;
        const struct lanes_functions *f = lanes_functions((enum isa)i);
        f->exp(3, x, z);
        ck_assert(z[0] == 1 && z[1] == 0x1.5bf0a8b145769p+1); /* e */
        f->log10(3, x, z);
        ck_assert(z[0] == -INFINITY && z[1] == 0 && z[2] == 2);
        f->pow(3, x, y, z);
        ck_assert(z[0] == 0 && z[1] == 1 && z[2] == 0.01);
        f->deviate(3, p, q, z); /* tables of the normal distribution */
        ck_assert_double_eq_tol(z[0], 1.959963984540054, 1e-14);
        ck_assert(z[1] == 0);
        ck_assert_double_eq_tol(z[2], -6.361340902404056, 1e-14);
    }
}
END_TEST

static Suite *suite_lanes(void)
{
    Suite *s = suite_create("lanes");
    TCase *c = tcase_create("lanes");
    tcase_set_timeout(c, 120);
    tcase_add_loop_test(c, same_bits_as_the_scalar, 0, SUBJECTS);
    tcase_add_loop_test(c, any_size_and_place, 0, SUBJECTS);
    tcase_add_test(c, known_values);
    suite_add_tcase(s, c);
    return s;
}

int main(void)
{
    SRunner *sr = srunner_create(suite_lanes());
    for (int i = 0; i < ISA_COUNT; i++)
        printf("%s: %s\n", isa_name((enum isa)i), isa_runs((enum isa)i) ? "runs" : "not here");
    srunner_run_all(sr, CK_NORMAL);
    int bad = srunner_ntests_failed(sr) != 0 || srunner_ntests_run(sr) == 0;
    srunner_free(sr);
    return bad ? EXIT_FAILURE : EXIT_SUCCESS;
}
