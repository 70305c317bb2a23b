/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Two-way maps (map.h). Owns nothing beyond the arena of the figures. */
#include "decide/map.h"

#include <math.h>
#include <string.h>

#include "decide/lean.h"
#include "decide/moving.h"
#include "decide/swing.h"
#include "math/elementary.h"

static const double HALF = 0.5, DOUBLE = 2;

struct mapping {
    struct moving moving;
    const struct turn_input *input[2]; /* x, y */
    size_t n_alternatives;
    struct choice_map *out;
};

/* --- which inputs --- */

static ohmen_status find_named(struct mapping *m, const char *name, const struct turn_input **out,
                               ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, name);
    for (size_t i = 0; i < m->moving.inputs.n; i++) {
        const struct turn_input *in = &m->moving.inputs.at[i];
        if (!moving_reaches(&m->moving, in))
            continue;
        if (text_equal(in->name, name)) {
            *out = in;
            return OHMEN_OK;
        }
        nearest_offer(&near, in->name);
    }
    return error_set(e, OHMEN_UNKNOWN, "\"%s\" is no input that moves the decision \"%s\"%s", name,
                     m->moving.w->id, nearest_hint(m->moving.f->arena, &near));
}

static const struct turn_input *input_of(const struct mapping *m, figure_id id)
{
    for (size_t i = 0; i < m->moving.inputs.n; i++)
        if (m->moving.inputs.at[i].figure == id)
            return &m->moving.inputs.at[i];
    return NULL;
}

/* Takes the input for the first axis that is free. */
static void offer(struct mapping *m, figure_id id)
{
    const struct turn_input *in = input_of(m, id);
    if (!in || in == m->input[0] || in == m->input[1])
        return;
    for (size_t i = 0; i < 2; i++)
        if (!m->input[i]) {
            m->input[i] = in;
            return;
        }
}

static bool is_open(const struct mapping *m)
{
    return !m->input[0] || !m->input[1];
}

static ohmen_status choose(struct mapping *m, ohmen_error *e)
{
    struct input_swings swings;
    struct leans leans = {0};
    if (!is_open(m))
        return OHMEN_OK;
    ohmen_status status = swings_find(m->moving.f, m->moving.w, &swings, e);
    if (status != OHMEN_OK)
        return status;
    for (size_t i = 0; i < swings.list.n && swings.list.at[i].width > 0 && is_open(m); i++)
        offer(m, swings.list.at[i].input);
    if (is_open(m))
        leans_find(m->moving.f, m->moving.w, &leans);
    for (size_t i = 0; i < leans.n && is_open(m); i++)
        offer(m, leans.at[i].input);
    if (is_open(m))
        return error_set(e, OHMEN_COMPUTE, "the decision \"%s\" has no two inputs that move it",
                         m->moving.w->id);
    return OHMEN_OK;
}

static ohmen_status find_inputs(struct mapping *m, const char *x, const char *y, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    if (x)
        status = find_named(m, x, &m->input[0], e);
    if (y && status == OHMEN_OK)
        status = find_named(m, y, &m->input[1], e);
    if (x && y && status == OHMEN_OK && m->input[0] == m->input[1])
        return error_set(e, OHMEN_UNKNOWN, "a map needs two inputs, but \"%s\" stands twice", x);
    return status == OHMEN_OK ? choose(m, e) : status;
}

/* --- axes --- */

/* From where to where. */
static ohmen_status find_ends(const struct mapping *m, const struct turn_input *in, double *low,
                              double *high, ohmen_error *e)
{
    const struct quantity *q = turn_unknown(m->moving.f, in->figure);
    ohmen_status status = OHMEN_OK;
    *low = *high = 0;
    if (q)
        status = quantity_tail(q, MAP_LOW, MAP_HIGH, low, e);
    if (q && status == OHMEN_OK)
        status = quantity_tail(q, MAP_HIGH, MAP_LOW, high, e);
    if (!(*low < *high)) {
        *low = HALF * in->now;
        *high = DOUBLE * in->now;
    }
    *low = fmax(*low, in->low);
    *high = fmin(*high, in->high);
    return status;
}

static double step(const struct map_axis *a, double low, double high, size_t i)
{
    double part = (double)i / (double)(a->n - 1);
    if (i == 0 || i == a->n - 1)
        return i ? high : low;
    return a->in_logs ? low * math_pow(high / low, part) : low + (high - low) * part;
}

static ohmen_status make_axis(const struct mapping *m, const struct turn_input *in, size_t n,
                              struct map_axis *out, ohmen_error *e)
{
    double low, high, *at = NEW_ARRAY(m->moving.f->arena, n, double);
    ohmen_status status = find_ends(m, in, &low, &high, e);
    if (status != OHMEN_OK)
        return status;
    *out = (struct map_axis){.input = in->figure, .name = in->name, .now = in->now, .n = n};
    out->is_uncertain = turn_unknown(m->moving.f, in->figure) != NULL;
    out->in_logs = low > 0 && high / low >= MAP_LOGS;
    for (size_t i = 0; i < n; i++)
        at[i] = step(out, low, high, i);
    out->at = at;
    return OHMEN_OK;
}

/* --- points --- */

static double next_best(const struct mapping *m, const double *worth, size_t best)
{
    double next = -INFINITY;
    for (size_t i = 0; i < m->n_alternatives; i++)
        if (i != best)
            next = fmax(next, worth[i]);
    return next;
}

static struct map_point point_of(const struct mapping *m, double *worth)
{
    struct map_point p = {.best = moving_best(&m->moving, worth), .worth = worth};
    if (m->n_alternatives > 1)
        p.margin = worth[p.best] - next_best(m, worth, p.best);
    return p;
}

static struct map_point take_point(struct mapping *m, double x, double y)
{
    double *worth = NEW_ARRAY(m->moving.f->arena, m->n_alternatives, double);
    if (!moving_to(&m->moving, (double[]){x, y}))
        return (struct map_point){.best = MAP_NONE, .worth = worth};
    memcpy(worth, m->moving.worth, m->n_alternatives * sizeof *worth);
    return point_of(m, worth);
}

/* Between the two ends of a run, where every worth is a line in what moves, and so is whatever must
 * stay possible. */
static struct map_point between(const struct mapping *m, const struct map_point *first,
                                const struct map_point *last, double part)
{
    double *worth = NEW_ARRAY(m->moving.f->arena, m->n_alternatives, double);
    for (size_t i = 0; i < m->n_alternatives; i++)
        worth[i] = first->worth[i] * (1 - part) + last->worth[i] * part;
    return point_of(m, worth);
}

/* Which of the points lie in a row (AXIS_X moves) or a column (AXIS_Y moves) of that number. */
enum axis { AXIS_X, AXIS_Y };

static struct map_point *point_at(const struct mapping *m, enum axis moves, size_t number, size_t i)
{
    size_t columns = m->out->x.n;
    return &m->out->points[moves == AXIS_X ? number * columns + i : i * columns + number];
}

static struct map_point take(struct mapping *m, enum axis moves, size_t number, size_t i)
{
    const struct choice_map *out = m->out;
    return moves == AXIS_X ? take_point(m, out->x.at[i], out->y.at[number])
                           : take_point(m, out->x.at[number], out->y.at[i]);
}

static void take_run(struct mapping *m, enum axis moves, size_t number, bool is_line)
{
    const struct map_axis *a = moves == AXIS_X ? &m->out->x : &m->out->y;
    struct map_point *first = point_at(m, moves, number, 0);
    struct map_point *last = point_at(m, moves, number, a->n - 1);
    *first = take(m, moves, number, 0);
    *last = take(m, moves, number, a->n - 1);
    bool ends = first->best != MAP_NONE && last->best != MAP_NONE;
    for (size_t i = 1; i + 1 < a->n; i++) {
        double part = (a->at[i] - a->at[0]) / (a->at[a->n - 1] - a->at[0]);
        *point_at(m, moves, number, i) =
            is_line && ends ? between(m, first, last, part) : take(m, moves, number, i);
    }
}

static bool is_line_in(struct mapping *m, enum axis moves)
{
    return moving_reaches(&m->moving, m->input[moves]) && prober_is_linear(m->moving.prober);
}

static ohmen_status take_points(struct mapping *m, ohmen_error *e)
{
    struct choice_map *out = m->out;
    bool x_line = is_line_in(m, AXIS_X), y_line = is_line_in(m, AXIS_Y);
    enum axis moves = x_line || !y_line ? AXIS_X : AXIS_Y;
    size_t runs = moves == AXIS_X ? out->y.n : out->x.n;
    moving_take(&m->moving, 2, m->input);
    out->is_exact = prober_is_exact(m->moving.prober);
    out->today = take_point(m, out->x.now, out->y.now);
    if (out->today.best == MAP_NONE)
        return error_set(e, OHMEN_COMPUTE, "a map of \"%s\" by %s and %s cannot be computed",
                         m->moving.w->id, out->x.name, out->y.name);
    out->points = NEW_ARRAY(m->moving.f->arena, out->x.n * out->y.n, struct map_point);
    for (size_t i = 0; i < runs; i++)
        take_run(m, moves, i, x_line || y_line);
    return OHMEN_OK;
}

/* --- lines --- */

static void add_line(struct mapping *m, size_t from, size_t to)
{
    const struct map_point *p = &m->out->points[from], *q = &m->out->points[to];
    if (p->best == q->best || p->best == MAP_NONE || q->best == MAP_NONE)
        return;
    double ahead = p->worth[p->best] - p->worth[q->best];
    double behind = q->worth[q->best] - q->worth[p->best];
    double along = ahead + behind > 0 ? ahead / (ahead + behind) : HALF;
    *array_push(m->moving.f->arena, &m->out->lines) = (struct map_line){from, to, along};
}

static void find_lines(struct mapping *m)
{
    size_t columns = m->out->x.n, rows = m->out->y.n;
    for (size_t i = 0; i < columns * rows; i++) {
        if (i % columns + 1 < columns)
            add_line(m, i, i + 1);
        if (i / columns + 1 < rows)
            add_line(m, i, i + columns);
    }
}

/* --- the whole --- */

ohmen_status map_find(struct figures *f, const struct weighing *w, const char *x, const char *y,
                      size_t columns, size_t rows, struct choice_map *out, ohmen_error *e)
{
    struct choice_map found = {0};
    struct mapping m = {.n_alternatives = w->alternatives.n, .out = &found};
    moving_open(&m.moving, f, w);
    ohmen_status status = find_inputs(&m, x, y, e);
    if (status == OHMEN_OK)
        status = make_axis(&m, m.input[0], columns, &found.x, e);
    if (status == OHMEN_OK)
        status = make_axis(&m, m.input[1], rows, &found.y, e);
    if (status == OHMEN_OK)
        status = take_points(&m, e);
    if (status != OHMEN_OK)
        return status;
    find_lines(&m);
    found.name = arena_printf(f->arena, "%s.map[%s][%s]", w->id, found.x.name, found.y.name);
    *out = found;
    return OHMEN_OK;
}
