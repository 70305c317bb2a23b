/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The axes of a grid and the cells of its marks. Owns nothing; the page's scratch
 * arena holds the cells. */
#include "report/grid_plane.h"

#include <math.h>

#include "math/elementary.h"

enum { MOST_STEPS = 32, USUAL_PAGE = 120, WIDEST_DECADE = 40 };

/* Rounding of a logarithm must not cost a decade. */
static const double tiny = 1e-9;

static bool can_place(const struct grid_mark *m)
{
    return m->frequency > 0 && m->damage > 0 && isfinite(m->frequency) && isfinite(m->damage);
}

/* Whole decades around lo .. hi (logarithms). An axis with too few grows on the side
 * where the marks come nearer to its end; of more than it can hold the upper ones are
 * kept, for there the risk is. */
static void choose_decades(double lo, double hi, int *low, int *high)
{
    *low = (int)floor(lo + tiny);
    *high = (int)ceil(hi - tiny);
    while (*high - *low < GRID_LEAST_DECADES) {
        if (*high - hi <= lo - *low)
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
        double f = math_log10(m->frequency), d = math_log10(m->damage);
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

/* From the top of the axis to its bottom, so that all is seen at one look. */
static int most_steps(const struct page *p)
{
    int more = (int)p->width - USUAL_PAGE;
    return MOST_STEPS + (more > 0 ? more / 10 : 0);
}

/* Twice the rows; 1.4 times that in a picture that would leave most of the room empty:
 * marks stay apart there. */
static int columns_for_rows(int high, int across, int columns)
{
    int due = 2 * high;
    return due * across * 2 < columns ? due * 7 / 5 / 2 * 2 : due;
}

/* A decade gets an even number of columns, and half as many rows, where there is
 * room for four, and no more than the height of the page allows. */
static void choose_decade_size(struct grid_plane *g, int columns)
{
    int across = g->damage_high - g->damage_low, up = g->frequency_high - g->frequency_low;
    int highest = most_steps(g->page) / up;
    int wide = clamp(columns / across, 2, WIDEST_DECADE);
    if (wide > 3)
        wide -= wide % 2;
    int high = (wide + 1) / 2;
    if (high > highest) {
        high = highest;
        wide = clamp(wide, 0, columns_for_rows(high, across, columns));
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
    double across = (math_log10(m->damage) - g->damage_low) * g->decade_columns;
    double down = (g->frequency_high - math_log10(m->frequency)) * g->decade_rows;
    int x = (int)floor(across + 0.5), y = (int)floor(down + 0.5);
    s->x = clamp(x, 0, g->columns - 1);
    s->y = clamp(y, 0, g->rows - 1);
    s->clamped = s->x != x || s->y != y;
}

void grid_plane_size(struct grid_plane *g, int columns)
{
    choose_decade_size(g, columns);
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (g->spots[i].placed)
            find_spot(g, i);
}

static bool add_decade(bool wanted, int *low, int *high, int *end, int step)
{
    if (!wanted || *high - *low >= GRID_MOST_DECADES)
        return false;
    *end += step;
    return true;
}

bool grid_plane_widen(struct grid_plane *g)
{
    bool top = false, bottom = false, left = false, right = false;
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        const struct grid_spot *s = &g->spots[i];
        if (!s->placed)
            continue;
        top = top || s->y == 0;
        bottom = bottom || s->y == g->rows - 1;
        left = left || s->x == 0;
        right = right || s->x == g->columns - 1;
    }
    int *f_low = &g->frequency_low, *f_high = &g->frequency_high;
    int *d_low = &g->damage_low, *d_high = &g->damage_high;
    bool wider = add_decade(top, f_low, f_high, f_high, 1);
    wider = add_decade(bottom, f_low, f_high, f_low, -1) || wider;
    wider = add_decade(right, d_low, d_high, d_high, 1) || wider;
    return add_decade(left, d_low, d_high, d_low, -1) || wider;
}

bool grid_is_part(const struct grid *grid, size_t i)
{
    return grid->marks.at[i].part_of >= 0;
}

static void find_company(struct grid_plane *g, size_t i)
{
    struct grid_spot *s = &g->spots[i];
    s->first = i;
    for (size_t j = g->grid->marks.n; j-- > 0;) {
        const struct grid_spot *o = &g->spots[j];
        bool alike = grid_is_part(g->grid, i) == grid_is_part(g->grid, j);
        if (!o->placed || !alike || o->x != s->x || o->y != s->y)
            continue;
        s->company++;
        s->first = j;
    }
}

void grid_plane_open(struct grid_plane *g)
{
    g->cells = NEW_ARRAY(g->page->arena, (size_t)(g->columns * g->rows), struct grid_cell);
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
