/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tables of quantiles (quantile_table.h). Polynomials of degree 5 are Hermite's: value and two
 * derivatives at both ends. Owns nothing beyond what it puts into the caller's arena.
 * Invariant: all is decided by the distribution. */
#include "math/quantile_table.h"

#include <math.h>
#include <string.h>

#include "math/elementary.h"

#define LOG_ROOT_2_PI 0.91893853320467274178
#define CORE 6.25              /* the equal steps reach from -CORE to CORE: p = 2e-10 */
#define END 1.5                /* the length of the two steps beyond */
#define NEXT_TO_NOTHING 1e-290 /* its inverse is still a number */
#define WITHIN 4e-9            /* the error that is allowed for an estimate */
#define ACCURATE 6.1           /* the |z| up to which it is: p = 5e-10 */

enum { LEAST_STEPS = 64, MOST_STEPS = 1024 };

struct quantile_standard quantile_standard(const struct dist *d)
{
    struct quantile_standard s = {*d, 0, 1};
    double *p = s.dist.p, width;
    switch (d->shape) {
    case DIST_NORMAL:
        return (struct quantile_standard){{DIST_NORMAL, {0, 1}, 0, NULL, NULL}, p[0], p[1]};
    case DIST_LOGNORMAL:
        return (struct quantile_standard){
            {DIST_LOGNORMAL, {1, p[1], p[2] / p[0]}, 0, NULL, NULL}, 0, p[0]};
    case DIST_GAMMA:
        return (struct quantile_standard){{DIST_GAMMA, {1, p[1]}, 0, NULL, NULL}, 0, p[0]};
    case DIST_UNIFORM:
        return (struct quantile_standard){{DIST_UNIFORM, {0, 1}, 0, NULL, NULL}, p[0], p[1] - p[0]};
    case DIST_TRIANGULAR:
        width = p[2] - p[0];
        return (struct quantile_standard){
            {DIST_TRIANGULAR, {0, (p[1] - p[0]) / width, 1}, 0, NULL, NULL}, p[0], width};
    case DIST_PERT: return (struct quantile_standard){dist_beta_of_pert(d), p[0], p[2] - p[0]};
    case DIST_COUNTED:
        return (struct quantile_standard){
            {DIST_COUNTED, {1, p[1], p[2], p[3] * p[0]}, 0, NULL, NULL}, 0, p[0]};
    default: return s;
    }
}

/* The density f of log x where log x is known. */
struct shape {
    const struct dist *dist;
    double log_factor; /* the part of log f that does not depend on x */
};

/* y = shape x: f = y^shape exp(-y) / Gamma(shape). */
static void gamma_density(const struct shape *s, struct dist_point *at)
{
    double a = s->dist->p[1], y = a * math_exp(at->log_x);
    at->log_density = a * (at->log_x + math_log(a)) - y + s->log_factor;
    at->slope = a - y;
}

/* f = x^a (1 - x)^(b - 1) / B(a, b). At x = 1, where doubles do not tell it from its quantile's
 * neighbours, f is as good as infinite: log x does not change. */
static void beta_density(const struct shape *s, struct dist_point *at)
{
    double a = s->dist->p[0], b = s->dist->p[1], x = math_exp(at->log_x);
    double rest = -math_expm1(at->log_x);
    at->log_density = a * at->log_x + (b - 1) * math_log(rest) + s->log_factor;
    at->slope = a - (b - 1) * x / rest;
    if (rest < NEXT_TO_NOTHING)
        *at = (struct dist_point){at->log_x, INFINITY, 0};
}

/* The normal density of log x over the probability below the cut. */
static void cut_density(const struct shape *s, struct dist_point *at)
{
    double deviation = math_log(s->dist->p[1]) / DIST_Z95, z = at->log_x / deviation;
    at->log_density = -z * z / 2 + s->log_factor;
    at->slope = -z / deviation;
}

static double log_cut_factor(const struct dist *d)
{
    double s = math_log(d->p[1]) / DIST_Z95;
    return -math_log(s) - LOG_ROOT_2_PI - dist_normal_log_probability(math_log(d->p[2]) / s);
}

static struct shape shape_of(const struct dist *d)
{
    double factor = 0;
    if (d->shape == DIST_GAMMA)
        factor = -dist_log_gamma(d->p[1]);
    else if (d->shape == DIST_BETA)
        factor = -dist_log_beta(d->p[0], d->p[1]);
    else if (d->shape == DIST_LOGNORMAL)
        factor = log_cut_factor(d);
    return (struct shape){d, factor};
}

static void add_density(const struct shape *s, struct dist_point *at)
{
    if (s->dist->shape == DIST_GAMMA)
        gamma_density(s, at);
    else if (s->dist->shape == DIST_BETA)
        beta_density(s, at);
    else
        cut_density(s, at);
}

/* A value and its first two derivatives, in units of some step. */
struct knot {
    double value, slope, bend;
};

static struct knot in_units(struct knot k, double factor)
{
    return (struct knot){k.value, k.slope * factor, k.bend * factor * factor};
}

/* With L = log x and phi the normal density, dL/dz = phi(z) / f(L). */
static struct knot knot_at(const struct dist_point *at, double z, double step)
{
    double slope = math_exp(-z * z / 2 - LOG_ROOT_2_PI - at->log_density);
    return in_units((struct knot){at->log_x, slope, slope * (-z - at->slope * slope)}, step);
}

/* The polynomial of a stretch from t = 0 to 1. */
static void hermite(struct knot l, struct knot r, double c[QUANTILE_TERMS])
{
    double rise = r.value - l.value;
    c[0] = l.value;
    c[1] = l.slope;
    c[2] = l.bend / 2;
    c[3] = 10 * rise - 6 * l.slope - 4 * r.slope - 1.5 * l.bend + 0.5 * r.bend;
    c[4] = -15 * rise + 8 * l.slope + 7 * r.slope + 1.5 * l.bend - r.bend;
    c[5] = 6 * rise - 3 * (l.slope + r.slope) - 0.5 * (l.bend - r.bend);
}

/* Room for the knots of a core of equal steps and of the two long ones: core + 3. */
struct points {
    size_t core;
    double *z, *p, *q;
    struct dist_point *at;
};

static double log_quantile(const struct dist *d, double p, double q, double near)
{
    if (d->shape == DIST_GAMMA)
        return dist_gamma_log_quantile(d->p[1], p, q, near) - math_log(d->p[1]);
    if (d->shape == DIST_BETA)
        return dist_beta_log_quantile(d->p[0], d->p[1], p, q, near);
    return math_log(dist_quantile(d, p, q));
}

static void solve(const struct shape *s, const struct points *points, size_t k, double near)
{
    if (s->dist->shape == DIST_GAMMA)
        near += math_log(s->dist->p[1]);
    points->at[k].log_x = log_quantile(s->dist, points->p[k], points->q[k], near);
    add_density(s, &points->at[k]);
}

/* Where the polynomial between two knots comes to one stretch further on. */
static double onwards(struct knot l, struct knot r)
{
    double c[QUANTILE_TERMS], y = 0;
    hermite(l, r, c);
    for (int j = QUANTILE_TERMS - 1; j >= 0; j--)
        y = y * 2 + c[j];
    return y;
}

/* `n` points from a solved one on, upwards or downwards, each guessed from those before. */
static void walk(const struct shape *s, const struct points *points, size_t from, int direction,
                 size_t n)
{
    double step = 2 * CORE / (double)points->core * direction;
    struct knot last = knot_at(&points->at[from], points->z[from], step), before = last;
    for (size_t i = 1; i <= n; i++) {
        size_t k = direction > 0 ? from + i : from - i;
        double guess = i > 1 ? onwards(before, last) : last.value + last.slope + last.bend / 2;
        solve(s, points, k, guess);
        before = last;
        last = knot_at(&points->at[k], points->z[k], step);
    }
}

/* Exact points; counted ones come all together, others one after another from the middle. */
static void solve_all(const struct shape *s, const struct points *points)
{
    size_t core = points->core, middle = core / 2;
    for (size_t i = 0; i < core + 3; i++) {
        points->p[i] = dist_normal_probability(points->z[i]);
        points->q[i] = dist_normal_probability(-points->z[i]);
    }
    if (s->dist->shape == DIST_COUNTED) {
        dist_counted_quantiles(s->dist, core + 3, points->p, points->q, points->at);
        return;
    }
    solve(s, points, middle, NAN);
    walk(s, points, middle, 1, core - middle);
    walk(s, points, middle, -1, middle);
    solve(s, points, core + 1, NAN);
    solve(s, points, core + 2, NAN);
}

/* The error in the middle of stretches k and k + 1, or about that. With D the sixth derivative it
 * is D / 720 / 2^6, and the third derivatives of the two differ by D / 60 where they meet. */
static double error_between(double *const term[QUANTILE_TERMS], size_t k)
{
    double here = 6 * term[3][k] + 24 * term[4][k] + 60 * term[5][k];
    return (here - 6 * term[3][k + 1]) / 768;
}

static void new_terms(struct arena *a, size_t n, double *term[QUANTILE_TERMS])
{
    for (int j = 0; j < QUANTILE_TERMS; j++)
        term[j] = NEW_ARRAY(a, n, double);
}

/* Stretch k of n between two knots whose derivatives are by `length` units; in the end it is in
 * units, its start at unit `start`. */
static void put_stretch(struct quantile_steps *s, size_t k, struct knot l, struct knot r)
{
    double c[QUANTILE_TERMS];
    hermite(l, r, c);
    for (int j = 0; j < QUANTILE_TERMS; j++)
        s->term[j][k] = c[j];
}

/* The two long steps: their polynomials in t of the core's steps, the first of which would begin
 * one such step before the core. */
static void put_end(struct quantile_steps *s, size_t k, struct knot l, struct knot r, double length,
                    double start)
{
    double c[QUANTILE_TERMS], power = 1;
    hermite(l, r, c);
    for (int j = 0; j < QUANTILE_TERMS; j++, power /= length)
        c[j] *= power;
    for (int i = 0; i < QUANTILE_TERMS; i++) /* from powers of t - start to those of t */
        for (int j = QUANTILE_TERMS - 2; j >= i; j--)
            c[j] -= start * c[j + 1];
    for (int j = 0; j < QUANTILE_TERMS; j++)
        s->term[j][k] = c[j];
}

/* Deviates of the knots: those of the core, and the far end of each long step. */
static struct points points_new(struct arena *a, size_t core)
{
    size_t n = core + 3;
    struct points p = {core, NEW_ARRAY(a, n, double), NEW_ARRAY(a, n, double),
                       NEW_ARRAY(a, n, double), NEW_ARRAY(a, n, struct dist_point)};
    for (size_t k = 0; k <= core; k++)
        p.z[k] = -CORE + (double)k * (2 * CORE / (double)core);
    p.z[core + 1] = -CORE - END;
    p.z[core + 2] = CORE + END;
    return p;
}

/* Are all steps that must be so accurate enough? How much the estimate bends is added to it: that
 * is little, unless steps are too long for the estimate. */
static bool are_accurate(const struct quantile_steps *s, size_t core)
{
    double step = 1 / s->per_step;
    for (size_t k = 2; k + 1 < core; k++) {
        double error = error_between(s->term, k);
        double bend = error_between(s->term, k - 1) + error_between(s->term, k + 1) - 2 * error;
        if (fabs((double)k * step - CORE) <= ACCURATE + step &&
            !(fabs(error) + fabs(bend) <= WITHIN))
            return false;
    }
    return isfinite(s->term[0][0]) && isfinite(s->term[1][core + 1]);
}

static void put_steps(const struct points *points, struct quantile_steps *s)
{
    const double *z = points->z;
    double step = 1 / s->per_step, length = END / step;
    const struct dist_point *at = points->at;
    size_t core = points->core;
    struct knot first = knot_at(&at[0], z[0], step), last = first;
    for (size_t k = 1; k <= core; k++) {
        struct knot next = knot_at(&at[k], z[k], step);
        put_stretch(s, k, last, next);
        last = next;
    }
    struct knot low = knot_at(&at[core + 1], z[core + 1], END);
    struct knot high = knot_at(&at[core + 2], z[core + 2], END);
    put_end(s, 0, low, in_units(first, length), length, 1 - length);
    put_end(s, core + 1, in_units(last, length), high, length, 0);
}

/* `core` equal steps, and one more at each end; false where the error is too great, or a number is
 * not finite. */
static bool make_steps(struct arena *a, const struct shape *shape, size_t core,
                       struct quantile_steps *s)
{
    double step = 2 * CORE / (double)core;
    *s = (struct quantile_steps){-CORE - step, 1 / step, core + 2, {NULL}, true};
    new_terms(a, s->n, s->term);
    struct arena *room = arena_child(a);
    struct points points = points_new(room, core);
    solve_all(shape, &points);
    put_steps(&points, s);
    arena_free(room);
    return are_accurate(s, core);
}

/* Where log x, or x, is a line over z: one step. */
static void make_line(struct arena *a, double slope, bool logarithm, struct quantile_steps *s)
{
    double far = CORE + END;
    *s = (struct quantile_steps){-far, 1 / (2 * far), 1, {NULL}, logarithm};
    new_terms(a, 1, s->term);
    s->term[0][0] = -far * slope;
    s->term[1][0] = 2 * far * slope;
}

static bool steps_of(struct arena *a, const struct dist *d, struct quantile_steps *s)
{
    if (d->shape == DIST_NORMAL) {
        make_line(a, 1, false, s);
        return true;
    }
    if (d->shape == DIST_LOGNORMAL && isnan(d->p[2])) {
        make_line(a, math_log(d->p[1]) / DIST_Z95, true, s);
        return true;
    }
    struct shape shape = shape_of(d);
    for (size_t core = LEAST_STEPS; core <= MOST_STEPS; core *= 2)
        if (make_steps(a, &shape, core, s))
            return true;
    return false;
}

/* The step of z, and its polynomial's value and derivatives by z. */
static struct knot steps_at(const struct quantile_steps *s, double z)
{
    double place = (z - s->from) * s->per_step, last = (double)(s->n - 1);
    double step = floor(place), c[QUANTILE_TERMS];
    step = step < 0 ? 0 : step > last ? last : step;
    double t = place - step, per = s->per_step;
    for (int j = 0; j < QUANTILE_TERMS; j++)
        c[j] = s->term[j][(size_t)step];
    double value = c[0] + t * (c[1] + t * (c[2] + t * (c[3] + t * (c[4] + t * c[5]))));
    double slope = c[1] + t * (2 * c[2] + t * (3 * c[3] + t * (4 * c[4] + t * 5 * c[5])));
    double bend = 2 * c[2] + t * (6 * c[3] + t * (12 * c[4] + t * 20 * c[5]));
    return (struct knot){value, slope * per, bend * per * per};
}

void quantile_edges(struct quantile_edges *edges)
{
    for (size_t k = 1; k < QUANTILE_CELLS; k++) {
        double u = (double)k / QUANTILE_CELLS, v = 1 - u;
        double z = u <= v ? dist_normal_deviate(u) : -dist_normal_deviate(v);
        edges->z[k] = z;
        edges->du[k] = math_exp(z * z / 2 + LOG_ROOT_2_PI) / QUANTILE_CELLS;
    }
}

/* The quantile at an edge and its derivatives by t: those of log x become those of x, and with
 * dz/du = 1 / phi, d2z/du2 = z / phi^2. */
static struct knot edge_at(const struct quantile_steps *s, double z, double du)
{
    struct knot k = steps_at(s, z);
    if (s->logarithm) {
        double x = math_exp(k.value);
        k = (struct knot){x, x * k.slope, x * (k.slope * k.slope + k.bend)};
    }
    return (struct knot){k.value, k.slope * du, (k.bend + z * k.slope) * du * du};
}

static bool cell_is_bad(const struct quantile_cells *c, size_t k)
{
    double x = fabs(c->term[0][k + 1]), error = fabs(error_between(c->term, k));
    double scale = x > 0 ? x : fabs(c->term[1][k]);
    return !(error <= WITHIN * scale);
}

/* Cells from the middle outwards as far as they are good; the two outermost have no end. */
static void find_ends(struct quantile_cells *c)
{
    enum { HALF = QUANTILE_CELLS / 2 };
    c->low = c->high = 1;
    for (size_t k = 1; k + 2 < QUANTILE_CELLS; k++)
        if (cell_is_bad(c, k)) {
            if (k < HALF)
                c->low = k + 2;
            else if (c->high == 1)
                c->high = QUANTILE_CELLS - k;
        }
}

static void cells_of(struct arena *a, const struct quantile_edges *edges,
                     const struct quantile_steps *s, struct quantile_cells *out)
{
    new_terms(a, QUANTILE_CELLS, out->term);
    struct knot last = edge_at(s, edges->z[1], edges->du[1]);
    for (size_t k = 1; k + 1 < QUANTILE_CELLS; k++) {
        double c[QUANTILE_TERMS];
        struct knot next = edge_at(s, edges->z[k + 1], edges->du[k + 1]);
        hermite(last, next, c);
        for (int j = 0; j < QUANTILE_TERMS; j++)
            out->term[j][k] = c[j];
        last = next;
    }
    find_ends(out);
}

static enum quantile_way way_of(const struct dist *d)
{
    switch (d->shape) {
    case DIST_UNIFORM: return QUANTILE_UNIFORM;
    case DIST_TRIANGULAR: return QUANTILE_TRIANGULAR;
    case DIST_DISCRETE: return QUANTILE_EXACT;
    default: return QUANTILE_TABLE;
    }
}

void quantile_table_new(struct arena *a, const struct quantile_edges *edges, const struct dist *d,
                        struct quantile_table *out)
{
    *out = (struct quantile_table){way_of(d), *d};
    if (out->way != QUANTILE_TABLE)
        return;
    if (steps_of(a, d, &out->steps))
        cells_of(a, edges, &out->steps, &out->cells);
    else
        out->way = QUANTILE_EXACT;
}

void quantile_table_rows(struct arena *a, struct quantile_table *t)
{
    typedef double row[QUANTILE_ROW];
    if (t->way != QUANTILE_TABLE)
        return;
    char *at = arena_array(a, QUANTILE_CELLS + 1, sizeof(row));
    row *rows = (row *)(void *)(at + (-(uintptr_t)at & (sizeof(row) - 1)));
    for (size_t k = 0; k < QUANTILE_CELLS; k++)
        for (int j = 0; j < QUANTILE_TERMS; j++)
            rows[k][j] = t->cells.term[j][k];
    t->cells.rows = (const row *)rows;
}

double quantile_at_deviate(const struct quantile_table *t, double z)
{
    double value = steps_at(&t->steps, z).value;
    return t->steps.logarithm ? math_exp(value) : value;
}

static double by_cell(const struct quantile_table *table, double u, double v)
{
    const struct quantile_cells *c = &table->cells;
    double place = u * QUANTILE_CELLS, cell = floor(place), t = place - cell;
    size_t k = (size_t)cell;
    if (k < c->low || k >= QUANTILE_CELLS - c->high)
        return quantile_at_deviate(table,
                                   u <= v ? dist_normal_deviate(u) : -dist_normal_deviate(v));
    double y = 0;
    for (int j = QUANTILE_TERMS - 1; j >= 0; j--)
        y = y * t + c->term[j][k];
    return y;
}

double quantile_at(const struct quantile_table *t, double u, double v)
{
    return t->way == QUANTILE_TABLE ? by_cell(t, u, v) : dist_quantile(&t->dist, u, v);
}
