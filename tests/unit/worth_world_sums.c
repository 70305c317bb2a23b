/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is avoided, hazard by hazard and year by year. Dates count as figure/horizon.h says; a year
 * in which other options come to change a hazard is paid piece by piece, each in its own middle. */
#include <check.h>
#include <math.h>
#include <stdlib.h>

#include "figure/horizon.h"
#include "worth_world.h"

/* --- time --- */

struct piece {
    double from, to;
};

static struct piece service_of(const struct loaded *l, const struct weighing *w, const char *option)
{
    const struct option *o = model_get(l->model, KIND_OPTION, option);
    const struct register_settings *s = l->model->settings;
    double from = o->in_service == DAY_NONE ? 0 : horizon_years(s, o->in_service);
    double to = o->life ? from + expr_constant(o->life->expr) : w->horizon;
    return (struct piece){fmin(fmax(from, 0), w->horizon), fmin(fmax(to, 0), w->horizon)};
}

static int by_number(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

static size_t cuts_of(const struct loaded *l, const struct weighing *w, const struct alternative *x,
                      double *cuts)
{
    size_t n = 0;
    cuts[n++] = 0;
    for (size_t i = 0; i < x->n; i++) {
        struct piece s = service_of(l, w, x->options[i]);
        cuts[n++] = s.from;
        cuts[n++] = s.to;
    }
    cuts[n++] = w->horizon;
    qsort(cuts, n, sizeof *cuts, by_number);
    return n;
}

/* --- a hazard --- */

static const struct compiled *under(struct loaded *l, size_t n, const char *const *options,
                                    const char *hazard)
{
    const struct variant *v = loaded_variant(l, n, options);
    return model_find(v->model, hazard) ? loaded_compile(l, v, hazard) : NULL;
}

static const struct compiled *hazard_at(struct loaded *l, const struct weighing *w,
                                        const struct alternative *x, const char *hazard, double t)
{
    const char *active[WEIGH_ALL];
    size_t n = 0;
    for (size_t i = 0; i < x->n; i++) {
        struct piece s = service_of(l, w, x->options[i]);
        if (s.from <= t && t < s.to)
            active[n++] = x->options[i];
    }
    return under(l, n, active, hazard);
}

static const struct consequence *effect_of(struct loaded *l, const struct compiled *h,
                                           enum property p, const char *of)
{
    const struct compiled *part;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = figures_consequences(l->figures, h->variant, h->id, &part, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    return consequence_of(part, p, of);
}

/* What a hazard does in a year of the horizon; year < 0: in a mean one. */
static long double does(struct loaded *l, const struct compiled *h, enum property p, const char *of,
                        int year)
{
    if (!h)
        return 0;
    const struct hazard_exports *x = h->exports;
    bool differs = year >= 0 && x->of_year;
    if (p == PROPERTY_RISK)
        return figure_value(l->figures, differs ? x->yearly[x->of_year[year]] : h->main);
    const struct consequence *c = effect_of(l, h, p, of);
    if (!c)
        return 0;
    return figure_value(l->figures, differs ? c->yearly[x->of_year[year]] : c->mean);
}

/* --- sums --- */

struct summing {
    struct loaded *l;
    enum property property;
    const char *of;
    long double interest;
    long double later; /* years from the middle of a year to when its amounts are paid */
    struct worth_sum sum;
};

static void add_piece(struct summing *s, const struct compiled *now, const struct compiled *then,
                      struct piece p)
{
    for (int year = (int)p.from; year < p.to; year++) {
        long double a = fmax(p.from, year), b = fmin(p.to, year + 1);
        long double paid = (b - a) * powl(1 + s->interest, -(a + b) / 2 - s->later);
        long double before = does(s->l, now, s->property, s->of, year);
        long double after = does(s->l, then, s->property, s->of, year);
        s->sum.avoided += (before - after) * paid;
        s->sum.size += (fabsl(before) + fabsl(after)) * paid;
    }
}

static void add_hazard(struct summing *s, const struct weighing *w, const struct alternative *x,
                       const char *hazard)
{
    double cuts[2 * WEIGH_ALL + 2];
    size_t n = cuts_of(s->l, w, x, cuts);
    const struct compiled *now = under(s->l, 0, NULL, hazard);
    for (size_t i = 0, end; i + 1 < n; i = end) {
        const struct compiled *then = hazard_at(s->l, w, x, hazard, cuts[i]);
        for (end = i + 1; end + 1 < n; end++)
            if (cuts[end] < cuts[end + 1] && hazard_at(s->l, w, x, hazard, cuts[end]) != then)
                break;
        if (now != then)
            add_piece(s, now, then, (struct piece){cuts[i], cuts[end]});
    }
}

struct worth_sum worth_present(struct loaded *l, const struct weighing *w,
                               const struct alternative *x, enum property p, const char *of)
{
    struct summing s = {.l = l, .property = p, .of = of};
    s.interest = expr_constant(l->model->settings->discount->expr);
    s.later = l->model->settings->yearly_amounts == YEARLY_END_OF_YEAR ? 0.5L : 0;
    for (size_t i = 0; i < w->hazards.n; i++)
        add_hazard(&s, w, x, w->hazards.at[i].id);
    return s.sum;
}

struct worth_sum worth_mean(struct loaded *l, const struct weighing *w, const struct alternative *x,
                            enum property p, const char *of)
{
    struct worth_sum sum = {0};
    for (size_t i = 0; i < w->hazards.n; i++) {
        long double before = does(l, under(l, 0, NULL, w->hazards.at[i].id), p, of, -1);
        long double after = does(l, under(l, x->n, x->options, w->hazards.at[i].id), p, of, -1);
        sum.avoided += before - after;
        sum.size += fabsl(before) + fabsl(after);
    }
    return sum;
}
