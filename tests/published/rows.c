/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rows of published values. Owns the open file for the time of one call. */
#include "rows.h"

#include <check.h>
#include <math.h>
#include <stdbool.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

enum { FIELDS = 5 };

static char *trimmed(char *s)
{
    s += strspn(s, " ");
    size_t n = strlen(s);
    while (n > 0 && strchr(" \n", s[n - 1]))
        s[--n] = 0;
    return s;
}

static double number(const char *s)
{
    char *end;
    double x = strtod(s, &end);
    ck_assert_msg(end != s && *end == 0, "not a number: %s", s);
    return x;
}

static void check_row(char *line, double (*figure)(char *inputs))
{
    char *field[FIELDS], *at = line;
    for (int i = 0; i < FIELDS; i++) {
        field[i] = at;
        at = strchr(at, '|');
        ck_assert_msg((at != NULL) == (i < FIELDS - 1), "five fields expected: %s", line);
        if (at)
            *at++ = 0;
        field[i] = trimmed(field[i]);
        ck_assert_msg(*field[i] != 0, "an empty field: %s", line);
    }
    double expected = number(field[3]), got = figure(field[2]);
    bool absolute = strncmp(field[4], "abs ", 4) == 0;
    double allowed = absolute ? number(field[4] + 4) : number(field[4]) * fabs(expected);
    ck_assert_msg(fabs(got - expected) <= allowed, "%s: %.17g, not %.17g", field[0], got, expected);
}

int rows_check(const char *file, double (*figure)(char *inputs))
{
    char line[1000];
    int n = 0;
    FILE *f = fopen(file, "r");
    ck_assert_msg(f != NULL, "cannot read %s", file);
    while (fgets(line, sizeof line, f)) {
        ck_assert_msg(strchr(line, '\n') != NULL, "a long line: %s", line);
        if (*line == '#' || *trimmed(line) == 0)
            continue;
        check_row(line, figure);
        n++;
    }
    fclose(f);
    return n;
}
