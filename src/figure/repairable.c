/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Schemes whose elements fail in sight of all and are repaired: how often such a failure makes the
 * scheme cease to work, and for how long (docs/methods.md, "Schemes under repair").
 *
 * Only shares of time in repair count here; on demand and undetected failures do not. One variable
 * for each detected failure, true while it is being repaired: of an element, or of several from a
 * common cause. */
#include "figure/clause.h"

#include <string.h>

/* A detected failure of the scheme. */
struct repaired {
    struct event event;
    const char *name; /* "VH-51A", "VH-51A.alone", "CC.A.B" */
    node_id rate;
};

struct repair_building {
    struct building *b;
    const struct model *model;
    struct wiring wiring;
    ARRAY(struct repaired) all;
    struct strmap seen;  /* name of an event -> index + 1, or NULL where nothing is repaired */
    struct strmap works; /* scheme -> struct clause */
    size_t fixed;        /* this one is not as it is but `sound`; SIZE_MAX: none */
    bool sound;
};

static struct arena *arena_of(const struct repair_building *r)
{
    return r->b->figures->arena;
}

/* --- what is repaired --- */

struct parts {
    node_id detected, in_repair;
};

static struct parts parts_of_element(const struct repair_building *r, const char *id)
{
    const struct compiled *alone = compiled_part(r->b, id, PART_ALONE);
    const struct element_exports *x = (alone ? alone : compiled_of(r->b, id))->exports;
    return (struct parts){x->detected, x->in_repair};
}

static struct parts parts_of_shock(const struct repair_building *r, const struct event *e)
{
    const struct group_exports *x = compiled_of(r->b, e->id)->exports;
    size_t i = 0;
    while (!text_equal(x->shocks[i].name, e->name))
        i++;
    return (struct parts){x->shocks[i].detected, x->shocks[i].in_repair};
}

static void note_event(struct repair_building *r, const struct event *e)
{
    struct figures *f = r->b->figures;
    if (strmap_has(&r->seen, e->name))
        return;
    struct parts p = e->kind == EVENT_SHOCK ? parts_of_shock(r, e) : parts_of_element(r, e->id);
    strmap_set(f->arena, &r->seen, e->name, NULL);
    if (p.in_repair == NODE_NONE)
        return;
    struct event repair = {e->kind,
                           e->id,
                           arena_printf(f->arena, "up.%s", e->name),
                           {.node = p.in_repair, .course = FIGURE_NONE}};
    repair.fails.fails = f->of_node.at[p.in_repair];
    *array_push(f->arena, &r->all) = (struct repaired){repair, e->name, p.detected};
    strmap_set(f->arena, &r->seen, e->name, (void *)(uintptr_t)r->all.n);
}

/* --- the scheme works --- */

static struct clause works(struct repair_building *r, const char *id);

static struct clause event_spared(struct repair_building *r, const struct event *e)
{
    note_event(r, e);
    size_t number = (size_t)(uintptr_t)strmap_get(&r->seen, e->name);
    if (number == 0)
        return clause_of(true);
    if (number - 1 == r->fixed)
        return clause_of(r->sound);
    return clause_spared(&r->wiring, &r->all.at[number - 1].event);
}

static struct clause element_works(struct repair_building *r, const char *id)
{
    struct events events = {0};
    struct clause c = clause_of(true);
    wiring_events(&r->wiring, id, &events);
    for (size_t i = 0; i < events.n; i++)
        c = clause_and(&r->wiring, c, event_spared(r, &events.at[i]));
    return c;
}

static struct clause structure_works(struct repair_building *r, const struct structure *s)
{
    if (s->op == STRUCTURE_NAME)
        return works(r, s->name);
    if (s->op == STRUCTURE_ABSENT)
        return clause_of(false);
    struct clause *parts = NEW_ARRAY(arena_of(r), s->n, struct clause);
    for (size_t i = 0; i < s->n; i++)
        parts[i] = structure_works(r, s->of[i]);
    return clause_at_least(&r->wiring, s->k, s->n, parts);
}

static struct clause works(struct repair_building *r, const char *id)
{
    const struct object *o = model_find(r->model, id);
    if (o->kind == KIND_ELEMENT)
        return element_works(r, id);
    struct clause *known = strmap_get(&r->works, id);
    if (known)
        return *known;
    struct clause *made = NEW(arena_of(r), struct clause);
    *made = structure_works(r, ((const struct scheme *)o->data)->works);
    strmap_set(arena_of(r), &r->works, id, made);
    return *made;
}

static struct clause works_with(struct repair_building *r, const char *id, size_t fixed, bool sound)
{
    r->works = (struct strmap){0};
    r->fixed = fixed;
    r->sound = sound;
    return works(r, id);
}

/* --- figures --- */

/* The scheme works with the element sound and fails with it failed: Birnbaum's importance is the
 * probability of that, which a difference of two probabilities would give with fewer digits. */
static struct clause critical(struct repair_building *r, const char *id, size_t i)
{
    struct clause sound = works_with(r, id, i, true), failed = works_with(r, id, i, false);
    return clause_and(&r->wiring, sound, clause_not(&r->wiring, failed));
}

static node_id probability(const struct clause_roots *roots, bfun f, size_t root)
{
    if (f == BFUN_TRUE || f == BFUN_FALSE)
        return compile_const(roots->b, f == BFUN_TRUE, dim_number, NULL);
    return clause_mean(roots, root);
}

static node_id add_frequency(struct repair_building *r, const struct clause_roots *roots)
{
    struct graph *g = r->b->figures->graph;
    node_id *parts = NEW_ARRAY(arena_of(r), r->all.n + 1, node_id);
    for (size_t i = 0; i < r->all.n; i++) {
        bfun f = roots->functions.at[i + 1];
        parts[i] = r->all.at[i].rate;
        if (f != BFUN_TRUE)
            parts[i] = graph_op2(g, OP_MULTIPLY, parts[i], probability(roots, f, i + 1));
        compiled_add(r->b, PROPERTY_FAILURE_FREQUENCY, r->all.at[i].name, NULL, parts[i], NULL,
                     NULL);
    }
    return r->all.n == 1 ? parts[0] : graph_op(g, OP_SUM, r->all.n, parts);
}

static void add_figures(struct repair_building *r, const struct clause_roots *roots)
{
    struct graph *g = r->b->figures->graph;
    node_id frequency = add_frequency(r, roots);
    compiled_add(r->b, PROPERTY_FAILURE_FREQUENCY, NULL, NULL, frequency, NULL, NULL);
    node_id out = probability(roots, roots->functions.at[0], 0);
    compiled_add(r->b, PROPERTY_UNAVAILABILITY, NULL, NULL, out, NULL, NULL);
    r->b->unit->main = compiled_add(r->b, PROPERTY_AVAILABILITY, NULL, NULL,
                                    graph_op1(g, OP_COMPLEMENT, out), NULL, NULL);
    compiled_add(r->b, PROPERTY_OUTAGE_TIME, NULL, NULL, graph_op2(g, OP_RATIO, out, frequency),
                 NULL, NULL);
}

/* Root 0: the scheme does not work; i + 1: failure i is critical. */
static bool compile_roots(struct repair_building *r, const char *id, struct clause_roots *roots)
{
    struct clause up = works_with(r, id, SIZE_MAX, true);
    clause_root(roots, clause_not(&r->wiring, up),
                arena_printf(arena_of(r), "repairs keep %s from working", id));
    for (size_t i = 0; i < r->all.n; i++)
        clause_root(roots, critical(r, id, i),
                    arena_printf(arena_of(r), "%s works or not as %s does", id, r->all.at[i].name));
    return clause_diagram(roots);
}

static ohmen_status nothing_repaired(struct building *b, ohmen_error *e)
{
    compiled_give_up(b);
    return error_set(e, OHMEN_UNKNOWN,
                     "no element of the scheme \"%s\" has detected failures and a time to repair "
                     "them: nothing tells how available it is",
                     b->unit->id);
}

static ohmen_status too_intertwined(struct building *b, ohmen_error *e)
{
    compiled_give_up(b);
    return error_set(e, OHMEN_COMPUTE,
                     "the scheme \"%s\" is too intertwined: it needs more than %u diagram nodes",
                     b->unit->id, DIAGRAM_NODES);
}

static ohmen_status compile_unit(struct figures *f, const struct variant *v, const struct object *o,
                                 ohmen_error *e)
{
    struct building b;
    struct repair_building r = {.b = &b, .model = v->model};
    compiled_begin_part(f, v, o, o->id, PART_REPAIRABLE, &b);
    wiring_init(&r.wiring, f, v, NULL);
    struct clause_roots roots = {.b = &b, .wiring = &r.wiring};
    bool fine = compile_roots(&r, o->id, &roots);
    if (!fine)
        return too_intertwined(&b, e);
    if (r.all.n == 0)
        return nothing_repaired(&b, e);
    add_figures(&r, &roots);
    compiled_end(&b);
    return OHMEN_OK;
}

ohmen_status compile_repairable(struct figures *f, const struct variant *v, const struct object *o,
                                ohmen_error *e)
{
    const struct variant *projected;
    ohmen_status status = variant_project(f, v, o->id, &projected, e);
    struct building under = {.figures = f, .variant = projected};
    if (status != OHMEN_OK || compiled_part(&under, o->id, PART_REPAIRABLE))
        return status;
    o = model_find(projected->model, o->id);
    status = compile_references(f, projected, o, e);
    return status == OHMEN_OK ? compile_unit(f, projected, o, e) : status;
}
