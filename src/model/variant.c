/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Variants: a model with some changes laid over it.
 *
 * Only touched objects are bound anew; everything else is found below. Invariant:
 * the order of changes does not matter, since contradictions are refused and `was`
 * only enters products. */
#include "model/variant.h"

#include <stdlib.h>

#include "doc/patch.h"
#include "model/check.h"
#include "model/combination.h"

struct model_change model_option_change(const struct model *base, const char *option)
{
    const struct object *o = model_find(base, option);
    const struct option *data = o->data;
    return (struct model_change){"option", option, data->change, o->node->place, o->id, {0}};
}

struct model_change model_early_change(struct arena *a, const struct model *base,
                                       const char *option)
{
    const struct object *o = model_find(base, option);
    const struct early *early = ((const struct option *)o->data)->early;
    return (struct model_change){"commissioning period",
                                 arena_printf(a, "%s:early", o->id),
                                 early ? early->change : NULL,
                                 early ? early->change->place : o->node->place,
                                 NULL,
                                 {0}};
}

struct model_change model_state_change(struct arena *a, const struct object *state, size_t value)
{
    const struct state *s = state->data;
    const char *key = state_values(s)->keys[value];
    struct model_change c = {
        "state", arena_printf(a, "%s=%s", state->id, key), NULL, state->node->place, NULL, {0}};
    for (size_t i = 0; i < s->when.n; i++)
        if (text_equal(s->when.keys[i], key)) {
            c.node = ((const struct node *const *)s->when.at)[i];
            c.place = c.node->place;
        }
    return c;
}

const struct node *model_bind_change(struct arena *a, const struct model *base,
                                     const struct node *change, struct diags *d)
{
    struct binding b = {.arena = a, .units = &base->units, .diags = d};
    return bind_change(&b, change);
}

static void add_varying(struct arena *a, const struct object *o, struct object_list *out)
{
    if (o && o->kind == KIND_STATE && state_values(o->data)->n &&
        ((const struct state *)o->data)->when.n)
        *array_push(a, out) = o;
}

static int by_id(const void *p, const void *q)
{
    return text_compare((*(const struct object *const *)p)->id,
                        (*(const struct object *const *)q)->id);
}

void model_varying(struct arena *a, const struct model *m, struct object_list *out)
{
    for (const struct model *at = m; at; at = at->below) {
        size_t n = at->below ? at->by_id.n : at->of[KIND_STATE].n;
        for (size_t i = 0; i < n; i++) {
            const struct object *o = at->below ? at->by_id.at[i].value : at->of[KIND_STATE].at[i];
            if (o && model_find(m, o->id) == o)
                add_varying(a, o, out);
        }
    }
    if (out->n > 1)
        qsort(out->at, out->n, sizeof *out->at, by_id);
}

const char *model_contradiction(struct arena *a, const struct model *base, const char *option_p,
                                const char *option_q)
{
    struct diags quiet;
    diags_init(&quiet, a);
    struct binding b = {.arena = a, .units = &base->units, .diags = &quiet};
    struct patch_rules rules = bind_patch_rules(&b);
    return combination_contradiction(a, base, &rules, option_p, option_q);
}

struct applying {
    struct arena *arena;
    struct model *variant;
    struct binding binding;
    struct patch_rules rules;
    struct diags *diags;
    struct strmap nodes;  /* id -> node so far; NULL value: removed */
    struct strmap places; /* id -> the change's node, for messages */
    struct strmap kind_of;
};

static const struct node *node_so_far(struct applying *ap, const char *id)
{
    if (strmap_has(&ap->nodes, id))
        return strmap_get(&ap->nodes, id);
    const struct object *o = model_find(ap->variant->below, id);
    return o ? o->node : NULL;
}

static void wrong_kind(struct applying *ap, const struct object *o, const struct pair *p)
{
    diag_add(ap->diags, p->place, "\"%s\" is %s already", p->key,
             kinds_words(ap->arena, KIND_BIT(o->kind)));
}

static void apply_to_object(struct applying *ap, enum kind kind, const struct pair *p)
{
    const struct object *below = model_find(ap->variant->below, p->key);
    const struct node *before = node_so_far(ap, p->key);
    if (below && below->kind != kind) {
        wrong_kind(ap, below, p);
        return;
    }
    const char *path = arena_printf(ap->arena, "%s/%s", kinds[kind].section, p->key);
    bool removal = p->value->type == NODE_SCALAR;
    if (removal && !before)
        diag_add(ap->diags, p->value->place, "there is no \"%s\" to remove", p->key);
    size_t errors = ap->diags->count;
    struct node *after =
        removal ? NULL : patch_apply(ap->arena, &ap->rules, before, p->value, path);
    if (ap->diags->count != errors)
        return;
    strmap_set(ap->arena, &ap->nodes, p->key, after);
    strmap_set(ap->arena, &ap->places, p->key, (void *)p);
    strmap_set(ap->arena, &ap->kind_of, p->key, (void *)&kinds[kind]);
}

static void apply_change(struct applying *ap, const struct node *change)
{
    for (size_t s = 0; change && s < change->n; s++) {
        const struct pair *section = &change->pairs[s];
        enum kind kind = kind_of_section(section->key);
        for (size_t i = 0; i < section->value->n; i++)
            apply_to_object(ap, kind, &section->value->pairs[i]);
    }
}

/* Binds what the changes made; the places are those of the change where they have
 * one, else of the change's object. */
static void bind_results(struct applying *ap)
{
    for (size_t i = 0; i < ap->nodes.n; i++) {
        const char *id = ap->nodes.at[i].key;
        struct node *node = ap->nodes.at[i].value;
        const struct kind_info *k = strmap_get(&ap->kind_of, id);
        struct object *o = NULL;
        if (node) {
            o = model_bind(&ap->binding, (enum kind)(k - kinds), id, node);
            if (!o)
                continue;
            o->changed = true;
        }
        strmap_set(ap->arena, &ap->variant->by_id, id, o);
    }
}

/* What was removed must not be needed any more. */
static void check_removed(struct applying *ap, const char *id)
{
    const struct pair *p = strmap_get(&ap->places, id);
    for (const struct model *m = ap->variant; m; m = m->below)
        for (size_t i = 0; i < m->by_id.n; i++) {
            const struct object *o = m->by_id.at[i].value;
            if (!o || model_find(ap->variant, o->id) != o || !kinds[o->kind].computes)
                continue;
            for (size_t r = 0; r < o->refs.n; r++)
                if (text_equal(o->refs.at[r].id, id))
                    diag_add(ap->diags, p->place, "\"%s\" cannot be removed: \"%s\" needs it at %s",
                             id, o->id, o->refs.at[r].path);
        }
}

/* Objects that use a value were checked with the dimension that it had. */
static void check_same_dim(struct applying *ap, struct checking *c, const struct object *o)
{
    const struct object *below = model_find(ap->variant->below, o->id);
    const struct pair *p = strmap_get(&ap->places, o->id);
    struct checking under = {.arena = c->arena, .model = ap->variant->below, .diags = c->diags};
    struct dim before, after;
    if (!below || (o->kind != KIND_VALUE && o->kind != KIND_RATE))
        return;
    if (check_dim_of(&under, o->id, &before) && check_dim_of(c, o->id, &after) &&
        !dim_equal(before, after))
        diag_add(ap->diags, p->place, "a change cannot turn \"%s\" from %s into %s", o->id,
                 dim_words(c->arena, &c->model->units, before),
                 dim_words(c->arena, &c->model->units, after));
}

/* A hazard may rest on what its site supplies. */
static void check_sites(struct applying *ap, struct checking *c)
{
    for (size_t i = 0; i < ap->variant->by_id.n; i++) {
        const char *id = ap->variant->by_id.at[i].key;
        const struct kind_info *k = strmap_get(&ap->kind_of, id);
        const struct pair *p = strmap_get(&ap->places, id);
        if (k != &kinds[KIND_SITE])
            continue;
        check_supply_left(c, p->place);
        return;
    }
}

static void check_results(struct applying *ap)
{
    struct checking c = {.arena = ap->arena, .model = ap->variant, .diags = ap->diags};
    check_sites(ap, &c);
    for (size_t i = 0; i < ap->variant->by_id.n; i++) {
        const struct object *o = ap->variant->by_id.at[i].value;
        if (!o) {
            check_removed(ap, ap->variant->by_id.at[i].key);
            continue;
        }
        check_object(&c, o);
        check_same_dim(ap, &c, o);
    }
    check_cycles(&c);
}

static void report_contradiction(struct applying *ap, const struct model_change *p,
                                 const struct model_change *q, const char *path)
{
    if (text_equal(p->word, q->word))
        diag_add(ap->diags, q->place, "the %ss \"%s\" and \"%s\" contradict each other at %s",
                 p->word, p->name, q->name, path);
    else
        diag_add(ap->diags, q->place, "the %s \"%s\" and the %s \"%s\" contradict each other at %s",
                 p->word, p->name, q->word, q->name, path);
}

/* Of two options also where a third one settles what they say. */
static const char *contradiction(struct applying *ap, const struct model_change *p,
                                 const struct model_change *q)
{
    if (p->option && q->option)
        return combination_contradiction(ap->arena, ap->variant->below, &ap->rules, p->option,
                                         q->option);
    return p->node && q->node ? patch_contradiction(ap->arena, &ap->rules, p->node, q->node) : NULL;
}

static bool refuse_contradictions(struct applying *ap, const struct change_list *changes)
{
    for (size_t i = 0; i < changes->n; i++)
        for (size_t k = 0; k < i; k++) {
            const char *path = contradiction(ap, &changes->at[k], &changes->at[i]);
            if (!path)
                continue;
            report_contradiction(ap, &changes->at[k], &changes->at[i], path);
            return false;
        }
    return true;
}

/* --- what is new --- */

static day in_service(const struct model *base, const char *option)
{
    return ((const struct option *)model_get(base, KIND_OPTION, option))->in_service;
}

static day later(day p, day q)
{
    return p > q ? p : q; /* DAY_NONE is the least */
}

/* From when on a change adds what it adds: DAY_NONE for the start of the horizon. */
static day begins(const struct model *base, const struct model_change *c)
{
    return c->option ? in_service(base, c->option)
                     : later(in_service(base, c->pair[0]), in_service(base, c->pair[1]));
}

/* The first day on which one of the changes of options that add an element holds; DAY_NONE where
 * one does from the start of the horizon. */
static day first_service(struct applying *ap, const char *id, const struct change_list *changes)
{
    day first = DAY_NONE;
    bool found = false;
    for (size_t i = 0; i < changes->n; i++) {
        const struct model_change *c = &changes->at[i];
        const struct node *elements = node_get(c->node, kinds[KIND_ELEMENT].section);
        if ((!c->option && !c->pair[0]) || !node_get(elements, id))
            continue;
        day d = begins(ap->variant->below, c);
        first = !found || d < first ? d : first;
        found = true;
    }
    return first;
}

static bool is_before(const struct node *map, const char *key, const char *date)
{
    const struct node *n = node_get(map, key);
    return n && text_compare(n->text, date) < 0;
}

/* An element that options add is new when they come into service, unless it says that it was
 * there before. */
static void date_new_element(struct applying *ap, struct strmap_pair *p,
                             const struct change_list *changes)
{
    char date[DATE_TEXT];
    const struct node *node = p->value;
    const struct kind_info *kind = strmap_get(&ap->kind_of, p->key);
    if (!node || kind != &kinds[KIND_ELEMENT] || node_get(node, "since") ||
        model_find(ap->variant->below, p->key))
        return;
    day first = first_service(ap, p->key, changes);
    if (first == DAY_NONE || is_before(node, "when-known", date_write(date, first)) ||
        is_before(node_get(node, "test"), "last", date))
        return;
    struct node *dated = node_copy(ap->arena, node);
    node_set(ap->arena, dated, "since",
             node_scalar(ap->arena, FORM_TEXT, arena_str(ap->arena, date), node->place));
    node_sort(dated);
    p->value = dated;
}

static void date_new_elements(struct applying *ap, const struct change_list *changes)
{
    for (size_t i = 0; i < ap->nodes.n; i++)
        date_new_element(ap, &ap->nodes.at[i], changes);
}

const struct model *model_change(struct arena *a, const struct model *base, size_t n,
                                 const struct model_change *changes, struct diags *d)
{
    if (n == 0)
        return base;
    size_t errors = d->count;
    struct model *m = model_new(a);
    m->below = base;
    m->units = base->units;
    m->settings = base->settings;
    struct applying ap = {.arena = a,
                          .variant = m,
                          .binding = {.arena = a, .units = &m->units, .diags = d},
                          .diags = d};
    ap.rules = bind_patch_rules(&ap.binding);
    struct change_list all = {0};
    combination_settle(a, base, &ap.rules, n, changes, &all);
    if (!refuse_contradictions(&ap, &all))
        return NULL;
    for (size_t i = 0; i < all.n; i++)
        apply_change(&ap, all.at[i].node);
    date_new_elements(&ap, &all);
    if (d->count == errors)
        bind_results(&ap);
    if (d->count == errors)
        check_results(&ap);
    return d->count == errors ? m : NULL;
}

const struct model *model_variant(struct arena *a, const struct model *base, size_t n,
                                  const char *const *options, struct diags *d)
{
    struct model_change *changes = NEW_ARRAY(a, n, struct model_change);
    for (size_t i = 0; i < n; i++)
        changes[i] = model_option_change(base, options[i]);
    return model_change(a, base, n, changes, d);
}
