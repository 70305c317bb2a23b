/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages over what varies, inside each sample (sampling.h); inside src/eval. */
#ifndef EVAL_INNER_H
#define EVAL_INNER_H

#include "eval/knot.h"
#include "eval/tape.h"

/* Nodes that are integrated over varying inputs before the roots can be evaluated, in rising
 * order. Where one lies below another one it has its own average, and the upper one its own. */
struct inner_nodes ARRAY_BODY(node_id);

/* Those of the roots. */
void inner_find(struct arena *a, const struct graph *g, const struct mean_source *source,
                size_t n_roots, const node_id *roots, struct inner_nodes *out);

/* One of them, to be computed for lanes of the unknown inputs. */
struct inner {
    node_id node;
    struct tape *tape;
    size_t n_unknown;
    uint32_t *unknown; /* numbers of its unknown inputs, which rise */
    size_t n_varying;
    size_t n_points;
    double *weight, *x; /* x[point * n_varying + i] */
    uint32_t *place;    /* of input i of the tape: among the unknown, or n_unknown + varying */
};

/* Lives in `a`. The values of the evaluation are those at which means are taken. OHMEN_COMPUTE
 * where a varying input has no quantile. */
ohmen_status inner_new(struct arena *a, struct eval *v, struct spreads *s, enum isa isa,
                       node_id node, struct inner **out, ohmen_error *e);

/* Work space for `block` lanes, for one thread. */
struct inner_work;
struct inner_work *inner_work_new(struct arena *a, const struct inner *x, size_t block);

/* The node in n lanes: rows[i] holds the values of unknown input i. Allocates nothing. */
void inner_run(const struct inner *x, struct inner_work *w, size_t n, const double *const *rows,
               double *out);

#endif
