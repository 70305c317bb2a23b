/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is supplied from a site. Owns nothing. */
#include "model/supplied.h"

bool interruption_is_whole(const struct interruption *row)
{
    return row->customers < 0 && !row->load;
}

bool hazard_needs_site(const struct hazard *h)
{
    for (size_t k = 0; k < h->outcomes.n; k++) {
        const struct rows *rows = &ROW(struct outcome, h->outcomes, k)->interruptions;
        for (size_t i = 0; i < rows->n; i++)
            if (interruption_is_whole(ROW(struct interruption, *rows, i)))
                return true;
    }
    return false;
}

static size_t n_objects(const struct model *m)
{
    size_t n = 0;
    for (; m; m = m->below)
        n += m->by_id.n;
    return n;
}

/* Sites that contain themselves are refused elsewhere: here they only must not hold us up. */
const struct object *model_supplied(const struct model *m, const char *site)
{
    size_t steps = n_objects(m);
    for (; site && steps; steps--) {
        const struct object *o = model_find(m, site);
        if (!o || o->kind != KIND_SITE)
            return NULL;
        const struct site *s = o->data;
        if (s->customers >= 0 || s->load)
            return o;
        site = s->in;
    }
    return NULL;
}

void kind_references(struct arena *a, enum kind kind, const struct node *node, const void *data,
                     struct references *out)
{
    walk_references(a, kinds[kind].table, node, data, out);
    if (kind != KIND_HAZARD || !hazard_needs_site(data))
        return;
    for (size_t i = 0; i < out->n; i++)
        if (text_equal(out->at[i].path, "site"))
            out->at[i].trace = false;
}
