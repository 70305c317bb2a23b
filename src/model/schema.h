/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The JSON Schema of the documents, made from the field tables.
 *
 * For editors that check while somebody writes, and for programs that make documents.
 * It says what one object alone can tell: keys, words, short forms, what is required.
 * References, dimensions, shares and the grammar of quantities are checked by ohmen
 * alone, so a document may fit the schema and still be refused; whatever ohmen takes
 * fits the schema. Scalars may have been read as text or as YAML's own numbers and
 * truth values. */
#ifndef MODEL_SCHEMA_H
#define MODEL_SCHEMA_H

#include "base/text.h"

/* Appends the schema (JSON Schema draft 2020-12): indented, lines of at most 100 columns
 * where a text does not force a longer one, the same bytes always. */
void schema_write(struct text *out);

#endif
