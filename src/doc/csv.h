/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Comma-separated values (RFC 4180): a header line, then rows.
 *
 * Accepted: CRLF or LF, quoted cells with doubled quotes and line breaks inside,
 * a UTF-8 byte order mark, a last line without a line end, blank lines between
 * rows. Refused with place: a row with more or fewer cells than the header, an
 * unclosed quote, text behind a closing quote, a quote inside an unquoted cell, a
 * header that is empty or repeated, text that is not UTF-8, control characters,
 * and what is beyond the limits below. Blanks around a cell, quoted or not, do not
 * count; a line break inside a cell becomes one LF. */
#ifndef DOC_CSV_H
#define DOC_CSV_H

#include "base/text.h"
#include "doc/node.h"

#define CSV_BYTES (256u << 20)
#define CSV_COLUMNS 200       /* of a header */
#define CSV_CELLS 4000000     /* of all rows, the header not counted */
#define CSV_CELL_BYTES 100000 /* of a cell */

struct csv {
    size_t columns;
    struct csv_cell {
        const char *text; /* in NFC, surrounding blanks of unquoted cells removed */
        struct place place;
    } *header, *cells; /* cells: rows * columns, row by row */
    size_t rows;
};

/* Reads the n bytes of file `name` (borrowed). Returns NULL when there were
 * diagnostics. */
struct csv *csv_read(struct arena *a, const char *name, const char *text, size_t n,
                     struct diags *d);

/* Appends one cell, quoted where RFC 4180 or a blank at an end needs it. With
 * `guard`, a text that a spreadsheet would take for a formula (it begins with
 * = + - @ TAB or CR and is no plain number) gets a leading apostrophe. A line that
 * is one empty cell would be a blank line: the caller writes "" there. */
void csv_cell_write(struct text *out, const char *s, bool guard);

#endif
