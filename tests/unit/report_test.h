/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the tests of the report layer share. */
#ifndef REPORT_TEST_H
#define REPORT_TEST_H

#include <check.h>

#include "report/block.h"

Suite *suite_report_number(void);
Suite *suite_report_json(void);
Suite *suite_report_csv(void);
Suite *suite_report_table(void);
Suite *suite_report_page(void);
Suite *suite_report_grid(void);
Suite *suite_report_curve(void);
Suite *suite_report_html(void);
Suite *suite_report_map(void);
Suite *suite_report_spreads(void);
Suite *suite_report_swings(void);
Suite *suite_report_golden(void);

/* Folder of the goldens: the program's first argument. */
extern const char *report_golden_folder;

/* The report as text in the arena. */
const char *text_of(struct arena *a, const struct report *r, unsigned width, bool ascii,
                    bool colour);
/* s without SGR sequences (ESC [ digits and semicolons m). */
const char *without_colour(struct arena *a, const char *s);
/* Fails unless every line is at most `width` columns, none ends in a blank, there is no
 * control character but the line end, and with `ascii` nothing beyond ASCII. */
void check_page(struct arena *a, const char *s, unsigned width, bool ascii);
/* The lines of s, cut at line ends. */
struct page_lines {
    char **at;
    size_t n;
};
struct page_lines lines_of(struct arena *a, const char *s);

#endif
