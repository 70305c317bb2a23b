/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sums over hazards. Owns nothing. */
#include "figure/over_hazards.h"

#include "figure/counting.h"

ohmen_status over_hazards(struct figures *f, size_t n, const struct compiled *const *hazards,
                          struct over *out, ohmen_error *e)
{
    struct over o = {.f = f, .n = n, .hazards = hazards};
    ohmen_status status = figures_variant(f, 0, NULL, &o.base, e);
    o.parts = NEW_ARRAY(f->arena, n, const struct compiled *);
    for (size_t i = 0; status == OHMEN_OK && i < n; i++)
        status = figures_consequences(f, hazards[i]->variant, hazards[i]->id, &o.parts[i], e);
    if (status == OHMEN_OK)
        *out = o;
    return status;
}

ohmen_status over_all_hazards(struct figures *f, struct over *out, ohmen_error *e)
{
    const struct objects *all = &f->base->of[KIND_HAZARD];
    const struct compiled **hazards = NEW_ARRAY(f->arena, all->n, const struct compiled *);
    const struct variant *base;
    ohmen_status status = figures_variant(f, 0, NULL, &base, e);
    for (size_t i = 0; status == OHMEN_OK && i < all->n; i++)
        status = figures_compile(f, base, all->at[i]->id, &hazards[i], e);
    return status == OHMEN_OK ? over_hazards(f, all->n, hazards, out, e) : status;
}

node_id over_sum(struct building *b, const struct over *o, enum property p, const char *of)
{
    node_id *nodes = NEW_ARRAY(o->f->arena, o->n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < o->n; i++) {
        const struct consequence *x = consequence_of(o->parts[i], p, of);
        if (x)
            nodes[n++] = figure_at(o->f, x->mean)->node;
    }
    if (n == 0)
        return compile_const(b, 0, effect_dim(p), NULL);
    return n == 1 ? nodes[0] : graph_op(o->f->graph, OP_SUM, n, nodes);
}

figure_id over_add(struct building *b, const struct over *o, enum property p, const char *of)
{
    return compiled_add(b, p, of, NULL, over_sum(b, o, p, of), NULL, NULL);
}
