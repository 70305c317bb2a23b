/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The cases of worth_test, one a file. */
#ifndef TESTS_WORTH_TEST_H
#define TESTS_WORTH_TEST_H

#include <check.h>

TCase *worth_random_case(void);
TCase *worth_edge_case(void);

#endif
