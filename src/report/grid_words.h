/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The words at the decades of a grid's axes: exact, for they stand at powers of ten. */
#ifndef REPORT_GRID_WORDS_H
#define REPORT_GRID_WORDS_H

#include "report/page.h"

/* 10^k as a power, "1e-3" in ASCII. */
const char *grid_power_text(const struct page *p, int k);
/* 10^k per year: "1 in 1000 a", "10 per a". */
const char *grid_period_of_power(const struct page *p, int k);
/* 10^k with a prefix: "100 k" and the unit, which may be "". */
const char *grid_amount_of_power(const struct page *p, int k, const char *unit);

#endif
