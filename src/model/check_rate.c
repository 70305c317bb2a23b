/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rates: what they are per, priors, growth and ageing, kinds of fault, and whether events and
 * exposure go together. What depends on the day of evaluation is checked when a figure is made
 * (evidence/posterior.h, evidence/trend.h). */
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

/* --- growth and ageing --- */

/* What lies outside is no rate of a plant, and would take its powers out of all numbers. */
#define GREATEST_GROWTH 9.0 /* tenfold each year */
#define LEAST_GROWTH (-0.9) /* a tenth each year */
#define GREATEST_AGEING 100.0

static void check_growth(struct checking *c, const struct object *o)
{
    const struct rate *r = o->data;
    double growth = r->growth ? expr_constant(r->growth->expr) : 0;
    if (growth < LEAST_GROWTH || growth > GREATEST_GROWTH)
        diag_add(c->diags, node_get(o->node, "growth")->place,
                 "growth lies between -90 %% and 900 %% per a");
}

/* An option may renew what ages: then its exposure was that of the old one. */
static void check_youth(struct checking *c, const struct object *o)
{
    const struct rate *r = o->data;
    const struct node *node = node_get(o->node, "exposure");
    char since[DATE_TEXT];
    for (size_t i = 0; i < r->exposure.n && !c->model->below; i++)
        if (ROW(struct exposure, r->exposure, i)->from < r->since)
            diag_add(c->diags, node_get(node->pairs[i].value, "from")->place,
                     "this stretch begins before what ages was there (\"since\" is %s)",
                     date_write(since, r->since));
}

static void check_ageing(struct checking *c, const struct object *o)
{
    const struct rate *r = o->data;
    const struct node *node = node_get(o->node, "ageing");
    if (!r->ageing)
        return;
    if (expr_constant(r->ageing->expr) > GREATEST_AGEING)
        diag_add(c->diags, node->place, "an exponent of ageing is at most 100");
    if (r->since == DAY_NONE)
        diag_add(c->diags, node->place,
                 "ageing needs \"since\": from which day on does the age count?");
    else
        check_youth(c, o);
}

/* --- kinds of fault --- */

/* Who uses the share of a kind was checked before the change. */
static void check_kinds_stay(struct checking *c, const struct object *o)
{
    const struct rate *before =
        c->model->below ? model_get(c->model->below, KIND_RATE, o->id) : NULL;
    const struct node *now = node_get(o->node, "kinds");
    for (size_t i = 0; before && i < before->kinds_of_fault.n; i++)
        if (!now || !node_get(now, before->kinds_of_fault.keys[i]))
            diag_add(c->diags, check_place(o, now),
                     "a change cannot take the kind \"%s\" from \"%s\": give it a count of 0",
                     before->kinds_of_fault.keys[i], o->id);
}

static void check_kinds(struct checking *c, const struct object *o)
{
    const struct rate *r = o->data;
    const struct node *kinds_node = node_get(o->node, "kinds");
    if (kinds_node && r->kinds_of_fault.n < 2)
        diag_add(c->diags, kinds_node->place, "shares need two kinds of fault or more, found %zu",
                 r->kinds_of_fault.n);
    if (r->kinds_prior >= 0 && !kinds_node)
        diag_add(c->diags, node_get(o->node, "kinds-prior")->place,
                 "\"kinds-prior\" goes with counts of \"kinds\"");
    check_kinds_stay(c, o);
}

void check_rate(struct checking *c, const struct object *o)
{
    const struct rate *r = o->data;
    struct dim want;
    check_counts(c, o);
    check_growth(c, o);
    check_ageing(c, o);
    check_kinds(c, o);
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
