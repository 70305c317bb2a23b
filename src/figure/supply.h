/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What hazards do together: interruptions of supply, harm to people, and risk by perspective and
 * category, over the register and at its sites.
 *
 * With interruptions, momentary interruptions and customer time summed over hazards
 * (figure/consequences.h) and N customers served, after IEEE 1366-2012, clause 4:
 *     SAIFI = interruptions / N      SAIDI = customer time / N      CAIDI = SAIDI / SAIFI
 *     ASAI = 1 - SAIDI / 1 a         MAIFI = momentary interruptions / N
 * All are sums over the hazards of the register as it is: they have no variants. What several
 * perspectives bear stands in the account of each, so that a sum over perspectives would count
 * it more than once: there is none. */
#ifndef FIGURE_SUPPLY_H
#define FIGURE_SUPPLY_H

#include "figure/consequences.h"

/* Indices of the register over these hazards of it, compiled once for a struct figures.
 * FIGURE_NONE for what needs customers-served where that is not stated. */
struct supply {
    figure_id interruptions, momentary, customer_time, not_supplied;
    figure_id saifi, saidi, caidi, asai, maifi;
};
ohmen_status figures_supply(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct supply *out, ohmen_error *e);

/* Risk as each perspective of the register bears it, and by category, over these hazards;
 * compiled once: register.borne.PERSPECTIVE, register.category.CATEGORY. */
struct accounts {
    const figure_id *borne; /* as the keys of the register's perspectives */
    size_t n_categories;
    const char *const *categories; /* of damage in these hazards, in byte order */
    const figure_id *by_category;
};
ohmen_status figures_accounts(struct figures *f, size_t n, const struct compiled *const *hazards,
                              struct accounts *out, ohmen_error *e);

/* Sums over those of the hazards that are at a site and at the sites in it, compiled once: all of
 * these have to be among them. What it contributes to SAIFI, SAIDI and MAIFI of the register;
 * CAIDI and ASAI are FIGURE_NONE. */
struct site_sums {
    size_t n_hazards;
    figure_id risk;
    struct accounts accounts;
    struct supply supply;
};
ohmen_status figures_site(struct figures *f, const struct object *site, size_t n,
                          const struct compiled *const *hazards, struct site_sums *out,
                          ohmen_error *e);

/* Is something of this site (NULL: of none) at the site `at`, or at a site in it? */
bool site_is_in(const struct model *m, const char *site, const char *at);

/* Harm to each group of the register over these hazards, with the risk in each year: as many as
 * there are groups, in byte order; compiled once. */
ohmen_status figures_people(struct figures *f, size_t n, const struct compiled *const *hazards,
                            struct harm_to **out, ohmen_error *e);

#endif
