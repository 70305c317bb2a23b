/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The worlds in which damage is summed: rates and damages of all cases in the same samples of what
 * is unknown. Private to src/decide (loss.c, utility.c). */
#ifndef DECIDE_LOSS_SAMPLES_H
#define DECIDE_LOSS_SAMPLES_H

#include "decide/loss_damage.h"

struct loss_world {
    struct figures *f;
    struct arena *arena;
    size_t n_cases;
    const struct loss_case *cases;
    struct sampling_plan plan;
    size_t sets, points;    /* 1 and 1: nothing is unknown */
    struct sampling sample; /* of the rates and the unknown inputs; of no root where nothing is */
    size_t *row_of;         /* by node: its row in the sample, from 1; 0: none */
    double *certain;        /* by row, where nothing is unknown */
    ARRAY(struct loss_damage) damages;
    size_t *damage_of; /* by node: its number, from 1 */
};

/* How often a source is expected in a sample, over its time. */
double loss_expected(const struct loss_world *w, const struct loss_source *s, size_t sample);
/* The rate in a slot. */
double loss_rate(const struct loss_world *w, const struct loss_source *s, size_t slot,
                 size_t sample);
/* The years of a source: their number, and of each how much of it lies in the time, and its slot.
 */
size_t loss_years(const struct loss_source *s);
struct loss_year {
    double from, to;
    size_t slot;
};
struct loss_year loss_year_at(const struct loss_source *s, size_t i);

struct loss_damage *loss_world_damage(const struct loss_world *w, node_id damage);
/* Brings a damage to a lattice, if it is not there. */
void loss_world_place(struct loss_world *w, node_id damage, const struct lattice *l);

#endif
