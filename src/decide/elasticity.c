/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Elasticities (elasticity.h), by one backward pass from the figure. Owns nothing beyond the arena
 * of the figures. */
#include "decide/elasticity.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "decide/turn_inputs.h"

#define MARK ".elasticity["

struct deriving {
    struct figures *f;
    const struct weighing *w;
    const char *of;
    figure_id figure;
    node_id root;
    double size;         /* of the figure */
    double *derivative;  /* of it, by node */
    struct prober *ties; /* whose targets are nodes at a tie */
};

/* --- which figure --- */

static ohmen_status find_figure(const struct figures *f, const struct weighing *w, const char *of,
                                figure_id *out, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, of);
    for (size_t i = 0; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[i];
        nearest_offer(&near, x->name);
        if (text_equal(x->name, of)) {
            *out = x->net == FIGURE_NONE ? x->present_damage : x->net;
            return OHMEN_OK;
        }
    }
    for (size_t i = 0; i < w->hazards.n; i++) {
        const struct weighed_hazard *h = &w->hazards.at[i];
        if (!h->now)
            continue;
        nearest_offer(&near, h->id);
        if (text_equal(h->id, of)) {
            *out = h->now->main;
            return OHMEN_OK;
        }
    }
    return error_set(e, OHMEN_UNKNOWN, "\"%s\" weighs no \"%s\"%s", w->id, of,
                     nearest_hint(f->arena, &near));
}

/* --- ties --- */

/* Do two arms of a node that counts give its value? */
static bool is_tie(const struct deriving *x, node_id n)
{
    const struct graph *g = x->f->graph;
    enum graph_op op = graph_at(g, n)->op;
    size_t level = 0;
    if ((op != OP_MIN && op != OP_MAX) || x->derivative[n] == 0)
        return false;
    for (uint32_t i = 0; i < graph_at(g, n)->n; i++)
        level += eval_value(x->f->eval, graph_args(g, n)[i]) == eval_value(x->f->eval, n);
    return level > 1;
}

static void find_ties(struct deriving *x)
{
    ARRAY(node_id) ties = {0};
    for (node_id n = 0; n <= x->root; n++)
        if (is_tie(x, n))
            *array_push(x->f->arena, &ties) = n;
    if (ties.n)
        x->ties = prober_new(x->f->arena, x->f->eval, ties.n, ties.at);
}

static bool meets_tie(const struct deriving *x, const struct turn_input *in)
{
    for (size_t i = 0; i < in->nodes.n; i++)
        if (x->ties && prober_leads(x->ties, in->nodes.at[i].node))
            return true;
    return false;
}

/* --- the whole --- */

static void add_elasticity(const struct deriving *x, const struct turn_input *in,
                           struct elasticities *out)
{
    double slope = 0;
    bool tie = meets_tie(x, in);
    if (!turn_is_stated(x->f, in->figure))
        return;
    for (size_t i = 0; i < in->nodes.n; i++)
        if (in->nodes.at[i].node <= x->root)
            slope += in->nodes.at[i].times * x->derivative[in->nodes.at[i].node];
    if (slope == 0 && !tie)
        return;
    *array_push(x->f->arena, out) = (struct elasticity){
        .name = arena_printf(x->f->arena, "%s" MARK "%s].%s", x->w->id, in->name, x->of),
        .input = in->figure,
        .of = x->of,
        .figure = x->figure,
        .now = in->now,
        .value = in->now * slope / x->size,
        .is_at_tie = tie,
    };
}

static int by_size(const void *p, const void *q)
{
    const struct elasticity *a = p, *b = q;
    if (fabs(a->value) != fabs(b->value))
        return fabs(a->value) > fabs(b->value) ? -1 : 1;
    return text_compare(a->name, b->name);
}

ohmen_status elasticities_find(struct figures *f, const struct weighing *w, const char *of,
                               struct elasticities *out, ohmen_error *e)
{
    struct deriving x = {.f = f, .w = w, .of = arena_str(f->arena, of)};
    struct turn_inputs inputs = {0};
    struct elasticities found = {0};
    ohmen_status status = find_figure(f, w, of, &x.figure, e);
    if (status != OHMEN_OK)
        return status;
    x.root = figure_at(f, x.figure)->node;
    x.size = fabs(eval_value(f->eval, x.root));
    if (x.size != 0) {
        x.derivative = NEW_ARRAY(f->arena, graph_size(f->graph), double);
        eval_backward(f->eval, x.root, x.derivative);
        find_ties(&x);
        turn_inputs_of(f, w, prober_new(f->arena, f->eval, 1, &x.root), &inputs);
    }
    for (size_t i = 0; i < inputs.n; i++)
        add_elasticity(&x, &inputs.at[i], &found);
    if (found.n > 1)
        qsort(found.at, found.n, sizeof *found.at, by_size);
    *out = found;
    return OHMEN_OK;
}

/* --- by name --- */

bool elasticity_is_named(const char *name)
{
    const char *mark = strstr(name, MARK);
    return mark && mark == strchr(name, '.');
}

/* What follows the bracket; names of inputs may hold brackets of made-up changes. */
static const char *subject(const char *name)
{
    const char *end = strrchr(name, ']');
    return end && end[1] == '.' ? end + 2 : "";
}

ohmen_status elasticity_find(struct figures *f, const char *name, struct elasticity *out,
                             ohmen_error *e)
{
    struct weighing *w;
    struct nearest near;
    struct elasticities all;
    const char *decision = arena_strn(f->arena, name, (size_t)(strstr(name, MARK) - name));
    ohmen_status status = weigh_ranked(f, decision, &w, e);
    if (status == OHMEN_OK)
        status = elasticities_find(f, w, subject(name), &all, e);
    if (status != OHMEN_OK)
        return status;
    nearest_init(&near, name);
    for (size_t i = 0; i < all.n; i++) {
        if (text_equal(all.at[i].name, name)) {
            *out = all.at[i];
            return OHMEN_OK;
        }
        nearest_offer(&near, all.at[i].name);
    }
    return error_set(e, OHMEN_UNKNOWN, "the decision \"%s\" has no elasticity \"%s\"%s", w->id,
                     name + strlen(w->id) + 1, nearest_hint(f->arena, &near));
}
