/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Each function against MPFR over its whole range; the greatest error is printed. The
 * oracle is computed to 96 bits, so it counts as exact. Limits: what elementary.h says;
 * a subnormal result of exp, pow or erfc is rounded twice, the first time in at most half of
 * its last place: half of the limit, and 1/2. */
#include <float.h>
#include <math.h>
#include <mpfr.h>
#include <stdbool.h>
#include <stdio.h>

#include "elementary_test.h"
#include "math/elementary.h"
#include "math/elementary_core.h"

enum { ARGUMENTS = 25000 / ELEMENTARY_SLOWER, ORACLE_BITS = 96 };

enum spread { EVEN, BITS }; /* of the values, or of the bit patterns */

struct range {
    double lo, hi;
    enum spread spread;
};

struct subject {
    const char *name;
    double (*ours)(double);
    int (*oracle)(mpfr_ptr, mpfr_srcptr, mpfr_rnd_t);
    double limit, limit_subnormal; /* ulp */
    struct range ranges[10];
};

#define ALL {0, INFINITY, BITS}, {-0.0, -INFINITY, BITS}

static const struct subject subjects[] = {
    {"exp", math_exp, mpfr_exp, 0.52, 0.76,
     {ALL, {0x1p-60, 710, BITS}, {-0x1p-60, -746, BITS}, {-1, 1, EVEN}, {-745.2, -708, EVEN},
      {709, 709.8, EVEN}, {-0.01, 0.01, EVEN}}},
    {"expm1", math_expm1, mpfr_expm1, 0.52, 0.52,
     {ALL, {0x1p-60, 710, BITS}, {-0x1p-60, -60, BITS}, {-1, 1, EVEN}, {-45, 0, EVEN},
      {709, 709.8, EVEN}, {-0.01, 0.01, EVEN}, {0, 60, EVEN}}},
    {"log", math_log, mpfr_log, 0.52, 0.52,
     {ALL, {0.5, 2, EVEN}, {0.9, 1.1, EVEN}, {0.99, 1.01, EVEN}, {0, DBL_MIN, EVEN},
      {1, 1.00001, EVEN}, {0.99999, 1, EVEN}, {1, 0x1.0000001p0, EVEN}}},
    {"log1p", math_log1p, mpfr_log1p, 0.52, 0.52,
     {ALL, {0x1p-60, 1, BITS}, {-0x1p-60, -1, BITS}, {-1, 1, EVEN}, {-0.01, 0.01, EVEN},
      {-1, -0.9999, EVEN}, {1, 0x1p60, BITS}}},
    {"log10", math_log10, mpfr_log10, 0.52, 0.52,
     {ALL, {0.5, 2, EVEN}, {0.9, 1.1, EVEN}, {0.99, 1.01, EVEN}, {0, DBL_MIN, EVEN}}},
    {"erfc", math_erfc, mpfr_erfc, 1.5, 1.25,
     {ALL, {-6, 6, EVEN}, {0.4, 0.6, EVEN}, {0.5, 28, BITS}, {5, 28, EVEN}, {26, 27.5, EVEN}}},
};

struct worst {
    double normal, subnormal;
    double at, at_subnormal;
};

/* |y - exact| in units of the last place of `exact`; infinity stands for 2^1024, and two
 * NaNs are equal. */
static double error_of(double y, mpfr_srcptr exact)
{
    if (isnan(y) || mpfr_nan_p(exact))
        return isnan(y) && mpfr_nan_p(exact) ? 0 : INFINITY;
    if (mpfr_zero_p(exact) || mpfr_inf_p(exact) || mpfr_get_exp(exact) > 1024)
        return y == mpfr_get_d(exact, MPFR_RNDN) ? 0 : INFINITY;
    mpfr_exp_t last = mpfr_get_exp(exact) - DBL_MANT_DIG;
    MPFR_DECL_INIT(gap, 128);
    if (isinf(y))
        mpfr_set_si_2exp(gap, y > 0 ? 1 : -1, 1024, MPFR_RNDN);
    else
        mpfr_set_d(gap, y, MPFR_RNDN);
    mpfr_sub(gap, gap, exact, MPFR_RNDN);
    mpfr_mul_2si(gap, gap, last < -1074 ? 1074 : -last, MPFR_RNDN);
    return fabs(mpfr_get_d(gap, MPFR_RNDN));
}

static void note_error(struct worst *w, double y, mpfr_srcptr exact, double at)
{
    double e = error_of(y, exact);
    if (fabs(y) < DBL_MIN && e > w->subnormal) {
        w->subnormal = e;
        w->at_subnormal = at;
    } else if (fabs(y) >= DBL_MIN && e > w->normal) {
        w->normal = e;
        w->at = at;
    }
}

static void print_worst(const char *name, const struct worst *w, long n)
{
    printf("%-6s %8ld arguments: at most %.4f ulp (at %a); subnormal results %.4f ulp (at %a)\n",
           name, n, w->normal, w->at, w->subnormal, w->at_subnormal);
}

static void check_worst(const char *name, const struct worst *w, double limit, double subnormal)
{
    ck_assert_msg(w->normal <= limit, "%s: %g ulp at %a", name, w->normal, w->at);
    ck_assert_msg(w->subnormal <= subnormal, "%s: %g ulp at %a", name, w->subnormal,
                  w->at_subnormal);
}

START_TEST(close_to_the_oracle)
{
    const struct subject *s = &subjects[_i];
    struct random r = random_seed(20261 + (uint64_t)_i);
    struct worst w = {-1, -1, 0, 0};
    long n = 0;
    mpfr_t x, exact;
    mpfr_init2(x, DBL_MANT_DIG);
    mpfr_init2(exact, ORACLE_BITS);
    for (const struct range *g = s->ranges; g->lo != g->hi || g == s->ranges; g++)
        for (int i = 0; i < ARGUMENTS; i++, n++) {
            double at = g->spread == BITS ? random_between(&r, g->lo, g->hi)
                                          : random_uniform(&r, g->lo, g->hi);
            mpfr_set_d(x, at, MPFR_RNDN);
            s->oracle(exact, x, MPFR_RNDN);
            note_error(&w, s->ours(at), exact, at);
        }
    mpfr_clears(x, exact, (mpfr_ptr)0);
    print_worst(s->name, &w, n);
    check_worst(s->name, &w, s->limit, s->limit_subnormal);
}
END_TEST

/* Arguments of pow, so that results lie all over the range, and beyond. */

static void any_pair(struct random *r, double *x, double *y)
{
    *x = random_double(r);
    *y = random_double(r);
}

static void result_anywhere(struct random *r, double *x, double *y)
{
    *x = random_between(r, 0x1p-1074, DBL_MAX);
    *y = random_uniform(r, -746, 710) / math_log(*x);
}

static void result_subnormal(struct random *r, double *x, double *y)
{
    *x = random_uniform(r, 0.001, 1000);
    *y = random_uniform(r, -745.2, -708.3) / math_log(*x);
}

static void result_near_overflow(struct random *r, double *x, double *y)
{
    *x = random_between(r, 0x1p-1074, DBL_MAX);
    *y = random_uniform(r, 709.7, 709.8) / math_log(*x);
}

static void base_near_one(struct random *r, double *x, double *y)
{
    double d = random_between(r, 0x1p-52, 0x1p-3);
    *x = random_next(r) & 1 ? 1 + d : 1 - d;
    *y = random_uniform(r, -746, 710) / math_log(*x);
}

static void result_near_one(struct random *r, double *x, double *y)
{
    *x = random_uniform(r, 0.1, 10);
    *y = random_between(r, 0x1p-60, 0x1p-2);
}

static void whole_power(struct random *r, double *x, double *y)
{
    *x = random_uniform(r, -30, 30);
    *y = (double)random_range(r, -40, 40);
}

static void small_numbers(struct random *r, double *x, double *y)
{
    *x = (double)random_range(r, -200, 200) / 4;
    *y = (double)random_range(r, -64, 64) / 4;
}

static void (*const pairs[])(struct random *, double *, double *) = {
    any_pair, result_anywhere, result_subnormal, result_near_overflow,
    base_near_one, result_near_one, whole_power, small_numbers};

START_TEST(pow_close_to_the_oracle)
{
    struct random r = random_seed(20269);
    struct worst w = {-1, -1, 0, 0};
    long n = 0;
    mpfr_t x, y, exact;
    mpfr_inits2(DBL_MANT_DIG, x, y, (mpfr_ptr)0);
    mpfr_init2(exact, ORACLE_BITS);
    for (size_t k = 0; k < sizeof pairs / sizeof *pairs; k++)
        for (int i = 0; i < ARGUMENTS; i++, n++) {
            double base, power;
            pairs[k](&r, &base, &power);
            mpfr_set_d(x, base, MPFR_RNDN);
            mpfr_set_d(y, power, MPFR_RNDN);
            mpfr_pow(exact, x, y, MPFR_RNDN);
            note_error(&w, math_pow(base, power), exact, base);
        }
    mpfr_clears(x, y, exact, (mpfr_ptr)0);
    print_worst("pow", &w, n);
    check_worst("pow", &w, 0.52, 0.76);
}
END_TEST

/* head + tail against `exact`, to 2^-bits of the exact value. */
static void check_entry(const char *what, int j, double head, double tail, mpfr_srcptr exact,
                        int bits)
{
    MPFR_DECL_INIT(sum, 200);
    mpfr_set_d(sum, head, MPFR_RNDN);
    mpfr_add_d(sum, sum, tail, MPFR_RNDN);
    mpfr_sub(sum, sum, exact, MPFR_RNDN);
    bool good = mpfr_zero_p(sum) ||
                mpfr_get_exp(sum) <= (mpfr_zero_p(exact) ? 0 : mpfr_get_exp(exact)) - bits;
    ck_assert_msg(good, "%s table, row %d", what, j);
}

START_TEST(tables_are_right)
{
    MPFR_DECL_INIT(exact, 200);
    for (int j = 0; j < ELEMENTARY_STEPS; j++) {
        const struct elementary_exp_row *row = &elementary_exp_table[j];
        ck_assert(elementary_top(row->head) == row->head);
        mpfr_set_d(exact, (double)j / ELEMENTARY_STEPS, MPFR_RNDN);
        mpfr_exp2(exact, exact, MPFR_RNDN);
        check_entry("exp", j, row->head, row->tail, exact, 77);
    }
    for (int j = 0; j <= ELEMENTARY_STEPS; j++) {
        const struct elementary_log_row *row = &elementary_log_table[j];
        double centre = (1 + (double)j / ELEMENTARY_STEPS) / (j > ELEMENTARY_LAST_WHOLE ? 2 : 1);
        ck_assert(fabs(row->inverse * centre - 1) <= 0x1p-24);
        ck_assert((double)(float)row->inverse == row->inverse);
        ck_assert(row->log_head * 0x1p42 == floor(row->log_head * 0x1p42));
        mpfr_set_d(exact, row->inverse, MPFR_RNDN);
        mpfr_log(exact, exact, MPFR_RNDN);
        mpfr_neg(exact, exact, MPFR_RNDN);
        check_entry("log", j, row->log_head, row->log_tail, exact, 86);
    }
}
END_TEST

Suite *suite_elementary_sweep(void)
{
    Suite *s = suite_create("elementary sweep");
    TCase *c = tcase_create("sweep");
    tcase_set_timeout(c, 300);
    tcase_add_test(c, tables_are_right);
    tcase_add_loop_test(c, close_to_the_oracle, 0, sizeof subjects / sizeof *subjects);
    tcase_add_test(c, pow_close_to_the_oracle);
    suite_add_tcase(s, c);
    return s;
}
