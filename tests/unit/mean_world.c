/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The world that tests of means and of samples share (mean_test.h). */
#include "mean_test.h"

#include <math.h>
#include <stdio.h>

static ohmen_status quantile(void *ctx, uint32_t input, double p, double q, double *x,
                             ohmen_error *e)
{
    const struct mean_world *w = ctx;
    (void)e;
    if (!w->has_quantiles)
        return OHMEN_COMPUTE;
    *x = dist_quantile(&w->dist[input], p, q);
    return OHMEN_OK;
}

static size_t atoms(void *ctx, uint32_t input, const double **values, const double **probabilities)
{
    const struct dist *d = &((const struct mean_world *)ctx)->dist[input];
    if (d->shape != DIST_DISCRETE)
        return 0;
    *values = d->values;
    *probabilities = d->probabilities;
    return d->n;
}

static const char *name(void *ctx, uint32_t input)
{
    return ((const struct mean_world *)ctx)->names[input];
}

static double dist(void *ctx, uint32_t input, struct dist *out)
{
    const struct mean_world *w = ctx;
    *out = w->dist[input];
    if (!w->has_quantiles) /* its upper quantiles overflow */
        *out = (struct dist){.shape = DIST_LOGNORMAL, .p = {1e308, 1e10, NAN}};
    return 1;
}

static bool varies(void *ctx, uint32_t input)
{
    return ((const struct mean_world *)ctx)->varies[input];
}

void mean_world_open(struct mean_world *w, struct arena *a)
{
    *w = (struct mean_world){.arena = a, .has_quantiles = true};
    w->g = graph_new(a);
    w->v = eval_new(a, w->g);
    w->source = (struct mean_source){w, quantile, atoms, name, dist, varies};
    w->m = means_new(a, w->v, &w->source);
    graph_section_begin(w->g, 0);
}

void mean_world_set(struct mean_world *w, uint32_t i, struct dist d)
{
    w->dist[i] = d;
    snprintf(w->names[i], sizeof w->names[i], "x%u", (unsigned)i);
}

node_id mean_input(struct mean_world *w, uint32_t i)
{
    return graph_input(w->g, i, dist_mean(&w->dist[i]), mean_number);
}

node_id mean_const(struct mean_world *w, double x)
{
    return graph_const(w->g, x, mean_number);
}

double mean_of(struct mean_world *w, node_id n)
{
    ck_assert_int_eq(eval_point(w->v, NULL, NULL), OHMEN_OK);
    ck_assert_int_eq(means_update(w->m, NULL, NULL), OHMEN_OK);
    return means_value(w->m, n);
}

const struct diagram *mean_all_of(struct arena *a, uint32_t n)
{
    struct diagram_builder *b = diagram_builder_new(a);
    bfun all = BFUN_TRUE;
    for (uint32_t i = 0; i < n; i++)
        all = diagram_and(b, all, diagram_variable(b, i));
    return diagram_freeze(a, b, 2, (bfun[]){all, diagram_not(b, all)});
}

double mean_sigma(double error_factor)
{
    return log(error_factor) / 1.6448536269514722;
}
