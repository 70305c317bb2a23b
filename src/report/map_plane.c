/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The scales and signs of a map. Owns nothing. */
#include "report/map_plane.h"

#include <assert.h>
#include <math.h>

#include "report/number.h"

static void open_way(struct map_way *w, const struct curve_axis *axis, const double *values,
                     size_t n, struct arena *a)
{
    w->axis = *axis;
    w->axis.log = axis->log && values[0] > 0;
    w->n = n;
    w->at = NEW_ARRAY(a, n, double);
    w->scale = (struct curve_scale){.axis = &w->axis};
    curve_scale_x(&w->scale, values[0], values[n - 1], 1);
    if (n > 1) {
        double size = w->scale.high - w->scale.low;
        double first = curve_place(&w->scale, values[1]);
        double last = 1 - curve_place(&w->scale, values[n - 2]);
        w->scale.low -= first * size / 2;
        w->scale.high += last * size / 2;
    }
    for (size_t i = 0; i < n; i++)
        w->at[i] = map_place(w, values[i]);
}

const char *map_nothing_sign(const struct page *p)
{
    return p->ascii ? "." : "·";
}

const char *map_letter(const struct page *p, size_t n)
{
    static const char letters[] = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789";
    bool known = n < sizeof letters - 1;
    return known ? arena_strn(p->arena, letters + n, 1) : "?";
}

void map_open(struct map_plane *g, const struct page *p, const struct map *m)
{
    assert(map_is_whole(m));
    *g = (struct map_plane){.page = p, .map = m};
    open_way(&g->x, &m->x, m->xs.at, m->xs.n, p->arena);
    open_way(&g->y, &m->y, m->ys.at, m->ys.n, p->arena);
    g->signs = NEW_ARRAY(p->arena, m->choices.n, const char *);
    size_t letter = 0;
    for (size_t i = 0; i < m->choices.n; i++)
        g->signs[i] = m->choices.at[i].nothing ? map_nothing_sign(p) : map_letter(p, letter++);
}

void map_tick(struct map_way *w, int columns, struct arena *a)
{
    w->scale.cells = columns;
    curve_tick_x(&w->scale, a);
}

double map_place(const struct map_way *w, double value)
{
    return curve_place(&w->scale, value) / w->scale.cells;
}

double map_edge(const struct map_way *w, size_t i)
{
    return i == 0 ? 0 : i == w->n ? 1 : (w->at[i - 1] + w->at[i]) / 2;
}

size_t map_nearest(const struct map_way *w, double place)
{
    size_t i = 0;
    while (i + 1 < w->n && place >= map_edge(w, i + 1))
        i++;
    return i;
}

size_t map_choice_at(const struct map_plane *g, size_t x, size_t y)
{
    return g->map->cells.at[y * g->map->xs.n + x].choice;
}

static bool is_within(const struct map_way *w, double value)
{
    if (!curve_has_place(&w->axis, value))
        return false;
    double at = map_place(w, value);
    return at >= 0 && at <= 1;
}

bool map_shows_today(const struct map_plane *g)
{
    return g->map->has_today && is_within(&g->x, g->map->today_x) &&
           is_within(&g->y, g->map->today_y);
}

/* --- the key --- */

struct share {
    size_t cells;
    double least, greatest;
};

static struct share share_of(const struct map *m, size_t choice)
{
    struct share s = {.least = INFINITY, .greatest = -INFINITY};
    for (size_t i = 0; i < m->cells.n; i++) {
        if (m->cells.at[i].choice != choice)
            continue;
        s.cells++;
        s.least = fmin(s.least, m->cells.at[i].worth);
        s.greatest = fmax(s.greatest, m->cells.at[i].worth);
    }
    return s;
}

static bool has_worth(const struct map *m)
{
    return *m->worth.head || *m->worth.unit;
}

/* One for all choices, so that their worths can be compared. */
static int worth_shift(const struct map *m)
{
    double least = INFINITY, greatest = -INFINITY;
    for (size_t i = 0; i < m->cells.n; i++) {
        least = fmin(least, m->cells.at[i].worth);
        greatest = fmax(greatest, m->cells.at[i].worth);
    }
    return number_shift(m->worth.style, m->worth.unit, least, greatest);
}

static void add_worth(const struct map *m, struct report *r, struct row *row, double worth)
{
    struct cell *c = row_number(r, row, worth, NULL);
    c->style = m->worth.style;
    c->shift = worth_shift(m);
}

static void add_choice(const struct map_plane *g, struct report *r, struct block *b, size_t i)
{
    const struct map *m = g->map;
    struct share s = share_of(m, i);
    struct row *row = block_row(r, b);
    row_text(r, row, g->signs[i]);
    row_text(r, row, m->choices.at[i].name)->figure = m->choices.at[i].figure;
    row_count(r, row, s.cells);
    if (!has_worth(m) || s.cells == 0)
        return;
    add_worth(m, r, row, s.least);
    add_worth(m, r, row, s.greatest);
}

static void add_worth_column(const struct map *m, struct report *r, struct block *b,
                             const char *what, unsigned keep)
{
    int shift = worth_shift(m);
    const char *head = m->worth.head, *between = *head ? ": " : "";
    const char *prefix = shift > 0 ? money_prefix(shift) : "";
    const char *unit = m->worth.style == STYLE_PERCENT
                           ? "%"
                           : arena_printf(r->arena, "%s%s", prefix, m->worth.unit);
    head = arena_printf(r->arena, "%s%s%s", head, between, what);
    struct column *c = block_column(r, b, what, head, unit, STYLE_PLAIN);
    c->own = true;
    c->keep = keep;
}

const struct block *map_key_choices(const struct map_plane *g)
{
    const struct map *m = g->map;
    struct report r;
    report_init(&r, g->page->arena);
    struct block *b = report_table(&r, NULL, NULL);
    block_column(&r, b, "sign", "", "", STYLE_PLAIN);
    block_column(&r, b, "choice", "Choice", "", STYLE_PLAIN);
    block_column(&r, b, "cells", "Cells", "", STYLE_PLAIN)->keep = 1;
    if (has_worth(m)) {
        add_worth_column(m, &r, b, "least", 2);
        add_worth_column(m, &r, b, "greatest", 3);
    }
    for (size_t i = 0; i < m->choices.n; i++)
        add_choice(g, &r, b, i);
    return b;
}

const struct block *map_key_today(const struct map_plane *g)
{
    const struct map *m = g->map;
    struct report r;
    report_init(&r, g->page->arena);
    struct block *b = report_table(&r, NULL, NULL);
    block_column(&r, b, "sign", "", "", STYLE_PLAIN);
    block_column(&r, b, "mark", "Mark", "", STYLE_PLAIN);
    block_column(&r, b, "x", *m->x.head ? m->x.head : "to the right", m->x.unit, m->x.style);
    block_column(&r, b, "y", *m->y.head ? m->y.head : "upwards", m->y.unit, m->y.style);
    struct row *row = block_row(&r, b);
    row_text(&r, row, MAP_TODAY_SIGN);
    row_text(&r, row, "today");
    row_number(&r, row, m->today_x, m->today_x_figure);
    row_number(&r, row, m->today_y, m->today_y_figure);
    return b;
}

struct lines map_key_remarks(const struct map_plane *g)
{
    struct lines remarks = {0};
    struct arena *a = g->page->arena;
    *array_push(a, &remarks) =
        arena_printf(a,
                     "Values to the right: %zu, upwards: %zu. Every place shows the choice at "
                     "the nearest of them.",
                     g->x.n, g->y.n);
    if (g->map->has_today && !map_shows_today(g))
        *array_push(a, &remarks) = "Today lies outside the map.";
    return remarks;
}
