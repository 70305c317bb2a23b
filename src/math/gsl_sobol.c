/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Direction numbers out of GSL's sequence, the only file that includes GSL for it. GSL's generator
 * lives for the length of the call.
 * Invariant: GSL's point n is the sum without carry of the directions at the ones of the Gray code
 * n ^ n / 2 (I. A. Antonov and V. M. Saleev, USSR Comput. Maths. Math. Phys. 19 (1980) 252-256); so
 * point 2^k is the sum of the directions k and k - 1. */
#include <gsl/gsl_qrng.h>

#include "math/sobol.h"

bool sobol_directions(uint32_t direction[SOBOL_DIMENSIONS][SOBOL_DIRECTIONS])
{
    gsl_qrng *points = gsl_qrng_alloc(gsl_qrng_sobol, SOBOL_DIMENSIONS);
    if (!points)
        return false;
    uint32_t number = 0;
    for (int k = 0; k < SOBOL_DIRECTIONS; k++) {
        double point[SOBOL_DIMENSIONS];
        for (; number < UINT32_C(1) << k; number++)
            gsl_qrng_get(points, point);
        for (int d = 0; d < SOBOL_DIMENSIONS; d++) {
            uint32_t fraction = (uint32_t)(point[d] * (UINT32_C(1) << SOBOL_BITS));
            direction[d][k] = fraction ^ (k > 0 ? direction[d][k - 1] : 0);
        }
    }
    gsl_qrng_free(points);
    return true;
}
