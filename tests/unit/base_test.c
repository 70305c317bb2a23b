/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the suites of the base layer. A run without a test is a failure. */
#include "base_test.h"

#include <stdbool.h>
#include <stdlib.h>

int main(void)
{
    SRunner *sr = srunner_create(suite_arena());
    srunner_add_suite(sr, suite_text());
    srunner_add_suite(sr, suite_number());
    srunner_add_suite(sr, suite_date());
    srunner_add_suite(sr, suite_utf8());
    srunner_add_suite(sr, suite_diag());
    srunner_add_suite(sr, suite_file());
    srunner_add_suite(sr, suite_isa());
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
