/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Comma-separated values by hand, after the grammar of RFC 4180 section 2.
 *
 * Owns nothing beyond a child arena while reading. Invariant: `at` is the spot of
 * the character at `offset`; cells holds whole rows of `columns` cells but for
 * the row in hand. */
#include "doc/csv.h"

#include <string.h>

#include "base/utf8.h"
#include "doc/source.h"

struct reader {
    struct arena *a, *scratch;
    struct text quoted; /* scratch of quoted cells */
    struct diags *d;
    struct source source;
    size_t offset;
    struct spot at;
    ARRAY(struct csv_cell) cells;
    bool failed, stopped;
};

#define REFUSE(r, at, ...) ((r)->failed = true, diag_add((r)->d, (at), __VA_ARGS__))

static bool at_end(const struct reader *r)
{
    return r->offset >= r->source.n;
}

static char peek(const struct reader *r)
{
    return at_end(r) ? 0 : r->source.text[r->offset];
}

static bool at_crlf(const struct reader *r)
{
    return peek(r) == '\r' && r->offset + 1 < r->source.n && r->source.text[r->offset + 1] == '\n';
}

static bool at_line_end(const struct reader *r)
{
    return at_end(r) || peek(r) == '\n' || at_crlf(r);
}

/* One byte on; columns count characters, lines end as everywhere in this layer. */
static void step(struct reader *r)
{
    bool lone_cr = peek(r) == '\r' && !at_crlf(r);
    char c = r->source.text[r->offset++];
    if (c == '\n' || lone_cr)
        r->at = (struct spot){r->at.line + 1, 0};
    else if (at_end(r) || ((unsigned char)peek(r) & 0xC0) != 0x80)
        r->at.column++;
}

static void skip_line_end(struct reader *r)
{
    if (at_crlf(r))
        step(r);
    if (!at_end(r))
        step(r);
}

static void skip_blanks(struct reader *r)
{
    while (peek(r) == ' ' || peek(r) == '\t')
        step(r);
}

static struct place here(const struct reader *r)
{
    return source_place(&r->source, r->at);
}

static void skip_cell(struct reader *r)
{
    while (!at_line_end(r) && peek(r) != ',')
        step(r);
}

/* A lone CR is no line end of RFC 4180 and no text either. */
static void check_character(struct reader *r)
{
    if (peek(r) == '\r' && !at_crlf(r))
        REFUSE(r, here(r), "a carriage return without a line feed stands here: save the file with "
                           "the line ends of Windows or Unix");
}

/* ---- cells ---- */

static const char *read_unquoted(struct reader *r)
{
    size_t start = r->offset, end = start;
    for (; !at_line_end(r) && peek(r) != ','; step(r)) {
        check_character(r);
        if (peek(r) == '"')
            REFUSE(r, here(r), "a quote stands inside an unquoted cell: put the whole cell in "
                               "quotes and write this one twice");
        if (peek(r) != ' ' && peek(r) != '\t')
            end = r->offset + 1;
    }
    return arena_strn(r->a, r->source.text + start, end - start);
}

/* The text of a quoted cell; the cursor stands on its opening quote. */
static const char *read_quoted(struct reader *r)
{
    struct place opened = here(r);
    r->quoted.n = 0;
    for (step(r); !at_end(r); step(r)) {
        if (peek(r) == '"') {
            step(r);
            if (peek(r) != '"')
                return arena_strn(r->a, text_str(&r->quoted), r->quoted.n);
        }
        check_character(r);
        if (!at_crlf(r))
            text_byte(&r->quoted, peek(r));
    }
    REFUSE(r, opened, "the quote opened here is never closed: expected another \"");
    r->stopped = true;
    return "";
}

static void check_behind_quote(struct reader *r)
{
    skip_blanks(r);
    if (at_line_end(r) || peek(r) == ',')
        return;
    REFUSE(r, here(r), "text follows the closing quote: a comma was expected (a quote inside a "
                       "quoted cell is written twice)");
    skip_cell(r);
}

static struct csv_cell read_cell(struct reader *r)
{
    skip_blanks(r);
    struct csv_cell cell = {.place = here(r)};
    bool quoted = peek(r) == '"';
    cell.text = utf8_nfc(r->a, quoted ? read_quoted(r) : read_unquoted(r));
    if (strlen(cell.text) > CSV_CELL_BYTES)
        REFUSE(r, cell.place, "a cell may have at most %d bytes, this one has %zu", CSV_CELL_BYTES,
               strlen(cell.text));
    if (quoted)
        check_behind_quote(r);
    return cell;
}

/* ---- rows ---- */

/* Blank lines between rows do not count. */
static void skip_blank_lines(struct reader *r)
{
    while (!at_end(r)) {
        size_t offset = r->offset;
        struct spot at = r->at;
        skip_blanks(r);
        if (!at_line_end(r)) {
            r->offset = offset;
            r->at = at;
            return;
        }
        skip_line_end(r);
    }
}

static void add_cell(struct reader *r)
{
    struct csv_cell cell = read_cell(r);
    if (r->cells.n == CSV_CELLS) {
        REFUSE(r, cell.place, "the file holds more than %d cells: split it", CSV_CELLS);
        r->stopped = true;
    } else {
        *array_push(r->a, &r->cells) = cell;
    }
}

/* Adds the cells of one line; returns how many. */
static size_t read_row(struct reader *r)
{
    size_t before = r->cells.n;
    add_cell(r);
    while (peek(r) == ',' && !r->stopped) {
        step(r);
        add_cell(r);
    }
    if (!r->stopped)
        skip_line_end(r);
    return r->cells.n - before;
}

static void check_header(struct reader *r, const struct csv *csv)
{
    struct strmap seen = {0};
    for (size_t i = 0; i < csv->columns; i++) {
        const struct csv_cell *cell = &csv->header[i];
        if (!*cell->text)
            REFUSE(r, cell->place, "the header of column %zu is empty", i + 1);
        else if (strmap_has(&seen, cell->text))
            REFUSE(r, cell->place, "the header %s stands twice",
                   source_quote(r->scratch, cell->text));
        strmap_set(r->scratch, &seen, cell->text, (void *)cell);
    }
    if (csv->columns > CSV_COLUMNS)
        REFUSE(r, csv->header[0].place,
               "the header has %zu columns, more than the %d that are read", csv->columns,
               CSV_COLUMNS);
    if (csv->columns == 1 && strpbrk(csv->header[0].text, ";\t"))
        REFUSE(r, csv->header[0].place, "the columns seem to be parted by semicolons or tabs: part "
                                        "them by commas");
}

static void read_header(struct reader *r, struct csv *csv)
{
    skip_blank_lines(r);
    if (at_end(r)) {
        REFUSE(r, here(r), "the file is empty: a header line with the names of the columns was "
                           "expected");
        r->stopped = true;
        return;
    }
    csv->columns = read_row(r);
    csv->header = r->cells.at;
    memset(&r->cells, 0, sizeof r->cells);
    check_header(r, csv);
}

static void read_body_row(struct reader *r, struct csv *csv)
{
    struct place start = here(r);
    size_t n = read_row(r);
    if (r->stopped)
        return;
    if (n != csv->columns) {
        REFUSE(r, start, "this row has %zu cells, but the header has %zu", n, csv->columns);
        r->cells.n -= n;
        return;
    }
    csv->rows++;
}

static void read_all(struct reader *r, struct csv *csv)
{
    read_header(r, csv);
    for (skip_blank_lines(r); !at_end(r) && !r->stopped; skip_blank_lines(r))
        read_body_row(r, csv);
    csv->cells = r->cells.at;
}

struct csv *csv_read(struct arena *a, const char *name, const char *text, size_t n,
                     struct diags *d)
{
    struct arena *scratch = arena_child(a);
    struct reader r = {.a = a, .scratch = scratch, .d = d};
    struct csv *csv = NEW(a, struct csv);
    text_init(&r.quoted, scratch);
    if (source_open(&r.source, name, text, n, CSV_BYTES, d))
        read_all(&r, csv);
    else
        r.failed = true;
    arena_free(scratch);
    return r.failed ? NULL : csv;
}

/* ---- writing ---- */

static bool is_plain_number(const char *s)
{
    double x;
    if (*s == '+' || *s == '-')
        s++;
    return text_to_double(s, s + strlen(s), &x);
}

static bool looks_like_formula(const char *s)
{
    return *s && strchr("=+-@\t\r", *s) && !is_plain_number(s);
}

static bool needs_quotes(const char *s)
{
    size_t n = strlen(s);
    bool blank_end = n > 0 && (strchr(" \t", s[0]) || strchr(" \t", s[n - 1]));
    return blank_end || strpbrk(s, ",\"\r\n");
}

void csv_cell_write(struct text *out, const char *s, bool guard)
{
    const char *apostrophe = guard && looks_like_formula(s) ? "'" : "";
    if (!needs_quotes(s)) {
        text_add(out, apostrophe);
        text_add(out, s);
        return;
    }
    text_byte(out, '"');
    text_add(out, apostrophe);
    for (; *s; s++) {
        if (*s == '"')
            text_byte(out, '"');
        text_byte(out, *s);
    }
    text_byte(out, '"');
}
