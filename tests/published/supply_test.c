/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Interruptions of supply against published examples, entered as registers (supply.txt, which
 * explains its rows, and the folder of the documents on the command line). */
#include <check.h>
#include <stdio.h>

#include "named.h"
#include "rows.h"

static const char *data_file, *documents;

static double figure(char *inputs)
{
    return named_figure(documents, inputs);
}

START_TEST(published_interruptions)
{
    ck_assert_int_eq(rows_check(data_file, figure), 176);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 3) {
        fprintf(stderr, "usage: %s supply.txt supply\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    documents = argv[2];
    Suite *s = suite_create("published supply");
    TCase *t = tcase_create("supply");
    tcase_add_test(t, published_interruptions);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
