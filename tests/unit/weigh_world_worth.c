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

static double beginning(const struct decision_world *w, const struct plan_option *o)
{
    return o->in_service.year ? years_to(w, o->in_service) : 0;
}

static struct service service_of(const struct decision_world *w, const struct plan_option *o)
{
    double from = beginning(w, o);
    double to = o->life && !o->renewed ? from + o->life : w->horizon;
    return (struct service){within(w, from), within(w, to)};
}

/* The beginning and the renewals, one after the other, as long as they lie within the horizon. */
static bool nth_beginning(const struct decision_world *w, const struct plan_option *o, int n,
                          double *at)
{
    *at = n ? beginning(w, o) + n * (double)o->life : beginning(w, o);
    return *at < w->horizon && (n == 0 || o->renewed);
}

static bool is_early(const struct decision_world *w, const struct plan_option *o, double t)
{
    struct service s = service_of(w, o);
    double at;
    for (int n = 0; nth_beginning(w, o, n, &at); n++)
        if (o->early_for > 0 && s.from <= t && t < s.to && at <= t && t < at + o->early_for)
            return true;
    return false;
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
    return w->end_of_year ? sum * factor(w, 0.5) : sum;
}

/* --- risk --- */

static const struct action *action_on(const struct plan_option *o, size_t hazard)
{
    for (size_t k = 0; k < o->n; k++)
        if (o->action[k].hazard == hazard)
            return &o->action[k];
    return NULL;
}

/* What holds at a time, as bits of options: those in service, those commissioned. */
struct state {
    unsigned in_service, early;
};

static long double priced(const struct decision_world *w, size_t hazard, unsigned set, size_t i,
                          double own)
{
    for (size_t k = 0; k < w->n_options; k++)
        if (set >> k & 1 && w->settled[i][k] > 0 && decision_quarrel(w, i, k) == hazard)
            return w->settled[i][k];
    return own;
}

/* EUR per year of a hazard. */
static long double risk(const struct decision_world *w, size_t hazard, struct state now)
{
    long double f = hazard < HAZARDS ? w->frequency[hazard] : 0, euros = w->euros[hazard];
    for (size_t i = 0; i < w->n_options; i++) {
        const struct action *x = now.in_service >> i & 1 ? action_on(&w->option[i], hazard) : NULL;
        if (!x)
            continue;
        switch (x->kind) {
        case ACTION_ADD: f = w->frequency[hazard]; break;
        case ACTION_REMOVE: f = 0; break;
        case ACTION_SCALE: f *= x->number; break;
        case ACTION_PRICE: euros = priced(w, hazard, now.in_service, i, x->number); break;
        }
    }
    for (size_t i = 0; i < w->n_options; i++) {
        const struct action *x = &w->option[i].early;
        if (now.early >> i & 1 && x->kind == ACTION_SCALE)
            f *= x->number;
        else if (now.early >> i & 1)
            euros = x->number;
    }
    return f * euros;
}

/* The options of a set that are in service at t and act on the hazard. */
static struct state acting(const struct decision_world *w, unsigned set, size_t hazard, double t)
{
    struct state now = {0, 0};
    for (size_t i = 0; i < w->n_options; i++) {
        const struct plan_option *o = &w->option[i];
        struct service s = service_of(w, o);
        if (set >> i & 1 && s.from <= t && t < s.to && action_on(o, hazard))
            now.in_service |= 1u << i;
        if (set >> i & 1 && o->early.hazard == hazard && is_early(w, o, t))
            now.early |= 1u << i;
    }
    return now;
}

static void earlier(double at, double t, double *next)
{
    if (at > t && at < *next)
        *next = at;
}

/* The next time behind t at which other options act on the hazard. */
static double next_change(const struct decision_world *w, unsigned set, size_t hazard, double t)
{
    double next = w->horizon, at;
    for (size_t i = 0; i < w->n_options; i++) {
        const struct plan_option *o = &w->option[i];
        struct service s = service_of(w, o);
        if (!(set >> i & 1) || s.from >= s.to)
            continue;
        bool early = o->early_for > 0 && o->early.hazard == hazard;
        if (action_on(o, hazard) || early) {
            earlier(s.from, t, &next);
            earlier(s.to, t, &next);
        }
        for (int n = 0; early && nth_beginning(w, o, n, &at); n++) {
            earlier(at, t, &next);
            earlier(at + o->early_for, t, &next);
        }
    }
    return next;
}

/* How long from t on the same holds. */
static double same_until(const struct decision_world *w, unsigned set, size_t hazard, double t)
{
    struct state now = acting(w, set, hazard, t), then = now;
    while (t < w->horizon && then.in_service == now.in_service && then.early == now.early) {
        t = next_change(w, set, hazard, t);
        then = acting(w, set, hazard, t);
    }
    return t;
}

/* --- sums --- */

/* Does the option, in its time, change the hazard by its commissioning? */
static bool early_on(const struct decision_world *w, size_t i, size_t hazard)
{
    for (double t = 0; t < w->horizon; t = next_change(w, 1u << i, hazard, t))
        if (acting(w, 1u << i, hazard, t).early)
            return true;
    return false;
}

static bool is_counted(const struct decision_world *w, size_t hazard)
{
    if (hazard < HAZARDS && w->focus >> hazard & 1)
        return true;
    for (unsigned set = 1; set < 1u << w->n_options; set++)
        for (size_t i = 0; i < w->n_options; i++)
            if (set >> i & 1 && (action_on(&w->option[i], hazard) || early_on(w, i, hazard)) &&
                decision_possible(w, set))
                return true;
    return false;
}

/* One payment at the start of a year. */
static void pay(const struct decision_world *w, long double euros, int year,
                struct present_values *v)
{
    v->cost += euros * factor(w, year);
    v->cost_size += fabsl(euros) * factor(w, year);
}

static void add_investments(const struct decision_world *w, const struct plan_option *o,
                            struct present_values *v)
{
    struct date first = start_of(w);
    int year = o->on.year ? o->on.year - first.year : 0;
    double at;
    year -= o->on.year && day_of_year(o->on) < day_of_year(first);
    if (year < w->horizon) /* what is paid later is paid by somebody else's plan */
        pay(w, o->invest, year < 0 ? 0 : year, v);
    for (int n = 1; nth_beginning(w, o, n, &at); n++)
        if (year + n * o->life >= 0 && year + n * o->life < w->horizon)
            pay(w, o->invest, year + n * o->life, v);
}

static void add_cost(const struct decision_world *w, const struct plan_option *o,
                     struct present_values *v)
{
    struct service s = service_of(w, o);
    if (o->invest >= 0)
        add_investments(w, o, v);
    if (o->running >= 0) {
        v->cost += o->running * series(w, s.from, s.to);
        v->cost_size += o->running * series(w, s.from, s.to);
    }
    if (o->residual >= 0 && s.from < w->horizon && s.to >= w->horizon)
        pay(w, -o->residual, w->horizon, v);
}

struct present_values decision_worth(const struct decision_world *w, unsigned set)
{
    struct present_values v = {0};
    const struct state nothing = {0, 0};
    for (size_t h = 0; h < HAZARDS + w->n_options; h++) {
        if (!is_counted(w, h))
            continue;
        long double now = risk(w, h, nothing);
        v.damage += now * series(w, 0, w->horizon);
        for (double t = 0, next; t < w->horizon; t = next) {
            next = same_until(w, set, h, t);
            struct state then = acting(w, set, h, t);
            long double years = series(w, t, next);
            if (!then.in_service && !then.early)
                continue;
            v.benefit += (now - risk(w, h, then)) * years;
            v.size += (now + risk(w, h, then)) * years;
        }
    }
    v.damage -= v.benefit;
    for (size_t i = 0; i < w->n_options; i++)
        if (set >> i & 1)
            add_cost(w, &w->option[i], &v);
    v.annual_cost = v.cost / series(w, 0, w->horizon);
    return v;
}
