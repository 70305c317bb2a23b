/* SPDX-License-Identifier: GPL-3.0-or-later */
/* YAML documents, read into trees with positions, and written from trees.
 *
 * Every scalar is text: `no`, `1:30` and `1e3` mean what the field table says.
 * Refused, each with its place and one kind sentence: tags, anchors, aliases,
 * `<<`, further documents in a file, keys that are no scalars, duplicate keys (the
 * message says where the first stands), text that is not UTF-8, control
 * characters (also by escapes; tab and line ends are allowed), and what is beyond
 * the limits below. Keys and scalars are brought to NFC. The commonest slips have
 * a message of their own: a tab as indentation, a comma inside a flow map's value
 * (a key without a value follows), a colon inside a plain scalar, a missing blank
 * behind a colon, brackets and quotes that are not closed (with the place where
 * they open), wrong indentation. */
#ifndef DOC_YAML_H
#define DOC_YAML_H

#include "base/error.h"
#include "base/text.h"
#include "doc/node.h"

#define YAML_DEPTH 40            /* maps and lists inside one another, the root counts */
#define YAML_BYTES (64u << 20)   /* of a file */
#define YAML_KEY_BYTES 200       /* of a key */
#define YAML_SCALAR_BYTES 100000 /* of a value that is text */
#define YAML_NODES 2000000       /* scalars, maps and lists of a file */

/* Reads the n bytes of file `name` (borrowed: it must outlive the tree). Returns
 * the root map, or NULL when there were diagnostics; as many as can be found in
 * one reading are added to `d`. An empty document is an empty map. Duplicate
 * keys are reported and the reading goes on. */
struct node *yaml_read(struct arena *a, const char *name, const char *text, size_t n,
                       struct diags *d);

/* Appends a tree as YAML that yaml_read reads back as an equal tree (apart from
 * forms: yes, no and counts become text again). Maps in the order they have;
 * block style, but a map or list whose flow form fits into 100 columns and
 * holds no further nesting deeper than one level (the values of the root: no
 * nesting at all) is written in flow style. Every scalar that YAML or a reader
 * could misread is quoted; text of several lines is a double-quoted scalar. */
void yaml_write(struct text *out, const struct node *n);

#endif
