/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Halving until the rule on the whole and on both halves agree. Owns nothing. */
#include "quadrature.h"

#include <math.h>
#include <stdbool.h>

enum { POINTS = 12, HALVINGS = 14 };
static const long double SAME = 1e-15L;

struct rule {
    long double node[POINTS], weight[POINTS]; /* on -1 .. 1 */
};

struct task {
    quadrature_function *f;
    void *ctx;
    size_t n;
    long double *sum;
    struct rule rule;
};

/* The Legendre polynomial of degree POINTS at x, and its slope. */
static long double legendre(long double x, long double *slope)
{
    long double before = 1, p = x;
    for (int k = 2; k <= POINTS; k++) {
        long double next = ((2 * k - 1) * x * p - (k - 1) * before) / k;
        before = p;
        p = next;
    }
    *slope = POINTS * (x * p - before) / (x * x - 1);
    return p;
}

static struct rule make_rule(void)
{
    struct rule r;
    for (int i = 0; i < POINTS; i++) {
        long double slope, x = cosl(3.14159265358979323846L * (i + 0.75L) / (POINTS + 0.5L));
        for (int k = 0; k < 8; k++) {
            long double p = legendre(x, &slope);
            x -= p / slope;
        }
        legendre(x, &slope);
        r.node[i] = x;
        r.weight[i] = 2 / ((1 - x * x) * slope * slope);
    }
    return r;
}

static void apply(const struct task *t, long double a, long double b, long double *out)
{
    long double y[QUADRATURE_FUNCTIONS];
    for (size_t k = 0; k < t->n; k++)
        out[k] = 0;
    for (int i = 0; i < POINTS; i++) {
        t->f(t->ctx, (a + b) / 2 + (b - a) / 2 * t->rule.node[i], y);
        for (size_t k = 0; k < t->n; k++)
            out[k] += (b - a) / 2 * t->rule.weight[i] * y[k];
    }
}

static void halve(const struct task *t, long double a, long double b, const long double *whole,
                  int depth)
{
    long double left[QUADRATURE_FUNCTIONS], right[QUADRATURE_FUNCTIONS], middle = (a + b) / 2;
    bool same = true;
    apply(t, a, middle, left);
    apply(t, middle, b, right);
    for (size_t k = 0; k < t->n; k++) {
        long double halves = left[k] + right[k];
        same = same && fabsl(halves - whole[k]) <= SAME * fabsl(halves) + 1e-300L;
    }
    if (!same && depth < HALVINGS) {
        halve(t, a, middle, left, depth + 1);
        halve(t, middle, b, right, depth + 1);
        return;
    }
    for (size_t k = 0; k < t->n; k++)
        t->sum[k] += left[k] + right[k];
}

void quadrature_add(quadrature_function *f, void *ctx, size_t n, long double a, long double b,
                    long double *sum)
{
    struct task t = {f, ctx, n, sum, make_rule()};
    long double whole[QUADRATURE_FUNCTIONS];
    if (!(a < b))
        return;
    apply(&t, a, b, whole);
    halve(&t, a, b, whole, 0);
}
