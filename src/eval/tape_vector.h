/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Vectors of doubles for the kernels of tapes: as many as a register of the instruction set holds,
 * and the point rules of the op table on them. */
#ifndef EVAL_TAPE_VECTOR_H
#define EVAL_TAPE_VECTOR_H

#include <math.h>
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

static inline vector load(const double *p)
{
    return *(const row_part *)p;
}

static inline void store(double *p, vector x)
{
    *(row_part *)p = x;
}

/* x - 0 is x, also for -0. */
static inline vector all(double x)
{
    return x - (vector){0};
}

/* b is of comparisons: all bits or none. */
static inline vector select(bits b, vector yes, vector no)
{
    return (vector)((b & (bits)yes) | (~b & (bits)no));
}

static inline vector size_of(vector x)
{
    return (vector)((bits)x & INT64_MAX);
}

static inline vector op_complement(vector a)
{
    return 1 - a;
}

static inline vector op_negate(vector a)
{
    return -a;
}

static inline vector op_root(vector a)
{
    for (int k = 0; k < WIDTH; k++)
        a[k] = sqrt(a[k]);
    return a;
}

static inline vector op_plus(vector a, vector b)
{
    return a + b;
}

static inline vector op_minus(vector a, vector b)
{
    return a - b;
}

static inline vector op_from(vector a, vector b)
{
    return b - a;
}

static inline vector op_times(vector a, vector b)
{
    return a * b;
}

static inline vector op_over(vector a, vector b)
{
    return a / b;
}

static inline vector op_under(vector a, vector b)
{
    return b / a;
}

static inline vector op_part(vector a, vector b)
{
    return (vector)(~(a == 0) & (bits)(a / b));
}

static inline vector op_whole(vector a, vector b)
{
    return op_part(b, a);
}

/* A NaN of a stays, one of b comes; of equal ones, which may be zeros, the sign that is below. */
static inline vector op_min(vector a, vector b)
{
    vector least = select((a <= b) | (a != a), a, b);
    return (vector)((bits)least | ((bits)b & (a == b)));
}

static inline vector op_max(vector a, vector b)
{
    vector most = select((a >= b) | (a != a), a, b);
    return (vector)((bits)most & ((bits)b | ~(a == b)));
}

/* b is neither 0 nor NaN, so that ties are equal in all bits. */
static inline vector op_at_most(vector a, vector b)
{
    return select(b < a, b, a);
}

static inline vector op_at_least(vector a, vector b)
{
    return select(b > a, b, a);
}

static inline vector op_blend(vector a, vector b, vector c)
{
    return a * b + (1 - a) * c;
}

/* sum and lost: as compensated_add. */
static inline void add_to(vector *sum, vector *lost, vector x)
{
    vector t = *sum + x;
    bits keeps = size_of(*sum) >= size_of(x);
    *lost += (select(keeps, *sum, x) - t) + select(keeps, x, *sum);
    *sum = t;
}

#endif
