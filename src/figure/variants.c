/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Variants, what each of their options reaches, and their projection on an object.
 *
 * Invariant: an object is reached by an option when a chain of references that compute
 * leads from the object, as the variant leaves it, to something that the option
 * changes. Variants are made once each and kept. */
#include "figure/compile.h"

#include <stdlib.h>

static int by_text(const void *p, const void *q)
{
    return text_compare(*(const char *const *)p, *(const char *const *)q);
}

static const char *variant_key(struct arena *a, size_t n, const char *const *options)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < n; i++)
        text_printf(&t, "%s%s", i ? "+" : "", options[i]);
    return text_str(&t);
}

static bool computes(const struct reference *r, const struct object *to)
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
                if (!computes(ref, model_find(m, ref->id)))
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

/* Everything that uses `id`: base objects that the variant left alone, and those that it
 * changed by their new references. */
static void reach_users(struct reaching *w, const char *id)
{
    const struct model *m = w->variant->model;
    const struct objects *users = strmap_get(&w->f->used_by, id);
    for (size_t i = 0; users && i < users->n; i++)
        if (!strmap_has(&m->by_id, users->at[i]->id))
            reach(w, users->at[i]->id);
    for (size_t i = 0; i < m->by_id.n; i++) {
        const struct object *o = m->by_id.at[i].value;
        if (o && kinds[o->kind].computes && refers_to(o, id))
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

static void find_reached(struct figures *f, struct variant *v, size_t option)
{
    struct reaching w = {.f = f, .variant = v, .reached = &v->reached[option]};
    const struct option *o = model_get(f->base, KIND_OPTION, v->options[option]);
    for (size_t s = 0; s < o->change->n; s++) {
        const struct pair *section = &o->change->pairs[s];
        for (size_t i = 0; i < section->value->n; i++)
            reach(&w, section->value->pairs[i].key);
    }
    for (size_t i = 0; i < w.todo.n; i++) {
        reach_users(&w, w.todo.at[i]);
        reach_members(&w, model_find(f->base, w.todo.at[i]));
        reach_members(&w, model_find(v->model, w.todo.at[i]));
    }
}

static ohmen_status make_variant(struct figures *f, size_t n, const char *const *options,
                                 struct variant **out, ohmen_error *e)
{
    struct diags d;
    diags_init(&d, f->arena);
    const struct model *m = model_variant(f->arena, f->base, n, options, &d);
    if (!m) {
        diags_sort(&d);
        return error_set(e, OHMEN_COMPUTE, "%s", d.list.n ? d.list.at[0].text : "the options fail");
    }
    if (n && !f->used_by.n)
        index_uses(f);
    struct variant *v = NEW(f->arena, struct variant);
    *v = (struct variant){.n = n, .options = options, .model = m};
    v->reached = NEW_ARRAY(f->arena, n, struct strmap);
    for (size_t i = 0; i < n; i++)
        find_reached(f, v, i);
    *out = v;
    return OHMEN_OK;
}

static ohmen_status unknown_option(struct figures *f, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    for (size_t i = 0; i < f->base->of[KIND_OPTION].n; i++)
        nearest_offer(&near, f->base->of[KIND_OPTION].at[i]->id);
    return error_set(e, OHMEN_UNKNOWN, "there is no option \"%s\"%s", id,
                     nearest_hint(f->arena, &near));
}

ohmen_status figures_variant(struct figures *f, size_t n, const char *const *options,
                             const struct variant **out, ohmen_error *e)
{
    const char **sorted = NEW_ARRAY(f->arena, n, const char *);
    for (size_t i = 0; i < n; i++) {
        if (!model_get(f->base, KIND_OPTION, options[i]))
            return unknown_option(f, options[i], e);
        sorted[i] = options[i];
    }
    qsort(sorted, n, sizeof *sorted, by_text);
    for (size_t i = 0; i + 1 < n; i++)
        if (text_equal(sorted[i], sorted[i + 1]))
            return error_set(e, OHMEN_UNKNOWN, "the option \"%s\" is named twice", sorted[i]);
    const char *key = variant_key(f->arena, n, sorted);
    struct variant *v = strmap_get(&f->variants, key);
    if (!v) {
        ohmen_status status = make_variant(f, n, sorted, &v, e);
        if (status != OHMEN_OK)
            return status;
        strmap_set(f->arena, &f->variants, key, v);
    }
    *out = v;
    return OHMEN_OK;
}

bool variant_reaches(const struct variant *v, const char *id)
{
    for (size_t i = 0; i < v->n; i++)
        if (strmap_has(&v->reached[i], id))
            return true;
    return false;
}

ohmen_status variant_project(struct figures *f, const struct variant *v, const char *id,
                             const struct variant **out, ohmen_error *e)
{
    const char **kept = NEW_ARRAY(f->arena, v->n, const char *);
    size_t n = 0;
    for (size_t i = 0; i < v->n; i++)
        if (strmap_has(&v->reached[i], id))
            kept[n++] = v->options[i];
    if (n == v->n) {
        *out = v;
        return OHMEN_OK;
    }
    return figures_variant(f, n, kept, out, e);
}
