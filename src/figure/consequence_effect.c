/* SPDX-License-Identifier: GPL-3.0-or-later */
/* From amounts to effects: how often it comes to each outcome or end, times what that amounts to,
 * over the horizon and in each year. Owns nothing. */
#include "figure/counting.h"

node_id counting_node(const struct counting *c, figure_id id)
{
    return figure_at(c->f, id)->node;
}

node_id counting_sum(struct counting *c, size_t n, const node_id *nodes, struct dim d)
{
    if (n == 0)
        return compile_const(&c->b, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(c->f->graph, OP_SUM, n, nodes);
}

node_id counting_product(struct counting *c, node_id x, node_id y)
{
    return graph_op2(c->f->graph, OP_MULTIPLY, x, y);
}

node_id counting_number(struct counting *c, int64_t n)
{
    char number[32];
    return compile_const(&c->b, (double)n, dim_number,
                         arena_str(c->f->arena, text_double(number, (double)n)));
}

/* --- from amounts to effects --- */

void counting_slots(struct counting *c)
{
    const struct hazard_exports *x = c->of;
    if (!x->of_year)
        return;
    const struct compiled *often = compiled_part(&c->b, c->hazard->id, PART_FREQUENCY);
    const struct frequency_exports *f = often->exports;
    c->n_slots = x->n_yearly;
    c->slots = NEW_ARRAY(c->f->arena, c->n_slots, struct slot);
    for (size_t s = 0; s < c->n_slots; s++) {
        size_t window = f->yearly && x->end_in ? x->span.of_year[s] : s;
        c->slots[s] = (struct slot){
            .label = figure_at(c->f, x->yearly[s])->q1,
            .frequency = f->yearly ? f->yearly[s] : f->mean,
            .ends = x->end_in ? x->end_in + window * x->n_ends : NULL,
        };
    }
}

static node_id end_node(const struct counting *c, const struct slot *slot, size_t e)
{
    return counting_node(c, slot && slot->ends ? slot->ends[e] : c->of->ends[e].probability);
}

/* Probability of an outcome in a slot: the sum over its ends. */
static node_id probability_in(struct counting *c, const struct slot *slot, size_t outcome)
{
    node_id *nodes = NEW_ARRAY(c->f->arena, c->of->n_ends, node_id);
    size_t n = 0;
    for (size_t e = 0; e < c->of->n_ends; e++)
        if (c->of->ends[e].outcome_index == outcome)
            nodes[n++] = end_node(c, slot, e);
    return counting_sum(c, n, nodes, dim_number);
}

/* The frequency of the hazard times this is the effect of an outcome that differs by end. */
static node_id over_ends(struct counting *c, const struct slot *slot, const node_id *at_end,
                         struct dim d)
{
    node_id *nodes = NEW_ARRAY(c->f->arena, c->of->n_ends, node_id);
    size_t n = 0;
    for (size_t e = 0; e < c->of->n_ends; e++)
        if (at_end[e] != NODE_NONE)
            nodes[n++] = counting_product(c, end_node(c, slot, e), at_end[e]);
    return counting_sum(c, n, nodes, d);
}

/* slot NULL: the mean over the horizon. */
static node_id outcome_effect(struct counting *c, const struct slot *slot, size_t k,
                              const struct amount *a, struct dim d)
{
    if (a->at_end) {
        node_id often = slot ? slot->frequency : counting_node(c, c->of->frequency);
        return counting_product(c, often, over_ends(c, slot, a->at_end, d));
    }
    if (!slot)
        return counting_product(c, counting_node(c, c->of->frequency_of[k]), a->whole);
    return counting_product(c, counting_product(c, slot->frequency, probability_in(c, slot, k)),
                            a->whole);
}

static node_id effect_node(struct counting *c, const struct slot *slot, const struct amount *all,
                           struct dim d)
{
    node_id *nodes = NEW_ARRAY(c->f->arena, c->data->outcomes.n, node_id);
    struct dim rate = dim_divide(d, dim_time);
    size_t n = 0;
    for (size_t k = 0; k < c->data->outcomes.n; k++)
        if (all[k].at_end || all[k].whole != NODE_NONE)
            nodes[n++] = outcome_effect(c, slot, k, &all[k], d);
    return counting_sum(c, n, nodes, rate);
}

/* What is counted in one year has no "per year" in its unit. */
bool effect_is_of_a_year(enum property p)
{
    return p == PROPERTY_INTERRUPTIONS || p == PROPERTY_MOMENTARY || p == PROPERTY_CUSTOMER_TIME ||
           p == PROPERTY_NOT_SUPPLIED;
}

static node_id as_figure(struct counting *c, enum property p, node_id effect)
{
    return effect_is_of_a_year(p) ? counting_product(c, effect, c->one_year) : effect;
}

static const figure_id *yearly_effect(struct counting *c, enum property p, const char *of,
                                      const struct amount *all, struct dim d)
{
    figure_id *ids = NEW_ARRAY(c->f->arena, c->n_slots, figure_id);
    for (size_t s = 0; s < c->n_slots; s++) {
        const char *label = c->slots[s].label;
        node_id n = as_figure(c, p, effect_node(c, &c->slots[s], all, d));
        ids[s] = compiled_add(&c->b, p, of ? of : label, of ? label : NULL, n, NULL, NULL);
    }
    return ids;
}

/* d: of an amount. Yearly figures where asked for, or the mean that holds in all years. */
struct consequence *counting_add(struct counting *c, enum property p, const char *of,
                                 const struct amount *all, struct dim d, bool yearly)
{
    struct consequence *x = array_push(c->f->arena, &c->effects);
    node_id mean = as_figure(c, p, effect_node(c, NULL, all, d));
    *x = (struct consequence){.property = p, .of = of};
    x->mean = compiled_add(&c->b, p, of, NULL, mean, NULL, NULL);
    if (yearly && c->n_slots)
        x->yearly = yearly_effect(c, p, of, all, d);
    else if (yearly)
        x->yearly = arena_copy(c->f->arena, &x->mean, sizeof x->mean);
    return x;
}

struct amount *counting_amounts(const struct counting *c)
{
    struct amount *all = NEW_ARRAY(c->f->arena, c->data->outcomes.n, struct amount);
    for (size_t k = 0; k < c->data->outcomes.n; k++)
        all[k].whole = NODE_NONE;
    return all;
}

const struct outcome *counting_outcome(const struct counting *c, size_t k)
{
    return ROW(struct outcome, c->data->outcomes, k);
}

static bool same_effect(const struct consequence *x, enum property p, const char *of)
{
    return x->property == p && (x->of == of || (x->of && of && text_equal(x->of, of)));
}

const struct consequence *effect_find(size_t n, const struct consequence *all, enum property p,
                                      const char *of)
{
    for (size_t i = 0; i < n; i++)
        if (same_effect(&all[i], p, of))
            return &all[i];
    return NULL;
}
