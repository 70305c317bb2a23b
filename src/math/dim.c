/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The algebra of dimensions: exponents add, subtract, scale. */
#include "math/dim.h"

#include <string.h>

enum { LARGEST = 100 };

static int8_t clamp(int e)
{
    return (int8_t)(e > LARGEST ? LARGEST : e < -LARGEST ? -LARGEST : e);
}

bool dim_equal(struct dim a, struct dim b)
{
    for (int i = 0; i < DIM_SLOTS; i++)
        if (a.e[i] == LARGEST || a.e[i] == -LARGEST)
            return false;
    return memcmp(a.e, b.e, sizeof a.e) == 0;
}

bool dim_is_number(struct dim a)
{
    return dim_equal(a, (struct dim){{0}});
}

struct dim dim_multiply(struct dim a, struct dim b)
{
    for (int i = 0; i < DIM_SLOTS; i++)
        a.e[i] = clamp(a.e[i] + b.e[i]);
    return a;
}

struct dim dim_divide(struct dim a, struct dim b)
{
    for (int i = 0; i < DIM_SLOTS; i++)
        a.e[i] = clamp(a.e[i] - b.e[i]);
    return a;
}

struct dim dim_raise(struct dim a, int by)
{
    for (int i = 0; i < DIM_SLOTS; i++)
        a.e[i] = clamp(a.e[i] * by);
    return a;
}

bool dim_root(struct dim a, struct dim *out)
{
    for (int i = 0; i < DIM_SLOTS; i++) {
        if (a.e[i] % 2 != 0)
            return false;
        a.e[i] = (int8_t)(a.e[i] / 2);
    }
    *out = a;
    return true;
}
