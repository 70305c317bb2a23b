/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the text and the HTML of swings share: the scale of the result, the table of the
 * numbers, the words. */
#ifndef REPORT_SWINGS_H
#define REPORT_SWINGS_H

#include "report/curve_plane.h"

#define SWINGS_LOW_WORDS "the input at its low end"
#define SWINGS_HIGH_WORDS "the input at its high end"

struct swings_plane {
    const struct page *page;
    const struct swings *swings;
    struct curve_axis axis;   /* that of the result, linear */
    struct curve_scale scale; /* from the least to the greatest result, today's among them */
};

/* Chooses the scale and its ticks, which choose the prefix of all numbers. */
void swings_open(struct swings_plane *g, const struct page *p, const struct swings *s, int cells);

/* The table of the numbers: label and words in one column (`joined`) or in two, the result at
 * both ends. A row for today comes first when `with_today`. In the scratch arena. */
struct block *swings_table(const struct swings_plane *g, bool joined, bool with_today);
/* "Today: 12.3 kEUR/a". */
const char *swings_today(const struct swings_plane *g);
/* Whether any end has the mark, which is SWINGS_TURNS. */
bool swings_turn(const struct swings *s);
#define SWINGS_TURNS "!"

#endif
