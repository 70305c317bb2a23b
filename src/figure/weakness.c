/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Weak points of the protection of one hazard, by its rows and schemes. Owns nothing.
 *
 * All functions here fall when an element fails, so that one evaluation with a single failure
 * tells whether it is enough, and one with none whether a scheme can ever operate. */
#include "figure/weakness.h"

#include <string.h>

#include "figure/compile.h"

/* --- single points of failure --- */

static const struct hazard_exports *exports_of(const struct compiled *hazard)
{
    return hazard->exports;
}

/* A diagram in which everything is false, and what evaluating it needs. */
struct trial {
    const struct diagram *diagram;
    double *p, *q, *work;
};

static bool trial_true(struct trial *t)
{
    double result;
    diagram_evaluate(t->diagram, t->p, t->q, t->work, &result);
    return result > 0;
}

static bool trial_begin(struct trial *t, struct arena *a, const struct diagram *d, size_t n)
{
    if (!d)
        return false;
    *t = (struct trial){d, NEW_ARRAY(a, n + 1, double), NEW_ARRAY(a, n + 1, double),
                        NEW_ARRAY(a, d->n_nodes + 2, double)};
    for (size_t i = 0; i < n; i++)
        t->q[i] = 1;
    return true;
}

static bool trial_alone(struct trial *t, size_t variable)
{
    t->p[variable] = 1;
    t->q[variable] = 0;
    bool enough = trial_true(t);
    t->p[variable] = 0;
    t->q[variable] = 1;
    return enough;
}

/* One hazard in one operating state, which has this share of time. */
static void singles_in(struct figures *f, struct arena *a, const struct compiled *u, double share,
                       struct singles *out)
{
    struct wiring w;
    struct trial t;
    const struct diagram *d = hazard_uncleared(f, u, &w);
    if (!trial_begin(&t, a, d, w.events.n) || trial_true(&t))
        return;
    double frequency = share * figure_value(f, exports_of(u)->frequency);
    for (size_t i = 0; i < w.events.n; i++) {
        const struct event *e = &w.events.at[i];
        if ((e->kind != EVENT_ELEMENT && e->kind != EVENT_SHOCK) || !trial_alone(&t, i))
            continue;
        double p = figure_value(f, e->fails.fails);
        *array_push(a, out) = (struct single){*e, u->id, p, frequency * p};
    }
}

void singles_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                       struct singles *out)
{
    const struct hazard_exports *x = hazard->exports;
    for (size_t i = 0; i < x->n_states; i++)
        if (x->states[i].unit)
            singles_in(f, a, x->states[i].unit, x->states[i].share, out);
    if (x->n_states == 0)
        singles_in(f, a, hazard, 1, out);
}

static bool is_single_in(struct figures *f, const struct compiled *u, const char *element)
{
    struct wiring w;
    struct trial t;
    const struct diagram *d = hazard_uncleared(f, u, &w);
    if (!trial_begin(&t, f->arena, d, w.events.n) || trial_true(&t))
        return false;
    for (size_t i = 0; i < w.events.n; i++)
        if (w.events.at[i].kind == EVENT_ELEMENT && text_equal(w.events.at[i].id, element))
            return trial_alone(&t, i);
    return false;
}

bool is_single(struct figures *f, const struct compiled *hazard, const char *element)
{
    const struct hazard_exports *x = hazard->exports;
    bool found = x->n_states == 0 && is_single_in(f, hazard, element);
    for (size_t i = 0; i < x->n_states && !found; i++)
        found = x->states[i].unit && is_single_in(f, x->states[i].unit, element);
    return found;
}

/* --- breakers --- */

/* Could it operate if everything in it worked? */
static bool can_operate(const struct model *m, const char *id);

static bool structure_can(const struct model *m, const struct structure *s)
{
    uint32_t can = 0;
    if (s->op == STRUCTURE_NAME)
        return can_operate(m, s->name);
    if (s->op == STRUCTURE_ABSENT)
        return false;
    for (size_t i = 0; i < s->n; i++)
        can += structure_can(m, s->of[i]);
    return can >= s->k;
}

static bool can_operate(const struct model *m, const char *id)
{
    const struct scheme *s = model_get(m, KIND_SCHEME, id);
    return !s || structure_can(m, s->works);
}

static bool is_breaker(const struct model *m, const struct element *x)
{
    int kind = x ? element_kind(m, x) : -1;
    return kind >= 0 && text_equal(element_kinds[kind], "breaker");
}

struct gathering {
    struct arena *arena;
    const struct model *model;
    ARRAY(const char *) breakers;
    struct strmap seen; /* schemes and elements */
};

static void gather(struct gathering *g, const char *id);

static void gather_structure(struct gathering *g, const struct structure *s)
{
    if (s->op == STRUCTURE_NAME)
        gather(g, s->name);
    for (size_t i = 0; i < s->n; i++)
        gather_structure(g, s->of[i]);
}

static void gather(struct gathering *g, const char *id)
{
    const struct scheme *s = model_get(g->model, KIND_SCHEME, id);
    if (strmap_has(&g->seen, id))
        return;
    strmap_set(g->arena, &g->seen, id, NULL);
    if (s)
        gather_structure(g, s->works);
    else if (is_breaker(g->model, model_get(g->model, KIND_ELEMENT, id)))
        *array_push(g->arena, &g->breakers) = id;
}

/* Is the row backed up? *absent: a scheme that would, if it could operate. */
static bool is_backed(const struct model *m, const struct hazard *h, const char *row,
                      const char **absent)
{
    *absent = NULL;
    for (size_t i = 0; i < h->response.n; i++) {
        const struct response_row *r = ROW(struct response_row, h->response, i);
        if (!r->breaker_failure_of || !text_equal(r->breaker_failure_of, row))
            continue;
        if (can_operate(m, r->cleared_by))
            return true;
        *absent = r->cleared_by;
    }
    return false;
}

void unbacked_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                        struct unbackeds *out)
{
    const struct hazard *h = hazard->object->data;
    const struct model *m = f->base;
    for (size_t i = 0; i < h->response.n; i++) {
        const struct response_row *r = ROW(struct response_row, h->response, i);
        const char *row = h->response.keys[i], *absent;
        struct gathering g = {.arena = a, .model = m};
        if (!r->cleared_by || r->breaker_failure_of || !can_operate(m, r->cleared_by) ||
            is_backed(m, h, row, &absent))
            continue;
        gather(&g, r->cleared_by);
        for (size_t k = 0; k < g.breakers.n; k++)
            *array_push(a, out) = (struct unbacked){hazard->id, row, g.breakers.at[k], absent};
    }
}
