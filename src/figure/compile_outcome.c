/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Outcomes: what they cost from the chosen perspective, how often they occur, and the
 * sums over a hazard.
 *
 * Damage that depends on the clearance time is compiled once for each end, since ends
 * of one outcome may lie in different rows; the outcome's damage is then the mean over
 * its ends. */
#include "figure/compile_hazard.h"

static bool counts(const struct figures *f, const struct damage_item *item)
{
    if (!f->categories)
        return true;
    for (size_t i = 0; i < f->categories->n; i++)
        if (text_equal(f->categories->at[i], item->category))
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

static const struct outcome *outcome_at(const struct tree *t, size_t i)
{
    return ROW(struct outcome, t->hazard->outcomes, i);
}

static node_id sum_of(struct tree *t, size_t n, const node_id *nodes, struct dim d)
{
    struct graph *g = t->building->figures->graph;
    if (n == 0)
        return compile_const(t->building, 0, d, NULL);
    return n == 1 ? nodes[0] : graph_op(g, OP_SUM, n, nodes);
}

struct items {
    node_id *nodes;
    size_t n;
    bool timed;
};

/* The items that do not depend on the clearance time, and whether there are others. */
static struct items plain_items(struct tree *t, size_t k)
{
    struct building *b = t->building;
    const struct outcome *o = outcome_at(t, k);
    struct items items = {NEW_ARRAY(t->arena, o->damage.n, node_id), 0, false};
    for (size_t i = 0; i < o->damage.n; i++) {
        const struct damage_item *item = ROW(struct damage_item, o->damage, i);
        if (!counts(b->figures, item))
            continue;
        if (is_timed(item)) {
            items.timed = true;
            continue;
        }
        const struct quantity *q = item_quantity(item);
        node_id n = compile_drawn(b, item->is, item->varies);
        compiled_add(b, PROPERTY_DAMAGE, t->hazard->outcomes.keys[k], o->damage.keys[i], n,
                     item->source, quantity_reads(b->figures, q));
        items.nodes[items.n++] = n;
    }
    return items;
}

/* The clearance time of a row, which becomes a figure where something first depends on it. */
static node_id clearance_of(struct tree *t, const struct spot *at)
{
    struct building *b = t->building;
    figure_id id = compiled_figure(b->figures, b->unit, PROPERTY_CLEARANCE, at->row, NULL);
    if (id == FIGURE_NONE)
        id = compiled_add(b, PROPERTY_CLEARANCE, at->row, NULL, compile_quantity(b, at->in),
                          t->hazard->source, quantity_reads(b->figures, at->in));
    return figure_at(b->figures, id)->node;
}

/* An outcome's damage at one end, with that row's clearance time. */
static figure_id damage_at_end(struct tree *t, size_t k, const struct items *plain, size_t e)
{
    struct building *b = t->building;
    const struct tree_end *end = &t->ends.at[e];
    const struct outcome *o = outcome_at(t, k);
    const char *key = t->hazard->outcomes.keys[k];
    const char *path = figure_at(b->figures, t->exports->ends[e].probability)->q1;
    node_id *nodes = NEW_ARRAY(t->arena, o->damage.n, node_id);
    size_t n = 0;
    while (n < plain->n) {
        nodes[n] = plain->nodes[n];
        n++;
    }
    b->clearance = clearance_of(t, &end->spot);
    for (size_t i = 0; i < o->damage.n; i++) {
        const struct damage_item *item = ROW(struct damage_item, o->damage, i);
        if (!counts(b->figures, item) || !is_timed(item))
            continue;
        nodes[n] = compile_drawn(b, item->is, item->varies);
        compiled_add(b, PROPERTY_DAMAGE, key,
                     arena_printf(t->arena, "%s.at.%s", o->damage.keys[i], path), nodes[n],
                     item->source, quantity_reads(b->figures, item_quantity(item)));
        n++;
    }
    return compiled_add(b, PROPERTY_DAMAGE, key, arena_printf(t->arena, "at.%s", path),
                        sum_of(t, n, nodes, dim_money), NULL, NULL);
}

/* Probability of an outcome: the sum over its ends. */
static node_id probability_of(struct tree *t, size_t k)
{
    struct building *b = t->building;
    node_id *nodes = NEW_ARRAY(t->arena, t->ends.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < t->ends.n; i++)
        if (t->ends.at[i].outcome_index == k)
            nodes[n++] = figure_at(b->figures, t->exports->ends[i].probability)->node;
    return sum_of(t, n, nodes, dim_number);
}

/* Probability times damage over the ends of an outcome whose damage depends on the
 * clearance time: what one hazard costs through this outcome. */
static node_id expected_damage(struct tree *t, size_t k, const struct items *plain)
{
    struct figures *f = t->building->figures;
    node_id *nodes = NEW_ARRAY(t->arena, t->ends.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < t->ends.n; i++) {
        if (t->ends.at[i].outcome_index != k)
            continue;
        figure_id damage = damage_at_end(t, k, plain, i);
        t->exports->ends[i].damage = damage;
        nodes[n++] =
            graph_op2(f->graph, OP_MULTIPLY, figure_at(f, t->exports->ends[i].probability)->node,
                      figure_at(f, damage)->node);
    }
    return sum_of(t, n, nodes, dim_money);
}

/* Risk is a product and damage its quotient by the frequency where ends differ, so that the
 * risk is linear in every probability; the other way round where one damage holds. */
static void add_damage_and_risk(struct tree *t, size_t k, const struct items *plain)
{
    struct building *b = t->building;
    struct hazard_exports *x = t->exports;
    struct graph *g = b->figures->graph;
    const char *key = t->hazard->outcomes.keys[k];
    node_id f = figure_at(b->figures, x->frequency_of[k])->node, damage, risk;
    if (plain->timed) {
        node_id hazard = figure_at(b->figures, x->frequency)->node;
        risk = graph_op2(g, OP_MULTIPLY, hazard, expected_damage(t, k, plain));
        damage = ratio_of_means(b, risk, f);
    } else {
        damage = sum_of(t, plain->n, plain->nodes, dim_money);
        risk = graph_op2(g, OP_MULTIPLY, f, damage);
    }
    x->damage_of[k] = compiled_add(b, PROPERTY_DAMAGE, key, NULL, damage, NULL, NULL);
    x->risk_of[k] = compiled_add(b, PROPERTY_RISK, key, NULL, risk, NULL, NULL);
    for (size_t i = 0; i < x->n_ends && !plain->timed; i++)
        if (x->ends[i].outcome_index == k)
            x->ends[i].damage = x->damage_of[k];
}

static void compile_outcome(struct tree *t, size_t k)
{
    struct building *b = t->building;
    struct hazard_exports *x = t->exports;
    const char *key = t->hazard->outcomes.keys[k];
    struct items plain = plain_items(t, k);
    node_id p = probability_of(t, k);
    node_id f =
        graph_op2(b->figures->graph, OP_MULTIPLY, figure_at(b->figures, x->frequency)->node, p);
    x->probability[k] = compiled_add(b, PROPERTY_PROBABILITY, key, NULL, p, NULL, NULL);
    x->frequency_of[k] = compiled_add(b, PROPERTY_FREQUENCY, key, NULL, f, NULL, NULL);
    add_damage_and_risk(t, k, &plain);
}

static bool has_damage(const struct tree *t, size_t k)
{
    const struct outcome *o = outcome_at(t, k);
    for (size_t i = 0; i < o->damage.n; i++)
        if (counts(t->building->figures, ROW(struct damage_item, o->damage, i)))
            return true;
    return false;
}

static void compile_sums(struct tree *t)
{
    struct building *b = t->building;
    struct hazard_exports *x = t->exports;
    node_id *risks = NEW_ARRAY(t->arena, x->n_outcomes, node_id);
    node_id *frequencies = NEW_ARRAY(t->arena, x->n_outcomes, node_id);
    size_t n = 0;
    for (size_t k = 0; k < x->n_outcomes; k++) {
        if (!has_damage(t, k))
            continue;
        risks[n] = figure_at(b->figures, x->risk_of[k])->node;
        frequencies[n++] = figure_at(b->figures, x->frequency_of[k])->node;
    }
    node_id damaging = sum_of(t, n, frequencies, dim_frequency);
    node_id risk = sum_of(t, n, risks, dim_money_rate);
    x->damaging = compiled_add(b, PROPERTY_DAMAGING, NULL, NULL, damaging, NULL, NULL);
    x->risk = compiled_add(b, PROPERTY_RISK, NULL, NULL, risk, NULL, NULL);
    x->damage =
        compiled_add(b, PROPERTY_DAMAGE, NULL, NULL, ratio_of_means(b, risk, damaging), NULL, NULL);
}

void compile_outcomes(struct tree *t)
{
    struct hazard_exports *x = t->exports;
    x->n_outcomes = t->hazard->outcomes.n;
    x->probability = NEW_ARRAY(t->arena, x->n_outcomes, figure_id);
    x->frequency_of = NEW_ARRAY(t->arena, x->n_outcomes, figure_id);
    x->damage_of = NEW_ARRAY(t->arena, x->n_outcomes, figure_id);
    x->risk_of = NEW_ARRAY(t->arena, x->n_outcomes, figure_id);
    for (size_t k = 0; k < x->n_outcomes; k++)
        compile_outcome(t, k);
    compile_sums(t);
}
