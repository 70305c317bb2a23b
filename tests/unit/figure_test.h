/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The cases of figure_test, one a file, and what they share. */
#ifndef TESTS_FIGURE_TEST_H
#define TESTS_FIGURE_TEST_H

#include <check.h>

TCase *figure_hazard_case(void);
TCase *figure_edge_case(void);
TCase *figure_variant_case(void);
TCase *figure_count_case(void);
TCase *figure_time_case(void);

/* The folder samples/skerry. */
extern const char *figure_sample;

#endif
