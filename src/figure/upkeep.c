/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Elements between their tests. Figures of a unit beside the element's own, made when asked for;
 * `also` of the element leads there, so that they are found by their names. Owns nothing. */
#include "figure/upkeep.h"

#include <math.h>

#include "figure/compile.h"
#include "figure/horizon.h"

#define PART_UPKEEP "upkeep"

static const struct element_exports *exports_of(const struct compiled *element)
{
    return element->exports;
}

/* --- dates --- */

static day later_of(day a, day b)
{
    if (a == DAY_NONE || b == DAY_NONE)
        return a == DAY_NONE ? b : a;
    return a > b ? a : b;
}

static int number_at(const char *s, size_t n)
{
    int x = 0;
    for (size_t i = 0; i < n; i++)
        x = 10 * x + (s[i] - '0');
    return x;
}

/* The day `years` behind d: whole years by the calendar, the rest in days of 1/365 a. */
static day day_behind(day d, double years)
{
    char text[DATE_TEXT];
    double whole = floor(years);
    date_write(text, d);
    int year = number_at(text, 4) + (int)whole, month = number_at(text + 5, 2);
    return date_of(year, month, 1) + number_at(text + 8, 2) - 1 +
           (day)floor((years - whole) * 365 + 0.5);
}

static void set_dates(const struct figures *f, struct upkeep *u)
{
    const struct element *x = u->element->object->data;
    const struct register_settings *s = f->base->settings;
    day sound = later_of(x->since, x->known);
    u->tested_then = x->test->last != DAY_NONE && (sound == DAY_NONE || x->test->last >= sound);
    u->last = u->tested_then ? x->test->last : sound;
    u->due =
        u->last == DAY_NONE ? x->test->next : day_behind(u->last, exports_of(u->element)->every);
    bool late = u->due != DAY_NONE && u->due < f->date;
    u->overdue = late ? horizon_years(s, f->date) - horizon_years(s, u->due) : 0;
    u->plan_passed = x->test->next != DAY_NONE && x->test->next < f->date &&
                     (u->last == DAY_NONE || x->test->next > u->last);
}

/* --- courses --- */

static node_id changed_course(struct figures *f, const struct element_exports *x,
                              const struct course *c)
{
    node_id args[5];
    for (size_t i = 0; i < 5; i++)
        args[i] = graph_args(f->graph, x->whole.node)[i];
    return graph_course(f->graph, c, args);
}

/* The course counted from the day of evaluation, so that its value is that of today. What began
 * behind the first day of the horizon counts from its own day until it is tested. */
static node_id course_today(struct figures *f, const struct upkeep *u)
{
    const struct register_settings *s = f->base->settings;
    const struct element_exports *x = exports_of(u->element);
    struct course c = x->whole.when;
    double today = horizon_years(s, f->date);
    double from = u->last == DAY_NONE ? c.from : horizon_years(s, u->last);
    if (from > c.from && c.first > today)
        c.from = from;
    if (c.from > today || c.born > today)
        return NODE_NONE;
    c.from -= today;
    c.first -= today;
    c.born -= today;
    return changed_course(f, x, &c);
}

static void add_on_time(struct building *b, struct upkeep *u)
{
    struct figures *f = b->figures;
    const struct element_exports *x = exports_of(u->element);
    struct course c = x->whole.when;
    c = (struct course){.first = x->every, .every = x->every, .born = fmin(c.born, 0)};
    node_id course = changed_course(f, x, &c);
    double length = x->whole.ages ? horizon_length(f->base->settings) : x->every;
    struct window w = {0, length};
    struct windows windows = {1, &w};
    compiled_add(b, PROPERTY_COURSE, "on-time", NULL, course, NULL, NULL);
    node_id mean = graph_diagram_over(f->graph, variable_itself(f), 1, &course, &windows);
    u->on_time = compiled_add(b, PROPERTY_FAILS, "on-time", NULL,
                              graph_pick_in(f->graph, mean, 0, 0), NULL, NULL);
}

static void add_figures(struct building *b, struct upkeep *u)
{
    struct figures *f = b->figures;
    const struct element_exports *x = exports_of(u->element);
    if (!x->whole.timed) {
        node_id always = figure_at(f, x->whole.fails)->node;
        u->today = compiled_add(b, PROPERTY_FAILS, "today", NULL, always, NULL, NULL);
        u->on_time = compiled_add(b, PROPERTY_FAILS, "on-time", NULL, always, NULL, NULL);
        return;
    }
    node_id today = course_today(f, u);
    if (today != NODE_NONE)
        u->today = compiled_add(b, PROPERTY_FAILS, "today", NULL, today, NULL, NULL);
    add_on_time(b, u);
}

static void join(const struct compiled *element, const struct compiled *unit)
{
    struct compiled *last = (struct compiled *)element;
    while (last->also)
        last = (struct compiled *)last->also;
    last->also = unit;
}

void upkeep_of(struct figures *f, const struct compiled *element, struct upkeep *out)
{
    struct building b = {.figures = f, .variant = element->variant};
    *out = (struct upkeep){.element = element, .today = FIGURE_NONE, .on_time = FIGURE_NONE};
    set_dates(f, out);
    const struct compiled *known = compiled_part(&b, element->id, PART_UPKEEP);
    if (known) {
        out->today = compiled_figure(f, known, PROPERTY_FAILS, "today", NULL);
        out->on_time = compiled_figure(f, known, PROPERTY_FAILS, "on-time", NULL);
        return;
    }
    compiled_begin_part(f, element->variant, element->object, element->id, PART_UPKEEP, &b);
    add_figures(&b, out);
    compiled_end(&b);
    join(element, b.unit);
}

bool upkeep_never_shown(const struct compiled *element)
{
    const struct element_exports *x = exports_of(element);
    return x->undetected != NODE_NONE && !x->tested && x->revealed == NODE_NONE;
}
