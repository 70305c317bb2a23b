/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reading a file of published values: id | source | inputs | expected | tolerance,
 * one a line, `#` begins a comment. The tolerance is relative, or absolute after the
 * word `abs`. */
#ifndef TESTS_ROWS_H
#define TESTS_ROWS_H

/* For each row: figure(inputs) must be `expected` within the tolerance; `inputs` may
 * be written to. Returns the number of rows; fails the Check test on a bad line. */
int rows_check(const char *file, double (*figure)(char *inputs));

#endif
