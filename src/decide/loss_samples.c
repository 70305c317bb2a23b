/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples of rates and damages (loss_samples.h). Owns nothing beyond the arenas it is given. */
#include "decide/loss_samples.h"

#include <math.h>

#include "math/aggregate.h"

/* ---- years ---- */

size_t loss_years(const struct loss_source *s)
{
    if (!s->of_year)
        return s->to > s->from;
    return s->to > s->from ? (size_t)(ceil(s->to) - floor(s->from)) : 0;
}

struct loss_year loss_year_at(const struct loss_source *s, size_t i)
{
    double year = floor(s->from) + (double)i;
    if (!s->of_year)
        return (struct loss_year){s->from, s->to, 0};
    return (struct loss_year){fmax(year, s->from), fmin(year + 1, s->to), s->of_year[i]};
}

double loss_rate(const struct loss_world *w, const struct loss_source *s, size_t slot,
                 size_t sample)
{
    size_t row = w->row_of[s->rates[slot]] - 1;
    return w->certain ? w->certain[row] : w->sample.values[row][sample];
}

double loss_expected(const struct loss_world *w, const struct loss_source *s, size_t sample)
{
    double sum = 0;
    for (size_t i = 0; i < loss_years(s); i++) {
        struct loss_year y = loss_year_at(s, i);
        sum += (y.to - y.from) * loss_rate(w, s, y.slot, sample);
    }
    return sum;
}

/* ---- what is sampled ---- */

struct roots {
    struct loss_world *w;
    ARRAY(node_id) nodes;
};

static void add_root(struct roots *r, node_id n)
{
    if (r->w->row_of[n])
        return;
    *array_push(r->w->arena, &r->nodes) = n;
    r->w->row_of[n] = r->nodes.n;
}

typedef void over_source(struct roots *r, const struct loss_source *s);

static void over_sources(struct roots *r, over_source *each)
{
    for (size_t c = 0; c < r->w->n_cases; c++)
        for (size_t p = 0; p < r->w->cases[c].n_paths; p++) {
            const struct loss_sources *all = r->w->cases[c].paths[p].sources;
            for (size_t k = 0; k < all->n; k++)
                each(r, &all->at[k]);
        }
}

static void add_rates(struct roots *r, const struct loss_source *s)
{
    for (size_t i = 0; i < s->n_rates; i++)
        add_root(r, s->rates[i]);
}

static void add_damage(struct roots *r, const struct loss_source *s)
{
    struct loss_world *w = r->w;
    if (w->damage_of[s->damage])
        return;
    loss_damage_init(w->f, w->arena, s->damage, array_push(w->arena, &w->damages));
    w->damage_of[s->damage] = w->damages.n;
}

/* An INPUT node of each input, by its number; NODE_NONE. */
static node_id *nodes_of_inputs(const struct loss_world *w)
{
    node_id *nodes = NEW_ARRAY(w->arena, w->f->inputs.n, node_id);
    for (size_t i = 0; i < w->f->inputs.n; i++)
        nodes[i] = NODE_NONE;
    for (node_id n = 0; n < graph_size(w->f->graph); n++) {
        const struct graph_node *node = graph_at(w->f->graph, n);
        if (node->op == OP_INPUT && nodes[node->extra] == NODE_NONE)
            nodes[node->extra] = n;
    }
    return nodes;
}

static void add_unknown_inputs(struct roots *r, const node_id *input_nodes)
{
    for (size_t k = 0; k < r->w->damages.n; k++) {
        const struct loss_damage *d = &r->w->damages.at[k];
        for (size_t i = 0; i < d->n_unknown; i++)
            add_root(r, input_nodes[d->unknown[i]]);
    }
}

/* Those of which the first decide which inputs get the best places: what is expected in all. */
static void add_expected(struct roots *r)
{
    for (size_t c = 0; c < r->w->n_cases; c++)
        if (r->w->cases[c].expected != FIGURE_NONE)
            add_root(r, figure_at(r->w->f, r->w->cases[c].expected)->node);
}

static bool is_anything_unknown(const struct roots *r)
{
    const struct figures *f = r->w->f;
    size_t count;
    for (size_t k = 0; k < r->nodes.n; k++) {
        const uint32_t *inputs = graph_uncertain(f->graph, r->nodes.at[k], &count);
        for (size_t i = 0; i < count; i++)
            if (!f->input_varies.at[inputs[i]])
                return true;
    }
    return false;
}

/* ---- the samples ---- */

static ohmen_status sample_roots(struct loss_world *w, const struct roots *r, ohmen_error *e)
{
    struct sampler *s;
    node_id culprit = NODE_NONE;
    ohmen_error inner = OHMEN_ERROR_INIT;
    ohmen_status status =
        sampler_new(w->arena, w->f->means, &w->plan, r->nodes.n, r->nodes.at, &s, &inner);
    if (status == OHMEN_OK)
        status = sampler_run(w->arena, s, r->nodes.n, r->nodes.at, &w->sample, &culprit, &inner);
    w->sets = w->sample.sets;
    w->points = w->sample.points;
    if (status == OHMEN_COMPUTE && culprit != NODE_NONE)
        return error_set(e, status,
                         "how bad it may get cannot be told: how often something occurs is not a "
                         "finite number for some of what its inputs may be");
    return status == OHMEN_OK ? OHMEN_OK : error_set(e, status, "%s", inner.text);
}

static void take_means(struct loss_world *w, const struct roots *r)
{
    w->sets = w->points = 1;
    w->certain = NEW_ARRAY(w->arena, r->nodes.n, double);
    for (size_t k = 0; k < r->nodes.n; k++)
        w->certain[k] = means_value(w->f->means, r->nodes.at[k]);
}

static ohmen_status sample_damages(struct loss_world *w, const node_id *input_nodes, ohmen_error *e)
{
    const double **rows = NEW_ARRAY(w->arena, w->f->inputs.n, const double *);
    struct loss_samples samples = {w->sets * w->points, rows};
    for (size_t i = 0; !w->certain && i < w->f->inputs.n; i++)
        if (input_nodes[i] != NODE_NONE && w->row_of[input_nodes[i]])
            rows[i] = w->sample.values[w->row_of[input_nodes[i]] - 1];
    for (size_t k = 0; k < w->damages.n; k++) {
        ohmen_status status =
            loss_damage_sample(w->f, w->arena, &samples, &w->plan, &w->damages.at[k], e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

/* More than can be worked with, in some sample. */
static ohmen_status check_expected(const struct loss_world *w, ohmen_error *e)
{
    for (size_t c = 0; c < w->n_cases; c++)
        for (size_t p = 0; p < w->cases[c].n_paths; p++)
            for (size_t s = 0; s < w->sets * w->points; s++) {
                const struct loss_sources *all = w->cases[c].paths[p].sources;
                double sum = 0;
                for (size_t k = 0; k < all->n; k++)
                    sum += loss_expected(w, &all->at[k], s);
                if (!(sum <= AGGREGATE_MOST_EXPECTED))
                    return error_set(e, OHMEN_COMPUTE,
                                     "how bad it may get cannot be told: damage is expected more "
                                     "than %g times over the horizon",
                                     AGGREGATE_MOST_EXPECTED);
            }
    return OHMEN_OK;
}

ohmen_status loss_world_new(struct figures *f, struct arena *a, size_t n,
                            const struct loss_case *cases, const struct sampling_plan *plan,
                            struct loss_world **out, ohmen_error *e)
{
    struct loss_world *w = NEW(a, struct loss_world);
    struct roots r = {.w = w};
    *w = (struct loss_world){.f = f, .arena = a, .n_cases = n, .cases = cases, .plan = *plan};
    w->plan.log2_points = DRAW_LEAST_LOG2;
    w->plan.most_batches = 1;
    w->plan.precision = 0;
    w->plan.watch = NULL;
    w->row_of = NEW_ARRAY(a, graph_size(f->graph), size_t);
    w->damage_of = NEW_ARRAY(a, graph_size(f->graph), size_t);
    const node_id *input_nodes = nodes_of_inputs(w);
    add_expected(&r);
    over_sources(&r, add_rates);
    over_sources(&r, add_damage);
    add_unknown_inputs(&r, input_nodes);
    ohmen_status status = OHMEN_OK;
    if (is_anything_unknown(&r))
        status = sample_roots(w, &r, e);
    else
        take_means(w, &r);
    if (status == OHMEN_OK)
        status = sample_damages(w, input_nodes, e);
    if (status == OHMEN_OK)
        status = check_expected(w, e);
    *out = w;
    return status;
}

const struct sampling *loss_world_sample(const struct loss_world *w)
{
    return w->certain ? NULL : &w->sample;
}

double loss_source_expected(const struct loss_world *w, const struct loss_source *s)
{
    double sum = 0;
    for (size_t i = 0; i < w->sets * w->points; i++)
        sum += loss_expected(w, s, i);
    return sum / (double)(w->sets * w->points);
}

double loss_source_damage(const struct loss_world *w, const struct loss_source *s)
{
    const struct loss_damage *d = loss_world_damage(w, s->damage);
    double sum = 0;
    for (size_t i = 0; i < d->n; i++)
        sum += loss_damage_mean(d, i);
    return sum / (double)d->n;
}

/* ---- damages ---- */

struct loss_damage *loss_world_damage(const struct loss_world *w, node_id damage)
{
    return &w->damages.at[w->damage_of[damage] - 1];
}

void loss_world_place(struct loss_world *w, node_id damage, const struct lattice *l)
{
    struct loss_damage *d = loss_world_damage(w, damage);
    if (d->placed_step == l->step && d->placed_points == l->n)
        return;
    loss_damage_place(w->arena, l, d);
    d->placed_step = l->step;
    d->placed_points = l->n;
}
