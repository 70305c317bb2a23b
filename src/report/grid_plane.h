/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The plane of an iso-risk grid: decades of damage to the right, decades of
 * frequency upwards, in cells of a page.
 *
 * A cell is twice as high as wide on most terminals and in print, so a decade has
 * half as many rows as columns and lines of equal risk fall at 45 degrees; a picture
 * that is narrow for its page is stretched to at most 1.4 times that. From the top to
 * the bottom of the axis it has at most 32 rows on a page of up to 120 columns, one
 * more for each 10 columns more. Decade boundaries lie on whole cells: column
 * k * decade_columns is damage 10^(damage_low + k), row k * decade_rows is frequency
 * 10^(frequency_high - k).
 * Invariant: 2 to 12 decades on each axis; no mark in the outermost rows and columns
 * of an axis with fewer than 12; a cell is drawn by the layer that matters most
 * there; parts of marks take nothing from the marks and their labels. */
#ifndef REPORT_GRID_PLANE_H
#define REPORT_GRID_PLANE_H

#include "report/page.h"

enum { GRID_LEAST_DECADES = 2, GRID_MOST_DECADES = 12 };

/* LAYER_GAP: the blank that keeps a label from what is beside it. */
enum grid_layer { LAYER_NONE, LAYER_RISK, LAYER_GAP, LAYER_LINE, LAYER_ARROW, LAYER_HEAD,
                  LAYER_LABEL, LAYER_MARK };

struct grid_cell {
    const char *glyph; /* clean; "" for the second half of a wide character */
    enum grid_layer layer;
};

/* Where a mark stands. */
struct grid_spot {
    bool placed;  /* false: no frequency or no damage that a log axis can show */
    bool clamped; /* beyond the axes, drawn at the edge */
    int x, y;
    size_t company; /* marks in this cell, itself included; of parts of marks, the parts */
    size_t first;   /* the first of them */
    bool labelled;  /* of the first one: the picture has a label for them; parts without a
                       label are not in the picture */
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

/* Chooses the fewest decades of both axes that hold all marks. */
void grid_plane_range(struct grid_plane *g);
/* Chooses the size of a decade for `columns` columns, and finds the marks' cells. */
void grid_plane_size(struct grid_plane *g, int columns);
/* Adds a decade where a mark stands at the edge; true when it did, and then the size
 * must be chosen anew. */
bool grid_plane_widen(struct grid_plane *g);
/* Finds the marks that share a cell, and makes the cells; once the size is final. */
void grid_plane_open(struct grid_plane *g);

/* The symbol of each line into `symbols`: its own, or another one where that does not fit. */
void grid_choose_symbols(struct grid_plane *g);
/* Draw all layers, in this order; grid_draw.c, grid_arrow.c and grid_label.c. The labels bring
 * the parts of marks with them. */
void grid_draw_lines(struct grid_plane *g);
void grid_draw_marks(struct grid_plane *g);
void grid_draw_arrows(struct grid_plane *g);
void grid_draw_labels(struct grid_plane *g);

/* Whether mark i is a part of another one. */
bool grid_is_part(const struct grid *grid, size_t i);
/* The signs of a mark, and of a cell that several share: of whole ones and of parts. */
const char *grid_lone_glyph(const struct page *p, bool part);
const char *grid_shared_glyph(const struct page *p, bool part);

/* The cell, or NULL outside the plane. */
struct grid_cell *grid_cell_at(const struct grid_plane *g, int x, int y);
/* Draws unless a layer that matters more is there. */
void grid_put(struct grid_plane *g, int x, int y, const char *glyph, enum grid_layer layer);

#endif
