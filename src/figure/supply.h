/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What hazards do together: interruptions of supply and harm to people, over the register.
 *
 * With interruptions, momentary interruptions and customer time summed over hazards
 * (figure/consequences.h) and N customers served, after IEEE 1366-2012, clause 4:
 *     SAIFI = interruptions / N      SAIDI = customer time / N      CAIDI = SAIDI / SAIFI
 *     ASAI = 1 - SAIDI / 1 a         MAIFI = momentary interruptions / N */
#ifndef FIGURE_SUPPLY_H
#define FIGURE_SUPPLY_H

#include "figure/consequences.h"

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
