/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Printing a table that has its shape: heads, units below them, a rule, rows. A
 * table that finds no shape on the page is printed as records, a line a cell.
 * Owns nothing. */
#include <string.h>

#include "base/utf8.h"
#include "report/page.h"
#include "report/table_shape.h"

/* What a column shows in one row or in the head: lines, or one number. */
struct stack {
    struct lines lines;
    const struct shown *number; /* or NULL */
};

static struct stack stack_of(const struct page *p, const struct table_column *c,
                             const struct shown *s)
{
    struct stack stack = {.number = s->number ? s : NULL};
    if (!s->number && c->drawn)
        *array_push(p->arena, &stack.lines) = s->text;
    else if (!s->number)
        stack.lines = page_wrap(p, s->text, c->width);
    return stack;
}

static size_t stack_height(const struct stack *s)
{
    return s->number ? 1 : s->lines.n;
}

/* The point stands at the same place in all rows, the block of numbers to the
 * right in its column. */
static void put_number(struct line *l, const struct table_column *c, const struct shown *s,
                       size_t from)
{
    size_t point = from + c->width - c->right;
    line_add_right(l, s->left, point, INK_PLAIN);
    line_add(l, s->right, INK_PLAIN);
    if (*s->mark) {
        line_to(l, l->column + 1);
        line_add(l, s->mark, INK_ALARM);
    }
    if (c->period && *s->period) {
        line_to(l, from + c->width + TABLE_GUTTER);
        line_add(l, s->period, INK_PLAIN);
    }
}

/* A text's last line ends in its mark, when it has one. */
static void put_marked(struct line *l, const char *text, const char *mark)
{
    size_t n = strlen(text), m = strlen(mark);
    bool marked = m > 0 && n >= m && text_equal(text + n - m, mark);
    line_add_n(l, text, marked ? n - m : n, INK_PLAIN);
    if (marked)
        line_add(l, mark, INK_ALARM);
}

static void put_text(struct line *l, const struct table_column *c, const char *text, size_t from,
                     const char *mark)
{
    size_t free_columns = c->width - utf8_columns(text);
    line_to(l, c->to_right ? from + free_columns : from);
    put_marked(l, text, mark);
}

static void write_row_line(struct page *p, const struct table_shape *t, const struct stack *stacks,
                           size_t row, size_t k)
{
    struct line l = line_begin(p);
    size_t from = 0;
    for (size_t j = 0; j < t->n_columns; j++) {
        const struct table_column *c = &t->columns[j];
        const struct stack *s = &stacks[j];
        if (c->dropped)
            continue;
        line_to(&l, from);
        if (s->number && k == 0)
            put_number(&l, c, s->number, from);
        else if (k < s->lines.n)
            put_text(&l, c, s->lines.at[k], from,
                     k + 1 == s->lines.n ? t->cells[row * t->n_columns + j].mark : "");
        from += c->width + (c->period ? TABLE_GUTTER + c->period : 0) + TABLE_GUTTER;
    }
    line_end(&l);
}

static void write_row(struct page *p, const struct table_shape *t, size_t row)
{
    struct stack *stacks = NEW_ARRAY(p->arena, t->n_columns, struct stack);
    size_t height = 1;
    for (size_t j = 0; j < t->n_columns; j++) {
        if (t->columns[j].dropped)
            continue;
        stacks[j] = stack_of(p, &t->columns[j], &t->cells[row * t->n_columns + j]);
        height = stack_height(&stacks[j]) > height ? stack_height(&stacks[j]) : height;
    }
    for (size_t k = 0; k < height; k++)
        write_row_line(p, t, stacks, row, k);
}

/* Lines of heads or units; they stand on their lowest line. */
static void write_heads(struct page *p, const struct table_shape *t, bool units)
{
    struct lines *heads = NEW_ARRAY(p->arena, t->n_columns, struct lines);
    size_t height = 0;
    for (size_t j = 0; j < t->n_columns; j++) {
        const struct table_column *c = &t->columns[j];
        const char *text = units ? c->unit : c->head;
        if (c->dropped || !*text)
            continue;
        heads[j] = page_wrap(p, text, c->width);
        height = heads[j].n > height ? heads[j].n : height;
    }
    for (size_t k = 0; k < height; k++) {
        struct line l = line_begin(p);
        size_t from = 0;
        for (size_t j = 0; j < t->n_columns; j++) {
            const struct table_column *c = &t->columns[j];
            size_t above = height - heads[j].n;
            if (c->dropped)
                continue;
            if (k >= above) {
                const char *text = heads[j].at[k - above];
                line_to(&l, c->to_right ? from + c->width - utf8_columns(text) : from);
                line_add(&l, text, units ? INK_PLAIN : INK_HEAD);
            }
            from += c->width + (c->period ? TABLE_GUTTER + c->period : 0) + TABLE_GUTTER;
        }
        line_end(&l);
    }
}

static void write_left_out(struct page *p, const struct table_shape *t)
{
    struct text names;
    text_init(&names, p->arena);
    for (size_t j = 0; j < t->n_columns; j++)
        if (t->columns[j].dropped && !t->columns[j].data)
            text_printf(&names, "%s%s", names.n ? ", " : "", t->columns[j].head);
    if (!names.n)
        return;
    const char *all = arena_printf(p->arena, "Left out for want of width: %s.", text_str(&names));
    page_paragraph(p, all, 0, INK_FAINT);
}

/* Every cell on a line of its own under the name of its column. */
static void write_records(struct page *p, const struct table_shape *t)
{
    static const struct cell empty = {.type = CELL_EMPTY};
    struct pair *pairs = NEW_ARRAY(p->arena, t->n_columns, struct pair);
    for (size_t i = 0; i < t->n_rows; i++) {
        const struct row *row = &t->block->rows.at[i];
        size_t n = 0;
        for (size_t j = 0; j < t->n_columns; j++) {
            const struct cell *c = j < row->n ? &row->at[j] : &empty;
            const struct column *column = &t->block->columns.at[j];
            if (column->data)
                continue;
            pairs[n].name = t->columns[j].head;
            pairs[n].value = cell_words(p, c, column->style, column->unit);
            pairs[n++].mark = page_clean(p, c->mark);
        }
        if (i)
            page_blank(p);
        page_pairs(p, pairs, n);
    }
}

enum { ENTRY_INDENT = 4, ENTRY_KEEP = 4 };

/* What always stands on one line, then what explains it. */
static void write_entry(struct page *p, const struct block *b, const struct row *row)
{
    struct text lead;
    text_init(&lead, p->arena);
    for (size_t j = 0; j < b->columns.n; j++) {
        const struct column *c = &b->columns.at[j];
        const char *words = cell_words(p, &row->at[j], c->style, c->unit);
        if (c->keep == 0 && *words)
            text_printf(&lead, "%s%s", lead.n ? "  " : "", words);
    }
    page_paragraph(p, text_str(&lead), 0, INK_HEAD);
    for (size_t j = 0; j < b->columns.n; j++) {
        const struct column *c = &b->columns.at[j];
        const char *words = cell_words(p, &row->at[j], c->style, c->unit);
        if (c->keep >= ENTRY_KEEP && *words)
            page_paragraph(p, arena_printf(p->arena, "%s: %s", page_clean(p, c->head), words),
                           ENTRY_INDENT, INK_PLAIN);
    }
}

void page_table(struct page *p, const struct block *b)
{
    if (b->columns.n == 0)
        return;
    for (size_t i = 0; b->entries && i < b->rows.n; i++)
        write_entry(p, b, &b->rows.at[i]);
    if (b->entries)
        return;
    struct table_shape t = table_shape_of(p, b);
    if (!t.fits) {
        write_records(p, &t);
        return;
    }
    write_heads(p, &t, false);
    write_heads(p, &t, true);
    page_rule(p, 0, t.width, false);
    for (size_t i = 0; i < t.n_rows; i++)
        write_row(p, &t, i);
    if (t.n_rows == 0)
        page_paragraph(p, "(none)", 0, INK_PLAIN);
    write_left_out(p, &t);
}
