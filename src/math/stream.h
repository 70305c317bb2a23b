/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Even numbers that a name and a number decide, and nothing else: the same on every machine,
 * whatever other streams are drawn from, in whatever order.
 *
 * Number i of a stream is mix(key + i g), where mix and g are those of splitmix64 (Steele, Lea,
 * Flood: Fast splittable pseudorandom number generators, OOPSLA 2014), and the key is the 64-bit
 * FNV-1a hash of the name (Fowler, Noll, Vo), mixed with the number. Not for secrets. */
#ifndef MATH_STREAM_H
#define MATH_STREAM_H

#include <stddef.h>
#include <stdint.h>

struct stream {
    uint64_t state;
};

/* The start of stream `number` of a name, which may be empty. */
struct stream stream_of(const char *name, uint64_t number);

/* Stream `number` of those that a stream has below it: as far from one another, and from what
 * comes from `s` itself, as streams of different names are. */
struct stream stream_below(struct stream s, uint64_t number);

/* 64 even bits. */
uint64_t stream_next(struct stream *s);

/* Evenly in (0, 1), neither end included: the middle of one of 2^52 cells. So u and 1 - u are
 * exact. */
double stream_uniform(struct stream *s);

/* The numbers 0 .. n - 1 in an order of which each is equally likely (Durstenfeld, Algorithm
 * 235, Comm. ACM 7 (1964) 420), but for 1 part in 2^32 / n. n < 2^31. */
void stream_permutation(struct stream *s, size_t n, uint32_t *at);

#endif
