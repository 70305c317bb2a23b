/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The elementary functions that figures are made of, each called out of line.
 *
 * Invariant: every exp, log, expm1, log1p and pow of a figure goes through here,
 * never through <math.h>, so that no compiler folds one to a constant of its own
 * and all code paths get the same bits. For now these are the C library's (glibc
 * states at most 1 ulp for exp, log and pow, and 2 ulp for expm1 and log1p);
 * another implementation replaces them in this one place. Special values are those
 * of C17 annex F. */
#ifndef MATH_ELEMENTARY_H
#define MATH_ELEMENTARY_H

double math_exp(double x);
double math_log(double x);
double math_expm1(double x); /* exp(x) - 1, accurate near 0 */
double math_log1p(double x); /* log(1 + x), accurate near 0 */
double math_pow(double x, double y);

#endif
