/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the worth of a decision leans on (lean.h). Owns nothing beyond the arena of the figures. */
#include "decide/lean.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "decide/turn_inputs.h"

#define MARK ".leans-on["

static const double ONE_PERCENT = 0.01;

/* The alternative that is looked at: the best one that does something; NULL: there is none. */
static const struct alternative *looked_at(const struct weighing *w)
{
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (w->alternatives.at[w->order[i]].n)
            return &w->alternatives.at[w->order[i]];
    return NULL;
}

static int by_movement(const void *p, const void *q)
{
    const struct lean *a = p, *b = q;
    if (fabs(a->one_percent) != fabs(b->one_percent))
        return fabs(a->one_percent) > fabs(b->one_percent) ? -1 : 1;
    return text_compare(a->name, b->name);
}

static void add_lean(struct figures *f, const struct weighing *w, const struct alternative *of,
                     const struct turn_input *in, const double *derivative, struct leans *out)
{
    node_id root = figure_at(f, of->net)->node;
    double slope = 0;
    /* How often a hazard occurs is made of what is stated, which is listed itself. */
    if (!turn_is_stated(f, in->figure))
        return;
    for (size_t i = 0; i < in->nodes.n; i++)
        if (in->nodes.at[i].node <= root)
            slope += in->nodes.at[i].times * derivative[in->nodes.at[i].node];
    if (slope == 0)
        return;
    *array_push(f->arena, out) = (struct lean){
        .name = arena_printf(f->arena, "%s" MARK "%s].%s", w->id, in->name, of->name),
        .input = in->figure,
        .of = of,
        .now = in->now,
        .one_percent = ONE_PERCENT * in->now * slope,
    };
}

void leans_find(struct figures *f, const struct weighing *w, struct leans *out)
{
    const struct alternative *of = looked_at(w);
    struct turn_inputs inputs = {0};
    if (!of)
        return;
    node_id root = figure_at(f, of->net)->node;
    double *derivative = NEW_ARRAY(f->arena, graph_size(f->graph), double);
    eval_backward(f->eval, root, derivative);
    turn_inputs_of(f, w, prober_new(f->arena, f->eval, 1, &root), &inputs);
    for (size_t i = 0; i < inputs.n; i++)
        add_lean(f, w, of, &inputs.at[i], derivative, out);
    if (out->n > 1)
        qsort(out->at, out->n, sizeof *out->at, by_movement);
}

bool lean_is_named(const char *name)
{
    const char *mark = strstr(name, MARK);
    return mark && mark == strchr(name, '.');
}

ohmen_status lean_find(struct figures *f, const char *name, struct lean *out, ohmen_error *e)
{
    struct weighing *w;
    struct nearest near;
    struct leans all = {0};
    const char *decision = arena_strn(f->arena, name, (size_t)(strstr(name, MARK) - name));
    ohmen_status status = weigh_ranked(f, decision, &w, e);
    if (status != OHMEN_OK)
        return status;
    leans_find(f, w, &all);
    nearest_init(&near, name);
    for (size_t i = 0; i < all.n; i++) {
        if (text_equal(all.at[i].name, name)) {
            *out = all.at[i];
            return OHMEN_OK;
        }
        nearest_offer(&near, all.at[i].name);
    }
    return error_set(e, OHMEN_UNKNOWN, "the decision \"%s\" does not lean on \"%s\"%s", w->id,
                     name + strlen(w->id) + 1, nearest_hint(f->arena, &near));
}
