/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The numbers that elementary_core.h is made of: doubles, or vectors of doubles where
 * ELEMENTARY_VECTOR is defined (lanes_kernels.c).
 *
 * Invariant: whatever is done to a vector is done to each of its lanes as to a double; so
 * one text on `real`, `integer` and `truth` is the same arithmetic for both. Vectors
 * are as long as the instruction set that the file is compiled for has them.
 *
 * Integers are of 64 bits, as doubles are, and without sign: a negative number is what it is
 * modulo 2^64. What all instruction sets do fast with these is to add, to subtract, to shift by
 * a constant and to mask; the template does nothing else with them. */
#ifndef MATH_ELEMENTARY_KIND_H
#define MATH_ELEMENTARY_KIND_H

#include <math.h>
#include <stdint.h>
#include <string.h>

/* Whole numbers |k| < 2^50 are the lower bits of this number plus k: the last is worth 1. */
#define ELEMENTARY_WHOLE 0x1.8p52
#define ELEMENTARY_WHOLE_BITS UINT64_C(0x4338000000000000)

#ifdef ELEMENTARY_VECTOR

#if defined __AVX512F__
#define ELEMENTARY_LANES 8
#elif defined __AVX2__
#define ELEMENTARY_LANES 4
#else
#define ELEMENTARY_LANES 2
#endif

typedef double real __attribute__((vector_size(ELEMENTARY_LANES * sizeof(double))));
typedef uint64_t integer __attribute__((vector_size(ELEMENTARY_LANES * sizeof(double))));
/* of a comparison: all bits of a lane, or none */
typedef __typeof__((real){0} < (real){0}) truth;

/* Lane i. */
#define ELEMENTARY_LANE(v, i) ((v)[i])

/* x in every lane. Nothing is taken off: so that is x even for -0. */
static inline real elementary_every(double x)
{
    return x - (real){0};
}

/* t ? a : b */
static inline real elementary_choose(truth t, real a, real b)
{
    return (real)(((integer)t & (integer)a) | (~(integer)t & (integer)b));
}

/* All bits, or none. */
static inline integer elementary_mask(truth t)
{
    return (integer)t;
}

/* k, |k| < 2^50, as a real. */
static inline real elementary_real(integer k)
{
    return (real)(k + ELEMENTARY_WHOLE_BITS) - ELEMENTARY_WHOLE;
}

#else

#define ELEMENTARY_LANES 1

typedef double real;
typedef uint64_t integer;
typedef int truth;

#define ELEMENTARY_LANE(v, i) (v)

static inline real elementary_every(double x)
{
    return x;
}

/* A macro, so that the compiler may leave out what is not chosen. */
#define elementary_choose(t, a, b) ((t) ? (a) : (b))

static inline integer elementary_mask(truth t)
{
    return -(integer)t;
}

static inline real elementary_real(integer k)
{
    return (real)(int64_t)k;
}

#endif

static inline integer elementary_bits(real x)
{
    integer bits;
    memcpy(&bits, &x, sizeof bits);
    return bits;
}

static inline real elementary_double(integer bits)
{
    real x;
    memcpy(&x, &bits, sizeof x);
    return x;
}

/* The root, rounded as IEEE wants it. */
static inline real elementary_root(real x)
{
    double y[ELEMENTARY_LANES];
    memcpy(y, &x, sizeof x);
    for (int i = 0; i < ELEMENTARY_LANES; i++)
        y[i] = sqrt(y[i]);
    memcpy(&x, y, sizeof x);
    return x;
}

#endif
