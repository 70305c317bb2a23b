/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Hazards over the years: how probable each end is over the horizon, and what the hazard costs
 * in each year. Where nothing changes with time there is one value for all years. */
#include <math.h>

#include "figure/compile_hazard.h"
#include "figure/horizon.h"
#include "figure/span.h"

static node_id frequency_in(const struct tree *t, uint32_t year)
{
    return t->frequency->yearly ? t->frequency->yearly[year] : t->frequency->mean;
}

/* The mean over the horizon of frequency times probability, over the mean frequency: years in
 * which the hazard comes more often weigh more. */
static node_id weighted_mean(struct tree *t, size_t end)
{
    struct building *b = t->building;
    struct graph *g = b->figures->graph;
    const struct span *s = &t->exports->span;
    node_id *products = NEW_ARRAY(t->arena, s->years, node_id);
    uint32_t *of_year = NEW_ARRAY(t->arena, s->years, uint32_t);
    for (uint32_t y = 0; y < s->years; y++) {
        of_year[y] = y;
        products[y] = graph_op2(g, OP_MULTIPLY, frequency_in(t, y),
                                t->in_window[s->of_year[y] * t->ends.n + end]);
    }
    struct span all = {{s->years, s->windows.at}, true, s->years, of_year, s->from};
    node_id often = t->frequency->mean;
    if (s->from > 0)
        often = span_mean(b, &all, t->frequency->yearly);
    return ratio_of_means(b, span_mean(b, &all, products), often);
}

node_id yearly_mean_end(struct tree *t, size_t end)
{
    const struct span *s = &t->exports->span;
    node_id *values = NEW_ARRAY(t->arena, s->windows.n, node_id);
    if (s->yearly && t->frequency->yearly)
        return weighted_mean(t, end);
    for (size_t w = 0; w < s->windows.n; w++)
        values[w] = t->in_window[w * t->ends.n + end];
    return span_mean(t->building, s, values);
}

/* --- risk by year --- */

/* The expected damage of one occurrence in a window. */
static node_id damage_in(struct tree *t, uint32_t window)
{
    struct figures *f = t->building->figures;
    const struct hazard_exports *x = t->exports;
    node_id *parts = NEW_ARRAY(t->arena, x->n_ends, node_id);
    size_t n = 0;
    for (size_t e = 0; e < x->n_ends; e++) {
        if (x->ends[e].damage == FIGURE_NONE)
            continue;
        node_id p = t->in_window ? t->in_window[window * x->n_ends + e]
                                 : figure_at(f, x->ends[e].probability)->node;
        parts[n++] = graph_op2(f->graph, OP_MULTIPLY, p, figure_at(f, x->ends[e].damage)->node);
    }
    if (n == 0)
        return compile_const(t->building, 0, dim_money, NULL);
    return n == 1 ? parts[0] : graph_op(f->graph, OP_SUM, n, parts);
}

static figure_id risk_in(struct tree *t, uint32_t year, uint32_t window)
{
    struct figures *f = t->building->figures;
    node_id risk = graph_op2(f->graph, OP_MULTIPLY, frequency_in(t, year), damage_in(t, window));
    return compiled_add(t->building, PROPERTY_RISK,
                        horizon_label(t->arena, f->base->settings, year), NULL, risk, NULL, NULL);
}

/* One figure a year where frequencies have a trend; else one for each window. */
void yearly_risks(struct tree *t)
{
    struct hazard_exports *x = t->exports;
    const struct span *s = &x->span;
    bool trended = t->frequency->yearly != NULL;
    if (!trended && !s->yearly) {
        x->n_yearly = 1;
        x->yearly = &x->risk;
        return;
    }
    size_t n = trended ? s->years : s->windows.n;
    figure_id *yearly = NEW_ARRAY(t->arena, n, figure_id);
    uint32_t *of_year = NEW_ARRAY(t->arena, s->years, uint32_t);
    for (uint32_t y = 0; y < s->years; y++) {
        uint32_t w = s->yearly ? s->of_year[y] : 0;
        of_year[y] = trended ? y : w;
        bool first = trended || floor(s->windows.at[w].from) == y;
        if (first)
            yearly[of_year[y]] = risk_in(t, y, w);
    }
    x->n_yearly = n;
    x->yearly = yearly;
    x->of_year = of_year;
}
