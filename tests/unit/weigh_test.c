/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tests of src/decide: which sets of options are alternatives, what they are worth, and
 * in what order. */
#include "weigh_test.h"

int main(void)
{
    Suite *s = suite_create("weigh");
    suite_add_tcase(s, weigh_set_case());
    suite_add_tcase(s, weigh_time_case());
    suite_add_tcase(s, weigh_random_case());
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
