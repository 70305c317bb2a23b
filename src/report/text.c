/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The text writer: headings, notes and pairs, and the order of the blocks. Tables
 * and pictures have files of their own. Owns the scratch arena of one writing.
 * Invariant: blocks are parted by one empty line; a chapter by two. */
#include <assert.h>
#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "report/number.h"
#include "report/page.h"

static size_t widest_line(const struct lines *lines)
{
    size_t widest = 0;
    for (size_t i = 0; i < lines->n; i++) {
        size_t columns = utf8_columns(lines->at[i]);
        widest = columns > widest ? columns : widest;
    }
    return widest;
}

/* Levels 1 and 2 stand on a rule as wide as they are. */
static void write_heading(struct page *p, const struct block *b)
{
    const char *title = page_clean(p, b->title);
    struct lines lines = page_wrap(p, title, p->width);
    page_paragraph(p, title, 0, INK_HEAD);
    if (b->level < 3)
        page_rule(p, 0, widest_line(&lines), b->level == 1);
}

/* A line that is kept as it is; what does not fit goes on below, as far in. */
static void write_kept(struct page *p, const char *s)
{
    size_t indent = strspn(s, " ");
    const char *rest = page_clean(p, s + indent);
    indent = indent < p->width / 2 ? indent : p->width / 2;
    do {
        size_t n = utf8_prefix(rest, p->width - indent);
        struct line l = line_begin(p);
        line_to(&l, indent);
        line_add_n(&l, rest, n, INK_PLAIN);
        line_end(&l);
        rest += n;
    } while (*rest);
}

static void flush_paragraph(struct page *p, struct text *words)
{
    if (words->n)
        page_paragraph(p, page_clean(p, text_str(words)), 0, INK_PLAIN);
    text_init(words, p->arena);
}

static void write_note_line(struct page *p, struct text *words, const char *s)
{
    bool empty = s[strspn(s, " ")] == 0, kept = text_starts(s, "  ");
    if (empty || kept)
        flush_paragraph(p, words);
    if (empty)
        page_blank(p);
    else if (kept)
        write_kept(p, s);
    else
        text_printf(words, words->n ? " %s" : "%s", s);
}

static void write_note(struct page *p, const struct block *b)
{
    struct text words;
    text_init(&words, p->arena);
    const char *s = b->text ? b->text : "";
    while (*s) {
        size_t n = strcspn(s, "\n");
        write_note_line(p, &words, arena_strn(p->arena, s, n));
        s += n + (s[n] == '\n');
    }
    flush_paragraph(p, &words);
}

/* "/a" reads better behind a number than "1/a". */
static const char *unit_behind(const char *unit)
{
    return text_starts(unit, "1/") ? unit + 1 : unit;
}

static const char *number_words(const struct page *p, double x, enum number_style style,
                                const char *unit)
{
    char number[32], period[32];
    if (style == STYLE_MONEY)
        return money_text(p->arena, x, unit);
    number_text(number, x, style);
    if (style == STYLE_PERCENT)
        return arena_printf(p->arena, "%s %%", number);
    const char *behind = unit_behind(unit), *blank = *behind ? " " : "";
    if (style == STYLE_FREQUENCY && isfinite(x) && x >= 0)
        return arena_printf(p->arena, "%s%s%s, %s", number, blank, behind,
                            return_period_text(period, x));
    return arena_printf(p->arena, "%s%s%s", number, blank, behind);
}

static const char *count_words(const struct page *p, double n, const char *unit)
{
    if (!isfinite(n) || fabs(n) >= 1e20)
        return number_words(p, n, STYLE_PLAIN, unit);
    const char *behind = unit_behind(unit);
    return arena_printf(p->arena, "%.0f%s%s", n + 0.0, *behind ? " " : "", behind);
}

const char *cell_words(const struct page *p, const struct cell *c, enum number_style style,
                       const char *unit)
{
    const char *clean = page_clean(p, unit);
    switch (c->type) {
    case CELL_EMPTY: return p->ascii ? "-" : "–";
    case CELL_TEXT:
    case CELL_DATE: return page_clean(p, c->text);
    case CELL_YES: return c->number != 0 ? "yes" : "no";
    case CELL_COUNT: return count_words(p, c->number, clean);
    case CELL_NUMBER: return number_words(p, c->number, style, clean);
    }
    assert(!"a type of cell that does not exist");
    return "";
}

static void write_pair_value(struct line *l, const struct pair *pair, const char *value,
                             bool marked)
{
    line_add(l, value, INK_PLAIN);
    if (!marked)
        return;
    line_to(l, l->column + 1);
    line_add(l, pair->mark, INK_ALARM);
}

/* The mark shares the value's last line when it fits there, else it follows the
 * value as a word. */
static struct lines pair_lines(struct page *p, const struct pair *pair, size_t width, bool *beside)
{
    struct lines lines = page_wrap(p, pair->value, width);
    *beside = *pair->mark
        && utf8_columns(*array_last(&lines)) + 1 + utf8_columns(pair->mark) <= width;
    if (*pair->mark && !*beside)
        lines = page_wrap(p, arena_printf(p->arena, "%s %s", pair->value, pair->mark), width);
    return lines;
}

static void write_pair(struct page *p, const struct pair *pair, size_t name_width)
{
    bool beside;
    size_t indent = name_width + 2;
    struct lines names = page_wrap(p, pair->name, name_width);
    struct lines values = pair_lines(p, pair, p->width - indent, &beside);
    for (size_t i = 0; i < names.n || i < values.n; i++) {
        struct line l = line_begin(p);
        if (i < names.n)
            line_add(&l, names.at[i], INK_PLAIN);
        line_to(&l, indent);
        if (i < values.n)
            write_pair_value(&l, pair, values.at[i], beside && i + 1 == values.n);
        line_end(&l);
    }
}

void page_pairs(struct page *p, const struct pair *pairs, size_t n)
{
    size_t widest = 2, most = p->width * 2 / 5 < 36 ? p->width * 2 / 5 : 36;
    for (size_t i = 0; i < n; i++) {
        size_t columns = utf8_columns(pairs[i].name);
        widest = columns > widest ? columns : widest;
    }
    for (size_t i = 0; i < n; i++)
        write_pair(p, &pairs[i], widest < most ? widest : most);
}

static void write_pairs(struct page *p, const struct block *b)
{
    struct pair *pairs = NEW_ARRAY(p->arena, b->rows.n, struct pair);
    static const struct cell empty = {.type = CELL_EMPTY};
    for (size_t i = 0; i < b->rows.n; i++) {
        const struct row *row = &b->rows.at[i];
        const struct cell *value = row->n > 1 ? &row->at[1] : &empty;
        pairs[i].name = page_clean(p, row->n ? row->at[0].text : "");
        pairs[i].value = cell_words(p, value, value->style, value->unit);
        pairs[i].mark = page_clean(p, value->mark);
    }
    page_pairs(p, pairs, b->rows.n);
}

/* --- lines to be signed --- */

enum { SIGNED_NAME = 44, SIGNED_DATE = 14, BETWEEN_SIGNED = 2, WIDEST_ROLE = 24 };

static void put_blank_line(struct line *l, size_t from, size_t n)
{
    line_to(l, from);
    for (size_t i = 0; i < n; i++)
        line_add(l, "_", INK_PLAIN);
}

/* What a signature has room in: the columns of the role, and of the line for a name. */
struct signed_shape {
    size_t role, name;
};

static struct signed_shape signed_shape_of(const struct page *p, const struct block *b)
{
    struct signed_shape s = {.role = 2};
    for (size_t i = 0; i < b->rows.n; i++) {
        size_t columns = utf8_columns(page_clean(p, b->rows.at[i].at[0].text));
        s.role = columns > s.role ? columns : s.role;
    }
    s.role = s.role < WIDEST_ROLE ? s.role : WIDEST_ROLE;
    s.name = p->width - s.role - 2 * BETWEEN_SIGNED - SIGNED_DATE;
    s.name = s.name < SIGNED_NAME ? s.name : SIGNED_NAME;
    return s;
}

/* The role, with both lines beside its last line of text. */
static void write_signed_row(struct page *p, const struct signed_shape *s, const char *role)
{
    struct lines roles = page_wrap(p, role, s->role);
    size_t name = s->role + BETWEEN_SIGNED, date = name + s->name + BETWEEN_SIGNED;
    for (size_t i = 0; i < roles.n; i++) {
        struct line l = line_begin(p);
        line_add(&l, roles.at[i], INK_PLAIN);
        if (i + 1 == roles.n) {
            put_blank_line(&l, name, s->name);
            put_blank_line(&l, date, SIGNED_DATE);
        }
        line_end(&l);
    }
}

/* Rows are parted by an empty line, to write in. */
static void write_signatures(struct page *p, const struct block *b)
{
    struct signed_shape s = signed_shape_of(p, b);
    for (size_t i = 0; i < b->rows.n; i++) {
        if (i)
            page_blank(p);
        write_signed_row(p, &s, page_clean(p, b->rows.at[i].at[0].text));
    }
    struct line l = line_begin(p);
    line_to(&l, s.role + BETWEEN_SIGNED);
    line_add(&l, b->columns.at[1].head, INK_FAINT);
    line_to(&l, s.role + 2 * BETWEEN_SIGNED + s.name);
    line_add(&l, b->columns.at[2].head, INK_FAINT);
    line_end(&l);
}

static void write_title(struct page *p, const struct block *b)
{
    if (b->type == BLOCK_HEADING || !b->title || !*b->title)
        return;
    page_paragraph(p, page_clean(p, b->title), 0, INK_HEAD);
    page_blank(p);
}

static void write_block(struct page *p, const struct block *b)
{
    write_title(p, b);
    switch (b->type) {
    case BLOCK_HEADING: write_heading(p, b); break;
    case BLOCK_NOTE: write_note(p, b); break;
    case BLOCK_PAIRS: write_pairs(p, b); break;
    case BLOCK_TABLE: page_table(p, b); break;
    case BLOCK_GRID: page_grid(p, b->grid); break;
    case BLOCK_CURVE: page_curve(p, b->curve); break;
    case BLOCK_SIGNATURES: write_signatures(p, b); break;
    case BLOCK_SWINGS: page_swings(p, b->swings); break;
    case BLOCK_MAP: page_map(p, b->map); break;
    case BLOCK_SPREADS: page_spreads(p, b->spreads); break;
    case BLOCK_TREE: page_tree(p, b->tree); break;
    case BLOCK_POLICY: page_policy(p, b->policy); break;
    }
}

void report_write_text(struct text *out, const struct report *r, const struct report_format *f)
{
    assert(f->width >= 60 && f->width <= 200);
    struct page p = {out, arena_child(out->arena), f->width, f->ascii, f->colour};
    for (size_t i = 0; i < r->blocks.n; i++) {
        const struct block *b = &r->blocks.at[i];
        if (i)
            page_blank(&p);
        if (i && b->type == BLOCK_HEADING && b->level == 1)
            page_blank(&p);
        write_block(&p, b);
    }
    arena_free(p.arena);
}
