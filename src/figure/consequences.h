/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What hazards do beside what they cost: interruptions of supply, and harm to people.
 *
 * Interruptions (IEEE 1366-2012, clause 3 and 4). An outcome interrupts customers and load in rows,
 * each for a time. In one year, with f = frequency of the outcome:
 *     interruptions        1 a x sum of f x customers, over rows that last longer than
 *                          `sustained-over` of the register (5 min where it is not given)
 *     momentary            the same over the other rows
 *     customer time        1 a x sum of f x customers x time, over the sustained ones
 *     energy not supplied  1 a x sum of f x load x time, over all rows
 * SAIFI and SAIDI are the first and the third over customers served, CAIDI = SAIDI / SAIFI,
 * ASAI = 1 - SAIDI / 1 a, MAIFI (of momentary interruptions) the second over customers served.
 * How long a row lasts may be uncertain: its mean decides whether it is sustained.
 *
 * Harm: f x present x death is the individual risk of a person of the group from the hazard, per
 * year; times persons, the expected deaths. Over all hazards it is what criteria for people are
 * about (HSE, Reducing risks, protecting people, 2001). Presence is stated for the outcome, given
 * that it happens; nothing is taken to be independent of it. */
#ifndef FIGURE_CONSEQUENCES_H
#define FIGURE_CONSEQUENCES_H

#include "figure/figure.h"

struct harm_to {
    const char *group;
    figure_id death, injury; /* of a given person, per year */
    figure_id fatalities;    /* deaths in the group, per year */
};
struct consequence_exports {
    figure_id interruptions, momentary, customer_time, not_supplied;
    size_t n_harm;
    struct harm_to *harm; /* by group, in byte order */
};

/* The part of a hazard under a variant; its exports are the struct above. */
ohmen_status figures_consequences(struct figures *f, const struct variant *v, const char *hazard,
                                  const struct compiled **out, ohmen_error *e);

/* Indices of the register over these hazards of it, compiled once for a struct figures.
 * FIGURE_NONE for what needs customers-served where that is not stated. */
struct supply {
    figure_id interruptions, momentary, customer_time, not_supplied;
    figure_id saifi, saidi, caidi, asai, maifi;
};
ohmen_status figures_supply(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct supply *out, ohmen_error *e);

/* Harm to each group of the register over these hazards: as many as there are groups, in byte
 * order; compiled once. */
ohmen_status figures_people(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct harm_to **out, ohmen_error *e);

#endif
