/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Over which time figures are averaged.
 *
 * Things that fail in time are tested, and so fail more often before a test than behind it.
 *   nothing timed    no windows: figures are the same at all times
 *   nothing dated    one window, the common cycle of all tests, all of them tested together at the
 *                    start of the horizon: the long-run average
 *   something dated  (a date of a test, or a part that no test ever finds) each year of the horizon
 *                    is a window; years that repeat an earlier one share its window. Where
 *                    something comes into service within the horizon, with an option, the first
 *                    window begins then; years before have no meaning, and share it
 *   steady           (the register or figures.whole_cycles asks for it) one window of a common
 *                    cycle behind all first tests, dates kept as phases
 * Where no common cycle within SPAN_CYCLE years exists, years of the horizon are the windows. */
#ifndef FIGURE_SPAN_H
#define FIGURE_SPAN_H

#include "figure/compile.h"

#define SPAN_CYCLE 400  /* years */
#define SPAN_TESTS 4096 /* of one thing in a cycle */

/* The windows of things that fail together. Lives in the arena of f. */
struct span span_of(struct figures *f, size_t n, const struct behaviour *const *parts);

/* The mean over the span of what holds in each window; values[0] where it is not yearly. */
node_id span_mean(struct building *b, const struct span *s, const node_id *values);

/* "2031": the first year of a window; NULL where it is not yearly. */
const char *span_label(struct figures *f, const struct span *s, uint32_t window);

#endif
