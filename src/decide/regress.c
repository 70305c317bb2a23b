/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Approximate means judged by a sample (regress.h). Owns nothing beyond the arena of the figures.
 * */
#include "decide/regress.h"

#include <math.h>

struct regress {
    struct figures *f;
    const struct information_sample *sample;
    struct sampler *sampler;
};

struct regress *regress_new(struct figures *f, const struct information_sample *s)
{
    struct regress *r = NEW(f->arena, struct regress);
    struct sampling_plan plan = *s->plan;
    ohmen_error unused = OHMEN_ERROR_INIT;
    *r = (struct regress){.f = f, .sample = s};
    plan.most_batches = s->values->sets / SAMPLING_BATCH;
    plan.precision = 0;
    plan.watch = NULL;
    ohmen_status status =
        sampler_new(f->arena, f->means, &plan, s->n_roots, s->roots, &r->sampler, &unused);
    return status == OHMEN_OK ? r : NULL;
}

/* What today's best is worth; 0 where a choice cannot say so. */
static double base_of(const struct choice *c, const double *values, size_t best)
{
    return c->worth ? c->worth(c->ctx, values, best) : 0;
}

void correction_apply(const struct correction *c, double *values)
{
    double base = base_of(c->choice, values, c->best);
    double mean = base_of(c->choice, c->means, c->best);
    for (size_t k = 0; k < c->choice->n_targets; k++) {
        double lead = values[k] - base, now = c->means[k] - mean;
        values[k] = mean + c->base * (base - mean) + now + c->slopes[k] * (lead - now);
    }
}

/* --- the sample --- */

/* A node of the quantity that the sample has values of. */
struct drawn_node {
    size_t part;
    struct turn_node at;
};

static bool is_drawn(const struct regress *r, node_id n)
{
    const struct graph_node *node = graph_at(r->f->graph, n);
    for (size_t k = 0; k < r->sample->n_roots && node->op == OP_INPUT; k++) {
        size_t count;
        const uint32_t *inputs = graph_uncertain(r->f->graph, r->sample->roots[k], &count);
        for (size_t i = 0; i < count; i++)
            if (inputs[i] == node->extra)
                return true;
    }
    return false;
}

static bool find_node(const struct regress *r, const struct unknown *u, struct drawn_node *out)
{
    for (size_t i = 0; i < u->n; i++)
        for (size_t k = 0; k < u->parts[i]->nodes.n; k++) {
            *out = (struct drawn_node){i, u->parts[i]->nodes.at[k]};
            if (is_drawn(r, out->at.node))
                return true;
        }
    return false;
}

/* Its values, one for each sample; NULL. */
static const double *draw(struct regress *r, const struct drawn_node *n)
{
    struct sampling drawn;
    ohmen_error unused = OHMEN_ERROR_INIT;
    ohmen_status status =
        sampler_run(r->f->arena, r->sampler, 1, &n->at.node, &drawn, NULL, &unused);
    return status == OHMEN_OK && drawn.sets == r->sample->values->sets ? drawn.values[0] : NULL;
}

static double deviate_of(const struct quantity *q, double x)
{
    struct dist d = quantity_dist(q);
    double p = dist_cdf(&d, x / q->times);
    double z = p <= 0 ? -UNKNOWN_FAR : p >= 1 ? UNKNOWN_FAR : dist_normal_deviate(p);
    z = q->times < 0 ? -z : z;
    return fmin(fmax(z, -UNKNOWN_FAR), UNKNOWN_FAR);
}

/* --- sums --- */

/* Of squares of P - m, and of products of that with L - m, by target and for the base behind
 * them. */
struct products {
    double *squares, *products;
};

static void add(struct products *to, size_t k, double p, double l, double m)
{
    to->squares[k] += (p - m) * (p - m);
    to->products[k] += (p - m) * (l - m);
}

static void add_sample(const struct correction *c, const double *p, const double *l,
                       struct products *to)
{
    size_t n = c->choice->n_targets;
    double base_p = base_of(c->choice, p, c->best), base_l = base_of(c->choice, l, c->best);
    double base_m = base_of(c->choice, c->means, c->best);
    for (size_t k = 0; k < n; k++)
        add(to, k, p[k] - base_p, l[k] - base_l, c->means[k] - base_m);
    add(to, n, base_p, base_l, base_m);
}

static struct products no_products(struct arena *a, size_t n)
{
    return (struct products){NEW_ARRAY(a, n, double), NEW_ARRAY(a, n, double)};
}

/* Sums by set. False where some sample has no values. */
static bool add_samples(struct regress *r, struct unknown *u, const struct correction *c,
                        const struct drawn_node *node, struct products *sets)
{
    const double *drawn = draw(r, node);
    const struct sampling *s = r->sample->values;
    double *l = NEW_ARRAY(r->f->arena, c->choice->n_targets, double);
    for (size_t i = 0; drawn && i < s->sets * s->points; i++) {
        double x = drawn[i] / node->at.times;
        double z = u->way == UNKNOWN_NODES ? deviate_of(u->spread[node->part], x) : 0;
        u->x[node->part] = x;
        const double *p = unknown_values(u, z, true);
        if (!p)
            return false;
        for (size_t k = 0; k < c->choice->n_targets; k++)
            l[k] = s->values[r->sample->root[k]][i];
        add_sample(c, p, l, &sets[i / s->points]);
    }
    return drawn != NULL;
}

/* --- slopes --- */

/* Without set `but`. */
static double slope(size_t n, const struct products *sets, size_t but, size_t k)
{
    double squares = 0, products = 0;
    for (size_t i = 0; i < n; i++)
        if (i != but) {
            squares += sets[i].squares[k];
            products += sets[i].products[k];
        }
    return squares > 0 ? products / squares : 1;
}

struct correction *regress_corrections(struct regress *r, struct unknown *u, const struct choice *c,
                                       const double *means, size_t best, size_t *sets)
{
    struct arena *a = r->f->arena;
    size_t n = r->sample->values->sets, n_targets = c->n_targets;
    struct correction *all = NEW_ARRAY(a, n + 1, struct correction);
    struct products *sums = NEW_ARRAY(a, n, struct products);
    struct drawn_node node = {0};
    bool is_told = (u->way != UNKNOWN_POINTS || u->is_discrete) && find_node(r, u, &node);
    for (size_t i = 0; i < n; i++)
        sums[i] = no_products(a, n_targets + 1);
    for (size_t i = 0; i <= n; i++)
        all[i] = (struct correction){
            .choice = c, .means = means, .best = best, .slopes = NEW_ARRAY(a, n_targets, double)};
    if (!is_told || !add_samples(r, u, all, &node, sums))
        return NULL;
    for (size_t i = 0; i <= n; i++) {
        size_t but = i ? i - 1 : n;
        all[i].base = slope(n, sums, but, n_targets);
        for (size_t k = 0; k < n_targets; k++)
            all[i].slopes[k] = slope(n, sums, but, k);
    }
    *sets = n;
    return all;
}
