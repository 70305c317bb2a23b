/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Responses that are alike under several variants of a hazard.
 *
 * An option that changes only what an outcome costs, whom it harms or how often the hazard occurs
 * leaves its response as it is. The diagram of the response, by far the dearest node of a hazard,
 * is then that of the variant that was compiled before. Private to src/figure. */
#ifndef FIGURE_LIKENESS_H
#define FIGURE_LIKENESS_H

#include "figure/figure.h"

/* A DIAGRAM node that was kept for this hazard with the same structure, windows and arguments,
 * these by what they are and not by their numbers; NODE_NONE. */
node_id likeness_find(const struct figures *f, const char *hazard, const struct diagram *d,
                      size_t n, const node_id *args, const struct windows *w);
void likeness_keep(struct figures *f, const char *hazard, node_id diagram);

#endif
