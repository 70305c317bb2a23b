/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Doubles as text and back, in three locales: two with a decimal comma, one of
 * them Turkish. Doubles are compared bit for bit. */
#include <float.h>
#include <locale.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "base/text.h"
#include "base_test.h"
#include "random.h"

static const char *const locales[] = {"C", "de_DE.UTF-8", "tr_TR.UTF-8"};
enum { LOCALES = sizeof locales / sizeof locales[0] };

/* A locale that is not there is a failure: .ci/prepare makes them. */
static void enter_locale(int i)
{
    ck_assert_msg(setlocale(LC_ALL, locales[i]) != NULL, "no locale %s", locales[i]);
    char probe[8];
    snprintf(probe, sizeof probe, "%.1f", 0.5);
    ck_assert_str_eq(probe, i == 0 ? "0.5" : "0,5");
}

static void leave_locale(void)
{
    setlocale(LC_ALL, "C");
}

static bool read_back(const char *text, double *x)
{
    return text_to_double(text, text + strlen(text), x);
}

static bool same_bits(double a, double b)
{
    return memcmp(&a, &b, sizeof a) == 0;
}

/* Computed by hand from the definition (fewest digits that read back); the
 * bounds of double: IEEE 754-2008, table 3.5 and C17 5.2.4.2.2. */
static const struct {
    double x;
    const char *text;
} written[] = {
    {0, "0"},
    {-0.0, "-0"},
    {1, "1"},
    {2.385, "2.385"},
    {-2.385, "-2.385"},
    {1.2e-7, "1.2e-7"},
    {340, "340"},
    {0.1, "0.1"},
    {0.1 + 0.2, "0.30000000000000004"},
    {1e-4, "0.0001"},
    {1e-5, "1e-5"},
    {123456789012345, "123456789012345"},
    {1e14, "100000000000000"},
    {1e15, "1e15"},
    {1e100, "1e100"},
    {1.5e-100, "1.5e-100"},
    {9007199254740993.0, "9007199254740992"},
    {DBL_MAX, "1.7976931348623157e308"},
    {DBL_MIN, "2.2250738585072014e-308"},
    {0x1p-1074, "5e-324"},
    {0x3p-1074, "1.5e-323"},
    {0x0.fffffffffffffp-1022, "2.225073858507201e-308"},
    {DBL_EPSILON, "2.220446049250313e-16"},
};
enum { WRITTEN = sizeof written / sizeof written[0] };

START_TEST(numbers_are_written)
{
    for (int l = 0; l < LOCALES; l++) {
        enter_locale(l);
        char buf[32];
        ck_assert_str_eq(text_double(buf, written[_i].x), written[_i].text);
        leave_locale();
    }
}
END_TEST

static const struct {
    const char *text;
    double x;
} read_cases[] = {
    {"0", 0},
    {"007", 7},
    {"2.385", 2.385},
    {"2.50", 2.5},
    {"1e3", 1000},
    {"1E+3", 1000},
    {"12.5e-1", 1.25},
    {"9007199254740993", 9007199254740992.0},       /* a tie goes to even */
    {"9007199254740993.0000001", 9007199254740994.0}, /* no tie any more */
    {"1.7976931348623158e308", DBL_MAX},
    {"4.9e-324", 0x1p-1074},
    {"2.4703282292062327e-324", 0},                 /* below half of the least */
    {"1e-400", 0},
};
enum { READ_CASES = sizeof read_cases / sizeof read_cases[0] };

START_TEST(numbers_are_read)
{
    for (int l = 0; l < LOCALES; l++) {
        enter_locale(l);
        double x = -1;
        ck_assert(read_back(read_cases[_i].text, &x));
        leave_locale();
        ck_assert(same_bits(x, read_cases[_i].x));
    }
}
END_TEST

static const char *const not_numbers[] = {
    "",      " 1",   "1 ",    "-1",   "+1",   ".5",    "5.",   "1e",    "1e+",      "1,5",
    "0x10",  "inf",  "nan",   "1.2.3", "1e5.0", "--1", "1e400", "1'000", "1_0", "\xD9\xA1",
};
enum { NOT_NUMBERS = sizeof not_numbers / sizeof not_numbers[0] };

START_TEST(what_is_no_number_leaves_the_output)
{
    for (int l = 0; l < LOCALES; l++) {
        enter_locale(l);
        double x = 2.385;
        bool read = read_back(not_numbers[_i], &x);
        leave_locale();
        ck_assert(!read);
        ck_assert(same_bits(x, 2.385));
    }
}
END_TEST

START_TEST(only_the_stretch_is_read)
{
    const char *s = "12.75kV";
    double x = 0;
    ck_assert(text_to_double(s, s + 5, &x));
    ck_assert(same_bits(x, 12.75));
    ck_assert(text_to_double(s, s + 4, &x));
    ck_assert(same_bits(x, 12.7));
    ck_assert(!text_to_double(s, s + 3, &x));
    ck_assert(!text_to_double(s, s + 6, &x));
}
END_TEST

START_TEST(the_longest_number)
{
    char digits[1102];
    memset(digits, '9', sizeof digits);
    memcpy(digits, "0.", 2);
    for (int l = 0; l < LOCALES; l++) {
        enter_locale(l);
        double x = 0;
        bool at = text_to_double(digits, digits + 1100, &x);
        bool past = text_to_double(digits, digits + 1101, &x);
        leave_locale();
        ck_assert(at);
        ck_assert(same_bits(x, 1.0));
        ck_assert(!past);
    }
}
END_TEST

/* Plain ifs, since each ck_assert writes to a file. */
static void check_round_trip(double x)
{
    char buf[32];
    double back = 0;
    text_double(buf, x);
    if (strchr(buf, ',') || !read_back(buf, &back) || !same_bits(back, x))
        ck_abort_msg("%a is written as %s", x, buf);
}

/* A million in the C locale, a tenth of that in each of the others. */
START_TEST(random_doubles_come_back)
{
    enter_locale(_i);
    struct random r = random_seed(20260101 + (uint64_t)_i);
    int n = _i == 0 ? 500000 : 50000;
    for (int i = 0; i < n; i++) {
        check_round_trip(fabs(random_double(&r)));
        check_round_trip(random_log_uniform(&r, 1e-12, 1e12));
    }
    leave_locale();
}
END_TEST

START_TEST(short_decimals_come_back_as_written)
{
    struct random r = random_seed(7);
    for (int i = 0; i < 200000; i++) {
        char text[40], back[32];
        snprintf(text, sizeof text, "%d.%03d", (int)random_range(&r, 0, 999999),
                 (int)random_range(&r, 0, 99) * 10 + (int)random_range(&r, 1, 9));
        double x = 0;
        ck_assert(read_back(text, &x));
        ck_assert_str_eq(text_double(back, x), text);
    }
}
END_TEST

/* No correctly rounded decimal of fewer digits reads back. Texts without an
 * exponent are left out: their zeros are no digits of the figure. */
START_TEST(no_digit_too_many)
{
    struct random r = random_seed(11);
    for (int i = 0; i < 20000; i++) {
        double x = fabs(i % 4 ? random_double(&r) : ldexp(random_uniform(&r, 0, 1), -1030));
        char ours[32], shorter[32];
        text_double(ours, x);
        int used = 0;
        if (!strchr(ours, 'e'))
            continue;
        for (const char *p = ours; *p && *p != 'e'; p++)
            used += *p >= '0' && *p <= '9';
        for (int digits = 1; digits < used; digits++) {
            snprintf(shorter, sizeof shorter, "%.*e", digits - 1, x);
            double back = 0;
            ck_assert_msg(!read_back(shorter, &back) || !same_bits(back, x),
                          "%s also does for %s", shorter, ours);
        }
    }
}
END_TEST

Suite *suite_number(void)
{
    Suite *s = suite_create("numbers as text");
    TCase *t = tcase_create("numbers");
    tcase_add_loop_test(t, numbers_are_written, 0, WRITTEN);
    tcase_add_loop_test(t, numbers_are_read, 0, READ_CASES);
    tcase_add_loop_test(t, what_is_no_number_leaves_the_output, 0, NOT_NUMBERS);
    tcase_add_test(t, only_the_stretch_is_read);
    tcase_add_test(t, the_longest_number);
    tcase_add_loop_test(t, random_doubles_come_back, 0, LOCALES);
    tcase_add_test(t, short_decimals_come_back_as_written);
    tcase_add_test(t, no_digit_too_many);
    suite_add_tcase(s, t);
    return s;
}
