/* SPDX-License-Identifier: GPL-3.0-or-later */
/* When options are in service: their beginning, their renewals, their commissioning periods. Times
 * are years from the start of the horizon (figure/horizon.h).
 *
 * An option that is renewed begins anew at begin + life, begin + 2 life and so on, as long as that
 * lies within the horizon; its service has no gap. At its beginning and at each renewal it is
 * commissioned. */
#ifndef FIGURE_SERVICE_H
#define FIGURE_SERVICE_H

#include "figure/figure.h"

#define EARLY "early" /* in names: "FIT-87B:early" */

struct life {
    double begin;  /* may lie before the horizon, or behind it */
    double later;  /* by how much later than its dates say, which is in `begin` */
    double length; /* INFINITY: as long as the horizon */
    bool renewed;
    double early;   /* how long it is commissioned; 0: not at all */
    double horizon; /* its length */
};

struct life life_of(const struct figures *f, const char *option);
/* The same of an option that is applied so many years later than its dates say. */
struct life life_later(const struct figures *f, const char *option, double later);

/* The first instant at which the option is not in service any more; may lie before its horizon. */
double life_end(const struct life *l);

bool life_holds(const struct life *l, double t);

/* The k-th renewal; 0: the beginning. */
double life_renewal(const struct life *l, size_t k);

/* How many renewals lie within the horizon, or before it. */
size_t life_renewals(const struct life *l);

/* Which renewal was the last one at time t (0: none), t in service. */
size_t life_last_renewal(const struct life *l, double t);

/* Is it being commissioned at time t? */
bool life_is_early(const struct life *l, double t);

/* The day that lies `years` behind a day, by the rule of horizon_years, rounded to a day. */
day day_years_behind(day d, double years);

/* "2049": the calendar year of the k-th renewal; the day, where the option is applied later than
 * its dates say. */
const char *life_label(struct arena *a, const struct figures *f, const struct life *l, size_t k);

/* By how many years behind its dates something that comes with the option is new at the renewal
 * with this label, or where it is applied so that it begins at the day of the label; 0: there is
 * none. */
double life_moved(struct arena *a, const struct figures *f, const char *option, const char *label);

/* What makes what comes with an option newer by so many years, over `m`, the register as the
 * changes of all options leave it: elements that the option adds, and elements and rates whose
 * `since` it sets. NULL where it adds and dates nothing. */
const struct node *renewal_change(struct figures *f, const struct model *m, const char *option,
                                  double years);

#endif
