/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Present values of investments and running cost. Owns nothing. */
#include "decide/cost.h"

/* The year in which an option's investment is paid; the horizon's end or later: not within
 * it. */
static double year_of_investment(const struct money *m, const struct option *o)
{
    return o->invest->on == DAY_NONE ? 0 : timeline_year(m->f->base->settings, o->invest->on);
}

/* Appends the present values of an option's investment and running cost. */
static void add_cost(const struct money *m, const char *id, node_id *parts, size_t *n)
{
    struct graph *g = m->f->graph;
    const struct option *o = model_get(m->f->base, KIND_OPTION, id);
    const struct compiled *c = compiled_of(m->b, id);
    figure_id invest = compiled_figure(m->f, c, PROPERTY_INVEST, NULL, NULL);
    figure_id running = compiled_figure(m->f, c, PROPERTY_RUNNING, NULL, NULL);
    if (invest != FIGURE_NONE && year_of_investment(m, o) < m->horizon) {
        double year = year_of_investment(m, o);
        node_id node = figure_at(m->f, invest)->node;
        parts[(*n)++] = year == 0 ? node : graph_op2(g, OP_MULTIPLY, node, money_factor(m, year));
    }
    struct service s = timeline_service(m->f, id, m->horizon);
    if (running != FIGURE_NONE && s.from < s.to)
        parts[(*n)++] = graph_op2(g, OP_MULTIPLY, figure_at(m->f, running)->node,
                                  money_annuity(m, s.from, s.to));
}

bool cost_is_something(const struct money *m, const struct alternative *alt)
{
    const struct figures *f = m->f;
    for (size_t i = 0; i < alt->n; i++) {
        const struct option *o = model_get(f->base, KIND_OPTION, alt->options[i]);
        const struct compiled *c = compiled_of(m->b, alt->options[i]);
        figure_id invest = compiled_figure(f, c, PROPERTY_INVEST, NULL, NULL);
        figure_id running = compiled_figure(f, c, PROPERTY_RUNNING, NULL, NULL);
        struct service s = timeline_service(f, alt->options[i], m->horizon);
        if (invest != FIGURE_NONE && year_of_investment(m, o) < m->horizon &&
            figure_value(f, invest) != 0)
            return true;
        if (running != FIGURE_NONE && s.from < s.to && figure_value(f, running) != 0)
            return true;
    }
    return false;
}

node_id cost_present(const struct money *m, const struct alternative *alt)
{
    node_id *parts = NEW_ARRAY(m->f->arena, 2 * alt->n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < alt->n; i++)
        add_cost(m, alt->options[i], parts, &n);
    return money_sum(m, n, parts);
}
