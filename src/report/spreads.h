/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the text and the HTML of spreads share: the scale of the strips, the table of the
 * numbers, the words.
 *
 * Rows of one unit and style have one scale; others each their own. A scale is logarithmic
 * where all numbers are above 0 and far apart. */
#ifndef REPORT_SPREADS_H
#define REPORT_SPREADS_H

#include "report/page.h"

#define SPREADS_RANGE_WORDS "from the value at 5 % to that at 95 %"
#define SPREADS_MEDIAN_WORDS "median"
#define SPREADS_MEAN_WORDS "mean"
#define SPREADS_ERROR_WORDS "Error: the standard error of a number that was sampled."
#define SPREADS_NO_ERROR_WORDS "Left out for want of width: the standard errors of these numbers."

/* What a narrow page gives up first. */
enum { SPREADS_ERROR_KEEP = 1, SPREADS_MEAN_ERROR_KEEP, SPREADS_DRAWN_KEEP };

struct spreads_plane {
    const struct page *page;
    const struct spreads *spreads;
    bool common, log;
    bool with_errors; /* all of them, or none */
    double low, high; /* of the common scale; log: powers of ten */
    double decades;   /* that each log scale of its own has */
    int shift;        /* where common */
};

void spreads_open(struct spreads_plane *g, const struct page *p, const struct spreads *s);
/* Where a value of the row stands on its scale: 0 to 1. */
double spreads_place(const struct spreads_plane *g, const struct spread *s, double value);
/* The table, its last column drawn and empty, with a head that tells the scale. */
struct block *spreads_table(const struct spreads_plane *g);
/* "mean 12.3, 5 % 2, median 11, 95 % 30 kEUR/a". */
const char *spreads_words(const struct spreads_plane *g, const struct spread *s);
bool spreads_have_errors(const struct spreads *s);

#endif
