/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Places of labels: a fixed list is tried around each mark. Owns nothing. */
#include "report/html_place.h"

#include <math.h>

/* The side of the mark that the label is on: -1, 0, 1 each way; a half is aslant. Rings
 * are tried from the mark outwards. */
static const struct side {
    double x, y;
} sides[] = {{1, 0}, {-1, 0}, {0, -1},  {0, 1},  {1, -1},   {-1, -1},
             {1, 1}, {-1, 1}, {.5, -1}, {.5, 1}, {-.5, -1}, {-.5, 1}};

enum { RINGS = 3, RING_WIDTH = 13, COST_OF_STROKE = 3, COST_OF_RING = 5 };

void place_add_box(struct places *p, double x, double y, double width, double height)
{
    *array_push(p->arena, &p->boxes) = (struct place_box){x, y, width, height};
}

void place_add_stroke(struct places *p, double x1, double y1, double x2, double y2)
{
    *array_push(p->arena, &p->strokes) = (struct place_stroke){x1, y1, x2, y2};
}

static bool touch(const struct place_box *a, const struct place_box *b)
{
    return a->x < b->x + b->width && b->x < a->x + a->width && a->y < b->y + b->height &&
           b->y < a->y + a->height;
}

static bool is_inside(const struct place_box *a, const struct place_box *bounds)
{
    return a->x >= bounds->x && a->y >= bounds->y && a->x + a->width <= bounds->x + bounds->width &&
           a->y + a->height <= bounds->y + bounds->height;
}

bool place_is_free(const struct places *p, struct place_box b)
{
    if (!is_inside(&b, &p->bounds))
        return false;
    for (size_t i = 0; i < p->boxes.n; i++)
        if (touch(&b, &p->boxes.at[i]))
            return false;
    return true;
}

/* Cuts the part from *from to *to of a stroke (0..1) to where low < a + d t < high. */
static void clip(double a, double d, double low, double high, double *from, double *to)
{
    if (d == 0) {
        if (a <= low || a >= high)
            *to = -1;
        return;
    }
    double s = (low - a) / d, t = (high - a) / d;
    *from = fmax(*from, fmin(s, t));
    *to = fmin(*to, fmax(s, t));
}

static bool is_crossed(const struct place_box *b, const struct place_stroke *s)
{
    double from = 0, to = 1;
    clip(s->x1, s->x2 - s->x1, b->x, b->x + b->width, &from, &to);
    clip(s->y1, s->y2 - s->y1, b->y, b->y + b->height, &from, &to);
    return from < to;
}

static int strokes_across(const struct places *p, const struct place_box *b)
{
    int n = 0;
    for (size_t i = 0; i < p->strokes.n; i++)
        n += is_crossed(b, &p->strokes.at[i]);
    return n;
}

static struct place_box box_at(const struct side *s, double x, double y, double away, double width,
                               double height)
{
    double aslant = s->x != 0 && s->y != 0 ? 0.75 : 1;
    double cx = x + s->x * (away * aslant + width / 2);
    double cy = y + s->y * (away * aslant + height / 2);
    return (struct place_box){cx - width / 2, cy - height / 2, width, height};
}

bool place_label(struct places *p, double x, double y, double away, double width, double height,
                 struct place_box *found)
{
    int best = -1;
    for (int ring = 0; ring < RINGS; ring++)
        for (size_t i = 0; i < sizeof sides / sizeof *sides; i++) {
            struct place_box b = box_at(&sides[i], x, y, away + ring * RING_WIDTH, width, height);
            if (!place_is_free(p, b))
                continue;
            int cost = COST_OF_STROKE * strokes_across(p, &b) + COST_OF_RING * ring;
            if (best >= 0 && cost >= best)
                continue;
            best = cost;
            *found = b;
        }
    if (best >= 0)
        *array_push(p->arena, &p->boxes) = *found;
    return best >= 0;
}
