/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Effects of a hazard under operating states: the mean of those in each state, by shares of
 * time. Owns nothing. */
#include "figure/counting.h"

static const struct consequence_exports *exports_in(const struct counting *c, size_t state)
{
    const struct compiled *u = c->of->states[state].unit;
    struct building under = {.figures = c->f, .variant = u ? u->variant : NULL};
    return u ? compiled_part(&under, u->id, PART_CONSEQUENCES)->exports : NULL;
}

struct dim effect_dim(enum property p)
{
    if (p == PROPERTY_BORNE || p == PROPERTY_CATEGORY)
        return dim_money_rate;
    if (p == PROPERTY_CUSTOMER_TIME)
        return dim_time;
    if (p == PROPERTY_NOT_SUPPLIED)
        return dim_energy;
    return effect_is_of_a_year(p) ? dim_number : dim_frequency;
}

/* The figure of an effect in one state: its mean, or in one year; FIGURE_NONE: it has none. */
static figure_id effect_in(const struct counting *c, size_t state, const struct consequence *like,
                           bool one_year, uint32_t year)
{
    const struct consequence_exports *x = exports_in(c, state);
    const struct consequence *found =
        x ? effect_find(x->n, x->effects, like->property, like->of) : NULL;
    if (!found)
        return FIGURE_NONE;
    if (!one_year)
        return found->mean;
    const struct hazard_exports *h = c->of->states[state].unit->exports;
    return found->yearly[h->of_year ? h->of_year[year] : 0];
}

/* The share of a state: in one year, or over all of them. */
static node_id weight_in(const struct counting *c, size_t state, bool one_year, uint32_t year)
{
    const struct hazard_state *s = &c->of->states[state];
    return one_year && s->weight_in ? s->weight_in[year] : s->weight;
}

/* The sum over the states of their share of time times the effect. */
static node_id weighted(struct counting *c, const struct consequence *like, bool one_year,
                        uint32_t year)
{
    node_id *nodes = NEW_ARRAY(c->f->arena, c->of->n_states, node_id);
    size_t n = 0;
    for (size_t i = 0; i < c->of->n_states; i++) {
        figure_id id = effect_in(c, i, like, one_year, year);
        if (id != FIGURE_NONE)
            nodes[n++] = counting_product(c, weight_in(c, i, one_year, year), counting_node(c, id));
    }
    return counting_sum(c, n, nodes, effect_dim(like->property));
}

/* The slots of a mean over states are years of the horizon. */
static const figure_id *weighted_years(struct counting *c, const struct consequence *like)
{
    figure_id *ids = NEW_ARRAY(c->f->arena, c->of->n_yearly, figure_id);
    for (uint32_t y = 0; y < c->of->n_yearly; y++) {
        const char *label = figure_at(c->f, c->of->yearly[y])->q1;
        ids[y] = compiled_add(&c->b, like->property, like->of ? like->of : label,
                              like->of ? label : NULL, weighted(c, like, true, y), NULL, NULL);
    }
    return ids;
}

static figure_id add_weighted(struct counting *c, const struct consequence *like)
{
    struct consequence *x = array_push(c->f->arena, &c->effects);
    *x = (struct consequence){.property = like->property, .of = like->of};
    x->mean = compiled_add(&c->b, like->property, like->of, NULL, weighted(c, like, false, 0), NULL,
                           NULL);
    if (like->yearly && c->of->of_year)
        x->yearly = weighted_years(c, like);
    else if (like->yearly)
        x->yearly = arena_copy(c->f->arena, &x->mean, sizeof x->mean);
    return x->mean;
}

/* Everything that some state has; what the chosen perspective bears is the hazard's own risk. */
static void add_all_weighted(struct counting *c)
{
    for (size_t i = 0; i < c->of->n_states; i++) {
        const struct consequence_exports *x = exports_in(c, i);
        for (size_t k = 0; x && k < x->n; k++) {
            const struct consequence *like = &x->effects[k];
            if (effect_find(c->effects.n, c->effects.at, like->property, like->of))
                continue;
            bool own = like->property == PROPERTY_BORNE && c->f->perspective &&
                       text_equal(like->of, c->f->perspective);
            if (own)
                count_own_risk(c, like->of);
            else
                add_weighted(c, like);
        }
    }
}

static figure_id mean_effect(const struct counting *c, enum property p, const char *of)
{
    return effect_find(c->effects.n, c->effects.at, p, of)->mean;
}

static void list_weighted(const struct counting *c, struct consequence_exports *x)
{
    const struct objects *groups = &c->f->base->of[KIND_GROUP];
    x->interruptions = mean_effect(c, PROPERTY_INTERRUPTIONS, NULL);
    x->momentary = mean_effect(c, PROPERTY_MOMENTARY, NULL);
    x->customer_time = mean_effect(c, PROPERTY_CUSTOMER_TIME, NULL);
    x->not_supplied = mean_effect(c, PROPERTY_NOT_SUPPLIED, NULL);
    x->harm = NEW_ARRAY(c->f->arena, groups->n, struct harm_to);
    for (size_t i = 0; i < groups->n; i++) {
        const char *id = groups->at[i]->id;
        if (effect_find(c->effects.n, c->effects.at, PROPERTY_DEATH, id))
            x->harm[x->n_harm++] = (struct harm_to){
                .group = id,
                .death = mean_effect(c, PROPERTY_DEATH, id),
                .injury = mean_effect(c, PROPERTY_INJURY, id),
                .fatalities = mean_effect(c, PROPERTY_FATALITIES, id),
            };
    }
}

void count_means(struct counting *c, struct consequence_exports *x)
{
    add_all_weighted(c);
    list_weighted(c, x);
}
