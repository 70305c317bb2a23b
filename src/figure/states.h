/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which operating states a hazard depends on, in which combinations. Private to src/figure.
 *
 * A state reaches a hazard when what it changes in one of its values reaches it, in the
 * combination of the other states. So the combinations are the leaves of a tree: at each node
 * the first state (in byte order) that reaches the hazard there branches into its values, or
 * takes the one that the variant fixes. */
#ifndef FIGURE_STATES_H
#define FIGURE_STATES_H

#include "figure/compile.h"

/* Combinations of operating states of one hazard. */
#define STATES_COMBINED 64

struct combination {
    const struct variant *variant; /* every state that matters is fixed */
    size_t n;                      /* states that were not fixed before */
    const struct object **states;
    size_t *values; /* rows of `varies` */
};

struct combinations {
    ARRAY(struct combination) list;
    struct strmap kept; /* names of changes of the variant that matter to the hazard */
};

/* The combinations of a hazard under a variant, made once for each. One without states: the
 * hazard is no mean. OHMEN_COMPUTE for more than STATES_COMBINED, and when changes contradict. */
ohmen_status states_of(struct figures *f, const struct variant *v, const char *hazard,
                       const struct combinations **out, ohmen_error *e);

/* The value of a state that a variant fixes, or NULL. */
const char *variant_state(const struct variant *v, const char *state);

/* The variant with one more state fixed, by its row of `varies`. */
ohmen_status variant_in_state(struct figures *f, const struct variant *base,
                              const struct object *state, size_t value, const struct variant **out,
                              ohmen_error *e);

/* The variant with a made-up change that is known; base itself where it has that. */
ohmen_status variant_made_up(struct figures *f, const struct variant *base,
                             const struct change *change, const struct variant **out,
                             ohmen_error *e);

/* The time from which all changes of options of the variant hold, in years from the start of the
 * horizon; 0 where that lies before it, or behind its end. */
double variant_begins(const struct figures *f, const struct variant *v);

/* Does a reference to this object compute anything? */
bool reference_computes(const struct reference *r, const struct object *to);

/* What an option of the variant sets the state to, the last one to begin or to be renewed, and when
 * in years from the start; NULL where there is none. */
const char *states_reset(const struct figures *f, const struct variant *v, const struct state *s,
                         double *when);

/* What is unknown and changes with time: the mean probability of each value in each year of the
 * horizon, and over all of them. The part "course" of the state, with figures such as
 * S.share.aged.2031. */
struct state_course {
    const node_id *in_year; /* [year * n + value] */
    const node_id *mean;    /* by value */
};
#define PART_STATE_COURSE "course"
/* v: without states that are fixed. */
ohmen_status compile_state_course(struct figures *f, const struct variant *v, const char *id,
                                  const struct state_course **out, ohmen_error *e);

/* A state: its shares of time, or the probabilities of what is unknown. */
ohmen_status compile_state(struct figures *f, const struct variant *v, const struct object *o,
                           struct compiled **out, ohmen_error *e);

/* How often a hazard occurs, and the hazard, under its projected variant: the mean over its
 * combinations. Its frequency comes first. */
ohmen_status compile_mean_frequency(struct figures *f, const struct variant *v,
                                    const struct object *o, const struct combinations *c,
                                    ohmen_error *e);
ohmen_status compile_mean_hazard(struct figures *f, const struct variant *v, const struct object *o,
                                 const struct combinations *c, struct compiled **out,
                                 ohmen_error *e);

#endif
