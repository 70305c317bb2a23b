/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The section of a decision: present values of damage and cost for each alternative.
 * All hazards and options that it reads were compiled before. */
#include "decide/worth.h"

#include <math.h>

#include "decide/cost.h"

struct worth {
    struct figures *f;
    struct weighing *w;
    struct building b;
    struct money money;
};

static node_id sum(struct worth *x, size_t n, const node_id *nodes, struct dim d)
{
    if (n == 0)
        return compile_const(&x->b, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(x->f->graph, OP_SUM, n, nodes);
}

static const struct hazard_exports *exports_of(const struct compiled *hazard)
{
    return hazard->exports;
}

/* Does its risk change from year to year? */
static bool is_yearly(const struct compiled *hazard)
{
    return hazard && exports_of(hazard)->of_year;
}

/* Present value of the damage of a hazard whose risk is one of each year. */
static node_id yearly_damage(struct worth *x, const struct compiled *hazard, double from, double to)
{
    struct figures *f = x->f;
    const struct hazard_exports *h = exports_of(hazard);
    node_id *risks = NEW_ARRAY(f->arena, h->n_yearly, node_id);
    for (size_t i = 0; i < h->n_yearly; i++)
        risks[i] = figure_at(f, h->yearly[i])->node;
    struct years y = {.from = from, .to = to, .of_year = h->of_year + (size_t)floor(from)};
    y.n_years = to > from ? (size_t)(ceil(to) - floor(from)) : 0;
    return money_years(&x->money, h->n_yearly, risks, &y);
}

static node_id risk_node(const struct worth *x, const struct compiled *hazard)
{
    return figure_at(x->f, hazard->main)->node;
}

/* Damage of one hazard over a stretch; NODE_NONE where it is not there. */
static node_id damage_over(struct worth *x, const struct compiled *hazard, double from, double to)
{
    if (!hazard)
        return NODE_NONE;
    if (is_yearly(hazard))
        return yearly_damage(x, hazard, from, to);
    return graph_op2(x->f->graph, OP_MULTIPLY, money_annuity(&x->money, from, to),
                     risk_node(x, hazard));
}

/* Damage over the horizon as the register is now: hazards whose risk stays take one annuity
 * together. */
static node_id damage_now(struct worth *x)
{
    node_id *risks = NEW_ARRAY(x->f->arena, x->w->hazards.n, node_id);
    node_id *parts = NEW_ARRAY(x->f->arena, x->w->hazards.n + 1, node_id);
    size_t n = 0, n_parts = 0;
    for (size_t i = 0; i < x->w->hazards.n; i++) {
        const struct compiled *now = x->w->hazards.at[i].now;
        if (now && is_yearly(now))
            parts[n_parts++] = yearly_damage(x, now, 0, x->w->horizon);
        else if (now)
            risks[n++] = risk_node(x, now);
    }
    if (n > 0 || n_parts == 0)
        parts[n_parts++] =
            graph_op2(x->f->graph, OP_MULTIPLY, money_annuity(&x->money, 0, x->w->horizon),
                      sum(x, n, risks, dim_money_rate));
    return sum(x, n_parts, parts, dim_money);
}

/* The hazard under a variant; NULL where that has no such hazard. */
static const struct compiled *hazard_under(struct worth *x, const struct variant *v, const char *id)
{
    struct building under = {.figures = x->f, .variant = v};
    return model_find(v->model, id) ? compiled_of(&under, id) : NULL;
}

/* Risk before less risk after, of hazards whose risk stays; one that is not there has none.
 * Never both NULL. */
static node_id risk_avoided(struct worth *x, const struct compiled *before,
                            const struct compiled *after)
{
    if (!after)
        return risk_node(x, before);
    if (!before)
        return graph_op1(x->f->graph, OP_NEGATE, risk_node(x, after));
    return graph_op2(x->f->graph, OP_SUBTRACT, risk_node(x, before), risk_node(x, after));
}

/* Damage before less damage after over a stretch. */
static node_id damage_avoided(struct worth *x, const struct compiled *before,
                              const struct compiled *after, double from, double to)
{
    struct graph *g = x->f->graph;
    if (!is_yearly(before) && !is_yearly(after))
        return graph_op2(g, OP_MULTIPLY, money_annuity(&x->money, from, to),
                         risk_avoided(x, before, after));
    node_id was = damage_over(x, before, from, to), is = damage_over(x, after, from, to);
    if (is == NODE_NONE)
        return was;
    return was == NODE_NONE ? graph_op1(g, OP_NEGATE, is) : graph_op2(g, OP_SUBTRACT, was, is);
}

struct nodes ARRAY_BODY(node_id);

/* Appends what is avoided of one hazard: one term for each time in which the same options
 * change it. Times of options that do not reach it do not cut it, so that options on
 * different hazards are worth together what they are worth alone. */
static void add_avoided(struct worth *x, const struct weighed_hazard *h, const struct stretches *s,
                        struct nodes *parts)
{
    for (size_t i = 0, end; i < s->n; i = end) {
        const struct compiled *then = hazard_under(x, s->at[i].variant, h->id);
        end = i + 1;
        while (end < s->n && hazard_under(x, s->at[end].variant, h->id) == then)
            end++;
        if (then != h->now)
            *array_push(x->f->arena, parts) =
                damage_avoided(x, h->now, then, s->at[i].from, s->at[end - 1].to);
    }
}

static node_id avoided_damage(struct worth *x, const struct stretches *s)
{
    struct nodes parts = {0};
    for (size_t i = 0; i < x->w->hazards.n; i++)
        add_avoided(x, &x->w->hazards.at[i], s, &parts);
    return sum(x, parts.n, parts.at, dim_money);
}

static void add_alternative(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    struct graph *g = x->f->graph;
    struct building *b = &x->b;
    const struct alternative *nothing = &x->w->alternatives.at[0];
    node_id benefit = avoided_damage(x, s), cost = cost_present(&x->money, alt), damage;
    if (alt->n == 0)
        damage = damage_now(x);
    else
        damage = graph_op2(g, OP_SUBTRACT, figure_at(x->f, nothing->present_damage)->node, benefit);
    node_id total = graph_op2(g, OP_ADD, damage, cost);
    alt->present_damage =
        compiled_add(b, PROPERTY_PRESENT_DAMAGE, alt->name, NULL, damage, NULL, NULL);
    alt->present_cost = compiled_add(b, PROPERTY_PRESENT_COST, alt->name, NULL, cost, NULL, NULL);
    node_id horizon = money_annuity(&x->money, 0, x->w->horizon);
    alt->annual_cost = compiled_add(b, PROPERTY_ANNUAL_COST, alt->name, NULL,
                                    graph_op2(g, OP_DIVIDE, cost, horizon), NULL, NULL);
    alt->total = compiled_add(b, PROPERTY_TOTAL, alt->name, NULL, total, NULL, NULL);
    alt->net = alt->benefit = alt->ratio = FIGURE_NONE;
    if (alt->n == 0)
        return;
    node_id net = graph_op2(g, OP_SUBTRACT, benefit, cost);
    alt->benefit = compiled_add(b, PROPERTY_BENEFIT, alt->name, NULL, benefit, NULL, NULL);
    alt->net = compiled_add(b, PROPERTY_NET, alt->name, NULL, net, NULL, NULL);
    if (cost_is_something(&x->money, alt))
        alt->ratio = compiled_add(b, PROPERTY_RATIO, alt->name, NULL,
                                  ratio_of_means(b, benefit, cost), NULL, NULL);
}

void worth_compile(struct figures *f, struct weighing *w, const struct variant *base,
                   const struct stretches *stretches)
{
    struct worth x = {.f = f, .w = w};
    figures_settings(f);
    compiled_begin(f, base, model_find(f->base, w->id), w->id, &x.b);
    money_begin(&x.money, f, &x.b, w->horizon);
    for (size_t i = 0; i < w->alternatives.n; i++)
        add_alternative(&x, &w->alternatives.at[i], &stretches[i]);
    x.b.unit->exports = w;
    compiled_end(&x.b);
    w->unit = x.b.unit;
}
