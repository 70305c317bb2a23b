/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dates as years of the horizon, and the horizon cut into stretches. Owns nothing. */
#include "decide/timeline.h"

#include <math.h>
#include <stdlib.h>

#include "figure/horizon.h"
#include "figure/service.h"

struct service timeline_service(const struct figures *f, const char *id, double horizon)
{
    struct life life = life_of(f, id);
    struct service r = {fmin(fmax(life.begin, 0), horizon),
                        fmin(fmax(life_end(&life), 0), horizon)};
    return r;
}

static int by_number(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

/* One option of an alternative, with what its time brings. */
struct timed_option {
    const char *id;
    struct life life;
    bool renews; /* is something new again at a renewal? */
    bool early;  /* does its commissioning change something? */
};

static bool renews_something(struct figures *f, const struct alternative *x, const char *option)
{
    return renewal_change(f, x->variant->model, option, 1) != NULL;
}

static struct timed_option *timed_options(struct figures *f, const struct alternative *x)
{
    struct timed_option *all = NEW_ARRAY(f->arena, x->n, struct timed_option);
    for (size_t i = 0; i < x->n; i++) {
        const struct option *o = model_get(f->base, KIND_OPTION, x->options[i]);
        struct life life = life_of(f, x->options[i]);
        all[i] = (struct timed_option){.id = x->options[i], .life = life};
        all[i].renews = life_renewals(&life) && renews_something(f, x, x->options[i]);
        all[i].early = o->early && o->early->change->n;
    }
    return all;
}

struct cuts ARRAY_BODY(double);

static void add_cut(struct figures *f, const struct life *l, double at, struct cuts *out)
{
    if (at > 0 && at < l->horizon)
        *array_push(f->arena, out) = at;
}

static void add_cuts(struct figures *f, const struct timed_option *o, struct cuts *out)
{
    const struct life *l = &o->life;
    size_t renewals = o->renews || o->early ? life_renewals(l) : 0;
    add_cut(f, l, l->begin, out);
    add_cut(f, l, life_end(l), out);
    for (size_t k = 0; k <= renewals; k++) {
        double at = life_renewal(l, k);
        add_cut(f, l, at, out);
        if (o->early)
            add_cut(f, l, fmin(at + l->early, life_end(l)), out);
    }
}

/* The variant of what holds at a time: options, their last renewals, their commissioning. */
static ohmen_status variant_at(struct figures *f, const struct timed_option *all, size_t n,
                               double at, const struct variant **out, ohmen_error *e)
{
    const char **names = NEW_ARRAY(f->arena, 3 * n, const char *);
    size_t k = 0;
    for (size_t i = 0; i < n; i++) {
        const struct timed_option *o = &all[i];
        size_t last = life_last_renewal(&o->life, at);
        if (!life_holds(&o->life, at))
            continue;
        names[k++] = o->id;
        if (o->renews && last)
            names[k++] =
                arena_printf(f->arena, "%s:%s", o->id, life_label(f->arena, f, &o->life, last));
        if (o->early && life_is_early(&o->life, at))
            names[k++] = arena_printf(f->arena, "%s:" EARLY, o->id);
    }
    return figures_variant(f, k, names, out, e);
}

ohmen_status timeline_cut(struct figures *f, const struct alternative *x, double horizon,
                          struct stretches *out, ohmen_error *e)
{
    const struct timed_option *all = timed_options(f, x);
    struct cuts cuts = {0};
    *array_push(f->arena, &cuts) = 0;
    *array_push(f->arena, &cuts) = horizon;
    for (size_t i = 0; i < x->n; i++)
        add_cuts(f, &all[i], &cuts);
    qsort(cuts.at, cuts.n, sizeof *cuts.at, by_number);
    for (size_t i = 0; i + 1 < cuts.n; i++) {
        struct stretch s = {cuts.at[i], cuts.at[i + 1], NULL};
        if (s.from == s.to)
            continue;
        ohmen_status status = variant_at(f, all, x->n, s.from, &s.variant, e);
        if (status != OHMEN_OK)
            return status;
        *array_push(f->arena, out) = s;
    }
    return OHMEN_OK;
}

double timeline_calendar_year(const struct register_settings *s, day d)
{
    double year = date_year(d) - date_year(horizon_start(s));
    return horizon_years(s, d) < year ? year - 1 : year;
}

double timeline_year(const struct register_settings *s, day d)
{
    return fmax(timeline_calendar_year(s, d), 0);
}
