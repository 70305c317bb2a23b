/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What one occurrence costs, in each sample of what is unknown, and that on a lattice. Private to
 * src/decide (loss.c, utility.c).
 *
 * The forms are those of loss.h. Invariant: in sample s the damage is
 *     shift[s] + sum over the varying inputs of times[j][s] * Z_j    (LOSS_AFFINE)
 *     shift[s]                                                        (LOSS_AMOUNT)
 *     one of amounts[s * LOSS_DRAWS ..], equally probable            (LOSS_DRAWN)
 * where s is 0 for all samples if nothing unknown is in it (n = 1). */
#ifndef DECIDE_LOSS_DAMAGE_H
#define DECIDE_LOSS_DAMAGE_H

#include "decide/loss.h"
#include "math/severity.h"

enum loss_form { LOSS_AMOUNT, LOSS_AFFINE, LOSS_DRAWN };

/* What varies: Z, with its mean. */
struct loss_varying {
    uint32_t input;
    struct dist dist;
    double scale; /* Z = scale * what has the distribution */
    double mean;
    double low, high; /* its range, may be infinite */
};

/* Parts of the distribution of Z: between low and high with the probability. */
struct loss_parts {
    size_t n;
    double *low, *high, *probability;
};

struct loss_damage {
    node_id node;
    enum loss_form form;
    size_t n_unknown, n_varying;
    const uint32_t *unknown; /* inputs, which rise */
    struct loss_varying *varying;
    size_t n; /* samples with values of their own: 1 or all */
    double *shift, **times, *amounts;
    bool same_times; /* in all samples */
    /* On the lattice of the last call of loss_damage_place: of all but a shift that differs
     * between samples, where that can be said once for all samples; else the parts. */
    double placed_step;
    size_t placed_points;
    bool is_placed;
    struct severity placed;
    double placed_mean[2]; /* of it rounded down and up, in steps */
    double placed_exact;
    struct loss_parts parts;
};

/* Values of the unknown inputs in all samples, by number; NULL: not drawn. */
struct loss_samples {
    size_t n; /* 1 where nothing is unknown */
    const double *const *rows;
};

/* The unknown and the varying inputs of a damage, and its form. */
void loss_damage_init(struct figures *f, struct arena *a, node_id node, struct loss_damage *out);
/* Its values in all samples. OHMEN_COMPUTE where one is not finite, or cannot be drawn. */
ohmen_status loss_damage_sample(struct figures *f, struct arena *a,
                                const struct loss_samples *samples, const struct sampling_plan *p,
                                struct loss_damage *d, ohmen_error *e);

/* Brings it to a lattice, in `a`. */
void loss_damage_place(struct arena *a, const struct lattice *l, struct loss_damage *d);
/* Adds it so many times in a sample; `means` gets the means of an occurrence rounded down and up,
 * in steps. Allocates nothing. */
void loss_damage_add(const struct loss_damage *d, const struct lattice *l, size_t sample,
                     double weight, double *down, double *up, double means[2]);
/* Its mean in a sample, in money. */
double loss_damage_mean(const struct loss_damage *d, size_t sample);
/* The damage below which an occurrence stays with all but a probability of 1e-3, in a sample. */
double loss_damage_high(const struct loss_damage *d, size_t sample);
/* May it be below 0, with more than a vanishing probability? */
bool loss_damage_is_below_zero(const struct loss_damage *d);

#endif
