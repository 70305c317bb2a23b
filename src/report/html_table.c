/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tables, entries, named values and lines to be signed as HTML. A number stands in its cell as
 * two spans, what is left of the point and the rest; the rest is as wide in every row (class
 * w1, w2 ...: so many digits), so that points stand below each other. Owns nothing.
 * Invariant: every cell of the block is on the page, as the text writer would show it on a
 * page wide enough. */
#include <assert.h>
#include <string.h>

#include "report/html.h"
#include "report/table_shape.h"

enum {
    FEW_ROWS = 12, /* stay on one sheet */
    WIDEST_CLASS = 24,
    SHORT_WORDS = 20,
    ENTRY_KEEP = 4,
    NARROW_TABLE = 34, /* columns that fit on the smallest page */
    PAPER_WIDTH = 115  /* those that fit on a sheet, with their gutters */
};

static const struct cell *cell_of(const struct block *b, size_t row, size_t column)
{
    static const struct cell empty = {.type = CELL_EMPTY};
    const struct row *r = &b->rows.at[row];
    return column < r->n ? &r->at[column] : &empty;
}

/* The words of a cell, and its mark in a <b> of its own. */
static void put_marked(struct html *h, const char *text, const char *mark)
{
    size_t n = strlen(text), m = strlen(mark);
    bool ends = m > 0 && n >= m && text_equal(text + n - m, mark);
    html_text(h, ends ? arena_strn(h->page.arena, text, n - m) : text);
    if (m == 0)
        return;
    html_raw(h, ends ? "<b>" : " <b>");
    html_text(h, mark);
    html_raw(h, "</b>");
}

/* --- the head --- */

static void put_head(struct html *h, const struct table_column *c)
{
    if (c->data)
        return;
    if (!*c->head && !*c->unit && !c->period) {
        html_raw(h, "<td></td>");
        return;
    }
    html_raw(h, "<th scope=\"col\"");
    html_raw(h, c->period ? " class=\"n\" colspan=\"2\"" : c->to_right ? " class=\"n\"" : "");
    html_raw(h, ">");
    html_text(h, c->head);
    if (*c->unit) {
        html_raw(h, " <span class=\"u\">");
        html_text(h, c->unit);
        html_raw(h, "</span>");
    }
    html_raw(h, "</th>");
}

static void put_heads(struct html *h, const struct table_shape *t)
{
    html_raw(h, "<thead>\n<tr>");
    for (size_t j = 0; j < t->n_columns; j++)
        put_head(h, &t->columns[j]);
    html_raw(h, "</tr>\n</thead>\n");
}

/* --- rows --- */

static void put_number(struct html *h, const struct table_column *c, const struct shown *s,
                       const char *figure)
{
    html_raw(h, "<td class=\"n\"");
    html_figure(h, figure);
    html_raw(h, "><span>");
    html_text(h, s->left);
    html_raw(h, "</span>");
    if (c->right) {
        size_t width = c->right < WIDEST_CLASS ? c->right : WIDEST_CLASS;
        text_printf(h->out, "<span class=\"w%zu\">", width);
        put_marked(h, s->right, s->mark);
        html_raw(h, "</span>");
    }
    html_raw(h, "</td>");
}

/* Numbers and short words (ids, dates) stay on a line; long ones get room to wrap in. */
static const char *class_of(const struct table_column *c)
{
    return c->to_right                 ? " class=\"n\""
           : c->natural <= SHORT_WORDS ? " class=\"k\""
                                       : " class=\"t\"";
}

static void put_words(struct html *h, const struct table_column *c, const struct shown *s,
                      const char *figure, bool names_row)
{
    html_raw(h, names_row ? "<th scope=\"row\"" : "<td");
    html_raw(h, class_of(c));
    html_figure(h, figure);
    html_raw(h, ">");
    put_marked(h, s->text, s->mark);
    html_raw(h, names_row ? "</th>" : "</td>");
}

static void put_cell(struct html *h, const struct table_column *c, const struct shown *s,
                     const char *figure, bool names_row)
{
    if (s->number)
        put_number(h, c, s, figure);
    else
        put_words(h, c, s, figure, names_row);
    if (!c->period)
        return;
    html_raw(h, "<td class=\"p\">");
    html_text(h, s->period);
    html_raw(h, "</td>");
}

/* The column whose texts name the rows: the first one of texts with a head. */
static size_t naming_column(const struct table_shape *t)
{
    for (size_t j = 0; j < t->n_columns; j++)
        if (!t->columns[j].number && !t->columns[j].data && *t->columns[j].head)
            return j;
    return t->n_columns;
}

static void put_row(struct html *h, const struct table_shape *t, size_t i, const char *sign,
                    const char *drawn)
{
    size_t naming = naming_column(t);
    html_raw(h, "<tr>");
    for (size_t j = 0; j < t->n_columns; j++) {
        if (t->columns[j].data)
            continue;
        if (j == 0 && sign)
            text_printf(h->out, "<td>%s</td>", sign);
        else if (t->columns[j].drawn && drawn && j == naming)
            text_printf(h->out, "<th scope=\"row\" class=\"drawn\">%s</th>", drawn);
        else if (t->columns[j].drawn && drawn)
            text_printf(h->out, "<td class=\"drawn\">%s</td>", drawn);
        else
            put_cell(h, &t->columns[j], &t->cells[i * t->n_columns + j],
                     cell_of(t->block, i, j)->figure, j == naming);
    }
    html_raw(h, "</tr>\n");
}

static void put_none(struct html *h, const struct table_shape *t)
{
    size_t n = 0;
    for (size_t j = 0; j < t->n_columns; j++)
        n += !t->columns[j].data;
    text_printf(h->out, "<tr><td colspan=\"%zu\">(none)</td></tr>\n", n);
}

static void put_caption(struct html *h, const char *element, const char *caption)
{
    if (!caption || !*caption)
        return;
    text_printf(h->out, "<%s>", element);
    html_text(h, caption);
    text_printf(h->out, "</%s>\n", element);
}

static void put_id(struct html *h, const char *id)
{
    if (id)
        html_attribute(h, "id", id);
    html_raw(h, ">\n");
}

/* Whether short words need not break on paper. */
static bool fits_paper(const struct table_shape *t)
{
    size_t sum = 0;
    for (size_t j = 0; j < t->n_columns; j++) {
        const struct table_column *c = &t->columns[j];
        bool gives = !c->number && c->natural > SHORT_WORDS;
        if (c->data)
            continue;
        sum += (gives ? SHORT_WORDS : c->natural) + c->period + TABLE_GUTTER;
    }
    return sum <= PAPER_WIDTH;
}

static void put_table(struct html *h, const struct block *b, const char *id, const char *caption,
                      const char *const *signs, const char *const *drawn)
{
    struct table_shape t = table_shape_of(&h->page, b);
    assert(t.fits);
    html_open_scroll(h, t.n_rows <= FEW_ROWS ? "whole" : "rows",
                     caption && *caption ? caption : h->section, t.width > NARROW_TABLE);
    html_raw(h, fits_paper(&t) ? "<table class=\"fits\"" : "<table");
    put_id(h, id);
    put_caption(h, "caption", caption);
    put_heads(h, &t);
    html_raw(h, "<tbody>\n");
    for (size_t i = 0; i < t.n_rows; i++)
        put_row(h, &t, i, signs ? signs[i] : NULL, drawn ? drawn[i] : NULL);
    if (t.n_rows == 0)
        put_none(h, &t);
    html_raw(h, "</tbody>\n</table>\n</div>\n");
}

/* --- entries --- */

static const char *words_of(const struct html *h, const struct block *b, size_t i, size_t j)
{
    const struct column *c = &b->columns.at[j];
    return cell_words(&h->page, cell_of(b, i, j), c->style, c->unit);
}

static void put_lead(struct html *h, const struct block *b, size_t i)
{
    html_raw(h, "<p class=\"lead\">");
    for (size_t j = 0; j < b->columns.n; j++) {
        const char *words = words_of(h, b, i, j);
        if (b->columns.at[j].keep || !*words)
            continue;
        html_raw(h, "<span");
        html_figure(h, cell_of(b, i, j)->figure);
        html_raw(h, ">");
        put_marked(h, words, page_clean(&h->page, cell_of(b, i, j)->mark));
        html_raw(h, "</span> ");
    }
    html_raw(h, "</p>\n");
}

static void put_details(struct html *h, const struct block *b, size_t i)
{
    size_t n = 0;
    for (size_t j = 0; j < b->columns.n; j++) {
        const char *words = words_of(h, b, i, j);
        if (b->columns.at[j].keep < ENTRY_KEEP || !*words)
            continue;
        html_raw(h, n++ ? "" : "<dl>\n");
        html_raw(h, "<div><dt>");
        html_text(h, b->columns.at[j].head);
        html_raw(h, ":</dt> <dd");
        html_figure(h, cell_of(b, i, j)->figure);
        html_raw(h, ">");
        put_marked(h, words, page_clean(&h->page, cell_of(b, i, j)->mark));
        html_raw(h, "</dd></div>\n");
    }
    html_raw(h, n ? "</dl>\n" : "");
}

static void put_entries(struct html *h, const struct block *b, const char *id, const char *caption)
{
    html_raw(h, "<div class=\"entries\"");
    put_id(h, id);
    put_caption(h, "p", caption);
    html_raw(h, b->rows.n ? "<ol>\n" : "");
    for (size_t i = 0; i < b->rows.n; i++) {
        html_raw(h, "<li>\n");
        put_lead(h, b, i);
        put_details(h, b, i);
        html_raw(h, "</li>\n");
    }
    html_raw(h, b->rows.n ? "</ol>\n</div>\n" : "</div>\n");
}

/* A table without columns is its title. */
static void put_nothing(struct html *h, const char *id, const char *caption)
{
    html_raw(h, "<div");
    put_id(h, id);
    put_caption(h, "p", caption);
    html_raw(h, "</div>\n");
}

void html_table(struct html *h, const struct block *b, const char *id, const char *caption,
                const char *const *signs)
{
    if (b->columns.n == 0)
        put_nothing(h, id, caption);
    else if (b->entries)
        put_entries(h, b, id, caption);
    else
        put_table(h, b, id, caption, signs, NULL);
}

void html_table_drawn(struct html *h, const struct block *b, const char *id, const char *caption,
                      const char *const *drawn)
{
    put_table(h, b, id, caption, NULL, drawn);
}

/* --- named values --- */

static void put_pair(struct html *h, const struct block *b, size_t i)
{
    const struct cell *name = cell_of(b, i, 0), *value = cell_of(b, i, 1);
    html_raw(h, "<tr><th scope=\"row\">");
    html_text(h, name->text);
    html_raw(h, "</th><td");
    html_figure(h, value->figure);
    html_raw(h, ">");
    put_marked(h, cell_words(&h->page, value, value->style, value->unit),
               page_clean(&h->page, value->mark));
    html_raw(h, "</td></tr>\n");
}

void html_pairs(struct html *h, const struct block *b, const char *id)
{
    html_raw(h, "<table class=\"pairs\"");
    put_id(h, id);
    put_caption(h, "caption", b->title);
    html_raw(h, "<tbody>\n");
    for (size_t i = 0; i < b->rows.n; i++)
        put_pair(h, b, i);
    html_raw(h, "</tbody>\n</table>\n");
}

/* --- lines to be signed --- */

void html_signatures(struct html *h, const struct block *b, const char *id)
{
    html_raw(h, "<table class=\"signed\"");
    put_id(h, id);
    put_caption(h, "caption", b->title);
    html_raw(h, "<thead>\n<tr><td></td>");
    for (size_t j = 1; j < b->columns.n; j++) {
        html_raw(h, "<th scope=\"col\">");
        html_text(h, b->columns.at[j].head);
        html_raw(h, "</th>");
    }
    html_raw(h, "</tr>\n</thead>\n<tbody>\n");
    for (size_t i = 0; i < b->rows.n; i++) {
        html_raw(h, "<tr><th scope=\"row\">");
        html_text(h, cell_of(b, i, 0)->text);
        html_raw(h, "</th><td></td><td></td></tr>\n");
    }
    html_raw(h, "</tbody>\n</table>\n");
}
