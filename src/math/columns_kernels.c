/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sorting columns (columns.h), compiled once for each instruction set. Owns nothing. */
#include "math/columns.h"

#include <stdint.h>

#if defined __AVX512F__
#define VECTOR_BYTES 64
#elif defined __AVX__
#define VECTOR_BYTES 32
#else
#define VECTOR_BYTES 16
#endif

enum { WIDTH = VECTOR_BYTES / sizeof(double) };

typedef double vector __attribute__((vector_size(VECTOR_BYTES)));
typedef int64_t bits __attribute__((vector_size(VECTOR_BYTES)));
/* As it lies in a row, which need not be aligned. */
typedef double row_part __attribute__((vector_size(VECTOR_BYTES), aligned(8), may_alias));

/* Numbers stay what they are: of two that are equal none moves. */
static inline void exchange(double *above, double *below)
{
    for (int k = 0; k < COLUMNS_TOGETHER; k += WIDTH) {
        vector x = *(const row_part *)(above + k), y = *(const row_part *)(below + k);
        bits turned = (bits)(y < x);
        bits moved = ((bits)x ^ (bits)y) & turned;
        *(row_part *)(above + k) = (vector)((bits)x ^ moved);
        *(row_part *)(below + k) = (vector)((bits)y ^ moved);
    }
}

/* Rows i and i + d for all i that have the bit p as `turn` has it. */
static void exchange_all(size_t n, size_t p, size_t d, size_t turn,
                         double (*rows)[COLUMNS_TOGETHER])
{
    for (size_t from = turn; from + d < n; from += 2 * p)
        for (size_t i = from; i < from + p && i + d < n; i++)
            exchange(rows[i], rows[i + d]);
}

static void sort(size_t n, double (*rows)[COLUMNS_TOGETHER])
{
    size_t most = 1;
    while (2 * most < n)
        most *= 2;
    for (size_t p = most; p > 0; p /= 2) {
        exchange_all(n, p, p, 0, rows);
        for (size_t q = most; q > p; q /= 2)
            exchange_all(n, p, q - p, p, rows);
    }
}

const struct columns_kernels ISA_NAME(columns_kernels) = {sort};
