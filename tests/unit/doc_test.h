/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The suites of the doc layer, one file each, run together by doc_test.c, and
 * what they share: reading a text, and the diagnostics as lines. */
#ifndef TESTS_DOC_TEST_H
#define TESTS_DOC_TEST_H

#include <check.h>

#include "doc/json.h"
#include "doc/node.h"

Suite *suite_node(void);
Suite *suite_json(void);
Suite *suite_yaml(void);
Suite *suite_yaml_limits(void);
Suite *suite_yaml_write(void);
Suite *suite_csv(void);
Suite *suite_patch(void);

/* An arena and a list of diagnostics in it. */
struct trial {
    struct arena *a;
    struct diags d;
};
void trial_open(struct trial *t);
void trial_close(struct trial *t);

/* All diagnostics, sorted, "file:line:column: text" a line, parted by "\n". */
const char *trial_lines(struct trial *t);

/* The canonical JSON of a tree. */
const char *tree_json(struct arena *a, const struct node *n);

/* The tree of a canonical JSON that must be right. */
struct node *json_tree(struct arena *a, const char *json);

#endif
