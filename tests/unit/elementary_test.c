/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the suites of the elementary functions. A run without a test is a failure. */
#include "elementary_test.h"

#include <stdlib.h>

int main(void)
{
    SRunner *sr = srunner_create(suite_elementary_values());
    srunner_add_suite(sr, suite_elementary_sweep());
    srunner_add_suite(sr, suite_elementary_order());
    srunner_add_suite(sr, suite_elementary_bits());
    srunner_run_all(sr, CK_NORMAL);
    int bad = srunner_ntests_failed(sr) != 0 || srunner_ntests_run(sr) == 0;
    srunner_free(sr);
    return bad ? EXIT_FAILURE : EXIT_SUCCESS;
}
