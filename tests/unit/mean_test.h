/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the tests of means share: a graph whose inputs have distributions. */
#ifndef TESTS_MEAN_TEST_H
#define TESTS_MEAN_TEST_H

#include "eval/mean.h"
#include "graph/diagram.h"
#include "math/dist.h"

#include <check.h>

enum { MEAN_INPUTS = 16 };

/* Input i of the graph has dist[i] and the name names[i]; the numbers are those of graph_input. */
struct mean_world {
    struct arena *arena;
    struct graph *g;
    struct eval *v;
    struct means *m;
    struct mean_source source;
    struct dist dist[MEAN_INPUTS];
    char names[MEAN_INPUTS][24];
    bool has_quantiles;       /* false: the source refuses */
    bool varies[MEAN_INPUTS]; /* from one occurrence to the next */
};

/* Without inputs, in an arena of the seam; `w` must not move. Section 0 is open. */
void mean_world_open(struct mean_world *w, struct arena *a);

/* Gives input i a distribution and the name "x<i>". */
void mean_world_set(struct mean_world *w, uint32_t i, struct dist d);

node_id mean_input(struct mean_world *w, uint32_t i);
node_id mean_const(struct mean_world *w, double x);

/* The mean of a node, brought up to date. */
double mean_of(struct mean_world *w, node_id n);

/* All variables at once: x0 and x1 and ... */
const struct diagram *mean_all_of(struct arena *a, uint32_t n);

static const struct dim mean_number = {{0}};

/* Standard deviation of the logarithm that belongs to an error factor. */
double mean_sigma(double error_factor);

Suite *mean_knot_suite(void);
Suite *mean_blend_suite(void);
Suite *mean_random_suite(void);
Suite *mean_sample_suite(void);
Suite *stream_suite(void);

#endif
