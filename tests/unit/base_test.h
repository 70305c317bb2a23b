/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The suites of the base layer, one file each, run together by base_test.c. */
#ifndef TESTS_BASE_TEST_H
#define TESTS_BASE_TEST_H

#include <check.h>

Suite *suite_arena(void);
Suite *suite_text(void);
Suite *suite_number(void);
Suite *suite_date(void);
Suite *suite_utf8(void);
Suite *suite_diag(void);
Suite *suite_file(void);
Suite *suite_isa(void);

#endif
