/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Swings (swing.h): each input is moved to its two ends for all alternatives at once. Owns nothing
 * beyond the arena of the figures. */
#include "decide/swing.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "decide/moving.h"

#define MARK ".swing["

const char *const swing_sides[] = {"low", "high"};

struct swinging {
    struct moving moving;
    size_t best, second; /* of today */
    const double *now;   /* worth, by alternative */
    struct input_swings *out;
};

/* --- one input --- */

static ohmen_status find_ends(const struct quantity *q, struct input_swing *s, ohmen_error *e)
{
    static const double points[] = {SWING_LOW, SWING_HIGH};
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < 2 && status == OHMEN_OK; i++)
        status = quantity_tail(q, points[i], points[1 - i], &s->ends[i].at, e);
    return status;
}

static bool take_end(struct swinging *x, struct swing_end *end)
{
    size_t n = x->moving.w->alternatives.n;
    if (!moving_to(&x->moving, &end->at))
        return false;
    double *worth = NEW_ARRAY(x->moving.f->arena, n, double);
    memcpy(worth, x->moving.worth, n * sizeof *worth);
    end->worth = worth;
    end->best = moving_best(&x->moving, worth);
    end->difference = worth[x->best] - worth[x->second];
    return true;
}

/* Does the input move any alternative, between its ends or from today? */
static bool moves_any(const struct swinging *x, const struct input_swing *s)
{
    for (size_t i = 0; i < x->moving.w->alternatives.n; i++)
        if (s->ends[0].worth[i] != s->ends[1].worth[i] || s->ends[0].worth[i] != x->now[i])
            return true;
    return false;
}

static ohmen_status add_swing(struct swinging *x, const struct turn_input *in, ohmen_error *e)
{
    struct arena *a = x->moving.f->arena;
    const struct quantity *q = turn_unknown(x->moving.f, in->figure);
    struct input_swing s = {.input = in->figure, .name = in->name, .now = in->now};
    if (!q || !moving_reaches(&x->moving, in))
        return OHMEN_OK;
    moving_take(&x->moving, 1, &in);
    ohmen_status status = find_ends(q, &s, e);
    if (status != OHMEN_OK)
        return status;
    if (!take_end(x, &s.ends[0]) || !take_end(x, &s.ends[1])) {
        *array_push(a, &x->out->not_possible) = in->figure;
        return OHMEN_OK;
    }
    s.width = fabs(s.ends[1].difference - s.ends[0].difference);
    s.turns = s.ends[0].best != x->best || s.ends[1].best != x->best;
    s.is_exact = prober_is_exact(x->moving.prober);
    if (moves_any(x, &s)) {
        *array_push(a, &x->out->list) = s;
        x->out->is_exact = x->out->is_exact && s.is_exact;
    }
    return OHMEN_OK;
}

/* --- the whole --- */

static int by_width(const void *p, const void *q)
{
    const struct input_swing *a = p, *b = q;
    if (a->width != b->width)
        return a->width > b->width ? -1 : 1;
    return text_compare(a->name, b->name);
}

static const double *worth_now(const struct figures *f, const struct weighing *w)
{
    double *worth = NEW_ARRAY(f->arena, w->alternatives.n, double);
    for (size_t i = 0; i < w->alternatives.n; i++) {
        figure_id net = w->alternatives.at[i].net;
        worth[i] = net == FIGURE_NONE ? 0 : figure_value(f, net);
    }
    return worth;
}

ohmen_status swings_find(struct figures *f, const struct weighing *w, struct input_swings *out,
                         ohmen_error *e)
{
    struct swinging x = {.out = out};
    struct input_swings found = {.is_exact = true};
    *out = found;
    if (w->alternatives.n < 2)
        return OHMEN_OK;
    x.best = w->order[0];
    x.second = w->order[1];
    x.now = worth_now(f, w);
    out->best = &w->alternatives.at[x.best];
    out->second = &w->alternatives.at[x.second];
    moving_open(&x.moving, f, w);
    for (size_t i = 0; i < x.moving.inputs.n; i++) {
        ohmen_status status = add_swing(&x, &x.moving.inputs.at[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    if (out->list.n > 1)
        qsort(out->list.at, out->list.n, sizeof *out->list.at, by_width);
    return OHMEN_OK;
}

/* --- by name --- */

const char *swing_name(struct figures *f, const struct weighing *w, const struct input_swing *s,
                       const struct alternative *of, enum swing_side side)
{
    return arena_printf(f->arena, "%s" MARK "%s].%s.%s", w->id, s->name, of->name,
                        swing_sides[side]);
}

bool swing_is_named(const char *name)
{
    const char *mark = strstr(name, MARK);
    return mark && mark == strchr(name, '.');
}

/* The one of that name among the ends of a swing. */
static bool is_among(struct figures *f, const struct weighing *w, const struct input_swing *s,
                     const char *name, struct nearest *near, struct swing_value *out)
{
    for (size_t i = 0; i < w->alternatives.n; i++)
        for (int side = SWING_AT_LOW; side <= SWING_AT_HIGH; side++) {
            const struct alternative *of = &w->alternatives.at[i];
            if (of->net == FIGURE_NONE)
                continue;
            const char *known = swing_name(f, w, s, of, (enum swing_side)side);
            nearest_offer(near, known);
            if (!text_equal(known, name))
                continue;
            *out = (struct swing_value){.name = known,
                                        .swing = *s,
                                        .side = (enum swing_side)side,
                                        .of = of,
                                        .worth = s->ends[side].worth[i]};
            return true;
        }
    return false;
}

ohmen_status swing_find(struct figures *f, const char *name, struct swing_value *out,
                        ohmen_error *e)
{
    struct weighing *w;
    struct nearest near;
    struct input_swings all;
    const char *decision = arena_strn(f->arena, name, (size_t)(strstr(name, MARK) - name));
    ohmen_status status = weigh_ranked(f, decision, &w, e);
    if (status == OHMEN_OK)
        status = swings_find(f, w, &all, e);
    if (status != OHMEN_OK)
        return status;
    nearest_init(&near, name);
    for (size_t i = 0; i < all.list.n; i++)
        if (is_among(f, w, &all.list.at[i], name, &near, out))
            return OHMEN_OK;
    return error_set(e, OHMEN_UNKNOWN, "the decision \"%s\" has no swing \"%s\"%s", w->id,
                     name + strlen(w->id) + 1, nearest_hint(f->arena, &near));
}
