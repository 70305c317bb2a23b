/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures of options: investments with their renewals, running cost, what they are worth at the
 * end, and the present value of all. Owns nothing. */
#include "decide/cost.h"

#include <math.h>

#include "figure/horizon.h"
#include "figure/service.h"

/* Of a year: the last day of a leap year lies in it. */
static const double LAST_DAY = 364.5 / 365;

/* Times closer than this are one: a fraction of a second, in years. */
static const double SAME_INSTANT = 1e-9;

/* --- present values --- */

node_id cost_paid(const struct money *m, const struct payment *p)
{
    bool at_once = p->year == 0;
    return at_once ? p->amount
                   : graph_op2(m->f->graph, OP_MULTIPLY, p->amount, money_factor(m, p->year));
}

struct parts ARRAY_BODY(node_id);

/* One option, and what is paid for it. */
struct costing {
    const struct money *m;
    const struct option *option;
    struct life life;
    struct payments once;
};

static void add_at(struct costing *c, node_id amount, double year)
{
    *array_push(c->m->f->arena, &c->once) = (struct payment){year, amount};
}

/* What is paid behind the horizon is no cost. */
static void add_first(struct costing *c, node_id invest)
{
    const struct register_settings *s = c->m->f->base->settings;
    day on = c->option->invest->on;
    double year = on == DAY_NONE ? 0 : timeline_year(s, on);
    if (c->life.later > 0)
        year = fmax(
            floor((on == DAY_NONE ? 0 : horizon_years(s, on)) + c->life.later + SAME_INSTANT), 0);
    if (year < c->m->horizon)
        add_at(c, invest, year);
}

/* The k-th renewal is paid k lives behind the investment; those before the horizon are past. */
static void add_renewals(struct costing *c, node_id invest)
{
    const struct register_settings *s = c->m->f->base->settings;
    day on = c->option->invest->on;
    double first = on == DAY_NONE ? 0 : horizon_years(s, on);
    if (first > 0)
        first = fmin(first, timeline_year(s, on) + LAST_DAY);
    first += c->life.later;
    for (size_t k = 1; k <= life_renewals(&c->life); k++) {
        double year = floor(first + (double)k * c->life.length + SAME_INSTANT);
        if (year >= 0 && year < c->m->horizon)
            add_at(c, invest, year);
    }
}

/* What has left service before the end is not worth anything then. */
static void add_residual(struct costing *c, node_id residual)
{
    struct graph *g = c->m->f->graph;
    if (c->life.begin < c->m->horizon && life_end(&c->life) >= c->m->horizon)
        add_at(c, graph_op1(g, OP_NEGATE, residual), c->m->horizon);
}

static node_id node_of(const struct figures *f, const struct compiled *option, enum property p)
{
    figure_id id = compiled_figure(f, option, p, NULL, NULL);
    return id == FIGURE_NONE ? NODE_NONE : figure_at(f, id)->node;
}

/* The option's figures are there already. */
static struct payments paid_once(const struct money *m, const struct compiled *option, double later)
{
    struct costing c = {m, option->object->data, life_later(m->f, option->id, later), {0}};
    node_id invest = node_of(m->f, option, PROPERTY_INVEST);
    node_id residual = node_of(m->f, option, PROPERTY_RESIDUAL);
    if (invest != NODE_NONE) {
        add_first(&c, invest);
        add_renewals(&c, invest);
    }
    if (residual != NODE_NONE)
        add_residual(&c, residual);
    return c.once;
}

struct payments cost_once(const struct money *m, const char *option)
{
    return cost_once_later(m, option, 0);
}

struct payments cost_once_later(const struct money *m, const char *option, double later)
{
    return paid_once(m, compiled_of(m->b, option), later);
}

static node_id running_between(const struct money *m, const struct compiled *option, double later,
                               double from, double to)
{
    struct life life = life_later(m->f, option->id, later);
    node_id running = node_of(m->f, option, PROPERTY_RUNNING);
    from = fmax(fmax(life.begin, 0), from);
    to = fmin(life_end(&life), to);
    if (running == NODE_NONE || from >= to)
        return NODE_NONE;
    return graph_op2(m->f->graph, OP_MULTIPLY, running, money_annuity(m, from, to));
}

node_id cost_running(const struct money *m, const char *option, double from, double to)
{
    return cost_running_later(m, option, 0, from, to);
}

node_id cost_running_later(const struct money *m, const char *option, double later, double from,
                           double to)
{
    return running_between(m, compiled_of(m->b, option), later, from, to);
}

static void add_present(struct building *b, const struct money *m)
{
    struct parts parts = {0};
    struct payments once = paid_once(m, b->unit, 0);
    for (size_t i = 0; i < once.n; i++)
        *array_push(m->f->arena, &parts) = cost_paid(m, &once.at[i]);
    node_id running = running_between(m, b->unit, 0, 0, m->horizon);
    if (running != NODE_NONE)
        *array_push(m->f->arena, &parts) = running;
    if (b->unit->n)
        compiled_add(b, PROPERTY_PRESENT_COST, NULL, NULL, money_sum(m, parts.n, parts.at), NULL,
                     NULL);
}

/* --- options --- */

static void add_stated(struct building *b, enum property p, const struct quantity *q,
                       const char *source)
{
    compiled_add(b, p, NULL, NULL, compile_quantity(b, q), source, quantity_reads(b->figures, q));
}

static void add_figures(struct building *b, const struct option *p)
{
    if (p->invest)
        add_stated(b, PROPERTY_INVEST, p->invest->is,
                   p->invest->source ? p->invest->source : p->source);
    if (p->running)
        add_stated(b, PROPERTY_RUNNING, p->running->is,
                   p->running->source ? p->running->source : p->source);
    if (p->residual)
        add_stated(b, PROPERTY_RESIDUAL, p->residual, p->source);
}

ohmen_status cost_compile(struct figures *f, const char *option, const struct compiled **out,
                          ohmen_error *e)
{
    const struct variant *base;
    ohmen_status status = figures_variant(f, 0, NULL, &base, e);
    struct building b = {.figures = f, .variant = base};
    const struct object *o = model_find(f->base, option);
    struct money m;
    if (status != OHMEN_OK)
        return status;
    *out = compiled_of(&b, option);
    if (*out)
        return OHMEN_OK;
    status = compile_references(f, base, o, e);
    if (status != OHMEN_OK)
        return status;
    figures_settings(f);
    compiled_begin(f, base, o, option, &b);
    add_figures(&b, o->data);
    money_begin(&m, f, &b, horizon_length(f->base->settings));
    add_present(&b, &m);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- alternatives --- */

static figure_id present_cost_of(const struct money *m, const char *option)
{
    return compiled_figure(m->f, compiled_of(m->b, option), PROPERTY_PRESENT_COST, NULL, NULL);
}

node_id cost_present(const struct money *m, const struct alternative *alt)
{
    node_id *parts = NEW_ARRAY(m->f->arena, alt->n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < alt->n; i++) {
        figure_id id = present_cost_of(m, alt->options[i]);
        if (id != FIGURE_NONE)
            parts[n++] = figure_at(m->f, id)->node;
    }
    return money_sum(m, n, parts);
}

bool cost_is_something(const struct money *m, const struct alternative *alt)
{
    double sum = 0;
    for (size_t i = 0; i < alt->n; i++) {
        figure_id id = present_cost_of(m, alt->options[i]);
        sum += id == FIGURE_NONE ? 0 : figure_value(m->f, id);
    }
    return sum > 0;
}
