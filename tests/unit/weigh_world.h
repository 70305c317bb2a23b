/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A random decision: hazards of known risk and options that scale, cost, remove and add
 * them in time, as a document and worked out year by year in long double: the oracle of the
 * tests of weighing.
 *
 * Invariant: what an option does is a list of actions on different hazards; two options go
 * together unless their actions contradict or one excludes the other. */
#ifndef TESTS_WEIGH_WORLD_H
#define TESTS_WEIGH_WORLD_H

#include <stdbool.h>

#include "base/text.h"
#include "random.h"

enum { HAZARDS = 5, OPTIONS = 10, ACTIONS = 2 };

enum action_kind { ACTION_SCALE, ACTION_PRICE, ACTION_REMOVE, ACTION_ADD };
struct action {
    enum action_kind kind;
    size_t hazard; /* ACTION_ADD: HAZARDS + number of the option */
    double number; /* factor; euros */
};

struct date {
    int year, month, day; /* day 0: the year alone; year 0: not given */
};

struct plan_option {
    size_t n;
    struct action action[ACTIONS];
    double invest, running; /* -1: none */
    struct date on, in_service;
    int life; /* a; 0: none */
    bool renewed;
    double residual;             /* -1: none */
    double early_for;            /* a; 0: no commissioning period */
    struct action early;         /* what is different in it: of ACTION_SCALE or ACTION_PRICE */
    unsigned excludes, requires; /* bits: numbers of options */
};

struct decision_world {
    struct arena *arena;
    struct random random;
    struct date start; /* year 0: not given */
    int horizon;
    double interest;
    double frequency[HAZARDS + OPTIONS], euros[HAZARDS + OPTIONS];
    unsigned focus; /* bits: hazards */
    size_t n_options;
    struct plan_option option[OPTIONS];
    bool end_of_year; /* what is paid in a year is paid at its end */
    /* The price that two options settle on for the one hazard that both price; 0: none. */
    double settled[OPTIONS][OPTIONS];
};

/* At most OPTIONS options. */
struct decision_world *decision_random(struct arena *a, uint64_t seed, size_t options);
const char *decision_text(const struct decision_world *w);

/* Can the options of a set (bits) be had together? At most two of more than eight. */
bool decision_possible(const struct decision_world *w, unsigned set);
bool decision_contradicts(const struct decision_world *w, size_t p, size_t q);
/* The hazard on which the prices of two options differ, if they contradict in nothing else;
 * SIZE_MAX where they do not. */
size_t decision_quarrel(const struct decision_world *w, size_t p, size_t q);
const char *decision_name(const struct decision_world *w, unsigned set);

struct present_values {
    long double damage, cost, benefit;
    long double size, cost_size; /* of all that was added up for benefit and cost, without signs */
    long double annual_cost;
};
struct present_values decision_worth(const struct decision_world *w, unsigned set);

#endif
