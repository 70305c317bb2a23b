/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Numbers as the text writer lays them out: three significant digits of the exact
 * double, rounded half to even as printf rounds, in any power of ten. Zeros at the end are
 * printed where the number was rounded, and left out where it is exact (block.h). */
#ifndef REPORT_NUMBER_H
#define REPORT_NUMBER_H

#include "report/block.h"

/* x / 10^shift in the given style (a percentage is not scaled here; its caller
 * gives the shift -2). Scaling moves the decimal point only: nothing is rounded
 * twice. buf: 32 bytes. */
char *number_scaled(char *buf, double x, enum number_style style, int shift);

/* x / 10^shift with n (1 to 12) significant digits, without zeros at the end and without an
 * exponent, for numbers of one axis that differ only behind their third digit. buf: 32 bytes. */
char *number_digits(char *buf, double x, int n, int shift);

/* The power of ten of x once rounded to three digits: 999.7 has 3. x is finite
 * and not zero. */
int number_exponent(double x);

/* The shift (0, 3, 6 or 9) for a column of money whose largest and smallest
 * absolute values, zeros left out, have these exponents. The largest number
 * decides, so that it stands as 1 to 999; the next lower prefix is taken where the largest
 * then has four digits before its point and the smallest would stand below 0.1 otherwise. */
int money_shift(int largest, int smallest);

/* The shift of numbers of one unit that lie between these: of money with a unit that of its
 * prefix, of a percentage -2. */
int number_shift(enum number_style style, const char *unit, double least, double greatest);

/* "", "k", "M" or "G". */
const char *money_prefix(int shift);

#endif
