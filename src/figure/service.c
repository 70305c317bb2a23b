/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Service of options in time, and what is new at a renewal. Owns nothing beyond the arena of the
 * figures. */
#include "figure/service.h"

#include <math.h>

#include "figure/horizon.h"

#define DAYS_OF_A_YEAR 365
#define LAST_YEAR 9999 /* of the calendar */

/* What the sum of a day and a life may be wrong by, in days. */
static const double ROUNDING = 1e-6;

/* --- in service --- */

struct life life_of(const struct figures *f, const char *option)
{
    const struct register_settings *s = f->base->settings;
    const struct option *o = model_get(f->base, KIND_OPTION, option);
    return (struct life){.begin = o->in_service == DAY_NONE ? 0 : horizon_years(s, o->in_service),
                         .later = 0,
                         .length = o->life ? expr_constant(o->life->expr) : INFINITY,
                         .renewed = o->renewed,
                         .early = o->early ? expr_constant(o->early->lasts->expr) : 0,
                         .horizon = horizon_length(s)};
}

struct life life_later(const struct figures *f, const char *option, double later)
{
    struct life l = life_of(f, option);
    l.begin += later;
    l.later = later;
    return l;
}

double life_end(const struct life *l)
{
    bool over = !l->renewed && isfinite(l->length);
    return over ? fmin(l->begin + l->length, l->horizon) : l->horizon;
}

bool life_holds(const struct life *l, double t)
{
    return l->begin <= t && t < life_end(l);
}

double life_renewal(const struct life *l, size_t k)
{
    return k == 0 ? l->begin : l->begin + (double)k * l->length;
}

size_t life_renewals(const struct life *l)
{
    if (!l->renewed || l->begin >= l->horizon)
        return 0;
    size_t k = (size_t)((l->horizon - l->begin) / l->length);
    while (life_renewal(l, k + 1) < l->horizon)
        k++;
    while (k > 0 && life_renewal(l, k) >= l->horizon)
        k--;
    return k;
}

size_t life_last_renewal(const struct life *l, double t)
{
    size_t k = life_renewals(l);
    while (k > 0 && life_renewal(l, k) > t)
        k--;
    return k;
}

bool life_is_early(const struct life *l, double t)
{
    return life_holds(l, t) && t < life_renewal(l, life_last_renewal(l, t)) + l->early;
}

/* --- days --- */

static int day_of_year(day d)
{
    return d - date_of(date_year(d), 1, 1);
}

day day_years_behind(day d, double years)
{
    double days = day_of_year(d) + years * DAYS_OF_A_YEAR;
    double whole = floor(days + 0.5 + ROUNDING), year = floor(whole / DAYS_OF_A_YEAR);
    if (date_year(d) + year > LAST_YEAR)
        return date_of(LAST_YEAR, 12, 31);
    return date_of(date_year(d) + (int)year, 1, 1) + (day)(whole - year * DAYS_OF_A_YEAR);
}

const char *life_label(struct arena *a, const struct figures *f, const struct life *l, size_t k)
{
    char text[DATE_TEXT];
    day d = day_years_behind(horizon_start(f->base->settings), life_renewal(l, k));
    return l->later > 0 ? arena_str(a, date_write(text, d)) : arena_printf(a, "%d", date_year(d));
}

double life_moved(struct arena *a, const struct figures *f, const char *option, const char *label)
{
    struct life l = life_of(f, option);
    day d;
    for (size_t k = life_renewals(&l); k > 0; k--)
        if (text_equal(life_label(a, f, &l, k), label))
            return life_renewal(&l, k) - l.begin;
    if (!date_read(label, &d))
        return 0;
    return fmax(horizon_years(f->base->settings, d) - l.begin, 0);
}

/* --- renewals --- */

struct renewing {
    struct figures *f;
    const struct model *m;
    const struct life *life;
    double years; /* by which its days move */
};

static const char *moved(const struct renewing *w, day d)
{
    char text[DATE_TEXT];
    return arena_str(w->f->arena, date_write(text, day_years_behind(d, w->years)));
}

static void put(const struct renewing *w, struct node *map, const char *key, const char *text)
{
    struct place nowhere = {.file = "renewal", .path = key};
    node_set(w->f->arena, map, key, node_scalar(w->f->arena, FORM_TEXT, text, nowhere));
}

static void put_moved(const struct renewing *w, struct node *map, const char *key, day d)
{
    if (d != DAY_NONE)
        put(w, map, key, moved(w, d));
}

/* What has no day of its own is new with the option. */
static day day_of_service(const struct renewing *w, day own)
{
    return own != DAY_NONE ? own
                           : day_years_behind(horizon_start(w->f->base->settings), w->life->begin);
}

/* Days of tests that the option gives move too. */
static void move_tests(const struct renewing *w, const struct node *said, const struct element *x,
                       struct node *out)
{
    const struct node *test = node_get(said, "test");
    struct node *days = node_map(w->f->arena, out->place);
    if (x->test && node_get(test, "last"))
        put_moved(w, days, "last", x->test->last);
    if (x->test && node_get(test, "next"))
        put_moved(w, days, "next", x->test->next);
    if (days->n)
        node_set(w->f->arena, out, "test", days);
}

/* NULL where it is not new at a renewal. */
static struct node *renewed_element(const struct renewing *w, const struct pair *said)
{
    const struct element *x = model_get(w->m, KIND_ELEMENT, said->key);
    bool added = !model_find(w->f->base, said->key);
    if (!x || (!added && !node_get(said->value, "since")))
        return NULL;
    struct node *out = node_map(w->f->arena, said->place);
    put_moved(w, out, "since", day_of_service(w, x->since));
    if (node_get(said->value, "when-known"))
        put_moved(w, out, "when-known", x->known);
    move_tests(w, said->value, x, out);
    node_sort(out);
    return out;
}

static struct node *renewed_rate(const struct renewing *w, const struct pair *said)
{
    const struct rate *r = model_get(w->m, KIND_RATE, said->key);
    if (!r || !node_get(said->value, "since"))
        return NULL;
    struct node *out = node_map(w->f->arena, said->place);
    put_moved(w, out, "since", r->since);
    return out;
}

typedef struct node *renewed_object(const struct renewing *w, const struct pair *said);

static void renew_section(const struct renewing *w, const struct node *change, enum kind kind,
                          renewed_object *renewed, struct node *out)
{
    const struct node *section = node_get(change, kinds[kind].section);
    struct node *all = node_map(w->f->arena, out->place);
    for (size_t i = 0; section && i < section->n; i++) {
        const struct pair *p = &section->pairs[i];
        struct node *object = p->value->type == NODE_MAP ? renewed(w, p) : NULL;
        if (object)
            node_add(w->f->arena, all, p->key, p->place, object);
    }
    node_sort(all);
    if (all->n)
        node_set(w->f->arena, out, kinds[kind].section, all);
}

const struct node *renewal_change(struct figures *f, const struct model *m, const char *option,
                                  double years)
{
    const struct node *change = model_option_change(f->base, option).node;
    struct life life = life_of(f, option);
    struct renewing w = {f, m, &life, years};
    struct node *out = node_map(f->arena, change->place);
    renew_section(&w, change, KIND_ELEMENT, renewed_element, out);
    renew_section(&w, change, KIND_RATE, renewed_rate, out);
    node_sort(out);
    return out->n ? out : NULL;
}
