/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Present values as nodes. Owns nothing beyond the graph of the figures. */
#include "decide/money.h"

void money_begin(struct money *m, struct figures *f, struct building *b, double horizon)
{
    const struct compiled *settings = figures_settings(f);
    figure_id discount = compiled_figure(f, settings, PROPERTY_DISCOUNT, NULL, NULL);
    *m = (struct money){.f = f, .b = b, .horizon = horizon};
    m->one_year = compile_const(b, 1, dim_time, "1 a");
    m->rate = graph_op2(f->graph, OP_MULTIPLY, figure_at(f, discount)->node, m->one_year);
}

node_id money_factor(const struct money *m, double years)
{
    struct graph *g = m->f->graph;
    node_id base = graph_op2(g, OP_ADD, compile_const(m->b, 1, dim_number, NULL), m->rate);
    return graph_op2(g, OP_POWER, base, compile_const(m->b, -years, dim_number, NULL));
}

/* The graph pays in the middle of each year; half a year later is its end. */
static node_id paid_then(const struct money *m, node_id mid_year)
{
    if (m->f->base->settings->yearly_amounts != YEARLY_END_OF_YEAR)
        return mid_year;
    return graph_op2(m->f->graph, OP_MULTIPLY, money_factor(m, 0.5), mid_year);
}

node_id money_annuity(const struct money *m, double from, double to)
{
    struct graph *g = m->f->graph;
    node_id years = graph_annuity(g, m->rate, compile_const(m->b, from, dim_number, NULL),
                                  compile_const(m->b, to, dim_number, NULL));
    return graph_op2(g, OP_MULTIPLY, paid_then(m, years), m->one_year);
}

node_id money_years(const struct money *m, size_t n, const node_id *amounts, const struct years *y)
{
    node_id sum = graph_years(m->f->graph, m->rate, n, amounts, y);
    return graph_op2(m->f->graph, OP_MULTIPLY, paid_then(m, sum), m->one_year);
}

node_id money_sum(const struct money *m, size_t n, const node_id *amounts)
{
    if (n == 0)
        return compile_const(m->b, 0, dim_money, NULL);
    return n == 1 ? amounts[0] : graph_op(m->f->graph, OP_SUM, n, amounts);
}
