/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What alternatives avoid, as nodes of the graph. Private to src/decide.
 *
 * Something that hazards do (their risk, customer time, deaths) is taken hazard by hazard: what it
 * is now less what it is under the options in service, for each time in which the same options
 * change the hazard. */
#ifndef DECIDE_AVOIDED_H
#define DECIDE_AVOIDED_H

#include "decide/money.h"
#include "decide/timeline.h"

/* The section of a decision under construction, and what all its terms need. */
struct worth {
    struct figures *f;
    struct weighing *w;
    struct building b;
    struct money money;
};

/* What is summed: PROPERTY_RISK as the chosen perspective bears it, or an effect of
 * figure/consequences.h that is kept year by year. */
struct measure {
    enum property property;
    const char *of; /* perspective or group, or NULL */
    struct dim dim; /* of the figure of a hazard */
    struct dim sum; /* of a sum over time: dim x time, or dim for what is counted by the year */
};

node_id worth_sum(struct worth *x, size_t n, const node_id *nodes, struct dim d);

/* Of these hazards (NULL: there is none) from one time to another, as a present value; NODE_NONE
 * where nothing is done. Hazards whose measure stays take one annuity together. */
node_id measure_over(struct worth *x, const struct measure *m, size_t n_hazards,
                     const struct compiled *const *hazards, double from, double to);

/* Over the horizon as the register is now: hazards whose measure stays take one annuity
 * together. */
node_id measure_now(struct worth *x, const struct measure *m);

/* Avoided over the horizon, as a present value. */
node_id measure_avoided(struct worth *x, const struct measure *m, const struct stretches *s);

/* Avoided in a mean year once all options of the alternative are in service. */
node_id measure_avoided_yearly(struct worth *x, const struct measure *m,
                               const struct alternative *alt);

#endif
