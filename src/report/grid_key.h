/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The key below an iso-risk grid: what its signs mean, every mark with its numbers,
 * and all that the picture cannot show. */
#ifndef REPORT_GRID_KEY_H
#define REPORT_GRID_KEY_H

#include "report/grid_plane.h"

void grid_write_key(struct page *p, const struct grid_plane *g);

/* Its parts, for other writers. */
#define GRID_KEY_DECADES "equal risk, one line a decade"
/* What line i is, clean. */
const char *grid_key_line(const struct grid_plane *g, size_t i);
/* What a whole mark is, and a part of one, in words. */
const char *grid_key_wholes(const struct grid_plane *g);
const char *grid_key_parts(const struct grid_plane *g);
/* Whether a part of a mark is in the picture, and whether several share a place there. */
bool grid_key_has_parts(const struct grid_plane *g, bool shared);
/* The table of marks, in the page's scratch arena. */
const struct block *grid_key_marks(const struct page *p, const struct grid *grid);
/* What the picture cannot show, from the plane's spots. */
struct lines grid_key_remarks(const struct grid_plane *g);

#endif
