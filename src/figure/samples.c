/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Samples of figures (samples.h): from figures to nodes and back to names. Owns nothing beyond the
 * arenas it is given. */
#include "figure/samples.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

const double spread_probability[SPREAD_POINTS] = {0.05, 0.5, 0.95};
static const char *const point_words[SPREAD_POINTS] = {"[p5]", "[p50]", "[p95]"};

/* ---- samples ---- */

static ohmen_status not_finite(struct figures *f, size_t n, const figure_id *ids, node_id culprit,
                               ohmen_error *e)
{
    size_t k = 0;
    while (k + 1 < n && figure_at(f, ids[k])->node != culprit)
        k++;
    return error_set(e, OHMEN_COMPUTE,
                     "%s is not a finite number for some of what its inputs may be: look for a "
                     "division by something that may be zero",
                     figure_name(f, f->arena, ids[k]));
}

static node_id *nodes_of(const struct figures *f, struct arena *a, size_t n, const figure_id *ids)
{
    node_id *nodes = NEW_ARRAY(a, n, node_id);
    for (size_t k = 0; k < n; k++)
        nodes[k] = figure_at(f, ids[k])->node;
    return nodes;
}

ohmen_status figures_sample(struct figures *f, struct arena *a, const struct sampling_plan *p,
                            size_t n, const figure_id *ids, struct sampling *out, ohmen_error *e)
{
    node_id culprit = NODE_NONE, *nodes = nodes_of(f, a, n, ids);
    ohmen_error inner = OHMEN_ERROR_INIT;
    struct sampler *s;
    ohmen_status status = sampler_new(a, f->means, p, n, nodes, &s, &inner);
    if (status == OHMEN_OK)
        status = sampler_run(a, s, n, nodes, out, &culprit, &inner);
    if (status == OHMEN_COMPUTE && culprit != NODE_NONE)
        return not_finite(f, n, ids, culprit, e);
    return status == OHMEN_OK ? OHMEN_OK : error_set(e, status, "%s", inner.text);
}

/* ---- spreads ---- */

bool figure_is_certain(const struct figures *f, figure_id id)
{
    size_t count;
    const uint32_t *inputs = graph_uncertain(f->graph, figure_at(f, id)->node, &count);
    for (size_t i = 0; i < count; i++)
        if (!f->input_varies.at[inputs[i]])
            return false;
    return true;
}

static struct figure_spread certain_spread(double x)
{
    struct figure_spread s = {.mean = {x, 0}, .is_certain = true};
    for (int k = 0; k < SPREAD_POINTS; k++)
        s.at[k] = (struct sampled){x, 0};
    return s;
}

struct figure_spread figure_spread_of(const struct figures *f, struct arena *a,
                                      const struct sampling *s, size_t k, figure_id id)
{
    struct figure_spread x = {0};
    if (figure_is_certain(f, id))
        return certain_spread(figure_value(f, id));
    x.mean = statistics_mean(s->sets, s->points, s->values[k]);
    statistics_quantiles(a, s->sets, s->points, s->values[k], SPREAD_POINTS, spread_probability,
                         x.at);
    return x;
}

/* ---- names ---- */

/* "@[p5]" is a change that was made up, and no point. */
bool spread_is_named(struct arena *a, const char *name, const char **figure, enum spread_point *at)
{
    size_t n = strlen(name);
    for (int k = 0; k < SPREAD_POINTS; k++) {
        size_t word = strlen(point_words[k]);
        if (n <= word || !text_equal(name + n - word, point_words[k]))
            continue;
        char before = name[n - word - 1];
        if (before == '@' || before == '+')
            continue;
        *figure = arena_strn(a, name, n - word);
        *at = (enum spread_point)k;
        return true;
    }
    return false;
}

const char *spread_name(const struct figures *f, struct arena *a, figure_id id,
                        enum spread_point at)
{
    return arena_printf(a, "%s%s", figure_name(f, a, id), point_words[at]);
}

/* ---- ranks ---- */

static int by_size(const void *p, const void *q)
{
    const struct rank_input *a = p, *b = q;
    if (fabs(a->correlation) != fabs(b->correlation))
        return fabs(a->correlation) > fabs(b->correlation) ? -1 : 1;
    int order = text_compare(a->name, b->name);
    return order ? order : (a->input > b->input) - (a->input < b->input);
}

/* A node of each unknown input below some nodes, in the order of their numbers. */
static size_t unknown_below(struct figures *f, struct arena *a, size_t n_below,
                            const node_id *below, node_id **out)
{
    bool *is_wanted = NEW_ARRAY(a, f->inputs.n, bool);
    size_t count, n = 0;
    for (size_t k = 0; k < n_below; k++) {
        const uint32_t *inputs = graph_uncertain(f->graph, below[k], &count);
        for (size_t i = 0; i < count; i++)
            is_wanted[inputs[i]] = !f->input_varies.at[inputs[i]];
    }
    node_id *nodes = *out = NEW_ARRAY(a, f->inputs.n, node_id);
    for (node_id i = 0; i < graph_size(f->graph); i++) {
        const struct graph_node *node = graph_at(f->graph, i);
        if (node->op != OP_INPUT || !is_wanted[node->extra])
            continue;
        is_wanted[node->extra] = false;
        nodes[n++] = i;
    }
    return n;
}

static const char *stream_of(const struct figures *f, node_id n)
{
    return f->input_names.at[graph_at(f->graph, n)->extra];
}

/* The first figure of the node; FIGURE_NONE. */
static figure_id figure_of(const struct figures *f, node_id n)
{
    return n < f->of_node.n ? f->of_node.at[n] : FIGURE_NONE;
}

/* Fewer changes first, then by name. */
static bool is_before(const struct figures *f, struct arena *a, figure_id p, figure_id q)
{
    size_t n = f->units.at[figure_at(f, p)->unit]->variant->n;
    size_t m = f->units.at[figure_at(f, q)->unit]->variant->n;
    return n != m ? n < m : text_compare(figure_name(f, a, p), figure_name(f, a, q)) < 0;
}

/* The same unknown under several variants has several inputs of one stream, with the same ranks:
 * the one that stands for them. */
struct streams {
    const node_id *nodes;
    size_t n;
    struct strmap figures; /* stream -> figure_id of the most basic one, where there is one */
    struct strmap told;    /* streams that are in the list */
};

static void find_streams(const struct figures *f, struct arena *a, struct streams *s)
{
    for (size_t i = 0; i < s->n; i++) {
        const char *stream = stream_of(f, s->nodes[i]);
        figure_id id = figure_of(f, s->nodes[i]);
        figure_id *known = strmap_get(&s->figures, stream);
        if (id == FIGURE_NONE || (known && !is_before(f, a, id, *known)))
            continue;
        figure_id *kept = NEW(a, figure_id);
        *kept = id;
        strmap_set(a, &s->figures, stream, kept);
    }
}

static void add_rank(struct figures *f, struct arena *a, const struct streams *s, node_id n,
                     double correlation, struct rank_inputs *out)
{
    const char *stream = stream_of(f, n);
    const figure_id *known = strmap_get(&s->figures, stream);
    *array_push(a, out) = (struct rank_input){
        .input = graph_at(f->graph, n)->extra,
        .name = known ? figure_name(f, a, *known) : stream,
        .figure = known ? *known : FIGURE_NONE,
        .correlation = correlation,
    };
}

/* The inputs as they were drawn for a sample of n figures: each at its place among those of all. */
static ohmen_status draw_again(struct figures *f, struct arena *a, const struct sampling_plan *p,
                               size_t n, const figure_id *ids, size_t n_inputs,
                               const node_id *inputs, struct sampling *out, ohmen_error *e)
{
    struct sampler *s;
    ohmen_status status = sampler_new(a, f->means, p, n, nodes_of(f, a, n, ids), &s, e);
    return status == OHMEN_OK ? sampler_run(a, s, n_inputs, inputs, out, NULL, e) : status;
}

ohmen_status figure_ranks(struct figures *f, struct arena *a, const struct sampling_plan *p,
                          size_t n, const figure_id *ids, size_t n_below, const node_id *below,
                          const double *values, size_t sets, double least, struct rank_inputs *out,
                          ohmen_error *e)
{
    struct arena *scratch = arena_child(a);
    struct sampling_plan plan = *p;
    struct sampling drawn;
    node_id *nodes;
    size_t n_inputs = unknown_below(f, scratch, n_below, below, &nodes);
    struct streams streams = {.nodes = nodes, .n = n_inputs};
    find_streams(f, scratch, &streams);
    plan.most_batches = sets / SAMPLING_BATCH;
    plan.precision = 0;
    plan.watch = NULL;
    ohmen_status status = draw_again(f, scratch, &plan, n, ids, n_inputs, nodes, &drawn, e);
    for (size_t i = 0; status == OHMEN_OK && i < n_inputs; i++) {
        const char *stream = stream_of(f, nodes[i]);
        if (strmap_has(&streams.told, stream))
            continue;
        strmap_set(scratch, &streams.told, stream, (void *)stream);
        double r =
            statistics_rank_correlation(scratch, sets * drawn.points, drawn.values[i], values);
        if (fabs(r) >= least)
            add_rank(f, a, &streams, nodes[i], r, out);
    }
    if (out->n > 1)
        qsort(out->at, out->n, sizeof *out->at, by_size);
    arena_free(scratch);
    return status;
}
