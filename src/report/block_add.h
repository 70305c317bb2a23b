/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the builders of all sorts of blocks share. */
#ifndef REPORT_BLOCK_ADD_H
#define REPORT_BLOCK_ADD_H

#include "report/block.h"

/* A copy in the report's arena; NULL for NULL. */
const char *report_keep(struct report *r, const char *s);
struct block *report_add(struct report *r, enum block_type type, const char *key,
                         const char *title);
struct curve_axis *report_set_axis(struct report *r, struct curve_axis *axis, const char *key,
                                   const char *head, const char *unit, enum number_style style);
/* Sums and quotients of such numbers are finite. */
bool report_can_draw(double x);

#endif
