/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Labels beside the marks. A label may cover thin lines, nothing else; it never
 * touches another label or another mark, so that it cannot be read as that one's.
 * A label that finds no place stands in the key alone. Owns nothing. */
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

/* What stands before and behind a label: on the first round nothing but thin lines
 * may, on the second anything but another label or mark. */
static bool is_apart(const struct grid_plane *g, const struct grid_spot *s, int x, int y,
                     bool strict)
{
    const struct grid_cell *c = grid_cell_at(g, x, y);
    if (!c || (x == s->x && y == s->y))
        return true;
    return c->layer < (strict ? LAYER_LINE : LAYER_LABEL);
}

static bool is_free(const struct grid_plane *g, int x, int y)
{
    const struct grid_cell *c = grid_cell_at(g, x, y);
    return c && c->layer <= LAYER_RISK;
}

static bool fits(const struct grid_plane *g, const struct grid_spot *s, int x, int y, int n,
                 bool strict)
{
    for (int i = 0; i < n; i++)
        if (!is_free(g, x + i, y))
            return false;
    return is_apart(g, s, x - 1, y, strict) && is_apart(g, s, x + n, y, strict);
}

/* A cell takes one character with what combines with it; a wide one takes two. */
static void put_label(struct grid_plane *g, const char *s, int x, int y)
{
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
}

static bool try_places(struct grid_plane *g, const struct grid_spot *s, const char *label,
                       bool strict)
{
    int n = (int)utf8_columns(label);
    for (size_t k = 0; k < sizeof places / sizeof *places; k++) {
        int x = s->x + places[k].half_lengths * n / 2 + places[k].cells;
        int y = s->y + places[k].rows;
        if (!fits(g, s, x, y, n, strict))
            continue;
        put_label(g, label, x, y);
        return true;
    }
    return false;
}

static void place_label(struct grid_plane *g, size_t i)
{
    const char *label = page_clean(g->page, g->grid->marks.at[i].label);
    size_t n = utf8_columns(label);
    if (n == 0 || n > (size_t)longest_label(g))
        return;
    if (!try_places(g, &g->spots[i], label, true))
        try_places(g, &g->spots[i], label, false);
}

void grid_draw_labels(struct grid_plane *g)
{
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (g->spots[i].placed)
            place_label(g, i);
}
