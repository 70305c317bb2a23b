/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing on the plane: lines of equal risk, the criteria's lines, whole marks. The dots of
 * the decades are one a row, the criteria's lines two or more: they stand out without
 * colour. Owns nothing. */
#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "math/elementary.h"
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

/* Rounding must not make a line uneven that meets the cells halfway. */
static const double halfway = 0.5 + 1e-9;

static void draw_line(struct grid_plane *g, size_t i)
{
    double risk = math_log10(g->grid->lines.at[i].risk);
    for (int x = 0; x < g->columns; x++) {
        double damage = g->damage_low + (double)x / g->decade_columns;
        double down = (g->frequency_high - (risk - damage)) * g->decade_rows;
        if (down >= -0.5 && down < g->rows - 0.5)
            grid_put(g, x, (int)floor(down + halfway), g->symbols[i], LAYER_LINE);
    }
}

void grid_choose_symbols(struct grid_plane *g)
{
    g->symbols = NEW_ARRAY(g->page->arena, g->grid->lines.n, const char *);
    for (size_t i = 0; i < g->grid->lines.n; i++)
        g->symbols[i] = choose_symbol(g, i);
}

void grid_draw_lines(struct grid_plane *g)
{
    grid_choose_symbols(g);
    for (int k = g->frequency_low + g->damage_low + 1; k < g->frequency_high + g->damage_high; k++)
        draw_risk_decade(g, k);
    for (size_t i = 0; i < g->grid->lines.n; i++)
        draw_line(g, i);
}

const char *grid_lone_glyph(const struct page *p, bool part)
{
    if (part)
        return p->ascii ? "o" : "○";
    return p->ascii ? "*" : "●";
}

const char *grid_shared_glyph(const struct page *p, bool part)
{
    if (part)
        return p->ascii ? "O" : "◇";
    return p->ascii ? "@" : "◆";
}

void grid_draw_marks(struct grid_plane *g)
{
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        const struct grid_spot *s = &g->spots[i];
        if (s->placed && !grid_is_part(g->grid, i))
            grid_put(g, s->x, s->y,
                     s->company > 1 ? grid_shared_glyph(g->page, false)
                                    : grid_lone_glyph(g->page, false),
                     LAYER_MARK);
    }
}
