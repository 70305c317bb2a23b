/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The direction numbers of Sobol' sequences, as GSL has them. */
#ifndef MATH_SOBOL_H
#define MATH_SOBOL_H

#include <stdbool.h>
#include <stdint.h>

enum { SOBOL_DIMENSIONS = 40, SOBOL_DIRECTIONS = 12, SOBOL_BITS = 30 };

/* direction[d][k] is number k of dimension d, a fraction of SOBOL_BITS bits: the point whose
 * number has the binary digits b0 + 2 b1 + 4 b2 + ... is, in dimension d, the sum without carry of
 * those direction[d][k] for which bk is 1. Bit SOBOL_BITS - 1 - k is the last one of number k
 * that is set. False where memory is short. */
bool sobol_directions(uint32_t direction[SOBOL_DIMENSIONS][SOBOL_DIRECTIONS]);

#endif
