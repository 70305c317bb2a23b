/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The oracle of trees: costs of every policy, given each hidden state. Owns nothing. */
#include "branching_world.h"

#include <check.h>
#include <gsl/gsl_integration.h>
#include <gsl/gsl_linalg.h>
#include <math.h>
#include <string.h>

enum { DONE_MOST = 12, POINTS_OF_RULE = 12, POLICIES_MOST = 400 };

static const double SAME = 1e-9; /* a */

/* --- linear maps --- */

/* What is to come: before = d + m after. */
struct map {
    double d[TREE_HIDDEN], m[TREE_HIDDEN][TREE_HIDDEN];
};

struct row {
    double x[TREE_HIDDEN];
};
struct set ARRAY_BODY(struct row);

static size_t hidden(const struct tree_world *w)
{
    return w->n_states == 1 ? w->states[0].n : w->states[0].n * w->states[1].n;
}

static size_t value_in(const struct tree_world *w, size_t k, size_t state)
{
    if (w->n_states == 1)
        return k;
    return state == 0 ? k / w->states[1].n : k % w->states[1].n;
}

static size_t with(const struct tree_world *w, size_t k, size_t state, size_t value)
{
    if (w->n_states == 1)
        return value;
    size_t p = state == 0 ? value : value_in(w, k, 0), q = state == 1 ? value : value_in(w, k, 1);
    return p * w->states[1].n + q;
}

static struct map identity(void)
{
    struct map x = {{0}, {{0}}};
    for (size_t i = 0; i < TREE_HIDDEN; i++)
        x.m[i][i] = 1;
    return x;
}

static void compose(struct map *x, const struct map *then)
{
    struct map y = {{0}, {{0}}};
    for (size_t i = 0; i < TREE_HIDDEN; i++) {
        y.d[i] = x->d[i];
        for (size_t j = 0; j < TREE_HIDDEN; j++) {
            y.d[i] += x->m[i][j] * then->d[j];
            for (size_t k = 0; k < TREE_HIDDEN; k++)
                y.m[i][k] += x->m[i][j] * then->m[j][k];
        }
    }
    *x = y;
}

static void pay(struct map *x, double amount)
{
    struct map y = identity();
    for (size_t i = 0; i < TREE_HIDDEN; i++)
        y.d[i] = amount;
    compose(x, &y);
}

/* --- where one stands --- */

struct standing {
    double time;
    size_t n, n_changes;
    struct {
        size_t option;
        double later;
    } applied[DONE_MOST];
    double changes[DONE_MOST]; /* factors of the first hazard */
};

static double begin_of(const struct tree_option *o, double later)
{
    return (isnan(o->service) ? 0 : o->service) + later;
}

static double end_of(const struct tree_world *w, const struct tree_option *o, double later)
{
    return o->life > 0 && !o->renewed ? fmin(begin_of(o, later) + o->life, w->horizon) : w->horizon;
}

static double worth(const struct tree_world *w, double year)
{
    return pow(1 + w->discount, -year);
}

/* Each year's in its middle. */
static double annuity(const struct tree_world *w, double from, double to)
{
    double sum = 0;
    for (double t = from; t < to - SAME;) {
        double next = fmin(floor(t + SAME) + 1, to);
        sum += (next - t) * worth(w, floor(t + SAME) + 0.5);
        t = next;
    }
    return sum;
}

/* Factor of a hazard under what is in service at the beginning of a piece of time. */
static double factor_at(const struct tree_world *w, const struct standing *s, size_t hazard)
{
    double x = 1;
    for (size_t i = 0; i < s->n; i++) {
        const struct tree_option *o = &w->options[s->applied[i].option];
        double begin = begin_of(o, s->applied[i].later), since = s->time - begin;
        if (since < -SAME || s->time > end_of(w, o, s->applied[i].later) - SAME)
            continue;
        x *= o->factor[hazard];
        if (o->renewed)
            since = fmod(since + SAME, o->life) - SAME;
        if (o->early > 0 && hazard == 0 && since < o->early - SAME)
            x *= o->early_factor;
    }
    for (size_t i = 0; i < s->n_changes && hazard == 0; i++)
        x *= s->changes[i];
    return x;
}

static double rate_in(const struct tree_world *w, const struct standing *s, size_t hazard, size_t k)
{
    double x = w->frequency[hazard] * factor_at(w, s, hazard);
    for (size_t i = 0; i < w->n_states; i++)
        x *= w->states[i].factor[value_in(w, k, i)][hazard];
    return x;
}

/* --- time --- */

static void nearer(double at, const struct standing *s, double *next)
{
    if (at > s->time + SAME && at < *next - SAME)
        *next = at;
}

static double next_event(const struct tree_world *w, const struct standing *s, double to)
{
    double next = to;
    nearer(floor(s->time + SAME) + 1, s, &next);
    for (size_t i = 0; i < s->n; i++) {
        const struct tree_option *o = &w->options[s->applied[i].option];
        double begin = begin_of(o, s->applied[i].later);
        for (size_t k = 0; begin + (double)k * o->life < w->horizon - SAME; k++) {
            nearer(begin + (double)k * o->life, s, &next);
            nearer(begin + (double)k * o->life + o->early, s, &next);
            if (!o->renewed)
                break;
        }
        nearer(end_of(w, o, s->applied[i].later), s, &next);
    }
    return next;
}

static void reset(const struct tree_world *w, const struct tree_option *o, struct map *x)
{
    struct map y = {{0}, {{0}}};
    for (size_t k = 0; k < hidden(w); k++) {
        size_t to = k;
        for (size_t i = 0; i < w->n_states; i++)
            if (o->sets[i] >= 0)
                to = with(w, to, i, (size_t)o->sets[i]);
        y.m[k][to] = 1;
    }
    compose(x, &y);
}

/* Options that begin or are new again just now, in the order of their names. */
static void reset_now(const struct tree_world *w, const struct standing *s, struct map *x)
{
    for (size_t i = 0; i < s->n; i++) {
        const struct tree_option *o = &w->options[s->applied[i].option];
        double since = s->time - begin_of(o, s->applied[i].later);
        double k = o->renewed ? round(since / o->life) : 0;
        if (k >= 0 && s->time < w->horizon - SAME && fabs(since - k * o->life) < SAME)
            reset(w, o, x);
    }
}

static void add_flow(gsl_matrix *q, size_t from, size_t to, double rate)
{
    if (from == to)
        return;
    gsl_matrix_set(q, from, to, gsl_matrix_get(q, from, to) + rate);
    gsl_matrix_set(q, from, from, gsl_matrix_get(q, from, from) - rate);
}

static void fill_rates(const struct tree_world *w, const struct standing *s, gsl_matrix *q)
{
    gsl_matrix_set_zero(q);
    for (size_t k = 0; k < hidden(w); k++)
        for (size_t i = 0; i < w->n_states; i++) {
            const struct tree_state *x = &w->states[i];
            for (size_t v = 0; v < x->n; v++)
                add_flow(q, k, with(w, k, i, v), x->becomes[value_in(w, k, i)][v]);
            if (x->renewed_by_failure >= 0)
                add_flow(q, k, with(w, k, i, (size_t)x->renewed_by_failure), rate_in(w, s, 0, k));
        }
}

static void exponential(const gsl_matrix *q, double years, gsl_matrix *scratch, gsl_matrix *out)
{
    gsl_matrix_memcpy(scratch, q);
    gsl_matrix_scale(scratch, years);
    gsl_linalg_exponential_ss(scratch, out, GSL_MODE_DEFAULT);
}

/* Where one is at the end, and what the time spent in each state does. */
static void piece(const struct tree_world *w, const struct standing *s, double years, struct map *x)
{
    size_t n = hidden(w);
    gsl_matrix *q = gsl_matrix_alloc(n, n), *scratch = gsl_matrix_alloc(n, n),
               *e = gsl_matrix_alloc(n, n);
    gsl_integration_glfixed_table *rule = gsl_integration_glfixed_table_alloc(POINTS_OF_RULE);
    struct map y = identity();
    double damage[TREE_HIDDEN] = {0}, each = worth(w, floor(s->time + SAME) + 0.5);
    for (size_t k = 0; k < n; k++)
        for (size_t h = 0; h < TREE_HAZARDS; h++)
            damage[k] += rate_in(w, s, h, k) * w->damage[h] * each;
    fill_rates(w, s, q);
    for (size_t i = 0; w->evolves && i < POINTS_OF_RULE; i++) {
        double t, weight;
        gsl_integration_glfixed_point(0, years, i, &t, &weight, rule);
        exponential(q, t, scratch, e);
        for (size_t k = 0; k < n; k++)
            for (size_t j = 0; j < n; j++)
                y.d[k] += weight * gsl_matrix_get(e, k, j) * damage[j];
    }
    exponential(q, years, scratch, e);
    for (size_t k = 0; k < n; k++) {
        for (size_t j = 0; j < n && w->evolves; j++)
            y.m[k][j] = gsl_matrix_get(e, k, j);
        if (!w->evolves)
            y.d[k] = damage[k] * years;
    }
    compose(x, &y);
    gsl_integration_glfixed_table_free(rule);
    gsl_matrix_free(q);
    gsl_matrix_free(scratch);
    gsl_matrix_free(e);
}

static void pass(const struct tree_world *w, struct standing *s, double to, struct map *x)
{
    to = fmin(to, w->horizon);
    while (s->time < to - SAME) {
        double next = next_event(w, s, to);
        piece(w, s, next - s->time, x);
        s->time = next;
        reset_now(w, s, x);
    }
}

/* --- options --- */

static void pay_at(const struct tree_world *w, double amount, double year, struct map *x)
{
    if (year < w->horizon)
        pay(x, amount * worth(w, year));
}

static double kept(const struct tree_world *w, const struct tree_option *o, double later)
{
    bool is = begin_of(o, later) < w->horizon && end_of(w, o, later) >= w->horizon;
    return is ? -o->residual * worth(w, w->horizon) : 0;
}

static void apply(const struct tree_world *w, struct standing *s, size_t option, struct map *x)
{
    const struct tree_option *o = &w->options[option];
    double on = (isnan(o->on) ? 0 : o->on) + s->time, begin = begin_of(o, s->time);
    double running_from = begin;
    size_t i = 0;
    while (i < s->n && s->applied[i].option < option)
        i++;
    if (i < s->n && s->applied[i].option == option) {
        running_from = fmax(begin, end_of(w, o, s->applied[i].later));
        pay(x, -kept(w, o, s->applied[i].later));
    } else {
        ck_assert_uint_lt(s->n, DONE_MOST);
        memmove(&s->applied[i + 1], &s->applied[i], (s->n++ - i) * sizeof s->applied[0]);
    }
    s->applied[i].option = option;
    s->applied[i].later = s->time;
    pay_at(w, o->invest, floor(on + SAME), x);
    for (size_t k = 1; o->renewed && begin + (double)k * o->life < w->horizon - SAME; k++)
        pay_at(w, o->invest, floor(on + (double)k * o->life + SAME), x);
    pay(x, o->running * annuity(w, running_from, end_of(w, o, s->time)) + kept(w, o, s->time));
    if (begin <= s->time + SAME)
        reset(w, o, x);
}

/* --- policies --- */

static bool beats(const struct tree_world *w, const struct row *p, const struct row *q)
{
    for (size_t k = 0; k < hidden(w); k++)
        if (p->x[k] > q->x[k])
            return false;
    return true;
}

static void add_row(const struct tree_world *w, struct set *s, const struct row *x)
{
    size_t n = 0;
    for (size_t i = 0; i < s->n; i++)
        if (beats(w, &s->at[i], x))
            return;
    for (size_t i = 0; i < s->n; i++)
        if (!beats(w, x, &s->at[i]))
            s->at[n++] = s->at[i];
    s->n = n;
    *array_push(w->a, s) = *x;
    if (s->n >= POLICIES_MOST) {
        *w->too_many = true;
        s->n = 1;
    }
}

static struct set only(const struct tree_world *w)
{
    struct set s = {0};
    *array_push(w->a, &s) = (struct row){{0}};
    return s;
}

/* One row of each in all ways, those of b by these weights. */
static struct set all_ways(const struct tree_world *w, const struct set *a, const struct set *b,
                           const double *weight)
{
    struct set out = {0};
    for (size_t i = 0; i < a->n; i++)
        for (size_t j = 0; j < b->n; j++) {
            struct row x = a->at[i];
            for (size_t k = 0; k < hidden(w); k++)
                x.x[k] += weight[k] * b->at[j].x[k];
            add_row(w, &out, &x);
        }
    return out;
}

static void unite(const struct tree_world *w, struct set *s, const struct set *more)
{
    for (size_t i = 0; i < more->n; i++)
        add_row(w, s, &more->at[i]);
}

static struct set before(const struct tree_world *w, const struct map *x, const struct set *after)
{
    struct set out = {0};
    for (size_t i = 0; i < after->n; i++) {
        struct row y = {{0}};
        for (size_t k = 0; k < hidden(w); k++) {
            y.x[k] = x->d[k];
            for (size_t j = 0; j < hidden(w); j++)
                y.x[k] += x->m[k][j] * after->at[i].x[j];
        }
        add_row(w, &out, &y);
    }
    return out;
}

static struct set behind(struct tree_world *w, const struct tree_steps *steps, struct standing s);
static struct set stage(struct tree_world *w, struct standing s, size_t first);

static struct set behind_point(struct tree_world *w, const struct tree_step *step,
                               struct standing s)
{
    struct set out = {0};
    if (step->kind != TREE_CHOOSE)
        out = only(w);
    for (size_t b = 0; b < step->n; b++) {
        struct set one = behind(w, step->branches[b], s);
        double weight[TREE_HIDDEN];
        for (size_t k = 0; step->kind != TREE_CHOOSE && k < hidden(w); k++)
            weight[k] = step->kind == TREE_CHANCE
                            ? step->p[b]
                            : w->states[step->which].given[value_in(w, k, step->which)][b];
        if (step->kind == TREE_CHOOSE)
            unite(w, &out, &one);
        else
            out = all_ways(w, &out, &one, weight);
    }
    return out;
}

static struct set at_end(struct tree_world *w, struct standing s)
{
    struct map x = identity();
    double next = w->horizon;
    if (w->repeats)
        next = (floor(s.time / w->every + SAME) + 1) * w->every;
    pass(w, &s, next, &x);
    struct set after = s.time < w->horizon - SAME ? stage(w, s, SIZE_MAX) : only(w);
    return before(w, &x, &after);
}

static struct set behind(struct tree_world *w, const struct tree_steps *steps, struct standing s)
{
    struct map x = identity();
    struct set after;
    for (size_t i = 0; i < steps->n; i++) {
        const struct tree_step *step = &steps->at[i];
        if (step->kind == TREE_PAY)
            pay_at(w, step->number, floor(s.time + SAME), &x);
        if (step->kind == TREE_WAIT)
            pass(w, &s, s.time + step->number, &x);
        if (step->kind == TREE_APPLY)
            apply(w, &s, step->which, &x);
        if (step->kind == TREE_CHANGE)
            s.changes[s.n_changes++] = step->number;
        if (step->kind == TREE_READ)
            pay_at(w, w->states[step->which].costs, floor(s.time + SAME), &x);
        if (step->kind >= TREE_CHOOSE) {
            after = behind_point(w, step, s);
            return before(w, &x, &after);
        }
    }
    after = at_end(w, s);
    return before(w, &x, &after);
}

/* --- choices that come again --- */

static bool possible(const struct tree_world *w, const struct tree_steps *steps,
                     const struct standing *s)
{
    for (size_t i = 0; i < steps->n; i++)
        for (size_t k = 0; steps->at[i].kind == TREE_APPLY && k < s->n; k++) {
            const struct tree_option *o = &w->options[steps->at[i].which];
            bool sets = o->sets[0] >= 0 || (w->n_states > 1 && o->sets[1] >= 0);
            size_t before = s->applied[k].option, now = steps->at[i].which;
            if (before == now && (!sets || o->renewed))
                return false;
            if (w->exclude && before + now == 1)
                return false;
        }
    return true;
}

static bool alike(const struct tree_world *w, size_t p, size_t q)
{
    for (size_t i = 0; i < w->n_states; i++)
        if (w->sees[i] && value_in(w, p, i) != value_in(w, q, i))
            return false;
    return true;
}

/* What is seen lets each set of states that look alike have a policy of its own. */
static struct set as_seen(const struct tree_world *w, const struct set *all)
{
    struct set out = only(w);
    for (size_t k = 0; k < hidden(w); k++) {
        bool first = true;
        double weight[TREE_HIDDEN] = {0};
        for (size_t j = 0; j < hidden(w); j++) {
            weight[j] = alike(w, k, j);
            first = first && !(j < k && weight[j] > 0);
        }
        struct set here = {0};
        for (size_t i = 0; first && i < all->n; i++) {
            struct row x = all->at[i];
            for (size_t j = 0; j < hidden(w); j++)
                x.x[j] *= weight[j];
            add_row(w, &here, &x);
        }
        if (first)
            out = all_ways(w, &out, &here, weight);
    }
    return out;
}

static struct set stage(struct tree_world *w, struct standing s, size_t first)
{
    struct set all = {0};
    for (size_t b = 0; b < w->n; b++) {
        if ((first < w->n && b != first) || (w->repeats && !possible(w, w->choose[b], &s)))
            continue;
        struct set one = behind(w, w->choose[b], s);
        unite(w, &all, &one);
    }
    return w->repeats && (w->sees[0] || w->sees[1]) ? as_seen(w, &all) : all;
}

static double least_mean(const struct tree_world *w, const struct set *s)
{
    double least = INFINITY;
    for (size_t i = 0; i < s->n; i++) {
        double sum = 0;
        for (size_t k = 0; k < hidden(w); k++) {
            double p = w->states[0].p[value_in(w, k, 0)];
            if (w->n_states > 1)
                p *= w->states[1].p[value_in(w, k, 1)];
            sum += p * s->at[i].x[k];
        }
        least = fmin(least, sum);
    }
    return least;
}

double tree_world_value(struct tree_world *w, size_t first)
{
    struct standing s = {0};
    struct set all = stage(w, s, first);
    return least_mean(w, &all);
}

double tree_world_nothing(struct tree_world *w)
{
    struct standing s = {0};
    struct map x = identity();
    struct set end = only(w);
    pass(w, &s, w->horizon, &x);
    end = before(w, &x, &end);
    return least_mean(w, &end);
}
