/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the transform of a compound distribution spends its time with, one table an instruction set
 * (base/isa.h). Only for aggregate.c. */
#ifndef MATH_COMPOUND_KERNELS_H
#define MATH_COMPOUND_KERNELS_H

#include <stddef.h>

#include "base/isa.h"

struct compound_kernels {
    /* x[i] += size[i] cos(angle[i]), y[i] += size[i] sin(angle[i]); |angle| < 2^19 */
    void (*add_turned)(size_t n, const double *size, const double *angle, double *x, double *y);
};

#define X(name, needs) extern const struct compound_kernels compound_kernels_##name;
ISAS(X)
#undef X

#endif
