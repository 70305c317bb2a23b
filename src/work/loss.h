/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How bad it may get, in a job: found once for each owner, and told in tables, a curve and
 * sentences. Private to src/work (loss.c, loss_explain.c). */
#ifndef WORK_LOSS_H
#define WORK_LOSS_H

#include "decide/loss.h"
#include "work/work.h"

/* What is kept of a decision or of the register: the samples, or why there are none. */
struct known_loss {
    const char *owner;
    const char *why; /* NULL: found */
    double horizon;
    size_t n;
    const struct loss_case *cases;
    struct loss_world *world;
    const struct loss_result **results; /* by case, once it was asked for */
};

struct known_loss *loss_of_decision(struct job *j, const struct weighing *w);
struct known_loss *loss_of_hazards(struct job *j, const struct hazards *h);
const struct loss_result *loss_result_of(struct job *j, struct known_loss *x, size_t k);

/* "256 samples in 16 independent sets of 16 scrambled points, seed 1" */
const char *loss_sample_words(struct job *j, const struct known_loss *x);
/* Is it a probability rather than money? */
bool loss_is_probability(enum loss_kind kind);

/* --- the derivation of one of these numbers (loss_explain.c) --- */

struct loss_value {
    const char *name;
    enum loss_kind kind;
    struct known_loss *known;
    size_t k; /* case */
    const struct loss_result *result;
};
/* loss_is_named. OHMEN_UNKNOWN with the nearest name. */
ohmen_status loss_value_find(struct job *j, const char *name, struct loss_value *out,
                             ohmen_error *e);
void part_loss_head(struct job *j, const struct loss_value *v);
void part_loss_method(struct job *j, const struct loss_value *v);
struct consumed loss_consumed(struct job *j, const struct loss_value *v);
/* --- exponential utility (utility.c) --- */

/* Certainty equivalents of the alternatives; nothing where the decision states no risk
 * tolerance. */
void part_utility(struct job *j, const struct weighing *w);
/* "D-BUS.certainty-equivalent[FIT-87B]": its derivation, of which the head is printed. */
bool utility_is_named(const char *name);
ohmen_status utility_value_find(struct job *j, const char *name, struct consumed *out,
                                ohmen_error *e);

/* Compiles what register.horizon-damage belongs to; does nothing for other names. */
ohmen_status loss_prepare(struct job *j, const char *figure, ohmen_error *e);

#endif
