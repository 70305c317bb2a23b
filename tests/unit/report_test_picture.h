/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A picture of a grid, read back from its ASCII text: the axes from their own labels,
 * the cells from what is drawn. */
#ifndef REPORT_TEST_PICTURE_H
#define REPORT_TEST_PICTURE_H

#include "report_test.h"

struct picture {
    struct page_lines lines;
    size_t top, axis; /* first row; column of the axis */
    int columns, rows, wide, high;
    int frequency_high, frequency_low, damage_low, damage_high;
};

struct where {
    int x, y;
};

/* Fails when s holds no picture with damage in EUR. */
struct picture picture_read(struct arena *a, const char *s);
/* The character in a cell; a blank outside the picture. */
char cell_at(const struct picture *p, int x, int y);
/* The power that the label before the axis ends in: "1e-3 +"; that of an amount. */
int picture_power(const char *line, size_t axis);
int picture_exponent(const char *amount);

/* Cells from the left and from the top, not rounded. */
long double picture_column(const struct picture *p, double damage);
long double picture_row(const struct picture *p, double frequency);
/* Whether a log axis has a place for it, and its cell then. */
bool picture_holds(const struct grid_mark *m);
struct where picture_where(const struct picture *p, const struct grid_mark *m);

#endif
