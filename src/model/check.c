/* SPDX-License-Identifier: GPL-3.0-or-later */
/* References and cycles, and the order in which an object's checks run. */
#include "model/check.h"

struct place check_place(const struct object *o, const struct node *node)
{
    return node ? node->place : o->node->place;
}

/* --- references --- */

struct offering {
    const struct model *model;
    struct nearest *near;
    unsigned kinds;
};

static void offer_objects(const struct offering *f)
{
    for (const struct model *m = f->model; m; m = m->below)
        for (size_t i = 0; i < m->by_id.n; i++) {
            const struct object *o = m->by_id.at[i].value;
            if (o && (f->kinds & KIND_BIT(o->kind)))
                nearest_offer(f->near, o->id);
        }
}

/* In a document, or in an object that the register holds already. */
static struct place place_of(struct checking *c, const struct object *o, const struct reference *r)
{
    struct place at = r->place;
    if (at.line == 0)
        at.path = arena_printf(c->arena, "%s/%s/%s", kinds[o->kind].section, o->id, r->path);
    return at;
}

static void unknown_reference(struct checking *c, const struct object *o, const struct reference *r)
{
    struct nearest near;
    nearest_init(&near, r->id);
    offer_objects(&(struct offering){c->model, &near, r->kinds});
    const char *hint = nearest_hint(c->arena, &near);
    diag_add(c->diags, place_of(c, o, r), "there is no \"%s\"; expected %s%s", r->id,
             kinds_words(c->arena, r->kinds), hint);
}

/* Is it there, but so wrong that it could not be bound? That was told already. */
static bool is_unbound(const struct model *m, const char *id)
{
    return !m->below && strmap_has(&m->by_id, id) && !strmap_get(&m->by_id, id);
}

void check_references(struct checking *c, const struct object *o)
{
    for (size_t i = 0; i < o->refs.n; i++) {
        const struct reference *r = &o->refs.at[i];
        const struct object *to = model_find(c->model, r->id);
        if (!to && is_unbound(c->model, r->id))
            continue;
        if (!to)
            unknown_reference(c, o, r);
        else if (!(r->kinds & KIND_BIT(to->kind)))
            diag_add(c->diags, place_of(c, o, r), "\"%s\" is %s; expected %s", r->id,
                     kinds_words(c->arena, KIND_BIT(to->kind)), kinds_words(c->arena, r->kinds));
    }
}

/* --- cycles --- */

/* Kinds whose references must not lead back to where they began. */
static bool is_ordered(enum kind k)
{
    return k == KIND_VALUE || k == KIND_RATE || k == KIND_TYPE || k == KIND_ELEMENT ||
           k == KIND_SCHEME || k == KIND_HAZARD || k == KIND_SITE;
}

/* An object, or only the frequency of a hazard: a relay may be revealed by a hazard that it
 * clears, since how often that hazard comes does not depend on the relay. */
struct part {
    const struct object *object;
    bool frequency;
    size_t next; /* reference */
};

struct cycle_walk {
    struct checking *c;
    struct strmap state; /* id, or "id frequency" -> open or done */
    ARRAY(struct part) trail;
};

static char open_mark, done_mark;

static const char *part_key(struct cycle_walk *w, const struct object *o, bool frequency)
{
    return frequency ? arena_printf(w->c->arena, "%s frequency", o->id) : o->id;
}

static void report_cycle(struct cycle_walk *w, const struct reference *r)
{
    struct text t;
    size_t from = 0;
    text_init(&t, w->c->arena);
    while (!text_equal(w->trail.at[from].object->id, r->id))
        from++;
    for (size_t i = from; i < w->trail.n; i++)
        text_printf(&t, "%s -> ", w->trail.at[i].object->id);
    text_add(&t, r->id);
    diag_add(w->c->diags, r->place, "\"%s\" is defined by itself: %s", r->id, text_str(&t));
}

static void enter(struct cycle_walk *w, const struct object *o, bool frequency)
{
    strmap_set(w->c->arena, &w->state, part_key(w, o, frequency), &open_mark);
    *array_push(w->c->arena, &w->trail) = (struct part){o, frequency, 0};
}

static bool is_followed(const struct part *p, const struct reference *r, const struct object *to)
{
    if (!to || !is_ordered(to->kind) || r->trace)
        return to && to->kind == KIND_SITE && p->object->kind == KIND_SITE;
    return !p->frequency || text_equal(r->path, "frequency");
}

/* One step of the search that keeps its own stack: structures of any length are safe. */
static void step(struct cycle_walk *w)
{
    struct part *p = array_last(&w->trail);
    if (p->next == p->object->refs.n) {
        strmap_set(w->c->arena, &w->state, part_key(w, p->object, p->frequency), &done_mark);
        w->trail.n--;
        return;
    }
    const struct reference *r = &p->object->refs.at[p->next++];
    const struct object *to = model_find(w->c->model, r->id);
    if (!is_followed(p, r, to))
        return;
    bool frequency = r->frequency && to->kind == KIND_HAZARD;
    const void *state = strmap_get(&w->state, part_key(w, to, frequency));
    if (state == &open_mark)
        report_cycle(w, r);
    else if (!state)
        enter(w, to, frequency);
}

void check_cycles(struct checking *c)
{
    struct cycle_walk w = {.c = c};
    for (size_t i = 0; i < c->model->by_id.n; i++) {
        const struct object *o = c->model->by_id.at[i].value;
        if (!o || !is_ordered(o->kind) || strmap_has(&w.state, o->id))
            continue;
        enter(&w, o, false);
        while (w.trail.n)
            step(&w);
    }
}

/* --- all of one object --- */

void check_object(struct checking *c, const struct object *o)
{
    check_references(c, o);
    check_quantities(c, o);
    switch (o->kind) {
    case KIND_REGISTER: check_settings(c, o); break;
    case KIND_RATE: check_rate(c, o); break;
    case KIND_ELEMENT:
    case KIND_TYPE: check_element(c, o); break;
    case KIND_COMMON_CAUSE: check_common_cause(c, o); break;
    case KIND_HAZARD: check_hazard(c, o); break;
    case KIND_OPTION: check_option(c, o); break;
    case KIND_STATE: check_state(c, o); break;
    case KIND_DECISION: check_decision(c, o); break;
    default: break;
    }
}
