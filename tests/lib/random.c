/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The generator of the tests. The state is one counter; the output mixes it.
 * Invariant: nothing but the seed decides the numbers. */
#include "random.h"

#include <assert.h>
#include <math.h>
#include <string.h>

struct random random_seed(uint64_t seed)
{
    return (struct random){seed};
}

uint64_t random_next(struct random *r)
{
    uint64_t z = r->state += 0x9e3779b97f4a7c15u;
    z = (z ^ z >> 30) * 0xbf58476d1ce4e5b9u;
    z = (z ^ z >> 27) * 0x94d049bb133111ebu;
    return z ^ z >> 31;
}

int64_t random_range(struct random *r, int64_t lo, int64_t hi)
{
    assert(lo <= hi);
    uint64_t span = (uint64_t)hi - (uint64_t)lo + 1;
    uint64_t step = span == 0 ? random_next(r) : random_next(r) % span;
    return (int64_t)((uint64_t)lo + step);
}

double random_uniform(struct random *r, double lo, double hi)
{
    double u = (double)(random_next(r) >> 11) * 0x1p-53;
    double x = lo + (hi - lo) * u;
    return x < hi ? x : lo; /* rounding may reach hi */
}

double random_log_uniform(struct random *r, double lo, double hi)
{
    assert(lo > 0 && lo < hi);
    double x = exp(random_uniform(r, log(lo), log(hi)));
    return x >= lo && x < hi ? x : lo; /* rounding may leave the interval */
}

size_t random_index(struct random *r, size_t n)
{
    assert(n > 0);
    return (size_t)(random_next(r) % n);
}

double random_double(struct random *r)
{
    for (;;) {
        uint64_t bits = random_next(r);
        double x;
        memcpy(&x, &bits, sizeof x);
        if (isfinite(x))
            return x;
    }
}
