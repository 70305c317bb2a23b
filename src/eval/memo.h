/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Results of one DIAGRAM over windows at points of an integration, inside src/eval. Several nodes
 * above a diagram are integrated over the same points, since the same input has the same values
 * everywhere: what was computed there once is looked up. */
#ifndef EVAL_MEMO_H
#define EVAL_MEMO_H

#include "eval/state.h"

struct memo;

/* Of a DIAGRAM over windows in which n inputs vary, in rising order; all others stand at the values
 * of now. Lives in `a`. */
struct memo *memo_new(struct arena *a, struct eval *v, node_id diagram, size_t n,
                      const uint32_t *inputs);
bool memo_is_of(const struct memo *m, node_id diagram, size_t n, const uint32_t *inputs);

/* What is known at values x of the inputs, or NULL. */
const double *memo_find(const struct memo *m, const double *x);
/* Makes it known, while there is room. */
void memo_keep(struct memo *m, const double *x, const double *results);

/* The same from the values of the diagram's arguments, which are those at x: the bytes of
 * eval_diagram. */
void memo_diagram(struct memo *m, const double *x, double *results);

#endif
