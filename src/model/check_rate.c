/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rates: what they are per, priors, and whether events and exposure go together. What
 * depends on the day of evaluation is checked when a figure is made (evidence/posterior.h). */
#include "model/check.h"
#include "model/prior.h"

/* Says whether it is so. */
static bool expect_dim(struct checking *c, const struct quantity *q, struct dim want,
                       const struct node *node)
{
    if (!q || dim_equal(q->dim, want))
        return true;
    diag_add(c->diags, node->place, "expected %s, found %s",
             dim_words(c->arena, &c->model->units, want),
             dim_words(c->arena, &c->model->units, q->dim));
    return false;
}

static bool check_prior_dims(struct checking *c, const struct prior *p, const struct node *node,
                             struct dim want)
{
    const struct {
        const char *key;
        const struct quantity *q;
    } all[] = {{"mean", p->mean}, {"median", p->median}, {"p5", p->p5},
               {"p50", p->p50},   {"p95", p->p95},       {"p99", p->p99}};
    bool fine = true;
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        fine = expect_dim(c, all[i].q, want, node_get(node, all[i].key)) && fine;
    return fine && (!p->weight || dim_is_number(p->weight->dim)) &&
           (!p->error_factor || dim_is_number(p->error_factor->dim));
}

/* An improper prior has no mean; a fixed one learns nothing. */
static void check_learning(struct checking *c, const struct object *o,
                           const struct prior_distribution *d, const struct node *prior)
{
    const struct rate *r = o->data;
    if (d->family == PRIOR_GAMMA && d->rate == 0 && r->events < 0 && r->exposure.n == 0)
        diag_add(c->diags, prior->place,
                 "a Jeffreys prior says nothing by itself: it needs \"events\" and \"exposure\"");
    if (d->family == PRIOR_FIXED && r->events >= 0)
        diag_add(c->diags, node_get(o->node, "events")->place,
                 "a fixed rate learns nothing from events: leave them out, or choose another "
                 "prior");
}

static void check_prior(struct checking *c, const struct object *o, struct dim want)
{
    const struct rate *r = o->data;
    const struct node *node = node_get(o->node, "prior");
    struct prior_distribution d;
    const char *key = NULL;
    if (!check_prior_dims(c, r->prior, node, want))
        return;
    const char *why = prior_resolve(c->arena, r->prior, &d, &key);
    if (!why)
        check_learning(c, o, &d, node);
    else
        diag_add(c->diags, key ? node_get(node, key)->place : node->place, "%s", why);
}

static void check_exposures(struct checking *c, const struct object *o, struct dim want)
{
    const struct rate *r = o->data;
    const struct node *node = node_get(o->node, "exposure");
    for (size_t i = 0; i < r->exposure.n; i++) {
        const struct exposure *x = ROW(struct exposure, r->exposure, i);
        const struct node *row = node->pairs[i].value;
        struct dim amount = dim_divide(dim_divide(dim_number, want), dim_time);
        expect_dim(c, x->amount, amount, node_get(row, "amount"));
        if (x->to != DAY_NONE && x->to < x->from)
            diag_add(c->diags, node_get(row, "to")->place, "this stretch ends before it begins");
    }
}

/* Events were counted over an exposure, and go with a prior. */
static void check_counts(struct checking *c, const struct object *o)
{
    const struct rate *r = o->data;
    const struct node *events = node_get(o->node, "events"), *over = node_get(o->node, "exposure");
    const struct node *first = events ? events : over;
    if (first && r->is)
        diag_add(c->diags, first->place,
                 "events and exposure go with a prior; \"is\" states the rate as it is");
    else if (r->events >= 0 && r->exposure.n == 0)
        diag_add(c->diags, events->place,
                 "events need \"exposure\": over how much, from when on, were they counted?");
    else if (r->events < 0 && r->exposure.n > 0)
        diag_add(c->diags, over->place,
                 "exposure needs \"events\": how many were counted? (0 is a number too)");
}

void check_rate(struct checking *c, const struct object *o)
{
    const struct rate *r = o->data;
    struct dim want;
    check_counts(c, o);
    if (!check_dim_of(c, o->id, &want))
        return;
    if (want.e[DIM_TIME] != -1)
        diag_add(c->diags, node_get(o->node, "per")->place,
                 "a rate is per time too: expected units such as section a, found \"%s\"", r->per);
    expect_dim(c, r->is, want, node_get(o->node, "is"));
    if (r->prior)
        check_prior(c, o, want);
    check_exposures(c, o, want);
}
