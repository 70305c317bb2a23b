/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing on the plane: lines of equal risk, the criteria's lines, arrows, marks.
 * Owns nothing. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"
#include "report/grid_plane.h"

/* Risk 10^k as thin dots, one a row: at frequency 10^(high - y / rows) the damage is
 * 10^(k - high + y / rows), in whole numbers so that decades fall on whole cells. */
static void draw_risk_decade(struct grid_plane *g, int k)
{
    int start = (k - g->frequency_high - g->damage_low) * g->decade_columns;
    for (int y = 0; y < g->rows; y++) {
        int x = start + (2 * y * g->decade_columns + g->decade_rows) / (2 * g->decade_rows);
        grid_put(g, x, y, g->page->ascii ? "." : "·", LAYER_RISK);
    }
}

/* The symbol must be one column wide and printable on the page. */
static const char *choose_symbol(const struct grid_plane *g, size_t i)
{
    static const char *const spare[] = {"=", "#", "%", "&", "~"};
    const char *symbol = page_clean(g->page, g->grid->lines.at[i].symbol);
    bool fit = utf8_columns(symbol) == 1 && utf8_count(symbol, strlen(symbol)) == 1
        && *symbol != ' ';
    return fit ? symbol : spare[i % (sizeof spare / sizeof *spare)];
}

static void draw_line(struct grid_plane *g, size_t i)
{
    double risk = log10(g->grid->lines.at[i].risk);
    for (int x = 0; x < g->columns; x++) {
        double damage = g->damage_low + (double)x / g->decade_columns;
        double down = (g->frequency_high - (risk - damage)) * g->decade_rows;
        if (down >= -0.5 && down < g->rows - 0.5)
            grid_put(g, x, (int)floor(down + 0.5), g->symbols[i], LAYER_LINE);
    }
}

void grid_draw_lines(struct grid_plane *g)
{
    size_t n = g->grid->lines.n;
    g->symbols = NEW_ARRAY(g->page->arena, n, const char *);
    for (int k = g->frequency_low + g->damage_low + 1; k < g->frequency_high + g->damage_high; k++)
        draw_risk_decade(g, k);
    for (size_t i = 0; i < n; i++) {
        g->symbols[i] = choose_symbol(g, i);
        draw_line(g, i);
    }
}

static int sign(int x)
{
    return (x > 0) - (x < 0);
}

static const char *body_glyph(const struct grid_plane *g, int dx, int dy)
{
    if (dy == 0)
        return g->page->ascii ? "-" : "─";
    if (dx == 0)
        return g->page->ascii ? "|" : "│";
    if (dx == dy)
        return g->page->ascii ? "\\" : "╲";
    return g->page->ascii ? "/" : "╱";
}

/* The head points along the axis on which the way is longer to the eye. */
static const char *head_glyph(const struct grid_plane *g, int way_x, int way_y)
{
    bool ascii = g->page->ascii;
    if (abs(way_x) >= 2 * abs(way_y))
        return way_x > 0 ? ascii ? ">" : "→" : ascii ? "<" : "←";
    return way_y > 0 ? ascii ? "v" : "↓" : ascii ? "^" : "↑";
}

/* Straight from cell to cell: step i of n along the longer way, the other rounded. */
static void draw_arrow(struct grid_plane *g, const struct grid_spot *from,
                       const struct grid_spot *to)
{
    int way_x = to->x - from->x, way_y = to->y - from->y;
    int n = abs(way_x) > abs(way_y) ? abs(way_x) : abs(way_y);
    int last_x = from->x, last_y = from->y;
    for (int i = 1; i < n; i++) {
        int x = from->x + sign(way_x) * ((2 * i * abs(way_x) + n) / (2 * n));
        int y = from->y + sign(way_y) * ((2 * i * abs(way_y) + n) / (2 * n));
        if (i + 1 == n)
            grid_put(g, x, y, head_glyph(g, way_x, way_y), LAYER_HEAD);
        else
            grid_put(g, x, y, body_glyph(g, x - last_x, y - last_y), LAYER_ARROW);
        last_x = x;
        last_y = y;
    }
}

void grid_draw_arrows(struct grid_plane *g)
{
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        int from = g->grid->marks.at[i].arrow_from;
        if (from >= 0 && g->spots[i].placed && g->spots[from].placed)
            draw_arrow(g, &g->spots[from], &g->spots[i]);
    }
}

/* A shared cell shows how many share it. */
static const char *mark_glyph(const struct grid_plane *g, size_t company)
{
    static const char *const counts[] = {"2", "3", "4", "5", "6", "7", "8", "9"};
    if (company == 1)
        return g->page->ascii ? "*" : "●";
    return company <= 9 ? counts[company - 2] : "+";
}

void grid_draw_marks(struct grid_plane *g)
{
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        const struct grid_spot *s = &g->spots[i];
        if (s->placed)
            grid_put(g, s->x, s->y, mark_glyph(g, s->company), LAYER_MARK);
    }
}
