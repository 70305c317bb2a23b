/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Amounts on a lattice (severity.h). Owns nothing beyond the arena that it is given. */
#include "math/severity.h"

#include <math.h>
#include <stdbool.h>

#include "math/fft.h"

/* An amount so near to a point, against its size in steps, is at the point. */
#define AT_POINT 1e-9
/* Sums of fewer products than this many are added up one by one. */
#define FEW_PRODUCTS 65536.

static bool has_atoms(const struct dist *d)
{
    return d->shape == DIST_DISCRETE;
}

/* Without functions of the C library: this is done for every amount of every sample. */
struct severity_place severity_place_of(const struct lattice *l, double amount)
{
    double x = amount / l->step, near = AT_POINT * (x > 1 ? x : 1);
    if (!(x > near))
        return (struct severity_place){0, 0};
    if (x >= (double)l->n)
        return (struct severity_place){l->n, l->n};
    size_t down = (size_t)x;
    double part = x - (double)down;
    if (part <= near)
        return (struct severity_place){down, down};
    if (part >= 1 - near)
        return (struct severity_place){down + 1, down + 1};
    return (struct severity_place){down, down + 1};
}

/* ---- whole lattices ---- */

static struct severity whole(struct arena *a, const struct lattice *l)
{
    return (struct severity){0, l->n, NEW_ARRAY(a, l->n, double), NEW_ARRAY(a, l->n, double)};
}

/* Leaves out the points at both ends that have nothing. */
static struct severity trimmed(struct severity x)
{
    size_t cut = 0;
    while (x.end > x.first && x.down[x.end - x.first - 1] == 0 && x.up[x.end - x.first - 1] == 0)
        x.end--;
    while (x.first < x.end && x.down[cut] == 0 && x.up[cut] == 0) {
        cut++;
        x.first++;
    }
    x.down += cut;
    x.up += cut;
    return x;
}

static void put(const struct lattice *l, struct severity *x, double amount, double probability)
{
    struct severity_place at = severity_place_of(l, amount);
    if (at.down < l->n)
        x->down[at.down] += probability;
    if (at.up < l->n)
        x->up[at.up] += probability;
}

/* P(times X + shift <= amount) of a distribution without atoms. */
static double below(const struct dist *d, double times, double shift, double amount)
{
    double p = dist_cdf(d, (amount - shift) / times);
    return times > 0 ? p : 1 - p;
}

static void put_cells(const struct lattice *l, const struct dist *d, double times, double shift,
                      struct severity *x)
{
    double before = below(d, times, shift, 0);
    x->down[0] = x->up[0] = before;
    for (size_t j = 0; j < l->n; j++) {
        double next = below(d, times, shift, (double)(j + 1) * l->step);
        double cell = fmax(next - before, 0);
        x->down[j] += cell;
        if (j + 1 < l->n)
            x->up[j + 1] += cell;
        before = next;
    }
}

struct severity severity_of_dist(struct arena *a, const struct lattice *l, const struct dist *d,
                                 double times, double shift)
{
    struct severity x = whole(a, l);
    if (times == 0)
        put(l, &x, shift, 1);
    else if (has_atoms(d))
        for (size_t i = 0; i < d->n; i++)
            put(l, &x, times * d->values[i] + shift, d->probabilities[i]);
    else
        put_cells(l, d, times, shift, &x);
    return trimmed(x);
}

struct severity severity_of_amounts(struct arena *a, const struct lattice *l, size_t n,
                                    const double *amounts)
{
    struct severity x = whole(a, l);
    for (size_t i = 0; i < n; i++)
        put(l, &x, amounts[i], 1 / (double)n);
    return trimmed(x);
}

/* ---- sums ---- */

static void add_products(size_t nx, const double *x, size_t ny, const double *y, size_t most,
                         double *out)
{
    for (size_t i = 0; i < nx; i++)
        for (size_t j = 0; x[i] != 0 && j < ny && i + j < most; j++)
            out[i + j] += x[i] * y[j];
}

/* Both ends at once: (x_down + i x_up)(y_down + i y_up) would mix them, so one after the other: x
 * as the real part, y as the imaginary part, whose product is half the imaginary part of the
 * square. */
static void convolve(struct arena *a, size_t nx, const double *x, size_t ny, const double *y,
                     size_t most, double *out)
{
    unsigned log2 = 1;
    while (((size_t)1 << log2) < nx + ny)
        log2++;
    size_t n = (size_t)1 << log2;
    const struct fft *fft = fft_new(a, log2);
    double *z = NEW_ARRAY(a, 2 * n, double), *work = NEW_ARRAY(a, 2 * n, double);
    for (size_t i = 0; i < nx; i++)
        z[2 * i] = x[i];
    for (size_t i = 0; i < ny; i++)
        z[2 * i + 1] = y[i];
    fft_forward(fft, z, work);
    for (size_t k = 0; k < n; k++) {
        double re = z[2 * k], im = z[2 * k + 1];
        z[2 * k] = re * re - im * im;
        z[2 * k + 1] = 2 * re * im;
    }
    fft_inverse(fft, z, work);
    for (size_t i = 0; i < most && i < nx + ny - 1; i++)
        out[i] = fmax(z[2 * i + 1] / 2, 0);
}

static void sum_end(struct arena *a, size_t nx, const double *x, size_t ny, const double *y,
                    size_t most, double *out)
{
    if ((double)nx * (double)ny <= FEW_PRODUCTS)
        add_products(nx, x, ny, y, most, out);
    else
        convolve(a, nx, x, ny, y, most, out);
}

struct severity severity_sum(struct arena *a, const struct lattice *l, const struct severity *x,
                             const struct severity *y)
{
    size_t nx = x->end - x->first, ny = y->end - y->first, first = x->first + y->first;
    size_t most = nx && ny && first < l->n ? l->n - first : 0;
    struct severity sum = {first, first + most, NEW_ARRAY(a, most, double),
                           NEW_ARRAY(a, most, double)};
    struct arena *scratch = arena_child(a);
    if (most) {
        sum_end(scratch, nx, x->down, ny, y->down, most, sum.down);
        sum_end(scratch, nx, x->up, ny, y->up, most, sum.up);
    }
    arena_free(scratch);
    return trimmed(sum);
}

/* ---- intensities ---- */

static void add_moved(size_t n, size_t first, const double *p, size_t count, double weight,
                      double *to)
{
    for (size_t i = 0; i < count && first + i < n; i++)
        to[first + i] += weight * p[i];
}

void severity_add(const struct lattice *l, const struct severity *x, double weight,
                  struct severity_place shift, double *down, double *up)
{
    size_t count = x->end - x->first;
    add_moved(l->n, x->first + shift.down, x->down, count, weight, down);
    add_moved(l->n, x->first + shift.up, x->up, count, weight, up);
}
