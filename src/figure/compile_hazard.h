/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What compile_hazard.c and compile_outcome.c share. Private to src/figure. */
#ifndef FIGURE_COMPILE_HAZARD_H
#define FIGURE_COMPILE_HAZARD_H

#include "figure/compile.h"

/* Where one is in the event tree. */
struct spot {
    const char *path, *row;
    const struct quantity *in;         /* clearance time of the row, or NULL */
    node_id share;                     /* product of the shares so far, or NODE_NONE */
    const struct condition *condition; /* of the schemes, newest first */
    bfun reached;
};

struct tree_end {
    struct spot spot;
    const char *outcome;
    size_t outcome_index;
    uint32_t root;
};

struct tree {
    struct arena *arena;
    struct building *building;
    const struct hazard *hazard;
    struct wiring wiring;
    ARRAY(struct tree_end) ends;
    struct hazard_exports *exports;
    const struct frequency_exports *frequency;
    node_id *in_window; /* probability of end e in window w: [w * n_ends + e]; NULL: no windows */
};

/* Damage, frequency and risk of each outcome, and the hazard's own sums. */
void compile_outcomes(struct tree *t);

/* yearly.c: the probability of each end over the horizon, and risk year by year. */
node_id yearly_mean_end(struct tree *t, size_t end);
void yearly_risks(struct tree *t);

#endif
