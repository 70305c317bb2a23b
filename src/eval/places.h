/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which input of a sample gets which place among scrambled points; inside src/eval.
 *
 * The first places are the best ones (math/draw.h). They go to the inputs that move the roots most:
 * by the part that each has in the variance of a root, in a straight line through the means,
 * summed over the first three roots; ties by name. Where there are few inputs, for which all places
 * are good, or where that would take long, they go by name alone. Inputs of one name have one
 * place. */
#ifndef EVAL_PLACES_H
#define EVAL_PLACES_H

#include "eval/eval.h"
#include "math/draw.h"

/* numbers[i], which rise, is the number of input i; sets inputs[i].place. The values of the
 * evaluation are point values. Scratch of `a`. */
void places_find(struct arena *a, struct eval *v, size_t n_roots, const node_id *roots, size_t n,
                 const uint32_t *numbers, struct draw_input *inputs);

#endif
