/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What alternatives are worth, as figures. Private to src/decide. */
#ifndef DECIDE_WORTH_H
#define DECIDE_WORTH_H

#include "decide/timeline.h"

/* Compiles the decision's own section: stretches[i] are those of alternative i; the options'
 * figures have values already. Sets weighing.unit and the figures of the alternatives. */
void worth_compile(struct figures *f, struct weighing *w, const struct variant *base,
                   const struct stretches *stretches);

#endif
