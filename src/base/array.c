/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The one growing step of all arrays: doubling, with checked multiplication. */
#include "base/array.h"

#include <string.h>

void array_zero(void *p, size_t n)
{
    memset(p, 0, n);
}

void *array_room(struct arena *a, void *at, size_t n, size_t *cap, size_t more, size_t size)
{
    if (more <= *cap - n)
        return at;
    size_t want = *cap ? *cap : 8, need;
    if (__builtin_add_overflow(n, more, &need))
        arena_exhausted(a);
    while (want < need)
        if (__builtin_mul_overflow(want, (size_t)2, &want))
            arena_exhausted(a);
    void *fresh = arena_array(a, want, size);
    if (n)
        memcpy(fresh, at, n * size);
    *cap = want;
    return fresh;
}
