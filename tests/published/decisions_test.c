/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Three decisions worked out by hand in docs/methods.md, (e) to (g), against the figures of their
 * register (decisions.txt, which explains its rows, and the register's folder on the command
 * line). */
#include <check.h>
#include <stdio.h>
#include <string.h>

#include "loaded.h"
#include "rows.h"

enum { ROWS = 169 };

static const char *data_file, *documents;

/* One register for each perspective that rows name, so that figures stand beside all others. */
static struct {
    char perspective[16];
    struct loaded loaded;
} opened[3];
static struct arena *arena;

static struct loaded *from_perspective(const char *perspective)
{
    size_t i = 0;
    for (; opened[i].loaded.figures; i++) {
        if (text_equal(opened[i].perspective, perspective))
            return &opened[i].loaded;
        ck_assert_uint_lt(i, 2);
    }
    ck_assert_uint_lt(strlen(perspective), sizeof opened[i].perspective);
    strcpy(opened[i].perspective, perspective);
    loaded_folder(&opened[i].loaded, arena, documents, perspective);
    return &opened[i].loaded;
}

static double figure(char *inputs)
{
    const char *perspective = strtok(inputs, " "), *name = strtok(NULL, " ");
    ck_assert_msg(perspective && name && !strtok(NULL, " "), "a perspective and a figure");
    return loaded_value(from_perspective(perspective), name);
}

START_TEST(hand_calculations)
{
    arena = arena_new(NULL);
    ck_assert_int_eq(rows_check(data_file, figure), ROWS);
    arena_free(arena);
}
END_TEST

static struct weighing *weigh(struct loaded *l, struct arena *a, const char *perspective,
                              const char *decision)
{
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_folder(l, a, documents, perspective);
    ohmen_status status = weigh_compile(l->figures, decision, &w, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    loaded_evaluate(l);
    weigh_rank(l->figures, w);
    return w;
}

static const char *names_by_rank(const struct weighing *w, struct arena *a)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < w->alternatives.n; i++)
        text_printf(&t, "%s%s", i ? " " : "", w->alternatives.at[w->order[i]].name);
    return text_str(&t);
}

struct ranked {
    const char *decision, *perspective, *order;
};

/* The orders that the net present values of the document give. */
START_TEST(orders)
{
    static const struct ranked all[] = {
        {"D-OR", "society", "OR-BACKUP do-nothing"},
        {"D-OR", "company", "do-nothing OR-BACKUP"},
        {"D-FX", "society", "TEST-MORE NEW-RELAY do-nothing"},
        {"D-GL", "society",
         "CUT+RECEIVER CUT RECEIVER CHANNEL+RECEIVER CHANNEL+CUT+RECEIVER do-nothing CHANNEL+CUT "
         "CHANNEL"},
    };
    for (size_t i = 0; i < sizeof all / sizeof *all; i++) {
        struct arena *a = arena_new(NULL);
        struct loaded l;
        const struct weighing *w = weigh(&l, a, all[i].perspective, all[i].decision);
        ck_assert_str_eq(names_by_rank(w, a), all[i].order);
        arena_free(a);
    }
}
END_TEST

START_TEST(not_both)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w = weigh(&l, a, "society", "D-FX");
    ck_assert_uint_eq(w->left_out.n, 1);
    ck_assert_str_eq(w->left_out.at[0].options, "NEW-RELAY+TEST-MORE");
    ck_assert_str_eq(w->left_out.at[0].why, "NEW-RELAY and TEST-MORE exclude each other");
    arena_free(a);
}
END_TEST

/* What avoids more damage than it costs has no price of a life. */
START_TEST(no_price_of_a_life)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w = weigh(&l, a, "society", "D-GL");
    for (size_t i = 1; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[i];
        bool priced = text_equal(x->name, "CHANNEL") || text_equal(x->name, "CHANNEL+CUT");
        ck_assert_int_eq(x->per_fatality != FIGURE_NONE, priced);
        ck_assert_int_eq(x->disproportion != FIGURE_NONE, priced);
        ck_assert_uint_ne(x->per_hour, FIGURE_NONE);
    }
    arena_free(a);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 3) {
        fprintf(stderr, "usage: %s decisions.txt decisions\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    documents = argv[2];
    Suite *s = suite_create("published decisions");
    TCase *t = tcase_create("decisions");
    tcase_add_test(t, hand_calculations);
    tcase_add_test(t, orders);
    tcase_add_test(t, not_both);
    tcase_add_test(t, no_price_of_a_life);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
