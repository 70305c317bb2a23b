/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Loading: from nodes of all objects to a checked model.
 *
 * Owns nothing beyond the arena. Invariant: a model that model_load returns has
 * passed every check, alone, under each of its options and in each operating state, so
 * that nothing later needs to expect a wrong one. */
#include "model/model.h"

#include <stdlib.h>

#include "model/bind.h"
#include "model/check.h"
#include "model/supplied.h"
#include "model/variant.h"

struct model *model_new(struct arena *a)
{
    struct model *m = NEW(a, struct model);
    m->arena = a;
    return m;
}

const struct object *model_find(const struct model *m, const char *id)
{
    for (; m; m = m->below)
        if (strmap_has(&m->by_id, id))
            return strmap_get(&m->by_id, id);
    return NULL;
}

const void *model_get(const struct model *m, enum kind kind, const char *id)
{
    const struct object *o = model_find(m, id);
    return o && o->kind == kind ? o->data : NULL;
}

static bool is_scalar(const struct node *n)
{
    return n && n->type == NODE_SCALAR;
}

struct units model_units(struct arena *a, const struct node *settings)
{
    struct units u = {.currency = "EUR"};
    const struct node *currency = node_get(settings, "currency");
    const struct node *counts = node_get(settings, "counts");
    (void)a;
    if (is_scalar(currency))
        u.currency = currency->text;
    for (size_t i = 0; counts && counts->type == NODE_LIST && i < counts->n; i++)
        if (is_scalar(counts->items[i]) && u.n_counts < UNIT_COUNTS)
            u.counts[u.n_counts++] = counts->items[i]->text;
    return u;
}

/* --- binding --- */

/* Order of binding and of everything that is listed: kind, then id. */
static int by_kind_and_id(const void *p, const void *q)
{
    const struct model_source *a = p, *b = q;
    if (a->kind != b->kind)
        return a->kind < b->kind ? -1 : 1;
    return text_compare(a->id, b->id);
}

struct object *model_bind(struct binding *b, enum kind kind, const char *id,
                          const struct node *node)
{
    struct node *canonical;
    void *data;
    if (!bind_object(b, kinds[kind].table, node, &canonical, &data))
        return NULL;
    struct object *o = NEW(b->arena, struct object);
    *o = (struct object){.kind = kind, .id = id, .data = data, .node = canonical};
    kind_references(b->arena, kind, canonical, data, &o->refs);
    return o;
}

static const struct node *settings_node(const struct model_source *sources, size_t n)
{
    for (size_t i = 0; i < n; i++)
        if (sources[i].kind == KIND_REGISTER)
            return sources[i].node;
    return NULL;
}

static bool check_counts(const struct node *settings, struct diags *d)
{
    const struct node *counts = node_get(settings, "counts");
    if (!counts || counts->n <= UNIT_COUNTS)
        return true;
    diag_add(d, counts->place, "a register may declare %d countable things, found %zu", UNIT_COUNTS,
             counts->n);
    return false;
}

/* The settings themselves are bound with the standard units only: there the counts are
 * still plain names. */
static struct object *bind_source(struct model *m, const struct model_source *s, struct diags *d)
{
    struct units standard = {.currency = m->units.currency};
    struct binding b = {
        .arena = m->arena, .units = s->kind == KIND_REGISTER ? &standard : &m->units, .diags = d};
    return model_bind(&b, s->kind, s->id, s->node);
}

static void add_object(struct model *m, struct object *o)
{
    strmap_set(m->arena, &m->by_id, o->id, o);
    *array_push(m->arena, &m->of[o->kind]) = o;
    if (o->kind == KIND_REGISTER)
        m->settings = o->data;
}

/* An object with a fault of its own keeps its id, without a struct. */
static void bind_all(struct model *m, const struct model_source *sources, size_t n, struct diags *d)
{
    struct model_source *sorted = arena_copy(m->arena, sources, n * sizeof *sources);
    qsort(sorted, n, sizeof *sorted, by_kind_and_id);
    for (size_t i = 0; i < n; i++) {
        struct object *o = bind_source(m, &sorted[i], d);
        if (o)
            add_object(m, o);
        else
            strmap_set(m->arena, &m->by_id, sorted[i].id, NULL);
    }
}

/* The commissioning period of an option leaves a register without fault too. */
static void check_early(struct model *m, const struct model *under, const char *option,
                        struct diags *d)
{
    struct model_change early = model_early_change(m->arena, m, option);
    if (early.node)
        model_change(m->arena, under, 1, &early, d);
}

/* And so does an option with each that it settles something with; one of the two tells. */
static void check_combined(struct model *m, const struct object *o, struct diags *d)
{
    const struct option *p = o->data;
    for (size_t i = 0; i < p->combine.n; i++) {
        const char *pair[] = {o->id, p->combine.keys[i]};
        const struct option *other = model_get(m, KIND_OPTION, pair[1]);
        bool told = text_compare(pair[1], pair[0]) < 0 && check_has_row(&other->combine, o->id);
        if (!told)
            model_variant(m->arena, m, 2, pair, d);
    }
}

/* Each option alone must leave a register without fault, in every state. */
static void check_options(struct model *m, struct diags *d)
{
    const struct objects *options = &m->of[KIND_OPTION];
    size_t errors = d->count;
    check_states(m->arena, m, m, NULL, d);
    bool states = d->count == errors;
    for (size_t i = 0; i < options->n; i++) {
        const char *id = options->at[i]->id;
        const struct model *under = model_variant(m->arena, m, 1, &id, d);
        if (under && states)
            check_states(m->arena, m, under, id, d);
        if (under)
            check_early(m, under, id, d);
        check_combined(m, options->at[i], d);
    }
}

static void check_all(struct model *m, struct diags *d)
{
    struct checking c = {.arena = m->arena, .model = m, .diags = d};
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < m->of[k].n; i++)
            check_object(&c, m->of[k].at[i]);
    check_cycles(&c);
}

struct model *model_load(struct arena *a, const struct model_source *sources, size_t n,
                         struct diags *d)
{
    size_t errors = d->count;
    struct model *m = model_new(a);
    const struct node *settings = settings_node(sources, n);
    if (!settings) {
        diag_add(
            d, (struct place){.file = "register", .path = "register"},
            "the register has no settings yet: a document must begin with a \"register\" section "
            "(title, currency, prices, horizon, discount)");
        return NULL;
    }
    m->units = model_units(a, settings);
    bool counts = check_counts(settings, d);
    bind_all(m, sources, n, d);
    if (!counts || !m->settings)
        return NULL;
    check_all(m, d); /* of what was bound: one run tells all that is wrong */
    if (d->count == errors)
        check_options(m, d);
    return d->count == errors ? m : NULL;
}
