/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Arrows from mark to mark. An arrow goes straight unless another mark, a head or an
 * arrow's line is in its way; then it may bow to either side, and come to its mark
 * from a cell beside the straight one. Marks of one cell have their arrow in common.
 * Owns nothing. Invariant: the head stands in a cell that touches its mark, and not
 * under another mark while one such cell is free of the one straight before its mark
 * and the two beside that. */
#include <stdlib.h>

#include "report/grid_plane.h"

/* A way from a mark to another in n steps of one cell along its longer side, with up
 * to `bow` cells aside and the head `land` cells aside (of the same sign, or 0). */
struct way {
    const struct grid_spot *from;
    int x, y; /* cells from start to end */
    int n;    /* steps, at least 2; the last one is at the end mark */
    int bow, land;
};

struct step {
    int x, y;
};

enum { MOST_BOW = 2, ALONG_ARROW = 1, CROOKED = 8, OVER_HEAD = 20, OVER_MARK = 30,
       OUTSIDE = 1000, HEAD_LOST = 100000 };

static int sign(int x)
{
    return (x > 0) - (x < 0);
}

static int least(int a, int b)
{
    return a < b ? a : b;
}

/* Step i: along the longer side a cell a step, the other one rounded; the bow begins
 * and ends with a cell a step. */
static struct step step_at(const struct way *w, int i)
{
    int bow = abs(w->bow), aside = least(bow, least(i, w->n - 1 - i + abs(w->land)));
    int x = sign(w->x) * ((2 * i * abs(w->x) + w->n) / (2 * w->n));
    int y = sign(w->y) * ((2 * i * abs(w->y) + w->n) / (2 * w->n));
    aside *= sign(w->bow);
    bool level = abs(w->x) > abs(w->y);
    return (struct step){w->from->x + x + (level ? 0 : aside),
                         w->from->y + y + (level ? aside : 0)};
}

static int cost_of_step(const struct grid_plane *g, struct step s)
{
    const struct grid_cell *c = grid_cell_at(g, s.x, s.y);
    if (!c)
        return OUTSIDE;
    switch (c->layer) {
    case LAYER_MARK: return OVER_MARK;
    case LAYER_HEAD: return OVER_HEAD;
    case LAYER_ARROW: return ALONG_ARROW;
    default: return 0;
    }
}

/* The head must be seen, and touch its mark. */
static bool loses_head(const struct grid_plane *g, const struct way *w)
{
    struct step s = step_at(w, w->n - 1);
    const struct grid_cell *c = grid_cell_at(g, s.x, s.y);
    return !c || c->layer == LAYER_MARK || abs(w->from->x + w->x - s.x) > 1
        || abs(w->from->y + w->y - s.y) > 1;
}

/* What is in the way; a crooked way needs a reason. */
static int cost_of_way(const struct grid_plane *g, const struct way *w)
{
    int cost = CROOKED * abs(w->bow) + abs(w->land);
    for (int i = 1; i < w->n; i++)
        cost += cost_of_step(g, step_at(w, i));
    return loses_head(g, w) ? cost + HEAD_LOST : cost;
}

static const char *body_glyph(const struct grid_plane *g, int dx, int dy)
{
    if (dy == 0)
        return g->page->ascii ? "-" : "─";
    if (dx == 0)
        return g->page->ascii ? "|" : "│";
    if ((dx > 0) == (dy > 0))
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

static void draw_way(struct grid_plane *g, const struct way *w)
{
    struct step last = step_at(w, 0);
    for (int i = 1; i < w->n; i++) {
        struct step s = step_at(w, i);
        if (i + 1 == w->n)
            grid_put(g, s.x, s.y, head_glyph(g, w->x, w->y), LAYER_HEAD);
        else
            grid_put(g, s.x, s.y, body_glyph(g, s.x - last.x, s.y - last.y), LAYER_ARROW);
        last = s;
    }
}

static void draw_arrow(struct grid_plane *g, const struct grid_spot *from,
                       const struct grid_spot *to)
{
    struct way best = {.from = from, .x = to->x - from->x, .y = to->y - from->y};
    best.n = abs(best.x) > abs(best.y) ? abs(best.x) : abs(best.y);
    if (best.n < 2)
        return; /* no cell between them; the key tells */
    int cost = cost_of_way(g, &best);
    for (int bow = -MOST_BOW; bow <= MOST_BOW; bow++) {
        for (int land = 0; land <= 1 && bow; land++) {
            struct way w = best;
            w.bow = bow;
            w.land = land * sign(bow);
            int c = cost_of_way(g, &w);
            if (c >= cost)
                continue;
            cost = c;
            best = w;
        }
    }
    draw_way(g, &best);
}

/* Whether an arrow before number i joins the same cells. */
static bool is_drawn(const struct grid_plane *g, size_t i)
{
    const struct grid_mark *marks = g->grid->marks.at;
    const struct grid_spot *s = g->spots;
    for (size_t k = 0; k < i; k++)
        if (marks[k].arrow_from >= 0 && s[k].placed && s[marks[k].arrow_from].placed
            && s[k].first == s[i].first
            && s[marks[k].arrow_from].first == s[marks[i].arrow_from].first)
            return true;
    return false;
}

void grid_draw_arrows(struct grid_plane *g)
{
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        int from = g->grid->marks.at[i].arrow_from;
        if (from >= 0 && g->spots[i].placed && g->spots[from].placed && !is_drawn(g, i))
            draw_arrow(g, &g->spots[from], &g->spots[i]);
    }
}
