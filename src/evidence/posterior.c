/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Posteriors of rates, of shares and of probabilities on demand, as quantities with a text.
 * Owns nothing. Invariant: the text says all that the distribution was made of, with every
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

static double years_from(day d, day date)
{
    return ((double)d - (double)date) / DAYS_PER_YEAR;
}

static ohmen_status refuse_stretch(const char *id, const char *key, const char *what, day d,
                                   day date, ohmen_error *e)
{
    char then[DATE_TEXT], now[DATE_TEXT];
    return error_set(e, OHMEN_COMPUTE,
                     "rates/%s/exposure/%s %s on %s, after the day of evaluation, %s", id, key,
                     what, date_write(then, d), date_write(now, date));
}

static ohmen_status refuse_youth(const char *id, const char *key, day from, ohmen_error *e)
{
    char then[DATE_TEXT];
    return error_set(e, OHMEN_COMPUTE,
                     "rates/%s/exposure/%s begins on %s, before what ages was there", id, key,
                     date_write(then, from));
}

static ohmen_status check_stretch(const struct exposure *x, const char *id, const char *key,
                                  day date, const struct trend *trend, ohmen_error *e)
{
    if (x->from > date)
        return refuse_stretch(id, key, "begins", x->from, date, e);
    if (x->to != DAY_NONE && x->to > date)
        return refuse_stretch(id, key, "ends", x->to, date, e);
    if (trend_is_before(trend, years_from(x->from, date)))
        return refuse_youth(id, key, x->from, e);
    return OHMEN_OK;
}

/* The mean of lambda(t)/lambda(0) over a stretch. */
static double stretch_weight(const struct exposure *x, day date, const struct trend *trend)
{
    double begin = years_from(x->from, date);
    double end = ((double)x->from - (double)date + stretch_days(x, date)) / DAYS_PER_YEAR;
    return trend_mean(trend, begin, end);
}

ohmen_status posterior_exposure(const struct rate *r, const char *id, day date,
                                const struct trend *trend, double *out, ohmen_error *e)
{
    double sum = 0;
    for (size_t i = 0; i < r->exposure.n; i++) {
        const struct exposure *x = ROW(struct exposure, r->exposure, i);
        ohmen_status status = check_stretch(x, id, r->exposure.keys[i], date, trend, e);
        if (status != OHMEN_OK)
            return status;
        sum += expr_constant(x->amount->expr) * (stretch_days(x, date) / DAYS_PER_YEAR) *
               stretch_weight(x, date, trend);
    }
    if (!trend_is_flat(trend) && !(sum > 0 && isfinite(sum)))
        return error_set(e, OHMEN_COMPUTE,
                         "rates/%s: growth and ageing make its exposure %s: look at \"growth\", "
                         "\"ageing\" and the days of the stretches",
                         id, sum > 0 ? "too large for a number" : "nothing");
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

/* ", weighted by growth 2 % per a and ageing 1.8 since 2001-05-01 for 2026-12-01" */
static void add_trend(struct text *t, const struct rate *r, const struct trend *trend, day date)
{
    char then[DATE_TEXT];
    bool grows = trend->growth != 0, ages = trend->ages && trend->exponent != 1;
    text_add(t, ", weighted by ");
    if (grows) {
        text_add(t, "growth ");
        expr_write(t, r->growth->expr);
    }
    text_add(t, grows && ages ? " and " : "");
    if (ages) {
        text_add(t, "ageing ");
        expr_write(t, r->ageing->expr);
        text_printf(t, " since %s", date_write(then, r->since));
    }
    text_printf(t, " for %s", date_write(then, date));
}

/* "8 section for 4483 d"; where it matters when, "8 section for 4483 d from 2014-08-25" */
static void add_stretch(struct text *t, const struct exposure *x, day date, bool when)
{
    char then[DATE_TEXT];
    expr_write(t, x->amount->expr);
    text_printf(t, " for %lld d", (long long)stretch_days(x, date));
    if (when)
        text_printf(t, " from %s", date_write(then, x->from));
}

/* "; 3 events in 8 section for 4483 d and 2 section for 90 d". `as`: the rate whose trend it
 * is. */
static void add_events(struct text *t, const struct rate *r, const struct rate *as,
                       const struct trend *trend, day date)
{
    bool flat = trend_is_flat(trend);
    text_printf(t, "; %lld event%s in ", (long long)r->events, r->events == 1 ? "" : "s");
    for (size_t i = 0; i < r->exposure.n; i++) {
        text_add(t, i ? " and " : "");
        add_stretch(t, ROW(struct exposure, r->exposure, i), date, !flat);
    }
    if (!flat)
        add_trend(t, as, trend, date);
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

/* The prior with the events under a trend; flat where none were counted. */
static const struct quantity *learn(struct arena *a, const struct rate *r, const struct rate *as,
                                    const struct prior_distribution *d, const struct trend *trend,
                                    double exposure, day date)
{
    struct quantity *q = NEW(a, struct quantity);
    struct text t;
    text_init(&t, a);
    add_prior(&t, r->prior, d->family);
    if (r->events >= 0)
        add_events(&t, r, as, trend, date);
    *q = (struct quantity){.times = 1, .dim = rate_dim(r), .text = text_str(&t)};
    set_learnt(q, d, r->events > 0 ? (double)r->events : 0, exposure);
    return q;
}

ohmen_status posterior_rate_trended(struct arena *a, const struct rate *r, const struct rate *as,
                                    const char *id, day date, const struct quantity **out,
                                    ohmen_error *e)
{
    struct prior_distribution d;
    struct trend trend = {0};
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
    if (r->events >= 0) {
        ohmen_status status = trend_of(as, id, date, &trend, e);
        if (status == OHMEN_OK)
            status = posterior_exposure(r, id, date, &trend, &exposure, e);
        if (status != OHMEN_OK)
            return status;
    }
    *out = learn(a, r, as, &d, &trend, exposure, date);
    return OHMEN_OK;
}

ohmen_status posterior_rate(struct arena *a, const struct rate *r, const char *id, day date,
                            const struct quantity **out, ohmen_error *e)
{
    return posterior_rate_trended(a, r, r, id, date, out, e);
}

/* --- shares --- */

const struct quantity *posterior_share(struct arena *a, const struct rate *r, size_t kind)
{
    const int64_t *counts = r->kinds_of_fault.at;
    size_t n = r->kinds_of_fault.n;
    int form = r->kinds_prior < 0 ? SHARE_PRIOR_UNIFORM : r->kinds_prior;
    double each = form == SHARE_PRIOR_UNIFORM ? 1 : 0.5, others = 0;
    int64_t all = counts[kind];
    for (size_t i = 0; i < n; i++) {
        all += i == kind ? 0 : counts[i];
        others += i == kind ? 0 : each + (double)counts[i];
    }
    struct quantity *q = NEW(a, struct quantity);
    *q = (struct quantity){
        .shape = SHAPE_BETA, .p = {each + (double)counts[kind], others}, .times = 1};
    q->text =
        arena_printf(a, "%s prior over %zu kinds with %lld of %lld fault%s", share_priors[form], n,
                     (long long)counts[kind], (long long)all, all == 1 ? "" : "s");
    return q;
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
    q->text =
        arena_printf(a, "%s prior with %lld failure%s in %lld demand%s", demand_priors[r->prior],
                     (long long)r->failures, r->failures == 1 ? "" : "s", (long long)r->demands,
                     r->demands == 1 ? "" : "s");
    return q;
}
