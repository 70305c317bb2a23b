/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How sure the choice is: alternatives of a weighed decision over all that is unknown.
 *
 * In each sample (figure/samples.h) every alternative has a net present value against doing nothing
 * (doing nothing has 0), all in the same world. From these:
 *   probability of being best   share of the samples in which no other alternative is worth
 *                               more (of equals the one that the ranking puts first)
 *   probability of being worth it
 *                               share in which it is worth more than doing nothing
 *   expected regret             mean of (worth of the best alternative of the sample - its own):
 *                               what is lost on average by deciding now for it; of the alternative
 *                               that is chosen for its mean it is what knowing everything would be
 *                               worth (expected value of perfect information; Raiffa & Schlaifer,
 *                               Applied Statistical Decision Theory (1961), ch. 4, from memory)
 * each with its standard error over the sets of the sample.
 *
 * Names: DECISION.best[ALT], DECISION.worth-it[ALT], DECISION.regret[ALT]; DECISION.p5[ALT],
 * DECISION.p50[ALT] and DECISION.p95[ALT], the points of its net present value in this sample; and
 * DECISION.moves-with[INPUT], the rank correlation of an unknown input with what the best
 * alternative is worth beyond the next best. INPUT is the name of the input's figure, or of its
 * stream where it has none ("H-1#0"). */
#ifndef DECIDE_SURE_H
#define DECIDE_SURE_H

#include "decide/weigh.h"
#include "figure/samples.h"

struct sure_alternative {
    struct sampled best, worth_it; /* probabilities */
    struct sampled regret;         /* money */
    struct figure_spread net;      /* of doing nothing certain: 0 */
};

struct sure {
    const struct weighing *weighing;
    struct sampling_plan plan;
    struct sampling sample;      /* of the net present values, best in the ranking first */
    size_t *root;                /* by alternative: which root; not of doing nothing */
    struct sure_alternative *of; /* by alternative of the weighing */
    const struct alternative *best, *next; /* by mean; next NULL: there is one only */
    struct rank_inputs moves; /* of the difference of these two; without the weak ones */
};

/* weigh_rank has been called. plan->n_judged is set here. Lives in `a`. OHMEN_COMPUTE as
 * figures_sample. */
ohmen_status sure_find(struct figures *f, struct arena *a, const struct weighing *w,
                       const struct sampling_plan *plan, struct sure *out, ohmen_error *e);

/* What a name of the above stands for. */
enum sure_kind {
    SURE_BEST,
    SURE_WORTH_IT,
    SURE_REGRET,
    SURE_P5, /* these in the order of spread_point */
    SURE_P50,
    SURE_P95,
    SURE_MOVES,
    SURE_KINDS
};

struct sure_value {
    const char *name;
    enum sure_kind kind;
    const struct weighing *weighing;
    const char *of; /* the alternative or the input */
    struct sampled value;
    const struct sure *sure; /* that it is of */
    figure_id figure;        /* of an input, where it has one; else FIGURE_NONE */
};

/* "D-BUS.best[FIT-87B]" */
const char *sure_name(struct arena *a, const struct weighing *w, enum sure_kind kind,
                      const char *of);
bool sure_is_named(const char *name);
/* Compiles, evaluates and ranks the decision. OHMEN_UNKNOWN with the nearest name. */
ohmen_status sure_value_find(struct figures *f, const char *name, const struct sampling_plan *plan,
                             struct sure_value *out, ohmen_error *e);

#endif
