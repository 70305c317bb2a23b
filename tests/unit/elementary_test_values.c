/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Special values, by C17 annex F, and results that are doubles: those are exact. Values
 * are compared by their bits, so the sign of a zero counts; any NaN equals any other. */
#include <float.h>
#include <math.h>

#include "elementary_test.h"
#include "math/elementary.h"

#define LEAST 0x1p-1074 /* the least positive double */

static void check_same(const char *name, double x, double y, double got, double expected)
{
    int same = bits_of(got) == bits_of(expected) || (isnan(got) && isnan(expected));
    ck_assert_msg(same, "%s of %a, %a: %a, not %a", name, x, y, got, expected);
}

struct value {
    const char *name;
    double (*f)(double);
    double x, expected;
};

/* C17 F.10.3.1 (exp), F.10.3.3 (expm1), F.10.3.7 to F.10.3.9 (log, log10, log1p), F.10.5
 * (erfc), each from memory; the last normal and subnormal results: computed. */
static const struct value values[] = {
    {"exp", math_exp, 0.0, 1},
    {"exp", math_exp, -0.0, 1},
    {"exp", math_exp, INFINITY, INFINITY},
    {"exp", math_exp, -INFINITY, 0},
    {"exp", math_exp, NAN, NAN},
    {"exp", math_exp, -NAN, NAN},
    {"exp", math_exp, LEAST, 1},
    {"exp", math_exp, -LEAST, 1},
    {"exp", math_exp, DBL_MAX, INFINITY},
    {"exp", math_exp, -DBL_MAX, 0},
    {"exp", math_exp, 0x1.62e42fefa39efp+9, 0x1.fffffffffff2ap+1023}, /* 1024 ln 2 */
    {"exp", math_exp, 0x1.62e42fefa39f0p+9, INFINITY},
    {"exp", math_exp, -0x1.74910d52d3051p+9, LEAST}, /* -1075 ln 2 */
    {"exp", math_exp, -0x1.74910d52d3052p+9, 0},
    {"expm1", math_expm1, 0.0, 0.0},
    {"expm1", math_expm1, -0.0, -0.0},
    {"expm1", math_expm1, INFINITY, INFINITY},
    {"expm1", math_expm1, -INFINITY, -1},
    {"expm1", math_expm1, NAN, NAN},
    {"expm1", math_expm1, LEAST, LEAST},
    {"expm1", math_expm1, -LEAST, -LEAST},
    {"expm1", math_expm1, DBL_MIN, DBL_MIN},
    {"expm1", math_expm1, -40, -1},
    {"expm1", math_expm1, -DBL_MAX, -1},
    {"expm1", math_expm1, DBL_MAX, INFINITY},
    {"expm1", math_expm1, 0x1.62e42fefa39efp+9, 0x1.fffffffffff2ap+1023},
    {"expm1", math_expm1, 0x1.62e42fefa39f0p+9, INFINITY},
    {"log", math_log, 1, 0.0},
    {"log", math_log, 0.0, -INFINITY},
    {"log", math_log, -0.0, -INFINITY},
    {"log", math_log, -LEAST, NAN},
    {"log", math_log, -1, NAN},
    {"log", math_log, -INFINITY, NAN},
    {"log", math_log, INFINITY, INFINITY},
    {"log", math_log, NAN, NAN},
    {"log", math_log, -NAN, NAN},
    {"log10", math_log10, 1, 0.0},
    {"log10", math_log10, 0.0, -INFINITY},
    {"log10", math_log10, -0.0, -INFINITY},
    {"log10", math_log10, -1, NAN},
    {"log10", math_log10, -INFINITY, NAN},
    {"log10", math_log10, INFINITY, INFINITY},
    {"log10", math_log10, NAN, NAN},
    {"log1p", math_log1p, 0.0, 0.0},
    {"log1p", math_log1p, -0.0, -0.0},
    {"log1p", math_log1p, -1, -INFINITY},
    {"log1p", math_log1p, -0x1.0000000000001p0, NAN},
    {"log1p", math_log1p, -DBL_MAX, NAN},
    {"log1p", math_log1p, -INFINITY, NAN},
    {"log1p", math_log1p, INFINITY, INFINITY},
    {"log1p", math_log1p, NAN, NAN},
    {"log1p", math_log1p, LEAST, LEAST},
    {"log1p", math_log1p, -LEAST, -LEAST},
    {"erfc", math_erfc, 0.0, 1},
    {"erfc", math_erfc, -0.0, 1},
    {"erfc", math_erfc, INFINITY, 0},
    {"erfc", math_erfc, -INFINITY, 2},
    {"erfc", math_erfc, NAN, NAN},
    {"erfc", math_erfc, LEAST, 1},
    {"erfc", math_erfc, 28, 0},
    {"erfc", math_erfc, DBL_MAX, 0},
    {"erfc", math_erfc, -DBL_MAX, 2},
};

START_TEST(special_values)
{
    for (size_t i = 0; i < sizeof values / sizeof *values; i++) {
        const struct value *v = &values[i];
        check_same(v->name, v->x, 0, v->f(v->x), v->expected);
    }
}
END_TEST

struct power {
    double x, y, expected;
};

/* C17 F.10.4.4, from memory, in its order; then the ends of the range. */
static const struct power powers[] = {
    {0.0, -3, INFINITY},
    {-0.0, -3, -INFINITY},
    {0.0, -2, INFINITY},
    {-0.0, -2, INFINITY},
    {-0.0, -2.5, INFINITY},
    {0.0, -INFINITY, INFINITY},
    {-0.0, -INFINITY, INFINITY},
    {0.0, 3, 0.0},
    {-0.0, 3, -0.0},
    {0.0, 2.5, 0.0},
    {-0.0, 2, 0.0},
    {-0.0, 2.5, 0.0},
    {-0.0, INFINITY, 0.0},
    {-1, INFINITY, 1},
    {-1, -INFINITY, 1},
    {1, NAN, 1},
    {1, INFINITY, 1},
    {1, -DBL_MAX, 1},
    {NAN, 0.0, 1},
    {NAN, -0.0, 1},
    {0.0, 0.0, 1},
    {INFINITY, 0.0, 1},
    {-INFINITY, -0.0, 1},
    {-8, 1.0 / 3, NAN},
    {-LEAST, 0.5, NAN},
    {-1, LEAST, NAN},
    {0.5, -INFINITY, INFINITY},
    {-0.5, -INFINITY, INFINITY},
    {2, -INFINITY, 0.0},
    {-2, -INFINITY, 0.0},
    {0.5, INFINITY, 0.0},
    {-0.5, INFINITY, 0.0},
    {2, INFINITY, INFINITY},
    {-2, INFINITY, INFINITY},
    {-INFINITY, -3, -0.0},
    {-INFINITY, -2, 0.0},
    {-INFINITY, -2.5, 0.0},
    {-INFINITY, 3, -INFINITY},
    {-INFINITY, 2, INFINITY},
    {-INFINITY, 2.5, INFINITY},
    {-INFINITY, INFINITY, INFINITY},
    {-INFINITY, -INFINITY, 0.0},
    {INFINITY, -LEAST, 0.0},
    {INFINITY, LEAST, INFINITY},
    {NAN, 1, NAN},
    {2, NAN, NAN},
    {0.0, NAN, NAN},
    {NAN, INFINITY, NAN},
    /* overflow and underflow, with their signs; the largest powers of two */
    {-2, 1023, -0x1p1023},
    {-2, 1024, INFINITY},
    {-2, 1025, -INFINITY},
    {-2, -1073, -0x1p-1073},
    {-2, -1074, LEAST},
    {-2, -1075, -0.0}, /* half of the least goes to even */
    {-2, -1077, -0.0},
    {-2, -1076, 0.0},
    {-DBL_MAX, DBL_MAX, INFINITY}, /* the greatest double is even */
    {DBL_MAX, -DBL_MAX, 0.0},
    {LEAST, DBL_MAX, 0.0},
    {LEAST, -DBL_MAX, INFINITY},
    {-1, DBL_MAX, 1},
    {-1, 0x1.fffffffffffffp52, -1}, /* the greatest odd number */
    {-1, 0x1p53, 1},
    {0x1.fffffffffffffp-1, 0x1p100, 0.0},
    {0x1.0000000000001p0, 0x1p100, INFINITY},
    {2, LEAST, 1},
    {2, -LEAST, 1},
    {DBL_MAX, LEAST, 1},
};

START_TEST(special_powers)
{
    for (size_t i = 0; i < sizeof powers / sizeof *powers; i++) {
        const struct power *p = &powers[i];
        check_same("pow", p->x, p->y, math_pow(p->x, p->y), p->expected);
    }
}
END_TEST

START_TEST(powers_of_two_are_exact)
{
    for (int n = -1074; n < 1024; n++)
        check_same("pow", 2, n, math_pow(2, n), ldexp(1, n));
    for (int n = -537; n < 512; n++) {
        check_same("pow", 4, n, math_pow(4, n), ldexp(1, 2 * n));
        check_same("pow", 4, n + 0.5, math_pow(4, n + 0.5), ldexp(1, 2 * n + 1));
    }
}
END_TEST

/* Whole numbers below 2^53 are products of themselves without rounding. */
START_TEST(whole_powers_are_exact)
{
    for (int x = 2; x <= 2000; x++) {
        double product = 1;
        for (int n = 0; product < 0x1p53; n++, product *= x) {
            check_same("pow", x, n, math_pow(x, n), product);
            check_same("pow", -x, n, math_pow(-x, n), n % 2 ? -product : product);
        }
    }
    check_same("pow", 10, 2, math_pow(10, 2), 100);
    check_same("pow", 10, 22, math_pow(10, 22), 1e22); /* 5^22 < 2^53 */
    check_same("pow", 10, -1, math_pow(10, -1), 0.1);
    check_same("pow", 1.5, 20, math_pow(1.5, 20), 3486784401 / 0x1p20);
}
END_TEST

/* i^3 / 2^15 has 35 bits. */
START_TEST(roots_are_exact)
{
    for (int i = 1; i < 3000; i++) {
        double square = (double)i * i / 1024;
        check_same("pow", square, 0.5, math_pow(square, 0.5), i / 32.0);
        check_same("pow", square, 1.5, math_pow(square, 1.5), square * (i / 32.0));
    }
}
END_TEST

START_TEST(powers_zero_and_one)
{
    struct random r = random_seed(31);
    for (int i = 0; i < 100000 / ELEMENTARY_SLOWER; i++) {
        double x = random_double(&r);
        check_same("pow", x, 0, math_pow(x, 0), 1);
        check_same("pow", x, 1, math_pow(x, 1), x);
        check_same("pow", 1, x, math_pow(1, x), 1);
    }
}
END_TEST

static const double tens[] = {1e0,  1e1,  1e2,  1e3,  1e4,  1e5,  1e6,  1e7,
                              1e8,  1e9,  1e10, 1e11, 1e12, 1e13, 1e14, 1e15,
                              1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22};

START_TEST(logarithms_of_tens_are_exact)
{
    for (size_t n = 0; n < sizeof tens / sizeof *tens; n++) {
        check_same("log10", tens[n], 0, math_log10(tens[n]), (double)n);
        /* the double nearest to 10^-n is within 2^-53 of it */
        double error = math_log10(1 / tens[n]) + (double)n;
        ck_assert(fabs(error) <= 0x1p-53 * (double)(n < 1 ? 1 : n));
    }
}
END_TEST

/* Powers of two: the nearest double to k ln 2, from its two parts (ln 2 to 2^-107). */
START_TEST(logarithms_of_powers_of_two)
{
    for (int k = -1074; k < 1024; k++) {
        double expected = k * 0x1.62e42fefa3800p-1 + k * 0x1.ef35793c76730p-45;
        check_same("log", ldexp(1, k), 0, math_log(ldexp(1, k)), expected);
    }
}
END_TEST

Suite *suite_elementary_values(void)
{
    Suite *s = suite_create("elementary values");
    TCase *c = tcase_create("values");
    tcase_set_timeout(c, 120);
    tcase_add_test(c, special_values);
    tcase_add_test(c, special_powers);
    tcase_add_test(c, powers_of_two_are_exact);
    tcase_add_test(c, whole_powers_are_exact);
    tcase_add_test(c, roots_are_exact);
    tcase_add_test(c, powers_zero_and_one);
    tcase_add_test(c, logarithms_of_tens_are_exact);
    tcase_add_test(c, logarithms_of_powers_of_two);
    suite_add_tcase(s, c);
    return s;
}
