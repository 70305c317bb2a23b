/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The arithmetic of exp, expm1, log, log1p, log10 and pow: what elementary.c makes
 * functions of. Included by the files of this layer that need it, and by tests.
 *
 * Invariant: each result is a fixed sequence of IEEE additions, multiplications and
 * bit operations on doubles, rounded to nearest, without fused ones; so any compiler
 * and any machine gives the same bits. The build must not contract or reassociate.
 *
 * It is a template: no branch depends on data (only selections do), a table is read by
 * one index, and nothing is called. So the same text works on doubles, and on vectors of
 * them where ELEMENTARY_VECTOR is defined (elementary_kind.h); the two agree bit for
 * bit, which tests/unit/lanes_test.c holds.
 *
 * Methods. Reduction by whole steps of ln 2 / 128 kept in two parts: W. J. Cody & W.
 * Waite, Software Manual for the Elementary Functions (1980), chapter 6. Tables of 128
 * steps and a short polynomial: P. T. P. Tang, ACM TOMS 15 (1989) 144-157 (exp), 16 (1990)
 * 378-400 (log), 18 (1992) 211-222 (expm1). A logarithm in two doubles for pow: A. Ziv,
 * ACM TOMS 17 (1991) 410-423. Exact sums: D. E. Knuth, The Art of Computer Programming
 * 2, 4.2.2, theorem B; T. J. Dekker, Numer. Math. 18 (1971) 224-242. Citations are
 * from memory; all numbers were derived afresh by tests/tools/elementary_tables.py.
 *
 * Errors beyond the last rounding, in units of the last place: below 0.01 for exp, expm1,
 * log, log1p and log10, below 0.02 for pow; so a value that is a double is hit exactly.
 * Subnormal results are rounded twice, which costs at most 1/4 more. */
#ifndef MATH_ELEMENTARY_CORE_H
#define MATH_ELEMENTARY_CORE_H

#include <assert.h>
#include <float.h>
#include <math.h>

#include "math/elementary_kind.h"

static_assert(FLT_EVAL_METHOD == 0, "doubles are evaluated as doubles");
static_assert(DBL_MANT_DIG == 53 && sizeof(double) == 8, "doubles are IEEE binary64");

/* An unevaluated sum; |tail| is far below |head|. */
struct elementary_pair {
    real head, tail;
};

enum {
    ELEMENTARY_STEP_BITS = 7,
    ELEMENTARY_STEPS = 1 << ELEMENTARY_STEP_BITS, /* of the mantissa, in both tables */
    ELEMENTARY_LAST_WHOLE = 53                    /* the last step of log below the root of 2 */
};

/* Row j: 2^(j/128) = head + tail; head has 26 bits, so that its product with another
 * such number is exact. */
struct elementary_exp_row {
    double head, tail;
};

/* Row j: inverse is 1/c rounded to 24 bits, where c = 1 + j/128, or half of that beyond
 * the root of 2; log_head + log_tail = -log(inverse), the head a multiple of 2^-42.
 * Rows 0 and 128 are those of 1, so that nothing cancels near 1. */
struct elementary_log_row {
    double inverse, log_head, log_tail;
};

extern const struct elementary_exp_row elementary_exp_table[ELEMENTARY_STEPS];
extern const struct elementary_log_row elementary_log_table[ELEMENTARY_STEPS + 1];

/* Of the rows j, one a lane, the heads and tails. */
static inline struct elementary_pair elementary_exp_rows(integer j)
{
    real head = elementary_every(0), tail = head;
    for (int i = 0; i < ELEMENTARY_LANES; i++) {
        const struct elementary_exp_row *row = &elementary_exp_table[ELEMENTARY_LANE(j, i)];
        ELEMENTARY_LANE(head, i) = row->head;
        ELEMENTARY_LANE(tail, i) = row->tail;
    }
    return (struct elementary_pair){head, tail};
}

struct elementary_log_rows {
    real inverse, log_head, log_tail;
};

static inline struct elementary_log_rows elementary_log_rows(integer j)
{
    real inverse = elementary_every(0), log_head = inverse, log_tail = inverse;
    for (int i = 0; i < ELEMENTARY_LANES; i++) {
        const struct elementary_log_row *row = &elementary_log_table[ELEMENTARY_LANE(j, i)];
        ELEMENTARY_LANE(inverse, i) = row->inverse;
        ELEMENTARY_LANE(log_head, i) = row->log_head;
        ELEMENTARY_LANE(log_tail, i) = row->log_tail;
    }
    return (struct elementary_log_rows){inverse, log_head, log_tail};
}

/* x rounded to 26 bits; x minus it is exact and has 26 bits too. */
static inline real elementary_top(real x)
{
    return elementary_double((elementary_bits(x) + 0x4000000) & ~(uint64_t)0x7ffffff);
}

/* a + b exactly. */
static inline struct elementary_pair elementary_sum(real a, real b)
{
    real head = a + b, of_b = head - a;
    return (struct elementary_pair){head, (a - (head - of_b)) + (b - of_b)};
}

/* The same for a == 0 or |a| >= |b|. */
static inline struct elementary_pair elementary_ordered_sum(real a, real b)
{
    real head = a + b;
    return (struct elementary_pair){head, b - (head - a)};
}

/* a b to 2^-77 relative; the head is exact. */
static inline struct elementary_pair elementary_product(real a, real b)
{
    real top_a = elementary_top(a), top_b = elementary_top(b);
    return (struct elementary_pair){top_a * top_b, top_a * (b - top_b) + (a - top_a) * b};
}

/* 2^k for -1022 <= k <= 1023. */
static inline real elementary_power_of_two(integer k)
{
    return elementary_double((k + 1023) << 52);
}

/* y 2^k for y in 1/100 .. 2 and |k| < 1200: the first product is exact, the second rounds
 * where the result is subnormal, and may overflow. */
static inline real elementary_scale(real y, integer k)
{
    integer half = ((k + 2048) >> 1) - 1024;
    return y * elementary_power_of_two(half) * elementary_power_of_two(k - half);
}

/* x between low and high; NaN becomes low. */
static inline real elementary_clamp(real x, double low, double high)
{
    x = elementary_choose(x > low, x, elementary_every(low));
    return elementary_choose(x < high, x, elementary_every(high));
}

/* exp(x + low) = 2^k (head + tail) exp(r + r_low). */
struct elementary_reduced {
    real head, tail; /* a row of the table */
    real r, r_low;   /* |r| <= ln 2 / 256, but for a rounding */
    real n;          /* steps: 128 k and what is left */
    integer k;
};

/* The nearest number of steps n is found by adding 1.5 2^52, whose last bit is worth 1:
 * the lower bits of the sum are then n. A step, ln 2 / 128, is head + tail, the head of
 * 34 bits; |n| < 2^18, so n head is exact, and x - n head is too. |x| < 900. */
static inline struct elementary_reduced elementary_reduce(real x, real low)
{
    const double steps_in_1 = 0x1.71547652b82fep+7;
    const double step_head = 0x1.62e42fef80000p-8, step_tail = 0x1.1cf79abc9e3b4p-43;
    const uint64_t positive = 1 << 20; /* many steps, and a whole power */
    real shifted = (x + low) * steps_in_1 + ELEMENTARY_WHOLE, n = shifted - ELEMENTARY_WHOLE;
    integer steps = elementary_bits(shifted) - (ELEMENTARY_WHOLE_BITS - positive);
    struct elementary_pair row = elementary_exp_rows(steps & (ELEMENTARY_STEPS - 1));
    struct elementary_pair r = elementary_sum(x - n * step_head, low - n * step_tail);
    integer k = (steps >> ELEMENTARY_STEP_BITS) - (positive >> ELEMENTARY_STEP_BITS);
    return (struct elementary_reduced){row.head, row.tail, r.head, r.tail, n, k};
}

/* exp(r) - 1 - r for |r| <= ln 2 / 256: the first two coefficients are those of Taylor, the
 * others interpolate the rest at Chebyshev nodes; error 2^-75. */
static inline real elementary_exp_rest(real r)
{
    const double c3 = 0x1.5555555555525p-3, c4 = 0x1.555555555553dp-5;
    const double c5 = 0x1.1111143255ff1p-7, c6 = 0x1.6c16c48d5bae7p-10;
    return r * r * (0.5 + r * (c3 + r * (c4 + r * (c5 + r * c6))));
}

/* exp(e) without its 2^k: in 0.99 .. 2. */
static inline struct elementary_pair elementary_exp_pair(struct elementary_reduced e)
{
    real q = e.r + (e.r_low + elementary_exp_rest(e.r));
    return elementary_ordered_sum(e.head, e.tail + (e.head + e.tail) * q);
}

/* exp(x). NaN is led around the integers, and out again. */
static inline real elementary_exp(real x)
{
    real inside = elementary_clamp(x, -750, 750);
    struct elementary_reduced e = elementary_reduce(inside, elementary_every(0));
    real y = elementary_scale(elementary_exp_pair(e).head, e.k);
    return elementary_choose(x == x, y, x + x);
}

/* exp(x) - 1. With s = 2^k (head + tail) it is (s - 1) + s r + s (...); the two first
 * terms, which may cancel in part, are formed exactly from the upper bits. From 2^512 on
 * the 1 does not matter, and the power is put on at the end. */
static inline real elementary_expm1(real x)
{
    real inside = elementary_clamp(x, -60, 750);
    struct elementary_reduced e = elementary_reduce(inside, elementary_every(0));
    integer beyond = elementary_mask(e.n >= 512 * ELEMENTARY_STEPS) & (e.k - 512);
    integer k = e.k - beyond;
    real s = elementary_power_of_two(k), head = s * e.head, tail = s * e.tail;
    real top = elementary_top(e.r);
    real rest = (e.r - top) + (e.r_low + elementary_exp_rest(e.r));
    struct elementary_pair a = elementary_sum(head, elementary_every(-1));
    struct elementary_pair b = elementary_sum(a.head, head * top);
    real small = b.tail + (a.tail + (tail + (tail * top + (head + tail) * rest)));
    real y = (b.head + small) * elementary_power_of_two(beyond);
    y = elementary_choose(x == 0, x, y); /* keeps the sign of zero */
    return elementary_choose(x == x, y, x + x);
}

/* x = 2^k z for positive x, with z / c near 1 for row j. */
struct elementary_split {
    real z;
    integer k, j;
};

/* Subnormal numbers are first scaled up. Any other bits give some result without harm.
 * `halved` is 1 for j > ELEMENTARY_LAST_WHOLE, else 0. */
static inline struct elementary_split elementary_split(real x)
{
    truth small = x < DBL_MIN;
    integer bits = elementary_bits(elementary_choose(small, x * 0x1p54, x));
    integer j = ((bits >> 44 & 0xff) + 1) >> 1;
    integer halved = (j + (ELEMENTARY_STEPS - 1 - ELEMENTARY_LAST_WHOLE)) >> ELEMENTARY_STEP_BITS;
    integer scaled = elementary_mask(small) & 54;
    integer k = (bits >> 52 & 0x7ff) - 1023 + halved - scaled;
    integer mantissa = bits & UINT64_C(0xfffffffffffff);
    real z = elementary_double(mantissa | (1023 - halved) << 52);
    return (struct elementary_split){z, k, j};
}

/* log(1 + r) - r + r^2/2 for |r| <= 1/256, by interpolation at Chebyshev nodes; error
 * 2^-72 r. */
static inline real elementary_log_rest(real r)
{
    const double c3 = 0x1.5555555555556p-2, c4 = -0x1.0000000000000p-2;
    const double c5 = 0x1.999999991915cp-3, c6 = -0x1.55555554e1ab7p-3;
    const double c7 = 0x1.24939f29fcad1p-3, c8 = -0x1.000133d1b1cf0p-3;
    return r * r * r * (c3 + r * (c4 + r * (c5 + r * (c6 + r * (c7 + r * c8)))));
}

/* log(2^k (z + low)) to 2^-68 relative. r = z/c - 1 comes in two parts without error, for
 * the upper bits of z times the inverse are exact; so are k times the head of ln 2 (a
 * multiple of 2^-42 below 2^11), its sum with log_head, and the square of the upper bits
 * of r. What is left is small enough for rounded arithmetic. */
static inline struct elementary_pair elementary_log_pair(struct elementary_split s, real low)
{
    const double ln2_head = 0x1.62e42fefa3800p-1, ln2_tail = 0x1.ef35793c76730p-45;
    struct elementary_log_rows row = elementary_log_rows(s.j);
    real k = elementary_real(s.k), top = elementary_top(s.z), rest = (s.z - top) + low;
    struct elementary_pair r = elementary_sum(top * row.inverse - 1, rest * row.inverse);
    real upper = elementary_top(r.head);
    real cross = 0.5 * (r.head - upper) * (r.head + upper); /* of r^2/2 */
    real small = k * ln2_tail + row.log_tail + (r.tail - r.tail * r.head);
    struct elementary_pair a = elementary_ordered_sum(k * ln2_head + row.log_head, r.head);
    struct elementary_pair b = elementary_ordered_sum(a.head, -0.5 * upper * upper);
    real tail = b.tail + (a.tail + (small + (elementary_log_rest(r.head) - cross)));
    return elementary_ordered_sum(b.head, tail);
}

/* y, the logarithm of x, or the value of annex F where there is none. */
static inline real elementary_log_special(real x, real y)
{
    real pole = elementary_every(-INFINITY), none = elementary_every(NAN);
    return elementary_choose(
        x > 0, elementary_choose(x < INFINITY, y, x),
        elementary_choose(x == x, elementary_choose(x == 0, pole, none), x + x));
}

static inline struct elementary_pair elementary_log_of(real x)
{
    return elementary_log_pair(elementary_split(x), elementary_every(0));
}

static inline real elementary_log(real x)
{
    return elementary_log_special(x, elementary_log_of(x).head);
}

/* log(1 + x): what the sum loses comes back as the low part of z. From 2^1000 on that is
 * nothing, whatever its scale. */
static inline real elementary_log1p(real x)
{
    struct elementary_pair u = elementary_sum(elementary_every(1), x);
    struct elementary_split s = elementary_split(u.head);
    real scale = elementary_power_of_two((elementary_mask(x < 0x1p1000) & (1000 - s.k)) - 1000);
    real y = elementary_log_pair(s, u.tail * scale).head;
    return elementary_choose(x == 0, x, elementary_log_special(u.head, y));
}

/* log(x) / ln 10. */
static inline real elementary_log10(real x)
{
    const double head = 0x1.bcb7b18000000p-2, tail = -0x1.6c8d78e6acaa4p-29;
    struct elementary_pair l = elementary_log_of(x);
    struct elementary_pair y = elementary_product(l.head, elementary_every(head));
    return elementary_log_special(x, y.head + (y.tail + (l.head * tail + l.tail * head)));
}

/* x^y for positive finite x and finite y: exp(y log x), the product in two parts. Beyond
 * 2^70 the size of y does not matter: |log x| >= 2^-53, or 0. */
static inline real elementary_pow(real x, real y)
{
    struct elementary_pair l = elementary_log_of(x);
    y = elementary_clamp(y, -0x1p70, 0x1p70);
    struct elementary_pair p = elementary_product(y, l.head);
    real inside = elementary_clamp(p.head, -800, 800);
    real rest = elementary_choose(p.head == inside, p.tail + y * l.tail, elementary_every(0));
    struct elementary_reduced e = elementary_reduce(inside, rest);
    return elementary_scale(elementary_exp_pair(e).head, e.k);
}

#endif
