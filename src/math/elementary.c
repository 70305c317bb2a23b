/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Elementary functions: wrappers of the C library's. Owns nothing.
 * They live in a file of their own so that a call with a constant argument is
 * still a call: the build passes -fno-builtin for these names and links without
 * optimisation across files. */
#include "math/elementary.h"

#include <math.h>

double math_exp(double x)
{
    return exp(x);
}

double math_log(double x)
{
    return log(x);
}

double math_expm1(double x)
{
    return expm1(x);
}

double math_log1p(double x)
{
    return log1p(x);
}

double math_pow(double x, double y)
{
    return pow(x, y);
}
