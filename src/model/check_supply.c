/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Interruptions that say neither whom nor what they interrupt need a site that states it. */
#include "model/check.h"
#include "model/supplied.h"

static const struct site *site_of(const struct model *m, const struct hazard *h)
{
    return h->site ? model_get(m, KIND_SITE, h->site) : NULL;
}

/* "H-1 has no site", "neither VH nor a site above it states customers or load". */
static const char *what_lacks(struct arena *a, const struct hazard *h)
{
    if (!h->site)
        return "the hazard has no site to take them from";
    return arena_printf(a, "neither the site \"%s\" nor a site above it states them", h->site);
}

static bool is_supplied(const struct checking *c, const struct hazard *h)
{
    bool unknown = h->site && !site_of(c->model, h); /* reported elsewhere */
    return unknown || model_supplied(c->model, h->site);
}

void check_supply(struct checking *c, const struct object *o)
{
    const struct hazard *h = o->data;
    const struct node *outcomes = node_get(o->node, "outcomes");
    if (!hazard_needs_site(h) || is_supplied(c, h))
        return;
    for (size_t k = 0; k < h->outcomes.n; k++) {
        const struct rows *rows = &ROW(struct outcome, h->outcomes, k)->interruptions;
        const struct node *node = node_get(outcomes->pairs[k].value, "interruptions");
        for (size_t i = 0; i < rows->n; i++)
            if (interruption_is_whole(ROW(struct interruption, *rows, i)))
                diag_add(c->diags, node->pairs[i].value->place,
                         "this interruption has neither \"customers\" nor \"load\", and %s",
                         what_lacks(c->arena, h));
    }
}

/* Hazards that a change leaves alone, but whose site it changes. */
void check_supply_left(struct checking *c, struct place at)
{
    const struct model *base = c->model;
    while (base->below)
        base = base->below;
    for (size_t i = 0; i < base->of[KIND_HAZARD].n; i++) {
        const struct object *o = base->of[KIND_HAZARD].at[i];
        const struct hazard *h = o->data;
        if (model_find(c->model, o->id) == o && hazard_needs_site(h) && !is_supplied(c, h))
            diag_add(c->diags, at,
                     "the change leaves interruptions of \"%s\" without \"customers\" and "
                     "\"load\": %s",
                     o->id, what_lacks(c->arena, h));
    }
}
