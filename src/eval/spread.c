/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Values of inputs: atoms, quadrature points, latin hypercubes (math/draw.h). Owns all that it
 * makes, in the arena of the means.
 *
 * Invariant: what an input gets depends on its distribution and its name alone. */
#include "eval/spread.h"

#include "math/dist.h"
#include "math/draw.h"
#include "math/elementary.h"

#include <math.h>

/* ---- one spread an input ---- */

static struct spread **find_slot(struct spread **slots, size_t n_slots, uint32_t input)
{
    size_t i = (input * UINT64_C(0x9E3779B97F4A7C15) >> 32) & (n_slots - 1);
    while (slots[i] && slots[i]->input != input)
        i = (i + 1) & (n_slots - 1);
    return &slots[i];
}

static void grow_slots(struct spreads *s)
{
    size_t n_slots = s->n_slots ? 2 * s->n_slots : 64;
    struct spread **slots = NEW_ARRAY(s->arena, n_slots, struct spread *);
    for (size_t i = 0; i < s->n_slots; i++)
        if (s->slots[i])
            *find_slot(slots, n_slots, s->slots[i]->input) = s->slots[i];
    s->slots = slots;
    s->n_slots = n_slots;
}

struct spread *spreads_find(struct spreads *s, uint32_t input)
{
    if (2 * (s->n + 1) > s->n_slots)
        grow_slots(s);
    struct spread **slot = find_slot(s->slots, s->n_slots, input);
    if (*slot)
        return *slot;
    struct spread *x = NEW(s->arena, struct spread);
    x->input = input;
    x->name = s->source->name(s->source->ctx, input);
    s->n++;
    return *slot = x;
}

/* ---- values ---- */

static ohmen_status quantile(const struct spreads *s, const struct spread *x, double p, double q,
                             double *value, ohmen_error *e)
{
    ohmen_status status = s->source->quantile(s->source->ctx, x->input, p, q, value, e);
    if (status != OHMEN_OK)
        return status;
    if (!isfinite(*value))
        return error_set(e, OHMEN_COMPUTE, "%s has no finite quantile at %g", x->name, p);
    return OHMEN_OK;
}

/* The point at z. In the far tails the greater probability is the greatest below 1. */
static ohmen_status point_at(const struct spreads *s, const struct spread *x, double z, double *at,
                             ohmen_error *e)
{
    const double most = 1 - 0x1p-53;
    return quantile(s, x, fmin(dist_normal_probability(z), most),
                    fmin(dist_normal_probability(-z), most), at, e);
}

/* Points i of the level: all z at level 0, the middles between those before at the others. */
static double z_of(size_t level, size_t i)
{
    double step = 1.0 / (double)((size_t)1 << level);
    return level == 0 ? (double)i - SPREAD_FAR : (2 * (double)i + 1) * step - SPREAD_FAR;
}

static ohmen_status add_level(struct spreads *s, struct spread *x, ohmen_error *e)
{
    size_t level = x->levels, had = level ? x->n[level - 1] : 0;
    size_t more = level ? had - 1 : 2 * SPREAD_FAR + 1;
    double *at = NEW_ARRAY(s->arena, had + more, double);
    double *weight = NEW_ARRAY(s->arena, had + more, double);
    for (size_t i = 0; i < had; i++)
        at[i] = x->x[i], weight[i] = x->weight[i];
    for (size_t i = 0; i < more; i++) {
        double z = z_of(level, i);
        ohmen_status status = point_at(s, x, z, &at[had + i], e);
        if (status != OHMEN_OK)
            return status;
        weight[had + i] = math_exp(-z * z / 2);
    }
    x->x = at;
    x->weight = weight;
    x->n[x->levels++] = had + more;
    return OHMEN_OK;
}

/* True for a discrete input, whose atoms it takes. */
static bool take_atoms(const struct spreads *s, struct spread *x)
{
    size_t n = s->source->atoms(s->source->ctx, x->input, &x->x, &x->weight);
    if (n == 0)
        return false;
    x->is_discrete = true;
    for (x->levels = 0; x->levels < SPREAD_LEVELS; x->levels++)
        x->n[x->levels] = n;
    return true;
}

ohmen_status spread_rule(struct spreads *s, struct spread *x, size_t level, ohmen_error *e)
{
    if (x->levels == 0 && take_atoms(s, x))
        return OHMEN_OK;
    while (x->levels <= level) {
        ohmen_status status = add_level(s, x, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

/* The sets that all knots share. An input must not know of those that it will meet in some knot,
 * as the places of scrambled points would ask for. */
static const struct draw_plan plan = {DRAW_HYPERCUBE, SPREAD_LOG2, SPREAD_SEED, ISA_plain};

ohmen_status spread_sample(struct spreads *s, struct spread *x, ohmen_error *e)
{
    struct draw_input input = {.name = x->name};
    struct draws *d;
    if (x->sample)
        return OHMEN_OK;
    input.times = s->source->dist(s->source->ctx, x->input, &input.dist);
    ohmen_status status = draws_new(s->arena, &plan, 1, &input, &d, e);
    if (status != OHMEN_OK)
        return status;
    double *at = NEW_ARRAY(s->arena, MEAN_SETS * MEAN_STRATA, double);
    double *work = NEW_ARRAY(s->arena, draws_work(d), double);
    for (size_t set = 0; set < MEAN_SETS; set++)
        draws_fill(d, 0, set, work, at + set * MEAN_STRATA);
    x->sample = at;
    return OHMEN_OK;
}
