/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The text of a document as lines and characters, for places and messages.
 *
 * Lines end with LF, CR LF or CR, and count from 0 here, as do columns, which
 * count characters; source_place makes them count from 1. Used by the readers of
 * this layer only. */
#ifndef DOC_SOURCE_H
#define DOC_SOURCE_H

#include "base/diag.h"
#include "base/text.h"

/* A character's place, from 0. */
struct spot {
    size_t line, column;
};

struct source {
    const char *name, *text; /* borrowed */
    size_t n;                /* bytes */
    struct spot last;        /* where source_offset looked last, and its offset */
    size_t last_offset;
};

/* Takes the text and checks it: at most `limit` bytes, UTF-8, no control
 * characters but tab and line ends, no line separators or byte order marks inside.
 * A byte order mark at the start is skipped. false when it has added diagnostics. */
bool source_open(struct source *s, const char *name, const char *text, size_t n, size_t limit,
                 struct diags *d);

struct place source_place(const struct source *s, struct spot at);

/* Byte offset of a character; the line's end when it has fewer, the text's end
 * when there is no such line. Linear in all for rising spots. */
size_t source_offset(struct source *s, struct spot at);

/* The same place where the text has it, else the nearest before: parsers count a
 * line that is not there when a text ends without a line end. */
struct spot source_clamp(struct source *s, struct spot at);

/* A line without its line end, copied; "" beyond the last. */
const char *source_line(struct arena *a, struct source *s, size_t line);

/* The nearest line above that is neither blank nor a comment; SIZE_MAX when there
 * is none. */
size_t source_line_above(const struct source *s, size_t line);

/* Bytes of the control character at s (n bytes left), 0 when it is none. Tab, LF
 * and CR are none; DEL, C1, U+2028, U+2029, U+FEFF, U+FFFE and U+FFFF are. */
size_t source_control(const char *s, size_t n);

/* A text of the user's for a message: in single quotes, cut to 40 characters. */
const char *source_quote(struct arena *a, const char *text);

#endif
