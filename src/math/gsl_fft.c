/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Fourier transforms (fft.h), the only file that includes GSL for them. Owns nothing beyond the
 * arena that it is given.
 *
 * Invariant: the table of sines is filled in the order in which GSL's passes read it: pass i of
 * radix r, behind those of product p, has for j = 1 .. r - 1 and k = 1 .. n / (p r) the number
 * exp(-2 pi i j k p / n). */
#include <gsl/gsl_fft_complex.h>

#include "math/fft.h"
#include "math/sine_core.h"

#define FULL_CIRCLE 6.283185307179586

enum { RADIX = 4 };

struct fft {
    size_t n;
    gsl_fft_complex_wavetable table;
};

static gsl_complex turned_by(size_t m, size_t n)
{
    gsl_complex z;
    struct sine_pair s = sine_of(FULL_CIRCLE * ((double)m / (double)n));
    GSL_SET_COMPLEX(&z, s.cosine, -s.sine);
    return z;
}

static size_t fill_pass(struct fft *f, size_t i, size_t product, size_t at)
{
    size_t radix = f->table.factor[i], n = f->n;
    f->table.twiddle[i] = f->table.trig + at;
    for (size_t j = 1; j < radix; j++)
        for (size_t k = 1; k <= n / (product * radix); k++)
            f->table.trig[at++] = turned_by(j * k * product % n, n);
    return at;
}

struct fft *fft_new(struct arena *a, unsigned log2)
{
    struct fft *f = NEW(a, struct fft);
    size_t n = (size_t)1 << log2, left = n, product = 1, at = 0;
    f->n = f->table.n = n;
    f->table.trig = NEW_ARRAY(a, n, gsl_complex);
    for (; left > 1; left /= f->table.factor[f->table.nf - 1])
        f->table.factor[f->table.nf++] = left % RADIX == 0 ? RADIX : 2;
    for (size_t i = 0; i < f->table.nf; i++) {
        at = fill_pass(f, i, product, at);
        product *= f->table.factor[i];
    }
    return f;
}

void fft_forward(const struct fft *f, double *x, double *work)
{
    gsl_fft_complex_workspace space = {.n = f->n, .scratch = work};
    gsl_fft_complex_forward(x, 1, f->n, &f->table, &space);
}

void fft_inverse(const struct fft *f, double *x, double *work)
{
    gsl_fft_complex_workspace space = {.n = f->n, .scratch = work};
    gsl_fft_complex_inverse(x, 1, f->n, &f->table, &space);
}
