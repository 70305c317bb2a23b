/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The hand calculations of docs/methods.md against the figures of their register
 * (hand.txt, which explains its rows, and the register's folder on the command line). */
#include <check.h>
#include <stdio.h>
#include <string.h>

#include "decide/turn.h"
#include "loaded.h"
#include "rows.h"

static const char *data_file, *documents;

/* At which value of an input the decision turns is no figure of the graph. */
static double turning(struct loaded *l, const char *name)
{
    struct turn t;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = turn_find(l->figures, name, &t, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    return t.at;
}

static double figure(char *inputs)
{
    const char *perspective = strtok(inputs, " "), *name = strtok(NULL, " ");
    ck_assert_msg(perspective && name && !strtok(NULL, " "), "a perspective and a figure");
    struct arena *arena = arena_new(NULL);
    struct loaded l;
    loaded_folder(&l, arena, documents, perspective);
    double value = turn_is_named(name) ? turning(&l, name) : loaded_value(&l, name);
    arena_free(arena);
    return value;
}

START_TEST(hand_calculations)
{
    ck_assert_int_eq(rows_check(data_file, figure), 30);
}
END_TEST

/* The same register, and the figures do not depend on what else was compiled before. */
START_TEST(all_in_one_graph)
{
    struct arena *arena = arena_new(NULL);
    struct loaded l;
    loaded_folder(&l, arena, documents, "society");
    figure_id net = loaded_find(&l, "D-VH-BUS.net-present-value.FIT-BLOCK");
    figure_id after = loaded_find(&l, "H-VH-BUS1.risk@FIT-BLOCK");
    figure_id risk = loaded_find(&l, "H-VH-BUS1.risk");
    figure_id other = loaded_find(&l, "H-VH-BUS2.risk");
    loaded_evaluate(&l);
    double now = figure_value(l.figures, risk);
    ck_assert_double_eq_tol(figure_value(l.figures, net), 25774.51221185982, 25774e-12);
    ck_assert_double_eq_tol(now - figure_value(l.figures, after), 2106.195569561327, 2106e-12);
    ck_assert_double_eq(now, figure_value(l.figures, other));
    arena_free(arena);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 3) {
        fprintf(stderr, "usage: %s hand.txt hand\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    documents = argv[2];
    Suite *s = suite_create("published hand calculations");
    TCase *t = tcase_create("hand");
    tcase_add_test(t, hand_calculations);
    tcase_add_test(t, all_in_one_graph);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
