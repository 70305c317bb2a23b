/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Civil dates of the proleptic Gregorian calendar, 0001-01-01 .. 9999-12-31. */
#ifndef BASE_DATE_H
#define BASE_DATE_H

#include <stdbool.h>
#include <stdint.h>

typedef int32_t day; /* days since 1970-01-01 */

#define DAY_NONE INT32_MIN
#define DATE_TEXT 11 /* bytes of YYYY-MM-DD with its zero */

/* Reads exactly YYYY-MM-DD; false when it is no date. */
bool date_read(const char *s, day *out);
/* Writes YYYY-MM-DD into buf[DATE_TEXT]; returns buf. */
char *date_write(char *buf, day d);
day date_of(int year, int month, int dom);
int date_year(day d);

/* Seconds since 1970-01-01T00:00:00Z as YYYY-MM-DDTHH:MM:SSZ into buf[21]. */
#define UTC_TEXT 21
char *utc_write(char *buf, int64_t seconds);
/* Reads that form; false when it is none. */
bool utc_read(const char *s, int64_t *out);

/* The clock seam: the present second, or the number in OHMEN_CLOCK (UTC form or
 * a date) when that environment variable is set, for tests and reproductions. */
int64_t clock_now(void);

#endif
