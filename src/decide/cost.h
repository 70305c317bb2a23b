/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What alternatives cost. The options' own figures were compiled before. Private to src/decide. */
#ifndef DECIDE_COST_H
#define DECIDE_COST_H

#include "decide/money.h"
#include "decide/timeline.h"

/* The present value of what the options of an alternative cost. */
node_id cost_present(const struct money *m, const struct alternative *alt);

/* Does it cost anything within the horizon? The options' own figures have values already. */
bool cost_is_something(const struct money *m, const struct alternative *alt);

#endif
