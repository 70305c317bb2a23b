/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What hazards do in each of the unknown states that a decision tree follows. Private to
 * src/decide.
 *
 * Hidden states: the values of all unknown states that the tree inspects, sees or renews, or that
 * change with time, taken together; exactly one of them is the case, and nobody knows which. Those
 * of independent states multiply. Other unknown states stay in the figures of the hazards, as their
 * means.
 *
 * A world is the register under some changes, with every hazard of the decision in each hidden
 * state. Where states change with time, a world says how often: transitions (`becomes`), and
 * failures (an outcome of a hazard in that state, at its mean frequency over the horizon) that
 * renew the asset. Both are taken at their means (HELD). What is in a hidden state then is a
 * Markov chain (graph.h, CHAIN).
 *
 * Invariant: a world is made once for each variant; its hazards have values. */
#ifndef DECIDE_WORLD_H
#define DECIDE_WORLD_H

#include "decide/avoided.h"

/* Hidden states of one tree. */
#define HIDDEN_MOST CHAIN_MOST_STATES

struct hidden {
    size_t n_states;
    const struct object **states; /* in byte order */
    size_t n;                     /* hidden states; 1 where nothing is followed */
    const char **names;           /* "aged", "aged, wet" */
    node_id *share;               /* of each at the start */
    double *start;                /* its value */
};

/* How hidden states follow each other within a time of some length. */
struct passage {
    double years;
    const node_id *to;   /* [i * n + k]: the probability of k at the end, starting in i */
    const node_id *time; /* [i * n + k]: the mean share of the time spent in k */
    const double *p;     /* values of `to` */
    const double *spent; /* and of `time` */
};

struct flow_of_states {
    uint32_t from, to;
    node_id rate;
};

struct world {
    const struct variant *variant;
    const struct compiled **hazards; /* [k * n_hazards + h]; NULL: there is none */
    ARRAY(struct flow_of_states) flows;
    const struct compiled
        *unit; /* the last section of its rates and passages; NULL without flows */
    ARRAY(struct passage *) passages;
};

struct worlds {
    struct figures *f;
    struct weighing *w; /* its hazards are known */
    struct hidden hidden;
    struct strmap by_variant; /* in the order in which they were made */
};

/* Which value a followed state has in a hidden state. */
size_t hidden_value(const struct hidden *h, size_t hidden, size_t state);
/* The hidden state that differs from it in this value. */
size_t hidden_with(const struct hidden *h, size_t hidden, size_t state, size_t value);

/* The states that are followed, in byte order. OHMEN_COMPUTE where they have more than HIDDEN_MOST
 * values together. */
ohmen_status worlds_begin(struct worlds *x, struct figures *f, struct weighing *w, size_t n,
                          const struct object *const *states, ohmen_error *e);

ohmen_status world_of(struct worlds *x, const struct variant *v, struct world **out,
                      ohmen_error *e);

/* Made once for each length; has values. */
ohmen_status world_passage(struct worlds *x, struct world *w, double years,
                           const struct passage **out, ohmen_error *e);

/* One that was made; NULL: it was not. */
const struct passage *world_passage_known(const struct world *w, double years);

/* What a measure is worth now that is done in one hidden state of a world from one time to another;
 * NODE_NONE where nothing is done. In the open section of `at`. A time that begins within a year is
 * worth what the time from the beginning of that year is worth less what lies before: so that it
 * does not matter where time is cut. */
node_id world_measure(struct worth *at, const struct worlds *x, const struct world *w,
                      size_t hidden, const struct measure *m, double from, double to);

#endif
