/* SPDX-License-Identifier: GPL-3.0-or-later */
/* An alternative year by year: what it avoids, what is paid, and when it has paid for itself.
 *
 * In each year of the horizon, not discounted: the damage avoided, what is invested (investments
 * and renewals; what options are worth at the end is taken off in the last year) and what it costs
 * to run. Cumulated: the present values of all that until the end of the year, with the conventions
 * of weigh.h; so that of the last year is the net present value. Discounted payback is the first
 * year at whose end the cumulated value is not negative and stays so (any engineering economy
 * text). */
#ifndef DECIDE_FLOW_H
#define DECIDE_FLOW_H

#include "decide/weigh.h"

struct flow_year {
    const char *label; /* "2031" */
    figure_id avoided, invested, running, cumulated;
};
struct flow {
    const struct alternative *of;
    size_t n; /* years */
    struct flow_year *years;
};

/* Compiles the years of an alternative that is not doing nothing, once; the caller evaluates. */
ohmen_status flow_compile(struct figures *f, struct weighing *w, const struct alternative *x,
                          const struct flow **out, ohmen_error *e);

/* The index of the year in which it has paid for itself for good; flow.n: not within the horizon.
 * figures_evaluate has been called. */
size_t flow_payback(const struct figures *f, const struct flow *x);

/* The alternative of such a figure's name behind the decision's id ("cumulated.FIT-87B.2031"), or
 * NULL: it is no such name. */
const struct alternative *flow_alternative(const struct figures *f, const struct weighing *w,
                                           const char *rest);

#endif
