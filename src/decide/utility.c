/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Certainty equivalents (utility.h). Owns nothing beyond the arenas that it is given. */
#include "decide/utility.h"

#include <math.h>

#include "decide/loss_samples.h"
#include "figure/compile.h"
#include "math/elementary.h"
#include "math/lanes.h"

/* The trapezoidal rule over normal deviates. */
enum { STEPS_PER_ONE = 32, REACH = 8, STEPS = 2 * REACH * STEPS_PER_ONE + 1 };
#define PER_ROOT_OF_TWO_PI 0.3989422804014327
/* Turns: tolerances that are tried on each side, and halvings between two of them. */
enum { TRIED = 12, HALVINGS = 30 };

double utility_tolerance(const struct weighing *w)
{
    const struct quantity *q = w->decision->risk_tolerance;
    return q ? expr_constant(q->expr) : 0;
}

/* ---- transforms ---- */

static bool has_heavy_tail(const struct dist *d)
{
    return (d->shape == DIST_LOGNORMAL && !isfinite(d->p[2])) || d->shape == DIST_COUNTED;
}

static double of_gamma(const struct dist *d, double x)
{
    double scale = d->p[0] / d->p[1];
    return x * scale < 1 ? math_exp(-d->p[1] * math_log1p(-x * scale)) : INFINITY;
}

static double of_uniform(const struct dist *d, double x)
{
    double width = (d->p[1] - d->p[0]) * x;
    return math_exp(d->p[0] * x) * (width != 0 ? math_expm1(width) / width : 1);
}

static double of_discrete(const struct dist *d, double x)
{
    double sum = 0;
    for (size_t i = 0; i < d->n; i++)
        sum += d->probabilities[i] * math_exp(x * d->values[i]);
    return sum;
}

static double integrated(const struct dist *d, double x)
{
    double sum = 0;
    for (int i = 0; i < STEPS; i++) {
        double z = (double)i / STEPS_PER_ONE - REACH;
        double q = dist_quantile(d, dist_normal_probability(z), dist_normal_probability(-z));
        sum += math_exp(x * q - z * z / 2);
    }
    return sum * PER_ROOT_OF_TWO_PI / STEPS_PER_ONE;
}

double utility_transform(const struct dist *d, double x)
{
    if (x == 0)
        return 1;
    switch (d->shape) {
    case DIST_NORMAL: return math_exp(d->p[0] * x + d->p[1] * d->p[1] * x * x / 2);
    case DIST_GAMMA: return of_gamma(d, x);
    case DIST_UNIFORM: return of_uniform(d, x);
    case DIST_DISCRETE: return of_discrete(d, x);
    default: return x > 0 && has_heavy_tail(d) ? INFINITY : integrated(d, x);
    }
}

static double log_mean_exp(size_t n, const double *x)
{
    double most = -INFINITY, sum = 0;
    for (size_t i = 0; i < n; i++)
        most = fmax(most, x[i]);
    for (size_t i = 0; i < n; i++)
        sum += math_exp(x[i] - most);
    return most + math_log(sum / (double)n);
}

double utility_equivalent(size_t n, const double *x, double tolerance)
{
    double most = -INFINITY, sum = 0;
    for (size_t i = 0; i < n; i++)
        most = fmax(most, x[i]);
    for (size_t i = 0; i < n; i++)
        sum += math_exp((x[i] - most) / tolerance);
    return most + tolerance * math_log(sum / (double)n);
}

/* ---- a source year by year ---- */

struct finding {
    struct loss_world *world;
    struct arena *arena;
    double tolerance;
    double rate;                      /* of interest */
    bool at_end;                      /* of a year its amounts are paid */
    const struct loss_source *source; /* at hand */
    const struct loss_damage *damage;
    double *exponent; /* by sample */
};

/* The part of a year of the horizon that a source has. */
struct part {
    double length, factor;
    size_t slot;
};

static size_t n_parts(const struct loss_source *s)
{
    return s->to > s->from ? (size_t)(ceil(s->to) - floor(s->from)) : 0;
}

static struct part part_at(const struct finding *x, size_t i)
{
    const struct loss_source *s = x->source;
    double year = floor(s->from) + (double)i;
    double from = fmax(year, s->from), to = fmin(year + 1, s->to);
    double when = (from + to) / 2 + (x->at_end ? 0.5 : 0);
    return (struct part){to - from, math_pow(1 + x->rate, -when), s->of_year ? s->of_year[i] : 0};
}

/* M(t) of an occurrence in sample s of its own. */
static double of_drawn(const struct finding *x, const double *amounts, double t)
{
    double terms[LOSS_DRAWS], sum = 0;
    for (size_t i = 0; i < LOSS_DRAWS; i++)
        terms[i] = amounts[i] * t;
    lanes_functions(x->world->plan.isa)->exp(LOSS_DRAWS, terms, terms);
    for (size_t i = 0; i < LOSS_DRAWS; i++)
        sum += terms[i];
    return sum / LOSS_DRAWS;
}

static double transform_of(const struct finding *x, size_t s, double t)
{
    const struct loss_damage *d = x->damage;
    if (d->form == LOSS_DRAWN)
        return of_drawn(x, d->amounts + s * LOSS_DRAWS, t);
    double m = math_exp(d->shift[s] * t);
    for (size_t j = 0; d->form == LOSS_AFFINE && j < d->n_varying; j++)
        m *= utility_transform(&d->varying[j].dist, d->times[j][s] * d->varying[j].scale * t);
    return m;
}

/* Where the damage is the same in all samples its transform is taken once. */
static void add_part(struct finding *x, size_t i)
{
    const struct loss_world *w = x->world;
    struct part p = part_at(x, i);
    double t = p.factor / x->tolerance, same = 0;
    if (x->damage->n == 1)
        same = transform_of(x, 0, t) - 1;
    for (size_t s = 0; s < w->sets * w->points; s++) {
        double more = x->damage->n == 1 ? same : transform_of(x, s, t) - 1;
        x->exponent[s] += p.length * loss_rate(w, x->source, p.slot, s) * more;
    }
}

/* ---- does it exist? ---- */

static const char *source_words(const struct finding *x)
{
    const struct loss_source *s = x->source;
    return arena_printf(x->arena, "the outcome \"%s\" of \"%s\"", s->outcome, s->hazard);
}

/* The figure of an input, or the name of its stream. */
static const char *input_words(const struct finding *x, uint32_t input)
{
    const struct figures *f = x->world->f;
    for (node_id n = 0; n < graph_size(f->graph) && n < f->of_node.n; n++)
        if (graph_at(f->graph, n)->op == OP_INPUT && graph_at(f->graph, n)->extra == input &&
            f->of_node.at[n] != FIGURE_NONE)
            return figure_name(f, x->arena, f->of_node.at[n]);
    return f->input_names.at[input];
}

static ohmen_status refuse(const struct finding *x, uint32_t input, const char *why, ohmen_error *e)
{
    return error_set(e, OHMEN_COMPUTE,
                     "with exponential utility %s has no certainty equivalent: %s %s",
                     source_words(x), input_words(x, input), why);
}

static double greatest_t(const struct finding *x)
{
    double most = 0;
    for (size_t i = 0; i < n_parts(x->source); i++)
        most = fmax(most, part_at(x, i).factor);
    return most / x->tolerance;
}

/* The greatest factor of what varies, in any sample. */
static double greatest_times(const struct loss_damage *d, size_t j)
{
    double most = -INFINITY;
    for (size_t s = 0; s < d->n; s++)
        most = fmax(most, d->times[j][s] * d->varying[j].scale);
    return most;
}

static ohmen_status check_varying(const struct finding *x, const struct loss_varying *v,
                                  double times, ohmen_error *e)
{
    if (times > 0 && has_heavy_tail(&v->dist))
        return refuse(x, v->input, "is lognormal; state the most that it can be (at-most)", e);
    if (v->dist.shape == DIST_GAMMA && times * greatest_t(x) * v->dist.p[0] / v->dist.p[1] >= 1)
        return refuse(x, v->input,
                      "is a gamma whose scale is not below the risk tolerance: its tail weighs "
                      "more than that",
                      e);
    return OHMEN_OK;
}

static ohmen_status check_damage(const struct finding *x, ohmen_error *e)
{
    const struct loss_damage *d = x->damage;
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < d->n_unknown; i++) {
        double low, high;
        quantity_range(x->world->f->inputs.at[d->unknown[i]], &low, &high);
        if (!isfinite(high))
            return refuse(x, d->unknown[i],
                          "is unknown and has no upper limit; state the most that it can be "
                          "(at-most)",
                          e);
    }
    for (size_t j = 0; status == OHMEN_OK && j < d->n_varying; j++) {
        if (d->form == LOSS_AFFINE)
            status = check_varying(x, &d->varying[j], greatest_times(d, j), e);
        else if (!isfinite(d->varying[j].high) || !isfinite(d->varying[j].low))
            return refuse(x, d->varying[j].input,
                          "has no limits, and enters in a curve or together with others", e);
    }
    return status;
}

/* ---- rates that are unknown ---- */

/* What a unit of a gamma input adds to the exponent. */
struct adding {
    bool *is_met; /* by input: below a rate, not by way of a probability */
    double *adds;
    const struct loss_source **of; /* the source that adds most */
    double *most;
};

static void meet(const struct figures *f, node_id n, bool *is_met)
{
    const struct graph_node *node = graph_at(f->graph, n);
    const node_id *args = graph_args(f->graph, n);
    if (node->op == OP_INPUT)
        is_met[node->extra] = true;
    if (node->op == OP_PICK || node->op == OP_DIAGRAM || node->op == OP_COURSE ||
        node->op == OP_EITHER || node->op == OP_HELD)
        return;
    for (size_t i = 0; i < node->n; i++)
        meet(f, args[i], is_met);
}

/* Derivatives of the rate by its inputs at the point, times length and M - 1. */
static void add_slopes(const struct finding *x, const struct part *p, double *derivative,
                       struct adding *to)
{
    struct figures *f = x->world->f;
    node_id rate = x->source->rates[p->slot];
    double more = 0;
    for (size_t s = 0; s < x->damage->n; s++)
        more = fmax(more, transform_of(x, s, p->factor / x->tolerance) - 1);
    eval_backward(f->eval, rate, derivative);
    for (node_id n = 0; n <= rate; n++) {
        const struct graph_node *node = graph_at(f->graph, n);
        if (node->op != OP_INPUT || derivative[n] == 0)
            continue;
        double adds = derivative[n] * p->length * more;
        to->adds[node->extra] += adds;
        if (adds > to->most[node->extra]) {
            to->most[node->extra] = adds;
            to->of[node->extra] = x->source;
        }
    }
}

static struct adding new_adding(const struct finding *x)
{
    size_t n = x->world->f->inputs.n;
    return (struct adding){NEW_ARRAY(x->arena, n, bool), NEW_ARRAY(x->arena, n, double),
                           NEW_ARRAY(x->arena, n, const struct loss_source *),
                           NEW_ARRAY(x->arena, n, double)};
}

/* Marks the inputs of the rate at hand; true where one of them is a gamma. OHMEN_COMPUTE for a
 * lognormal one. */
static ohmen_status check_rate(const struct finding *x, struct adding *to, bool *any_gamma,
                               ohmen_error *e)
{
    const struct figures *f = x->world->f;
    bool *met = NEW_ARRAY(x->arena, f->inputs.n, bool);
    *any_gamma = false;
    for (size_t i = 0; i < x->source->n_rates; i++)
        meet(f, x->source->rates[i], met);
    for (size_t i = 0; i < f->inputs.n; i++) {
        if (!met[i] || f->input_varies.at[i])
            continue;
        struct dist d = quantity_dist(f->inputs.at[i]);
        if (has_heavy_tail(&d))
            return refuse(x, (uint32_t)i,
                          "is unknown as a lognormal; state the most that it can be (at-most)", e);
        to->is_met[i] = to->is_met[i] || d.shape == DIST_GAMMA;
        *any_gamma = *any_gamma || d.shape == DIST_GAMMA;
    }
    return OHMEN_OK;
}

static ohmen_status check_gammas(struct finding *x, const struct adding *all, ohmen_error *e)
{
    const struct figures *f = x->world->f;
    for (size_t i = 0; i < f->inputs.n; i++) {
        const struct quantity *q = f->inputs.at[i];
        if (!all->is_met[i])
            continue;
        struct dist d = quantity_dist(q);
        if (all->adds[i] * q->times * d.p[0] / d.p[1] < 1)
            continue;
        x->source = all->of[i];
        return refuse(x, (uint32_t)i,
                      "is unknown as a gamma whose tail weighs more than the risk tolerance", e);
    }
    return OHMEN_OK;
}

/* ---- a case ---- */

static void take(struct finding *x, const struct loss_source *s)
{
    x->source = s;
    x->damage = loss_world_damage(x->world, s->damage);
}

static ohmen_status check_path(struct finding *x, const struct loss_sources *all, ohmen_error *e)
{
    struct adding adding = new_adding(x);
    double *derivative = NEW_ARRAY(x->arena, graph_size(x->world->f->graph), double);
    for (size_t k = 0; k < all->n; k++) {
        bool any_gamma;
        take(x, &all->at[k]);
        ohmen_status status = check_damage(x, e);
        if (status == OHMEN_OK)
            status = check_rate(x, &adding, &any_gamma, e);
        if (status != OHMEN_OK)
            return status;
        for (size_t i = 0; any_gamma && i < n_parts(x->source); i++) {
            struct part p = part_at(x, i);
            add_slopes(x, &p, derivative, &adding);
        }
    }
    return check_gammas(x, &adding, e);
}

/* The exponent of a path in each sample, and its probability as a logarithm. */
static ohmen_status add_path(struct finding *x, const struct loss_path *path, ohmen_error *e)
{
    size_t n = x->world->sets * x->world->points;
    ohmen_status status = check_path(x, path->sources, e);
    for (size_t k = 0; status == OHMEN_OK && k < path->sources->n; k++) {
        take(x, &path->sources->at[k]);
        for (size_t i = 0; i < n_parts(x->source); i++)
            add_part(x, i);
    }
    for (size_t s = 0; status == OHMEN_OK && s < n; s++) {
        x->exponent[s] += math_log(path->probability);
        if (!isfinite(x->exponent[s]))
            return error_set(e, OHMEN_COMPUTE,
                             "with exponential utility the damage is too great for so small a risk "
                             "tolerance");
    }
    return status;
}

/* By sectioning, as in math/statistics.h. `all`: exponents of each path, by sample. */
static void read(const struct finding *x, size_t n_paths, double *const *all, struct utility *out)
{
    const struct loss_world *w = x->world;
    size_t n = w->sets * w->points;
    double *sums = NEW_ARRAY(x->arena, n, double), *terms = NEW_ARRAY(x->arena, n_paths, double);
    double squares = 0;
    for (size_t s = 0; s < n; s++) {
        for (size_t p = 0; p < n_paths; p++)
            terms[p] = all[p][s];
        sums[s] = log_mean_exp(n_paths, terms) + math_log((double)n_paths);
    }
    out->damage = x->tolerance * log_mean_exp(n, sums);
    for (size_t s = 0; s < w->sets && w->sets > 1; s++) {
        double of_set = x->tolerance * log_mean_exp(w->points, sums + s * w->points);
        squares += (of_set - out->damage) * (of_set - out->damage);
    }
    out->error = w->sets > 1 ? sqrt(squares / ((double)w->sets * (double)(w->sets - 1))) : 0;
}

ohmen_status utility_find(struct loss_world *w, struct arena *a, const struct loss_case *of,
                          double tolerance, struct utility *out, ohmen_error *e)
{
    struct arena *scratch = arena_child(a);
    const struct register_settings *settings = w->f->base->settings;
    struct finding x = {.world = w, .arena = scratch, .tolerance = tolerance};
    double **all = NEW_ARRAY(scratch, of->n_paths, double *);
    ohmen_status status = OHMEN_OK;
    x.rate = expr_constant(settings->discount->expr);
    x.at_end = settings->yearly_amounts == YEARLY_END_OF_YEAR;
    *out = (struct utility){0, 0, 0};
    for (size_t p = 0; status == OHMEN_OK && p < of->n_paths; p++) {
        x.exponent = all[p] = NEW_ARRAY(scratch, w->sets * w->points, double);
        status = add_path(&x, &of->paths[p], e);
    }
    if (status == OHMEN_OK)
        read(&x, of->n_paths, all, out);
    arena_free(scratch);
    return status;
}

/* ---- where the choice turns ---- */

/* The alternative with the least damage and cost; of equals the first. n: it does not exist. */
static size_t best_at(struct loss_world *w, struct arena *a, size_t n,
                      const struct loss_case *cases, const double *costs, double tolerance)
{
    size_t best = 0;
    double least = INFINITY;
    for (size_t k = 0; k < n; k++) {
        struct utility u;
        if (utility_find(w, a, &cases[k], tolerance, &u, NULL) != OHMEN_OK)
            return n;
        if (u.damage + costs[k] < least) {
            least = u.damage + costs[k];
            best = k;
        }
    }
    return best;
}

/* Between a tolerance at which `best` is best and one at which it is not, by their logarithm. */
static double halve(struct loss_world *w, struct arena *a, size_t n, const struct loss_case *cases,
                    const double *costs, size_t best, double is, double is_not, size_t *other)
{
    for (int i = 0; i < HALVINGS; i++) {
        double middle = sqrt(is) * sqrt(is_not);
        size_t now = best_at(w, a, n, cases, costs, middle);
        if (now == best) {
            is = middle;
        } else {
            is_not = middle;
            *other = now;
        }
    }
    return is_not;
}

ohmen_status utility_turns(struct loss_world *w, struct arena *a, size_t n,
                           const struct loss_case *cases, const double *costs, double tolerance,
                           struct utility_turn *out, ohmen_error *e)
{
    struct utility_turn t = {0, 0, n, n, 0};
    double step = math_pow(UTILITY_RANGE, 1. / TRIED);
    struct utility unused;
    for (size_t k = 0; k < n; k++) {
        ohmen_status status = utility_find(w, a, &cases[k], tolerance, &unused, e);
        if (status != OHMEN_OK)
            return status;
    }
    size_t best = best_at(w, a, n, cases, costs, tolerance);
    for (int side = 0; side < 2; side++) {
        double *turn = side ? &t.above : &t.below, at = tolerance, before = at;
        size_t *other = side ? &t.above_other : &t.below_other;
        for (int i = 0; i < TRIED && *turn == 0; i++, before = at) {
            at = side ? at * step : at / step;
            *other = best_at(w, a, n, cases, costs, at);
            if (*other != best)
                *turn = halve(w, a, n, cases, costs, best, before, at, other);
        }
    }
    if (t.below_other == n) {
        t.least = t.below;
        t.below = 0;
    }
    *out = t;
    return OHMEN_OK;
}
