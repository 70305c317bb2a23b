/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The elementary functions, made of elementary_core.h. Owns nothing.
 * Only pow has special values that the core does not see to; they are sorted out here
 * in the order of C17 F.10.4.4. */
#include "math/elementary.h"

#include <stdbool.h>

#include "math/elementary_core.h"

double math_exp(double x)
{
    return elementary_exp(x);
}

double math_log(double x)
{
    return elementary_log(x);
}

double math_log10(double x)
{
    return elementary_log10(x);
}

double math_expm1(double x)
{
    return elementary_expm1(x);
}

double math_log1p(double x)
{
    return elementary_log1p(x);
}

static bool whole(double y)
{
    return isfinite(y) && floor(y) == y;
}

/* Halving is exact for all whole numbers. */
static bool odd(double y)
{
    return whole(y) && !whole(y / 2);
}

/* For x >= 0: a zero or infinite x, or an infinite y. */
static double pow_at_ends(double x, double y)
{
    if (x == 1)
        return 1;
    return (x > 1) == (y > 0) ? INFINITY : 0;
}

double math_pow(double x, double y)
{
    if (x == 1 || y == 0)
        return 1; /* even of NaN */
    if (isnan(x) || isnan(y))
        return isnan(x) ? x + x : y + y; /* of x + y compilers may take either NaN */
    if (x < 0 && isfinite(x) && isfinite(y) && !whole(y))
        return NAN;
    double size = fabs(x), sign = signbit(x) && odd(y) ? -1 : 1;
    if (size == 0 || isinf(size) || isinf(y))
        return sign * pow_at_ends(size, y);
    return sign * elementary_pow(size, y);
}
