/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sampling (sampling.h): which inputs are drawn, and the sets of samples on several threads.
 *
 * A step of a loop over threads is some whole sets: their inputs are drawn into rows, averages over
 * what varies are taken, and the roots are evaluated, block by block, straight into the values.
 * Every thread has a work space of its own; nothing is allocated while threads run. Owns what it
 * makes in the arenas it was given. */
#include "eval/sampling.h"

#include "base/parallel.h"
#include "eval/inner.h"
#include "eval/places.h"
#include "math/statistics.h"

#include <assert.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

struct sampler {
    struct arena *arena;
    struct means *means;
    struct eval *v;
    struct spreads *spreads;
    const struct mean_source *source;
    struct sampling_plan plan;
    size_t n;
    uint32_t *inputs; /* unknown ones, which rise */
    struct draws *draws;
};

struct sampling_plan sampling_defaults(void)
{
    return (struct sampling_plan){.method = DRAW_SCRAMBLED,
                                  .log2_points = 6,
                                  .most_batches = 1,
                                  .seed = 1,
                                  .threads = 1,
                                  .isa = isa_best()};
}

/* ---- which inputs ---- */

/* The numbers of the uncertain inputs of all roots lie in least .. end - 1. */
struct range {
    uint32_t least, end;
};

static struct range range_of_inputs(const struct graph *g, size_t n_roots, const node_id *roots)
{
    struct range r = {UINT32_MAX, 0};
    size_t count;
    for (size_t k = 0; k < n_roots; k++) {
        const uint32_t *of = graph_uncertain(g, roots[k], &count);
        if (count && of[0] < r.least)
            r.least = of[0];
        if (count && of[count - 1] >= r.end)
            r.end = of[count - 1] + 1;
    }
    return r.end ? r : (struct range){0, 0};
}

/* The unknown inputs of all roots, in rising order, without repetition. */
static uint32_t *unknown_inputs(struct arena *a, const struct graph *g,
                                const struct mean_source *source, size_t n_roots,
                                const node_id *roots, size_t *n)
{
    struct range r = range_of_inputs(g, n_roots, roots);
    bool *is_met = NEW_ARRAY(a, r.end - r.least, bool);
    uint32_t *inputs = NEW_ARRAY(a, r.end - r.least, uint32_t);
    for (size_t k = 0; k < n_roots; k++) {
        size_t count;
        const uint32_t *of = graph_uncertain(g, roots[k], &count);
        for (size_t i = 0; i < count; i++)
            is_met[of[i] - r.least] = true;
    }
    *n = 0;
    for (uint32_t i = r.least; i < r.end; i++)
        if (is_met[i - r.least] && !source->varies(source->ctx, i))
            inputs[(*n)++] = i;
    return inputs;
}

ohmen_status sampler_new(struct arena *a, struct means *m, const struct sampling_plan *p,
                         size_t n_roots, const node_id *roots, struct sampler **out, ohmen_error *e)
{
    struct sampler *s = NEW(a, struct sampler);
    *s = (struct sampler){.arena = a, .means = m, .plan = *p};
    s->v = means_eval(m);
    s->spreads = means_spreads(m);
    s->source = s->spreads->source;
    s->inputs = unknown_inputs(a, s->v->g, s->source, n_roots, roots, &s->n);
    struct draw_input *inputs = NEW_ARRAY(a, s->n, struct draw_input);
    for (size_t i = 0; i < s->n; i++) {
        inputs[i].name = s->source->name(s->source->ctx, s->inputs[i]);
        inputs[i].times = s->source->dist(s->source->ctx, s->inputs[i], &inputs[i].dist);
    }
    places_find(a, s->v, n_roots, roots, s->n, s->inputs, inputs);
    struct draw_plan plan = {p->method, p->log2_points, p->seed, p->isa};
    ohmen_status status = draws_new(a, &plan, s->n, inputs, &s->draws, e);
    if (status == OHMEN_OK)
        *out = s;
    return status;
}

/* ---- what is evaluated ---- */

/* The work space of a thread. */
struct worker {
    struct tape_work *tape;
    struct inner_work **inner;
    double *draw;       /* for draws_fill */
    double **rows;      /* by unknown input: a step's lanes */
    double **given;     /* by inner node: a block's lanes */
    const double **in;  /* of the tape: rows and given, from some lane on */
    const double **sub; /* of an inner node */
    double **out;
};

/* Inputs take turns by tables, so that a table is in the cache for all who need it. */
struct turn {
    uintptr_t table;
    uint32_t input;
};

struct run {
    const struct sampler *s;
    struct arena *arena;
    size_t points, block, sets_of_step, n_roots;
    size_t n;
    uint32_t *inputs;   /* of these roots, which rise */
    uint32_t *drawn;    /* where each is among those of the sampler */
    struct turn *turns; /* in which order they are drawn */
    size_t n_inner;
    struct inner **inner;
    uint32_t **inner_at; /* of each: where its unknown inputs are among `inputs` */
    struct tape *tape;
    struct worker *workers;
    double **values;
    size_t capacity; /* sets */
    size_t first;    /* set of the batch */
};

static ohmen_status make_inner(struct run *r, const struct inner_nodes *nodes, ohmen_error *e)
{
    const struct sampler *s = r->s;
    r->n_inner = nodes->n;
    r->inner = NEW_ARRAY(r->arena, nodes->n, struct inner *);
    r->inner_at = NEW_ARRAY(r->arena, nodes->n, uint32_t *);
    for (size_t k = 0; k < nodes->n; k++) {
        struct inner *x;
        ohmen_status status =
            inner_new(r->arena, s->v, s->spreads, s->plan.isa, nodes->at[k], &x, e);
        if (status != OHMEN_OK)
            return status;
        r->inner[k] = x;
        r->inner_at[k] = NEW_ARRAY(r->arena, x->n_unknown, uint32_t);
        for (size_t i = 0; i < x->n_unknown; i++)
            r->inner_at[k][i] = knot_place(r->inputs, r->n, x->unknown[i]);
    }
    return OHMEN_OK;
}

static int order_of_turns(const void *p, const void *q)
{
    const struct turn *a = p, *b = q;
    if (a->table != b->table)
        return a->table < b->table ? -1 : 1;
    return (a->input > b->input) - (a->input < b->input);
}

/* Finds the inputs of the roots among those of the sampler. */
static void find_drawn(struct run *r)
{
    const struct sampler *s = r->s;
    r->drawn = NEW_ARRAY(r->arena, r->n, uint32_t);
    r->turns = NEW_ARRAY(r->arena, r->n, struct turn);
    for (uint32_t i = 0; i < r->n; i++) {
        r->drawn[i] = knot_place(s->inputs, s->n, r->inputs[i]);
        assert(r->drawn[i] != UINT32_MAX);
        r->turns[i] = (struct turn){draws_table(s->draws, r->drawn[i]), i};
    }
    if (r->n > 1)
        qsort(r->turns, r->n, sizeof *r->turns, order_of_turns);
}

static void make_worker(struct run *r, struct worker *w)
{
    struct arena *a = r->arena;
    size_t length = r->sets_of_step * r->points;
    w->tape = tape_work_new(a, r->tape, r->block);
    w->inner = NEW_ARRAY(a, r->n_inner, struct inner_work *);
    w->draw = NEW_ARRAY(a, draws_work(r->s->draws), double);
    w->rows = NEW_ARRAY(a, r->n, double *);
    w->given = NEW_ARRAY(a, r->n_inner, double *);
    w->in = NEW_ARRAY(a, r->n + r->n_inner, const double *);
    w->sub = NEW_ARRAY(a, r->n, const double *);
    w->out = NEW_ARRAY(a, r->n_roots, double *);
    for (size_t i = 0; i < r->n; i++)
        w->rows[i] = NEW_ARRAY(a, length, double);
    for (size_t k = 0; k < r->n_inner; k++) {
        w->inner[k] = inner_work_new(a, r->inner[k], r->block);
        w->given[k] = NEW_ARRAY(a, r->block, double);
        w->in[r->n + k] = w->given[k];
    }
}

/* Whole sets, as many as fill a block. */
static void choose_sizes(struct run *r)
{
    size_t block = r->s->plan.block ? r->s->plan.block : tape_block(r->tape);
    size_t sets = block / r->points;
    r->sets_of_step = sets < 1 ? 1 : sets > SAMPLING_BATCH ? SAMPLING_BATCH : sets;
    size_t length = r->sets_of_step * r->points;
    r->block = block < length ? block : length;
}

static ohmen_status prepare(struct run *r, const node_id *roots, ohmen_error *e)
{
    const struct sampler *s = r->s;
    struct inner_nodes nodes = {0};
    r->inputs = unknown_inputs(r->arena, s->v->g, s->source, r->n_roots, roots, &r->n);
    find_drawn(r);
    inner_find(r->arena, s->v->g, s->source, r->n_roots, roots, &nodes);
    ohmen_status status = make_inner(r, &nodes, e);
    if (status != OHMEN_OK)
        return status;
    struct tape_inputs in = {r->n, r->inputs, nodes.n, nodes.at};
    r->tape = tape_new(r->arena, s->v, s->plan.isa, &in, r->n_roots, roots);
    choose_sizes(r);
    r->workers = NEW_ARRAY(r->arena, s->plan.threads, struct worker);
    for (size_t k = 0; k < s->plan.threads; k++)
        make_worker(r, &r->workers[k]);
    return OHMEN_OK;
}

/* ---- sets ---- */

static void draw(const struct run *r, struct worker *w, size_t set, size_t sets)
{
    for (size_t turn = 0; turn < r->n; turn++) {
        uint32_t i = r->turns[turn].input;
        for (size_t k = 0; k < sets; k++)
            draws_fill(r->s->draws, r->drawn[i], set + k, w->draw, w->rows[i] + k * r->points);
    }
}

/* Lanes at .. at + n of a step. */
static void evaluate(const struct run *r, struct worker *w, size_t at, size_t n)
{
    for (size_t i = 0; i < r->n; i++)
        w->in[i] = w->rows[i] + at;
    for (size_t k = 0; k < r->n_inner; k++) {
        for (size_t i = 0; i < r->inner[k]->n_unknown; i++)
            w->sub[i] = w->in[r->inner_at[k][i]];
        inner_run(r->inner[k], w->inner[k], n, w->sub, w->given[k]);
    }
    tape_run(r->tape, w->tape, n, w->in, w->out);
}

static void take_step(void *ctx, size_t worker, size_t step)
{
    const struct run *r = ctx;
    struct worker *w = &r->workers[worker];
    size_t done = step * r->sets_of_step;
    size_t sets = SAMPLING_BATCH - done < r->sets_of_step ? SAMPLING_BATCH - done : r->sets_of_step;
    size_t set = r->first + done, length = sets * r->points;
    draw(r, w, set, sets);
    for (size_t at = 0; at < length; at += r->block) {
        size_t n = length - at < r->block ? length - at : r->block;
        for (size_t k = 0; k < r->n_roots; k++)
            w->out[k] = r->values[k] + set * r->points + at;
        evaluate(r, w, at, n);
    }
}

/* ---- batches ---- */

static void make_sets(struct run *r, size_t sets)
{
    if (sets <= r->capacity)
        return;
    size_t had = r->capacity;
    r->capacity = 2 * had > sets ? 2 * had : sets;
    for (size_t k = 0; k < r->n_roots; k++) {
        double *more = NEW_ARRAY(r->arena, r->capacity * r->points, double);
        if (had)
            memcpy(more, r->values[k], had * r->points * sizeof *more);
        r->values[k] = more;
    }
}

static bool is_finite(const struct run *r, size_t k, size_t from, size_t sets)
{
    const double *x = r->values[k] + from * r->points;
    for (size_t i = 0; i < sets * r->points; i++)
        if (!isfinite(x[i]))
            return false;
    return true;
}

/* Whether the judged means are precise enough. */
static bool is_precise(const struct run *r, size_t sets)
{
    const struct sampling_plan *p = &r->s->plan;
    double greatest = 0, error = 0;
    for (size_t k = 0; k < p->n_judged && k < r->n_roots; k++) {
        struct sampled mean = statistics_mean(sets, r->points, r->values[k]);
        greatest = fmax(greatest, fabs(mean.value));
        error = fmax(error, mean.error);
    }
    return error <= p->precision * greatest;
}

static ohmen_status take_batch(struct run *r, const node_id *roots, node_id *culprit,
                               ohmen_error *e)
{
    size_t steps = (SAMPLING_BATCH + r->sets_of_step - 1) / r->sets_of_step;
    make_sets(r, r->first + SAMPLING_BATCH);
    parallel_do(r->s->plan.threads, steps, take_step, r);
    for (size_t k = 0; k < r->n_roots; k++) {
        if (is_finite(r, k, r->first, SAMPLING_BATCH))
            continue;
        if (culprit)
            *culprit = roots[k];
        return error_set(e, OHMEN_COMPUTE,
                         "node %u of the calculation has no finite value for some of what is "
                         "possible",
                         (unsigned)roots[k]);
    }
    r->first += SAMPLING_BATCH;
    return OHMEN_OK;
}

static ohmen_status take_batches(struct run *r, const node_id *roots, struct sampling *out,
                                 node_id *culprit, ohmen_error *e)
{
    const struct sampling_plan *p = &r->s->plan;
    bool is_over = false;
    if (p->watch)
        p->watch(p->watch_ctx, 0, p->most_batches);
    while (!is_over) {
        ohmen_status status = take_batch(r, roots, culprit, e);
        if (status != OHMEN_OK)
            return status;
        out->batches++;
        out->reached = p->precision > 0 && is_precise(r, r->first);
        is_over = out->reached || out->batches == p->most_batches;
        if (p->watch && !p->watch(p->watch_ctx, out->batches, p->most_batches) && !is_over)
            out->interrupted = is_over = true;
    }
    return OHMEN_OK;
}

ohmen_status sampler_run(struct arena *a, struct sampler *s, size_t n_roots, const node_id *roots,
                         struct sampling *out, node_id *culprit, ohmen_error *e)
{
    struct run r = {.s = s, .arena = a, .n_roots = n_roots};
    struct sampling got = {.n_roots = n_roots, .points = (size_t)1 << s->plan.log2_points};
    r.points = got.points;
    r.values = NEW_ARRAY(a, n_roots, double *);
    means_change_over(s->means);
    ohmen_status status = prepare(&r, roots, e);
    means_change_over(s->means);
    if (status == OHMEN_OK)
        status = take_batches(&r, roots, &got, culprit, e);
    if (status != OHMEN_OK)
        return status;
    got.sets = r.first;
    got.values = r.values;
    *out = got;
    return OHMEN_OK;
}
