/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Weighing the options of a decision against doing nothing.
 *
 * Alternatives are doing nothing, each option that is possible alone, and every
 * combination of options in which none excludes another, all that one requires are
 * there, no two contradict, and the register that they leave is right. With more than
 * WEIGH_ALL options only pairs are combined.
 *
 * Conventions (any engineering economy text; docs/methods.md works an example):
 * - time runs in years from register.start (1 January of the year of the prices where
 *   it is left out); a date is its calendar years from there plus days / 365;
 * - an investment is paid at the start of its year of the horizon: (1 + r)^-floor(t), where
 *   the last day of a leap year still lies in that year; behind the horizon it is no cost;
 * - damage and running cost are paid in the middle of each year, or at its end where the
 *   register says so (money.h);
 * - an option changes the register from its in-service date until the end of its life or of
 *   the horizon; before and behind that the register is as the other options leave it;
 * - one that is renewed is in service to the end of the horizon; at each renewal it is paid
 *   again, and what it brings is new again; at the beginning and at each renewal it is
 *   commissioned (figure/service.h);
 * - what an option is worth at the end of the horizon is taken off its cost, if it is in
 *   service until then;
 * - the damage that an alternative avoids is summed hazard by hazard: (risk now - risk then)
 *   times the annuity of the time in which the same options change the hazard;
 * - damage is summed over every hazard that any option of the decision reaches, and
 *   the hazards in its focus: the same for all alternatives;
 * - customer time and deaths avoided are discounted as money is where they stand below a cost:
 *   cost per customer hour = present cost / present customer time, which is the equivalent annual
 *   cost over a mean year; net cost per fatality avoided = (present cost - benefit) / present
 *   fatalities; disproportion = that over what society would spend per fatality (the factor of
 *   HSE, Reducing risks, protecting people, 2001, Appendix 3, from memory);
 * - the risk of a person is that over all hazards of the register, once the options are in
 *   service. */
#ifndef DECIDE_WEIGH_H
#define DECIDE_WEIGH_H

#include "figure/figure.h"

struct branching;

#define WEIGH_ALL 8 /* options of which all combinations are weighed: 256 alternatives */

/* What an alternative is worth to one perspective of the register. */
struct perspective_worth {
    figure_id net, benefit, avoids; /* as those of the alternative */
};

/* Figures are FIGURE_NONE for doing nothing where nothing else is said. */
struct alternative {
    const char *name; /* "do-nothing", "FIT-87B", "FIT-87B+TEST" */
    size_t n;
    const char *const *options;                                 /* in byte order */
    const struct variant *variant;                              /* all of them in service */
    figure_id present_damage, present_cost, annual_cost, total; /* of doing nothing too */
    figure_id net, benefit, ratio;       /* ratio: only where it costs more than nothing */
    figure_id avoids;                    /* risk avoided in a mean year, once all are in service */
    struct perspective_worth *of;        /* by perspective of the register */
    figure_id avoids_time, present_time; /* customer time without supply avoided */
    figure_id avoids_fatalities, present_fatalities; /* only where weighing.groups is not empty */
    figure_id *individual; /* by weighing.groups: risk of death of a person per year; of doing
                              nothing too */
    figure_id together; /* of combinations: worth beyond the options one by one; FIGURE_NONE where
                              one of them is not possible alone */
    figure_id per_hour, per_fatality, disproportion; /* FIGURE_NONE where nothing is avoided, and
                                                        the last two where that costs nothing */
    const struct compiled **hazards; /* under `variant`, in the order of weighing.hazards */
    size_t rank;                     /* 1 is best; set by weigh_rank */
};

/* A group of people whom some weighed hazard may harm, now or under an alternative. */
struct weighed_group {
    const char *id;
    figure_id now; /* risk of death of a person per year, over all hazards of the register */
};

struct weighed_hazard {
    const char *id;
    bool in_focus;
    const struct compiled *now;
};

/* Why a set of options is no alternative, or a hazard is not counted. */
struct not_possible {
    const char *options; /* "A+B"; the hazard */
    const char *why;
};

struct weighing {
    const char *id;
    const struct decision *decision;
    const struct compiled *unit; /* the decision's own section */
    double horizon;              /* years */
    ARRAY(struct weighed_hazard) hazards;
    ARRAY(struct weighed_group) groups; /* in byte order */
    ARRAY(struct not_possible)
    not_counted;                            /* hazards that cannot be computed: the risks of groups
                                               leave them out */
    ARRAY(struct alternative) alternatives; /* doing nothing first, then by size and name */
    ARRAY(struct not_possible) left_out;
    bool only_pairs;
    struct branching *branching; /* a tree (branching.h); NULL: options */
    size_t *order; /* indices of alternatives, best first; set by weigh_rank */
};

/* Compiles a decision. OHMEN_UNKNOWN when there is none of that id, OHMEN_COMPUTE when it
 * cannot be computed. A decision is compiled once
 * for a `struct figures`. */
ohmen_status weigh_compile(struct figures *f, const char *decision, struct weighing **out,
                           ohmen_error *e);

/* Ranks by net present value, best first (doing nothing is worth 0); ties by name.
 * figures_evaluate has been called. */
void weigh_rank(struct figures *f, struct weighing *w);

/* Compiles a decision, evaluates all that was compiled, and ranks. */
ohmen_status weigh_ranked(struct figures *f, const char *decision, struct weighing **out,
                          ohmen_error *e);

/* Finds any figure, those of decisions and options among them. */
ohmen_status weigh_find(struct figures *f, const char *name, figure_id *out, ohmen_error *e);

#endif
