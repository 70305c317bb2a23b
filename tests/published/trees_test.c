/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decisions in several stages of textbooks, entered as registers (trees.txt, which explains its
 * rows, and the folder of the documents on the command line). */
#include <check.h>
#include <stdio.h>

#include "named.h"
#include "rows.h"

enum { ROWS = 15 };

static const char *data_file, *documents;

static double figure(char *inputs)
{
    return named_figure(documents, inputs);
}

START_TEST(published_trees)
{
    ck_assert_int_eq(rows_check(data_file, figure), ROWS);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 3) {
        fprintf(stderr, "usage: %s trees.txt trees\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    documents = argv[2];
    Suite *s = suite_create("published trees");
    TCase *t = tcase_create("trees");
    tcase_add_test(t, published_trees);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
