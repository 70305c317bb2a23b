/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What figures may be, over all that is unknown: their values in samples (eval/sampling.h), and the
 * points that are exceeded with 95, 50 and 5 %. The headline value of a figure stays its mean
 * (figure_value), which is exact or integrated wherever that can be done; the sample is for the
 * distribution around it.
 *
 * Names: FIGURE[p5], FIGURE[p50], FIGURE[p95], such as H-BUS1.risk[p95]. */
#ifndef FIGURE_SAMPLES_H
#define FIGURE_SAMPLES_H

#include "eval/sampling.h"
#include "figure/figure.h"
#include "math/statistics.h"

enum spread_point { SPREAD_P5, SPREAD_P50, SPREAD_P95, SPREAD_POINTS };

/* Probabilities of being below the points. */
extern const double spread_probability[SPREAD_POINTS];

/* The distribution of one figure. Certain figures are at one place, without error. */
struct figure_spread {
    struct sampled at[SPREAD_POINTS];
    struct sampled mean; /* of the sample */
    bool is_certain;     /* nothing unknown is in it */
};

/* Values of n figures in the same samples; figures_evaluate has been called. Lives in `a`.
 * OHMEN_COMPUTE names the figure that is not finite somewhere. */
ohmen_status figures_sample(struct figures *f, struct arena *a, const struct sampling_plan *p,
                            size_t n, const figure_id *ids, struct sampling *out, ohmen_error *e);

/* Is nothing unknown in the figure? */
bool figure_is_certain(const struct figures *f, figure_id id);

/* The spread of figure k of a sample. */
struct figure_spread figure_spread_of(const struct figures *f, struct arena *a,
                                      const struct sampling *s, size_t k, figure_id id);

/* Splits "H.risk[p95]" into the figure's name and the point; false where it is no such name. */
bool spread_is_named(struct arena *a, const char *name, const char **figure, enum spread_point *at);
/* "H.risk[p95]" */
const char *spread_name(const struct figures *f, struct arena *a, figure_id id,
                        enum spread_point at);

/* The unknown inputs of figures, by how their values rank with those of a figure. */
struct rank_input {
    uint32_t input;   /* of the graph */
    const char *name; /* of its figure; of its stream (figures.input_names) where it has none */
    figure_id figure; /* of the fewest changes among those of its stream; or FIGURE_NONE */
    double correlation;
};
struct rank_inputs ARRAY_BODY(struct rank_input);

/* Of the unknown inputs below some of the figures of a sample those that move with `values`, which
 * come from as many sets of that sample, of n figures by the same plan: by the size of Spearman's
 * rank correlation, ties by name; correlations smaller than `least` are left out. The inputs are
 * drawn once more. Lives in `a`. */
ohmen_status figure_ranks(struct figures *f, struct arena *a, const struct sampling_plan *p,
                          size_t n, const figure_id *ids, size_t n_below, const node_id *below,
                          const double *values, size_t sets, double least, struct rank_inputs *out,
                          ohmen_error *e);

#endif
