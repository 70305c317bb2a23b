/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The key below an iso-risk grid: what its signs mean, every mark with its numbers,
 * and all that the picture cannot show. */
#ifndef REPORT_GRID_KEY_H
#define REPORT_GRID_KEY_H

#include "report/grid_plane.h"

void grid_write_key(struct page *p, const struct grid_plane *g);

#endif
