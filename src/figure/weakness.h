/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where protection hangs on one thing: single points of failure, breakers that nobody backs up. */
#ifndef FIGURE_WEAKNESS_H
#define FIGURE_WEAKNESS_H

#include "figure/figure.h"

/* An event of which the happening alone leaves a fault uncleared, although every function sees
 * it. */
struct single {
    struct event event; /* an element or a shock */
    const char *hazard;
    double probability; /* of the event, mean over the horizon */
    double frequency;   /* of the hazard with the event, per year */
};
struct singles ARRAY_BODY(struct single);

/* Adds those of one hazard in the order of its events; of a mean over operating states those of
 * each state, with the frequency that the hazard has in it. Nothing where the fault stays
 * uncleared whatever works. figures_evaluate was called. */
void singles_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                       struct singles *out);

/* Does the failure of this element, by whatever cause, alone leave the fault of the hazard
 * uncleared (in some operating state)? */
bool is_single(struct figures *f, const struct compiled *hazard, const char *element);

/* A breaker below the scheme that clears in a row, for which the hazard has no row of breaker
 * failure protection that can operate. */
struct unbacked {
    const char *hazard, *row, *breaker;
    const char *absent; /* scheme of a row that is there for it but can never operate; or NULL */
};
struct unbackeds ARRAY_BODY(struct unbacked);
/* Adds those of one hazard, by row as documents have them, breakers in the order of the scheme. */
void unbacked_of_hazard(struct figures *f, struct arena *a, const struct compiled *hazard,
                        struct unbackeds *out);

#endif
