/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Monotonic where one row of a table gives way to the next, and where a method does: each
 * break is walked over in steps of one double. */
#include <math.h>

#include "elementary_test.h"
#include "math/elementary.h"
#include "math/elementary_core.h"

enum { AROUND = 200 / ELEMENTARY_SLOWER + 10 };

static double to_power_of_half(double x)
{
    return math_pow(x, 0.5);
}

static double to_great_power(double x)
{
    return math_pow(x, 37.25);
}

static double two_to_power(double x)
{
    return math_pow(2, x);
}

static double falling_erfc(double x)
{
    return -math_erfc(x);
}

static void check_rising(double (*f)(double), double middle)
{
    double x = middle;
    for (int i = 0; i < AROUND; i++)
        x = nextafter(x, -INFINITY);
    double before = f(x);
    for (int i = 0; i < 2 * AROUND; i++) {
        x = nextafter(x, INFINITY);
        double y = f(x);
        ck_assert_msg(y >= before, "falls at %a from %a to %a", x, before, y);
        before = y;
    }
}

/* Halfway between steps of ln 2 / 128: all near 0, some far away. */
START_TEST(exp_and_expm1_rise)
{
    for (int n = -137600; n < 131000; n += n < -2000 || n >= 2000 ? 97 : 1) {
        double middle = (n + 0.5) * 0x1.62e42fefa39efp-8;
        check_rising(math_exp, middle);
        if (middle > -36)
            check_rising(math_expm1, middle);
    }
    check_rising(math_exp, 0);
    check_rising(math_expm1, 0);
}
END_TEST

START_TEST(powers_of_2_rise)
{
    for (int n = -2000; n < 2000; n++)
        check_rising(two_to_power, (n + 0.5) / ELEMENTARY_STEPS);
}
END_TEST

static void check_logarithms(double middle, int k)
{
    check_rising(math_log, ldexp(middle, k));
    check_rising(math_log10, ldexp(middle, k));
    if (k >= -1)
        check_rising(math_log1p, ldexp(middle, k) - 1);
    check_rising(to_power_of_half, ldexp(middle, k));
    if (k > -20 && k < 20)
        check_rising(to_great_power, ldexp(middle, k));
}

/* Halfway between 1 + j/128, and at powers of two. */
START_TEST(logarithms_and_powers_rise)
{
    static const int scales[] = {-1060, -1022, -500, -2, -1, 0, 1, 30, 1022};
    for (size_t i = 0; i < sizeof scales / sizeof *scales; i++) {
        for (int j = 0; j < ELEMENTARY_STEPS; j++)
            check_logarithms(1 + (j + 0.5) / ELEMENTARY_STEPS, scales[i]);
        check_logarithms(1, scales[i]);
    }
}
END_TEST

/* log(1 + x) where 1 + x rounds to one side or the other, and near 0. */
START_TEST(log1p_rises)
{
    for (int k = -60; k < 60; k++) {
        check_rising(math_log1p, ldexp(1, k));
        check_rising(math_log1p, ldexp(1.5, k));
        if (k < 0)
            check_rising(math_log1p, -ldexp(1, k));
    }
}
END_TEST

START_TEST(erfc_falls)
{
    check_rising(falling_erfc, 0);
    check_rising(falling_erfc, 0.46);
    check_rising(falling_erfc, -0.46);
    check_rising(falling_erfc, 28);
}
END_TEST

Suite *suite_elementary_order(void)
{
    Suite *s = suite_create("elementary order");
    TCase *c = tcase_create("order");
    tcase_set_timeout(c, 120);
    tcase_add_test(c, exp_and_expm1_rise);
    tcase_add_test(c, powers_of_2_rise);
    tcase_add_test(c, logarithms_and_powers_rise);
    tcase_add_test(c, log1p_rises);
    tcase_add_test(c, erfc_falls);
    suite_add_tcase(s, c);
    return s;
}
