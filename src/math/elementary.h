/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The elementary functions that figures are made of.
 *
 * Invariant: every exp, log, log10, expm1, log1p, pow and erfc of a figure goes through
 * here, never through <math.h>. They are our own, since the C library picks code by
 * processor and compilers fold its functions: here any compiler and any machine gives
 * the same bits. (The gamma family of GSL still uses the C library's.)
 *
 * Within 1 ulp of the true value, subnormal results included; in fact within 0.52 where
 * the result is normal, so results that are doubles are exact: pow(10, 2) is 100.
 * Arguments are any doubles, special values those of C17 annex F. The rounding mode must
 * be to nearest. Exception flags are not kept: they may be set without need. */
#ifndef MATH_ELEMENTARY_H
#define MATH_ELEMENTARY_H

double math_exp(double x);
double math_log(double x);
double math_log10(double x);
double math_expm1(double x); /* exp(x) - 1, accurate near 0 */
double math_log1p(double x); /* log(1 + x), accurate near 0 */
double math_pow(double x, double y);

/* The complementary error function, within 1.5 ulp. */
double math_erfc(double x);

#endif
