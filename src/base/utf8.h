/* SPDX-License-Identifier: GPL-3.0-or-later */
/* UTF-8: validity, canonical composition, columns on a terminal, harmless
 * printing. utf8proc is seen only by utf8.c. */
#ifndef BASE_UTF8_H
#define BASE_UTF8_H

#include <stdbool.h>

#include "base/arena.h"

/* Offset of the first byte that is not valid UTF-8 or is a zero byte; n when
 * there is none. */
size_t utf8_check(const char *s, size_t n);

/* The text in Unicode normalization form C (UAX #15); s itself when it is ASCII.
 * s is valid UTF-8. */
const char *utf8_nfc(struct arena *a, const char *s);

/* The text by which texts are compared without regard to case: full case folding (The Unicode
 * Standard, section 5.18), then normalization form C; s itself when that changes nothing of an
 * ASCII s. s is valid UTF-8. */
const char *utf8_fold(struct arena *a, const char *s);

/* Terminal columns of s when printed by utf8_clean without `ascii` (East Asian
 * wide = 2, combining = 0). */
size_t utf8_columns(const char *s);

/* Bytes of the longest prefix of s that takes at most `columns` columns, whole
 * characters with the marks that combine with them. */
size_t utf8_prefix(const char *s, size_t columns);

/* Text made harmless for a terminal, a page or a spreadsheet: control
 * characters (C0, DEL, C1), bidirectional controls (U+061C, U+200E, U+200F,
 * U+202A-202E, U+2066-2069), zero-width and other default-ignorable characters,
 * unassigned and private characters, line separators, and bytes that are not
 * valid UTF-8 become visible as \xNN or \u{NNNN}. With `ascii`, every
 * non-ASCII character becomes \u{NNNN}, but the typographic ones of ohmen's own
 * texts have ASCII stand-ins (see utf8.c). Newlines become \x0a as well. The
 * result is s itself when nothing changes an all-ASCII s. */
const char *utf8_clean(struct arena *a, const char *s, bool ascii);

/* Characters (code points) in n bytes of s, which is valid UTF-8. */
size_t utf8_count(const char *s, size_t n);

#endif
