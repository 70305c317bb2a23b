/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The field tables as tables of a Markdown document.
 *
 * In a document the lines
 *     <!-- fields: response row -->
 *     <!-- end -->
 * enclose a block that is made from the field table of that name. A table that a field
 * leads to is spread out in rows with dotted keys, unless it has a block of its own in
 * the same document; then the field names it. */
#ifndef MODEL_FIELDS_TEXT_H
#define MODEL_FIELDS_TEXT_H

#include "base/text.h"
#include "model/field.h"

/* Appends the rows of a table, with a heading line. Fields that lead to a table whose
 * name is a key of `elsewhere` are not spread out. */
void fields_markdown(struct text *out, const struct table *t, const struct strmap *elsewhere);

/* Appends the document with the contents of all its blocks made anew; what stands
 * outside of them is kept. false with *problem set (a sentence; the line's number in
 * front) when a block names no table, stands twice, or has no end. */
bool fields_fill(struct text *out, const char *document, const char **problem);

#endif
