/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What each line does in each column. Between two points a line is straight on the
 * page. A point that has no place on a log axis parts its line. Owns nothing; the page's
 * scratch arena holds the cells. */
#include "report/curve_plane.h"

#include <math.h>

static bool has_place(const struct curve *c, double x, double y)
{
    return curve_has_place(&c->x, x) && curve_has_place(&c->y, y);
}

/* --- ranges --- */

struct range {
    double least, greatest;
};

static void widen_range(struct range *r, double value)
{
    r->least = fmin(r->least, value);
    r->greatest = fmax(r->greatest, value);
}

static void find_ranges(const struct curve_plane *g, struct range *x, struct range *y)
{
    const struct curve *c = g->curve;
    *x = *y = (struct range){INFINITY, -INFINITY};
    for (size_t i = 0; i < c->lines.n; i++) {
        for (size_t k = 0; k < g->drawn[i].n; k++) {
            const struct curve_point *p = &g->drawn[i].at[k];
            if (!has_place(c, p->x, p->y))
                continue;
            widen_range(x, p->x);
            widen_range(y, p->y);
        }
    }
    for (size_t i = 0; i < c->marks.n; i++) {
        if (!has_place(c, c->marks.at[i].x, c->marks.at[i].y))
            continue;
        widen_range(x, c->marks.at[i].x);
        widen_range(y, c->marks.at[i].y);
    }
}

/* The corner of a step stands above or below the next point, at the height of the last. */
static struct curve_points drawn_points(struct arena *a, const struct curve_line *l)
{
    struct curve_points points = {0};
    for (size_t i = 0; i < l->points.n; i++) {
        const struct curve_point *p = &l->points.at[i];
        if (l->steps && i && p->x > l->points.at[i - 1].x && p->y != l->points.at[i - 1].y)
            *array_push(a, &points) = (struct curve_point){p->x, l->points.at[i - 1].y};
        *array_push(a, &points) = *p;
    }
    return points;
}

void curve_plane_range(struct curve_plane *g)
{
    const struct curve *c = g->curve;
    struct range x, y;
    g->drawn = NEW_ARRAY(g->page->arena, c->lines.n, struct curve_points);
    for (size_t i = 0; i < c->lines.n; i++)
        g->drawn[i] = drawn_points(g->page->arena, &c->lines.at[i]);
    find_ranges(g, &x, &y);
    g->empty = x.least > x.greatest;
    g->x.axis = &c->x;
    g->y.axis = &c->y;
    if (g->empty)
        return;
    curve_scale_x(&g->x, x.least, x.greatest, 1);
    curve_scale_y(&g->y, y.least, y.greatest, g->page->arena);
    bool from_zero = !c->y.log && g->y.low == 0;
    g->manner = c->lines.n != 1 ? CURVE_SYMBOLS : from_zero ? CURVE_AREA : CURVE_STROKE;
}

/* --- spans --- */

/* A point on the page: columns from the left, rows from the x axis. */
struct spot {
    double x, y;
};

/* Heights come in the order of the line. */
static void widen(struct curve_span *s, double y)
{
    int way = !s->drawn ? 0 : (y > s->last) - (y < s->last);
    s->turns = s->turns || (way && s->way && way != s->way);
    s->way = way ? way : s->way;
    s->least = s->drawn ? fmin(s->least, y) : y;
    s->greatest = s->drawn ? fmax(s->greatest, y) : y;
    s->last = y;
    s->drawn = true;
}

static int clamp(double x, int most)
{
    return x < 0 ? 0 : x > most ? most : (int)x;
}

/* Height of a stretch at x, which is within it. */
static double height_at(struct spot p, struct spot q, double x)
{
    return x <= p.x ? p.y : x >= q.x ? q.y : p.y + (q.y - p.y) * ((x - p.x) / (q.x - p.x));
}

static void pass_centre(struct curve_span *s, struct spot p, struct spot q, int column)
{
    if (p.x > column || column > q.x)
        return;
    s->centred = true;
    s->centre = p.x < q.x ? height_at(p, q, column) : q.y;
}

/* Columns end where the next begins: what stands on the edge belongs to the next. */
static void cover(struct curve_span *spans, int columns, struct spot p, struct spot q)
{
    int first = clamp(floor(p.x + 0.5), columns - 1);
    int last = clamp(ceil(q.x + 0.5) - 1, columns - 1);
    last = last < first ? first : last;
    widen(&spans[first], p.y);
    for (int i = first; i < last; i++) {
        double edge = height_at(p, q, i + 0.5);
        widen(&spans[i], edge);
        widen(&spans[i + 1], edge);
    }
    widen(&spans[last], q.y);
    for (int i = first; i <= last; i++)
        pass_centre(&spans[i], p, q, i);
    if (p.x == q.x && p.y != q.y)
        spans[first].turns = true;
}

static void find_spans(struct curve_plane *g, size_t line)
{
    const struct curve_points *points = &g->drawn[line];
    struct curve_span *spans = g->spans + line * (size_t)g->columns;
    struct spot last = {0};
    bool joined = false;
    for (size_t i = 0; i < points->n; i++) {
        const struct curve_point *p = &points->at[i];
        bool placed = has_place(g->curve, p->x, p->y);
        if (placed) {
            struct spot s = {curve_place(&g->x, p->x), curve_place(&g->y, p->y)};
            cover(spans, g->columns, joined ? last : s, s);
            last = s;
        }
        joined = placed;
    }
}

void curve_plane_open(struct curve_plane *g, int columns)
{
    struct arena *a = g->page->arena;
    size_t n = g->curve->lines.n, wide = (size_t)columns;
    g->columns = columns;
    g->x.cells = columns - 1;
    g->spans = NEW_ARRAY(a, n * wide, struct curve_span);
    g->cells = NEW_ARRAY(a, wide * (CURVE_ROWS + 1), struct curve_cell);
    g->symbols = NEW_ARRAY(a, n, const char *);
    g->labelled = NEW_ARRAY(a, g->curve->marks.n, bool);
    curve_tick_x(&g->x, a);
    for (size_t i = 0; i < n; i++)
        find_spans(g, i);
}

struct curve_cell *curve_cell_at(const struct curve_plane *g, int x, int y)
{
    if (x < 0 || y < 0 || x >= g->columns || y > CURVE_ROWS)
        return NULL;
    return &g->cells[y * g->columns + x];
}
