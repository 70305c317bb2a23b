/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The tree of operating states of a hazard. Owns nothing beyond the arena of the figures. */
#include "figure/states.h"

struct growing {
    struct figures *f;
    const struct variant *from; /* whose combinations these are */
    const char *hazard;
    struct combinations *out;
    const struct object **states; /* free ones on the way, and their values */
    size_t *values, depth;
};

static size_t change_named(const struct variant *v, const char *name)
{
    size_t i = 0;
    while (i < v->n && !text_equal(v->changes[i].name, name))
        i++;
    return i;
}

static void keep(struct growing *g, const char *name)
{
    strmap_set(g->f->arena, &g->out->kept, name, (void *)name);
}

/* Changes of `at` that reach an object: those that are no states. */
static void keep_reaching(struct growing *g, const struct variant *at, const char *id)
{
    for (size_t i = 0; i < at->n; i++)
        if (at->changes[i].sort != CHANGE_STATE && strmap_has(&at->reached[i], id))
            keep(g, at->changes[i].name);
}

/* Does some value of the state, beside those fixed in `at`, reach the hazard? */
static ohmen_status reaches(struct growing *g, const struct variant *at, const struct object *state,
                            bool *out, ohmen_error *e)
{
    const struct state *s = state->data;
    *out = false;
    for (size_t i = 0; i < state_values(s)->n && !*out; i++) {
        const struct variant *in;
        struct model_change m = model_state_change(g->f->arena, state, i);
        if (!m.node)
            continue;
        ohmen_status status = variant_in_state(g->f, at, state, i, &in, e);
        if (status != OHMEN_OK)
            return status;
        *out = strmap_has(&in->reached[change_named(in, m.name)], g->hazard);
    }
    return OHMEN_OK;
}

static ohmen_status add_leaf(struct growing *g, const struct variant *at, ohmen_error *e)
{
    struct arena *a = g->f->arena;
    if (g->out->list.n == STATES_COMBINED)
        return error_set(e, OHMEN_COMPUTE,
                         "\"%s\" is reached by more than %d combinations of operating states",
                         g->hazard, STATES_COMBINED);
    keep_reaching(g, at, g->hazard);
    *array_push(a, &g->out->list) =
        (struct combination){at, g->depth, arena_copy(a, g->states, g->depth * sizeof *g->states),
                             arena_copy(a, g->values, g->depth * sizeof *g->values)};
    return OHMEN_OK;
}

static ohmen_status grow(struct growing *g, const struct variant *at, ohmen_error *e);

static ohmen_status grow_fixed(struct growing *g, const struct variant *at,
                               const struct object *state, const char *value, ohmen_error *e)
{
    const struct state *s = state->data;
    const struct variant *in;
    size_t i = 0;
    while (!text_equal(state_values(s)->keys[i], value))
        i++;
    ohmen_status status = variant_in_state(g->f, at, state, i, &in, e);
    keep(g, arena_printf(g->f->arena, "%s=%s", state->id, value));
    return status == OHMEN_OK ? grow(g, in, e) : status;
}

static ohmen_status grow_free(struct growing *g, const struct variant *at,
                              const struct object *state, ohmen_error *e)
{
    const struct state *s = state->data;
    ohmen_status status = OHMEN_OK;
    keep_reaching(g, at, state->id); /* what changes the shares changes the mean */
    for (size_t i = 0; status == OHMEN_OK && i < state_values(s)->n; i++) {
        const struct variant *in;
        g->states[g->depth] = state;
        g->values[g->depth++] = i;
        status = variant_in_state(g->f, at, state, i, &in, e);
        if (status == OHMEN_OK)
            status = grow(g, in, e);
        g->depth--;
    }
    return status;
}

static ohmen_status grow(struct growing *g, const struct variant *at, ohmen_error *e)
{
    const struct object_list *all = &g->from->stem->varying;
    for (size_t i = 0; i < all->n; i++) {
        const struct object *state = all->at[i];
        bool found;
        if (variant_state(at, state->id))
            continue;
        ohmen_status status = reaches(g, at, state, &found, e);
        if (status != OHMEN_OK)
            return status;
        const char *fixed = variant_state(g->from, state->id);
        if (found)
            return fixed ? grow_fixed(g, at, state, fixed, e) : grow_free(g, at, state, e);
    }
    return add_leaf(g, at, e);
}

ohmen_status states_of(struct figures *f, const struct variant *v, const char *hazard,
                       const struct combinations **out, ohmen_error *e)
{
    struct combinations *c = strmap_get(v->combined, hazard);
    size_t n = v->stem->varying.n;
    *out = c;
    if (c)
        return OHMEN_OK;
    *out = c = NEW(f->arena, struct combinations);
    struct growing g = {.f = f, .from = v, .hazard = hazard, .out = c};
    g.states = NEW_ARRAY(f->arena, n, const struct object *);
    g.values = NEW_ARRAY(f->arena, n, size_t);
    ohmen_status status =
        model_find(v->stem->model, hazard) ? grow(&g, v->stem, e) : add_leaf(&g, v->stem, e);
    if (status == OHMEN_OK)
        strmap_set(f->arena, v->combined, hazard, c);
    return status;
}
