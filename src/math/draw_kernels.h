/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The loops of draws_fill, one table an instruction set (base/isa.h).
 *
 * A *stratum* is one of the 2^log2 equal parts of (0, 1), and a *jitter* the place in it: the value
 * stands at u = (stratum + (jitter + 1/2) 2^-32) 2^-log2. Nothing allocates. Arrays of one call do
 * not overlap. All have the same bits whatever the instruction set. */
#ifndef MATH_DRAW_KERNELS_H
#define MATH_DRAW_KERNELS_H

#include "base/isa.h"
#include "math/quantile_table.h"

struct draw_kernels {
    /* n numbers of 32 even bits, each decided by the key and its place i alone. */
    void (*jitter)(size_t n, uint64_t key, uint32_t *jitter);
    /* x[i] by the polynomial of cell i, for first <= i < end: strata are cells */
    void (*cells)(size_t first, size_t end, const struct quantile_cells *c, const uint32_t *jitter,
                  double *x);
    /* The same for any strata, by the rows; where a cell has no polynomial x[i] is any number. */
    void (*cells_at)(size_t n, unsigned log2, const struct quantile_cells *c,
                     const uint16_t *stratum, const uint32_t *jitter, double *x);
    /* u and 1 - u, exactly */
    void (*chances)(size_t n, unsigned log2, const uint16_t *stratum, const uint32_t *jitter,
                    double *u, double *v);
    /* y[i] = the polynomial of the step of z[i] */
    void (*steps)(size_t n, const struct quantile_steps *s, const double *z, double *y);
    /* cell[i] = the sum without carry of the directions at the ones of i, i < 2^log2 */
    void (*net)(unsigned log2, const uint16_t *direction, uint16_t *cell);
    /* The nested permutation of 2^log2 numbers: bit s + j of `bits`, 1 <= s = 2^k <= s + j < 2 s,
     * tells whether the halves of part j of s change places. `spare` has the size of `place`. */
    void (*nest)(unsigned log2, const uint64_t *bits, uint16_t *spare, uint16_t *place);
    /* x[i] becomes location + scale x[i] */
    void (*shift)(size_t n, double location, double scale, double *x);
};

extern const struct draw_kernels draw_kernels_plain, draw_kernels_wide, draw_kernels_widest;

#endif
