/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Interruptions of supply and harm to people: a part of each hazard, and sums over the register.
 * Owns nothing. */
#include "figure/consequences.h"

#include <math.h>

#include "figure/compile.h"

/* IEEE 1366-2012: an interruption longer than this is sustained, where the register says
 * nothing else. */
static const double FIVE_MINUTES = 5.0 / 525600;

/* --- one hazard --- */

struct counting {
    struct figures *f;
    struct building b;
    const struct compiled *hazard;
    const struct hazard *data;
    const struct hazard_exports *of;
    struct consequence_exports *out;
    node_id one_year;
};

static node_id sum(struct building *b, size_t n, const node_id *nodes, struct dim d)
{
    if (n == 0)
        return compile_const(b, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(b->figures->graph, OP_SUM, n, nodes);
}

static node_id product(struct building *b, node_id x, node_id y)
{
    return graph_op2(b->figures->graph, OP_MULTIPLY, x, y);
}

/* How often an outcome happens in a year: a number. */
static node_id in_a_year(struct counting *c, size_t k)
{
    return product(&c->b, figure_at(c->f, c->of->frequency_of[k])->node, c->one_year);
}

static double threshold(const struct figures *f)
{
    const struct quantity *q = f->base->settings->sustained_over;
    return q ? expr_constant(q->expr) : FIVE_MINUTES;
}

/* `x` where the row lasts longer than the threshold, 0 elsewhere; or the other way round. */
static node_id if_sustained(struct counting *c, node_id lasts, node_id x, bool sustained)
{
    struct building *b = &c->b;
    struct graph *g = c->f->graph;
    node_id nothing = compile_const(b, 0, graph_dim(g, x), NULL);
    double longer = nextafter(threshold(c->f), INFINITY); /* longer than it, not as long */
    node_id args[] = {lasts, compile_const(b, 0, dim_time, NULL), sustained ? nothing : x,
                      compile_const(b, longer, dim_time, NULL), sustained ? x : nothing};
    return graph_op(g, OP_LOOKUP, 5, args);
}

struct rows_of_year {
    ARRAY(node_id) interruptions;
    ARRAY(node_id) momentary;
    ARRAY(node_id) customer_time;
    ARRAY(node_id) not_supplied;
};

static void add_customers(struct counting *c, const struct interruption *row, node_id often,
                          node_id lasts, struct rows_of_year *rows)
{
    struct building *b = &c->b;
    char number[32];
    node_id customers =
        compile_const(b, (double)row->customers, dim_number,
                      arena_str(c->f->arena, text_double(number, (double)row->customers)));
    node_id hit = product(b, often, customers);
    *array_push(c->f->arena, &rows->interruptions) = if_sustained(c, lasts, hit, true);
    *array_push(c->f->arena, &rows->momentary) = if_sustained(c, lasts, hit, false);
    *array_push(c->f->arena, &rows->customer_time) =
        if_sustained(c, lasts, product(b, hit, lasts), true);
}

static void add_outcome(struct counting *c, size_t k, struct rows_of_year *rows)
{
    const struct outcome *o = ROW(struct outcome, c->data->outcomes, k);
    node_id often = in_a_year(c, k);
    for (size_t i = 0; i < o->interruptions.n; i++) {
        const struct interruption *row = ROW(struct interruption, o->interruptions, i);
        node_id lasts = compile_quantity(&c->b, row->lasts);
        if (row->customers > 0)
            add_customers(c, row, often, lasts, rows);
        if (row->load)
            *array_push(c->f->arena, &rows->not_supplied) =
                product(&c->b, product(&c->b, often, compile_quantity(&c->b, row->load)), lasts);
    }
}

static figure_id add_sum(struct counting *c, enum property p, size_t n, const node_id *nodes,
                         struct dim d)
{
    return compiled_add(&c->b, p, NULL, NULL, sum(&c->b, n, nodes, d), NULL, NULL);
}

static void add_interruptions(struct counting *c)
{
    struct rows_of_year rows = {0};
    struct consequence_exports *x = c->out;
    for (size_t k = 0; k < c->data->outcomes.n; k++)
        add_outcome(c, k, &rows);
    x->interruptions =
        add_sum(c, PROPERTY_INTERRUPTIONS, rows.interruptions.n, rows.interruptions.at, dim_number);
    x->momentary = add_sum(c, PROPERTY_MOMENTARY, rows.momentary.n, rows.momentary.at, dim_number);
    x->customer_time =
        add_sum(c, PROPERTY_CUSTOMER_TIME, rows.customer_time.n, rows.customer_time.at, dim_time);
    x->not_supplied =
        add_sum(c, PROPERTY_NOT_SUPPLIED, rows.not_supplied.n, rows.not_supplied.at, dim_energy);
}

/* --- people --- */

static const struct harm *harm_of(const struct outcome *o, const char *group)
{
    for (size_t i = 0; i < o->harm.n; i++)
        if (text_equal(o->harm.keys[i], group))
            return ROW(struct harm, o->harm, i);
    return NULL;
}

static bool is_harmed(const struct hazard *h, const char *group)
{
    for (size_t k = 0; k < h->outcomes.n; k++)
        if (harm_of(ROW(struct outcome, h->outcomes, k), group))
            return true;
    return false;
}

/* Sum over outcomes of frequency x present x harm. */
static node_id risk_of_person(struct counting *c, const char *group, bool death)
{
    struct building *b = &c->b;
    node_id *parts = NEW_ARRAY(c->f->arena, c->data->outcomes.n, node_id);
    size_t n = 0;
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct harm *h = harm_of(ROW(struct outcome, c->data->outcomes, k), group);
        const struct quantity *q = h ? death ? h->death : h->injury : NULL;
        if (!q)
            continue;
        node_id often = figure_at(c->f, c->of->frequency_of[k])->node;
        node_id there = product(b, often, compile_quantity(b, h->present));
        parts[n++] = product(b, there, compile_quantity(b, q));
    }
    return sum(b, n, parts, dim_frequency);
}

static node_id times_persons(struct building *b, node_id risk, const char *group)
{
    const struct group_of_people *g = model_get(b->variant->model, KIND_GROUP, group);
    char number[32];
    const char *text = text_double(number, (double)g->persons);
    node_id persons =
        compile_const(b, (double)g->persons, dim_number, arena_str(b->figures->arena, text));
    return product(b, risk, persons);
}

static struct harm_to add_harm(struct counting *c, const char *group)
{
    struct building *b = &c->b;
    node_id death = risk_of_person(c, group, true);
    struct harm_to x = {.group = group};
    x.death = compiled_add(b, PROPERTY_DEATH, group, NULL, death, NULL, NULL);
    x.injury =
        compiled_add(b, PROPERTY_INJURY, group, NULL, risk_of_person(c, group, false), NULL, NULL);
    x.fatalities = compiled_add(b, PROPERTY_FATALITIES, group, NULL, times_persons(b, death, group),
                                NULL, NULL);
    return x;
}

/* Groups of the register, and those that a variant adds are none of it. */
static void add_people(struct counting *c)
{
    const struct objects *groups = &c->f->base->of[KIND_GROUP];
    struct consequence_exports *x = c->out;
    x->harm = NEW_ARRAY(c->f->arena, groups->n, struct harm_to);
    for (size_t i = 0; i < groups->n; i++)
        if (is_harmed(c->data, groups->at[i]->id))
            x->harm[x->n_harm++] = add_harm(c, groups->at[i]->id);
}

static void compile_consequences_unit(struct figures *f, const struct compiled *hazard)
{
    struct consequence_exports *x = NEW(f->arena, struct consequence_exports);
    struct counting c = {.f = f, .hazard = hazard, .data = hazard->object->data, .out = x};
    c.of = hazard->exports;
    compiled_begin_part(f, hazard->variant, hazard->object, hazard->id, PART_CONSEQUENCES, &c.b);
    c.one_year = compile_const(&c.b, 1, dim_time, "1 a");
    add_interruptions(&c);
    add_people(&c);
    c.b.unit->exports = x;
    c.b.unit->main = x->interruptions;
    compiled_end(&c.b);
}

ohmen_status figures_consequences(struct figures *f, const struct variant *v, const char *hazard,
                                  const struct compiled **out, ohmen_error *e)
{
    const struct compiled *u;
    ohmen_status status = figures_compile(f, v, hazard, &u, e);
    if (status != OHMEN_OK)
        return status;
    struct building under = {.figures = f, .variant = u->variant};
    if (!compiled_part(&under, hazard, PART_CONSEQUENCES))
        compile_consequences_unit(f, u);
    *out = compiled_part(&under, hazard, PART_CONSEQUENCES);
    return OHMEN_OK;
}

ohmen_status compile_consequences(struct figures *f, const struct variant *v,
                                  const struct object *o, ohmen_error *e)
{
    const struct compiled *unused;
    return figures_consequences(f, v, o->id, &unused, e);
}

/* --- the register --- */

static ohmen_status all_consequences(struct figures *f, size_t n,
                                     const struct compiled *const *hazards,
                                     const struct consequence_exports **out, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < n; i++) {
        const struct compiled *part = NULL;
        status = figures_consequences(f, hazards[i]->variant, hazards[i]->id, &part, e);
        out[i] = part ? part->exports : NULL;
    }
    return status;
}

/* The sum of one figure of each hazard. */
static figure_id total(struct building *b, size_t n, const struct consequence_exports *const *parts,
                       size_t offset, enum property p, struct dim d)
{
    node_id *nodes = NEW_ARRAY(b->figures->arena, n, node_id);
    for (size_t i = 0; i < n; i++) {
        figure_id id = *(const figure_id *)((const char *)parts[i] + offset);
        nodes[i] = figure_at(b->figures, id)->node;
    }
    return compiled_add(b, p, NULL, NULL, sum(b, n, nodes, d), NULL, NULL);
}

static node_id node_of(const struct building *b, figure_id id)
{
    return figure_at(b->figures, id)->node;
}

static void add_indices(struct building *b, struct supply *s)
{
    struct figures *f = b->figures;
    struct graph *g = f->graph;
    int64_t served = f->base->settings->customers_served;
    char number[32];
    s->saifi = s->saidi = s->caidi = s->asai = s->maifi = FIGURE_NONE;
    if (served <= 0)
        return;
    node_id all = compile_const(b, (double)served, dim_number,
                                arena_str(f->arena, text_double(number, (double)served)));
    node_id year = compile_const(b, 1, dim_time, "1 a");
    node_id saifi = graph_op2(g, OP_DIVIDE, node_of(b, s->interruptions), all);
    node_id saidi = graph_op2(g, OP_DIVIDE, node_of(b, s->customer_time), all);
    node_id maifi = graph_op2(g, OP_DIVIDE, node_of(b, s->momentary), all);
    s->saifi = compiled_add(b, PROPERTY_SAIFI, NULL, NULL, saifi, NULL, NULL);
    s->saidi = compiled_add(b, PROPERTY_SAIDI, NULL, NULL, saidi, NULL, NULL);
    s->caidi = compiled_add(b, PROPERTY_CAIDI, NULL, NULL, graph_op2(g, OP_RATIO, saidi, saifi),
                            NULL, NULL);
    node_id lost = graph_op2(g, OP_DIVIDE, saidi, year);
    s->asai =
        compiled_add(b, PROPERTY_ASAI, NULL, NULL, graph_op1(g, OP_COMPLEMENT, lost), NULL, NULL);
    s->maifi = compiled_add(b, PROPERTY_MAIFI, NULL, NULL, maifi, NULL, NULL);
}

static struct supply compile_supply(struct building *b, size_t n,
                                    const struct consequence_exports *const *parts)
{
#define TOTAL(member, p, d) total(b, n, parts, offsetof(struct consequence_exports, member), p, d)
    struct supply s = {
        .interruptions = TOTAL(interruptions, PROPERTY_INTERRUPTIONS, dim_number),
        .momentary = TOTAL(momentary, PROPERTY_MOMENTARY, dim_number),
        .customer_time = TOTAL(customer_time, PROPERTY_CUSTOMER_TIME, dim_time),
        .not_supplied = TOTAL(not_supplied, PROPERTY_NOT_SUPPLIED, dim_energy),
    };
#undef TOTAL
    add_indices(b, &s);
    return s;
}

ohmen_status figures_supply(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct supply *out, ohmen_error *e)
{
    const struct variant *base;
    const struct consequence_exports **parts =
        NEW_ARRAY(f->arena, n, const struct consequence_exports *);
    ohmen_status status = figures_variant(f, 0, NULL, &base, e);
    if (status == OHMEN_OK)
        status = all_consequences(f, n, hazards, parts, e);
    if (status != OHMEN_OK)
        return status;
    struct building b = {.figures = f, .variant = base};
    const struct compiled *known = compiled_part(&b, REGISTER_ID, PART_SUPPLY);
    if (!known) {
        struct supply *s = NEW(f->arena, struct supply);
        compiled_begin_part(f, base, model_find(f->base, REGISTER_ID), REGISTER_ID, PART_SUPPLY,
                            &b);
        *s = compile_supply(&b, n, parts);
        b.unit->exports = s;
        b.unit->main = s->interruptions;
        compiled_end(&b);
        known = b.unit;
    }
    *out = *(const struct supply *)known->exports;
    return OHMEN_OK;
}

/* --- groups --- */

/* The sum over hazards of what each does to a person of the group. */
static node_id over_all(struct building *b, size_t n,
                        const struct consequence_exports *const *parts, const char *group,
                        size_t offset)
{
    node_id *nodes = NEW_ARRAY(b->figures->arena, n, node_id);
    size_t n_nodes = 0;
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < parts[i]->n_harm; k++)
            if (text_equal(parts[i]->harm[k].group, group))
                nodes[n_nodes++] =
                    node_of(b, *(const figure_id *)((const char *)&parts[i]->harm[k] + offset));
    return sum(b, n_nodes, nodes, dim_frequency);
}

static struct harm_to compile_people(struct figures *f, const struct variant *base,
                                     const struct object *group, size_t n,
                                     const struct consequence_exports *const *parts)
{
    struct building b;
    struct harm_to *x = NEW(f->arena, struct harm_to);
    compiled_begin(f, base, group, group->id, &b);
    node_id death = over_all(&b, n, parts, group->id, offsetof(struct harm_to, death));
    node_id injury = over_all(&b, n, parts, group->id, offsetof(struct harm_to, injury));
    x->group = group->id;
    x->death = compiled_add(&b, PROPERTY_DEATH, NULL, NULL, death, NULL, NULL);
    x->injury = compiled_add(&b, PROPERTY_INJURY, NULL, NULL, injury, NULL, NULL);
    x->fatalities = compiled_add(&b, PROPERTY_FATALITIES, NULL, NULL,
                                 times_persons(&b, death, group->id), NULL, NULL);
    b.unit->exports = x;
    b.unit->main = x->death;
    compiled_end(&b);
    return *x;
}

ohmen_status figures_people(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct harm_to **out, ohmen_error *e)
{
    const struct objects *groups = &f->base->of[KIND_GROUP];
    const struct variant *base;
    const struct consequence_exports **parts =
        NEW_ARRAY(f->arena, n, const struct consequence_exports *);
    ohmen_status status = figures_variant(f, 0, NULL, &base, e);
    if (status == OHMEN_OK)
        status = all_consequences(f, n, hazards, parts, e);
    if (status != OHMEN_OK)
        return status;
    struct building under = {.figures = f, .variant = base};
    struct harm_to *all = NEW_ARRAY(f->arena, groups->n, struct harm_to);
    for (size_t i = 0; i < groups->n; i++) {
        const struct compiled *known = compiled_of(&under, groups->at[i]->id);
        all[i] = known ? *(const struct harm_to *)known->exports
                       : compile_people(f, base, groups->at[i], n, parts);
    }
    *out = all;
    return OHMEN_OK;
}
