/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the suites of the elementary functions share, those of lanes too. */
#ifndef ELEMENTARY_TEST_H
#define ELEMENTARY_TEST_H

#include <check.h>
#include <stdint.h>

#include "random.h"

/* Sanitizers make everything slower: they get a share of the random arguments. */
#if defined(__SANITIZE_ADDRESS__)
#define ELEMENTARY_SLOWER 20
#elif defined(__has_feature)
#if __has_feature(address_sanitizer)
#define ELEMENTARY_SLOWER 20
#endif
#endif
#ifndef ELEMENTARY_SLOWER
#define ELEMENTARY_SLOWER 1
#endif

Suite *suite_elementary_values(void);
Suite *suite_elementary_sweep(void);
Suite *suite_elementary_order(void);
Suite *suite_elementary_bits(void);

/* elementary_random.c */

uint64_t bits_of(double x);
double double_of(uint64_t bits);

/* Any double from lo to hi, both of one sign, each bit pattern alike. */
double random_between(struct random *r, double lo, double hi);

#endif
