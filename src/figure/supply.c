/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sums over hazards of what they do: indices of supply of the register, and harm to each group of
 * people. Owns nothing. */
#include "figure/supply.h"

#include "figure/compile.h"

static node_id sum(struct building *b, size_t n, const node_id *nodes, struct dim d)
{
    if (n == 0)
        return compile_const(b, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(b->figures->graph, OP_SUM, n, nodes);
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

static node_id times_persons(struct building *b, node_id risk, const char *group)
{
    const struct group_of_people *g = model_get(b->variant->model, KIND_GROUP, group);
    char number[32];
    const char *text = text_double(number, (double)g->persons);
    node_id persons =
        compile_const(b, (double)g->persons, dim_number, arena_str(b->figures->arena, text));
    return graph_op2(b->figures->graph, OP_MULTIPLY, risk, persons);
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
