/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which alternative of a decision is best where two inputs have other values, as a picture. */
#include "decide/map.h"

#include "work/work.h"

struct drawing {
    struct job *j;
    const struct weighing *w;
    const struct choice_map *map;
    struct block *block;
    size_t *choices; /* by alternative, and behind them what is not possible: choice + 1, or 0 */
};

static size_t point_count(const struct choice_map *m)
{
    return m->x.n * m->y.n;
}

/* The alternative at a point; behind the last one where it is not possible. */
static size_t place_at(const struct drawing *d, size_t point)
{
    size_t best = d->map->points[point].best;
    return best == MAP_NONE ? d->w->alternatives.n : best;
}

/* --- the picture --- */

static void set_axes(struct drawing *d)
{
    struct job *j = d->j;
    const struct map_axis *x = &d->map->x, *y = &d->map->y;
    map_set_x(j->report, d->block, "x", x->name, figure_unit(j, x->input), STYLE_PLAIN)->log =
        x->in_logs;
    map_set_y(j->report, d->block, "y", y->name, figure_unit(j, y->input), STYLE_PLAIN)->log =
        y->in_logs;
    map_set_worth(j->report, d->block, "net", "Net present value", j->model->settings->currency,
                  STYLE_MONEY);
    for (size_t i = 0; i < x->n; i++)
        map_add_x(j->report, d->block, figure_shown(j, x->input, x->at[i]));
    for (size_t i = 0; i < y->n; i++)
        map_add_y(j->report, d->block, figure_shown(j, y->input, y->at[i]));
}

static void add_choice(struct drawing *d, size_t place)
{
    struct job *j = d->j;
    bool possible = place < d->w->alternatives.n;
    const struct alternative *of = possible ? &d->w->alternatives.at[place] : NULL;
    struct map_choice *c =
        map_add_choice(j->report, d->block, possible ? alternative_words(of) : "not possible",
                       possible && of->n == 0);
    if (possible && of->net != FIGURE_NONE)
        c->figure = figure_name(j->figures, j->arena, of->net);
    d->choices[place] = d->block->map->choices.n;
}

/* Those that are best somewhere, best of today first. */
static void add_choices(struct drawing *d)
{
    size_t n = d->w->alternatives.n;
    bool *wanted = NEW_ARRAY(d->j->arena, n + 1, bool);
    d->choices = NEW_ARRAY(d->j->arena, n + 1, size_t);
    for (size_t i = 0; i < point_count(d->map); i++)
        wanted[place_at(d, i)] = true;
    for (size_t i = 0; i < n; i++)
        if (wanted[d->w->order[i]])
            add_choice(d, d->w->order[i]);
    if (wanted[n])
        add_choice(d, n);
}

static void add_cells(struct drawing *d)
{
    for (size_t i = 0; i < point_count(d->map); i++) {
        size_t place = place_at(d, i);
        double worth = place < d->w->alternatives.n ? d->map->points[i].worth[place] : 0;
        map_add_cell(d->j->report, d->block, d->choices[place] - 1, worth);
    }
}

static void set_today(struct drawing *d)
{
    struct job *j = d->j;
    const struct map_axis *x = &d->map->x, *y = &d->map->y;
    map_set_today(d->block, figure_shown(j, x->input, x->now), figure_shown(j, y->input, y->now));
    d->block->map->today_x_figure = figure_name(j->figures, j->arena, x->input);
    d->block->map->today_y_figure = figure_name(j->figures, j->arena, y->input);
}

/* --- the words --- */

static const char *range_words(const struct map_axis *a)
{
    return a->is_uncertain ? "from its 1 % to its 99 % point" : "from half to double of what it is";
}

static const char *axes_words(struct job *j, const struct choice_map *m)
{
    if (m->x.is_uncertain == m->y.is_uncertain)
        return arena_printf(j->arena, "each goes %s", range_words(&m->x));
    return arena_printf(j->arena, "%s goes %s, and %s %s", m->x.name, range_words(&m->x), m->y.name,
                        range_words(&m->y));
}

static void map_note(const struct drawing *d)
{
    const struct choice_map *m = d->map;
    bool alone = d->block->map->choices.n == 1;
    report_note(d->j->report, "map-words",
                "At every place both inputs are known for certain, and everything else is as "
                "unknown as it was; %s.%s%s",
                axes_words(d->j, m),
                alone ? " The same alternative is best all over the map: these two do not turn it."
                      : "",
                m->is_exact ? ""
                            : " The worths are approximate: something else that is unknown bends "
                              "what these inputs do.");
}

static void draw(struct job *j, const struct weighing *w, const struct choice_map *m)
{
    struct drawing d = {.j = j, .w = w, .map = m};
    d.block = report_map(
        j->report, "map",
        arena_printf(j->arena, "Which alternative is best, by %s and %s", m->x.name, m->y.name));
    set_axes(&d);
    add_choices(&d);
    add_cells(&d);
    set_today(&d);
    map_note(&d);
}

ohmen_status part_map(struct job *j, const struct weighing *w, const char *x, const char *y,
                      ohmen_error *e)
{
    struct choice_map *map = NEW(j->arena, struct choice_map);
    ohmen_error why = OHMEN_ERROR_INIT;
    const char *by[2] = {NULL, NULL};
    if (!judged_alternative(w))
        return OHMEN_OK;
    if (!x && !y)
        widest_inputs(j, w, by);
    job_progress(j, "map", 0, 1);
    ohmen_status status =
        map_find(j->figures, w, x ? x : by[0], y ? y : by[1], MAP_COLUMNS, MAP_ROWS, map, &why);
    job_progress(j, "map", 1, 1);
    if (status == OHMEN_OK)
        draw(j, w, map);
    else if (status == OHMEN_COMPUTE && !x && !y)
        report_note(j->report, "map-words", "There is no map of two inputs: %s.", why.text);
    else
        return error_set(e, status, "%s", why.text);
    return OHMEN_OK;
}
