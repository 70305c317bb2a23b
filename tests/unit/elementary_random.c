/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Bits of doubles, and random ones by their bits; for elementary_test*.c and lanes_test.c. */
#include "elementary_test.h"

#include <string.h>

uint64_t bits_of(double x)
{
    uint64_t bits;
    memcpy(&bits, &x, sizeof bits);
    return bits;
}

double double_of(uint64_t bits)
{
    double x;
    memcpy(&x, &bits, sizeof x);
    return x;
}

double random_between(struct random *r, double lo, double hi)
{
    uint64_t a = bits_of(lo), b = bits_of(hi);
    uint64_t least = a < b ? a : b, most = a < b ? b : a;
    return double_of(least + random_next(r) % (most - least + 1));
}
