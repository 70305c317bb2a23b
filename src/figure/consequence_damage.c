/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Damage as each perspective of the register bears it, and by category. Owns nothing. */
#include "figure/counting.h"

#include <stdlib.h>

static bool contains(const struct names *names, const char *name)
{
    for (size_t i = 0; i < names->n; i++)
        if (text_equal(names->at[i], name))
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

static const char *path_of(const struct counting *c, size_t e)
{
    return figure_at(c->f, c->of->ends[e].probability)->q1;
}

/* A figure that the hazard has where its perspective counts it, and else this part. */
static figure_id find_figure(const struct counting *c, enum property p, const char *q1,
                             const char *q2)
{
    figure_id id = compiled_figure(c->f, c->hazard, p, q1, q2);
    return id != FIGURE_NONE ? id : compiled_figure(c->f, c->b.unit, p, q1, q2);
}

static node_id clearance_at(struct counting *c, size_t e)
{
    const char *row = c->of->ends[e].row;
    figure_id id = find_figure(c, PROPERTY_CLEARANCE, row, NULL);
    size_t i = 0;
    if (id != FIGURE_NONE)
        return counting_node(c, id);
    while (!text_equal(c->data->response.keys[i], row))
        i++;
    const struct quantity *in = ROW(struct response_row, c->data->response, i)->in;
    return counting_node(c, compiled_add(&c->b, PROPERTY_CLEARANCE, row, NULL,
                                         compile_quantity(&c->b, in), c->data->source,
                                         quantity_reads(c->f, in)));
}

/* One item, at an end where it depends on the clearance time. */
static node_id item_node(struct counting *c, size_t k, size_t i, size_t e)
{
    const struct outcome *o = counting_outcome(c, k);
    const struct damage_item *item = ROW(struct damage_item, o->damage, i);
    const struct quantity *q = item_quantity(item);
    const char *key = c->data->outcomes.keys[k], *name = o->damage.keys[i];
    if (is_timed(item))
        name = arena_printf(c->f->arena, "%s.at.%s", name, path_of(c, e));
    figure_id id = find_figure(c, PROPERTY_DAMAGE, key, name);
    if (id != FIGURE_NONE)
        return counting_node(c, id);
    if (is_timed(item))
        c->b.clearance = clearance_at(c, e);
    return counting_node(c, compiled_add(&c->b, PROPERTY_DAMAGE, key, name,
                                         compile_drawn(&c->b, item->is, item->varies), item->source,
                                         quantity_reads(c->f, q)));
}

/* The items of an outcome that count, at one end; NODE_NONE where none does. */
static node_id items_at(struct counting *c, size_t k, const struct names *categories, size_t e)
{
    const struct outcome *o = counting_outcome(c, k);
    node_id *nodes = NEW_ARRAY(c->f->arena, o->damage.n, node_id);
    size_t n = 0;
    for (size_t i = 0; i < o->damage.n; i++)
        if (contains(categories, ROW(struct damage_item, o->damage, i)->category))
            nodes[n++] = item_node(c, k, i, e);
    return n ? counting_sum(c, n, nodes, dim_money) : NODE_NONE;
}

static bool any_timed(const struct counting *c, size_t k, const struct names *categories)
{
    const struct outcome *o = counting_outcome(c, k);
    for (size_t i = 0; i < o->damage.n; i++) {
        const struct damage_item *item = ROW(struct damage_item, o->damage, i);
        if (contains(categories, item->category) && is_timed(item))
            return true;
    }
    return false;
}

static struct amount *damage_amounts(struct counting *c, const struct names *categories)
{
    struct amount *all = counting_amounts(c);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        if (!any_timed(c, k, categories)) {
            all[k].whole = items_at(c, k, categories, 0);
            continue;
        }
        node_id *at_end = NEW_ARRAY(c->f->arena, c->of->n_ends, node_id);
        for (size_t e = 0; e < c->of->n_ends; e++)
            at_end[e] =
                c->of->ends[e].outcome_index == k ? items_at(c, k, categories, e) : NODE_NONE;
        all[k].at_end = at_end;
    }
    return all;
}

/* What the chosen perspective bears is the risk of the hazard itself. */
void count_own_risk(struct counting *c, const char *perspective)
{
    struct consequence *x = array_push(c->f->arena, &c->effects);
    *x = (struct consequence){
        .property = PROPERTY_BORNE, .of = perspective, .yearly = c->of->yearly};
    x->mean = compiled_add(&c->b, PROPERTY_BORNE, perspective, NULL, counting_node(c, c->of->risk),
                           NULL, NULL);
}

void count_perspectives(struct counting *c)
{
    const struct rows *rows = &c->f->base->settings->perspectives;
    for (size_t i = 0; i < rows->n; i++) {
        const struct names *categories = &((const struct names *)rows->at)[i];
        if (categories == c->f->categories)
            count_own_risk(c, rows->keys[i]);
        else
            counting_add(c, PROPERTY_BORNE, rows->keys[i], damage_amounts(c, categories), dim_money,
                         true);
    }
}

static int by_text(const void *p, const void *q)
{
    return text_compare(*(const char *const *)p, *(const char *const *)q);
}

/* Every category of the hazard once, in byte order. */
static struct names categories_of(const struct counting *c)
{
    size_t most = 0, n = 0;
    for (size_t k = 0; k < c->data->outcomes.n; k++)
        most += counting_outcome(c, k)->damage.n;
    const char **all = NEW_ARRAY(c->f->arena, most, const char *);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct outcome *o = counting_outcome(c, k);
        for (size_t i = 0; i < o->damage.n; i++) {
            struct names known = {.at = all, .n = n};
            const char *category = ROW(struct damage_item, o->damage, i)->category;
            if (!contains(&known, category))
                all[n++] = category;
        }
    }
    if (n > 1)
        qsort(all, n, sizeof *all, by_text);
    return (struct names){.at = all, .n = n};
}

void count_categories(struct counting *c)
{
    struct names all = categories_of(c);
    for (size_t i = 0; i < all.n; i++) {
        struct names one = {.at = &all.at[i], .n = 1};
        counting_add(c, PROPERTY_CATEGORY, all.at[i], damage_amounts(c, &one), dim_money, false);
    }
}
