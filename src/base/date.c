/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Civil dates by the era method (H. Hinnant, "chrono-compatible low-level date
 * algorithms", days_from_civil and civil_from_days), and the clock seam. */
#include "base/date.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <time.h>

day date_of(int year, int month, int dom)
{
    int y = month <= 2 ? year - 1 : year;
    int era = (y >= 0 ? y : y - 399) / 400;
    int yoe = y - era * 400;
    int doy = (153 * (month > 2 ? month - 3 : month + 9) + 2) / 5 + dom - 1;
    int doe = yoe * 365 + yoe / 4 - yoe / 100 + doy;
    return era * 146097 + doe - 719468;
}

static void civil_of(day d, int *year, int *month, int *dom)
{
    int z = d + 719468;
    int era = (z >= 0 ? z : z - 146096) / 146097;
    int doe = z - era * 146097;
    int yoe = (doe - doe / 1460 + doe / 36524 - doe / 146096) / 365;
    int doy = doe - (365 * yoe + yoe / 4 - yoe / 100);
    int mp = (5 * doy + 2) / 153;
    *dom = doy - (153 * mp + 2) / 5 + 1;
    *month = mp < 10 ? mp + 3 : mp - 9;
    *year = yoe + era * 400 + (*month <= 2);
}

int date_year(day d)
{
    int y, m, dom;
    civil_of(d, &y, &m, &dom);
    return y;
}

/* Reads n digits at s; -1 when there are not n digits. */
static int digits(const char *s, int n)
{
    int value = 0;
    for (int i = 0; i < n; i++) {
        if (s[i] < '0' || s[i] > '9')
            return -1;
        value = value * 10 + (s[i] - '0');
    }
    return value;
}

static int days_in_month(int year, int month)
{
    static const int days[] = {31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31};
    bool leap = (year % 4 == 0 && year % 100 != 0) || year % 400 == 0;
    return month == 2 && leap ? 29 : days[month - 1];
}

/* Reads the ten characters of a date at s. */
static bool read_civil(const char *s, day *out)
{
    if (strnlen(s, 10) < 10 || s[4] != '-' || s[7] != '-')
        return false;
    int year = digits(s, 4), month = digits(s + 5, 2), dom = digits(s + 8, 2);
    if (year < 1 || month < 1 || month > 12 || dom < 1 || dom > days_in_month(year, month))
        return false;
    *out = date_of(year, month, dom);
    return true;
}

bool date_read(const char *s, day *out)
{
    return strlen(s) == 10 && read_civil(s, out);
}

char *date_write(char *buf, day d)
{
    int y, m, dom;
    civil_of(d, &y, &m, &dom);
    snprintf(buf, DATE_TEXT, "%04u-%02u-%02u", (unsigned)y % 10000u, (unsigned)m % 100u,
             (unsigned)dom % 100u);
    return buf;
}

char *utc_write(char *buf, int64_t seconds)
{
    int64_t days = seconds / 86400, rest = seconds % 86400;
    if (rest < 0) {
        rest += 86400;
        days--;
    }
    char date[DATE_TEXT];
    date_write(date, (day)days);
    unsigned s = (unsigned)rest;
    snprintf(buf, UTC_TEXT, "%sT%02u:%02u:%02uZ", date, s / 3600 % 100, s / 60 % 60, s % 60);
    return buf;
}

bool utc_read(const char *s, int64_t *out)
{
    day d;
    if (strlen(s) != 20 || !read_civil(s, &d) || s[10] != 'T' || s[13] != ':' || s[16] != ':' ||
        s[19] != 'Z')
        return false;
    int h = digits(s + 11, 2), m = digits(s + 14, 2), sec = digits(s + 17, 2);
    if (h < 0 || h > 23 || m < 0 || m > 59 || sec < 0 || sec > 59)
        return false;
    *out = (int64_t)d * 86400 + h * 3600 + m * 60 + sec;
    return true;
}

int64_t clock_now(void)
{
    const char *fixed = getenv("OHMEN_CLOCK");
    int64_t seconds;
    day d;
    if (fixed && utc_read(fixed, &seconds))
        return seconds;
    if (fixed && date_read(fixed, &d))
        return (int64_t)d * 86400;
    return (int64_t)time(NULL);
}
