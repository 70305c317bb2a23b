/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Time of a decision: years from the start of the horizon, when options are in service, and
 * the stretches between. The conventions are those of weigh.h and figure/horizon.h. Private to
 * src/decide. */
#ifndef DECIDE_TIMELINE_H
#define DECIDE_TIMELINE_H

#include "decide/weigh.h"

/* From when to when an option is in service, within the horizon. */
struct service {
    double from, to;
};

struct service timeline_service(const struct figures *f, const char *option, double horizon);

/* What a path through a decision has done so far: options, each as many years later than its dates
 * say as it is applied behind the start; and changes, each from a time on. */
struct applied {
    const char *option;
    double later;
};
struct changed {
    const char *name; /* of the change, without brackets */
    const struct node *change;
    double from;
};
struct path {
    ARRAY(struct applied) applied; /* in byte order of options */
    ARRAY(struct changed) changed;
};

/* A stretch of the horizon in which the same options are in service, renewed the same number of
 * times, and commissioned or not. */
struct stretch {
    double from, to;
    const struct variant *variant;
};
struct stretches ARRAY_BODY(struct stretch);

/* Cuts the horizon where options of the alternative come or go, are renewed so that something is
 * new again, or have been commissioned; in order of time. OHMEN_COMPUTE where what holds together
 * in a stretch contradicts or leaves the register wrong. */
ohmen_status timeline_cut(struct figures *f, const struct alternative *x, double horizon,
                          struct stretches *out, ohmen_error *e);

/* The same of a path. */
ohmen_status timeline_cut_path(struct figures *f, const struct path *p, double horizon,
                               struct stretches *out, ohmen_error *e);

/* Does it matter from time `at` on, when the option was applied: something of it is yet to come,
 * ends, is renewed, or is dated from its service? */
bool timeline_is_dated(struct figures *f, const struct path *p, const struct applied *x, double at);

/* The year of the horizon in which a day lies, from 0; what is paid before is paid at its
 * start. By the calendar: the last day of a leap year lies in that year. */
double timeline_year(const struct register_settings *s, day d);
/* The same; below 0 for what lies before. */
double timeline_calendar_year(const struct register_settings *s, day d);

#endif
