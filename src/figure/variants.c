/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Variants, what each of their changes reaches, and their projection on an object.
 *
 * Invariant: an object is reached by a change when a chain of references that compute
 * leads from the object, as the variant leaves it, to something that is changed; a hazard
 * also by what it is reached by in one of its operating states, and by the states that it
 * is a mean over. Variants are made once each and kept. */
#include "figure/states.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "doc/patch.h"
#include "figure/horizon.h"
#include "figure/service.h"

static int by_sort_and_name(const void *p, const void *q)
{
    const struct change *a = p, *b = q;
    if (a->sort != b->sort)
        return a->sort < b->sort ? -1 : 1;
    return text_compare(a->name, b->name);
}

static const char *variant_key(struct arena *a, size_t n, const struct change *changes)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < n; i++)
        text_printf(&t, "%s%s", i ? "+" : "", changes[i].name);
    return text_str(&t);
}

bool reference_computes(const struct reference *r, const struct object *to)
{
    return !r->trace && !r->later && to && kinds[to->kind].computes;
}

/* id -> the base objects that refer to it for computing. */
static void index_uses(struct figures *f)
{
    const struct model *m = f->base;
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; kinds[k].computes && i < m->of[k].n; i++) {
            struct object *o = m->of[k].at[i];
            for (size_t r = 0; r < o->refs.n; r++) {
                const struct reference *ref = &o->refs.at[r];
                if (!reference_computes(ref, model_find(m, ref->id)))
                    continue;
                struct objects *users = strmap_get(&f->used_by, ref->id);
                if (!users) {
                    users = NEW(f->arena, struct objects);
                    strmap_set(f->arena, &f->used_by, ref->id, users);
                }
                *array_push(f->arena, users) = o;
            }
        }
}

struct reaching {
    struct figures *f;
    struct variant *variant;
    struct strmap *reached;
    ARRAY(const char *) todo;
};

static void reach(struct reaching *w, const char *id)
{
    if (strmap_has(w->reached, id))
        return;
    strmap_set(w->f->arena, w->reached, id, (void *)id);
    *array_push(w->f->arena, &w->todo) = id;
}

static bool refers_to(const struct object *o, const char *id)
{
    for (size_t r = 0; r < o->refs.n; r++)
        if (!o->refs.at[r].trace && !o->refs.at[r].later && text_equal(o->refs.at[r].id, id))
            return true;
    return false;
}

static bool is_changed(const struct model *m, const char *id)
{
    for (; m->below; m = m->below)
        if (strmap_has(&m->by_id, id))
            return true;
    return false;
}

/* Everything that uses `id`: base objects that the variant left alone, and those that it
 * changed by their new references. */
static void reach_users(struct reaching *w, const char *id)
{
    const struct model *m = w->variant->model;
    const struct objects *users = strmap_get(&w->f->used_by, id);
    for (size_t i = 0; users && i < users->n; i++)
        if (!is_changed(m, users->at[i]->id))
            reach(w, users->at[i]->id);
    for (const struct model *at = m; at->below; at = at->below)
        for (size_t i = 0; i < at->by_id.n; i++) {
            const struct object *o = at->by_id.at[i].value;
            if (o && kinds[o->kind].computes && model_find(m, o->id) == o && refers_to(o, id))
                reach(w, o->id);
        }
}

/* What fails together with others changes when its common cause does. */
static void reach_members(struct reaching *w, const struct object *o)
{
    if (!o || o->kind != KIND_COMMON_CAUSE)
        return;
    const struct common_cause *x = o->data;
    for (size_t i = 0; i < x->of.n; i++)
        reach(w, x->of.at[i]);
}

static struct model_change laid_over(const struct figures *f, const struct change *c)
{
    static const struct place nowhere = {.file = "register", .path = "register"};
    static const char *const words[] = {"option", "renewal", "commissioning period", "state",
                                        "change"};
    if (c->sort == CHANGE_OPTION)
        return model_option_change(f->base, c->name);
    return (struct model_change){
        words[c->sort], c->name, c->node, c->node ? c->node->place : nowhere, NULL, {0}};
}

struct change_nodes ARRAY_BODY(const struct node *);

/* What change i of a variant changes: an option also what it settles with the others. */
static struct change_nodes nodes_of(struct figures *f, const struct variant *v, size_t i)
{
    const struct change *c = &v->changes[i];
    struct change_nodes all = {0};
    const struct node *own = laid_over(f, c).node;
    if (own)
        *array_push(f->arena, &all) = own;
    for (size_t k = 0; k < v->n_options && c->sort == CHANGE_OPTION; k++) {
        const struct node *settled =
            k == i ? NULL : model_combination(f->base, c->name, v->options[k]);
        if (settled)
            *array_push(f->arena, &all) = settled;
    }
    return all;
}

static void reach_changed(struct reaching *w, const struct node *change)
{
    for (size_t s = 0; s < change->n; s++) {
        const struct pair *section = &change->pairs[s];
        for (size_t k = 0; k < section->value->n; k++)
            reach(w, section->value->pairs[k].key);
    }
}

/* The states that an option renews. */
static void reach_renewed(struct reaching *w, const struct change *c)
{
    const char *option = c->sort == CHANGE_OPTION ? c->name : c->option;
    const struct objects *states = &w->f->base->of[KIND_STATE];
    for (size_t i = 0; option && i < states->n; i++)
        if (state_renewed(states->at[i]->data, option))
            reach(w, states->at[i]->id);
}

static void find_reached(struct figures *f, struct variant *v, size_t i)
{
    struct reaching w = {.f = f, .variant = v, .reached = &v->reached[i]};
    struct change_nodes all = nodes_of(f, v, i);
    if (v->changes[i].sort != CHANGE_EARLY)
        reach_renewed(&w, &v->changes[i]);
    for (size_t k = 0; k < all.n; k++)
        reach_changed(&w, all.at[k]);
    for (size_t k = 0; k < w.todo.n; k++) {
        reach_users(&w, w.todo.at[k]);
        reach_members(&w, model_find(f->base, w.todo.at[k]));
        reach_members(&w, model_find(v->model, w.todo.at[k]));
    }
}

/* --- models --- */

/* The layers of a variant, the lowest first. */
enum layer { LAYER_CHANGES, LAYER_RENEWALS, LAYER_EARLY, LAYERS };

static enum layer layer_of(const struct change *c)
{
    return c->sort == CHANGE_RENEWAL ? LAYER_RENEWALS
           : c->sort == CHANGE_EARLY ? LAYER_EARLY
                                     : LAYER_CHANGES;
}

static double instant_of(const struct figures *f, const struct change *c)
{
    return life_of(f, c->option).begin + c->moved;
}

/* What two renewals make new is as the later one leaves it. */
static void leave_to_later(struct figures *f, size_t n, struct change *changes, size_t i)
{
    struct change *c = &changes[i];
    for (size_t k = 0; k < n && c->node; k++) {
        if (k == i || changes[k].sort != CHANGE_RENEWAL || !changes[k].node ||
            instant_of(f, &changes[k]) <= instant_of(f, c))
            continue;
        const struct patch_rules plain = {0};
        c->node = patch_without(f->arena, &plain, c->node, changes[k].node);
    }
}

/* What renewals change depends on the register as the options leave it. */
static void find_renewed(struct figures *f, size_t n, struct change *changes, const struct model *m)
{
    for (size_t i = 0; i < n; i++)
        if (changes[i].sort == CHANGE_RENEWAL)
            changes[i].node = renewal_change(f, m, changes[i].option, changes[i].moved);
    for (size_t i = 0; i < n; i++)
        if (changes[i].sort == CHANGE_RENEWAL)
            leave_to_later(f, n, changes, i);
}

static const struct model *make_model(struct figures *f, size_t n, struct change *changes,
                                      ohmen_error *e)
{
    struct diags d;
    diags_init(&d, f->arena);
    struct model_change *all = NEW_ARRAY(f->arena, n, struct model_change);
    const struct model *m = f->base;
    for (int layer = 0; m && layer < LAYERS; layer++) {
        size_t k = 0;
        if (layer == LAYER_RENEWALS)
            find_renewed(f, n, changes, m);
        for (size_t i = 0; i < n; i++)
            if (layer_of(&changes[i]) == (enum layer)layer)
                all[k++] = laid_over(f, &changes[i]);
        m = model_change(f->arena, m, k, all, &d);
    }
    if (m)
        return m;
    diags_sort(&d);
    error_set(e, OHMEN_COMPUTE, "%s", d.list.n ? d.list.at[0].text : "the changes fail");
    return NULL;
}

static ohmen_status make_variant(struct figures *f, size_t n, struct change *changes,
                                 struct variant **out, ohmen_error *e)
{
    const struct model *m = make_model(f, n, changes, e);
    if (!m)
        return OHMEN_COMPUTE;
    if (n && !f->used_by.n)
        index_uses(f);
    struct variant *v = NEW(f->arena, struct variant);
    const char **options = NEW_ARRAY(f->arena, n, const char *);
    *v = (struct variant){
        .n = n, .changes = changes, .options = options, .model = m, .figures = f, .stem = v};
    while (v->n_options < n && changes[v->n_options].sort == CHANGE_OPTION) {
        options[v->n_options] = changes[v->n_options].name;
        v->n_options++;
    }
    v->reached = NEW_ARRAY(f->arena, n, struct strmap);
    for (size_t i = 0; i < n; i++)
        find_reached(f, v, i);
    v->combined = NEW(f->arena, struct strmap);
    v->projections = NEW(f->arena, struct strmap);
    *out = v;
    return OHMEN_OK;
}

static ohmen_status variant_of(struct figures *f, size_t n, const struct change *changes,
                               const struct variant **out, ohmen_error *e);

/* The same without the states, which knows what states there are. */
static ohmen_status find_stem(struct figures *f, struct variant *v, ohmen_error *e)
{
    struct change *others = NEW_ARRAY(f->arena, v->n, struct change);
    size_t n = 0;
    for (size_t i = 0; i < v->n; i++)
        if (v->changes[i].sort != CHANGE_STATE)
            others[n++] = v->changes[i];
    if (n < v->n)
        return variant_of(f, n, others, &v->stem, e);
    model_varying(f->arena, v->model, &v->varying);
    return OHMEN_OK;
}

/* The variant of some changes, in any order, none of them twice. */
static ohmen_status variant_of(struct figures *f, size_t n, const struct change *changes,
                               const struct variant **out, ohmen_error *e)
{
    struct change *sorted = arena_copy(f->arena, changes, n * sizeof *changes);
    if (n > 1)
        qsort(sorted, n, sizeof *sorted, by_sort_and_name);
    const char *key = variant_key(f->arena, n, sorted);
    struct variant *v = strmap_get(&f->variants, key);
    if (!v) {
        ohmen_status status = make_variant(f, n, sorted, &v, e);
        if (status == OHMEN_OK)
            status = find_stem(f, v, e);
        if (status != OHMEN_OK)
            return status;
        strmap_set(f->arena, &f->variants, key, v);
    }
    *out = v;
    return OHMEN_OK;
}

/* --- options --- */

static ohmen_status unknown_option(struct figures *f, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    for (size_t i = 0; i < f->base->of[KIND_OPTION].n; i++)
        nearest_offer(&near, f->base->of[KIND_OPTION].at[i]->id);
    return error_set(e, OHMEN_UNKNOWN, "there is no option \"%s\"%s", id,
                     nearest_hint(f->arena, &near));
}

static bool is_among(const char *name, size_t n, const char *const *names)
{
    for (size_t i = 0; i < n; i++)
        if (text_equal(names[i], name))
            return true;
    return false;
}

/* "OPTION:2049", "OPTION:2031-04-01" or "OPTION:early"; the option is one of the names too. */
static ohmen_status period_named(struct figures *f, const char *name, size_t n,
                                 const char *const *names, struct change *out, ohmen_error *e)
{
    const char *colon = strchr(name, ':');
    const char *option = arena_strn(f->arena, name, (size_t)(colon - name));
    const struct option *o = model_get(f->base, KIND_OPTION, option);
    if (!o)
        return unknown_option(f, option, e);
    if (!is_among(option, n, names))
        return error_set(e, OHMEN_UNKNOWN, "\"%s\" goes with its option: \"%s+%s\"", name, option,
                         name);
    if (text_equal(colon + 1, EARLY)) {
        *out = (struct change){.sort = CHANGE_EARLY, .name = name, .option = option};
        out->node = o->early ? o->early->change : NULL;
        return o->early ? OHMEN_OK
                        : error_set(e, OHMEN_UNKNOWN,
                                    "the option \"%s\" has no commissioning period", option);
    }
    *out = (struct change){.sort = CHANGE_RENEWAL, .name = name, .option = option};
    out->moved = life_moved(f->arena, f, option, colon + 1);
    return out->moved > 0
               ? OHMEN_OK
               : error_set(e, OHMEN_UNKNOWN, "the option \"%s\" is not renewed in \"%s\"", option,
                           colon + 1);
}

static ohmen_status option_named(struct figures *f, size_t n, const char *const *names, size_t i,
                                 struct change *out, ohmen_error *e)
{
    if (is_among(names[i], i, names))
        return error_set(e, OHMEN_UNKNOWN, "the option \"%s\" is named twice", names[i]);
    if (strchr(names[i], ':'))
        return period_named(f, names[i], n, names, out, e);
    if (!model_get(f->base, KIND_OPTION, names[i]))
        return unknown_option(f, names[i], e);
    *out = (struct change){.sort = CHANGE_OPTION, .name = names[i]};
    return OHMEN_OK;
}

/* One option is renewed for the last time only once. */
static ohmen_status one_renewal_each(size_t n, const struct change *changes, ohmen_error *e)
{
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < i; k++)
            if (changes[i].sort == CHANGE_RENEWAL && changes[k].sort == CHANGE_RENEWAL &&
                text_equal(changes[i].option, changes[k].option))
                return error_set(e, OHMEN_UNKNOWN, "\"%s\" and \"%s\" are renewals of one option",
                                 changes[k].name, changes[i].name);
    return OHMEN_OK;
}

ohmen_status figures_variant(struct figures *f, size_t n, const char *const *options,
                             const struct variant **out, ohmen_error *e)
{
    struct change *changes = NEW_ARRAY(f->arena, n, struct change);
    for (size_t i = 0; i < n; i++) {
        ohmen_status status = option_named(f, n, options, i, &changes[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    ohmen_status status = one_renewal_each(n, changes, e);
    return status == OHMEN_OK ? variant_of(f, n, changes, out, e) : status;
}

/* --- states and made-up changes --- */

static ohmen_status variant_and(struct figures *f, const struct variant *base,
                                const struct change *more, const struct variant **out,
                                ohmen_error *e)
{
    struct change *changes = NEW_ARRAY(f->arena, base->n + 1, struct change);
    for (size_t i = 0; i < base->n; i++)
        changes[i] = base->changes[i];
    changes[base->n] = *more;
    return variant_of(f, base->n + 1, changes, out, e);
}

ohmen_status variant_in_state(struct figures *f, const struct variant *base,
                              const struct object *state, size_t value, const struct variant **out,
                              ohmen_error *e)
{
    const struct state *s = state->data;
    struct model_change m = model_state_change(f->arena, state, value);
    struct change c = {CHANGE_STATE, m.name, state->id, state_values(s)->keys[value],
                       m.node,       NULL,   0};
    return variant_and(f, base, &c, out, e);
}

static ohmen_status unknown_state(struct figures *f, const struct model *m, const char *id,
                                  ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    for (; m; m = m->below)
        for (size_t i = 0; i < m->by_id.n; i++) {
            const struct object *o = m->by_id.at[i].value;
            if (o && o->kind == KIND_STATE)
                nearest_offer(&near, o->id);
        }
    return error_set(e, OHMEN_UNKNOWN, "there is no state \"%s\"%s", id,
                     nearest_hint(f->arena, &near));
}

static ohmen_status unknown_value(struct figures *f, const struct object *o, const char *value,
                                  ohmen_error *e)
{
    const struct state *s = o->data;
    struct nearest near;
    nearest_init(&near, value);
    for (size_t i = 0; i < state_values(s)->n; i++)
        nearest_offer(&near, state_values(s)->keys[i]);
    return error_set(e, OHMEN_UNKNOWN, "\"%s\" has no state \"%s\"%s", o->id, value,
                     nearest_hint(f->arena, &near));
}

ohmen_status figures_variant_in(struct figures *f, const struct variant *base, const char *state,
                                const struct variant **out, ohmen_error *e)
{
    size_t n = strcspn(state, "="), i = 0;
    const char *id = arena_strn(f->arena, state, n), *value = state[n] ? state + n + 1 : "";
    const struct object *o = model_find(base->stem->model, id);
    if (!o || o->kind != KIND_STATE)
        return unknown_state(f, base->stem->model, id, e);
    const struct rows *values = state_values(o->data);
    while (i < values->n && !text_equal(values->keys[i], value))
        i++;
    if (i == values->n)
        return unknown_value(f, o, value, e);
    if (variant_state(base, id))
        return error_set(e, OHMEN_UNKNOWN, "the state \"%s\" is named twice", id);
    return variant_in_state(f, base, o, i, out, e);
}

static ohmen_status make_up(struct figures *f, const char *name, const struct node *change,
                            struct change **out, ohmen_error *e)
{
    struct diags d;
    diags_init(&d, f->arena);
    const struct node *bound = model_bind_change(f->arena, f->base, change, &d);
    if (!bound) {
        diags_sort(&d);
        return error_set(e, OHMEN_COMPUTE, "%s", d.list.at[0].text);
    }
    struct change *known = strmap_get(&f->made_up, name);
    if (known && !node_equal(known->node, bound))
        return error_set(e, OHMEN_UNKNOWN, "%s is another change already", name);
    if (!known) {
        known = NEW(f->arena, struct change);
        *known = (struct change){.sort = CHANGE_MADE_UP, .name = name, .node = bound};
        strmap_set(f->arena, &f->made_up, name, known);
    }
    *out = known;
    return OHMEN_OK;
}

ohmen_status figures_variant_with(struct figures *f, const struct variant *base, const char *name,
                                  const struct node *change, const struct variant **out,
                                  ohmen_error *e)
{
    struct change *c = NULL;
    if (!*name || strpbrk(name, "[]"))
        return error_set(e, OHMEN_UNKNOWN, "\"%s\" cannot be the name of a change", name);
    ohmen_status status = make_up(f, arena_printf(f->arena, "[%s]", name), change, &c, e);
    return status == OHMEN_OK ? variant_made_up(f, base, c, out, e) : status;
}

/* What is made up may change states, so those that the base fixes are fixed again over it. */
static ohmen_status rebase(struct figures *f, const struct variant *base,
                           const struct change *change, const struct variant **out, ohmen_error *e)
{
    ohmen_status status = variant_and(f, base->stem, change, out, e);
    for (size_t i = 0; status == OHMEN_OK && i < base->n; i++)
        if (base->changes[i].sort == CHANGE_STATE)
            status = figures_variant_in(f, *out, base->changes[i].name, out, e);
    return status;
}

ohmen_status variant_made_up(struct figures *f, const struct variant *base,
                             const struct change *change, const struct variant **out,
                             ohmen_error *e)
{
    for (size_t i = 0; i < base->n; i++)
        if (text_equal(base->changes[i].name, change->name)) {
            *out = base;
            return OHMEN_OK;
        }
    return rebase(f, base, change, out, e);
}

/* --- projection --- */

const char *variant_state(const struct variant *v, const char *state)
{
    for (size_t i = v->n_options; i < v->n; i++)
        if (v->changes[i].sort == CHANGE_STATE && text_equal(v->changes[i].state, state))
            return v->changes[i].value;
    return NULL;
}

/* Marks the changes of v that a hazard depends on in some of its operating states. */
static ohmen_status keep_of_hazard(struct figures *f, const struct variant *v, const char *hazard,
                                   bool *keep, ohmen_error *e)
{
    const struct combinations *c;
    ohmen_status status = states_of(f, v, hazard, &c, e);
    for (size_t i = 0; status == OHMEN_OK && i < v->n; i++)
        keep[i] = keep[i] || strmap_has(&c->kept, v->changes[i].name);
    return status;
}

struct below {
    struct strmap seen;
    ARRAY(const char *) hazards;
};

/* What fails with others depends on what they have in common, and so on what these refer to. */
static void add_groups(struct figures *f, const struct model *m, const struct object *o,
                       struct below *b)
{
    struct groups groups = {0};
    if (!o || o->kind != KIND_ELEMENT)
        return;
    groups_of(f, m, o->id, &groups);
    for (size_t i = 0; i < groups.n; i++)
        if (!strmap_has(&b->seen, groups.at[i]->id))
            strmap_set(f->arena, &b->seen, groups.at[i]->id, NULL);
}

/* The hazards that an object refers to, directly or not; the object itself where it is one. */
static void hazards_below(struct figures *f, const struct model *m, const char *id, struct below *b)
{
    strmap_set(f->arena, &b->seen, id, NULL);
    for (size_t i = 0; i < b->seen.n; i++) {
        const struct object *o = model_find(m, b->seen.at[i].key);
        if (o && o->kind == KIND_HAZARD) {
            *array_push(f->arena, &b->hazards) = o->id;
            continue;
        }
        add_groups(f, m, o, b);
        for (size_t r = 0; o && r < o->refs.n; r++) {
            const struct object *to = model_find(m, o->refs.at[r].id);
            if (reference_computes(&o->refs.at[r], to) && !strmap_has(&b->seen, to->id))
                strmap_set(f->arena, &b->seen, to->id, NULL);
        }
    }
}

/* Which changes matter to an object. */
static ohmen_status find_kept(struct figures *f, const struct variant *v, const char *id,
                              bool *keep, ohmen_error *e)
{
    struct below b = {0};
    for (size_t i = 0; i < v->n; i++)
        keep[i] = strmap_has(&v->reached[i], id);
    if (v->stem->varying.n == 0)
        return OHMEN_OK;
    hazards_below(f, v->model, id, &b);
    for (size_t i = 0; i < b.hazards.n; i++) {
        ohmen_status status = keep_of_hazard(f, v, b.hazards.at[i], keep, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

/* Does a change touch this state itself? */
static bool touches_state(struct figures *f, const struct variant *v, size_t i, const char *state)
{
    struct change_nodes all = nodes_of(f, v, i);
    for (size_t k = 0; k < all.n; k++)
        if (node_get(node_get(all.at[k], kinds[KIND_STATE].section), state))
            return true;
    return false;
}

/* A state means what the other changes make of it: those go with it. */
static void keep_makers_of_states(struct figures *f, const struct variant *v, bool *keep)
{
    for (size_t i = 0; i < v->n; i++)
        for (size_t k = 0; keep[i] && v->changes[i].sort == CHANGE_STATE && k < v->n; k++)
            keep[k] = keep[k] || (v->changes[k].sort != CHANGE_STATE &&
                                  touches_state(f, v, k, v->changes[i].state));
}

/* Renewals and commissioning periods lie over what their option makes: it goes with them. */
static void keep_options_of_periods(const struct variant *v, bool *keep)
{
    for (size_t i = v->n_options; i < v->n; i++)
        for (size_t k = 0; keep[i] && v->changes[i].option && k < v->n_options; k++)
            keep[k] = keep[k] || text_equal(v->options[k], v->changes[i].option);
}

static ohmen_status project(struct figures *f, const struct variant *v, const char *id,
                            const struct variant **out, ohmen_error *e)
{
    bool *keep = NEW_ARRAY(f->arena, v->n, bool);
    struct change *kept = NEW_ARRAY(f->arena, v->n, struct change);
    size_t n = 0;
    ohmen_status status = find_kept(f, v, id, keep, e);
    if (status != OHMEN_OK)
        return status;
    keep_makers_of_states(f, v, keep);
    keep_options_of_periods(v, keep);
    for (size_t i = 0; i < v->n; i++)
        if (keep[i])
            kept[n++] = v->changes[i];
    if (n < v->n)
        return variant_of(f, n, kept, out, e);
    *out = v;
    return OHMEN_OK;
}

ohmen_status variant_project(struct figures *f, const struct variant *v, const char *id,
                             const struct variant **out, ohmen_error *e)
{
    bool known = strmap_has(v->projections, id);
    *out = known ? strmap_get(v->projections, id) : v;
    if (v->n == 0 || known)
        return OHMEN_OK;
    ohmen_status status = project(f, v, id, out, e);
    if (status == OHMEN_OK && v->stem->varying.n)
        strmap_set(f->arena, v->projections, id, (void *)*out);
    return status;
}

bool variant_reaches(const struct variant *v, const char *id)
{
    const struct variant *projected;
    ohmen_status status = variant_project(v->figures, v, id, &projected, NULL);
    return status != OHMEN_OK || projected->n > 0;
}

double variant_begins(const struct figures *f, const struct variant *v)
{
    double last = 0, horizon = horizon_length(f->base->settings);
    for (size_t i = 0; i < v->n; i++) {
        const struct change *c = &v->changes[i];
        bool renewal = c->sort == CHANGE_RENEWAL;
        if (c->sort != CHANGE_OPTION && !renewal)
            continue;
        struct life life = life_of(f, renewal ? c->option : c->name);
        last = fmax(last, life.begin + (renewal ? c->moved : 0));
    }
    return last < horizon ? last : 0;
}
