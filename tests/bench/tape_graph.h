/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The model of tape_model.h as nodes of a graph. */
#ifndef TESTS_BENCH_TAPE_GRAPH_H
#define TESTS_BENCH_TAPE_GRAPH_H

#include "graph/graph.h"
#include "tape_model.h"

/* One hazard in the open section: its risk. The inputs are first, first + 1, ... */
node_id tape_graph(struct graph *g, uint32_t first, const double means[MODEL_INPUTS],
                   const double constants[MODEL_CONSTANTS]);

#endif
