/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing on the plane. A column whose range is shorter than the finest step of its
 * manner shows the middle of it; a longer one all of it, but an area that only rises or
 * only falls is filled to its height at the centre. Owns nothing. */
#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "report/curve_plane.h"

enum { EIGHTHS = 8, LABEL_AWAY = 3 /* rows between a mark and its label, at most */ };

const char *curve_mark_glyph(const struct page *p)
{
    return p->ascii ? "*" : "●";
}

const char *curve_full_glyph(const struct page *p)
{
    return p->ascii ? ":" : "█";
}

const char *curve_band_glyph(const struct page *p)
{
    return p->ascii ? "|" : "░";
}

static void put(const struct curve_plane *g, int x, int y, const char *glyph,
                enum curve_layer layer)
{
    struct curve_cell *c = curve_cell_at(g, x, y);
    if (c && c->layer <= layer)
        *c = (struct curve_cell){glyph, layer};
}

static double middle_of(const struct curve_span *s)
{
    return s->least + (s->greatest - s->least) / 2;
}

/* --- an area --- */

static const char *part_glyph(const struct page *p, int eighths)
{
    static const char *const parts[] = {"", "▁", "▂", "▃", "▄", "▅", "▆", "▇", "█"};
    if (!p->ascii)
        return parts[eighths];
    return eighths < 4 ? "" : eighths < EIGHTHS ? "." : ":";
}

/* In eighths of a row, or in halves. */
static void fill_to(struct curve_plane *g, int x, double height)
{
    int steps = g->page->ascii ? 2 : EIGHTHS;
    for (int y = 1; y <= CURVE_ROWS; y++) {
        double part = fmin(fmax(height - y + 0.5, 0), 1);
        const char *glyph = part_glyph(g->page, (int)floor(part * steps + 0.5) * EIGHTHS / steps);
        if (*glyph)
            put(g, x, y, glyph, CURVE_LINE);
    }
}

/* Filled up to the least, a band up to the greatest; a row ends half above its centre. */
static void fill_range(struct curve_plane *g, int x, const struct curve_span *s)
{
    int least = (int)floor(s->least), greatest = (int)floor(s->greatest);
    for (int y = 1; y <= least; y++)
        put(g, x, y, curve_full_glyph(g->page), CURVE_LINE);
    for (int y = least + 1; y <= greatest; y++)
        put(g, x, y, curve_band_glyph(g->page), CURVE_BAND);
    g->banded = true;
}

/* The axis below is heavy where there is a value, be it 0. */
static void draw_area(struct curve_plane *g)
{
    for (int x = 0; x < g->columns; x++) {
        const struct curve_span *s = &g->spans[x];
        if (!s->drawn)
            continue;
        put(g, x, 0, g->page->ascii ? "=" : "━", CURVE_LINE);
        if (s->centred && !s->turns)
            fill_to(g, x, s->centre);
        else if (s->greatest - s->least < 1)
            fill_to(g, x, middle_of(s));
        else
            fill_range(g, x, s);
    }
}

/* --- a stroke --- */

/* Half rows from the lower half of the axis' row. */
static int half_of(double height)
{
    return (int)floor(2 * height) + 1;
}

static void draw_stroke(struct curve_plane *g)
{
    static const char *const halves[] = {"", "▄", "▀", "█"}, *const dots[] = {"", ".", "'", ":"};
    const char *const *glyphs = g->page->ascii ? dots : halves;
    for (int x = 0; x < g->columns; x++) {
        const struct curve_span *s = &g->spans[x];
        if (!s->drawn)
            continue;
        double middle = middle_of(s);
        bool flat = s->greatest - s->least < 0.5;
        int from = half_of(flat ? middle : s->least), to = half_of(flat ? middle : s->greatest);
        for (int y = from / 2; y <= to / 2; y++) {
            int lower = from <= 2 * y && 2 * y <= to;
            int upper = from <= 2 * y + 1 && 2 * y + 1 <= to;
            put(g, x, y, glyphs[lower + 2 * upper], CURVE_LINE);
        }
    }
}

/* --- symbols --- */

static bool is_taken(const struct curve_plane *g, size_t n, const char *symbol)
{
    for (size_t i = 0; i < n; i++)
        if (text_equal(g->symbols[i], symbol))
            return true;
    return text_equal(symbol, "*") || text_equal(symbol, "-");
}

/* The line's own, when it is one printable ASCII character and no other's. */
static const char *choose_symbol(const struct curve_plane *g, size_t i)
{
    static const char *const spare[] = {"o", "x", "#", "=", "%", "&", "~", "+", "@", "s"};
    const char *own = g->curve->lines.at[i].symbol;
    if (strlen(own) == 1 && *own > ' ' && *own < 0x7f && !is_taken(g, i, own))
        return own;
    for (size_t k = 0; k < sizeof spare / sizeof *spare; k++)
        if (!is_taken(g, i, spare[k]))
            return spare[k];
    return spare[i % (sizeof spare / sizeof *spare)];
}

static bool holds_row(const struct curve_span *s, int y)
{
    if (!s->drawn)
        return false;
    bool flat = s->greatest - s->least < 1;
    double middle = middle_of(s);
    int from = (int)floor((flat ? middle : s->least) + 0.5);
    int to = (int)floor((flat ? middle : s->greatest) + 0.5);
    return from <= y && y <= to;
}

/* Lines that share a cell take turns from column to column, so that each is seen. */
static void draw_shared(struct curve_plane *g, int x, int y)
{
    size_t n = 0;
    for (size_t i = 0; i < g->curve->lines.n; i++)
        n += holds_row(&g->spans[i * (size_t)g->columns + (size_t)x], y);
    if (n == 0)
        return;
    size_t turn = (size_t)x % n;
    for (size_t i = 0; i < g->curve->lines.n; i++)
        if (holds_row(&g->spans[i * (size_t)g->columns + (size_t)x], y) && turn-- == 0)
            put(g, x, y, g->symbols[i], CURVE_LINE);
}

void curve_choose_symbols(struct curve_plane *g)
{
    for (size_t i = 0; i < g->curve->lines.n; i++)
        g->symbols[i] = choose_symbol(g, i);
}

static void draw_symbols(struct curve_plane *g)
{
    curve_choose_symbols(g);
    for (int x = 0; x < g->columns; x++)
        for (int y = 0; y <= CURVE_ROWS; y++)
            draw_shared(g, x, y);
}

/* --- marks --- */

static bool has_spot(const struct curve_plane *g, const struct curve_mark *m)
{
    return curve_has_place(&g->curve->x, m->x) && curve_has_place(&g->curve->y, m->y);
}

/* Empty cells for the label, and one more on either side. */
static bool is_free(const struct curve_plane *g, int x, int y, int columns)
{
    if (y < 1 || y > CURVE_ROWS || x < 0 || x + columns > g->columns)
        return false;
    for (int i = x - 1; i <= x + columns; i++) {
        const struct curve_cell *c = curve_cell_at(g, i, y);
        if (c && c->layer != CURVE_NONE && c->layer != CURVE_MARK)
            return false;
        if (c && c->layer == CURVE_MARK && i >= x && i < x + columns)
            return false;
    }
    return true;
}

static bool put_label(struct curve_plane *g, const char *label, int x, int y)
{
    int columns = (int)utf8_columns(label);
    if (!is_free(g, x, y, columns))
        return false;
    for (int i = 0; i < columns; i++)
        put(g, x + i, y, i ? "" : label, CURVE_LABEL);
    return true;
}

/* Beside the mark, or near it above or below: centred, to its right, to its left. */
static bool draw_label(struct curve_plane *g, const char *label, int x, int y)
{
    int columns = (int)utf8_columns(label);
    if (columns == 0 || put_label(g, label, x + 2, y) || put_label(g, label, x - 1 - columns, y))
        return true;
    for (int away = 1; away <= LABEL_AWAY; away++) {
        for (int up = 1; up >= -1; up -= 2) {
            int row = y + up * away;
            if (put_label(g, label, x - columns / 2, row) || put_label(g, label, x, row) ||
                put_label(g, label, x + 1 - columns, row))
                return true;
        }
    }
    return false;
}

static void draw_marks(struct curve_plane *g)
{
    const struct curve *c = g->curve;
    for (size_t i = 0; i < c->marks.n; i++)
        if (has_spot(g, &c->marks.at[i]))
            put(g, curve_cell_of(&g->x, c->marks.at[i].x), curve_cell_of(&g->y, c->marks.at[i].y),
                curve_mark_glyph(g->page), CURVE_MARK);
    for (size_t i = 0; i < c->marks.n; i++)
        if (has_spot(g, &c->marks.at[i]))
            g->labelled[i] = draw_label(g, page_clean(g->page, c->marks.at[i].label),
                                        curve_cell_of(&g->x, c->marks.at[i].x),
                                        curve_cell_of(&g->y, c->marks.at[i].y));
}

void curve_draw(struct curve_plane *g)
{
    switch (g->manner) {
    case CURVE_AREA: draw_area(g); break;
    case CURVE_STROKE: draw_stroke(g); break;
    case CURVE_SYMBOLS: draw_symbols(g); break;
    }
    draw_marks(g);
}
