/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The plane of an iso-risk grid: decades of damage to the right, decades of
 * frequency upwards, in cells of a page.
 *
 * A cell is twice as high as wide on most terminals and in print, so a decade has
 * about half as many rows as columns and lines of equal risk fall at 45 degrees.
 * Decade boundaries lie on whole cells: column k * decade_columns is damage
 * 10^(damage_low + k), row k * decade_rows is frequency 10^(frequency_high - k).
 * Invariant: 3 to 12 decades on each axis; a cell is drawn by the layer that
 * matters most there. */
#ifndef REPORT_GRID_PLANE_H
#define REPORT_GRID_PLANE_H

#include "report/page.h"

enum { GRID_LEAST_DECADES = 3, GRID_MOST_DECADES = 12 };

enum grid_layer { LAYER_NONE, LAYER_RISK, LAYER_LINE, LAYER_ARROW, LAYER_HEAD, LAYER_LABEL,
                  LAYER_MARK };

struct grid_cell {
    const char *glyph; /* clean; "" for the second half of a wide character */
    enum grid_layer layer;
};

/* Where a mark stands. */
struct grid_spot {
    bool placed;  /* false: no frequency or no damage that a log axis can show */
    bool clamped; /* beyond the axes, drawn at the edge */
    int x, y;
    size_t company; /* marks in this cell, itself included */
    size_t first;   /* the first mark in this cell */
};

struct grid_plane {
    const struct page *page;
    const struct grid *grid;
    int damage_low, damage_high, frequency_low, frequency_high; /* powers of ten */
    int decade_columns, decade_rows;
    int columns, rows;
    struct grid_cell *cells;  /* rows * columns */
    struct grid_spot *spots;  /* one a mark */
    const char **symbols;     /* one a line of the grid: one column wide each */
    size_t n_placed;
};

/* Chooses the decades of both axes so that they hold all marks with a margin. */
void grid_plane_range(struct grid_plane *g);
/* Chooses the size of a decade for `columns` columns, and finds the marks' cells. */
void grid_plane_size(struct grid_plane *g, int columns);
/* Draws all layers; grid_draw.c and grid_label.c. */
void grid_draw_lines(struct grid_plane *g);
void grid_draw_arrows(struct grid_plane *g);
void grid_draw_marks(struct grid_plane *g);
void grid_draw_labels(struct grid_plane *g);

/* The cell, or NULL outside the plane. */
struct grid_cell *grid_cell_at(const struct grid_plane *g, int x, int y);
/* Draws unless a layer that matters more is there. */
void grid_put(struct grid_plane *g, int x, int y, const char *glyph, enum grid_layer layer);

#endif
