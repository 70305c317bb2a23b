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

/* One option, with what its time brings. */
struct timed_option {
    const char *id;
    struct life life;
    bool renews; /* does something that comes with it have an age? */
    bool early;  /* does its commissioning change something? */
};

/* The register as all options of the path leave it. */
static const struct model *model_of(struct figures *f, const struct path *p)
{
    const char **names = NEW_ARRAY(f->arena, p->applied.n, const char *);
    const struct variant *v;
    for (size_t i = 0; i < p->applied.n; i++)
        names[i] = p->applied.at[i].option;
    return figures_variant(f, p->applied.n, names, &v, NULL) == OHMEN_OK ? v->model : f->base;
}

static struct timed_option timed_option(struct figures *f, const struct model *m,
                                        const struct applied *x)
{
    const struct option *o = model_get(f->base, KIND_OPTION, x->option);
    struct timed_option t = {.id = x->option, .life = life_later(f, x->option, x->later)};
    bool again = life_renewals(&t.life) || x->later > 0;
    t.renews = again && renewal_change(f, m, x->option, 1) != NULL;
    t.early = o->early && o->early->change->n;
    return t;
}

static struct timed_option *timed_options(struct figures *f, const struct path *p)
{
    struct timed_option *all = NEW_ARRAY(f->arena, p->applied.n, struct timed_option);
    const struct model *m = model_of(f, p);
    for (size_t i = 0; i < p->applied.n; i++)
        all[i] = timed_option(f, m, &p->applied.at[i]);
    return all;
}

bool timeline_is_dated(struct figures *f, const struct path *p, const struct applied *x, double at)
{
    struct timed_option t = timed_option(f, model_of(f, p), x);
    double settled = t.life.begin + (t.early ? t.life.early : 0);
    return settled > at || life_end(&t.life) < t.life.horizon || t.renews || t.life.renewed;
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

/* The changes of the path that hold at a time, laid over a variant. */
static ohmen_status with_changes(struct figures *f, const struct path *p, double at,
                                 const struct variant **v, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < p->changed.n; i++)
        if (p->changed.at[i].from <= at)
            status =
                figures_variant_with(f, *v, p->changed.at[i].name, p->changed.at[i].change, v, e);
    return status;
}

/* The variant of what holds at a time: options, their last renewals, their commissioning. */
static ohmen_status variant_at(struct figures *f, const struct path *p,
                               const struct timed_option *all, double at,
                               const struct variant **out, ohmen_error *e)
{
    size_t n = p->applied.n, k = 0;
    const char **names = NEW_ARRAY(f->arena, 3 * n, const char *);
    for (size_t i = 0; i < n; i++) {
        const struct timed_option *o = &all[i];
        size_t last = life_last_renewal(&o->life, at);
        if (!life_holds(&o->life, at))
            continue;
        names[k++] = o->id;
        if (o->renews && (last || o->life.later > 0))
            names[k++] =
                arena_printf(f->arena, "%s:%s", o->id, life_label(f->arena, f, &o->life, last));
        if (o->early && life_is_early(&o->life, at))
            names[k++] = arena_printf(f->arena, "%s:" EARLY, o->id);
    }
    ohmen_status status = figures_variant(f, k, names, out, e);
    return status == OHMEN_OK ? with_changes(f, p, at, out, e) : status;
}

static void add_all_cuts(struct figures *f, const struct path *p, const struct timed_option *all,
                         double horizon, struct cuts *cuts)
{
    *array_push(f->arena, cuts) = 0;
    *array_push(f->arena, cuts) = horizon;
    for (size_t i = 0; i < p->applied.n; i++)
        add_cuts(f, &all[i], cuts);
    for (size_t i = 0; i < p->changed.n; i++)
        if (p->changed.at[i].from > 0 && p->changed.at[i].from < horizon)
            *array_push(f->arena, cuts) = p->changed.at[i].from;
    qsort(cuts->at, cuts->n, sizeof *cuts->at, by_number);
}

ohmen_status timeline_cut_path(struct figures *f, const struct path *p, double horizon,
                               struct stretches *out, ohmen_error *e)
{
    const struct timed_option *all = timed_options(f, p);
    struct cuts cuts = {0};
    add_all_cuts(f, p, all, horizon, &cuts);
    for (size_t i = 0; i + 1 < cuts.n; i++) {
        struct stretch s = {cuts.at[i], cuts.at[i + 1], NULL};
        if (s.from == s.to)
            continue;
        ohmen_status status = variant_at(f, p, all, s.from, &s.variant, e);
        if (status != OHMEN_OK)
            return status;
        *array_push(f->arena, out) = s;
    }
    return OHMEN_OK;
}

ohmen_status timeline_cut(struct figures *f, const struct alternative *x, double horizon,
                          struct stretches *out, ohmen_error *e)
{
    struct path p = {0};
    for (size_t i = 0; i < x->n; i++)
        *array_push(f->arena, &p.applied) = (struct applied){x->options[i], 0};
    return timeline_cut_path(f, &p, horizon, out, e);
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
