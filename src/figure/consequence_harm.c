/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Harm to people: what a person of each group faces. Owns nothing. */
#include "figure/counting.h"

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

/* Presence and harm of one person in each outcome. */
struct exposed {
    struct amount *death, *injury, *fatalities;
};

/* What an outcome states of a group, as a figure. */
static node_id stated(struct counting *c, enum property p, size_t k, const char *group,
                      const struct quantity *q)
{
    return counting_node(c, compiled_add(&c->b, p, c->data->outcomes.keys[k], group,
                                         compile_quantity(&c->b, q), c->data->source,
                                         quantity_reads(c->f, q)));
}

static struct exposed exposed_of(struct counting *c, const char *group)
{
    const struct group_of_people *g = model_get(c->b.variant->model, KIND_GROUP, group);
    struct exposed x = {counting_amounts(c), counting_amounts(c), counting_amounts(c)};
    node_id persons = counting_number(c, g->persons);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct harm *h = harm_of(counting_outcome(c, k), group);
        if (!h)
            continue;
        node_id there = stated(c, PROPERTY_PRESENT, k, group, h->present);
        if (h->death) {
            x.death[k].whole =
                counting_product(c, there, stated(c, PROPERTY_DIES, k, group, h->death));
            x.fatalities[k].whole = counting_product(c, x.death[k].whole, persons);
        }
        if (h->injury)
            x.injury[k].whole =
                counting_product(c, there, stated(c, PROPERTY_INJURED, k, group, h->injury));
    }
    return x;
}

/* Each outcome in which somebody may die: individual-risk.GROUP.OUTCOME. */
static void add_deaths_of_outcomes(struct counting *c, const char *group,
                                   const struct amount *death)
{
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        struct amount *one = counting_amounts(c);
        if (death[k].whole == NODE_NONE)
            continue;
        one[k] = death[k];
        counting_add(c, PROPERTY_DEATH,
                     arena_printf(c->f->arena, "%s.%s", group, c->data->outcomes.keys[k]), one,
                     dim_number, false);
    }
}

static struct harm_to add_harm(struct counting *c, const char *group)
{
    struct exposed x = exposed_of(c, group);
    add_deaths_of_outcomes(c, group, x.death);
    return (struct harm_to){
        .group = group,
        .death = counting_add(c, PROPERTY_DEATH, group, x.death, dim_number, true)->mean,
        .injury = counting_add(c, PROPERTY_INJURY, group, x.injury, dim_number, false)->mean,
        .fatalities =
            counting_add(c, PROPERTY_FATALITIES, group, x.fatalities, dim_number, true)->mean,
    };
}

/* Groups of the register; those that a variant adds are none of it. */
void count_harm(struct counting *c, struct consequence_exports *x)
{
    const struct objects *groups = &c->f->base->of[KIND_GROUP];
    x->harm = NEW_ARRAY(c->f->arena, groups->n, struct harm_to);
    for (size_t i = 0; i < groups->n; i++)
        if (is_harmed(c->data, groups->at[i]->id) &&
            model_find(c->b.variant->model, groups->at[i]->id))
            x->harm[x->n_harm++] = add_harm(c, groups->at[i]->id);
}
