/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tiny seeded generator for tests: the same seed, the same numbers, on any
 * machine. splitmix64: S. Vigna, "splitmix64.c" (2015), after G. Steele,
 * D. Lea, C. Flood, "Fast splittable pseudorandom number generators" (2014). */
#ifndef TESTS_RANDOM_H
#define TESTS_RANDOM_H

#include <stddef.h>
#include <stdint.h>

struct random {
    uint64_t state;
};

/* A generator that starts from `seed` (any value). */
struct random random_seed(uint64_t seed);

/* 64 even bits. */
uint64_t random_next(struct random *r);

/* A whole number in lo..hi, both ends included; lo <= hi. */
int64_t random_range(struct random *r, int64_t lo, int64_t hi);

/* In [lo, hi), evenly. */
double random_uniform(struct random *r, double lo, double hi);

/* In [lo, hi), its logarithm evenly; 0 < lo < hi. */
double random_log_uniform(struct random *r, double lo, double hi);

/* An index in 0..n-1; n > 0. */
size_t random_index(struct random *r, size_t n);

/* Any finite double, each bit pattern alike: subnormals, both signs, both zeros. */
double random_double(struct random *r);

/* One element of an array, by value. */
#define random_pick(r, array) ((array)[random_index((r), sizeof(array) / sizeof((array)[0]))])

#endif
