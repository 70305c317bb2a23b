/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Schemes as Boolean functions of their elements.
 *
 * A variable is true when its element *fails*: so the small probability is the one that
 * is given, and its complement is the one that is rounded. Variables are numbered depth
 * first along the chain of each scheme, which keeps diagrams small. */
#include "figure/compile.h"

/* Schemes may stand in schemes this deep. */
#define SCHEME_DEPTH 200

void wiring_init(struct wiring *w, struct figures *f, const struct variant *v,
                 const struct rows *disables)
{
    struct arena *scratch = arena_child(f->arena);
    *w = (struct wiring){.under = {.figures = f, .variant = v},
                         .scratch = scratch,
                         .builder = diagram_builder_new(scratch),
                         .disables = disables};
}

void wiring_end(struct wiring *w)
{
    arena_free(w->scratch);
}

static struct arena *arena_of(const struct wiring *w)
{
    return w->under.figures->arena;
}

static const struct model *model_of(const struct wiring *w)
{
    return w->under.variant->model;
}

uint32_t wiring_variable(struct wiring *w, const struct event *event)
{
    uintptr_t known = (uintptr_t)strmap_get(&w->index, event->name);
    if (known)
        return (uint32_t)known - 1;
    *array_push(arena_of(w), &w->events) = *event;
    strmap_set(w->scratch, &w->index, event->name, (void *)(uintptr_t)w->events.n);
    return (uint32_t)w->events.n - 1;
}

/* --- what fails when an element fails --- */

/* An element by itself: beside its common causes, where it has some. */
static struct event element_event(struct wiring *w, const char *id)
{
    const struct compiled *alone = compiled_part(&w->under, id, PART_ALONE);
    const struct compiled *u = alone ? alone : compiled_of(&w->under, id);
    const struct element_exports *x = u->exports;
    const char *name = alone ? arena_printf(arena_of(w), "%s.alone", id) : u->id;
    return (struct event){EVENT_ELEMENT, u->id, name, x->whole};
}

static struct event sees_event(struct wiring *w, const char *row)
{
    return (struct event){EVENT_SEES, row, arena_printf(arena_of(w), "sees.%s", row), {0}};
}

static bool is_disabled(const struct rows *disables, const char *element)
{
    for (size_t i = 0; disables && i < disables->n; i++)
        if (text_equal(disables->keys[i], element))
            return true;
    return false;
}

static struct event disabled_event(struct wiring *w, const char *id)
{
    return (struct event){EVENT_DISABLED, id, arena_printf(arena_of(w), "spared.%s", id), {0}};
}

static bool is_hit(const struct shock *s, const char *element)
{
    for (size_t i = 0; i < s->n; i++)
        if (text_equal(s->members[i], element))
            return true;
    return false;
}

void wiring_events(struct wiring *w, const char *id, struct events *out)
{
    struct groups groups = {0};
    *array_push(w->scratch, out) = element_event(w, id);
    groups_of(w->under.figures, model_of(w), id, &groups);
    for (size_t i = 0; i < groups.n; i++) {
        const struct group_exports *x = compiled_of(&w->under, groups.at[i]->id)->exports;
        for (size_t k = 0; k < x->n; k++)
            if (is_hit(&x->shocks[k], id))
                *array_push(w->scratch, out) = (struct event){
                    EVENT_SHOCK, groups.at[i]->id, x->shocks[k].name, x->shocks[k].fails};
    }
    if (is_disabled(w->disables, id))
        *array_push(w->scratch, out) = disabled_event(w, id);
}

static bfun element_works(struct wiring *w, const char *id)
{
    struct events events = {0};
    bfun fails = BFUN_FALSE;
    wiring_events(w, id, &events);
    for (size_t i = 0; i < events.n; i++)
        fails = diagram_or(w->builder, fails,
                           diagram_variable(w->builder, wiring_variable(w, &events.at[i])));
    return diagram_not(w->builder, fails);
}

/* --- order of variables --- */

static void order_structure(struct wiring *w, const struct structure *s)
{
    if (s->op == STRUCTURE_NAME)
        wiring_order(w, s->name);
    for (size_t i = 0; i < s->n; i++)
        order_structure(w, s->of[i]);
}

static void order_element(struct wiring *w, const char *id)
{
    struct events events = {0};
    wiring_events(w, id, &events);
    for (size_t i = 0; i < events.n; i++)
        wiring_variable(w, &events.at[i]);
}

void wiring_order(struct wiring *w, const char *id)
{
    const struct object *o = model_find(model_of(w), id);
    if (o->kind == KIND_ELEMENT) {
        order_element(w, id);
        return;
    }
    if (strmap_has(&w->works, id))
        return;
    strmap_set(w->scratch, &w->works, id, NULL); /* seen; its function comes later */
    if (w->depth >= SCHEME_DEPTH) {
        w->too_deep = true;
        return;
    }
    w->depth++;
    order_structure(w, ((const struct scheme *)o->data)->works);
    w->depth--;
}

/* --- functions --- */

static bfun function_of(struct wiring *w, const char *id, bool trips);

static bfun structure_function(struct wiring *w, const struct structure *s, bool trips)
{
    switch (s->op) {
    case STRUCTURE_NAME: return function_of(w, s->name, trips);
    case STRUCTURE_ABSENT: return BFUN_FALSE;
    case STRUCTURE_AT_LEAST: break;
    }
    bfun *parts = NEW_ARRAY(w->scratch, s->n, bfun);
    for (size_t i = 0; i < s->n; i++)
        parts[i] = structure_function(w, s->of[i], trips);
    return diagram_at_least(w->builder, s->k, s->n, parts);
}

static bfun function_of(struct wiring *w, const char *id, bool trips)
{
    const struct object *o = model_find(model_of(w), id);
    struct strmap *known = trips ? &w->trips : &w->works;
    if (o->kind == KIND_ELEMENT)
        return trips && element_is_tripped(model_of(w), o->data) ? BFUN_TRUE : element_works(w, id);
    uintptr_t found = (uintptr_t)strmap_get(known, id);
    if (found)
        return (bfun)(found - 1);
    bfun f = structure_function(w, ((const struct scheme *)o->data)->works, trips);
    if (f != DIAGRAM_FULL)
        strmap_set(w->scratch, known, id, (void *)((uintptr_t)f + 1));
    return f;
}

bfun wiring_works(struct wiring *w, const char *id)
{
    return function_of(w, id, false);
}

bfun wiring_trips(struct wiring *w, const char *id)
{
    return function_of(w, id, true);
}

bfun wiring_sees(struct wiring *w, const char *row)
{
    struct event event = sees_event(w, row);
    return diagram_variable(w->builder, wiring_variable(w, &event));
}

/* --- arguments --- */

node_id *wiring_arguments(struct building *b, struct wiring *w)
{
    node_id *args = NEW_ARRAY(arena_of(w), w->events.n, node_id);
    for (size_t i = 0; i < w->events.n; i++) {
        struct event *e = &w->events.at[i];
        bool sees = e->kind == EVENT_SEES;
        if (sees || e->kind == EVENT_DISABLED) {
            figure_id id = compiled_figure(b->figures, b->unit, PROPERTY_SHARE, e->id,
                                           sees ? "sees" : "disabled");
            e->fails = (struct behaviour){
                .node = figure_at(b->figures, id)->node, .fails = id, .course = FIGURE_NONE};
        }
        args[i] = e->fails.node;
    }
    return args;
}

const struct behaviour *const *wiring_behaviours(struct arena *a, const struct wiring *w)
{
    const struct behaviour **all = NEW_ARRAY(a, w->events.n, const struct behaviour *);
    for (size_t i = 0; i < w->events.n; i++)
        all[i] = &w->events.at[i].fails;
    return all;
}

/* --- text --- */

/* An element as the events of which none may happen: "(VH-51A.alone and CC.VH-51A.VH-51B)". */
static void element_text(struct text *t, const struct wording *w, const char *id, bool bare)
{
    struct wiring events_only = {.under = {.figures = w->figures, .variant = w->variant},
                                 .scratch = w->figures->arena,
                                 .disables = w->hazard ? &w->hazard->disables : NULL};
    struct events events = {0};
    wiring_events(&events_only, id, &events);
    text_add(t, events.n > 1 && !bare ? "(" : "");
    for (size_t i = 0; i < events.n; i++)
        text_printf(t, "%s%s", i ? " and " : "", events.at[i].name);
    text_add(t, events.n > 1 && !bare ? ")" : "");
}

static void structure_text(struct text *t, const struct wording *w, const struct structure *s,
                           bool bare);

static void join_parts(struct text *t, const struct wording *w, const struct structure *s,
                       const char *between)
{
    for (size_t i = 0; i < s->n; i++) {
        text_add(t, i ? between : "");
        structure_text(t, w, s->of[i], false);
    }
}

/* A composite stands in parentheses, unless it is bare; one part is itself. */
static void structure_text(struct text *t, const struct wording *w, const struct structure *s,
                           bool bare)
{
    if (s->op == STRUCTURE_NAME) {
        wiring_text(t, w, s->name, bare);
    } else if (s->op == STRUCTURE_ABSENT) {
        text_add(t, "absent");
    } else if (s->n == 1) {
        structure_text(t, w, s->of[0], bare);
    } else if (s->k == s->n || s->k == 1) {
        text_add(t, bare ? "" : "(");
        join_parts(t, w, s, s->k == 1 ? " or " : " and ");
        text_add(t, bare ? "" : ")");
    } else {
        text_printf(t, "at-least(%u; ", s->k);
        join_parts(t, w, s, "; ");
        text_byte(t, ')');
    }
}

void wiring_text(struct text *t, const struct wording *w, const char *id, bool bare)
{
    const struct object *o = model_find(w->variant->model, id);
    if (o->kind != KIND_ELEMENT)
        structure_text(t, w, ((const struct scheme *)o->data)->works, bare);
    else if (w->trips && element_is_tripped(w->variant->model, o->data))
        text_add(t, "certain");
    else
        element_text(t, w, id, bare);
}
