/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Published structures, entered as documents (protection.txt, which explains its rows, named
 * on the command line): the scheme alone, and as the only protection against a hazard. */
#include <check.h>
#include <stdio.h>
#include <string.h>

#include "loaded.h"
#include "rows.h"

static const char *data_file;

/* "NAME q, NAME q" as elements; probabilities may begin with the point here. */
static void add_elements(struct text *t, char *list)
{
    text_add(t, "elements:\n");
    for (char *one = strtok(list, ","); one; one = strtok(NULL, ",")) {
        char name[20], q[20];
        ck_assert_int_eq(sscanf(one, " %19s %19s", name, q), 2);
        text_printf(t, "  %s: {kind: relay, per-demand: %s%s}\n", name, *q == '.' ? "0" : "", q);
    }
}

static const char *document(struct arena *a, char *inputs)
{
    struct text t;
    char *structure = strchr(inputs, ';');
    ck_assert_ptr_nonnull(structure);
    *structure++ = 0;
    text_init(&t, a);
    text_add(&t, "register: {title: Published, currency: EUR, prices: 2026, horizon: 1 a, "
                 "discount: 0 per a}\n");
    add_elements(&t, inputs);
    text_printf(&t, "schemes: {TOP: %s}\n", structure);
    text_add(&t, "hazards: {H: {name: H, frequency: 1 per a, response: {main: {cleared-by: TOP, "
                 "in: 0.1 s, outcome: none}, never: {outcome: lost}}, outcomes: {lost: {name: "
                 "Lost}}}}\n");
    return text_str(&t);
}

static double figure(char *inputs)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a, document(a, inputs), NULL);
    double fails = loaded_value(&l, "TOP.fails"), never = loaded_value(&l, "H.end.never");
    double works = loaded_value(&l, "H.end.main");
    ck_assert_double_eq_tol(never, fails, 1e-13 * fails);
    ck_assert_double_eq_tol(works, 1 - fails, 1e-15);
    arena_free(a);
    return fails;
}

START_TEST(published_structures)
{
    ck_assert_int_eq(rows_check(data_file, figure), 15);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s protection.txt\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    Suite *s = suite_create("published protection");
    TCase *t = tcase_create("protection");
    tcase_add_test(t, published_structures);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
