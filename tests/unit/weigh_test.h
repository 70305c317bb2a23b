/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The cases of weigh_test, one a file. */
#ifndef TESTS_WEIGH_TEST_H
#define TESTS_WEIGH_TEST_H

#include <check.h>

TCase *weigh_random_case(void);
TCase *weigh_set_case(void);
TCase *weigh_time_case(void);

#endif
