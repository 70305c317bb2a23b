/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the suites of the doc layer. A run without a test is a failure. */
#include "doc_test.h"

#include <stdbool.h>
#include <stdlib.h>
#include <string.h>

void trial_open(struct trial *t)
{
    t->a = arena_new(NULL);
    ck_assert_ptr_nonnull(t->a);
    diags_init(&t->d, t->a);
}

void trial_close(struct trial *t)
{
    arena_free(t->a);
}

const char *trial_lines(struct trial *t)
{
    struct text lines;
    text_init(&lines, t->a);
    diags_sort(&t->d);
    for (size_t i = 0; i < t->d.list.n; i++)
        text_printf(&lines, "%s%s", i ? "\n" : "", diag_line(t->a, &t->d.list.at[i]));
    return text_str(&lines);
}

const char *tree_json(struct arena *a, const struct node *n)
{
    struct text t;
    text_init(&t, a);
    json_write(&t, n);
    return text_str(&t);
}

struct node *json_tree(struct arena *a, const char *json)
{
    struct node *n = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = json_read(a, json, strlen(json), "tree", &n, &e);
    ck_assert_msg(status == OHMEN_OK, "%s: %s", json, e.text);
    return n;
}

int main(void)
{
    SRunner *sr = srunner_create(suite_node());
    srunner_add_suite(sr, suite_json());
    srunner_add_suite(sr, suite_yaml());
    srunner_add_suite(sr, suite_yaml_limits());
    srunner_add_suite(sr, suite_yaml_write());
    srunner_add_suite(sr, suite_csv());
    srunner_add_suite(sr, suite_patch());
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
