/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the tests of means. */
#include "mean_test.h"

#include <stdlib.h>

int main(void)
{
    SRunner *runner = srunner_create(mean_knot_suite());
    srunner_add_suite(runner, mean_blend_suite());
    srunner_add_suite(runner, mean_random_suite());
    srunner_add_suite(runner, mean_sample_suite());
    srunner_add_suite(runner, stream_suite());
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
