/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A map as text: the head of the y axis, the picture in its axes, one sign for the choice at
 * each place, the head of the x axis, the key below. Owns nothing. */
#include "report/map_plane.h"

#include <math.h>

#include "base/utf8.h"

enum {
    FEW_ROWS = 16,     /* as many rows as there are values, or twice and more up to this */
    MOST_ROWS = 20,    /* of more values the nearest are drawn */
    RIGHT_MARGIN = 3,  /* for the half of the last tick's label */
    ROW_IN_COLUMNS = 8 /* ticks upwards stand as far apart as labels of this width would */
};

struct drawing {
    struct map_plane plane;
    int columns, rows;
    size_t gutter;
};

static int rows_for(size_t n)
{
    return n > MOST_ROWS ? MOST_ROWS : n > FEW_ROWS ? (int)n : (int)(n * (FEW_ROWS / n));
}

/* The column or row, of so many, of a place. */
static int cell_of(double place, int cells)
{
    double at = floor(place * cells);
    return at < 0 ? 0 : at >= cells ? cells - 1 : (int)at;
}

static void measure(struct drawing *d)
{
    struct map_plane *g = &d->plane;
    struct arena *a = g->page->arena;
    size_t widest = 0;
    d->rows = rows_for(g->y.n);
    map_tick(&g->y, d->rows * ROW_IN_COLUMNS, a);
    for (size_t i = 0; i < g->y.scale.ticks.n; i++) {
        size_t columns = utf8_columns(g->y.scale.ticks.at[i].label);
        widest = columns > widest ? columns : widest;
    }
    d->gutter = widest + 1;
    d->columns = (int)(g->page->width - d->gutter - 1 - RIGHT_MARGIN);
    map_tick(&g->x, d->columns, a);
}

/* The first tick of the row; NULL for none. */
static const struct curve_tick *tick_in_row(const struct drawing *d, int row)
{
    const struct map_way *w = &d->plane.y;
    for (size_t i = 0; i < w->scale.ticks.n; i++)
        if (cell_of(map_place(w, w->scale.ticks.at[i].value), d->rows) == row)
            return &w->scale.ticks.at[i];
    return NULL;
}

static int tick_column(const struct drawing *d, size_t i)
{
    const struct map_way *w = &d->plane.x;
    return cell_of(map_place(w, w->scale.ticks.at[i].value), d->columns);
}

/* The signs of the columns from..until - 1 of a row. */
static void put_signs(const struct drawing *d, struct line *l, int row, int from, int until)
{
    const struct map_plane *g = &d->plane;
    size_t y = map_nearest(&g->y, (row + 0.5) / d->rows);
    struct text t;
    text_init(&t, g->page->arena);
    for (int x = from; x < until; x++)
        text_add(&t, g->signs[map_choice_at(g, map_nearest(&g->x, (x + 0.5) / d->columns), y)]);
    if (from < until)
        line_add(l, text_str(&t), INK_PLAIN);
}

/* Today's sign stands between two blanks. */
static void put_cells(const struct drawing *d, struct line *l, int row)
{
    const struct map_plane *g = &d->plane;
    bool here = map_shows_today(g) && cell_of(map_place(&g->y, g->map->today_y), d->rows) == row;
    if (!here) {
        put_signs(d, l, row, 0, d->columns);
        return;
    }
    int at = cell_of(map_place(&g->x, g->map->today_x), d->columns);
    put_signs(d, l, row, 0, at - 1);
    line_to(l, d->gutter + 1 + (size_t)at);
    line_add(l, MAP_TODAY_SIGN, INK_HEAD);
    line_to(l, l->column + 1);
    put_signs(d, l, row, at + 2, d->columns);
}

static void write_row(struct page *p, const struct drawing *d, int row)
{
    const struct curve_tick *tick = tick_in_row(d, row);
    struct line l = line_begin(p);
    if (tick)
        line_add_right(&l, tick->label, d->gutter - 1, INK_PLAIN);
    line_to(&l, d->gutter);
    line_add(&l, p->ascii ? tick ? "+" : "|" : tick ? "┤" : "│", INK_PLAIN);
    put_cells(d, &l, row);
    line_end(&l);
}

static void write_axis(struct page *p, const struct drawing *d)
{
    bool *ticks = NEW_ARRAY(p->arena, (size_t)d->columns, bool);
    for (size_t i = 0; i < d->plane.x.scale.ticks.n; i++)
        ticks[tick_column(d, i)] = true;
    struct text t;
    text_init(&t, p->arena);
    text_add(&t, p->ascii ? "+" : "└");
    for (int x = 0; x < d->columns; x++)
        text_add(&t, p->ascii ? ticks[x] ? "+" : "-" : ticks[x] ? "┬" : "─");
    struct line l = line_begin(p);
    line_to(&l, d->gutter);
    line_add(&l, text_str(&t), INK_PLAIN);
    line_end(&l);
}

/* Each centred below its tick, as far as the page goes. */
static void write_labels(struct page *p, const struct drawing *d)
{
    struct line l = line_begin(p);
    for (size_t i = 0; i < d->plane.x.scale.ticks.n; i++) {
        const char *label = d->plane.x.scale.ticks.at[i].label;
        size_t columns = utf8_columns(label), at = d->gutter + 1 + (size_t)tick_column(d, i);
        size_t from = at > columns / 2 ? at - columns / 2 : 0;
        line_to(&l, from + columns > p->width ? p->width - columns : from);
        line_add(&l, label, INK_PLAIN);
    }
    line_end(&l);
}

/* Centred below the axis, or a paragraph when it is wider. */
static void write_x_head(struct page *p, const struct drawing *d)
{
    const char *words = curve_x_words(p, &d->plane.x.scale);
    size_t columns = utf8_columns(words), room = (size_t)d->columns;
    if (columns > room) {
        page_paragraph(p, words, 0, INK_PLAIN);
        return;
    }
    if (columns == 0)
        return;
    struct line l = line_begin(p);
    line_to(&l, d->gutter + 1 + (room - columns) / 2);
    line_add(&l, words, INK_PLAIN);
    line_end(&l);
}

static void write_picture(struct page *p, struct drawing *d)
{
    measure(d);
    const char *words = curve_x_words(p, &d->plane.y.scale);
    if (*words)
        page_paragraph(p, words, 0, INK_PLAIN);
    for (int row = d->rows - 1; row >= 0; row--)
        write_row(p, d, row);
    write_axis(p, d);
    write_labels(p, d);
    write_x_head(p, d);
}

void page_map(struct page *p, const struct map *m)
{
    struct drawing d = {0};
    if (!map_is_whole(m)) {
        page_paragraph(p, "(no cells)", 0, INK_PLAIN);
        return;
    }
    map_open(&d.plane, p, m);
    write_picture(p, &d);
    page_blank(p);
    page_table(p, map_key_choices(&d.plane));
    if (m->has_today) {
        page_blank(p);
        page_table(p, map_key_today(&d.plane));
    }
    page_blank(p);
    struct lines remarks = map_key_remarks(&d.plane);
    for (size_t i = 0; i < remarks.n; i++)
        page_paragraph(p, remarks.at[i], 0, INK_PLAIN);
}
