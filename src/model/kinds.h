/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The kinds of object and their bound structs; the field tables of tables_*.c
 * describe each. Quantities are in base units (src/quantity/unit.h). */
#ifndef MODEL_KINDS_H
#define MODEL_KINDS_H

#include "model/field.h"

/* In the order of export; the numbers are not stored. */
enum kind {
    KIND_REGISTER,
    KIND_SOURCE,
    KIND_SITE,
    KIND_GROUP,
    KIND_VALUE,
    KIND_RATE,
    KIND_TYPE,
    KIND_ELEMENT,
    KIND_COMMON_CAUSE,
    KIND_SCHEME,
    KIND_HAZARD,
    KIND_STATE,
    KIND_OPTION,
    KIND_DECISION,
    KIND_PLAN,
    KIND_COUNT
};
#define KIND_BIT(k) (1u << (k))

/* One row a kind. `computes`: is it followed when the objects that a hazard
 * depends on are collected? */
struct kind_info {
    const char *name, *section;
    bool computes;
    const struct table *table;
};
extern const struct kind_info kinds[KIND_COUNT];

/* The kind by its name or by its section; KIND_COUNT when there is none. */
enum kind kind_named(const char *name);
enum kind kind_of_section(const char *section);

/* "an element", "a scheme", "an element or a scheme" for a set of kinds. */
const char *kinds_words(struct arena *a, unsigned set);

#define REGISTER_ID "register" /* the id of the one object of KIND_REGISTER */

/* A number with where it comes from: {is:, source:} or just the number. */
struct estimate {
    struct quantity *is;
    const char *source, *note;
};

/* What is unknown (`is`) or differs between occurrences (`varies`). */
struct varying {
    struct quantity *is, *varies; /* exactly one */
    const char *source, *note;
};

/* What criteria in money apply to: indices into scope_words. */
enum scope { SCOPE_HAZARD, SCOPE_SITE, SCOPE_REGISTER };

struct money_criteria {
    int scope; /* enum scope */
    struct quantity *acceptable_below, *intolerable_above;
};
struct people_criteria {
    struct quantity *acceptable_below, *intolerable_above, *disproportion, *per_fatality;
};
struct criteria {
    struct money_criteria *money;
    struct people_criteria *people;
};
/* When what is paid in a year counts as paid. */
enum yearly_amounts { YEARLY_MID_YEAR, YEARLY_END_OF_YEAR };
struct register_settings {
    const char *title, *currency, *perspective, *note;
    int64_t prices; /* year of the prices */
    day start;      /* first day of the horizon; DAY_NONE: 1 January of `prices` */
    struct quantity *horizon, *discount, *sustained_over;
    struct names counts;
    int64_t customers_served;
    bool steady; /* figures are long-run averages */
    int yearly_amounts; /* enum yearly_amounts, or -1: mid-year */
    struct rows perspectives; /* of struct names */
    struct criteria *criteria;
};

struct source {
    const char *title, *by, *reference, *note;
    int kind;
    day date;
    bool verified;
};

struct site {
    const char *name, *in, *note;
    int64_t customers;
    struct quantity *load;
};

struct group_of_people {
    const char *name, *site, *note;
    int64_t persons;
};

struct value {
    const char *name, *source, *note;
    struct quantity *is, *varies;
};

struct prior {
    int form; /* index into prior_forms, or -1: by its parameters */
    struct quantity *mean, *weight, *median, *error_factor, *p5, *p50, *p95, *p99;
    int solution;
    const char *source;
};
struct exposure {
    day from, to;
    struct quantity *amount;
};
struct rate {
    const char *name, *per, *source, *note;
    struct quantity *is, *growth;
    struct prior *prior;
    int64_t events;
    struct rows exposure; /* of struct exposure * */
    day since;
    struct quantity *ageing;
    struct rows kinds_of_fault; /* of int64_t */
    int kinds_prior;            /* enum share_prior, or -1: uniform */
};

/* Dirichlet priors of shares: 1 or 1/2 for each kind. */
enum share_prior { SHARE_PRIOR_UNIFORM, SHARE_PRIOR_JEFFREYS };

struct demand_record {
    struct quantity *is;
    int prior; /* index into demand_priors */
    int64_t failures, demands;
    const char *source, *note;
};
struct test {
    struct quantity *every, *takes, *costs, *finds, *leaves_failed, *trips;
    day last, next;
    const char *source;
};
struct unwanted {
    struct estimate *by_itself;
    struct rows per_event; /* of struct estimate *, keyed by stress class */
};
struct element {
    const char *name, *type, *site, *source, *note;
    int kind; /* index into element_kinds */
    struct demand_record *per_demand;
    struct estimate *undetected, *detected, *out_of_service;
    struct quantity *repair, *exercised;
    struct names revealed_by;
    bool out_while_repaired;
    day since, known;
    struct test *test;
    struct unwanted *unwanted;
};
/* A type has the fields of an element that its elements share. */
struct element_type {
    const char *name, *source, *note;
    int kind;
    struct demand_record *per_demand;
    struct estimate *undetected, *detected;
    struct quantity *repair;
    struct unwanted *unwanted;
};

/* Elements of one common cause: with beta, and with alpha factors. */
#define COMMON_CAUSE_BETA 5
#define COMMON_CAUSE_MOST 8
struct common_cause {
    const char *name, *source, *note;
    struct quantity *beta, *beta_detected;
    struct names of;
    const char *found_by;
    bool settings;
    struct list factors; /* of struct quantity *: of failures of 1, 2, ... elements */
    bool staggered;
};

struct scheme {
    const char *name, *site, *source, *note;
    struct structure *works, *trips_on;
};

/* A branch of a response: an outcome, a split, or a question whether a scheme works. */
struct branch {
    struct quantity *share; /* branches of a split */
    const char *outcome, *if_works;
    struct rows split; /* of struct branch *, keyed by name */
    struct branch *yes, *no;
};
struct response_row {
    const char *cleared_by, *breaker_failure_of;
    struct quantity *in; /* clearance time */
    struct estimate *sees;
    struct branch then; /* share is NULL */
};
struct damage_item {
    const char *name, *category, *source, *note;
    struct quantity *is, *varies;
};
struct interruption {
    int64_t customers;
    struct quantity *load, *lasts;
};
struct harm {
    struct quantity *present, *death, *injury;
};
struct outcome {
    const char *name, *note;
    struct rows damage;        /* of struct damage_item * */
    struct rows interruptions; /* of struct interruption * */
    struct rows harm;          /* of struct harm *, keyed by group */
};
struct hazard {
    const char *name, *site, *owner, *treatment, *source, *note;
    int status;
    day review;
    struct quantity *frequency, *growth;
    struct rows response; /* of struct response_row * */
    struct rows outcomes; /* of struct outcome * */
    struct rows disables; /* of struct estimate *, keyed by element */
};

struct reading_test {
    struct names reads;
    struct rows given; /* of struct list of struct quantity *, keyed by state */
    struct quantity *costs;
};
struct state {
    const char *name, *source, *note;
    struct rows is, varies; /* of struct quantity * */
    struct rows when;       /* of const struct node * */
    struct rows becomes;    /* of struct rows of struct quantity * */
    struct rows failures;   /* of struct rows of const char *, keyed by hazard and outcome */
    struct rows renewed_by; /* of const char *, keyed by option */
    struct rows tests;      /* of struct reading_test * */
};
/* The values of a state with their probabilities or shares: of `is` or of `varies`. */
const struct rows *state_values(const struct state *s);
/* Does what is unknown change with time? */
bool state_evolves(const struct state *s);
/* The state that an option sets, or NULL: it leaves it alone. */
const char *state_renewed(const struct state *s, const char *option);

struct investment {
    struct quantity *is;
    day on;
    const char *source, *note;
};
struct early {
    struct quantity *lasts;
    const struct node *change;
};
struct option {
    const char *name, *site, *owner, *source, *note;
    struct investment *invest;
    day in_service;
    struct estimate *running;
    struct quantity *life, *residual;
    bool renewed;
    struct early *early;
    struct names excludes, requires;
    struct rows combine;   /* of const struct node *, keyed by option */
    struct rows resources; /* of struct quantity * */
    const struct node *change;
};

struct step;
struct fork {
    struct quantity *p;
    struct list then; /* of struct step * */
};
struct step {
    struct quantity *pay, *wait;
    const char *apply, *inspect, *go;
    const struct node *change;
    struct rows reads;  /* of struct list of struct step * */
    struct rows choose; /* of struct list of struct step * */
    struct rows chance; /* of struct fork * */
};
struct decision {
    const char *question, *owner, *note;
    day review;
    struct names focus, options, sees;
    struct rows choose, subtrees; /* of struct list of struct step * */
    struct quantity *every, *risk_tolerance;
    int64_t beliefs;
};

struct plan {
    const char *name, *note;
    struct rows budgets; /* of struct quantity *, keyed by year */
    struct rows limits;  /* of struct quantity *, keyed by resource */
    struct names must, options;
};

extern const char *const yearly_amounts[], *const scope_words[],
    *const source_kinds[], *const element_kinds[], *const prior_forms[],
                                                       *const prior_solutions[],
                                                           *const demand_priors[],
                                                               *const share_priors[],
                                                                   *const hazard_status[];

#endif
