/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What figures may be, over all that is unknown: values of some nodes (roots) in many samples.
 *
 * In each sample every unknown input has one value (math/draw.h), and each root what its operations
 * make of them (eval/tape.h), the same inputs for all roots: so differences of roots are those of
 * the same world. HELD stands at the mean of its argument, as it does in means.
 *
 * An input that varies from one occurrence to the next is no knowledge: in each sample it is
 * averaged over. Where roots are linear in it, it stands at its mean, which is exact; elsewhere the
 * node that bends (graph_bends) is integrated over it, in every sample: over one such input by its
 * atoms or by the trapezoidal rule of eval/mean.h with steps of 1/8 (exact to 1e-9 for what is
 * smooth), over two by both rules in steps of 1/2, over more on 1024 scrambled points that are the
 * same in all samples.
 *
 * Samples come in sets (math/statistics.h), and sets in batches of SAMPLING_BATCH, after which it
 * is decided whether there are enough: so what is stopped, for whatever reason, stops between two
 * batches, and the result depends on their number alone.
 *
 * Invariant: the values of a root depend on the seed, the method, the number of points, and on the
 * roots that the sampler was made for (whose inputs are drawn together, each at a place of its own
 * among scrambled points: eval/places.h), and on nothing else: not on what else is in the graph, on
 * which of these roots are asked for, on threads, block or instruction set. */
#ifndef EVAL_SAMPLING_H
#define EVAL_SAMPLING_H

#include "eval/mean.h"
#include "math/draw.h"

enum { SAMPLING_BATCH = 16 }; /* sets */

struct sampling_plan {
    enum draw_method method;
    unsigned log2_points; /* values in a set; DRAW_LEAST_LOG2 .. DRAW_MOST_LOG2 */
    size_t most_batches;  /* at least 1 */
    double precision; /* > 0: enough once the standard error of the mean of each judged root is at
                         most this part of the greatest size of a judged root's mean; 0: all batches
                         are taken */
    size_t n_judged;  /* the first roots */
    uint64_t seed;
    size_t threads; /* 1 .. PARALLEL_MOST */
    size_t block;   /* lanes at a time; 0: what suits the cache */
    enum isa isa;   /* that runs */
    /* Told before the first batch, and asked after each: false ends it there. NULL: never. */
    bool (*watch)(void *ctx, size_t batches, size_t most);
    void *watch_ctx;
};
/* Scrambled, 16 sets of 64 points, seed 1, 1 thread, the widest instructions that run. */
struct sampling_plan sampling_defaults(void);

struct sampling {
    size_t n_roots, sets, points;
    double *const *values; /* of root k in set s: values[k][s * points ..] */
    size_t batches;
    bool reached;     /* the precision, where one was asked for */
    bool interrupted; /* by `watch`, before all batches or the precision */
};

/* Inputs of certain roots with their tables, drawn again and again. */
struct sampler;

/* For any roots of whose inputs those of `roots` are all. means_update has been called; the graph
 * does not grow as long as the sampler lives, in `a`. OHMEN_COMPUTE for an input without a finite
 * quantile. */
ohmen_status sampler_new(struct arena *a, struct means *m, const struct sampling_plan *p,
                         size_t n_roots, const node_id *roots, struct sampler **out,
                         ohmen_error *e);

/* Takes the samples of some of these roots: the same values, whichever are asked for at a time. No
 * DIAGRAM or COURSE; INPUT nodes may be roots. Lives in `a`. OHMEN_COMPUTE when a value is not
 * finite: *culprit (may be NULL) is that root. */
ohmen_status sampler_run(struct arena *a, struct sampler *s, size_t n_roots, const node_id *roots,
                         struct sampling *out, node_id *culprit, ohmen_error *e);

#endif
