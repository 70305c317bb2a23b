/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a customer hour and a life cost under each alternative that avoids any: quotients that
 * exist only where the divisor has a value, so that this section comes behind the other. A life has
 * no price where the alternative avoids more damage than it costs. */
#include "decide/worth.h"

#include "figure/compile.h"

void alternative_clear(struct alternative *x)
{
    x->net = x->benefit = x->ratio = x->avoids = FIGURE_NONE;
    x->avoids_time = x->present_time = FIGURE_NONE;
    x->avoids_fatalities = x->present_fatalities = FIGURE_NONE;
    x->together = x->per_hour = x->per_fatality = x->disproportion = FIGURE_NONE;
}

static node_id node_of(const struct figures *f, figure_id id)
{
    return figure_at(f, id)->node;
}

static bool is_above_zero(const struct figures *f, figure_id id)
{
    return id != FIGURE_NONE && figure_value(f, id) > 0;
}

static void add_per_fatality(struct building *b, struct alternative *x)
{
    struct figures *f = b->figures;
    const struct compiled *settings = figures_settings(f);
    figure_id worth = compiled_figure(f, settings, PROPERTY_FATALITY_WORTH, NULL, NULL);
    node_id deaths = node_of(f, x->present_fatalities);
    node_id net =
        graph_op2(f->graph, OP_SUBTRACT, node_of(f, x->present_cost), node_of(f, x->benefit));
    x->per_fatality = compiled_add(b, PROPERTY_PER_FATALITY, x->name, NULL,
                                   ratio_of_means(b, net, deaths), NULL, NULL);
    if (!is_above_zero(f, worth))
        return;
    node_id spent = graph_op2(f->graph, OP_MULTIPLY, deaths, node_of(f, worth));
    x->disproportion = compiled_add(b, PROPERTY_DISPROPORTION, x->name, NULL,
                                    ratio_of_means(b, net, spent), NULL, NULL);
}

void prices_compile(struct figures *f, struct weighing *w)
{
    struct building b;
    compiled_begin_part(f, w->unit->variant, w->unit->object, w->id, PART_PRICES, &b);
    for (size_t i = 1; i < w->alternatives.n; i++) {
        struct alternative *x = &w->alternatives.at[i];
        if (is_above_zero(f, x->present_time) && is_above_zero(f, x->present_cost))
            x->per_hour = compiled_add(
                &b, PROPERTY_PER_HOUR, x->name, NULL,
                ratio_of_means(&b, node_of(f, x->present_cost), node_of(f, x->present_time)), NULL,
                NULL);
        if (is_above_zero(f, x->present_fatalities) &&
            figure_value(f, x->present_cost) > figure_value(f, x->benefit))
            add_per_fatality(&b, x);
    }
    compiled_end(&b);
    ((struct compiled *)w->unit)->also = b.unit;
}
