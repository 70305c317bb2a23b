/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The streams. The state is one counter; the output mixes it.
 * Invariant: nothing but name and number decides what comes. */
#include "math/stream.h"

#define STEP UINT64_C(0x9E3779B97F4A7C15)

static uint64_t mix(uint64_t z)
{
    z = (z ^ z >> 30) * UINT64_C(0xBF58476D1CE4E5B9);
    z = (z ^ z >> 27) * UINT64_C(0x94D049BB133111EB);
    return z ^ z >> 31;
}

static uint64_t name_hash(const char *name)
{
    uint64_t h = UINT64_C(0xCBF29CE484222325);
    for (; *name; name++)
        h = (h ^ (unsigned char)*name) * UINT64_C(0x100000001B3);
    return h;
}

struct stream stream_of(const char *name, uint64_t number)
{
    return (struct stream){mix(mix(name_hash(name) + STEP) ^ mix(number + 1))};
}

struct stream stream_below(struct stream s, uint64_t number)
{
    return (struct stream){mix(mix(s.state + STEP) ^ mix(number + 1))};
}

uint64_t stream_next(struct stream *s)
{
    return mix(s->state += STEP);
}

double stream_uniform(struct stream *s)
{
    return ((double)(stream_next(s) >> 12) + 0.5) * 0x1p-52;
}

void stream_permutation(struct stream *s, size_t n, uint32_t *at)
{
    for (size_t i = 0; i < n; i++) {
        size_t k = (size_t)((stream_next(s) >> 32) * (i + 1) >> 32);
        at[i] = (uint32_t)i;
        at[i] = at[k];
        at[k] = (uint32_t)i;
    }
}
