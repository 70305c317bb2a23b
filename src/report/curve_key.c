/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The key of a curve. Its tables are ordinary table blocks, so that their numbers
 * look as they do everywhere. Owns nothing. */
#include "report/curve_plane.h"

static const char *sign_of(const struct curve_plane *g, size_t i)
{
    if (g->empty)
        return "";
    switch (g->manner) {
    case CURVE_AREA: return curve_full_glyph(g->page);
    case CURVE_STROKE: return g->page->ascii ? ":" : "▄";
    case CURVE_SYMBOLS: return g->symbols[i];
    }
    return "";
}

static void add_column(struct report *r, struct block *b, const char *key, const char *head,
                       const struct curve_axis *axis, unsigned keep)
{
    block_column(r, b, key, head, axis->unit, axis->style)->keep = keep;
}

/* The first of the least and of the greatest points; NULL when there is none. */
struct extremes {
    const struct curve_point *least, *greatest;
};

static struct extremes extremes_of(const struct curve_line *l)
{
    struct extremes e = {0};
    for (size_t i = 0; i < l->points.n; i++) {
        const struct curve_point *p = &l->points.at[i];
        e.least = !e.least || p->y < e.least->y ? p : e.least;
        e.greatest = !e.greatest || p->y > e.greatest->y ? p : e.greatest;
    }
    return e;
}

static void add_point(struct report *r, struct row *row, const struct curve_point *p)
{
    if (p) {
        row_number(r, row, p->y, NULL);
        row_number(r, row, p->x, NULL);
    } else {
        row_empty(r, row);
        row_empty(r, row);
    }
}

const struct block *curve_key_lines(const struct page *p, const struct curve_plane *g)
{
    const struct curve *c = g->curve;
    struct report r;
    report_init(&r, p->arena);
    struct block *b = report_table(&r, NULL, NULL);
    block_column(&r, b, "sign", "", "", STYLE_PLAIN);
    block_column(&r, b, "line", "Line", "", STYLE_PLAIN);
    add_column(&r, b, "least", "Least", &c->y, 4);
    add_column(&r, b, "least-at", "at", &c->x, 2);
    add_column(&r, b, "greatest", "Greatest", &c->y, 3);
    add_column(&r, b, "greatest-at", "at", &c->x, 1);
    for (size_t i = 0; i < c->lines.n; i++) {
        const struct curve_line *l = &c->lines.at[i];
        struct extremes e = extremes_of(l);
        struct row *row = block_row(&r, b);
        row_text(&r, row, sign_of(g, i));
        row_text(&r, row, l->name);
        add_point(&r, row, e.least);
        add_point(&r, row, e.greatest);
    }
    return b;
}

const struct block *curve_key_marks(const struct page *p, const struct curve_plane *g)
{
    const struct curve *c = g->curve;
    struct report r;
    report_init(&r, p->arena);
    struct block *b = report_table(&r, NULL, NULL);
    block_column(&r, b, "sign", "", "", STYLE_PLAIN);
    block_column(&r, b, "mark", "Mark", "", STYLE_PLAIN);
    add_column(&r, b, "y", c->y.head, &c->y, 0);
    add_column(&r, b, "x", *c->x.head ? c->x.head : "at", &c->x, 0);
    for (size_t i = 0; i < c->marks.n; i++) {
        const struct curve_mark *m = &c->marks.at[i];
        struct row *row = block_row(&r, b);
        row_text(&r, row, curve_mark_glyph(p));
        row_text(&r, row, m->label);
        row_number(&r, row, m->y, m->y_figure);
        row_number(&r, row, m->x, m->x_figure);
    }
    return b;
}

/* --- what is not in the picture --- */

static bool has_place(const struct curve *c, double x, double y)
{
    return curve_has_place(&c->x, x) && curve_has_place(&c->y, y);
}

static size_t points_without_place(const struct curve *c, const struct curve_line *l)
{
    size_t n = 0;
    for (size_t i = 0; i < l->points.n; i++)
        n += !has_place(c, l->points.at[i].x, l->points.at[i].y);
    return n;
}

static void add_name(struct text *t, const char *before, const char *what)
{
    text_printf(t, "%s %s", t->n ? "," : before, what);
}

static const char *words_without_place(const struct page *p, const struct curve *c)
{
    static const char *const before =
        "Not in the picture, for a log axis has no place at or below 0:";
    struct text t;
    text_init(&t, p->arena);
    for (size_t i = 0; i < c->lines.n; i++) {
        size_t n = points_without_place(c, &c->lines.at[i]);
        if (n)
            add_name(&t, before,
                     arena_printf(p->arena, "%zu %s of %s", n, n == 1 ? "point" : "points",
                                  page_clean(p, c->lines.at[i].name)));
    }
    for (size_t i = 0; i < c->marks.n; i++)
        if (!has_place(c, c->marks.at[i].x, c->marks.at[i].y))
            add_name(&t, before, page_clean(p, c->marks.at[i].label));
    return text_str(&t);
}

static const char *words_crowded(const struct page *p, const struct curve_plane *g)
{
    struct text t;
    text_init(&t, p->arena);
    for (size_t i = 0; i < g->curve->marks.n && !g->empty; i++) {
        const struct curve_mark *m = &g->curve->marks.at[i];
        if (has_place(g->curve, m->x, m->y) && !g->labelled[i])
            add_name(&t,
                     "In the picture without a label, for want of room:", page_clean(p, m->label));
    }
    return text_str(&t);
}

struct lines curve_key_remarks(const struct page *p, const struct curve_plane *g)
{
    const char *const words[] = {words_crowded(p, g), words_without_place(p, g->curve)};
    struct lines remarks = {0};
    for (size_t i = 0; i < 2; i++)
        if (*words[i])
            *array_push(p->arena, &remarks) = words[i];
    return remarks;
}

/* An empty line parts the remarks from the tables when there are any. */
static void write_remarks(struct page *p, const struct curve_plane *g)
{
    struct lines remarks = curve_key_remarks(p, g);
    if (remarks.n)
        page_blank(p);
    for (size_t i = 0; i < remarks.n; i++)
        page_paragraph(p, remarks.at[i], 0, INK_PLAIN);
}

static void write_band(struct page *p)
{
    const char *words = "jumps or turns within a column: from its least to its greatest value";
    page_pairs(p, &(struct pair){curve_band_glyph(p), words, ""}, 1);
    page_blank(p);
}

void curve_write_key(struct page *p, const struct curve_plane *g)
{
    if (g->banded)
        write_band(p);
    if (g->curve->lines.n)
        page_table(p, curve_key_lines(p, g));
    if (g->curve->marks.n) {
        page_blank(p);
        page_table(p, curve_key_marks(p, g));
    }
    write_remarks(p, g);
}
