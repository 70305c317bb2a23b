/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The loops of rolling back (rollback.h), one table an instruction set (base/isa.h). */
#ifndef MATH_ROLLBACK_KERNELS_H
#define MATH_ROLLBACK_KERNELS_H

#include <stddef.h>
#include <stdint.h>

#include "base/isa.h"

/* Over n nodes of one run, of `arity` children each; `child` and `p` are those of the first node
 * on, side by side. */
struct rollback_kernels {
    void (*end)(size_t n, const double *amount, double *value);
    void (*choose)(size_t n, uint32_t arity, const double *amount, const double *child,
                   double *value);
    void (*chance)(size_t n, uint32_t arity, const double *amount, const double *p,
                   const double *child, double *value);
    void (*pick)(size_t n, uint32_t arity, const double *child, uint32_t *chosen);
};

#define X(name, needs) extern const struct rollback_kernels rollback_kernels_##name;
ISAS(X)
#undef X

#endif
