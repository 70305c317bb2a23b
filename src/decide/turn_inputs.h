/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What can be moved to turn a decision: stated quantities, each with all nodes in which it stands.
 * Private to src/decide; the conventions are those of turn.h. */
#ifndef DECIDE_TURN_INPUTS_H
#define DECIDE_TURN_INPUTS_H

#include "decide/weigh.h"
#include "eval/probe.h"

struct turn_node {
    node_id node;
    double times; /* its value is this times that of the input */
};

struct turn_input {
    figure_id figure; /* the most basic one: under the fewest changes */
    const char *name; /* of that figure */
    double now;       /* > 0 */
    double low, high; /* its range */
    ARRAY(struct turn_node) nodes;
};
struct turn_inputs ARRAY_BODY(struct turn_input);

/* Those of the fewest changes first, then by name. `p` knows the targets. w may be NULL: no hazard
 * is weighed. */
void turn_inputs_of(struct figures *f, const struct weighing *w, const struct prober *p,
                    struct turn_inputs *out);

/* Does a document state it, as it does not the frequency of a hazard that is a formula? */
bool turn_is_stated(struct figures *f, figure_id id);

/* The distribution of what is not known of a figure; NULL where it is certain or varies from one
 * occurrence to the next. */
const struct quantity *turn_unknown(const struct figures *f, figure_id id);

#endif
