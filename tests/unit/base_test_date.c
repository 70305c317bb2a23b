/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dates and times against timegm and gmtime_r of the C library, day by day. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

#include "base/date.h"
#include "base_test.h"
#include "random.h"

/* Every day of 0001-01-01 .. 9999-12-31. */
START_TEST(each_day_of_ten_thousand_years)
{
    day first = date_of(1, 1, 1), last = date_of(9999, 12, 31);
    ck_assert_int_eq(last - first + 1, 3652059);
    for (day d = first; d <= last; d++) {
        time_t seconds = (time_t)d * 86400;
        struct tm tm;
        gmtime_r(&seconds, &tm);
        char expected[40], text[DATE_TEXT];
        snprintf(expected, sizeof expected, "%04d-%02d-%02d", tm.tm_year + 1900, tm.tm_mon + 1,
                 tm.tm_mday);
        date_write(text, d);
        day back = DAY_NONE;
        if (strcmp(text, expected) != 0 || !date_read(text, &back) || back != d ||
            date_year(d) != tm.tm_year + 1900)
            ck_abort_msg("day %d: %s, expected %s, read as %d", d, text, expected, back);
    }
}
END_TEST

START_TEST(dates_agree_with_timegm)
{
    struct random r = random_seed(3);
    for (int i = 0; i < 100000; i++) {
        struct tm tm = {.tm_year = (int)random_range(&r, 1, 9999) - 1900,
                        .tm_mon = (int)random_range(&r, 0, 11),
                        .tm_mday = (int)random_range(&r, 1, 28)};
        struct tm asked = tm;
        ck_assert_int_eq((int64_t)date_of(tm.tm_year + 1900, tm.tm_mon + 1, tm.tm_mday) * 86400,
                         (int64_t)timegm(&asked));
    }
}
END_TEST

static const char *const no_dates[] = {
    "",           "2026",       "2026-1-01",   "2026-01-1",  "2026-13-01", "2026-00-10",
    "2026-01-00", "2026-01-32", "2026-04-31",  "2026-02-29", "1900-02-29", "2100-02-29",
    "0000-01-01", "2026/01/01", "2026-01-011", " 2026-01-01", "2026-01-01 ", "20260-1-01",
    "-026-01-01", "+026-01-01", "2026-01-0x",  "2026-01-01T", "2026-01--1",
};
enum { NO_DATES = sizeof no_dates / sizeof no_dates[0] };

START_TEST(what_is_no_date)
{
    day d = 4711;
    ck_assert(!date_read(no_dates[_i], &d));
    ck_assert_int_eq(d, 4711);
}
END_TEST

START_TEST(leap_days)
{
    day d = 0;
    ck_assert(date_read("2000-02-29", &d));
    ck_assert_int_eq(d, 11016); /* 30 years of 365, 7 leap days before, 31 + 28 days */
    ck_assert(date_read("2400-02-29", &d));
    ck_assert(date_read("0004-02-29", &d));
    ck_assert(date_read("1970-01-01", &d));
    ck_assert_int_eq(d, 0);
}
END_TEST

START_TEST(times_agree_with_the_library)
{
    struct random r = random_seed(5);
    int64_t first = (int64_t)date_of(1, 1, 1) * 86400;
    int64_t last = (int64_t)date_of(9999, 12, 31) * 86400 + 86399;
    for (int i = 0; i < 200000; i++) {
        int64_t seconds = random_range(&r, first, last);
        if (i < 3)
            seconds = i == 0 ? first : i == 1 ? last : -1;
        time_t t = (time_t)seconds;
        struct tm tm;
        gmtime_r(&t, &tm);
        char expected[80], text[UTC_TEXT];
        snprintf(expected, sizeof expected, "%04d-%02d-%02dT%02d:%02d:%02dZ", tm.tm_year + 1900,
                 tm.tm_mon + 1, tm.tm_mday, tm.tm_hour, tm.tm_min, tm.tm_sec);
        ck_assert_str_eq(utc_write(text, seconds), expected);
        int64_t back = 0;
        ck_assert(utc_read(text, &back));
        ck_assert_int_eq(back, seconds);
    }
}
END_TEST

static const char *const no_times[] = {
    "2026-04-14",           "2026-04-14T10:00:00",   "2026-04-14 10:00:00Z", "2026-04-14T24:00:00Z",
    "2026-04-14T10:60:00Z", "2026-04-14T10:00:60Z",  "2026-04-14T10:00:00z", "2026-04-31T10:00:00Z",
    "2026-04-14T1:000:00Z", "2026-04-14T10:00:00ZZ", "2026-04-14T-1:00:00Z", "",
};
enum { NO_TIMES = sizeof no_times / sizeof no_times[0] };

START_TEST(what_is_no_time)
{
    int64_t t = 4711;
    ck_assert(!utc_read(no_times[_i], &t));
    ck_assert_int_eq(t, 4711);
}
END_TEST

START_TEST(the_clock_can_be_set)
{
    setenv("OHMEN_CLOCK", "2026-04-14T10:11:12Z", 1);
    ck_assert_int_eq(clock_now(), 1776161472); /* date -u -d 2026-04-14T10:11:12Z +%s */
    setenv("OHMEN_CLOCK", "2026-04-14", 1);
    ck_assert_int_eq(clock_now(), 1776124800);
    unsetenv("OHMEN_CLOCK");
    int64_t before = (int64_t)time(NULL), now = clock_now(), after = (int64_t)time(NULL);
    ck_assert(before <= now && now <= after);
}
END_TEST

Suite *suite_date(void)
{
    Suite *s = suite_create("date");
    TCase *t = tcase_create("date");
    tcase_add_test(t, each_day_of_ten_thousand_years);
    tcase_add_test(t, dates_agree_with_timegm);
    tcase_add_loop_test(t, what_is_no_date, 0, NO_DATES);
    tcase_add_test(t, leap_days);
    tcase_add_test(t, times_agree_with_the_library);
    tcase_add_loop_test(t, what_is_no_time, 0, NO_TIMES);
    tcase_add_test(t, the_clock_can_be_set);
    suite_add_tcase(s, t);
    return s;
}
