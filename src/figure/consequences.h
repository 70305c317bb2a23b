/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What hazards do, beside the risk that the chosen perspective bears: risk as each perspective
 * bears it and by category of damage, interruptions of supply, and harm to people.
 *
 * Each is an effect: an amount for each end of the event tree, times how often it comes to that
 * end. With f the frequency of an outcome, or of a hazard times the probability of one end:
 *     borne.PERSPECTIVE    sum of f x damage, over items whose category the perspective bears
 *     category.CATEGORY    the same over the items of one category
 *     interruptions        1 a x sum of f x customers, over rows that last longer than
 *                          `sustained-over` of the register (5 min where it is not given)
 *     momentary-...        the same over the other rows
 *     customer-time        1 a x sum of f x customers x time, over the sustained ones
 *     energy-not-supplied  1 a x sum of f x load x time, over all rows
 *     individual-risk.G    sum of f x present x death: of a given person of the group, per year;
 *                          individual-risk.G.OUTCOME: what one outcome adds to it
 *     injury-risk.G        sum of f x present x injury
 *     fatalities.G         individual risk x persons: expected deaths per year
 * Interruptions are those of IEEE 1366-2012, clauses 3 and 4. A row that lasts an uncertain time
 * is sustained with the probability that it is longer than the limit. Presence is stated for the
 * outcome, given that it happens; nothing is taken to be independent of it. Individual risk over
 * all hazards is what criteria for people are about (HSE, Reducing risks, protecting people,
 * 2001).
 *
 * Where the risk of a hazard differs from year to year so do these: figures with the year behind,
 * `H-1.customer-time.2031`, for all but categories, interruptions and injuries. Of a hazard under
 * operating states they are means over the states. */
#ifndef FIGURE_CONSEQUENCES_H
#define FIGURE_CONSEQUENCES_H

#include "figure/figure.h"

struct consequence {
    enum property property;
    const char *of;          /* perspective, category, group or "GROUP.OUTCOME"; NULL */
    figure_id mean;          /* over the horizon */
    const figure_id *yearly; /* as hazard_exports.yearly and by its of_year; NULL: not kept */
};

struct harm_to {
    const char *group;
    figure_id death, injury; /* of a given person, per year */
    figure_id fatalities;    /* deaths in the group, per year */
    /* Of a group over all hazards: of death, by year of the horizon, yearly[y]; of_year[y] is the
     * first year that is like y. NULL: yearly[0] in all. Of one hazard: NULL both. */
    const figure_id *yearly;
    const uint32_t *of_year;
};
struct consequence_exports {
    size_t n;
    struct consequence *effects;
    figure_id interruptions, momentary, customer_time, not_supplied;
    size_t n_harm;
    struct harm_to *harm; /* by group, in byte order */
};

/* The part of a hazard under a variant; its exports are the struct above. */
ohmen_status figures_consequences(struct figures *f, const struct variant *v, const char *hazard,
                                  const struct compiled **out, ohmen_error *e);

/* An effect of the part, or NULL: the hazard has none of this category or group. */
const struct consequence *consequence_of(const struct compiled *part, enum property p,
                                         const char *of);

#endif
