/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Courses in lanes (course_lanes.h), for one instruction set (base/isa.h). Owns nothing.
 *
 * What is lost of 1 by time x, 1 - exp(-y) with y = s x, is a series for y <= 1/4, and beyond it
 * is the series at y / 2^k, doubled k times: lost(2 y) = lost(y) (2 - lost(y)), left(2 y) =
 * left(y)^2. With r = rate / s and its complement ending / s,
 *     h = start left + r lost,    1 - h = (1 - start) left + (ending / s) lost,
 * all of them sums of what is not negative. Loops are over all lanes, which compilers turn into
 * vectors; there is no call in them. Lanes that are not in use are computed with the others. */
#include "graph/course_lanes.h"

/* Beyond it nothing is left: exp(-700) is 1e-304. */
static const double GONE = 700;

/* A part that holds at a time: its probability, and that of the contrary. */
struct part {
    _Alignas(LANES_ALIGNED) lanes is;
    _Alignas(LANES_ALIGNED) lanes not ;
};

struct decay {
    _Alignas(LANES_ALIGNED) lanes left;
    _Alignas(LANES_ALIGNED) lanes lost;
};

/* y - y^2 / 2! + y^3 / 3! - ...: within 1e-17 of it, relative, for y <= 1/64. */
static void lose_little(const double *restrict y, double *restrict lost, double *restrict left)
{
    for (int i = 0; i < LANES; i++) {
        double z = y[i], sum = 1.0 / 5040;
        sum = 1.0 / 720 - z * sum;
        sum = 1.0 / 120 - z * sum;
        sum = 1.0 / 24 - z * sum;
        sum = 1.0 / 6 - z * sum;
        sum = 0.5 - z * sum;
        lost[i] = z * (1 - z * sum);
        left[i] = 1 - lost[i];
    }
}

/* The same for y <= 1/1024. */
static void lose_least(const double *restrict y, double *restrict lost, double *restrict left)
{
    for (int i = 0; i < LANES; i++) {
        double z = y[i], sum = 1.0 / 120;
        sum = 1.0 / 24 - z * sum;
        sum = 1.0 / 6 - z * sum;
        sum = 0.5 - z * sum;
        lost[i] = z * (1 - z * sum);
        left[i] = 1 - lost[i];
    }
}

/* The same for y <= 1/4. */
static void lose_more(const double *restrict y, double *restrict lost, double *restrict left)
{
    for (int i = 0; i < LANES; i++) {
        double z = y[i], sum = 1.0 / 479001600;
        sum = 1.0 / 39916800 - z * sum;
        sum = 1.0 / 3628800 - z * sum;
        sum = 1.0 / 362880 - z * sum;
        sum = 1.0 / 40320 - z * sum;
        sum = 1.0 / 5040 - z * sum;
        sum = 1.0 / 720 - z * sum;
        sum = 1.0 / 120 - z * sum;
        sum = 1.0 / 24 - z * sum;
        sum = 1.0 / 6 - z * sum;
        sum = 0.5 - z * sum;
        lost[i] = z * (1 - z * sum);
        left[i] = 1 - lost[i];
    }
}

static void double_time(double *restrict lost, double *restrict left)
{
    for (int i = 0; i < LANES; i++) {
        lost[i] = lost[i] * (2 - lost[i]);
        left[i] = left[i] * left[i];
    }
}

static void scale(double s, double part, const double *restrict x, double *restrict y)
{
    for (int i = 0; i < LANES; i++) {
        double z = s * x[i];
        y[i] = part * (z < GONE ? z : GONE);
    }
}

/* `latest` is the greatest x. */
static void decay_lanes(double s, const double *x, double latest, struct decay *to)
{
    double most = s * latest < GONE ? s * latest : GONE, part = 1;
    int doublings = 0;
    _Alignas(LANES_ALIGNED) lanes y;
    for (; most > 0.25; most /= 2, part /= 2)
        doublings++;
    scale(s, part, x, y);
    if (most <= 0x1p-10)
        lose_least(y, to->lost, to->left);
    else if (most <= 0x1p-6)
        lose_little(y, to->lost, to->left);
    else
        lose_more(y, to->lost, to->left);
    for (int i = 0; i < doublings; i++)
        double_time(to->lost, to->left);
}

static double share(double x, double y)
{
    return x == 0 ? 0 : x / y;
}

/* What starts at 0 and follows du/dx = rate (1 - u) - ending u. */
static void rise_lanes(const struct decay *restrict d, double rate, double ending,
                       struct part *restrict to)
{
    double grown = share(rate, rate + ending), ended = share(ending, rate + ending);
    for (int k = 0; k < LANES; k++) {
        to->is[k] = grown * d->lost[k];
        to->not [k] = d->left[k] + ended * d->lost[k];
    }
}

/* The same where it starts at `start` if `on` is 1. */
static void change_from(const struct decay *restrict d, double rate, double ending, double start,
                        const double *restrict on, struct part *restrict to)
{
    double grown = share(rate, rate + ending), ended = share(ending, rate + ending);
    for (int k = 0; k < LANES; k++) {
        double begin = start * on[k];
        to->is[k] = begin * d->left[k] + grown * d->lost[k];
        to->not [k] = (1 - begin) * d->left[k] + ended * d->lost[k];
    }
}

static void never(struct part *to)
{
    for (int k = 0; k < LANES; k++)
        to->is[k] = 0, to->not [k] = 1;
}

static void add_unreset(const struct part *restrict m, struct part *restrict h)
{
    for (int k = 0; k < LANES; k++) {
        h->is[k] += m->is[k] * h->not [k];
        h->not [k] *= m->not [k];
    }
}

static void reset_lanes(const double x[COURSE_ARGS], const struct moments *at, struct part *to)
{
    struct decay d;
    double rate = x[COURSE_RATE], ending = x[COURSE_ENDING], left = x[COURSE_LEFT];
    if (rate == 0 && left == 0) {
        never(to);
        return;
    }
    decay_lanes(rate + ending, at->since, at->latest_since, &d);
    if (left == 0)
        rise_lanes(&d, rate, ending, to);
    else
        change_from(&d, rate, ending, left, at->left, to);
}

static void unreset_lanes(const double x[COURSE_ARGS], const struct moments *at, struct part *to)
{
    struct decay d;
    struct part m;
    if (x[COURSE_UNRESET] == 0)
        return;
    decay_lanes(x[COURSE_UNRESET] + x[COURSE_ENDING], at->age, at->latest_age, &d);
    rise_lanes(&d, x[COURSE_UNRESET], x[COURSE_ENDING], &m);
    add_unreset(&m, to);
}

static void add_version(double weight, double standing, const struct part *restrict c,
                        double *restrict p, double *restrict q)
{
    double fixed = weight * standing, rest = weight * (1 - standing);
    for (int k = 0; k < LANES; k++) {
        p[k] += fixed + rest * c->is[k];
        q[k] += rest * c->not [k];
    }
}

void ISA_NAME(course_lanes)(const struct mixture *m, const struct moments *at, double *restrict p,
                            double *restrict q)
{
    struct part change;
    for (int k = 0; k < LANES; k++)
        p[k] = q[k] = 0;
    for (size_t i = 0; i < m->n; i++) {
        reset_lanes(m->x[i], at, &change);
        unreset_lanes(m->x[i], at, &change);
        add_version(m->weight[i], m->x[i][COURSE_STANDING], &change, p, q);
    }
}
