/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Present values of a random decision, year by year and hazard by hazard, in long double.
 * Dates count calendar years plus days / 365, as src/decide/weigh.h says; a year that is
 * broken by a date is paid piece by piece, each piece in its own middle. */
#include <math.h>

#include "weigh_world.h"

/* --- time --- */

static int day_of_year(struct date d)
{
    static const int before[] = {0, 31, 59, 90, 120, 151, 181, 212, 243, 273, 304, 334};
    bool leap = d.year % 4 == 0; /* between 1901 and 2099 */
    if (d.month == 0)
        return 0;
    return before[d.month - 1] + (leap && d.month > 2) + d.day - 1;
}

static struct date start_of(const struct decision_world *w)
{
    return w->start.year ? w->start : (struct date){2026, 1, 1};
}

/* The double that the program takes: the pieces are cut at the same places. */
static double years_to(const struct decision_world *w, struct date d)
{
    struct date s = start_of(w);
    return d.year - s.year + (day_of_year(d) - day_of_year(s)) / 365.0;
}

struct service {
    double from, to;
};

static double within(const struct decision_world *w, double t)
{
    return t < 0 ? 0 : t > w->horizon ? w->horizon : t;
}

static struct service service_of(const struct decision_world *w, const struct plan_option *o)
{
    double from = o->in_service.year ? years_to(w, o->in_service) : 0;
    double to = o->life ? from + o->life : w->horizon;
    return (struct service){within(w, from), within(w, to)};
}

static long double factor(const struct decision_world *w, long double years)
{
    return powl(1 + (long double)w->interest, -years);
}

/* 1 a year from `from` to `to`, one year after the other. */
static long double series(const struct decision_world *w, double from, double to)
{
    long double sum = 0;
    for (int year = (int)from; year < to; year++) {
        long double a = fmax(from, year), b = fmin(to, year + 1);
        sum += (b - a) * factor(w, (a + b) / 2);
    }
    return sum;
}

/* --- risk --- */

static const struct action *action_on(const struct plan_option *o, size_t hazard)
{
    for (size_t k = 0; k < o->n; k++)
        if (o->action[k].hazard == hazard)
            return &o->action[k];
    return NULL;
}

/* EUR per year of a hazard under a set of options. */
static long double risk(const struct decision_world *w, size_t hazard, unsigned set)
{
    long double f = hazard < HAZARDS ? w->frequency[hazard] : 0, euros = w->euros[hazard];
    for (size_t i = 0; i < w->n_options; i++) {
        const struct action *x = set >> i & 1 ? action_on(&w->option[i], hazard) : NULL;
        if (!x)
            continue;
        switch (x->kind) {
        case ACTION_ADD: f = w->frequency[hazard]; break;
        case ACTION_REMOVE: f = 0; break;
        case ACTION_SCALE: f *= x->number; break;
        case ACTION_PRICE: euros = x->number; break;
        }
    }
    return f * euros;
}

/* The options of a set that are in service at t and act on the hazard. */
static unsigned acting(const struct decision_world *w, unsigned set, size_t hazard, double t)
{
    unsigned active = 0;
    for (size_t i = 0; i < w->n_options; i++) {
        struct service s = service_of(w, &w->option[i]);
        if (set >> i & 1 && s.from <= t && t < s.to && action_on(&w->option[i], hazard))
            active |= 1u << i;
    }
    return active;
}

/* The next time behind t at which other options act on the hazard. */
static double next_change(const struct decision_world *w, unsigned set, size_t hazard, double t)
{
    double next = w->horizon;
    for (size_t i = 0; i < w->n_options; i++) {
        struct service s = service_of(w, &w->option[i]);
        double at[2] = {s.from, s.to};
        for (size_t k = 0; k < 2 && set >> i & 1 && s.from < s.to; k++)
            if (at[k] > t && at[k] < next && action_on(&w->option[i], hazard))
                next = at[k];
    }
    return next;
}

/* --- sums --- */

static bool is_counted(const struct decision_world *w, size_t hazard)
{
    if (hazard < HAZARDS && w->focus >> hazard & 1)
        return true;
    for (unsigned set = 1; set < 1u << w->n_options; set++)
        for (size_t i = 0; i < w->n_options; i++)
            if (set >> i & 1 && action_on(&w->option[i], hazard) && decision_possible(w, set))
                return true;
    return false;
}

static long double cost_of(const struct decision_world *w, const struct plan_option *o)
{
    struct service s = service_of(w, o);
    struct date first = start_of(w);
    long double cost = 0;
    if (o->invest >= 0) {
        int year = o->on.year ? o->on.year - first.year : 0;
        year -= o->on.year && day_of_year(o->on) < day_of_year(first);
        if (year < w->horizon) /* what is paid later is paid by somebody else's plan */
            cost += o->invest * factor(w, year < 0 ? 0 : year);
    }
    if (o->running >= 0)
        cost += o->running * series(w, s.from, s.to);
    return cost;
}

struct present_values decision_worth(const struct decision_world *w, unsigned set)
{
    struct present_values v = {0};
    for (size_t h = 0; h < HAZARDS + w->n_options; h++) {
        if (!is_counted(w, h))
            continue;
        long double now = risk(w, h, 0);
        v.damage += now * series(w, 0, w->horizon);
        for (double t = 0, next; t < w->horizon; t = next) {
            next = next_change(w, set, h, t);
            unsigned active = acting(w, set, h, t);
            long double avoided = now - risk(w, h, active), years = series(w, t, next);
            v.benefit += active ? avoided * years : 0;
            v.size += active ? (now + risk(w, h, active)) * years : 0;
        }
    }
    v.damage -= v.benefit;
    for (size_t i = 0; i < w->n_options; i++)
        v.cost += set >> i & 1 ? cost_of(w, &w->option[i]) : 0;
    return v;
}
