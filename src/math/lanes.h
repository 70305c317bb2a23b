/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The elementary functions over many doubles at once.
 *
 * Invariant: y[i] has the bits of the scalar function of math/elementary.h and math/dist.h at
 * x[i], for every double x[i], every n and every instruction set. Made of the same arithmetic
 * (math/elementary_core.h) with vectors in place of doubles.
 *
 * n may be 0; y may be x, but not overlap it otherwise; no alignment is asked for. Nothing
 * allocates; safe in several threads. */
#ifndef MATH_LANES_H
#define MATH_LANES_H

#include <stddef.h>

#include "base/isa.h"

typedef void lanes_function(size_t n, const double *x, double *y);

struct lanes_functions {
    lanes_function *exp, *log, *log10, *expm1, *log1p;
    /* z[i] = math_pow(x[i], y[i]); z may be x or y */
    void (*pow)(size_t n, const double *x, const double *y, double *z);
    /* z[i] = the standard normal deviate of the probability p[i], where q[i] = 1 - p[i] and the
     * smaller of the two is exact: dist_normal_deviate(p) where p <= q, -dist_normal_deviate(q)
     * elsewhere. 0 < p, q < 1; z may be p or q */
    void (*deviate)(size_t n, const double *p, const double *q, double *z);
};

/* For an instruction set that runs (isa_runs). */
const struct lanes_functions *lanes_functions(enum isa i);

#endif
