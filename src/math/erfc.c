/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The complementary error function. Owns nothing; the numbers are made by
 * tests/tools/elementary_tables.py.
 *
 * Near 0 it is 1 - erf(x), with erf(x)/x interpolated in x^2 at Chebyshev nodes. Else
 * (1 + 2x) exp(x^2) erfc(x) is a Chebyshev series in (x - k)/(x + k), k = 3.75, for all
 * x >= 0: M. M. Shepherd & J. G. Laframboise, Math. Comp. 36 (1981) 249-253 (cited from
 * memory). exp(-x^2) takes the square in two parts, so that the far tail keeps its digits. */
#include "math/elementary.h"
#include "math/elementary_core.h"

enum { NEAR_TERMS = 10, FAR_TERMS = 26 };

/* erf(x) / x by powers of x^2, |x| < 1/2; error 2^-62. */
static const double near_terms[NEAR_TERMS] = {
    0x1.20dd750429b6dp+0,   -0x1.812746b0379e6p-2,  0x1.ce2f21a042b29p-4,
    -0x1.b82ce3127f739p-6,  0x1.565bcd0aa6349p-8,   -0x1.c02db23d41138p-11,
    0x1.f9a2a6635fe79p-14,  -0x1.f4bb9f7301dedp-17, 0x1.b776442df3041p-20,
    -0x1.39fb524e9c1f7p-23};

/* Of T_0, T_1, ...; the first term left out is 3e-20. */
static const double far_terms[FAR_TERMS] = {
    0x1.2d75d0246cee8p+0,   -0x1.2cd0564f8c1b7p-8,  -0x1.59159e8868995p-4,
    0x1.e50c3e7c7dccep-5,   -0x1.b4c68f4569326p-6,  0x1.295e991a7d82dp-7,
    -0x1.3c4c54f8d419dp-9,  0x1.014ed1572209ap-11,  -0x1.221e6f70130b5p-14,
    0x1.15c3f597f0492p-18,  0x1.9f8f03ca86fc1p-21,  -0x1.d601c320c8f9cp-23,
    0x1.71e1efca86cf9p-27,  0x1.36bf2885524c9p-28,  -0x1.aa4d7b1cdf20ap-31,
    -0x1.15df59ca6082bp-34, 0x1.f8af0a9aa6d31p-36,  0x1.b61b723941781p-43,
    -0x1.0fc16c00b50f2p-40, 0x1.24f6a772cbc36p-45,  0x1.2d8b49ab5f72bp-45,
    -0x1.0cb63a80de2c5p-49, -0x1.6884628ace07ap-50, 0x1.561b105822235p-54,
    0x1.d3744857e262bp-55,  -0x1.4a219c71bb4d2p-59};

/* The heads above have tails. */
static const double near_tail = 0x1.1a70f6f39063dp-56, far_tail = 0x1.d90aabc0302d9p-55;

static double near_zero(double x)
{
    double square = x * x, rest = near_terms[NEAR_TERMS - 1];
    for (int i = NEAR_TERMS - 2; i > 0; i--)
        rest = rest * square + near_terms[i];
    struct elementary_pair sum = elementary_ordered_sum(near_terms[0], rest * square);
    struct elementary_pair erf_x = elementary_product(x, sum.head);
    struct elementary_pair y = elementary_ordered_sum(1, -erf_x.head);
    return y.head + (y.tail - (erf_x.tail + x * (sum.tail + near_tail)));
}

/* Clenshaw, MTAC 9 (1955) 118-120: the sum of far_terms[k] T_k(s). */
static struct elementary_pair far_series(double s)
{
    double b = 0, next = 0;
    for (int k = FAR_TERMS - 1; k > 0; k--) {
        double above = next;
        next = b;
        b = 2 * s * next - above + far_terms[k];
    }
    struct elementary_pair sum = elementary_ordered_sum(far_terms[0], s * b - next);
    sum.tail += far_tail;
    return sum;
}

/* a / b: the quotient of the heads, and what its product with b lacks. */
static struct elementary_pair ratio(struct elementary_pair a, struct elementary_pair b)
{
    double head = a.head / b.head;
    struct elementary_pair back = elementary_product(head, b.head);
    double lack = (a.head - back.head) - back.tail + (a.tail - head * b.tail);
    return (struct elementary_pair){head, lack / b.head};
}

/* For x >= 0.46. From 28 on the result is 0. */
static double upper_tail(double x)
{
    x = elementary_clamp(x, 0, 28);
    double top = elementary_top(x);
    struct elementary_reduced e = elementary_reduce(-top * top, -(x - top) * (x + top));
    struct elementary_pair power = elementary_exp_pair(e);
    struct elementary_pair sum = far_series((x - 3.75) / (x + 3.75));
    struct elementary_pair factor = ratio(sum, elementary_sum(1, 2 * x));
    struct elementary_pair y = elementary_product(power.head, factor.head);
    double rest = y.tail + (power.tail * factor.head + power.head * factor.tail);
    return elementary_scale(y.head + rest, e.k);
}

/* Below 0.46 the result is above 1/2, and takes no more from erf than its last place. */
double math_erfc(double x)
{
    if (isnan(x))
        return x + x;
    if (fabs(x) < 0.46)
        return near_zero(x);
    return x > 0 ? upper_tail(x) : 2 - upper_tail(-x);
}
