/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The plane of a curve: its two axes and, for each line and column of the page, what
 * the line does in that column.
 *
 * An axis has whole cells from 0 to `cells`; a tick and the value of a cell are at the
 * cell's centre. Cell 0 upwards is the row of the x axis itself, so that labels to the
 * left stand exactly beside their values. A line in a column is the range from the least
 * to the greatest height that it has between the two edges of that column.
 * Invariant: a line is drawn in each column that it reaches: within half a row of its
 * least and its greatest height there or, where an area only rises or only falls, of its
 * height at the centre of the column. */
#ifndef REPORT_CURVE_PLANE_H
#define REPORT_CURVE_PLANE_H

#include "report/page.h"

enum { CURVE_ROWS = 12 /* from the x axis to the top label: a multiple of 2, 3, 4 and 6 */ };

struct curve_tick {
    double value; /* in the axis' unit */
    int at;       /* its cell */
    const char *label;
};

struct curve_scale {
    const struct curve_axis *axis;
    double low, high; /* at the centres of the first and last cell; log: powers of ten */
    int cells;        /* steps from the first cell to the last */
    int shift;        /* labels are divided by 10^shift: a prefix of money, or percent */
    ARRAY(struct curve_tick) ticks;
};

/* How lines are drawn. */
enum curve_manner {
    CURVE_AREA,   /* one line on an axis from 0: filled below, in eighths of a row */
    CURVE_STROKE, /* one line on another axis: halves of a row */
    CURVE_SYMBOLS /* several lines: the symbol of each, whole rows */
};

enum curve_layer { CURVE_NONE, CURVE_LINE, CURVE_BAND, CURVE_LABEL, CURVE_MARK };

struct curve_cell {
    const char *glyph; /* clean; a label is all in its first cell, and the next have "" */
    enum curve_layer layer;
};

/* Heights in rows above the x axis. */
struct curve_span {
    bool drawn;
    bool turns;             /* it jumps here, or goes both up and down */
    bool centred;           /* it has a value at the centre of the column */
    double least, greatest; /* between the edges of the column */
    double centre;          /* at its centre; of a jump there, the height after it */
    double last;            /* the height that was added last, and the way to it: -1, 0, 1 */
    int way;
};

/* The points through which a line is drawn: in steps, with the corners between its own. */
struct curve_points ARRAY_BODY(struct curve_point);

struct curve_plane {
    const struct page *page;
    const struct curve *curve;
    struct curve_points *drawn; /* one a line */
    struct curve_scale x, y;
    int columns;
    enum curve_manner manner;
    bool empty;               /* nothing has a place */
    bool banded;              /* an area jumps or turns within a column */
    struct curve_span *spans; /* lines * columns */
    struct curve_cell *cells; /* (CURVE_ROWS + 1) * columns, from the x axis upwards */
    const char **symbols;     /* one a line */
    bool *labelled;           /* one a mark */
};

/* --- scales: curve_scale.c, their ticks: curve_tick.c --- */

/* Whether the axis has a place for the value. */
bool curve_has_place(const struct curve_axis *axis, double value);
/* The cell of a value that has a place, not rounded. */
double curve_place(const struct curve_scale *s, double value);
/* The cell, rounded. */
int curve_cell_of(const struct curve_scale *s, double value);
/* The x axis from the least to the greatest value; equal values get room on both
 * sides. */
void curve_scale_x(struct curve_scale *s, double least, double greatest, int cells);
/* The y axis in 2, 3, 4 or 6 equal steps of a round size, from 0 unless the axis is told
 * otherwise. Has its ticks. */
void curve_scale_y(struct curve_scale *s, double least, double greatest, struct arena *a);
/* At most 8 round ticks, and at least 4 where round numbers allow; their labels stand two
 * blanks apart. */
void curve_tick_x(struct curve_scale *s, struct arena *a);
/* Ticks from `first` on in `n` equal steps, in the numbers of a linear scale or in the
 * powers of ten of a log one. */
void curve_tick_evenly(struct curve_scale *s, double first, double step, int n, struct arena *a);

/* --- the plane --- */

/* Chooses the axes' ranges; the columns are not known yet. */
void curve_plane_range(struct curve_plane *g);
/* Makes the cells, and finds the spans and the ticks of the x axis. */
void curve_plane_open(struct curve_plane *g, int columns);
/* The cell; NULL outside the plane. */
struct curve_cell *curve_cell_at(const struct curve_plane *g, int x, int y);
/* The symbol of each line into `symbols`: its own, or another one where that is taken. */
void curve_choose_symbols(struct curve_plane *g);
/* Lines, marks and labels; curve_draw.c. */
void curve_draw(struct curve_plane *g);

/* The key: lines and marks with their values, and what is not in the picture. */
void curve_write_key(struct page *p, const struct curve_plane *g);
/* Its parts, for other writers: the tables of the lines (their least and greatest points)
 * and of the marks, and the remarks. The blocks are in the page's scratch arena. */
const struct block *curve_key_lines(const struct page *p, const struct curve_plane *g);
const struct block *curve_key_marks(const struct page *p, const struct curve_plane *g);
struct lines curve_key_remarks(const struct page *p, const struct curve_plane *g);

/* The words at the axes: head, unit and kind of the axis; "" when it has none of them. */
const char *curve_x_words(const struct page *p, const struct curve_scale *s);
const char *curve_y_words(const struct page *p, const struct curve_scale *s);

/* Signs of the page: of a mark, a filled cell, the range in a column. */
const char *curve_mark_glyph(const struct page *p);
const char *curve_full_glyph(const struct page *p);
const char *curve_band_glyph(const struct page *p);

#endif
