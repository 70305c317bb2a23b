/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Elasticities: by how many per cent a figure of a decision changes for each per cent of a stated
 * input, certain ones too.
 *
 *     elasticity = now x d(figure) / d(input) / |figure|
 *
 * at the means of what is unknown, the derivative summed over all nodes in which the input stands
 * (turn_inputs.h), as in decide/lean.h. By the size of the figure: above 0 where more of the input
 * adds to it, also where the figure is negative.
 *
 * The policy is held fixed: the figure is that of one alternative, whichever would be best with
 * more of the input. At a tie of min or max the derivative is that of the first arm; is_at_tie says
 * where the input meets one. */
#ifndef DECIDE_ELASTICITY_H
#define DECIDE_ELASTICITY_H

#include "decide/weigh.h"

struct elasticity {
    const char *name; /* DECISION.elasticity[INPUT].OF */
    figure_id input;
    const char *of; /* an alternative, or a weighed hazard */
    figure_id figure;
    double now;   /* the input, in base units */
    double value; /* per cent per per cent */
    bool is_at_tie;
};
struct elasticities ARRAY_BODY(struct elasticity);

/* Of the net present value of the alternative of that name, of the present damage for
 * "do-nothing", or of the present risk of a weighed hazard by its id. Greatest size first, ties by
 * name; inputs that move nothing are left out, and all of them where the figure is 0. OHMEN_UNKNOWN
 * with the nearest name where there is no such thing. Lives in the arena of the figures. */
ohmen_status elasticities_find(struct figures *f, const struct weighing *w, const char *of,
                               struct elasticities *out, ohmen_error *e);

/* Does a name have the form of elasticity.name? */
bool elasticity_is_named(const char *name);

/* Finds one by its name; compiles and ranks its decision. OHMEN_UNKNOWN with the nearest name. */
ohmen_status elasticity_find(struct figures *f, const char *name, struct elasticity *out,
                             ohmen_error *e);

#endif
