/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The section of a decision: present values of damage and cost for each alternative, and beside the
 * money that the chosen perspective bears what every perspective bears, customers without supply,
 * and deaths. All hazards and options that it reads were compiled before. */
#include "decide/worth.h"

#include "decide/avoided.h"
#include "decide/cost.h"

/* --- what is avoided --- */

static struct measure measure_of(enum property p, const char *of)
{
    struct measure m = {p, of, dim_money_rate, dim_money};
    if (p == PROPERTY_CUSTOMER_TIME)
        m.dim = m.sum = dim_time;
    if (p == PROPERTY_FATALITIES || p == PROPERTY_DEATH) {
        m.dim = dim_frequency;
        m.sum = dim_number;
    }
    return m;
}

static node_id node_of(const struct worth *x, figure_id id)
{
    return figure_at(x->f, id)->node;
}

static figure_id add(struct worth *x, enum property p, const struct alternative *alt,
                     const char *of, node_id n)
{
    return compiled_add(&x->b, p, alt->name, of, n, NULL, NULL);
}

/* What each perspective of the register makes of an alternative: who pays for it bears its cost,
 * and the cost is a cost to society too. */
static void add_perspectives(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    const struct rows *rows = &x->f->base->settings->perspectives;
    alt->of = NEW_ARRAY(x->f->arena, rows->n, struct perspective_worth);
    for (size_t i = 0; alt->n && i < rows->n; i++) {
        struct measure m = measure_of(PROPERTY_BORNE, rows->keys[i]);
        struct perspective_worth *of = &alt->of[i];
        node_id benefit = measure_avoided(x, &m, s);
        node_id net = graph_op2(x->f->graph, OP_SUBTRACT, benefit, node_of(x, alt->present_cost));
        of->benefit = add(x, PROPERTY_BENEFIT, alt, rows->keys[i], benefit);
        of->net = add(x, PROPERTY_NET, alt, rows->keys[i], net);
        of->avoids =
            add(x, PROPERTY_AVOIDS, alt, rows->keys[i], measure_avoided_yearly(x, &m, alt));
    }
}

static void add_supply(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    struct measure m = measure_of(PROPERTY_CUSTOMER_TIME, NULL);
    alt->avoids_time = add(x, PROPERTY_AVOIDS_TIME, alt, NULL, measure_avoided_yearly(x, &m, alt));
    alt->present_time = add(x, PROPERTY_PRESENT_TIME, alt, NULL, measure_avoided(x, &m, s));
}

static node_id over_groups(struct worth *x, const struct alternative *alt,
                           const struct stretches *s)
{
    struct measure m = measure_of(PROPERTY_FATALITIES, NULL);
    node_id *nodes = NEW_ARRAY(x->f->arena, x->w->groups.n, node_id);
    for (size_t i = 0; i < x->w->groups.n; i++) {
        m.of = x->w->groups.at[i].id;
        nodes[i] = s ? measure_avoided(x, &m, s) : measure_avoided_yearly(x, &m, alt);
    }
    return worth_sum(x, x->w->groups.n, nodes, s ? m.sum : m.dim);
}

/* Risk of a person over all hazards of the register, under the alternative. */
static void add_people(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    struct measure m = measure_of(PROPERTY_DEATH, NULL);
    alt->individual = NEW_ARRAY(x->f->arena, x->w->groups.n, figure_id);
    if (x->w->groups.n == 0)
        return;
    for (size_t i = 0; i < x->w->groups.n; i++) {
        m.of = x->w->groups.at[i].id;
        node_id risk_now = node_of(x, x->w->groups.at[i].now);
        alt->individual[i] = x->w->groups.at[i].now;
        if (alt->n)
            alt->individual[i] = add(
                x, PROPERTY_DEATH, alt, m.of,
                graph_op2(x->f->graph, OP_SUBTRACT, risk_now, measure_avoided_yearly(x, &m, alt)));
    }
    if (alt->n == 0)
        return;
    alt->avoids_fatalities =
        add(x, PROPERTY_AVOIDS_FATALITIES, alt, NULL, over_groups(x, alt, NULL));
    alt->present_fatalities =
        add(x, PROPERTY_PRESENT_FATALITIES, alt, NULL, over_groups(x, alt, s));
}

/* --- the whole --- */

static void add_money(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    struct graph *g = x->f->graph;
    const struct alternative *nothing = &x->w->alternatives.at[0];
    struct measure m = measure_of(PROPERTY_RISK, NULL);
    node_id benefit = measure_avoided(x, &m, s), cost = cost_present(&x->money, alt), damage;
    if (alt->n == 0)
        damage = measure_now(x, &m);
    else
        damage = graph_op2(g, OP_SUBTRACT, node_of(x, nothing->present_damage), benefit);
    node_id total = graph_op2(g, OP_ADD, damage, cost);
    alt->present_damage = add(x, PROPERTY_PRESENT_DAMAGE, alt, NULL, damage);
    alt->present_cost = add(x, PROPERTY_PRESENT_COST, alt, NULL, cost);
    alt->annual_cost =
        add(x, PROPERTY_ANNUAL_COST, alt, NULL,
            graph_op2(g, OP_DIVIDE, cost, money_annuity(&x->money, 0, x->w->horizon)));
    alt->total = add(x, PROPERTY_TOTAL, alt, NULL, total);
    if (alt->n == 0)
        return;
    node_id net = graph_op2(g, OP_SUBTRACT, benefit, cost);
    alt->benefit = add(x, PROPERTY_BENEFIT, alt, NULL, benefit);
    alt->net = add(x, PROPERTY_NET, alt, NULL, net);
    alt->avoids = add(x, PROPERTY_AVOIDS, alt, NULL, measure_avoided_yearly(x, &m, alt));
    if (cost_is_something(&x->money, alt))
        alt->ratio = add(x, PROPERTY_RATIO, alt, NULL, ratio_of_means(&x->b, benefit, cost));
}

static void add_alternative(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    alternative_clear(alt);
    add_money(x, alt, s);
    add_perspectives(x, alt, s);
    if (alt->n)
        add_supply(x, alt, s);
    add_people(x, alt, s);
}

/* --- options together --- */

static const struct alternative *alternative_alone(const struct weighing *w, const char *option)
{
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (w->alternatives.at[i].n == 1 && text_equal(w->alternatives.at[i].options[0], option))
            return &w->alternatives.at[i];
    return NULL;
}

/* What a combination is worth beyond its options one by one; not where one of them is not possible
 * alone. */
static void add_together(struct worth *x, struct alternative *alt)
{
    node_id *alone = NEW_ARRAY(x->f->arena, alt->n, node_id);
    for (size_t i = 0; i < alt->n; i++) {
        const struct alternative *one = alternative_alone(x->w, alt->options[i]);
        if (!one)
            return;
        alone[i] = node_of(x, one->net);
    }
    node_id apart = worth_sum(x, alt->n, alone, dim_money);
    alt->together = add(x, PROPERTY_TOGETHER, alt, NULL,
                        graph_op2(x->f->graph, OP_SUBTRACT, node_of(x, alt->net), apart));
}

void worth_compile(struct figures *f, struct weighing *w, const struct variant *base,
                   const struct stretches *stretches)
{
    struct worth x = {.f = f, .w = w};
    figures_settings(f); /* a section of its own, to be there before this one is open */
    compiled_begin(f, base, model_find(f->base, w->id), w->id, &x.b);
    money_begin(&x.money, f, &x.b, w->horizon);
    for (size_t i = 0; i < w->alternatives.n; i++)
        add_alternative(&x, &w->alternatives.at[i], &stretches[i]);
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (w->alternatives.at[i].n > 1)
            add_together(&x, &w->alternatives.at[i]);
    x.b.unit->exports = w;
    compiled_end(&x.b);
    w->unit = x.b.unit;
}
