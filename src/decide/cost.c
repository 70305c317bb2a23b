/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures of options: investments with their renewals, running cost, what they are worth at the end,
 * and the present value of all. Owns nothing. */
#include "decide/cost.h"

#include <math.h>

#include "figure/horizon.h"
#include "figure/service.h"

/* Of a year: the last day of a leap year lies in it. */
static const double LAST_DAY = 364.5 / 365;

/* Times closer than this are one: a fraction of a second, in years. */
static const double SAME_INSTANT = 1e-9;

/* --- present values --- */

struct parts ARRAY_BODY(node_id);

/* One option, and what its present value is made of. */
struct costing {
    const struct money *m;
    const struct option *option;
    struct life life;
    struct parts parts;
};

static void add_at(struct costing *c, node_id amount, double year)
{
    struct graph *g = c->m->f->graph;
    bool at_once = year == 0;
    *array_push(c->m->f->arena, &c->parts) =
        at_once ? amount : graph_op2(g, OP_MULTIPLY, amount, money_factor(c->m, year));
}

/* What is paid behind the horizon is no cost. */
static void add_first(struct costing *c, node_id invest)
{
    day on = c->option->invest->on;
    double year = on == DAY_NONE ? 0 : timeline_year(c->m->f->base->settings, on);
    if (year < c->m->horizon)
        add_at(c, invest, year);
}

/* The k-th renewal is paid k lives behind the investment; those before the horizon are past. */
static void add_renewals(struct costing *c, node_id invest)
{
    const struct register_settings *s = c->m->f->base->settings;
    day on = c->option->invest->on;
    double first = 0;
    if (on != DAY_NONE)
        first = fmin(horizon_years(s, on), timeline_calendar_year(s, on) + LAST_DAY);
    for (size_t k = 1; k <= life_renewals(&c->life); k++) {
        double year = floor(first + (double)k * c->life.length + SAME_INSTANT);
        if (year >= 0 && year < c->m->horizon)
            add_at(c, invest, year);
    }
}

static void add_running(struct costing *c, node_id running)
{
    double from = fmax(c->life.begin, 0), to = life_end(&c->life);
    if (from < to)
        *array_push(c->m->f->arena, &c->parts) =
            graph_op2(c->m->f->graph, OP_MULTIPLY, running, money_annuity(c->m, from, to));
}

/* What has left service before the end is not worth anything then. */
static void add_residual(struct costing *c, node_id residual)
{
    struct graph *g = c->m->f->graph;
    if (c->life.begin < c->m->horizon && life_end(&c->life) >= c->m->horizon)
        add_at(c, graph_op1(g, OP_NEGATE, residual), c->m->horizon);
}

static node_id node_of(const struct building *b, enum property p)
{
    figure_id id = compiled_figure(b->figures, b->unit, p, NULL, NULL);
    return id == FIGURE_NONE ? NODE_NONE : figure_at(b->figures, id)->node;
}

static void add_present(struct building *b, const struct money *m, const struct object *o)
{
    struct costing c = {m, o->data, life_of(b->figures, o->id), {0}};
    node_id invest = node_of(b, PROPERTY_INVEST), running = node_of(b, PROPERTY_RUNNING);
    node_id residual = node_of(b, PROPERTY_RESIDUAL);
    if (invest != NODE_NONE) {
        add_first(&c, invest);
        add_renewals(&c, invest);
    }
    if (running != NODE_NONE)
        add_running(&c, running);
    if (residual != NODE_NONE)
        add_residual(&c, residual);
    if (invest != NODE_NONE || running != NODE_NONE || residual != NODE_NONE)
        compiled_add(b, PROPERTY_PRESENT_COST, NULL, NULL, money_sum(m, c.parts.n, c.parts.at),
                     NULL, NULL);
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
    add_present(&b, &m, o);
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
