/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The axes of a grid and the cells of its marks. Owns nothing; the page's scratch
 * arena holds the cells. */
#include "report/grid_plane.h"

#include <math.h>

/* Marks keep this part of a decade away from the ends of an axis. */
static const double margin = 0.15;

static bool can_place(const struct grid_mark *m)
{
    return m->frequency > 0 && m->damage > 0 && isfinite(m->frequency) && isfinite(m->damage);
}

/* Whole decades around lo .. hi (logarithms); of more than the axis can hold the
 * upper ones are kept, for there the risk is. */
static void choose_decades(double lo, double hi, int *low, int *high)
{
    *low = (int)floor(lo - margin);
    *high = (int)ceil(hi + margin);
    for (bool up = true; *high - *low < GRID_LEAST_DECADES; up = !up) {
        if (up)
            ++*high;
        else
            --*low;
    }
    if (*high - *low > GRID_MOST_DECADES)
        *low = *high - GRID_MOST_DECADES;
}

void grid_plane_range(struct grid_plane *g)
{
    double f_lo = INFINITY, f_hi = -INFINITY, d_lo = INFINITY, d_hi = -INFINITY;
    g->spots = NEW_ARRAY(g->page->arena, g->grid->marks.n, struct grid_spot);
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        const struct grid_mark *m = &g->grid->marks.at[i];
        if (!can_place(m))
            continue;
        double f = log10(m->frequency), d = log10(m->damage);
        f_lo = fmin(f_lo, f);
        f_hi = fmax(f_hi, f);
        d_lo = fmin(d_lo, d);
        d_hi = fmax(d_hi, d);
        g->spots[i].placed = true;
        g->n_placed++;
    }
    if (g->n_placed == 0)
        return;
    choose_decades(f_lo, f_hi, &g->frequency_low, &g->frequency_high);
    choose_decades(d_lo, d_hi, &g->damage_low, &g->damage_high);
}

static int clamp(int x, int least, int most)
{
    return x < least ? least : x > most ? most : x;
}

/* A decade gets an even number of columns, and half as many rows, where there is
 * room for four; the picture is not higher than a page of paper. */
static void choose_decade_size(struct grid_plane *g, int columns)
{
    int across = g->damage_high - g->damage_low, up = g->frequency_high - g->frequency_low;
    int highest = clamp((int)g->page->width * 2 / 5, 30, 60) / up;
    int wide = clamp(columns / across, 2, 24);
    if (wide > 3)
        wide -= wide % 2;
    int high = (wide + 1) / 2;
    if (high > highest) {
        high = highest;
        wide = 2 * high;
    }
    g->decade_columns = wide;
    g->decade_rows = high;
    g->columns = across * wide + 1;
    g->rows = up * high + 1;
}

static void find_spot(struct grid_plane *g, size_t i)
{
    const struct grid_mark *m = &g->grid->marks.at[i];
    struct grid_spot *s = &g->spots[i];
    double across = (log10(m->damage) - g->damage_low) * g->decade_columns;
    double down = (g->frequency_high - log10(m->frequency)) * g->decade_rows;
    int x = (int)floor(across + 0.5), y = (int)floor(down + 0.5);
    s->x = clamp(x, 0, g->columns - 1);
    s->y = clamp(y, 0, g->rows - 1);
    s->clamped = s->x != x || s->y != y;
}

static void find_company(struct grid_plane *g, size_t i)
{
    struct grid_spot *s = &g->spots[i];
    s->first = i;
    for (size_t j = g->grid->marks.n; j-- > 0;) {
        const struct grid_spot *o = &g->spots[j];
        if (!o->placed || o->x != s->x || o->y != s->y)
            continue;
        s->company++;
        s->first = j;
    }
}

void grid_plane_size(struct grid_plane *g, int columns)
{
    choose_decade_size(g, columns);
    g->cells = NEW_ARRAY(g->page->arena, (size_t)(g->columns * g->rows), struct grid_cell);
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (g->spots[i].placed)
            find_spot(g, i);
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (g->spots[i].placed)
            find_company(g, i);
}

struct grid_cell *grid_cell_at(const struct grid_plane *g, int x, int y)
{
    if (x < 0 || y < 0 || x >= g->columns || y >= g->rows)
        return NULL;
    return &g->cells[y * g->columns + x];
}

void grid_put(struct grid_plane *g, int x, int y, const char *glyph, enum grid_layer layer)
{
    struct grid_cell *c = grid_cell_at(g, x, y);
    if (c && c->layer <= layer)
        *c = (struct grid_cell){glyph, layer};
}
