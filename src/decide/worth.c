/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The section of a decision: present values of damage and cost for each alternative.
 * All hazards and options that it reads were compiled before. */
#include "decide/worth.h"

#include <math.h>

#include "figure/compile.h"

struct worth {
    struct figures *f;
    struct weighing *w;
    struct building b;
    node_id rate;     /* interest per year as a pure number */
    node_id one_year; /* 1 a */
};

static node_id annuity(struct worth *x, double from, double to)
{
    struct graph *g = x->f->graph;
    node_id years = graph_annuity(g, x->rate, compile_const(&x->b, from, dim_number, NULL),
                                  compile_const(&x->b, to, dim_number, NULL));
    return graph_op2(g, OP_MULTIPLY, years, x->one_year);
}

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
    node_id sum = graph_years(f->graph, x->rate, h->n_yearly, risks, &y);
    return graph_op2(f->graph, OP_MULTIPLY, sum, x->one_year);
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
    return graph_op2(x->f->graph, OP_MULTIPLY, annuity(x, from, to), risk_node(x, hazard));
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
        parts[n_parts++] = graph_op2(x->f->graph, OP_MULTIPLY, annuity(x, 0, x->w->horizon),
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
        return graph_op2(g, OP_MULTIPLY, annuity(x, from, to), risk_avoided(x, before, after));
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

/* (1 + rate)^-years */
static node_id discount_factor(struct worth *x, double years)
{
    struct graph *g = x->f->graph;
    node_id base = graph_op2(g, OP_ADD, compile_const(&x->b, 1, dim_number, NULL), x->rate);
    return graph_op2(g, OP_POWER, base, compile_const(&x->b, -years, dim_number, NULL));
}

/* The year in which an option's investment is paid; the horizon's end or later: not within
 * it. */
static double year_of_investment(const struct worth *x, const struct option *o)
{
    return o->invest->on == DAY_NONE ? 0 : timeline_year(x->f->base->settings, o->invest->on);
}

/* Appends the present values of an option's investment and running cost. */
static void add_cost(struct worth *x, const char *id, node_id *parts, size_t *n)
{
    struct graph *g = x->f->graph;
    const struct option *o = model_get(x->f->base, KIND_OPTION, id);
    const struct compiled *c = compiled_of(&x->b, id);
    figure_id invest = compiled_figure(x->f, c, PROPERTY_INVEST, NULL, NULL);
    figure_id running = compiled_figure(x->f, c, PROPERTY_RUNNING, NULL, NULL);
    if (invest != FIGURE_NONE && year_of_investment(x, o) < x->w->horizon) {
        double year = year_of_investment(x, o);
        node_id node = figure_at(x->f, invest)->node;
        parts[(*n)++] =
            year == 0 ? node : graph_op2(g, OP_MULTIPLY, node, discount_factor(x, year));
    }
    struct service s = timeline_service(x->f, id, x->w->horizon);
    if (running != FIGURE_NONE && s.from < s.to)
        parts[(*n)++] =
            graph_op2(g, OP_MULTIPLY, figure_at(x->f, running)->node, annuity(x, s.from, s.to));
}

/* Does it cost anything within the horizon? The options' own figures have values already. */
static bool costs_something(const struct worth *x, const struct alternative *alt)
{
    const struct figures *f = x->f;
    for (size_t i = 0; i < alt->n; i++) {
        const struct option *o = model_get(f->base, KIND_OPTION, alt->options[i]);
        const struct compiled *c = compiled_of(&x->b, alt->options[i]);
        figure_id invest = compiled_figure(f, c, PROPERTY_INVEST, NULL, NULL);
        figure_id running = compiled_figure(f, c, PROPERTY_RUNNING, NULL, NULL);
        struct service s = timeline_service(f, alt->options[i], x->w->horizon);
        if (invest != FIGURE_NONE && year_of_investment(x, o) < x->w->horizon &&
            figure_value(f, invest) != 0)
            return true;
        if (running != FIGURE_NONE && s.from < s.to && figure_value(f, running) != 0)
            return true;
    }
    return false;
}

static node_id present_cost(struct worth *x, const struct alternative *alt)
{
    node_id *parts = NEW_ARRAY(x->f->arena, 2 * alt->n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < alt->n; i++)
        add_cost(x, alt->options[i], parts, &n);
    return sum(x, n, parts, dim_money);
}

static void add_alternative(struct worth *x, struct alternative *alt, const struct stretches *s)
{
    struct graph *g = x->f->graph;
    struct building *b = &x->b;
    const struct alternative *nothing = &x->w->alternatives.at[0];
    node_id benefit = avoided_damage(x, s), cost = present_cost(x, alt), damage;
    if (alt->n == 0)
        damage = damage_now(x);
    else
        damage = graph_op2(g, OP_SUBTRACT, figure_at(x->f, nothing->present_damage)->node, benefit);
    node_id total = graph_op2(g, OP_ADD, damage, cost);
    alt->present_damage =
        compiled_add(b, PROPERTY_PRESENT_DAMAGE, alt->name, NULL, damage, NULL, NULL);
    alt->present_cost = compiled_add(b, PROPERTY_PRESENT_COST, alt->name, NULL, cost, NULL, NULL);
    alt->total = compiled_add(b, PROPERTY_TOTAL, alt->name, NULL, total, NULL, NULL);
    alt->net = alt->benefit = alt->ratio = FIGURE_NONE;
    if (alt->n == 0)
        return;
    node_id net = graph_op2(g, OP_SUBTRACT, benefit, cost);
    alt->benefit = compiled_add(b, PROPERTY_BENEFIT, alt->name, NULL, benefit, NULL, NULL);
    alt->net = compiled_add(b, PROPERTY_NET, alt->name, NULL, net, NULL, NULL);
    if (costs_something(x, alt))
        alt->ratio = compiled_add(b, PROPERTY_RATIO, alt->name, NULL,
                                  ratio_of_means(b, benefit, cost), NULL, NULL);
}

void worth_compile(struct figures *f, struct weighing *w, const struct variant *base,
                   const struct stretches *stretches)
{
    struct worth x = {.f = f, .w = w};
    const struct compiled *settings = figures_settings(f);
    figure_id discount = compiled_figure(f, settings, PROPERTY_DISCOUNT, NULL, NULL);
    compiled_begin(f, base, model_find(f->base, w->id), w->id, &x.b);
    x.one_year = compile_const(&x.b, 1, dim_time, "1 a");
    x.rate = graph_op2(f->graph, OP_MULTIPLY, figure_at(f, discount)->node, x.one_year);
    for (size_t i = 0; i < w->alternatives.n; i++)
        add_alternative(&x, &w->alternatives.at[i], &stretches[i]);
    x.b.unit->exports = w;
    compiled_end(&x.b);
    w->unit = x.b.unit;
}
