/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Posteriors of rates and of probabilities on demand, as quantities with a text. Owns
 * nothing. Invariant: the text says all that the distribution was made of, with every
 * digit, so that a reader can compute it again. */
#include "evidence/posterior.h"

#include <math.h>

#include "model/prior.h"

/* --- exposure --- */

#define DAYS_PER_YEAR 365 /* of dated stretches; the base unit of time is one year */

static double stretch_days(const struct exposure *x, day date)
{
    day last = x->to == DAY_NONE ? date : x->to;
    return (double)last - (double)x->from + 1;
}

static ohmen_status refuse_stretch(const char *id, const char *key, const char *what, day d,
                                   day date, ohmen_error *e)
{
    char then[DATE_TEXT], now[DATE_TEXT];
    return error_set(e, OHMEN_COMPUTE,
                     "rates/%s/exposure/%s %s on %s, after the day of evaluation, %s", id, key,
                     what, date_write(then, d), date_write(now, date));
}

ohmen_status posterior_exposure(const struct rate *r, const char *id, day date, double *out,
                                ohmen_error *e)
{
    double sum = 0;
    for (size_t i = 0; i < r->exposure.n; i++) {
        const struct exposure *x = ROW(struct exposure, r->exposure, i);
        const char *key = r->exposure.keys[i];
        if (x->from > date)
            return refuse_stretch(id, key, "begins", x->from, date, e);
        if (x->to != DAY_NONE && x->to > date)
            return refuse_stretch(id, key, "ends", x->to, date, e);
        sum += expr_constant(x->amount->expr) * (stretch_days(x, date) / DAYS_PER_YEAR);
    }
    *out = sum;
    return OHMEN_OK;
}

/* --- texts --- */

static void add_parameter(struct text *t, const char *lead, const struct quantity *q,
                          const char *words, bool *first)
{
    if (!q)
        return;
    text_printf(t, "%s%s ", *first ? lead : ", ", words);
    expr_write(t, q->expr);
    *first = false;
}

static const char *prior_words(const struct prior *p, enum prior_family family)
{
    const char *form = p->form < 0 ? "" : prior_forms[p->form];
    if (text_equal(form, "jeffreys"))
        return "jeffreys prior";
    if (text_equal(form, "constrained"))
        return "constrained non-informative prior";
    return family == PRIOR_GAMMA ? "gamma prior" : "lognormal prior";
}

/* "gamma prior with mean 2.5e-3 per section a, weight 0.5" */
static void add_prior(struct text *t, const struct prior *p, enum prior_family family)
{
    bool first = true;
    text_add(t, prior_words(p, family));
    add_parameter(t, " with ", p->mean, "mean", &first);
    add_parameter(t, " with ", p->weight, "weight", &first);
    add_parameter(t, " with ", p->median, "median", &first);
    add_parameter(t, " with ", p->error_factor, "error factor", &first);
    add_parameter(t, " with ", p->p5, "p5", &first);
    add_parameter(t, " with ", p->p50, "p50", &first);
    add_parameter(t, " with ", p->p95, "p95", &first);
    add_parameter(t, " with ", p->p99, "p99", &first);
    if (p->solution >= 0)
        text_printf(t, ", %s solution", prior_solutions[p->solution]);
}

/* "; 3 events in 8 section for 4483 d and 2 section for 90 d" */
static void add_events(struct text *t, const struct rate *r, day date)
{
    text_printf(t, "; %lld event%s in ", (long long)r->events, r->events == 1 ? "" : "s");
    for (size_t i = 0; i < r->exposure.n; i++) {
        const struct exposure *x = ROW(struct exposure, r->exposure, i);
        text_add(t, i ? " and " : "");
        expr_write(t, x->amount->expr);
        text_printf(t, " for %lld d", (long long)stretch_days(x, date));
    }
}

/* --- rates --- */

/* Gamma(a, b) as its mean and shape. */
static void set_gamma(struct quantity *q, double shape, double rate)
{
    q->shape = SHAPE_GAMMA;
    q->p[0] = shape / rate;
    q->p[1] = shape;
}

static void set_lognormal(struct quantity *q, const struct prior_distribution *d)
{
    q->shape = SHAPE_LOGNORMAL;
    q->p[0] = d->median;
    q->p[1] = d->error_factor;
    q->p[2] = NAN;
}

/* n events (as a number) in the exposure T; T is 0 where none was stated. */
static void set_learnt(struct quantity *q, const struct prior_distribution *d, double events,
                       double exposure)
{
    if (d->family == PRIOR_GAMMA)
        set_gamma(q, d->shape + events, d->rate + exposure);
    else
        set_lognormal(q, d);
    if (d->family == PRIOR_LOGNORMAL && exposure > 0) {
        q->shape = SHAPE_COUNTED;
        q->p[2] = events;
        q->p[3] = exposure;
    }
}

/* All that a prior states has the dimension of the rate, but for weight and error factor. */
static struct dim rate_dim(const struct rate *r)
{
    const struct prior *p = r->prior;
    const struct quantity *all[] = {p->mean, p->median, p->p5, p->p50, p->p95, p->p99};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        if (all[i])
            return all[i]->dim;
    const struct exposure *x = ROW(struct exposure, r->exposure, 0);
    return dim_divide(dim_divide(dim_number, x->amount->dim), dim_time);
}

ohmen_status posterior_rate(struct arena *a, const struct rate *r, const char *id, day date,
                            const struct quantity **out, ohmen_error *e)
{
    struct prior_distribution d;
    const char *key;
    double exposure = 0;
    if (r->is) {
        *out = r->is;
        return OHMEN_OK;
    }
    const char *why = prior_resolve(a, r->prior, &d, &key);
    if (why)
        return error_set(e, OHMEN_COMPUTE, "rates/%s/prior: %s", id, why);
    if (d.family == PRIOR_FIXED) {
        *out = r->prior->mean;
        return OHMEN_OK;
    }
    ohmen_status status = posterior_exposure(r, id, date, &exposure, e);
    if (status != OHMEN_OK)
        return status;
    struct quantity *q = NEW(a, struct quantity);
    struct text t;
    text_init(&t, a);
    add_prior(&t, r->prior, d.family);
    if (r->events >= 0)
        add_events(&t, r, date);
    *q = (struct quantity){.times = 1, .dim = rate_dim(r), .text = text_str(&t)};
    set_learnt(q, &d, r->events > 0 ? (double)r->events : 0, exposure);
    *out = q;
    return OHMEN_OK;
}

/* --- probabilities on demand --- */

const struct quantity *posterior_demands(struct arena *a, const struct demand_record *r)
{
    if (r->is)
        return r->is;
    double prior = text_equal(demand_priors[r->prior], "jeffreys") ? 0.5 : 1;
    struct quantity *q = NEW(a, struct quantity);
    *q = (struct quantity){
        .shape = SHAPE_BETA,
        .p = {prior + (double)r->failures, prior + (double)(r->demands - r->failures)},
        .times = 1};
    q->text = arena_printf(a, "%s prior with %lld failure%s in %lld demand%s",
                           demand_priors[r->prior], (long long)r->failures,
                           r->failures == 1 ? "" : "s", (long long)r->demands,
                           r->demands == 1 ? "" : "s");
    return q;
}
