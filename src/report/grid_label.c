/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Labels beside the marks; marks of one cell have a joined one, "6,7". A label covers
 * nothing but thin dots. Beside it stands a blank, the edge or its own mark, so that
 * it never reads as part of a line, an arrow or another label; where it is not beside
 * its own mark, it does not touch any other one. A label that finds no place stands
 * in the key alone, and with it a mark that is a part of another. Owns nothing. */
#include <string.h>

#include "base/utf8.h"
#include "report/grid_plane.h"

/* The place of a label from its mark, in labels and cells: x + length * lengths / 2 +
 * cells. In the order in which places are tried. */
struct place_rule {
    int half_lengths, cells, rows;
};
static const struct place_rule places[] = {
    {0, 1, 0},   {-2, 0, 0},  {0, 0, -1},  {0, 0, 1},   {-2, 1, -1}, {-2, 1, 1},
    {-1, 0, -1}, {-1, 0, 1},  {0, 1, -1},  {0, 1, 1},   {-2, 0, -1}, {-2, 0, 1},
    {0, 2, -1},  {0, 2, 1},   {-2, -1, -1}, {-2, -1, 1},
};

/* Longer labels are left to the key. */
static int longest_label(const struct grid_plane *g)
{
    return g->columns / 4 > 12 ? g->columns / 4 : 12;
}

static bool is_own(const struct grid_spot *s, int x, int y)
{
    return x == s->x && y == s->y;
}

/* Before and behind a label: its mark, or what a blank may replace. To the left the
 * axis is too near; to the right there is a blank beyond the edge. */
static bool is_gap(const struct grid_plane *g, const struct grid_spot *s, int x, int y)
{
    const struct grid_cell *c = grid_cell_at(g, x, y);
    return c ? is_own(s, x, y) || c->layer <= LAYER_GAP : x >= g->columns;
}

static bool is_free(const struct grid_plane *g, int x, int y)
{
    const struct grid_cell *c = grid_cell_at(g, x, y);
    return c && c->layer <= LAYER_RISK;
}

/* A mark of other ones within a cell of the n cells from x. */
static bool is_near_others(const struct grid_plane *g, const struct grid_spot *s, int x, int y,
                           int n)
{
    for (int row = y - 1; row <= y + 1; row++)
        for (int i = x - 1; i <= x + n; i++) {
            const struct grid_cell *c = grid_cell_at(g, i, row);
            if (c && c->layer == LAYER_MARK && !is_own(s, i, row))
                return true;
        }
    return false;
}

static bool fits(const struct grid_plane *g, const struct grid_spot *s, int x, int y, int n)
{
    for (int i = 0; i < n; i++)
        if (!is_free(g, x + i, y))
            return false;
    return is_gap(g, s, x - 1, y) && is_gap(g, s, x + n, y)
        && (y == s->y || !is_near_others(g, s, x, y, n));
}

/* A cell takes one character with what combines with it; a wide one takes two. */
static void put_label(struct grid_plane *g, const char *s, int x, int y)
{
    grid_put(g, x - 1, y, " ", LAYER_GAP);
    while (*s) {
        int columns = 1;
        size_t n = utf8_prefix(s, 1);
        const char *glyph = arena_strn(g->page->arena, s, n);
        if (utf8_columns(glyph) == 0) {
            columns = 2;
            n = utf8_prefix(s, 2);
            glyph = arena_strn(g->page->arena, s, n);
            grid_put(g, x + 1, y, "", LAYER_LABEL);
        }
        grid_put(g, x, y, glyph, LAYER_LABEL);
        x += columns;
        s += n;
    }
    grid_put(g, x, y, " ", LAYER_GAP);
}

static bool try_places(struct grid_plane *g, const struct grid_spot *s, const char *label)
{
    int n = (int)utf8_columns(label);
    if (n == 0 || n > longest_label(g))
        return false;
    for (size_t k = 0; k < sizeof places / sizeof *places; k++) {
        int x = s->x + places[k].half_lengths * n / 2 + places[k].cells;
        int y = s->y + places[k].rows;
        if (!fits(g, s, x, y, n))
            continue;
        put_label(g, label, x, y);
        return true;
    }
    return false;
}

/* The first n labels of a cell, and a sign that there are more: "6,7..". */
static const char *joined_label(const struct grid_plane *g, size_t first, size_t n)
{
    struct text t;
    text_init(&t, g->page->arena);
    size_t left = n;
    for (size_t i = first; left > 0; i++) {
        if (!g->spots[i].placed || g->spots[i].first != first)
            continue;
        text_printf(&t, "%s%s", t.n ? "," : "", page_clean(g->page, g->grid->marks.at[i].label));
        left--;
    }
    if (n < g->spots[first].company)
        text_add(&t, "..");
    return text_str(&t);
}

/* As many labels of the cell as find a place. */
static void place_label(struct grid_plane *g, size_t i)
{
    struct grid_spot *s = &g->spots[i];
    for (size_t n = s->company; n > 0 && !s->labelled; n--)
        s->labelled = try_places(g, s, joined_label(g, i, n));
}

/* Marks and labels leave this cell alone. */
static bool is_clear(const struct grid_plane *g, int x, int y)
{
    const struct grid_cell *c = grid_cell_at(g, x, y);
    return !c || c->layer < LAYER_LABEL;
}

/* A part of a mark stands on nothing but dots and lines, and beside no other mark or label, so
 * that it takes nothing from them. */
static bool has_room_for_part(const struct grid_plane *g, const struct grid_spot *s)
{
    enum grid_layer layer = grid_cell_at(g, s->x, s->y)->layer;
    return (layer <= LAYER_RISK || layer == LAYER_LINE) && is_clear(g, s->x - 1, s->y) &&
           is_clear(g, s->x + 1, s->y);
}

/* Never without its label. */
static void place_part(struct grid_plane *g, size_t i)
{
    const struct grid_spot *s = &g->spots[i];
    if (!has_room_for_part(g, s))
        return;
    place_label(g, i);
    if (s->labelled)
        grid_put(g, s->x, s->y,
                 s->company > 1 ? grid_shared_glyph(g->page, true) : grid_lone_glyph(g->page, true),
                 LAYER_MARK);
}

static bool is_first(const struct grid_plane *g, size_t i, bool part)
{
    return g->spots[i].placed && g->spots[i].first == i && grid_is_part(g->grid, i) == part;
}

void grid_draw_labels(struct grid_plane *g)
{
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (is_first(g, i, false))
            place_label(g, i);
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (is_first(g, i, true))
            place_part(g, i);
}
