/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What values an uncertain input takes in an integration, inside src/eval: the points of its
 * quadrature, and its sample. Both are made when they are first asked for, once for all knots. */
#ifndef EVAL_SPREAD_H
#define EVAL_SPREAD_H

#include "eval/mean.h"

/* The trapezoidal rule: z from -SPREAD_FAR to SPREAD_FAR, in steps of 1 at level 0 and of half
 * that at each level more. */
#define SPREAD_FAR 12
#define SPREAD_LEVELS 10

/* Of the samples: MEAN_STRATA = 2^SPREAD_LOG2. */
enum { SPREAD_LOG2 = 5, SPREAD_SEED = 0 };

struct spread {
    uint32_t input;
    const char *name;
    /* The rule: points and their weights, not normalised; those of each level behind those of the
     * levels before. A discrete input has its atoms, at all levels the same. */
    size_t levels;           /* how many are made */
    size_t n[SPREAD_LEVELS]; /* points of all levels up to this one */
    const double *x, *weight;
    bool is_discrete;
    /* Value i of set s is sample[s * MEAN_STRATA + i]: latin hypercubes
     * (math/draw.h). */
    const double *sample;
};

struct spreads {
    struct arena *arena;
    const struct mean_source *source;
    struct spread **slots; /* by input, or NULL */
    size_t n, n_slots;
};

/* Those of the means, which has them for all its knots. */
struct spreads *means_spreads(struct means *m);

/* The spread of an input; its rule and sample are not made yet. */
struct spread *spreads_find(struct spreads *s, uint32_t input);

/* Make what is missing: the rule up to `level`, the sample. OHMEN_COMPUTE where the source has no
 * quantile, or none that is finite. */
ohmen_status spread_rule(struct spreads *s, struct spread *x, size_t level, ohmen_error *e);
ohmen_status spread_sample(struct spreads *s, struct spread *x, ohmen_error *e);

#endif
