/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Hazards whose risks are uncertain (hazards.h). */
#include "hazards.h"

#include "random.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>

/* Shapes of gammas before anything was counted, and events that may have been counted since. */
static const double before[] = {0.5, 1.24, 3.24};
static const double error_factors[] = {2, 3, 5, 10};
enum { PRIORS = 3, COUNTS = 8, GAMMAS = PRIORS * COUNTS, LOGNORMALS = 4 };

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "hazards: %s\n", why);
    exit(EXIT_FAILURE);
}

/* ---- what is uncertain ---- */

static struct dist dist_of(unsigned shape)
{
    if (shape < GAMMAS)
        return (struct dist){DIST_GAMMA, {1, before[shape / COUNTS] + shape % COUNTS}};
    return (struct dist){DIST_LOGNORMAL, {1, error_factors[shape - GAMMAS], NAN}};
}

double hazards_dist(const struct hazards *h, size_t input, struct dist *d)
{
    *d = dist_of(h->inputs[input].shape);
    return h->inputs[input].times;
}

static double dist_in(void *ctx, uint32_t input, struct dist *d)
{
    return hazards_dist(ctx, input, d);
}

static const char *name_in(void *ctx, uint32_t input)
{
    const struct hazards *h = ctx;
    return h->inputs[input].name;
}

static bool varies_in(void *ctx, uint32_t input)
{
    (void)ctx;
    (void)input;
    return false;
}

/* A rate, four probabilities and two damages. */
static void draw_inputs(struct random *r, size_t first, struct hazard_input *in)
{
    static const double greatest[MODEL_INPUTS] = {0.5, 0.1, 0.1, 0.1, 0.1, 2, 2};
    for (size_t i = 0; i < MODEL_INPUTS; i++) {
        size_t shape =
            i < 5 && i % 2 == 0 ? random_index(r, GAMMAS) : GAMMAS + random_index(r, LOGNORMALS);
        in[i].shape = (uint8_t)shape;
        in[i].times = random_uniform(r, greatest[i] / 10, greatest[i]);
        snprintf(in[i].name, sizeof in[i].name, "x%zu", first + i);
    }
}

/* ---- the graph ---- */

static void add_hazard(struct hazards *h, struct random *r, size_t k)
{
    struct hazard_input *in = h->inputs + k * MODEL_INPUTS;
    double means[MODEL_INPUTS], constants[MODEL_CONSTANTS];
    draw_inputs(r, k * MODEL_INPUTS, in);
    for (int i = 0; i < MODEL_INPUTS; i++) {
        struct dist d = dist_of(in[i].shape);
        means[i] = in[i].times * dist_mean(&d);
    }
    for (int i = 0; i < MODEL_CONSTANTS; i++)
        constants[i] = random_uniform(r, 0.1, 1.5);
    graph_section_begin(h->g, (uint32_t)k);
    h->risk[k] = tape_graph(h->g, (uint32_t)(k * MODEL_INPUTS), means, constants);
    graph_section_end(h->g);
}

struct hazards *hazards_new(size_t n)
{
    struct arena *a = arena_new(NULL);
    struct random r = random_seed(2385);
    if (!a)
        fail("memory is short");
    struct hazards *h = NEW(a, struct hazards);
    *h = (struct hazards){.arena = a, .g = graph_new(a), .n = n};
    h->source =
        (struct mean_source){.ctx = h, .name = name_in, .dist = dist_in, .varies = varies_in};
    h->risk = NEW_ARRAY(a, n, node_id);
    h->inputs = NEW_ARRAY(a, n * MODEL_INPUTS, struct hazard_input);
    for (size_t k = 0; k < n; k++)
        add_hazard(h, &r, k);
    h->v = eval_new(a, h->g);
    h->m = means_new(a, h->v, &h->source);
    if (eval_point(h->v, NULL, NULL) != OHMEN_OK)
        fail("the graph cannot be evaluated");
    return h;
}

/* ---- samples ---- */

struct draw_input *hazards_draws(const struct hazards *h, struct arena *a, size_t first, size_t n)
{
    struct draw_input *to = NEW_ARRAY(a, n * MODEL_INPUTS, struct draw_input);
    for (size_t i = 0; i < n * MODEL_INPUTS; i++) {
        size_t input = first * MODEL_INPUTS + i;
        to[i].name = h->inputs[input].name;
        to[i].times = hazards_dist(h, input, &to[i].dist);
        to[i].place = (unsigned)i;
    }
    return to;
}

struct sampler *hazards_sampler(const struct hazards *h, struct arena *a,
                                const struct sampling_plan *p)
{
    struct sampler *s;
    if (sampler_new(a, h->m, p, h->n, h->risk, &s, NULL) != OHMEN_OK)
        fail("the inputs cannot be drawn");
    return s;
}

struct sampling hazards_sample(const struct hazards *h, struct arena *a, struct sampler *s,
                               size_t first, size_t n)
{
    struct sampling got;
    if (sampler_run(a, s, n, h->risk + first, &got, NULL, NULL) != OHMEN_OK)
        fail("a risk is not finite");
    return got;
}
