/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A lognormal prior of a rate after a count of events: DIST_COUNTED.
 *
 * In u = log x the density is exp(g(u)) with a concave g. About its greatest value at m,
 * with d = u - m, s the deviation of the prior and k = T exp(m),
 *     g(m + d) - g(m) = -d^2 / (2 s^2) - k (exp(d) - 1 - d),
 * since g'(m) = 0. This is integrated by Gauss and Legendre's rule of eight points (DLMF
 * 3.5.v) on equal cells between the points where it has fallen to exp(-60) or below.
 * Owns nothing; each call computes its own sums. Invariant: all terms of a probability are
 * positive, so that small tails keep their digits. */
#include <math.h>
#include <stdbool.h>

#include "math/dist.h"
#include "math/elementary.h"

enum { CELLS = 512, POINTS = 4 /* on each side of the middle */ };

#define DEPTH 60.0 /* exp(-60) is nothing beside the least tail that is asked for */

static const double points[POINTS] = {0.18343464249564980494, 0.52553240991632898582,
                                      0.79666647741362673959, 0.96028985649753623168};
static const double weights[POINTS] = {0.36268378337836198297, 0.31370664587788728734,
                                       0.22238103445337447054, 0.10122853629037625915};

struct counted {
    double top; /* the x of the greatest density of log x */
    double s, k;
    double from, cell; /* the first d, and the width of a cell */
};

static double fall(const struct counted *c, double d)
{
    return d * d / (2 * c->s * c->s) + c->k * (math_expm1(d) - d);
}

static double density(const struct counted *c, double d)
{
    return math_exp(-fall(c, d));
}

struct likelihood {
    double s, events, expected; /* expected: events at the prior's median */
};

/* g' at u = log(median) + w. */
static void slope_of_log_density(const void *ctx, double w, double *value, double *slope)
{
    const struct likelihood *l = ctx;
    double k = l->expected * math_exp(w);
    *value = l->events - w / (l->s * l->s) - k;
    *slope = -1 / (l->s * l->s) - k;
}

static void depth_left(const void *ctx, double d, double *value, double *slope)
{
    const struct counted *c = ctx;
    *value = fall(c, d) - DEPTH;
    *slope = d / (c->s * c->s) + c->k * math_expm1(d);
}

/* Both searches start on the side from which Newton's steps on a curve that bends one
 * way never overshoot: for the top, to its right. To the right of it g falls faster than
 * the parabola of its curvature there, to the left more slowly. */
static struct counted make(const struct dist *d)
{
    struct likelihood l = {math_log(d->p[1]) / DIST_Z95, d->p[2], d->p[3] * d->p[0]};
    struct dist_function at_top = {slope_of_log_density, &l, -1};
    double start = l.events > l.expected ? math_log(l.events / l.expected) : 0;
    double w = dist_root(&at_top, start, INFINITY);
    struct counted c = {.top = d->p[0] * math_exp(w), .s = l.s, .k = l.expected * math_exp(w)};
    struct dist_function left = {depth_left, &c, -1};
    double width = sqrt(2 * DEPTH / (1 / (c.s * c.s) + c.k));
    c.from = dist_root(&left, -width, 0);
    c.cell = (width - c.from) / CELLS;
    return c;
}

/* Integral of the density between two points. */
static double mass(const struct counted *c, double from, double to)
{
    double half = (to - from) / 2, middle = from + half, sum = 0;
    for (int i = 0; i < POINTS; i++)
        sum += weights[i] *
               (density(c, middle - half * points[i]) + density(c, middle + half * points[i]));
    return half * sum;
}

static double cell_from(const struct counted *c, int i)
{
    return c->from + i * c->cell;
}

/* Sums over all points of density times the powers of e - about, e = exp(d) - 1. */
struct powers {
    double zeroth, first, second;
};

static void add_point(const struct counted *c, double d, double weight, double about,
                      struct powers *sum)
{
    double p = weight * density(c, d), e = math_expm1(d) - about;
    sum->zeroth += p;
    sum->first += p * e;
    sum->second += p * e * e;
}

static struct powers powers_about(const struct counted *c, double about)
{
    struct powers sum = {0, 0, 0};
    double half = c->cell / 2;
    for (int cell = 0; cell < CELLS; cell++) {
        double middle = cell_from(c, cell) + half;
        for (int i = 0; i < POINTS; i++) {
            add_point(c, middle - half * points[i], weights[i], about, &sum);
            add_point(c, middle + half * points[i], weights[i], about, &sum);
        }
    }
    return sum;
}

double dist_counted_mean(const struct dist *d)
{
    struct counted c = make(d);
    struct powers sum = powers_about(&c, 0);
    return c.top * (1 + sum.first / sum.zeroth);
}

double dist_counted_variance(const struct dist *d)
{
    struct counted c = make(d);
    struct powers sum = powers_about(&c, 0);
    sum = powers_about(&c, sum.first / sum.zeroth);
    return c.top * c.top * (sum.second / sum.zeroth);
}

/* The cell of a point; outside all of them, the nearest. */
static int cell_of(const struct counted *c, double d)
{
    double i = floor((d - c->from) / c->cell);
    return i < 0 ? 0 : i >= CELLS ? CELLS - 1 : (int)i;
}

double dist_counted_cdf(const struct dist *d, double x)
{
    struct counted c = make(d);
    if (!(x > 0))
        return 0;
    double at = math_log(x / c.top), below = 0, above = 0;
    if (at <= c.from)
        return 0;
    if (at >= cell_from(&c, CELLS))
        return 1;
    int cell = cell_of(&c, at);
    for (int i = 0; i < CELLS; i++)
        if (i != cell)
            *(i < cell ? &below : &above) += mass(&c, cell_from(&c, i), cell_from(&c, i + 1));
    below += mass(&c, cell_from(&c, cell), at);
    above += mass(&c, at, cell_from(&c, cell + 1));
    return below / (below + above);
}

/* What is still missing of a tail inside a cell. */
struct missing {
    const struct counted *c;
    double edge, amount; /* the tail's own side of the cell */
    int direction;       /* 1: a lower tail */
};

static void excess(const void *ctx, double d, double *value, double *slope)
{
    const struct missing *m = ctx;
    double inside = m->direction > 0 ? mass(m->c, m->edge, d) : mass(m->c, d, m->edge);
    *value = inside - m->amount;
    *slope = m->direction * density(m->c, d);
}

/* The density in each cell, and where to look for a tail. */
struct masses {
    double whole, cell[CELLS];
};

static struct masses masses_of(const struct counted *c)
{
    struct masses m = {.whole = 0};
    for (int i = 0; i < CELLS; i++)
        m.whole += m.cell[i] = mass(c, cell_from(c, i), cell_from(c, i + 1));
    return m;
}

/* The distance from the top below (above, where p > q) which the probability p (q) lies. */
static double place_of(const struct counted *c, const struct masses *masses, double p, double q)
{
    bool lower = p <= q;
    double wanted = (lower ? p : q) * masses->whole, sum = 0;
    int cell = lower ? 0 : CELLS - 1, step = lower ? 1 : -1;
    while (sum + masses->cell[cell] < wanted && cell + step >= 0 && cell + step < CELLS) {
        sum += masses->cell[cell];
        cell += step;
    }
    struct missing m = {c, cell_from(c, lower ? cell : cell + 1), wanted - sum, step};
    struct dist_function f = {excess, &m, step};
    return dist_root(&f, cell_from(c, cell) + c->cell / 2, cell_from(c, cell + 1));
}

double dist_counted_quantile(const struct dist *d, double p, double q)
{
    struct counted c = make(d);
    struct masses masses = masses_of(&c);
    return c.top * math_exp(place_of(&c, &masses, p, q));
}

void dist_counted_quantiles(const struct dist *d, size_t n, const double *p, const double *q,
                            struct dist_point *at)
{
    struct counted c = make(d);
    struct masses masses = masses_of(&c);
    double log_top = math_log(c.top), log_whole = math_log(masses.whole);
    for (size_t i = 0; i < n; i++) {
        double place = place_of(&c, &masses, p[i], q[i]);
        double slope = -place / (c.s * c.s) - c.k * math_expm1(place);
        at[i] = (struct dist_point){log_top + place, -fall(&c, place) - log_whole, slope};
    }
}
