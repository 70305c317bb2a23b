/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tests of what alternatives are worth beside the money of the chosen perspective: to others, to
 * customers and people, and together. */
#include "worth_test.h"

int main(void)
{
    Suite *s = suite_create("worth");
    suite_add_tcase(s, worth_random_case());
    suite_add_tcase(s, worth_edge_case());
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
