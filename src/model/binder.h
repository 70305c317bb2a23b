/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the binder share. Private to src/model/bind*.c.
 *
 * Every bind_* function takes the document node, returns the canonical node, or NULL
 * when it added diagnostics, and fills *member unless member is NULL (inside a
 * change, where there is no struct). */
#ifndef MODEL_BINDER_H
#define MODEL_BINDER_H

#include "model/bind.h"

struct node *bind_field(struct binding *b, const struct field *f, const struct node *node,
                        void *member);
struct node *bind_scalar(struct binding *b, const struct field *f, const struct node *node,
                         void *member);
struct node *bind_set(struct binding *b, const struct field *f, const struct node *node,
                      void *member);
struct node *bind_quantity(struct binding *b, const struct field *f, const struct node *node,
                           void *member);
struct node *bind_structure(struct binding *b, const struct node *node, void *member);
struct node *bind_table(struct binding *b, const struct table *t, const struct node *node,
                        void *data);

/* Does this scalar remove something: an unquoted `no` inside a change? */
bool bind_is_removal(const struct binding *b, const struct node *node);

/* Is this key one of those that make a distribution (shape, median, times, ...)? */
bool bind_is_quantity_key(const char *key);

/* What a node is, in words: "a text", "a map", "a list". */
const char *bind_node_words(const struct node *node);

#endif
