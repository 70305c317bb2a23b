/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Building swings, maps and spreads. Owns nothing.
 * Invariant: every number that is drawn is finite and at most 1e300 in size (asserted). */
#include <assert.h>

#include "report/block_add.h"

/* --- swings --- */

struct block *report_swings(struct report *r, const char *key, const char *title, double today,
                            const char *today_figure)
{
    assert(report_can_draw(today));
    struct block *b = report_add(r, BLOCK_SWINGS, key, title);
    b->swings = NEW(r->arena, struct swings);
    b->swings->today = today;
    b->swings->today_figure = report_keep(r, today_figure);
    swings_set_axis(r, b, "result", NULL, NULL, STYLE_PLAIN);
    swings_set_turns(r, b, "what is best changes at this end");
    return b;
}

struct curve_axis *swings_set_axis(struct report *r, struct block *b, const char *key,
                                   const char *head, const char *unit, enum number_style style)
{
    return report_set_axis(r, &b->swings->axis, key, head, unit, style);
}

void swings_set_turns(struct report *r, struct block *b, const char *words)
{
    b->swings->turns = report_keep(r, words ? words : "");
}

struct swing *swings_add(struct report *r, struct block *b, const char *label, const char *words,
                         double low, double high)
{
    assert(report_can_draw(low) && report_can_draw(high));
    struct swing *s = array_push(r->arena, &b->swings->rows);
    s->label = report_keep(r, label ? label : "");
    s->words = report_keep(r, words ? words : "");
    s->low = low;
    s->high = high;
    return s;
}

/* --- maps --- */

struct block *report_map(struct report *r, const char *key, const char *title)
{
    struct block *b = report_add(r, BLOCK_MAP, key, title);
    b->map = NEW(r->arena, struct map);
    map_set_x(r, b, "x", NULL, NULL, STYLE_PLAIN);
    map_set_y(r, b, "y", NULL, NULL, STYLE_PLAIN);
    map_set_worth(r, b, "worth", NULL, NULL, STYLE_PLAIN);
    return b;
}

struct curve_axis *map_set_x(struct report *r, struct block *b, const char *key, const char *head,
                             const char *unit, enum number_style style)
{
    return report_set_axis(r, &b->map->x, key, head, unit, style);
}

struct curve_axis *map_set_y(struct report *r, struct block *b, const char *key, const char *head,
                             const char *unit, enum number_style style)
{
    return report_set_axis(r, &b->map->y, key, head, unit, style);
}

struct curve_axis *map_set_worth(struct report *r, struct block *b, const char *key,
                                 const char *head, const char *unit, enum number_style style)
{
    return report_set_axis(r, &b->map->worth, key, head, unit, style);
}

void map_add_x(struct report *r, struct block *b, double x)
{
    struct map *m = b->map;
    assert(report_can_draw(x) && (m->xs.n == 0 || *array_last(&m->xs) < x));
    *array_push(r->arena, &m->xs) = x;
}

void map_add_y(struct report *r, struct block *b, double y)
{
    struct map *m = b->map;
    assert(report_can_draw(y) && (m->ys.n == 0 || *array_last(&m->ys) < y));
    *array_push(r->arena, &m->ys) = y;
}

struct map_choice *map_add_choice(struct report *r, struct block *b, const char *name, bool nothing)
{
    struct map_choice *c = array_push(r->arena, &b->map->choices);
    c->name = report_keep(r, name ? name : "");
    c->nothing = nothing;
    return c;
}

void map_add_cell(struct report *r, struct block *b, size_t choice, double worth)
{
    assert(choice < b->map->choices.n && report_can_draw(worth));
    *array_push(r->arena, &b->map->cells) = (struct map_cell){choice, worth};
}

void map_set_today(struct block *b, double x, double y)
{
    assert(report_can_draw(x) && report_can_draw(y));
    b->map->has_today = true;
    b->map->today_x = x;
    b->map->today_y = y;
}

bool map_is_whole(const struct map *m)
{
    return m->cells.n > 0 && m->cells.n == m->xs.n * m->ys.n;
}

/* --- spreads --- */

struct block *report_spreads(struct report *r, const char *key, const char *title)
{
    struct block *b = report_add(r, BLOCK_SPREADS, key, title);
    b->spreads = NEW(r->arena, struct spreads);
    return b;
}

struct spread *spreads_add(struct report *r, struct block *b, const char *label, const char *unit,
                           enum number_style style)
{
    struct spread *s = array_push(r->arena, b->spreads);
    s->label = report_keep(r, label ? label : "");
    s->unit = report_keep(r, unit ? unit : "");
    s->style = style;
    for (int k = 0; k < SPREAD_PARTS; k++)
        s->parts[k].error = -1;
    return s;
}

void spread_set(struct report *r, struct spread *s, enum spread_part part, double value,
                double error, const char *figure)
{
    assert(report_can_draw(value) && report_can_draw(error));
    s->parts[part] = (struct spread_value){value, error, report_keep(r, figure)};
}
