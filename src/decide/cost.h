/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What options and alternatives cost. Private to src/decide. */
#ifndef DECIDE_COST_H
#define DECIDE_COST_H

#include "decide/money.h"
#include "decide/timeline.h"

/* Compiles the figures of an option: what it costs once, each year and at the end, and the present
 * value of all that within the horizon. Once for a `struct figures`. */
ohmen_status cost_compile(struct figures *f, const char *option, const struct compiled **out,
                          ohmen_error *e);

/* What an option costs once: its investment and renewals at the start of a year of the horizon, and
 * what it is worth at the end, negative, at the end of the horizon. It was compiled. */
struct payment {
    double year;
    node_id amount; /* not discounted */
};
struct payments ARRAY_BODY(struct payment);
struct payments cost_once(const struct money *m, const char *option);
/* The same of an option that is applied so many years later than its dates say. */
struct payments cost_once_later(const struct money *m, const char *option, double later);
/* Its present value. */
node_id cost_paid(const struct money *m, const struct payment *p);

/* The present value of its running cost between two times; NODE_NONE: there is none. */
node_id cost_running(const struct money *m, const char *option, double from, double to);
node_id cost_running_later(const struct money *m, const char *option, double later, double from,
                           double to);

/* The present value of what the options of an alternative cost; they were compiled. */
node_id cost_present(const struct money *m, const struct alternative *alt);

/* Does it cost more than nothing? The options' own figures have values already. */
bool cost_is_something(const struct money *m, const struct alternative *alt);

#endif
