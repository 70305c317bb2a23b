/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The suites of the evidence layer, one file each, and what they share. */
#ifndef TESTS_EVIDENCE_TEST_H
#define TESTS_EVIDENCE_TEST_H

#include <check.h>

#include "evidence/posterior.h"
#include "loaded.h"

TCase *case_trend(void);
TCase *case_share(void);

#define HEAD                                                                                       \
    "register: {title: T, currency: EUR, prices: 2026, horizon: 1 a, discount: 0 per a, "          \
    "counts: [section, bay]}\n"
#define PER "rates: {r: {per: section a, "

/* A register with the one rate r, of these keys; in an arena of its own. */
struct sheet {
    struct arena *arena;
    struct loaded l;
};
struct sheet sheet_of(const char *rate);
const struct rate *rate_of(const struct sheet *s);

#endif
