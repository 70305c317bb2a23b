/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Priors: which keys go together, and the distribution that they make. Owns nothing.
 * Invariant: what is refused is told by the first thing that is wrong, so that each
 * sentence can be acted upon alone. */
#include "model/prior.h"

#include <math.h>

#include "math/dist.h"
#include "math/elementary.h"
#include "math/gamma_fit.h"
#include "quantity/quantity.h"

enum { N_LEVELS = 4 };

/* Percentiles by their keys, rising. z of 99 %: rounded from more digits. */
static const struct {
    const char *key;
    struct gamma_level level;
    double z;
} levels[N_LEVELS] = {{"p5", {0.05, 0.95}, -DIST_Z95},
                      {"p50", {0.5, 0.5}, 0},
                      {"p95", {0.95, 0.05}, DIST_Z95},
                      {"p99", {0.99, 0.01}, 2.3263478740408411009}};

struct reading {
    struct arena *arena;
    const struct prior *prior;
    const char *form; /* or NULL */
    struct prior_distribution *out;
    const char *key;
    double at[N_LEVELS]; /* percentiles; NAN where not given */
    size_t given[N_LEVELS], n;
};

static double number(const struct quantity *q)
{
    return q ? expr_constant(q->expr) : NAN;
}

static bool is_form(const struct reading *r, const char *form)
{
    return r->form && text_equal(r->form, form);
}

static const char *refuse(struct reading *r, const char *key, const char *why)
{
    r->key = key;
    return why;
}

/* --- what was given --- */

static void add_word(struct text *t, const void *given, const char *word, bool *first)
{
    if (given)
        text_printf(t, *first ? "%s" : ", %s", word);
    *first = *first && !given;
}

/* "mean, weight" */
static const char *given_words(struct reading *r)
{
    struct text t;
    bool first = true;
    const struct prior *p = r->prior;
    text_init(&t, r->arena);
    add_word(&t, p->mean, "mean", &first);
    add_word(&t, p->weight, "weight", &first);
    add_word(&t, p->median, "median", &first);
    add_word(&t, p->error_factor, "error-factor", &first);
    for (size_t i = 0; i < r->n; i++)
        add_word(&t, p, levels[r->given[i]].key, &first);
    return first ? "nothing" : text_str(&t);
}

static const char *wrong_keys(struct reading *r)
{
    const char *takes =
        !r->form ? "mean and weight, mean and error-factor, median and error-factor, mean and one "
                   "percentile, two percentiles, or a form: jeffreys, constrained or fixed"
        : is_form(r, "jeffreys") ? "no other keys"
        : is_form(r, "gamma")
            ? "mean and weight, mean and error-factor, median and error-factor, mean and one "
              "percentile, or two percentiles"
        : is_form(r, "lognormal")
            ? "median and error-factor, mean and error-factor, or two percentiles"
            : "mean alone";
    const char *form = r->form ? arena_printf(r->arena, " of the form %s", r->form) : "";
    return refuse(r, NULL, arena_printf(r->arena, "a prior%s takes %s; found %s", form, takes,
                                        given_words(r)));
}

/* --- gamma --- */

static const char *make_gamma(struct reading *r, double shape, double rate)
{
    *r->out = (struct prior_distribution){.family = PRIOR_GAMMA, .shape = shape, .rate = rate};
    return NULL;
}

/* The rate at which a percentile of the shape lies at x. */
static double rate_of(double shape, struct gamma_level level, double x)
{
    return dist_gamma_quantile(shape, level.p, level.q) / x;
}

static const char *error_factor_shape(struct reading *r, double *shape)
{
    char least[32], greatest[32];
    double factor = number(r->prior->error_factor);
    if (gamma_fit_quotient(levels[1].level, levels[2].level, factor, shape))
        return NULL;
    return refuse(r, "error-factor",
                  arena_printf(r->arena,
                               "the error factor is too %s for a gamma distribution, whose shape "
                               "would lie outside %s to %s; \"form: lognormal\" takes any",
                               factor < 2 ? "small" : "great",
                               text_double(least, GAMMA_FIT_LEAST),
                               text_double(greatest, GAMMA_FIT_GREATEST)));
}

static const char *gamma_error_factor(struct reading *r)
{
    double shape = 0;
    const char *why = error_factor_shape(r, &shape);
    if (why)
        return why;
    if (r->prior->mean)
        return make_gamma(r, shape, shape / number(r->prior->mean));
    return make_gamma(r, shape, rate_of(shape, levels[1].level, number(r->prior->median)));
}

static const char *gamma_percentiles(struct reading *r)
{
    size_t low = r->given[0], high = r->given[1];
    double shape = 0, quotient = r->at[high] / r->at[low];
    if (!gamma_fit_quotient(levels[low].level, levels[high].level, quotient, &shape))
        return refuse(r, levels[high].key,
                      "no gamma distribution has percentiles so far apart or so near each other; "
                      "\"form: lognormal\" takes any");
    return make_gamma(r, shape, rate_of(shape, levels[low].level, r->at[low]));
}

/* A shape to three digits. */
static const char *shape_words(struct arena *a, double shape)
{
    char buf[32];
    double tens = math_pow(10, fmax(0, 2 - floor(math_log10(shape))));
    return arena_str(a, text_double(buf, round(shape * tens) / tens));
}

static const char *gamma_mean_percentile(struct reading *r)
{
    double shapes[2] = {0, 0}, mean = number(r->prior->mean);
    size_t one = r->given[0];
    const char *solution = r->prior->solution < 0 ? NULL : prior_solutions[r->prior->solution];
    int n = gamma_fit_mean(levels[one].level, r->at[one] / mean, shapes);
    if (n == 0)
        return refuse(r, levels[one].key, "no gamma distribution has this mean and percentile");
    if (n == 1 && solution)
        return refuse(r, "solution",
                      "one gamma distribution has this mean and percentile: leave out "
                      "\"solution\"");
    if (n == 2 && !solution)
        return refuse(r, levels[one].key,
                      arena_printf(r->arena,
                                   "two gamma distributions have this mean and percentile, of the "
                                   "shapes %s and %s: say \"solution: lower\" or \"upper\"",
                                   shape_words(r->arena, shapes[0]),
                                   shape_words(r->arena, shapes[1])));
    double shape = n == 2 && text_equal(solution, "upper") ? shapes[1] : shapes[0];
    return make_gamma(r, shape, shape / mean);
}

/* --- lognormal --- */

static const char *make_lognormal(struct reading *r, double median, double error_factor)
{
    *r->out = (struct prior_distribution){
        .family = PRIOR_LOGNORMAL, .median = median, .error_factor = error_factor};
    return NULL;
}

static const char *lognormal_error_factor(struct reading *r)
{
    double factor = number(r->prior->error_factor), s = math_log(factor) / DIST_Z95;
    if (r->prior->median)
        return make_lognormal(r, number(r->prior->median), factor);
    return make_lognormal(r, number(r->prior->mean) * math_exp(-s * s / 2), factor);
}

static const char *lognormal_percentiles(struct reading *r)
{
    size_t low = r->given[0], high = r->given[1];
    double s = math_log(r->at[high] / r->at[low]) / (levels[high].z - levels[low].z);
    return make_lognormal(r, r->at[low] * math_exp(-s * levels[low].z), math_exp(s * DIST_Z95));
}

/* --- which keys go together --- */

enum { MEAN = 1, WEIGHT = 2, MEDIAN = 4, ERROR_FACTOR = 8, ONE = 16, TWO = 32, MORE = 64 };

static unsigned keys_of(const struct reading *r)
{
    const struct prior *p = r->prior;
    return (p->mean ? MEAN : 0u) | (p->weight ? WEIGHT : 0u) | (p->median ? MEDIAN : 0u) |
           (p->error_factor ? ERROR_FACTOR : 0u) | (r->n == 1 ? ONE : 0u) |
           (r->n == 2 ? TWO : 0u) | (r->n > 2 ? MORE : 0u);
}

static const char *by_form(struct reading *r, unsigned keys)
{
    double mean = number(r->prior->mean);
    if (is_form(r, "jeffreys") && keys == 0)
        return make_gamma(r, 0.5, 0);
    if (is_form(r, "constrained") && keys == MEAN)
        return make_gamma(r, 0.5, 1 / (2 * mean));
    if (!is_form(r, "fixed") || keys != MEAN)
        return wrong_keys(r);
    *r->out = (struct prior_distribution){.family = PRIOR_FIXED, .mean = mean};
    return NULL;
}

static const char *gamma_by_keys(struct reading *r, unsigned keys)
{
    double weight = number(r->prior->weight);
    switch (keys) {
    case MEAN | WEIGHT: return make_gamma(r, weight, weight / number(r->prior->mean));
    case MEAN | ERROR_FACTOR: return gamma_error_factor(r);
    case MEDIAN | ERROR_FACTOR: return r->form ? gamma_error_factor(r) : lognormal_error_factor(r);
    case MEAN | ONE: return gamma_mean_percentile(r);
    case TWO: return gamma_percentiles(r);
    default: return wrong_keys(r);
    }
}

static const char *lognormal_by_keys(struct reading *r, unsigned keys)
{
    switch (keys) {
    case MEAN | ERROR_FACTOR:
    case MEDIAN | ERROR_FACTOR: return lognormal_error_factor(r);
    case TWO: return lognormal_percentiles(r);
    default: return wrong_keys(r);
    }
}

static const char *by_keys(struct reading *r, unsigned keys)
{
    if (!r->form || is_form(r, "gamma"))
        return gamma_by_keys(r, keys);
    return is_form(r, "lognormal") ? lognormal_by_keys(r, keys) : by_form(r, keys);
}

static const char *check_order(struct reading *r)
{
    for (size_t i = 1; i < r->n; i++) {
        size_t low = r->given[i - 1], high = r->given[i];
        if (!(r->at[low] < r->at[high]))
            return refuse(r, levels[high].key,
                          arena_printf(r->arena, "\"%s\" must lie above \"%s\"", levels[high].key,
                                       levels[low].key));
    }
    return NULL;
}

static const char *read_prior(struct reading *r)
{
    const struct quantity *percentiles[N_LEVELS] = {r->prior->p5, r->prior->p50, r->prior->p95,
                                                    r->prior->p99};
    for (size_t i = 0; i < N_LEVELS; i++) {
        r->at[i] = number(percentiles[i]);
        if (percentiles[i])
            r->given[r->n++] = i;
    }
    const char *why = check_order(r);
    if (why)
        return why;
    unsigned keys = keys_of(r);
    if (r->prior->error_factor && !(number(r->prior->error_factor) > 1))
        return refuse(r, "error-factor",
                      "an error factor is the 95 % point over the median: greater than 1");
    if (r->prior->solution >= 0 && keys != (MEAN | ONE))
        return refuse(r, "solution", "\"solution\" goes with a mean and one percentile");
    return by_keys(r, keys);
}

/* Parameters that are sound each may still overflow together. */
static bool is_sound(const struct reading *r, const struct prior_distribution *d)
{
    bool may_be_improper = is_form(r, "jeffreys");
    switch (d->family) {
    case PRIOR_FIXED: return true;
    case PRIOR_GAMMA:
        return isfinite(d->shape) && d->shape > 0 && isfinite(d->rate) &&
               (d->rate > 0 || may_be_improper);
    case PRIOR_LOGNORMAL: return isfinite(d->error_factor) && d->median > 0 && isfinite(d->median);
    }
    return false;
}

const char *prior_resolve(struct arena *a, const struct prior *p, struct prior_distribution *out,
                          const char **key)
{
    struct prior_distribution made = {0};
    struct reading r = {.arena = a, .prior = p, .out = &made};
    r.form = p->form < 0 ? NULL : prior_forms[p->form];
    const char *why = read_prior(&r);
    if (!why && !is_sound(&r, &made))
        why = refuse(&r, NULL, "this prior has no finite parameters");
    if (why)
        *key = r.key;
    else
        *out = made;
    return why;
}
