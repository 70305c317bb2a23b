/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Growing a tree: what a path has done so far, and how time passes on it. */
#include "decide/branching_standing.h"

#include <math.h>

#include "figure/service.h"

#define SAME_BELIEF 1e9 /* parts into which beliefs are told apart */

size_t standing_hidden(const struct growing *g)
{
    return g->b->worlds.hidden.n;
}

const char *standing_join(struct growing *g, const char *path, const char *label)
{
    return *path ? arena_printf(g->f->arena, "%s/%s", path, label) : label;
}

ohmen_status standing_fail(struct growing *g, const char *path, ohmen_error *e, const char *why)
{
    return error_set(e, OHMEN_COMPUTE, "\"%s\", at \"%s\": %s", g->b->weighing->id,
                     *path ? path : "choose", why);
}

/* --- paths --- */

struct applied *standing_applied(const struct path *p, const char *option)
{
    for (size_t i = 0; i < p->applied.n; i++)
        if (text_equal(p->applied.at[i].option, option))
            return &p->applied.at[i];
    return NULL;
}

/* Copies are made before anything is changed: paths are shared. */
void standing_apply(struct growing *g, struct path *p, const char *option, double later)
{
    struct path copy = {0};
    bool there = false;
    for (size_t i = 0; i < p->applied.n; i++) {
        struct applied x = p->applied.at[i];
        if (!there && text_compare(option, x.option) <= 0) {
            *array_push(g->f->arena, &copy.applied) = (struct applied){option, later};
            there = true;
        }
        if (!text_equal(x.option, option))
            *array_push(g->f->arena, &copy.applied) = x;
    }
    if (!there)
        *array_push(g->f->arena, &copy.applied) = (struct applied){option, later};
    p->applied.at = copy.applied.at;
    p->applied.n = copy.applied.n;
    p->applied.cap = copy.applied.cap;
}

void standing_change(struct growing *g, struct path *p, const char *name, const struct node *change,
                     double from)
{
    struct path copy = {0};
    for (size_t i = 0; i < p->changed.n; i++)
        *array_push(g->f->arena, &copy.changed) = p->changed.at[i];
    *array_push(g->f->arena, &copy.changed) = (struct changed){name, change, from};
    p->changed.at = copy.changed.at;
    p->changed.n = copy.changed.n;
    p->changed.cap = copy.changed.cap;
}

bool standing_has_name(const struct names *all, const char *name)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i], name))
            return true;
    return false;
}

bool standing_sets_states(const struct growing *g, const char *option)
{
    const struct hidden *h = &g->b->worlds.hidden;
    for (size_t i = 0; i < h->n_states; i++)
        if (state_renewed(h->states[i]->data, option))
            return true;
    return false;
}

/* Does it depend on the option having been applied what else may be, or what that brings? */
static bool binds_others(const struct growing *g, const char *option)
{
    const struct objects *all = &g->f->base->of[KIND_OPTION];
    const struct option *o = model_get(g->f->base, KIND_OPTION, option);
    if (o->excludes.n || o->combine.n)
        return true;
    for (size_t i = 0; i < all->n; i++) {
        const struct option *q = all->at[i]->data;
        if (standing_has_name(&q->excludes, option) || standing_has_name(&q->requires, option))
            return true;
        for (size_t k = 0; k < q->combine.n; k++)
            if (text_equal(q->combine.keys[k], option))
                return true;
    }
    return false;
}

/* Does what comes depend on the option having been applied? One that only sets states leaves no
 * trace beside these; one that does not can be applied once. */
bool standing_leaves_trace(struct growing *g, const struct standing *s, const struct applied *x)
{
    const struct option *o = model_get(g->f->base, KIND_OPTION, x->option);
    return o->change->n > 0 || o->running || o->residual || binds_others(g, x->option) ||
           (g->b->repeats && !standing_sets_states(g, x->option)) ||
           timeline_is_dated(g->f, &s->done, x, s->time);
}

/* What of the path matters from now on, as text. */
static void write_path(struct growing *g, struct text *t, const struct standing *s)
{
    for (size_t i = 0; i < s->done.applied.n; i++) {
        const struct applied *x = &s->done.applied.at[i];
        if (!standing_leaves_trace(g, s, x))
            continue;
        text_printf(t, "+%s", x->option);
        if (timeline_is_dated(g->f, &s->done, x, s->time))
            text_printf(t, ":%.17g", x->later);
    }
    for (size_t i = 0; i < s->done.changed.n; i++)
        text_printf(t, "[%s]", s->done.changed.at[i].name);
}

/* What is possible, with its probability: to SAME_BELIEF. */
void standing_write_belief(const struct growing *g, struct text *t, const double *belief)
{
    for (size_t k = 0; k < standing_hidden(g); k++) {
        unsigned long parts = (unsigned long)round(belief[k] * SAME_BELIEF);
        if (parts)
            text_printf(t, ";%zu:%lu", k, parts);
    }
}

const char *standing_key(struct growing *g, const void *place, const struct standing *s)
{
    struct text t;
    text_init(&t, g->f->arena);
    text_printf(&t, "%p at %a", place, s->time);
    write_path(g, &t, s);
    standing_write_belief(g, &t, s->belief);
    return text_str(&t);
}

/* --- time --- */

struct move *standing_move(struct growing *g, struct way *b, enum move_kind kind, double at)
{
    struct move *m = array_push(g->f->arena, &b->moves);
    *m = (struct move){.kind = kind, .at = at, .to = at};
    return m;
}

/* The option sets states: what is believed moves there. */
void standing_reset(struct growing *g, struct way *b, struct standing *s, const char *option)
{
    const struct hidden *h = &g->b->worlds.hidden;
    size_t *map = NEW_ARRAY(g->f->arena, h->n, size_t);
    double *after = NEW_ARRAY(g->f->arena, h->n, double);
    bool resets = false;
    for (size_t k = 0; k < h->n; k++) {
        map[k] = k;
        for (size_t i = 0; i < h->n_states; i++) {
            const char *to = state_renewed(h->states[i]->data, option);
            const struct rows *values = state_values(h->states[i]->data);
            for (size_t v = 0; to && v < values->n; v++)
                if (text_equal(values->keys[v], to))
                    map[k] = hidden_with(h, map[k], i, v);
            resets = resets || to;
        }
        after[map[k]] += s->belief[k];
    }
    if (!resets)
        return;
    struct move *m = standing_move(g, b, MOVE_RESET, s->time);
    m->map = map;
    m->what = option;
    s->belief = after;
}

/* Options that begin, or are renewed, behind `from` and until `to`. */
static void reset_between(struct growing *g, struct way *b, struct standing *s, double from,
                          double to)
{
    for (size_t i = 0; i < s->done.applied.n; i++) {
        const struct applied *x = &s->done.applied.at[i];
        struct life life = life_later(g->f, x->option, x->later);
        for (size_t k = 0; k <= life_renewals(&life); k++)
            if (life_renewal(&life, k) > from && life_renewal(&life, k) <= to)
                standing_reset(g, b, s, x->option);
    }
}

/* The next instant behind `from` at which an option begins or is renewed, or `to`. */
static double next_reset(struct growing *g, const struct standing *s, double from, double to)
{
    for (size_t i = 0; i < s->done.applied.n; i++) {
        const struct applied *x = &s->done.applied.at[i];
        struct life life = life_later(g->f, x->option, x->later);
        for (size_t k = 0; k <= life_renewals(&life); k++) {
            double at = life_renewal(&life, k);
            if (at > from && at < to)
                to = at;
        }
    }
    return to;
}

static ohmen_status move_beliefs(struct growing *g, struct world *w, struct standing *s,
                                 double years, ohmen_error *e)
{
    const struct passage *p;
    size_t n = standing_hidden(g);
    if (w->flows.n == 0)
        return OHMEN_OK;
    ohmen_status status = world_passage(&g->b->worlds, w, years, &p, e);
    double *after = NEW_ARRAY(g->f->arena, n, double);
    for (size_t i = 0; status == OHMEN_OK && i < n; i++)
        for (size_t k = 0; k < n; k++)
            after[k] += s->belief[i] * p->p[i * n + k];
    s->belief = after;
    return status;
}

/* The number of a stretch of time in a world. */
static size_t span_of_move(struct growing *g, const struct move *m)
{
    const char *key = arena_printf(g->f->arena, "%p %a %a", (const void *)m->world, m->at, m->to);
    void *known = strmap_get(&g->spans, key);
    if (known)
        return (size_t)known - 1;
    strmap_set(g->f->arena, &g->spans, key, (void *)++g->b->n_spans);
    return g->b->n_spans - 1;
}

/* One stretch with the same variant and without resets inside; by whole years where states change,
 * so that each year has its own damage. */
static ohmen_status pass_stretch(struct growing *g, struct way *b, struct standing *s,
                                 const struct variant *v, double to, ohmen_error *e)
{
    struct world *w;
    ohmen_status status = world_of(&g->b->worlds, v, &w, e);
    while (status == OHMEN_OK && s->time < to) {
        double end = w->flows.n ? fmin(floor(s->time + SAME_TIME) + 1, to) : to;
        end = to - end < SAME_TIME ? to : end;
        struct move *m = standing_move(g, b, MOVE_TIME, s->time);
        m->to = end;
        m->world = w;
        m->span = span_of_move(g, m);
        status = move_beliefs(g, w, s, end - s->time, e);
        s->time = end;
    }
    return status;
}

static ohmen_status stretches_of(struct growing *g, const struct standing *s,
                                 const struct stretches **out, ohmen_error *e)
{
    struct text t;
    text_init(&t, g->f->arena);
    for (size_t i = 0; i < s->done.applied.n; i++)
        text_printf(&t, "+%s:%.17g", s->done.applied.at[i].option, s->done.applied.at[i].later);
    for (size_t i = 0; i < s->done.changed.n; i++)
        text_printf(&t, "[%s]%.17g", s->done.changed.at[i].name, s->done.changed.at[i].from);
    struct stretches *known = strmap_get(&g->stretches, text_str(&t));
    ohmen_status status = OHMEN_OK;
    if (!known) {
        known = NEW(g->f->arena, struct stretches);
        status = timeline_cut_path(g->f, &s->done, g->horizon, known, e);
        strmap_set(g->f->arena, &g->stretches, text_str(&t), known);
    }
    *out = known;
    return status;
}

/* Lets time pass. */
ohmen_status standing_pass(struct growing *g, struct way *b, struct standing *s, double to,
                           ohmen_error *e)
{
    const struct stretches *cut;
    to = fmin(to, g->horizon);
    ohmen_status status = stretches_of(g, s, &cut, e);
    for (size_t i = 0; status == OHMEN_OK && i < cut->n; i++) {
        double end = fmin(cut->at[i].to, to);
        while (status == OHMEN_OK && s->time < end && s->time >= cut->at[i].from) {
            double from = s->time, until = next_reset(g, s, from, end);
            status = pass_stretch(g, b, s, cut->at[i].variant, until, e);
            if (status == OHMEN_OK)
                reset_between(g, b, s, from, until);
        }
    }
    return status;
}
