/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Numbers for display. Expected texts follow from the rules in report/block.h and
 * decimal arithmetic by hand; the random ones are compared with the C library's
 * correctly rounded conversions both ways. */
#include "report_test.h"

#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "random.h"
#include "report/number.h"

static const struct { double x; enum number_style style; const char *text;
} numbers[] = {
    {0, STYLE_PLAIN, "0"},
    {-0.0, STYLE_PLAIN, "0"},
    {1, STYLE_PLAIN, "1"},
    {-1.5, STYLE_PLAIN, "-1.5"},
    {0.0123, STYLE_PLAIN, "0.0123"},
    {0.00123, STYLE_PLAIN, "1.23e-3"},
    {0.009994, STYLE_PLAIN, "9.99e-3"},
    {0.009996, STYLE_PLAIN, "0.0100"},
    {0.01, STYLE_PLAIN, "0.01"},
    {1.398, STYLE_PLAIN, "1.40"}, /* rounded: all three digits; exact: no zeros at the end */
    {1.4, STYLE_PLAIN, "1.4"},
    {12.02, STYLE_PLAIN, "12.0"},
    {12, STYLE_PLAIN, "12"},
    {0.1 + 0.2, STYLE_PLAIN, "0.3"}, /* 0.30000000000000004: the error of a sum is no digit */
    {0.30000000003, STYLE_PLAIN, "0.300"},
    {119.97, STYLE_PLAIN, "120"},
    {1.0004, STYLE_RATIO, "1.00"},
    {12345, STYLE_PLAIN, "12300"},
    {99949, STYLE_PLAIN, "99900"},
    {99950, STYLE_PLAIN, "1.00e5"}, /* a tie: half to even gives 1000e2 */
    {100000, STYLE_PLAIN, "1e5"},
    {123456789, STYLE_PLAIN, "1.23e8"},
    {1.125, STYLE_PLAIN, "1.12"}, /* exactly half: to even */
    {1.375, STYLE_PLAIN, "1.38"},
    {2.385, STYLE_PLAIN, "2.38"}, /* the double is 2.38499999999999978684 */
    {1e-12, STYLE_PLAIN, "1e-12"},
    {5e-324, STYLE_PLAIN, "4.94e-324"},
    {1.7976931348623157e308, STYLE_PLAIN, "1.80e308"},
    {-2.5e-7, STYLE_PLAIN, "-2.5e-7"},
    {INFINITY, STYLE_PLAIN, "infinite"},
    {-INFINITY, STYLE_PLAIN, "-infinite"},
    {NAN, STYLE_PLAIN, "undefined"},
    {1234567, STYLE_MONEY, "1230000"},
    {0.00895, STYLE_MONEY, "0.00895"},
    {0.000895, STYLE_MONEY, "8.95e-4"},
    {-0.03102, STYLE_MONEY, "-0.0310"},
    {2.94e-3, STYLE_FREQUENCY, "2.94e-3"},
    {0.0213, STYLE_FREQUENCY, "2.13e-2"},
    {0.5, STYLE_FREQUENCY, "0.5"},
    {3.12, STYLE_FREQUENCY, "3.12"},
    {0.0123, STYLE_PROBABILITY, "0.0123"},
    {4.1e-5, STYLE_PROBABILITY, "4.1e-5"},
    {1, STYLE_PROBABILITY, "1"},
    {0.9994, STYLE_PROBABILITY, "0.999"},
    {0.9999, STYLE_PROBABILITY, "0.9999"},
    {0.99999949, STYLE_PROBABILITY, "0.999999"},
    {1 - 1e-11, STYLE_PROBABILITY, "0.99999999999"},
    {0.123, STYLE_PERCENT, "12.3"},
    {0.0145, STYLE_PERCENT, "1.45"},
    {0.999949, STYLE_PERCENT, "99.99"},
    {1, STYLE_PERCENT, "100"},
    {0.00001, STYLE_PERCENT, "1e-3"},
    {-0.07, STYLE_PERCENT, "-7"},
    {1.234, STYLE_RATIO, "1.23"},
    {123, STYLE_GROUPED, "123"},
    {1234, STYLE_GROUPED, "1 230"},
    {-98765, STYLE_GROUPED, "-98 800"},
    {100000, STYLE_GROUPED, "100 000"},
    {1234567, STYLE_GROUPED, "1 230 000"},
    {999999999999, STYLE_GROUPED, "1e12"},
    {123456789012, STYLE_GROUPED, "123 000 000 000"},
    {1.39, STYLE_GROUPED, "1.39"},
    {0.0123, STYLE_GROUPED, "0.0123"},
    {1.23e-3, STYLE_GROUPED, "1.23e-3"},
    {0.98765, STYLE_GROUPED, "0.988"},
    {0.99123456, STYLE_GROUPED, "0.991235"},
    {0.99979452, STYLE_GROUPED, "0.999795"},
    {0.999997948, STYLE_GROUPED, "0.99999795"},
    {1 - 1e-12, STYLE_GROUPED, "0.999999999999"},
    {1, STYLE_GROUPED, "1"},
    {2027, STYLE_YEAR, "2027"},
    {2031.25, STYLE_YEAR, "2031.25"},
    {2031.2385, STYLE_YEAR, "2031.24"},
    {-44.5, STYLE_YEAR, "-44.5"},
    {123456.125, STYLE_YEAR, "123456.12"},
    {0, STYLE_YEAR, "0"},
};

START_TEST(numbers_as_specified)
{
    char buf[32];
    for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++)
        ck_assert_str_eq(number_text(buf, numbers[i].x, numbers[i].style), numbers[i].text);
}
END_TEST

/* Whatever the notation, the value is that of printf's three digits, shifted. */
START_TEST(rounding_is_that_of_the_exact_double)
{
    struct random r = random_seed(20270331);
    for (int i = 0; i < 20000; i++) {
        char raw[64], moved[64], buf[32];
        double x = random_double(&r);
        int shift = (int)random_range(&r, -2, 9);
        ck_assert_ptr_eq(number_scaled(buf, x, STYLE_PLAIN, shift), buf);
        snprintf(raw, sizeof raw, "%.2e", x);
        char *e = strchr(raw, 'e');
        snprintf(moved, sizeof moved, "%.*se%d", (int)(e - raw), raw, atoi(e + 1) - shift);
        ck_assert_msg(strtod(buf, NULL) == strtod(moved, NULL), "%s for %s", buf, moved);
        ck_assert_uint_le(strlen(buf), 12);
    }
}
END_TEST

START_TEST(return_periods)
{
    static const struct { double per_year; const char *text; } cases[] = {
        {2.94e-3, "1 in 340 a"}, {0, "never"},       {1, "1 per a"},      {3.1, "3.1 per a"},
        {0.5, "1 in 2 a"},       {0.1, "1 in 10 a"}, {1e-12, "1 in 1e12 a"},
        {4e-6, "1 in 2.5e5 a"},  {-1, "undefined"},  {NAN, "undefined"},
        {5e-324, "1 in over 1e308 a"}, {-0.0, "never"}, {250000, "2.5e5 per a"}};
    char buf[32];
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
        ck_assert_str_eq(return_period_text(buf, cases[i].per_year), cases[i].text);
}
END_TEST

START_TEST(amounts)
{
    static const struct { double x; const char *unit, *text;
    } cases[] = {{12345, "EUR/a", "12.3 kEUR/a"},
                 {999.4, "EUR", "999 EUR"},
                 {999.7, "EUR", "1.00 kEUR"},
                 {0, "EUR", "0 EUR"},
                 {-4.2e6, "EUR", "-4.2 MEUR"},
                 {3e9, "CHF", "3 GCHF"},
                 {0.5, "EUR", "0.5 EUR"},
                 {2e12, "EUR", "2000 GEUR"},
                 {12345, "", "12300"},
                 {1e-5, "EUR/a", "1e-5 EUR/a"},
                 {1e15, "EUR", "1000000 GEUR"},
                 {0.00895, "EUR", "0.00895 EUR"}};
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
        ck_assert_str_eq(money_text(a, cases[i].x, cases[i].unit), cases[i].text);
    arena_free(a);
}
END_TEST

START_TEST(prefix_of_a_column)
{
    static const struct { int largest, smallest, shift;
    } cases[] = {{2, 0, 0},  {2, -9, 0}, {3, 3, 3}, {3, 2, 3},  {3, 1, 0},      {4, 0, 3},
                 {4, -5, 3}, {6, 5, 6},  {6, 4, 3}, {6, 2, 3},  {6, -2, 3},     {7, 3, 6},
                 {9, 6, 6},  {9, 2, 6},  {9, 8, 9}, {12, 9, 9}, {-400, 400, 0}, {14, 3, 9}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
        ck_assert_int_eq(money_shift(cases[i].largest, cases[i].smallest), cases[i].shift);
    ck_assert_str_eq(money_prefix(0), "");
    ck_assert_str_eq(money_prefix(3), "k");
    ck_assert_str_eq(money_prefix(6), "M");
    ck_assert_str_eq(money_prefix(9), "G");
}
END_TEST

/* A program that calls setlocale must not change a digit. Locales that are not
 * installed cannot be tested; C always can. */
START_TEST(locale_has_no_say)
{
    static const char *const names[] = {"C", "de_DE.UTF-8", "tr_TR.UTF-8"};
    char buf[32];
    for (size_t k = 0; k < 3; k++) {
        if (!setlocale(LC_ALL, names[k]))
            continue;
        for (size_t i = 0; i < sizeof numbers / sizeof *numbers; i++)
            ck_assert_str_eq(number_text(buf, numbers[i].x, numbers[i].style), numbers[i].text);
    }
    setlocale(LC_ALL, "C");
}
END_TEST

Suite *suite_report_number(void)
{
    Suite *s = suite_create("report number");
    TCase *t = tcase_create("number");
    tcase_add_test(t, numbers_as_specified);
    tcase_add_test(t, rounding_is_that_of_the_exact_double);
    tcase_add_test(t, return_periods);
    tcase_add_test(t, amounts);
    tcase_add_test(t, prefix_of_a_column);
    tcase_add_test(t, locale_has_no_say);
    suite_add_tcase(s, t);
    return s;
}
