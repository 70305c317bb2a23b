/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sums over hazards of what they do, beside harm to people: interruptions and the indices of
 * them, and risk by perspective and category; of the register and of a site. Owns nothing. */
#include "figure/supply.h"

#include <stdlib.h>

#include "figure/over_hazards.h"

static node_id node_of(const struct building *b, figure_id id)
{
    return figure_at(b->figures, id)->node;
}

/* Customers that the register serves; NODE_NONE: it does not say. */
static node_id customers_served(struct building *b)
{
    int64_t served = b->figures->base->settings->customers_served;
    char number[32];
    if (served <= 0)
        return NODE_NONE;
    const char *text = arena_str(b->figures->arena, text_double(number, (double)served));
    return compile_const(b, (double)served, dim_number, text);
}

static figure_id add_per_customer(struct building *b, enum property p, figure_id sum,
                                  node_id served)
{
    node_id x = graph_op2(b->figures->graph, OP_DIVIDE, node_of(b, sum), served);
    return compiled_add(b, p, NULL, NULL, x, NULL, NULL);
}

/* Sums, and what they are for each customer of the register. */
static struct supply add_supply(struct building *b, const struct over *o)
{
    struct supply s = {
        .interruptions = over_add(b, o, PROPERTY_INTERRUPTIONS, NULL),
        .momentary = over_add(b, o, PROPERTY_MOMENTARY, NULL),
        .customer_time = over_add(b, o, PROPERTY_CUSTOMER_TIME, NULL),
        .not_supplied = over_add(b, o, PROPERTY_NOT_SUPPLIED, NULL),
        .saifi = FIGURE_NONE,
        .saidi = FIGURE_NONE,
        .caidi = FIGURE_NONE,
        .asai = FIGURE_NONE,
        .maifi = FIGURE_NONE,
    };
    node_id served = customers_served(b);
    if (served == NODE_NONE)
        return s;
    s.saifi = add_per_customer(b, PROPERTY_SAIFI, s.interruptions, served);
    s.saidi = add_per_customer(b, PROPERTY_SAIDI, s.customer_time, served);
    s.maifi = add_per_customer(b, PROPERTY_MAIFI, s.momentary, served);
    return s;
}

/* --- the register --- */

static void begin_register(struct building *b, const struct over *o, const char *part)
{
    compiled_begin_part(o->f, o->base, model_find(o->f->base, REGISTER_ID), REGISTER_ID, part, b);
}

static const struct compiled *known_part(const struct over *o, const char *id, const char *part)
{
    struct building under = {.figures = o->f, .variant = o->base};
    return compiled_part(&under, id, part);
}

static void add_indices(struct building *b, struct supply *s)
{
    struct graph *g = b->figures->graph;
    if (s->saifi == FIGURE_NONE)
        return;
    node_id year = compile_const(b, 1, dim_time, "1 a"), saidi = node_of(b, s->saidi);
    node_id caidi = graph_op2(g, OP_RATIO, saidi, node_of(b, s->saifi));
    node_id asai = graph_op1(g, OP_COMPLEMENT, graph_op2(g, OP_DIVIDE, saidi, year));
    s->caidi = compiled_add(b, PROPERTY_CAIDI, NULL, NULL, caidi, NULL, NULL);
    s->asai = compiled_add(b, PROPERTY_ASAI, NULL, NULL, asai, NULL, NULL);
}

static const struct compiled *compile_supply(const struct over *o)
{
    struct supply *s = NEW(o->f->arena, struct supply);
    struct building b;
    begin_register(&b, o, PART_SUPPLY);
    *s = add_supply(&b, o);
    add_indices(&b, s);
    b.unit->exports = s;
    b.unit->main = s->interruptions;
    compiled_end(&b);
    return b.unit;
}

ohmen_status figures_supply(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct supply *out, ohmen_error *e)
{
    struct over o;
    ohmen_status status = over_hazards(f, n, hazards, &o, e);
    if (status != OHMEN_OK)
        return status;
    const struct compiled *known = known_part(&o, REGISTER_ID, PART_SUPPLY);
    *out = *(const struct supply *)(known ? known : compile_supply(&o))->exports;
    return OHMEN_OK;
}

/* --- accounts --- */

static int by_text(const void *p, const void *q)
{
    return text_compare(*(const char *const *)p, *(const char *const *)q);
}

/* Every category of these hazards once, in byte order. */
static size_t find_categories(const struct over *o, const char *const **out)
{
    struct strmap seen = {0};
    for (size_t i = 0; i < o->n; i++) {
        const struct consequence_exports *x = o->parts[i]->exports;
        for (size_t k = 0; k < x->n; k++)
            if (x->effects[k].property == PROPERTY_CATEGORY)
                strmap_set(o->f->arena, &seen, x->effects[k].of, NULL);
    }
    const char **all = NEW_ARRAY(o->f->arena, seen.n, const char *);
    for (size_t i = 0; i < seen.n; i++)
        all[i] = seen.at[i].key;
    if (seen.n > 1)
        qsort(all, seen.n, sizeof *all, by_text);
    *out = all;
    return seen.n;
}

static figure_id *add_borne(struct building *b, const struct over *o)
{
    const struct rows *rows = &o->f->base->settings->perspectives;
    figure_id *ids = NEW_ARRAY(o->f->arena, rows->n, figure_id);
    for (size_t i = 0; i < rows->n; i++)
        ids[i] = over_add(b, o, PROPERTY_BORNE, rows->keys[i]);
    return ids;
}

static struct accounts add_accounts(struct building *b, const struct over *o)
{
    struct accounts x = {.borne = add_borne(b, o)};
    x.n_categories = find_categories(o, &x.categories);
    figure_id *ids = NEW_ARRAY(o->f->arena, x.n_categories, figure_id);
    for (size_t i = 0; i < x.n_categories; i++)
        ids[i] = over_add(b, o, PROPERTY_CATEGORY, x.categories[i]);
    x.by_category = ids;
    return x;
}

static const struct compiled *compile_accounts(const struct over *o)
{
    struct accounts *x = NEW(o->f->arena, struct accounts);
    struct building b;
    begin_register(&b, o, PART_ACCOUNTS);
    *x = add_accounts(&b, o);
    b.unit->exports = x;
    b.unit->main = FIGURE_NONE;
    compiled_end(&b);
    return b.unit;
}

ohmen_status figures_accounts(struct figures *f, size_t n, const struct compiled *const *hazards,
                              struct accounts *out, ohmen_error *e)
{
    struct over o;
    ohmen_status status = over_hazards(f, n, hazards, &o, e);
    if (status != OHMEN_OK)
        return status;
    const struct compiled *known = known_part(&o, REGISTER_ID, PART_ACCOUNTS);
    *out = *(const struct accounts *)(known ? known : compile_accounts(&o))->exports;
    return OHMEN_OK;
}

/* --- sites --- */

/* Sites do not contain themselves. */
bool site_is_in(const struct model *m, const char *site, const char *at)
{
    while (site && !text_equal(site, at)) {
        const struct site *s = model_get(m, KIND_SITE, site);
        site = s ? s->in : NULL;
    }
    return site != NULL;
}

static struct over hazards_at(const struct over *o, const char *site)
{
    struct over at = {.f = o->f, .base = o->base};
    const struct compiled **hazards = NEW_ARRAY(o->f->arena, o->n, const struct compiled *);
    at.parts = NEW_ARRAY(o->f->arena, o->n, const struct compiled *);
    for (size_t i = 0; i < o->n; i++) {
        const struct hazard *h = o->hazards[i]->object->data;
        if (!site_is_in(o->f->base, h->site, site))
            continue;
        hazards[at.n] = o->hazards[i];
        at.parts[at.n++] = o->parts[i];
    }
    at.hazards = hazards;
    return at;
}

static figure_id add_risk(struct building *b, const struct over *o)
{
    node_id *nodes = NEW_ARRAY(o->f->arena, o->n, node_id);
    for (size_t i = 0; i < o->n; i++)
        nodes[i] = node_of(b, o->hazards[i]->main);
    node_id sum = o->n == 0   ? compile_const(b, 0, dim_money_rate, NULL)
                  : o->n == 1 ? nodes[0]
                              : graph_op(o->f->graph, OP_SUM, o->n, nodes);
    return compiled_add(b, PROPERTY_RISK, NULL, NULL, sum, NULL, NULL);
}

static const struct compiled *compile_at_site(const struct over *all, const struct object *site)
{
    struct site_sums *x = NEW(all->f->arena, struct site_sums);
    struct over at = hazards_at(all, site->id);
    struct building b;
    compiled_begin_part(all->f, all->base, site, site->id, PART_SITE, &b);
    x->n_hazards = at.n;
    x->risk = add_risk(&b, &at);
    x->accounts = add_accounts(&b, &at);
    x->supply = add_supply(&b, &at);
    b.unit->exports = x;
    b.unit->main = x->risk;
    compiled_end(&b);
    return b.unit;
}

ohmen_status figures_site(struct figures *f, const struct object *site, size_t n,
                          const struct compiled *const *hazards, struct site_sums *out,
                          ohmen_error *e)
{
    struct over o;
    ohmen_status status = over_hazards(f, n, hazards, &o, e);
    if (status != OHMEN_OK)
        return status;
    const struct compiled *known = known_part(&o, site->id, PART_SITE);
    *out = *(const struct site_sums *)(known ? known : compile_at_site(&o, site))->exports;
    return OHMEN_OK;
}

ohmen_status compile_site_sums(struct figures *f, const struct variant *v, const struct object *o,
                               ohmen_error *e)
{
    struct over all;
    (void)v;
    ohmen_status status = over_all_hazards(f, &all, e);
    if (status == OHMEN_OK && !known_part(&all, o->id, PART_SITE))
        compile_at_site(&all, o);
    return status;
}
