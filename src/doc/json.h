/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Canonical JSON: the bytes of bodies, entries and hashes.
 *
 * A restriction of RFC 8785: no white space; keys in byte order; scalars are
 * strings, integers 0 .. 2^53 - 1, true and false; no null; the only escapes are
 * \" \\ and \u00XX (lower-case hex) for bytes below 0x20 (RFC 8785 3.2.2.2 writes
 * \b \t \n \f \r short; so do we). Text is valid UTF-8 in NFC. */
#ifndef DOC_JSON_H
#define DOC_JSON_H

#include "base/error.h"
#include "base/text.h"
#include "doc/node.h"

/* Nesting beyond this depth is refused on reading. */
#define JSON_DEPTH 64

/* Appends the canonical bytes of a canonical tree (keys are sorted here). */
void json_write(struct text *out, const struct node *n);

/* Appends a JSON string literal, with its quotes. */
void json_string(struct text *out, const char *s);

/* Reads canonical JSON of n bytes. Anything that is not canonical (white space,
 * unsorted or duplicate keys, null, fractions, other escapes, bad UTF-8, zero
 * bytes, depth) is an error that names the byte offset: a body that was not
 * written by json_write is damaged (OHMEN_REGISTER). Places of the tree: file
 * "register", line 0, path = `path` followed by the keys, or by the number of an
 * item from 1, as "hazards/H-BUS1/response/incomer/in". */
ohmen_status json_read(struct arena *a, const char *bytes, size_t n, const char *path,
                       struct node **out, ohmen_error *e);

#endif
