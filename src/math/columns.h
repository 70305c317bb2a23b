/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sorting several columns of numbers side by side, one table an instruction set (base/isa.h). */
#ifndef MATH_COLUMNS_H
#define MATH_COLUMNS_H

#include <stddef.h>

#include "base/isa.h"

enum { COLUMNS_TOGETHER = 8 };

struct columns_kernels {
    /* Sorts each column of n rows, the least number first. What is compared, and in which order,
     * depends on n alone, by Batcher's merge exchange (Knuth, The Art of Computer Programming 3,
     * 5.2.2, algorithm M), so that all columns go through it together. No NaN. */
    void (*sort)(size_t n, double (*rows)[COLUMNS_TOGETHER]);
};

#define X(name, needs) extern const struct columns_kernels columns_kernels_##name;
ISAS(X)
#undef X

#endif
