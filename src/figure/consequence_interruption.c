/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Interruptions of supply: how many customers, for how long, and the energy that they miss.
 * Owns nothing. */
#include "figure/counting.h"

#include <math.h>

#include "model/supplied.h"

/* IEEE 1366-2012: an interruption longer than this is sustained, where the register says
 * nothing else. */
static const double FIVE_MINUTES = 5.0 / 525600;

/* What is longer than the limit by less than this share of it is as long: 1 h / 12 and 5 min may
 * differ by rounding. */
static const double SAME_TIME = 1e-9;

static double threshold(const struct figures *f)
{
    const struct quantity *q = f->base->settings->sustained_over;
    return q ? expr_constant(q->expr) : FIVE_MINUTES;
}

/* `x` where the row lasts longer than the threshold, 0 elsewhere; or the other way round. */
static node_id if_sustained(struct counting *c, node_id lasts, node_id x, bool sustained)
{
    struct building *b = &c->b;
    struct graph *g = c->f->graph;
    node_id nothing = compile_const(b, 0, graph_dim(g, x), NULL);
    double longer = nextafter(threshold(c->f) * (1 + SAME_TIME), INFINITY);
    node_id args[] = {lasts, compile_const(b, 0, dim_time, NULL), sustained ? nothing : x,
                      compile_const(b, longer, dim_time, NULL), sustained ? x : nothing};
    return graph_op(g, OP_LOOKUP, 5, args);
}

/* A stated quantity of a row, as a figure; compiled once. */
static node_id stated(struct counting *c, enum property p, size_t k, size_t row,
                      const struct quantity *q)
{
    const char *outcome = c->data->outcomes.keys[k];
    const char *key = counting_outcome(c, k)->interruptions.keys[row];
    figure_id known = compiled_figure(c->f, c->b.unit, p, outcome, key);
    if (known == FIGURE_NONE)
        known = compiled_add(&c->b, p, outcome, key, compile_quantity(&c->b, q), c->data->source,
                             quantity_reads(c->f, q));
    return counting_node(c, known);
}

/* How long each row of an outcome lasts. */
static node_id **row_times(struct counting *c)
{
    node_id **all = NEW_ARRAY(c->f->arena, c->data->outcomes.n, node_id *);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct rows *rows = &counting_outcome(c, k)->interruptions;
        all[k] = NEW_ARRAY(c->f->arena, rows->n, node_id);
        for (size_t i = 0; i < rows->n; i++)
            all[k][i] = stated(c, PROPERTY_LASTS, k, i, ROW(struct interruption, *rows, i)->lasts);
    }
    return all;
}

/* A figure of the site that supplies those whom the hazard interrupts; NODE_NONE: not stated. */
static node_id of_site(const struct counting *c, enum property p)
{
    const struct object *site = model_supplied(c->b.variant->model, c->data->site);
    figure_id id = compiled_figure(c->f, compiled_of(&c->b, site->id), p, NULL, NULL);
    return id == FIGURE_NONE ? NODE_NONE : counting_node(c, id);
}

static const struct interruption *row_at(const struct counting *c, size_t k, size_t i)
{
    return ROW(struct interruption, counting_outcome(c, k)->interruptions, i);
}

static node_id row_load(struct counting *c, size_t k, size_t i)
{
    const struct interruption *row = row_at(c, k, i);
    if (interruption_is_whole(row))
        return of_site(c, PROPERTY_LOAD);
    return row->load ? stated(c, PROPERTY_LOAD, k, i, row->load) : NODE_NONE;
}

static node_id row_customers(struct counting *c, const struct interruption *row)
{
    if (interruption_is_whole(row))
        return of_site(c, PROPERTY_CUSTOMERS);
    return row->customers > 0 ? counting_number(c, row->customers) : NODE_NONE;
}

/* What a row counts for in one of the four sums; NODE_NONE: nothing. */
static node_id row_amount(struct counting *c, enum property p, size_t k, size_t i, node_id lasts)
{
    if (p == PROPERTY_NOT_SUPPLIED) {
        node_id load = row_load(c, k, i);
        return load == NODE_NONE ? load : counting_product(c, load, lasts);
    }
    node_id customers = row_customers(c, row_at(c, k, i));
    if (customers == NODE_NONE)
        return customers;
    if (p == PROPERTY_CUSTOMER_TIME)
        return if_sustained(c, lasts, counting_product(c, customers, lasts), true);
    return if_sustained(c, lasts, customers, p == PROPERTY_INTERRUPTIONS);
}

static figure_id add_interruption(struct counting *c, enum property p, node_id *const *times,
                                  struct dim d, bool yearly)
{
    struct amount *all = counting_amounts(c);
    for (size_t k = 0; k < c->data->outcomes.n; k++) {
        const struct rows *rows = &counting_outcome(c, k)->interruptions;
        node_id *nodes = NEW_ARRAY(c->f->arena, rows->n, node_id);
        size_t n = 0;
        for (size_t i = 0; i < rows->n; i++) {
            node_id x = row_amount(c, p, k, i, times[k][i]);
            if (x != NODE_NONE)
                nodes[n++] = x;
        }
        if (n)
            all[k].whole = counting_sum(c, n, nodes, d);
    }
    return counting_add(c, p, NULL, all, d, yearly)->mean;
}

void count_interruptions(struct counting *c, struct consequence_exports *x)
{
    node_id **times = row_times(c);
    x->interruptions = add_interruption(c, PROPERTY_INTERRUPTIONS, times, dim_number, false);
    x->momentary = add_interruption(c, PROPERTY_MOMENTARY, times, dim_number, false);
    x->customer_time = add_interruption(c, PROPERTY_CUSTOMER_TIME, times, dim_time, true);
    x->not_supplied = add_interruption(c, PROPERTY_NOT_SUPPLIED, times, dim_energy, false);
}
