/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How wide the columns of a table are on a page, and which ones it has room for.
 *
 * Order of sacrifice: return periods beside frequencies; then columns with keep > 0,
 * the lowest first and of equals the right one; then long words are broken. When
 * even that does not fit, the table has no shape and is printed as records. */
#ifndef REPORT_TABLE_SHAPE_H
#define REPORT_TABLE_SHAPE_H

#include "report/page.h"

enum { TABLE_GUTTER = 2 };

/* A cell as it is shown. */
struct shown {
    bool number;         /* left and right are set, else text */
    const char *left, *right; /* up to the point; the point or exponent and what follows */
    const char *text;
    const char *mark;    /* "" or a remark */
    const char *period;  /* "1 in 340 a" or "" */
};

struct table_column {
    const char *head, *unit;
    bool number;   /* numbers on the point, else text */
    bool to_right; /* head and text to the right */
    bool dropped;
    bool data;           /* never on a page */
    bool own;            /* numbers with styles of their own: heads hardly widen it */
    bool drawn;          /* a picture of characters, as wide as it is */
    unsigned keep;
    size_t left, right; /* columns up to the point; behind it, with mark */
    size_t least, natural, width;
    size_t period; /* columns of the return period; 0: not shown */
};

struct table_shape {
    const struct block *block;
    struct table_column *columns;
    struct shown *cells; /* rows * columns */
    size_t n_columns, n_rows;
    size_t width;        /* of the whole table */
    bool fits;           /* false: no shape, print records */
};

struct table_shape table_shape_of(const struct page *p, const struct block *b);
/* Whether the page has room for all columns of this keep or more, and of 0; with `easy` also
 * for texts that need not wrap more than reads well. */
bool table_has_room(const struct page *p, const struct block *b, unsigned keep, bool easy);

#endif
