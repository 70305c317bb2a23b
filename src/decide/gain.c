/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Gains over one quantity (gain.h). Owns nothing beyond the arena it is given. */
#include "decide/gain.h"

#include <math.h>

#include "graph/legendre.h"
#include "math/elementary.h"

enum { RULE = 5 };                                         /* of legendre_rules: 8 points */
static const double LONG = 2;                              /* a piece is at most this long */
static const double DENSITY_AT_0 = 0.39894228040143267794; /* 1 / sqrt(2 pi) */

static const double places[GAIN_POINTS] = {
    -GAIN_FAR, -8, -6,  -5, -4,  -GAIN_RANGE, -2.5, -2, -1.5, -1, -0.5,    0,
    0.5,       1,  1.5, 2,  2.5, GAIN_RANGE,  4,    5,  6,    8,  GAIN_FAR};

struct gaining {
    struct arena *arena;
    const struct gain_curve *curve;
    struct gain *out;
    double scale; /* of the whole, for the tolerance */
    bool failed;
};

/* A place and the best choice there. */
struct place_of {
    double z;
    size_t best;
};

static struct place_of look(struct gaining *x, double z)
{
    struct place_of p = {.z = z};
    double unused;
    if (!x->curve->at(x->curve->ctx, z, &unused, &p.best))
        x->failed = true;
    return p;
}

/* --- changes --- */

static void narrow(struct gaining *x, struct place_of low, struct place_of high)
{
    while (low.best != high.best && !x->failed) {
        struct place_of middle = look(x, low.z + (high.z - low.z) / 2);
        if (high.z - low.z <= x->curve->narrow || middle.z == low.z || middle.z == high.z) {
            *array_push(x->arena, &x->out->changes) =
                (struct gain_change){high.z, low.best, high.best};
            return;
        }
        if (middle.best != low.best && middle.best != high.best)
            narrow(x, low, middle);
        if (middle.best == high.best)
            high = middle;
        else
            low = middle;
    }
}

static void find_changes(struct gaining *x)
{
    struct place_of before = look(x, -x->curve->far);
    for (size_t i = 0; i < GAIN_POINTS && !x->failed; i++) {
        if (!(fabs(places[i]) <= x->curve->far) || places[i] <= before.z)
            continue;
        struct place_of now = look(x, places[i]);
        if (now.best != before.best)
            narrow(x, before, now);
        before = now;
    }
}

/* --- the mean --- */

static double piece(struct gaining *x, double from, double to)
{
    const struct legendre_rule *rule = &legendre_rules[RULE];
    double sum = 0;
    for (size_t i = 0; i < rule->n && !x->failed; i++) {
        double gain = 0, z = from + (to - from) * rule->nodes[i].at;
        size_t unused;
        if (!x->curve->at(x->curve->ctx, z, &gain, &unused))
            x->failed = true;
        sum += rule->nodes[i].weight * gain * math_exp(-z * z / 2);
    }
    return sum * DENSITY_AT_0 * (to - from);
}

static void refine(struct gaining *x, double from, double to, double whole, int depth)
{
    double middle = from + (to - from) / 2;
    double low = piece(x, from, middle), high = piece(x, middle, to);
    double off = fabs(low + high - whole);
    if (x->failed || depth == 0 || !(off > x->curve->tolerance * x->scale)) {
        x->out->mean += low + high;
        x->out->error += off;
        return;
    }
    refine(x, from, middle, low, depth - 1);
    refine(x, middle, to, high, depth - 1);
}

struct interval {
    double from, to, whole;
};
struct intervals ARRAY_BODY(struct interval);

/* Between two changes, in pieces. */
static void cut(struct gaining *x, double from, double to, struct intervals *out)
{
    double n = fmax(1, ceil((to - from) / LONG));
    for (double i = 0; i < n; i++) {
        double a = from + (to - from) * (i / n), b = from + (to - from) * ((i + 1) / n);
        double whole = piece(x, a, b);
        *array_push(x->arena, out) = (struct interval){a, b, whole};
        x->scale += fabs(whole);
    }
}

static void find_mean(struct gaining *x, size_t first)
{
    struct intervals all = {0};
    double from = -x->curve->far;
    size_t best = first;
    for (size_t i = 0; i <= x->out->changes.n && !x->failed; i++) {
        const struct gain_change *c = i < x->out->changes.n ? &x->out->changes.at[i] : NULL;
        double to = c ? c->z : x->curve->far;
        if (best != x->curve->none && to > from)
            cut(x, from, to, &all);
        best = c ? c->above : best;
        from = to;
    }
    for (size_t i = 0; i < all.n && !x->failed; i++)
        refine(x, all.at[i].from, all.at[i].to, all.at[i].whole, GAIN_DEPTH);
}

bool gain_find(struct arena *a, const struct gain_curve *c, struct gain *out)
{
    struct gain found = {0};
    struct gaining x = {.arena = a, .curve = c, .out = &found};
    find_changes(&x);
    if (!x.failed)
        find_mean(&x, found.changes.n ? found.changes.at[0].below : look(&x, -c->far).best);
    if (!x.failed)
        *out = found;
    return !x.failed;
}
