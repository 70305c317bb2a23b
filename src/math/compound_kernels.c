/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The kernels of compound_kernels.h, compiled once for each instruction set. Owns nothing.
 *
 * Invariant: a value goes through the same operations wherever it stands. */
#define ELEMENTARY_VECTOR

#include "math/compound_kernels.h"
#include "math/sine_core.h"

enum { LANES = ELEMENTARY_LANES };

static inline real load(size_t n, const double *x)
{
    double v[LANES] = {0};
    real r;
    memcpy(v, x, n * sizeof *x);
    memcpy(&r, v, sizeof r);
    return r;
}

static inline void store(size_t n, double *y, real v)
{
    memcpy(y, &v, n * sizeof *y);
}

static inline void add_some(size_t n, const double *size, const double *angle, double *x, double *y)
{
    real e = load(n, size);
    struct sine_pair s = sine_of(load(n, angle));
    store(n, x, load(n, x) + e * s.cosine);
    store(n, y, load(n, y) + e * s.sine);
}

static void add_turned(size_t n, const double *size, const double *angle, double *x, double *y)
{
    size_t i = 0;
    for (; i + LANES <= n; i += LANES)
        add_some(LANES, size + i, angle + i, x + i, y + i);
    if (i < n)
        add_some(n - i, size + i, angle + i, x + i, y + i);
}

const struct compound_kernels ISA_NAME(compound_kernels) = {add_turned};
