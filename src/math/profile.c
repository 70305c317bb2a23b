/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Making profiles, and what they say (profile.h). Dominance is in profile_dominance.c. Owns its
 * scratch. */
#include "math/profile.h"

#include <assert.h>
#include <math.h>
#include <stdlib.h>

#include "math/elementary.h"

struct point {
    double x, p;
};

struct points {
    size_t n;
    struct point *at;
};

/* ---- in order, equal ones as one ---- */

/* By probability too, so that it does not matter how they stood before. */
static int by_value(const void *p, const void *q)
{
    const struct point *a = p, *b = q;
    if (a->x != b->x)
        return a->x < b->x ? -1 : 1;
    return (a->p > b->p) - (a->p < b->p);
}

static void put_in_order(struct points *s)
{
    size_t n = 0;
    qsort(s->at, s->n, sizeof *s->at, by_value);
    for (size_t i = 0; i < s->n; i++) {
        assert(isfinite(s->at[i].x) && s->at[i].p >= 0);
        if (s->at[i].p == 0)
            continue;
        if (n && s->at[n - 1].x == s->at[i].x)
            s->at[n - 1].p += s->at[i].p;
        else
            s->at[n++] = (struct point){s->at[i].x + 0.0, s->at[i].p}; /* -0 becomes 0 */
    }
    s->n = n;
    assert(n > 0);
}

/* ---- fewer points ---- */

/* What the variance loses when the two are one. */
static double loss_of(const struct point *a, const struct point *b)
{
    double apart = b->x - a->x;
    return apart * apart * (a->p * (b->p / (a->p + b->p)));
}

static int by_size(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

static struct point merged(struct point a, struct point b)
{
    double share = b.p / (a.p + b.p), x = a.x + (b.x - a.x) * share;
    return (struct point){x > b.x ? b.x : x, a.p + b.p};
}

/* Merges up to `excess` pairs that lose no more than `limit`, from the left on; neither end. */
static void merge_pairs(struct points *s, size_t excess, double limit)
{
    size_t n = 1;
    for (size_t i = 1; i < s->n; i++) {
        bool has_next = i + 2 < s->n;
        if (excess && has_next && loss_of(&s->at[i], &s->at[i + 1]) <= limit) {
            s->at[n++] = merged(s->at[i], s->at[i + 1]);
            excess--;
            i++;
        } else
            s->at[n++] = s->at[i];
    }
    s->n = n;
}

/* In rounds, each of which takes the cheaper half of what is still needed: a point that was merged
 * can be merged again. */
static bool make_fewer(struct arena *scratch, struct points *s, size_t most)
{
    bool any = s->n > most;
    double *loss = NEW_ARRAY(scratch, any ? s->n : 0, double);
    assert(most >= PROFILE_FEWEST);
    while (s->n > most) {
        size_t excess = s->n - most, pairs = s->n - 3;
        for (size_t i = 0; i < pairs; i++)
            loss[i] = loss_of(&s->at[i + 1], &s->at[i + 2]);
        qsort(loss, pairs, sizeof *loss, by_size);
        size_t wanted = (excess + 1) / 2;
        merge_pairs(s, excess, loss[wanted < pairs ? wanted - 1 : pairs - 1]);
    }
    return any;
}

/* Puts the points in order, makes them few enough, and copies them. */
static struct profile finished(struct arena *a, struct arena *scratch, struct points s, size_t most,
                               bool is_merged)
{
    put_in_order(&s);
    is_merged = make_fewer(scratch, &s, most) || is_merged;
    double *value = NEW_ARRAY(a, s.n, double), *probability = NEW_ARRAY(a, s.n, double);
    for (size_t i = 0; i < s.n; i++) {
        value[i] = s.at[i].x;
        probability[i] = s.at[i].p;
    }
    arena_free(scratch);
    return (struct profile){s.n, value, probability, is_merged};
}

/* ---- making ---- */

struct profile profile_of(struct arena *a, size_t n, const double *value, const double *probability,
                          size_t most)
{
    struct arena *scratch = arena_child(a);
    struct points s = {n, NEW_ARRAY(scratch, n, struct point)};
    for (size_t i = 0; i < n; i++)
        s.at[i] = (struct point){value[i], probability[i]};
    return finished(a, scratch, s, most, false);
}

struct profile profile_point(struct arena *a, double value)
{
    double p = 1;
    return profile_of(a, 1, &value, &p, PROFILE_FEWEST);
}

/* Different values may become equal by rounding. */
struct profile profile_shift(struct arena *a, const struct profile *p, double by)
{
    struct arena *scratch = arena_child(a);
    struct points s = {p->n, NEW_ARRAY(scratch, p->n, struct point)};
    for (size_t i = 0; i < p->n; i++)
        s.at[i] = (struct point){p->value[i] + by, p->probability[i]};
    return finished(a, scratch, s, p->n > PROFILE_FEWEST ? p->n : PROFILE_FEWEST, p->is_merged);
}

struct profile profile_add(struct arena *a, const struct profile *p, const struct profile *q,
                           size_t most)
{
    struct arena *scratch = arena_child(a);
    size_t n = p->n * q->n;
    if (n / p->n != q->n)
        arena_exhausted(a);
    struct points s = {n, NEW_ARRAY(scratch, n, struct point)};
    for (size_t i = 0; i < p->n; i++)
        for (size_t k = 0; k < q->n; k++)
            s.at[i * q->n + k] =
                (struct point){p->value[i] + q->value[k], p->probability[i] * q->probability[k]};
    return finished(a, scratch, s, most, p->is_merged || q->is_merged);
}

struct profile profile_mix(struct arena *a, size_t n, const struct profile *parts,
                           const double *weight, size_t most)
{
    struct arena *scratch = arena_child(a);
    struct points s = {0};
    bool is_merged = false;
    for (size_t i = 0; i < n; i++)
        s.n += parts[i].n;
    s.at = NEW_ARRAY(scratch, s.n, struct point);
    for (size_t i = 0, to = 0; i < n; i++) {
        is_merged = is_merged || (parts[i].is_merged && weight[i] > 0);
        for (size_t k = 0; k < parts[i].n; k++)
            s.at[to++] = (struct point){parts[i].value[k], weight[i] * parts[i].probability[k]};
    }
    return finished(a, scratch, s, most, is_merged);
}

/* ---- what it says ---- */

/* A sum that keeps what rounding takes (Neumaier, ZAMM 54 (1974) 39). */
struct sum {
    double sum, lost;
};

static double add(struct sum *s, double x)
{
    double t = s->sum + x;
    s->lost += fabs(s->sum) >= fabs(x) ? (s->sum - t) + x : (x - t) + s->sum;
    s->sum = t;
    return s->sum + s->lost;
}

double profile_at_most(const struct profile *p, double x)
{
    struct sum s = {0};
    double total = 0;
    for (size_t i = 0; i < p->n && p->value[i] <= x; i++)
        total = add(&s, p->probability[i]);
    return total;
}

double profile_above(const struct profile *p, double x)
{
    struct sum s = {0};
    double total = 0;
    for (size_t i = p->n; i-- > 0 && p->value[i] > x;)
        total = add(&s, p->probability[i]);
    return total;
}

double profile_quantile(const struct profile *p, double u)
{
    struct sum s = {0};
    for (size_t i = 0; i + 1 < p->n; i++)
        if (add(&s, p->probability[i]) >= u)
            return p->value[i];
    return p->value[p->n - 1];
}

double profile_mean(const struct profile *p)
{
    struct sum s = {0};
    double mean = 0;
    for (size_t i = 0; i < p->n; i++)
        mean = add(&s, p->probability[i] * p->value[i]);
    return mean;
}

double profile_deviation(const struct profile *p)
{
    double mean = profile_mean(p), variance = 0;
    struct sum s = {0};
    if (p->n == 1)
        return 0;
    for (size_t i = 0; i < p->n; i++) {
        double away = p->value[i] - mean;
        variance = add(&s, p->probability[i] * (away * away));
    }
    return sqrt(variance);
}

/* least - R ln(1 + sum of p (exp(x) - 1)), x = (least - value) / R; where that sum is far from 0 it
 * would lose the digits of a small probability of the least, and the plain form keeps them. */
double profile_equivalent(const struct profile *p, double tolerance)
{
    const double far = -0.5;
    double least = p->value[0], less_one = 0, plain = 0;
    struct sum s = {0}, t = {0};
    assert(tolerance > 0);
    if (isinf(tolerance))
        return profile_mean(p);
    for (size_t i = 0; i < p->n; i++) {
        double x = (least - p->value[i]) / tolerance;
        less_one = add(&s, p->probability[i] * math_expm1(x));
        plain = add(&t, p->probability[i] * math_exp(x));
    }
    return least - tolerance * (less_one > far ? math_log1p(less_one) : math_log(plain));
}
