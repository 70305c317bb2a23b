/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sine and cosine of one angle, on doubles or on vectors of them (elementary_kind.h).
 *
 * Invariant: as elementary_core.h: a fixed sequence of IEEE operations, so that scalars and vectors
 * of any length have the same bits.
 *
 * The angle less whole right angles, which are kept in three parts (W. J. Cody & W. Waite, Software
 * Manual for the Elementary Functions (1980), chapter 8, from memory), then Taylor's series: the
 * first term left out is below 1e-17 of the result. For |x| below 2^19, within 2 ulp of 1. */
#ifndef MATH_SINE_CORE_H
#define MATH_SINE_CORE_H

#include "math/elementary_kind.h"

struct sine_pair {
    real sine, cosine;
};

/* A right angle: two parts of 33 bits, whose products with whole numbers are exact, and the rest.
 */
#define SINE_RIGHT_HEAD 0x1.921fb544p+0
#define SINE_RIGHT_MIDDLE 0x1.0b4611a6p-34
#define SINE_RIGHT_TAIL 0x1.3198a2e037073p-69
#define SINE_TO_RIGHT 0.6366197723675814 /* 2 / pi */

/* 1/3!, 1/5!, ... and 1/2!, 1/4!, ..., the signs apart. */
static inline real sine_series(real r, real q)
{
    real s = 1. / 355687428096000 * q;
    s = q * (1. / 1307674368000 - s);
    s = q * (1. / 6227020800 - s);
    s = q * (1. / 39916800 - s);
    s = q * (1. / 362880 - s);
    s = q * (1. / 5040 - s);
    s = q * (1. / 120 - s);
    s = q * (1. / 6 - s);
    return r - r * s;
}

static inline real cosine_series(real q)
{
    real c = 1. / 20922789888000 * q;
    c = q * (1. / 87178291200 - c);
    c = q * (1. / 479001600 - c);
    c = q * (1. / 3628800 - c);
    c = q * (1. / 40320 - c);
    c = q * (1. / 720 - c);
    c = q * (1. / 24 - c);
    c = q * (1. / 2 - c);
    return 1 - c;
}

static inline struct sine_pair sine_of(real x)
{
    real whole = x * SINE_TO_RIGHT + ELEMENTARY_WHOLE;
    integer quarters = elementary_bits(whole);
    real turned = whole - ELEMENTARY_WHOLE;
    real r =
        ((x - turned * SINE_RIGHT_HEAD) - turned * SINE_RIGHT_MIDDLE) - turned * SINE_RIGHT_TAIL;
    real q = r * r;
    integer s = elementary_bits(sine_series(r, q)), c = elementary_bits(cosine_series(q));
    integer odd = 0 - (quarters & 1);
    integer sine = (odd & c) | (~odd & s), cosine = (odd & s) | (~odd & c);
    sine ^= (quarters & 2) << 62;
    cosine ^= ((quarters + 1) & 2) << 62;
    return (struct sine_pair){elementary_double(sine), elementary_double(cosine)};
}

#endif
