/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a hazard does, as a part of its own: damage by perspective and category, interruptions of
 * supply, harm to people. Owns nothing.
 *
 * An effect is a sum over outcomes of frequency times amount, or over ends where the amount
 * depends on the clearance time. */
#include "figure/consequences.h"

#include <math.h>
#include <stdlib.h>

#include "figure/compile.h"

/* IEEE 1366-2012: an interruption longer than this is sustained, where the register says
 * nothing else. */
static const double FIVE_MINUTES = 5.0 / 525600;

/* What is longer than the limit by less than this share of it is as long: 1 h / 12 and 5 min may
 * differ by rounding. */
static const double SAME_TIME = 1e-9;

/* How often it comes to each end in one slot of hazard_exports.yearly. */
struct slot {
    const char *label; /* "2031" */
    node_id frequency; /* of the hazard */
    const figure_id *ends;
};

struct counting {
    struct figures *f;
    struct building b;
    const struct compiled *hazard;
    const struct hazard *data;
    const struct hazard_exports *of;
    node_id one_year;
    size_t n_slots; /* 0: all years are alike */
    struct slot *slots;
    ARRAY(struct consequence) effects;
};

/* What one outcome amounts to: one node, or one for each end. */
struct amount {
    node_id whole;         /* NODE_NONE: nothing, or by end */
    const node_id *at_end; /* by end, NODE_NONE of other outcomes; NULL: `whole` */
};

static node_id node_of(const struct counting *c, figure_id id)
{
    return figure_at(c->f, id)->node;
}

static node_id sum(struct counting *c, size_t n, const node_id *nodes, struct dim d)
{
    if (n == 0)
        return compile_const(&c->b, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(c->f->graph, OP_SUM, n, nodes);
}

static node_id product(struct counting *c, node_id x, node_id y)
{
    return graph_op2(c->f->graph, OP_MULTIPLY, x, y);
}

/* --- from amounts to effects --- */

static void find_slots(struct counting *c)
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
    return node_of(c, slot && slot->ends ? slot->ends[e] : c->of->ends[e].probability);
}

/* Probability of an outcome in a slot: the sum over its ends. */
static node_id probability_in(struct counting *c, const struct slot *slot, size_t outcome)
{
    node_id *nodes = NEW_ARRAY(c->f->arena, c->of->n_ends, node_id);
    size_t n = 0;
    for (size_t e = 0; e < c->of->n_ends; e++)
        if (c->of->ends[e].outcome_index == outcome)
            nodes[n++] = end_node(c, slot, e);
    return sum(c, n, nodes, dim_number);
}

/* The frequency of the hazard times this is the effect of an outcome that differs by end. */
static node_id over_ends(struct counting *c, const struct slot *slot, const node_id *at_end,
                         struct dim d)
{
    node_id *nodes = NEW_ARRAY(c->f->arena, c->of->n_ends, node_id);
    size_t n = 0;
    for (size_t e = 0; e < c->of->n_ends; e++)
        if (at_end[e] != NODE_NONE)
            nodes[n++] = product(c, end_node(c, slot, e), at_end[e]);
    return sum(c, n, nodes, d);
}

/* slot NULL: the mean over the horizon. */
static node_id outcome_effect(struct counting *c, const struct slot *slot, size_t k,
                              const struct amount *a, struct dim d)
{
    if (a->at_end) {
        node_id often = slot ? slot->frequency : node_of(c, c->of->frequency);
        return product(c, often, over_ends(c, slot, a->at_end, d));
    }
    if (!slot)
        return product(c, node_of(c, c->of->frequency_of[k]), a->whole);
    return product(c, product(c, slot->frequency, probability_in(c, slot, k)), a->whole);
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
    return sum(c, n, nodes, rate);
}

/* What is counted in one year has no "per year" in its unit. */
static bool is_of_a_year(enum property p)
{
    return p == PROPERTY_INTERRUPTIONS || p == PROPERTY_MOMENTARY || p == PROPERTY_CUSTOMER_TIME ||
           p == PROPERTY_NOT_SUPPLIED;
}

static node_id as_figure(struct counting *c, enum property p, node_id effect)
{
    return is_of_a_year(p) ? product(c, effect, c->one_year) : effect;
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
static struct consequence *add_effect(struct counting *c, enum property p, const char *of,
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

static struct amount *no_amounts(const struct counting *c)
{
    struct amount *all = NEW_ARRAY(c->f->arena, c->data->outcomes.n, struct amount);
    for (size_t k = 0; k < c->data->outcomes.n; k++)
        all[k].whole = NODE_NONE;
    return all;
}

static const struct outcome *outcome_at(const struct counting *c, size_t k)
{
    return ROW(struct outcome, c->data->outcomes, k);
}

/* --- damage --- */

static bool contains(const struct names *names, const char *name)
{
    for (size_t i = 0; i < names->n; i++)
        if (text_equal(names->at[i], name))
            return true;
    return false;
}

static const struct quantity *item_quantity(const struct damage_item *item)
{
    return item->is ? item->is : item->varies;
}

static bool is_timed(const struct damage_item *item)
{
    const struct quantity *q = item_quantity(item);
    return q->shape == SHAPE_EXPRESSION && expr_uses(q->expr, EXPR_CLEARANCE);
}

static const char *path_of(const struct counting *c, size_t e)
{
    return figure_at(c->f, c->of->ends[e].probability)->q1;
}

/* A figure that the hazard has where its perspective counts it, and else this part. */
static figure_id find_figure(const struct counting *c, enum property p, const char *q1,
                             const char *q2)
{
    figure_id id = compiled_figure(c->f, c->hazard, p, q1, q2);
    return id != FIGURE_NONE ? id : compiled_figure(c->f, c->b.unit, p, q1, q2);
}

static node_id clearance_at(struct counting *c, size_t e)
{
    const char *row = c->of->ends[e].row;
    figure_id id = find_figure(c, PROPERTY_CLEARANCE, row, NULL);
    size_t i = 0;
    if (id != FIGURE_NONE)
        return node_of(c, id);
    while (!text_equal(c->data->response.keys[i], row))
        i++;
    const struct quantity *in = ROW(struct response_row, c->data->response, i)->in;
    return node_of(c,
                   compiled_add(&c->b, PROPERTY_CLEARANCE, row, NULL, compile_quantity(&c->b, in),
                                c->data->source, quantity_reads(c->f, in)));
}

/* One item, at an end where it depends on the clearance time. */
static node_id item_node(struct counting *c, size_t k, size_t i, size_t e)
{
    const struct outcome *o = outcome_at(c, k);
    const struct damage_item *item = ROW(struct damage_item, o->damage, i);
    const struct quantity *q = item_quantity(item);
    const char *key = c->data->outcomes.keys[k], *name = o->damage.keys[i];
    if (is_timed(item))
        name = arena_printf(c->f->arena, "%s.at.%s", name, path_of(c, e));
    figure_id id = find_figure(c, PROPERTY_DAMAGE, key, name);
    if (id != FIGURE_NONE)
        return node_of(c, id);
    if (is_timed(item))
        c->b.clearance = clearance_at(c, e);
    return node_of(c, compiled_add(&c->b, PROPERTY_DAMAGE, key, name, compile_quantity(&c->b, q),
                                   item->source, quantity_reads(c->f, q)));
}

/* The items of an outcome that count, at one end; NODE_NONE where none does. */
static node_id items_at(struct counting *c, size_t k, const struct names *categories, size_t e)
{
    const struct outcome *o = outcome_at(c, k);
    node_id *nodes = NEW_ARRAY(c->f->arena, o->damage.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < o->damage.n; i++)
        if (contains(categories, ROW(struct damage_item, o->damage, i)->category))
            nodes[n++] = item_node(c, k, i, e);
    return n ? sum(c, n, nodes, dim_money) : NODE_NONE;
}

static bool any_timed(const struct counting *c, size_t k, const struct names *categories)
{
    const struct outcome *o = outcome_at(c, k);
    for (size_t i = 0; i < o->damage.n; i++) {
        const struct damage_item *item = ROW(struct damage_item, o->damage, i);
        if (contains(categories, item->category) && is_timed(item))
            return true;
    }
    return false;
}

static struct amount *damage_amounts(struct counting *c, const struct names *categories)
{
    struct amount *all = no_amounts(c);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        if (!any_timed(c, k, categories)) {
            all[k].whole = items_at(c, k, categories, 0);
            continue;
        }
        node_id *at_end = NEW_ARRAY(c->f->arena, c->of->n_ends, node_id);
        for (size_t e = 0; e < c->of->n_ends; e++)
            at_end[e] =
                c->of->ends[e].outcome_index == k ? items_at(c, k, categories, e) : NODE_NONE;
        all[k].at_end = at_end;
    }
    return all;
}

/* What the chosen perspective bears is the risk of the hazard itself. */
static void add_own_risk(struct counting *c, const char *perspective)
{
    struct consequence *x = array_push(c->f->arena, &c->effects);
    *x = (struct consequence){
        .property = PROPERTY_BORNE, .of = perspective, .yearly = c->of->yearly};
    x->mean =
        compiled_add(&c->b, PROPERTY_BORNE, perspective, NULL, node_of(c, c->of->risk), NULL, NULL);
}

static void add_perspectives(struct counting *c)
{
    const struct rows *rows = &c->f->base->settings->perspectives;
    for (size_t i = 0; i < rows->n; i++) {
        const struct names *categories = &((const struct names *)rows->at)[i];
        if (categories == c->f->categories)
            add_own_risk(c, rows->keys[i]);
        else
            add_effect(c, PROPERTY_BORNE, rows->keys[i], damage_amounts(c, categories), dim_money,
                       true);
    }
}

static int by_text(const void *p, const void *q)
{
    return text_compare(*(const char *const *)p, *(const char *const *)q);
}

/* Every category of the hazard once, in byte order. */
static struct names categories_of(const struct counting *c)
{
    size_t most = 0, n = 0;
    for (size_t k = 0; k < c->data->outcomes.n; k++)
        most += outcome_at(c, k)->damage.n;
    const char **all = NEW_ARRAY(c->f->arena, most, const char *);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct outcome *o = outcome_at(c, k);
        for (size_t i = 0; i < o->damage.n; i++) {
            struct names known = {.at = all, .n = n};
            const char *category = ROW(struct damage_item, o->damage, i)->category;
            if (!contains(&known, category))
                all[n++] = category;
        }
    }
    if (n > 1)
        qsort(all, n, sizeof *all, by_text);
    return (struct names){.at = all, .n = n};
}

static void add_categories(struct counting *c)
{
    struct names all = categories_of(c);
    for (size_t i = 0; i < all.n; i++) {
        struct names one = {.at = &all.at[i], .n = 1};
        add_effect(c, PROPERTY_CATEGORY, all.at[i], damage_amounts(c, &one), dim_money, false);
    }
}

/* --- interruptions --- */

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
    double longer = nextafter(threshold(c->f) * (1 + SAME_TIME), INFINITY);
    node_id args[] = {lasts, compile_const(b, 0, dim_time, NULL), sustained ? nothing : x,
                      compile_const(b, longer, dim_time, NULL), sustained ? x : nothing};
    return graph_op(g, OP_LOOKUP, 5, args);
}

/* How long each row of an outcome lasts, compiled once. */
static node_id **row_times(struct counting *c)
{
    node_id **all = NEW_ARRAY(c->f->arena, c->data->outcomes.n, node_id *);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct rows *rows = &outcome_at(c, k)->interruptions;
        all[k] = NEW_ARRAY(c->f->arena, rows->n, node_id);
        for (size_t i = 0; i < rows->n; i++)
            all[k][i] = compile_quantity(&c->b, ROW(struct interruption, *rows, i)->lasts);
    }
    return all;
}

static node_id count_node(struct counting *c, int64_t n)
{
    char number[32];
    return compile_const(&c->b, (double)n, dim_number,
                         arena_str(c->f->arena, text_double(number, (double)n)));
}

/* What a row counts for in one of the four sums; NODE_NONE: nothing. */
static node_id row_amount(struct counting *c, enum property p, const struct interruption *row,
                          node_id lasts)
{
    if (p == PROPERTY_NOT_SUPPLIED)
        return row->load ? product(c, compile_quantity(&c->b, row->load), lasts) : NODE_NONE;
    if (row->customers <= 0)
        return NODE_NONE;
    node_id customers = count_node(c, row->customers);
    if (p == PROPERTY_CUSTOMER_TIME)
        return if_sustained(c, lasts, product(c, customers, lasts), true);
    return if_sustained(c, lasts, customers, p == PROPERTY_INTERRUPTIONS);
}

static figure_id add_interruption(struct counting *c, enum property p, node_id *const *times,
                                  struct dim d, bool yearly)
{
    struct amount *all = no_amounts(c);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct rows *rows = &outcome_at(c, k)->interruptions;
        node_id *nodes = NEW_ARRAY(c->f->arena, rows->n, node_id);
        size_t n = 0;
        for (size_t i = 0; i < rows->n; i++) {
            node_id x = row_amount(c, p, ROW(struct interruption, *rows, i), times[k][i]);
            if (x != NODE_NONE)
                nodes[n++] = x;
        }
        if (n)
            all[k].whole = sum(c, n, nodes, d);
    }
    return add_effect(c, p, NULL, all, d, yearly)->mean;
}

static void add_interruptions(struct counting *c, struct consequence_exports *x)
{
    node_id **times = row_times(c);
    x->interruptions = add_interruption(c, PROPERTY_INTERRUPTIONS, times, dim_number, false);
    x->momentary = add_interruption(c, PROPERTY_MOMENTARY, times, dim_number, false);
    x->customer_time = add_interruption(c, PROPERTY_CUSTOMER_TIME, times, dim_time, true);
    x->not_supplied = add_interruption(c, PROPERTY_NOT_SUPPLIED, times, dim_energy, false);
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

/* Presence and harm of one person in each outcome. */
struct exposed {
    struct amount *death, *injury, *fatalities;
};

static struct exposed exposed_of(struct counting *c, const char *group)
{
    const struct group_of_people *g = model_get(c->b.variant->model, KIND_GROUP, group);
    struct exposed x = {no_amounts(c), no_amounts(c), no_amounts(c)};
    node_id persons = count_node(c, g->persons);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct harm *h = harm_of(outcome_at(c, k), group);
        if (!h)
            continue;
        node_id there = compile_quantity(&c->b, h->present);
        if (h->death) {
            x.death[k].whole = product(c, there, compile_quantity(&c->b, h->death));
            x.fatalities[k].whole = product(c, x.death[k].whole, persons);
        }
        if (h->injury)
            x.injury[k].whole = product(c, there, compile_quantity(&c->b, h->injury));
    }
    return x;
}

static struct harm_to add_harm(struct counting *c, const char *group)
{
    struct exposed x = exposed_of(c, group);
    return (struct harm_to){
        .group = group,
        .death = add_effect(c, PROPERTY_DEATH, group, x.death, dim_number, true)->mean,
        .injury = add_effect(c, PROPERTY_INJURY, group, x.injury, dim_number, false)->mean,
        .fatalities =
            add_effect(c, PROPERTY_FATALITIES, group, x.fatalities, dim_number, true)->mean,
    };
}

/* Groups of the register; those that a variant adds are none of it. */
static void add_people(struct counting *c, struct consequence_exports *x)
{
    const struct objects *groups = &c->f->base->of[KIND_GROUP];
    x->harm = NEW_ARRAY(c->f->arena, groups->n, struct harm_to);
    for (size_t i = 0; i < groups->n; i++)
        if (is_harmed(c->data, groups->at[i]->id) &&
            model_find(c->b.variant->model, groups->at[i]->id))
            x->harm[x->n_harm++] = add_harm(c, groups->at[i]->id);
}

/* --- the hazard as it is in one operating state, or where there are none --- */

static void begin(struct counting *c, struct figures *f, const struct compiled *hazard)
{
    *c = (struct counting){.f = f, .hazard = hazard, .data = hazard->object->data};
    c->of = hazard->exports;
    compiled_begin_part(f, hazard->variant, hazard->object, hazard->id, PART_CONSEQUENCES, &c->b);
    c->one_year = compile_const(&c->b, 1, dim_time, "1 a");
}

static void finish(struct counting *c, struct consequence_exports *x)
{
    x->n = c->effects.n;
    x->effects = c->effects.at;
    c->b.unit->exports = x;
    c->b.unit->main = x->interruptions;
    compiled_end(&c->b);
}

static void compile_plain(struct figures *f, const struct compiled *hazard)
{
    struct consequence_exports *x = NEW(f->arena, struct consequence_exports);
    struct counting c;
    begin(&c, f, hazard);
    find_slots(&c);
    add_perspectives(&c);
    add_categories(&c);
    add_interruptions(&c, x);
    add_people(&c, x);
    finish(&c, x);
}

/* --- means over operating states --- */

static const struct consequence_exports *exports_in(const struct counting *c, size_t state)
{
    const struct compiled *u = c->of->states[state].unit;
    struct building under = {.figures = c->f, .variant = u ? u->variant : NULL};
    return u ? compiled_part(&under, u->id, PART_CONSEQUENCES)->exports : NULL;
}

static bool same_effect(const struct consequence *x, enum property p, const char *of)
{
    return x->property == p && (x->of == of || (x->of && of && text_equal(x->of, of)));
}

static const struct consequence *find_effect(size_t n, const struct consequence *all,
                                             enum property p, const char *of)
{
    for (size_t i = 0; i < n; i++)
        if (same_effect(&all[i], p, of))
            return &all[i];
    return NULL;
}

static struct dim effect_dim(enum property p)
{
    if (p == PROPERTY_BORNE || p == PROPERTY_CATEGORY)
        return dim_money_rate;
    if (p == PROPERTY_CUSTOMER_TIME)
        return dim_time;
    if (p == PROPERTY_NOT_SUPPLIED)
        return dim_energy;
    return is_of_a_year(p) ? dim_number : dim_frequency;
}

/* The figure of an effect in one state: its mean, or in one year; FIGURE_NONE: it has none. */
static figure_id effect_in(const struct counting *c, size_t state, const struct consequence *like,
                           bool one_year, uint32_t year)
{
    const struct consequence_exports *x = exports_in(c, state);
    const struct consequence *found =
        x ? find_effect(x->n, x->effects, like->property, like->of) : NULL;
    if (!found)
        return FIGURE_NONE;
    if (!one_year)
        return found->mean;
    const struct hazard_exports *h = c->of->states[state].unit->exports;
    return found->yearly[h->of_year ? h->of_year[year] : 0];
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
            nodes[n++] = product(c, c->of->states[i].weight, node_of(c, id));
    }
    return sum(c, n, nodes, effect_dim(like->property));
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
            if (find_effect(c->effects.n, c->effects.at, like->property, like->of))
                continue;
            bool own = like->property == PROPERTY_BORNE && c->f->perspective &&
                       text_equal(like->of, c->f->perspective);
            if (own)
                add_own_risk(c, like->of);
            else
                add_weighted(c, like);
        }
    }
}

static figure_id mean_effect(const struct counting *c, enum property p, const char *of)
{
    return find_effect(c->effects.n, c->effects.at, p, of)->mean;
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
        if (find_effect(c->effects.n, c->effects.at, PROPERTY_DEATH, id))
            x->harm[x->n_harm++] = (struct harm_to){
                .group = id,
                .death = mean_effect(c, PROPERTY_DEATH, id),
                .injury = mean_effect(c, PROPERTY_INJURY, id),
                .fatalities = mean_effect(c, PROPERTY_FATALITIES, id),
            };
    }
}

static void compile_mean(struct figures *f, const struct compiled *hazard)
{
    struct consequence_exports *x = NEW(f->arena, struct consequence_exports);
    struct counting c;
    begin(&c, f, hazard);
    add_all_weighted(&c);
    list_weighted(&c, x);
    finish(&c, x);
}

/* --- for others --- */

static ohmen_status compile_states_first(struct figures *f, const struct hazard_exports *x,
                                         ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < x->n_states; i++) {
        const struct compiled *u = x->states[i].unit, *unused;
        if (u)
            status = figures_consequences(f, u->variant, u->id, &unused, e);
    }
    return status;
}

ohmen_status figures_consequences(struct figures *f, const struct variant *v, const char *hazard,
                                  const struct compiled **out, ohmen_error *e)
{
    const struct compiled *u;
    ohmen_status status = figures_compile(f, v, hazard, &u, e);
    if (status != OHMEN_OK)
        return status;
    const struct hazard_exports *x = u->exports;
    struct building under = {.figures = f, .variant = u->variant};
    *out = compiled_part(&under, hazard, PART_CONSEQUENCES);
    if (*out)
        return OHMEN_OK;
    status = compile_states_first(f, x, e);
    if (status != OHMEN_OK)
        return status;
    if (x->n_states)
        compile_mean(f, u);
    else
        compile_plain(f, u);
    *out = compiled_part(&under, hazard, PART_CONSEQUENCES);
    return OHMEN_OK;
}

ohmen_status compile_consequences(struct figures *f, const struct variant *v,
                                  const struct object *o, ohmen_error *e)
{
    const struct compiled *unused;
    return figures_consequences(f, v, o->id, &unused, e);
}

const struct consequence *consequence_of(const struct compiled *part, enum property p,
                                         const char *of)
{
    const struct consequence_exports *x = part->exports;
    return find_effect(x->n, x->effects, p, of);
}
