/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A curve as text: the head of the y axis, the picture in its axes, the head of the x
 * axis, the key below. Owns nothing.
 * Invariant: every line and mark is in the picture or named by the key, which has all
 * numbers that the picture only shows. */
#include <string.h>

#include "base/utf8.h"
#include "report/curve_plane.h"
#include "report/number.h"

enum { RIGHT_MARGIN = 3 /* for the half of the last tick's label */ };

/* "Yearly cost, kEUR/a". */
const char *curve_x_words(const struct page *p, const struct curve_scale *s)
{
    const struct curve_axis *axis = s->axis;
    const char *head = page_clean(p, axis->head), *unit = page_clean(p, axis->unit);
    if (axis->style == STYLE_PERCENT)
        unit = "%";
    const char *prefix = s->shift > 0 ? money_prefix(s->shift) : "";
    const char *parted = *head && *unit ? ", " : "";
    return arena_printf(p->arena, "%s%s%s%s%s", head, parted, prefix, unit,
                        axis->log ? " (log axis)" : "");
}

const char *curve_y_words(const struct page *p, const struct curve_scale *s)
{
    const char *words = curve_x_words(p, s);
    bool far = !s->axis->log && (s->low > 0 || s->high < 0);
    return far ? arena_printf(p->arena, "%s (the axis does not begin at 0)", words) : words;
}

static size_t gutter_of(const struct curve_scale *y)
{
    size_t widest = 0;
    for (size_t i = 0; i < y->ticks.n; i++) {
        size_t columns = utf8_columns(y->ticks.at[i].label);
        widest = columns > widest ? columns : widest;
    }
    return widest + 1;
}

static const struct curve_tick *tick_at(const struct curve_scale *s, int cell)
{
    for (size_t i = 0; i < s->ticks.n; i++)
        if (s->ticks.at[i].at == cell)
            return &s->ticks.at[i];
    return NULL;
}

static enum ink ink_of(enum curve_layer layer)
{
    return layer == CURVE_BAND ? INK_FAINT : layer >= CURVE_LABEL ? INK_HEAD : INK_PLAIN;
}

/* The x axis where nothing is drawn on it; a tick shows on a heavy one too. */
static const char *glyph_at(const struct curve_plane *g, int x, int y)
{
    const struct curve_cell *c = curve_cell_at(g, x, y);
    bool ascii = g->page->ascii, tick = y == 0 && tick_at(&g->x, x);
    if (y == 0 && c->layer == CURVE_NONE)
        return tick ? ascii ? "+" : "┬" : ascii ? "-" : "─";
    if (tick && g->manner == CURVE_AREA && c->layer == CURVE_LINE)
        return ascii ? "+" : "┯";
    return c->layer == CURVE_NONE ? " " : c->glyph;
}

/* Neighbours of one layer are written together. */
static void put_cells(const struct curve_plane *g, struct line *l, int y)
{
    for (int x = 0; x < g->columns;) {
        enum curve_layer layer = curve_cell_at(g, x, y)->layer;
        struct text run;
        text_init(&run, g->page->arena);
        for (; x < g->columns && curve_cell_at(g, x, y)->layer == layer; x++)
            text_add(&run, glyph_at(g, x, y));
        line_add(l, text_str(&run), ink_of(layer));
    }
}

static void write_row(struct page *p, const struct curve_plane *g, int y, size_t gutter)
{
    const struct curve_tick *tick = tick_at(&g->y, y);
    struct line l = line_begin(p);
    if (tick)
        line_add_right(&l, tick->label, gutter - 1, INK_PLAIN);
    line_to(&l, gutter);
    if (y == 0)
        line_add(&l, p->ascii ? "+" : "└", INK_PLAIN);
    else
        line_add(&l, p->ascii ? tick ? "+" : "|" : tick ? "┤" : "│", INK_PLAIN);
    put_cells(g, &l, y);
    line_end(&l);
}

/* Each centred below its tick, as far as the page goes. */
static void write_ticks(struct page *p, const struct curve_plane *g, size_t gutter)
{
    struct line l = line_begin(p);
    for (size_t i = 0; i < g->x.ticks.n; i++) {
        const struct curve_tick *t = &g->x.ticks.at[i];
        size_t columns = utf8_columns(t->label), at = gutter + 1 + (size_t)t->at;
        size_t from = at > columns / 2 ? at - columns / 2 : 0;
        line_to(&l, from + columns > p->width ? p->width - columns : from);
        line_add(&l, t->label, INK_PLAIN);
    }
    line_end(&l);
}

/* Centred below the axis, or a paragraph when it is wider. */
static void write_x_head(struct page *p, const struct curve_plane *g, size_t gutter)
{
    const char *words = curve_x_words(p, &g->x);
    size_t columns = utf8_columns(words), room = (size_t)g->columns;
    if (columns > room) {
        page_paragraph(p, words, 0, INK_PLAIN);
        return;
    }
    if (columns == 0)
        return;
    struct line l = line_begin(p);
    line_to(&l, gutter + 1 + (room - columns) / 2);
    line_add(&l, words, INK_PLAIN);
    line_end(&l);
}

static void write_picture(struct page *p, struct curve_plane *g)
{
    size_t gutter = gutter_of(&g->y);
    curve_plane_open(g, (int)(p->width - gutter - 1 - RIGHT_MARGIN));
    curve_draw(g);
    const char *words = curve_y_words(p, &g->y);
    if (*words)
        page_paragraph(p, words, 0, INK_PLAIN);
    for (int y = CURVE_ROWS; y >= 0; y--)
        write_row(p, g, y, gutter);
    write_ticks(p, g, gutter);
    write_x_head(p, g, gutter);
    page_blank(p);
}

void page_curve(struct page *p, const struct curve *c)
{
    struct curve_plane g = {.page = p, .curve = c};
    if (c->lines.n == 0 && c->marks.n == 0) {
        page_paragraph(p, "(no points)", 0, INK_PLAIN);
        return;
    }
    curve_plane_range(&g);
    if (!g.empty)
        write_picture(p, &g);
    curve_write_key(p, &g);
}
