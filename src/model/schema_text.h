/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree as indented JSON. Private to src/model/schema*.c. */
#ifndef MODEL_SCHEMA_TEXT_H
#define MODEL_SCHEMA_TEXT_H

#include "base/text.h"
#include "doc/node.h"

/* Appends the tree and a line end; scalars by their form, keys in the order of the tree,
 * lines of at most 100 columns where no single text is longer. */
void schema_text(struct text *out, const struct node *root);

#endif
