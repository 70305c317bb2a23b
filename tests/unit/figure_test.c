/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tests of src/figure: figures of random hazards against full enumeration, variants against
 * registers that were patched by hand, protection in time against adaptive quadrature, and how much
 * is compiled. The folder of the sample
 * register is named on the command line. */
#include "figure_test.h"

#include <stdio.h>

const char *figure_sample;

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s samples/skerry\n", argv[0]);
        return 2;
    }
    figure_sample = argv[1];
    Suite *s = suite_create("figure");
    suite_add_tcase(s, figure_hazard_case());
    suite_add_tcase(s, figure_edge_case());
    suite_add_tcase(s, figure_variant_case());
    suite_add_tcase(s, figure_count_case());
    suite_add_tcase(s, figure_time_case());
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
