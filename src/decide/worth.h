/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What alternatives are worth, as figures. Private to src/decide. */
#ifndef DECIDE_WORTH_H
#define DECIDE_WORTH_H

#include "decide/timeline.h"

/* Compiles the decision's own section: stretches[i] are those of alternative i; the options'
 * figures have values already. Sets weighing.unit and the figures of the alternatives. */
void worth_compile(struct figures *f, struct weighing *w, const struct variant *base,
                   const struct stretches *stretches);

/* Behind it, once that section has values: what a customer hour and a life cost, of those
 * alternatives that avoid any. A part of the unit. */
void prices_compile(struct figures *f, struct weighing *w);
#define PART_PRICES "prices"

/* All figures of an alternative: none. */
void alternative_clear(struct alternative *x);

#endif
