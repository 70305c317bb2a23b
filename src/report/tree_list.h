/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the writers of a tree share: its nodes in the order in which they are listed, and what is
 * said of them in words.
 *
 * A node is on the path when it is the root, or its parent is on the path and is either a chance
 * or a choice whose best branch leads to it: what happens when the best branches are taken.
 * Invariant: a parent stands before its children, and children in their order. */
#ifndef REPORT_TREE_LIST_H
#define REPORT_TREE_LIST_H

#include "report/page.h"

#define TREE_CHOICE_WORDS "a choice"
#define TREE_CHANCE_WORDS "a chance"
#define TREE_END_WORDS "an end"
#define TREE_TAKEN_WORDS "the branch to take"
#define TREE_PATH_WORDS "what happens when the best branches are taken"
#define TREE_FOLDED_WORDS "not shown, but counted in the value"
#define TREE_CHANCE_HEAD "Chance"
#define TREE_REACH_HEAD "Reached"

struct tree_item {
    const struct tree_node *node;
    const struct tree_item *parent; /* NULL: the root */
    const char *path;               /* the labels on the way to it, parted by points; root: "" */
    size_t depth;                   /* 0: the root */
    size_t from;                    /* index of its first child among all items */
    size_t next;                    /* index behind all that is below it */
    bool on_path, taken;            /* taken: the best branch of a choice */
};

struct tree_list ARRAY_BODY(struct tree_item);

/* All nodes, or (shown) those that pages show. */
struct tree_list tree_list_of(struct arena *a, const struct tree *t, bool shown);
/* Whether pages show what is below a node. */
bool tree_is_open(const struct tree_node *n);
/* What is said behind the label: "… 12 ends", "as survey-first.poor", or "". */
const char *tree_remark(struct arena *a, const struct tree_node *n);
/* Whether any node has a probability, or is reached with one. */
bool tree_has_chances(const struct tree_list *l);
bool tree_has_reaches(const struct tree_list *l);
/* Columns of numbers: chance (where there are any), reach (where there are any, and with `reach`)
 * and value; and their cells of a node, or of NULL, which are empty texts. */
void tree_add_columns(struct report *r, struct block *b, const struct tree *t,
                      const struct tree_list *l, bool reach);
void tree_add_numbers(struct report *r, const struct block *b, struct row *row,
                      const struct tree_node *n);
/* Every node as a row, for CSV. */
const struct block *tree_data(struct arena *a, const struct tree *t);

#endif
