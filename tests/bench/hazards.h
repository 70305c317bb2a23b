/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Hazards whose risks are uncertain: the model of tape_model.h, 40 operations, each with seven
 * inputs of its own. Rates and probabilities are gammas of the shape a0 + n, as n counted events
 * give them, or lognormals; damages are lognormals. The same size, the same hazards. */
#ifndef TESTS_BENCH_HAZARDS_H
#define TESTS_BENCH_HAZARDS_H

#include "eval/sampling.h"
#include "tape_graph.h"

struct hazard_input {
    char name[12];
    uint8_t shape; /* of those that hazard_dist knows */
    double times;
};

struct hazards {
    struct arena *arena;
    struct graph *g;
    struct eval *v;
    struct means *m; /* of nothing: no input varies and nothing is held, so samples ask for none */
    struct mean_source source;
    size_t n;
    node_id *risk;
    struct hazard_input *inputs; /* MODEL_INPUTS each */
};

/* Lives in an arena of its own, which the caller frees. Ends the program where memory is short. */
struct hazards *hazards_new(size_t n);

/* An input is the result times a value of *d. */
double hazards_dist(const struct hazards *h, size_t input, struct dist *d);

/* Inputs of `n` hazards from one on as a sample takes them, at places from 0 on; in `a`. */
struct draw_input *hazards_draws(const struct hazards *h, struct arena *a, size_t first, size_t n);

/* A sampler of all risks, in `a`, and what it takes of `n` of them from one on. These end the
 * program where anything is wrong. */
struct sampler *hazards_sampler(const struct hazards *h, struct arena *a,
                                const struct sampling_plan *p);
struct sampling hazards_sample(const struct hazards *h, struct arena *a, struct sampler *s,
                               size_t first, size_t n);

#endif
