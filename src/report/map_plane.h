/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the text and the HTML of a map share: its scales, its signs, its key.
 *
 * The plane is 1 wide and 1 high, from the lower left corner. The first and the last value of an
 * axis stand half a step within its ends; every place shows the cell whose values are nearest
 * on the scales.
 * Invariant: an axis is logarithmic only when all its values are above 0. */
#ifndef REPORT_MAP_PLANE_H
#define REPORT_MAP_PLANE_H

#include "report/curve_plane.h"

#define MAP_TODAY_SIGN "+"

struct map_way {
    struct curve_axis axis;
    struct curve_scale scale; /* its ends are those of the plane */
    double *at;               /* of each value, 0 to 1 */
    size_t n;
};

struct map_plane {
    const struct page *page;
    const struct map *map;
    struct map_way x, y;
    const char **signs; /* one a choice */
};

/* The sign of doing nothing, and that of the n-th of the other choices, from 0. */
const char *map_nothing_sign(const struct page *p);
const char *map_letter(const struct page *p, size_t n);

/* The map is whole. */
void map_open(struct map_plane *g, const struct page *p, const struct map *m);
/* Chooses ticks; a label must stand apart from the next in this number of columns. */
void map_tick(struct map_way *w, int columns, struct arena *a);
/* Where a value stands, 0 to 1 within the plane. */
double map_place(const struct map_way *w, double value);
/* The value that is nearest to a place. */
size_t map_nearest(const struct map_way *w, double place);
/* The place where the nearest value changes from i - 1 to i; 0 and 1 at the ends. */
double map_edge(const struct map_way *w, size_t i);
size_t map_choice_at(const struct map_plane *g, size_t x, size_t y);
bool map_shows_today(const struct map_plane *g);

/* The key: the choices with their cells and worths; today; the remarks. The blocks are in the
 * scratch arena. */
const struct block *map_key_choices(const struct map_plane *g);
const struct block *map_key_today(const struct map_plane *g);
struct lines map_key_remarks(const struct map_plane *g);

#endif
