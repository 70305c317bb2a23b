/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A strict reader of JSON (RFC 8259) for tests, apart from the product's own: it
 * accepts the grammar and nothing more, and finds single values. */
#ifndef TESTS_JSON_CHECK_H
#define TESTS_JSON_CHECK_H

#include <stdbool.h>
#include <stddef.h>

/* True when the n bytes are one JSON text in valid UTF-8, without a byte order mark,
 * without a key twice in one object, at most 64 deep. Otherwise *bad (may be NULL)
 * is the offset where it ceases to be one. */
bool json_check(const char *s, size_t n, size_t *bad);

/* The raw text of the value at a path such as "blocks/0/rows/2/risk/value" (keys as
 * they are written, elements by number) in a text that json_check accepts. Returns
 * its start and its length in *length; NULL when there is none. */
const char *json_pick(const char *s, const char *path, size_t *length);

/* The same, compared with the raw text `expected` (strings with their quotes). */
bool json_is(const char *s, const char *path, const char *expected);

#endif
