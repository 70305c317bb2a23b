/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What an element's probability of failure is made of.
 *
 * Each part by itself, as its mean over the same time as the element's own mean: the sum of all
 * is at least the whole, as one of them is enough. Formulas in docs/methods.md ("Elements in
 * time"). */
#ifndef FIGURE_CONTRIBUTIONS_H
#define FIGURE_CONTRIBUTIONS_H

#include "figure/figure.h"

enum contribution {
    CONTRIBUTION_ON_DEMAND,
    CONTRIBUTION_IN_REPAIR,
    CONTRIBUTION_IN_TEST,
    CONTRIBUTION_OUT,
    CONTRIBUTION_LEFT,     /* a routine test left it failed */
    CONTRIBUTION_TESTED,   /* failed undetected; a routine test (or a demand) will find it */
    CONTRIBUTION_UNTESTED, /* failed undetected; no routine test finds it */
    CONTRIBUTIONS
};

struct contributions {
    figure_id at[CONTRIBUTIONS]; /* FIGURE_NONE: it has no such part */
    bool named[CONTRIBUTIONS];   /* figures_find knows it by its name */
};

/* Compiled once for each unit of an element; figures_evaluate must be called afterwards. */
void element_contributions(struct figures *f, const struct compiled *element,
                           struct contributions *out);

#endif
