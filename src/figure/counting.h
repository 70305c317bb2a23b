/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How the effects of a hazard are counted: what the files consequence_*.c share. Private to
 * src/figure.
 *
 * An effect is a sum over outcomes of frequency times amount, or over ends where the amount
 * depends on the clearance time. */
#ifndef FIGURE_COUNTING_H
#define FIGURE_COUNTING_H

#include "figure/compile.h"
#include "figure/consequences.h"

/* How often it comes to each end in one slot of hazard_exports.yearly. */
struct slot {
    const char *label; /* "2031" */
    node_id frequency; /* of the hazard */
    const figure_id *ends;
};

struct counting {
    struct figures *f;
    struct building b;
    const struct compiled *hazard;
    const struct hazard *data;
    const struct hazard_exports *of;
    node_id one_year;
    size_t n_slots; /* 0: all years are alike */
    struct slot *slots;
    ARRAY(struct consequence) effects;
};

/* What one outcome amounts to: one node, or one for each end. */
struct amount {
    node_id whole;         /* NODE_NONE: nothing, or by end */
    const node_id *at_end; /* by end, NODE_NONE of other outcomes; NULL: `whole` */
};

/* --- nodes (consequence_effect.c) --- */

node_id counting_node(const struct counting *c, figure_id id);
node_id counting_sum(struct counting *c, size_t n, const node_id *nodes, struct dim d);
node_id counting_product(struct counting *c, node_id x, node_id y);
/* A whole number as it is written. */
node_id counting_number(struct counting *c, int64_t n);

/* --- effects (consequence_effect.c) --- */

/* Finds the slots in which the hazard differs; none where all years are alike. */
void counting_slots(struct counting *c);
/* For each outcome nothing, to be filled. */
struct amount *counting_amounts(const struct counting *c);
const struct outcome *counting_outcome(const struct counting *c, size_t k);
/* d: of an amount. Yearly figures where asked for, or the mean that holds in all years. */
struct consequence *counting_add(struct counting *c, enum property p, const char *of,
                                 const struct amount *all, struct dim d, bool yearly);
/* Is it counted in one year, without "per year" in its unit? */
bool effect_is_of_a_year(enum property p);
struct dim effect_dim(enum property p);
const struct consequence *effect_find(size_t n, const struct consequence *all, enum property p,
                                      const char *of);

/* --- what is counted --- */

/* Risk by perspective, and by category (consequence_damage.c). Categories come first, so that
 * formulas name them. */
void count_perspectives(struct counting *c);
void count_categories(struct counting *c);
/* What the chosen perspective bears is the risk of the hazard itself. */
void count_own_risk(struct counting *c, const char *perspective);
/* consequence_interruption.c */
void count_interruptions(struct counting *c, struct consequence_exports *x);
/* consequence_harm.c */
void count_harm(struct counting *c, struct consequence_exports *x);
/* Everything as the mean over the operating states of the hazard, whose parts have been compiled
 * (consequence_mean.c). */
void count_means(struct counting *c, struct consequence_exports *x);

#endif
