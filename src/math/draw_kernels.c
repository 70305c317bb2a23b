/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The loops of draws_fill (draw_kernels.h), compiled once for each instruction set.
 * Invariant: the operations on each value, and their order, do not depend on how many are taken at
 * a time; so all instruction sets give the same bits. */
#include "math/draw_kernels.h"

#include <string.h>

/* Three rounds of multiplying and folding, the second half of the key between them. Multipliers and
 * shifts: those of `triple32` of C. Wellons' hash-prospector (public domain, from memory); that the
 * bits are even and independent is held by tests. */
static inline uint32_t hash(uint32_t i, uint32_t first, uint32_t second)
{
    uint32_t h = i * UINT32_C(0x9E3779B9) + first;
    h = (h ^ h >> 17) * UINT32_C(0xED5AD4BB);
    h = ((h ^ h >> 11) + second) * UINT32_C(0xAC4C1B51);
    h = (h ^ h >> 15) * UINT32_C(0x31848BAB);
    return h ^ h >> 14;
}

static void jitter(size_t n, uint64_t key, uint32_t *restrict out)
{
    uint32_t first = (uint32_t)key, second = (uint32_t)(key >> 32);
    for (uint32_t i = 0; i < (uint32_t)n; i++)
        out[i] = hash(i, first, second);
}

/* A whole number below 2^52, exactly. */
static inline double whole(uint64_t i)
{
    const double base = 0x1p52;
    uint64_t bits;
    double x;
    memcpy(&bits, &base, sizeof bits);
    bits |= i;
    memcpy(&x, &bits, sizeof x);
    return x - base;
}

static void cells(size_t first, size_t end, const struct quantile_cells *c,
                  const uint32_t *restrict jitter, double *restrict x)
{
    const double *restrict c0 = c->term[0], *restrict c1 = c->term[1], *restrict c2 = c->term[2],
                           *restrict c3 = c->term[3], *restrict c4 = c->term[4],
                           *restrict c5 = c->term[5];
    for (size_t i = first; i < end; i++) {
        double t = (whole(jitter[i]) + 0.5) * 0x1p-32;
        x[i] = c0[i] + t * (c1[i] + t * (c2[i] + t * (c3[i] + t * (c4[i] + t * c5[i]))));
    }
}

/* u in units of 2^-(32 + log2), less one half. */
static inline uint64_t place_of(uint16_t stratum, uint32_t jitter)
{
    return (uint64_t)stratum << 32 | jitter;
}

static void cells_at(size_t n, unsigned log2, const struct quantile_cells *c,
                     const uint16_t *restrict stratum, const uint32_t *restrict jitter,
                     double *restrict x)
{
    unsigned inside = 32 + log2 - QUANTILE_LOG2_CELLS; /* bits of the place in a cell */
    uint64_t mask = (UINT64_C(1) << inside) - 1;
    double unit = 1 / (double)(UINT64_C(1) << inside);
    for (size_t i = 0; i < n; i++) {
        uint64_t place = place_of(stratum[i], jitter[i]), k = place >> inside;
        double t = (whole(place & mask) + 0.5) * unit;
        const double *r = c->rows[k];
        x[i] = r[0] + t * (r[1] + t * (r[2] + t * (r[3] + t * (r[4] + t * r[5]))));
    }
}

static void chances(size_t n, unsigned log2, const uint16_t *restrict stratum,
                    const uint32_t *restrict jitter, double *restrict u, double *restrict v)
{
    double unit = 1 / (double)(UINT64_C(1) << (32 + log2));
    for (size_t i = 0; i < n; i++) {
        u[i] = (whole(place_of(stratum[i], jitter[i])) + 0.5) * unit;
        v[i] = 1 - u[i];
    }
}

static void steps(size_t n, const struct quantile_steps *s, const double *restrict z,
                  double *restrict y)
{
    const double *restrict c0 = s->term[0], *restrict c1 = s->term[1], *restrict c2 = s->term[2],
                           *restrict c3 = s->term[3], *restrict c4 = s->term[4],
                           *restrict c5 = s->term[5];
    double from = s->from, per_step = s->per_step;
    int32_t last = (int32_t)s->n - 1;
    for (size_t i = 0; i < n; i++) {
        double place = (z[i] - from) * per_step;
        int32_t k = (int32_t)place; /* 0 between -1 and 0, where it must not be below */
        k = k < 0 ? 0 : k;
        k = k > last ? last : k;
        double t = place - k;
        y[i] = c0[k] + t * (c1[k] + t * (c2[k] + t * (c3[k] + t * (c4[k] + t * c5[k]))));
    }
}

static void net(unsigned log2, const uint16_t *direction, uint16_t *cell)
{
    cell[0] = 0;
    for (unsigned k = 0; k < log2; k++) {
        size_t half = (size_t)1 << k;
        const uint16_t *restrict from = cell;
        uint16_t *restrict to = cell + half, add = direction[k];
        for (size_t j = 0; j < half; j++)
            to[j] = from[j] ^ add;
    }
}

/* ---- nested permutations ---- */

/* Three levels at a time: a number becomes eight. The seven bits that tell which halves change
 * places are the first level's, then both of the second, then all four of the third. Number i of
 * the eight has, at each level, a bit of its own turned: row `bits` has what they become. */
enum { LEVELS = 3, EIGHT = 1 << LEVELS, ALL_BITS = 1 << (EIGHT - 1) };

#define CELL(bits, i)                                                                              \
    ((i) ^ ((bits)&1) << 2 ^ ((bits) >> (1 + ((i) >> 2)) & 1) << 1 ^                               \
     ((bits) >> (3 + ((i) >> 1)) & 1))
#define ROW(bits)                                                                                  \
    {                                                                                              \
        CELL(bits, 0), CELL(bits, 1), CELL(bits, 2), CELL(bits, 3), CELL(bits, 4), CELL(bits, 5),  \
            CELL(bits, 6), CELL(bits, 7)                                                           \
    }
#define ROWS_4(bits) ROW(bits), ROW(bits + 1), ROW(bits + 2), ROW(bits + 3)
#define ROWS_16(bits) ROWS_4(bits), ROWS_4(bits + 4), ROWS_4(bits + 8), ROWS_4(bits + 12)
#define ROWS_64(bits) ROWS_16(bits), ROWS_16(bits + 16), ROWS_16(bits + 32), ROWS_16(bits + 48)

static const uint16_t turned[ALL_BITS][EIGHT] = {ROWS_64(0), ROWS_64(64)};

/* As they lie in a row, which need not be aligned. */
typedef uint16_t eight __attribute__((vector_size(2 * EIGHT), aligned(2), may_alias));

/* n bits from number i on, which do not lie in two words. */
static inline unsigned bits_at(const uint64_t *bits, size_t i, unsigned n)
{
    return (unsigned)(bits[i / 64] >> i % 64) & ((1u << n) - 1);
}

/* Each of s numbers becomes eight. */
static void split_eight(size_t s, const uint64_t *bits, const uint16_t *from, uint16_t *to)
{
    for (size_t j = 0; j < s; j++) {
        unsigned all = bits_at(bits, s + j, 1) | bits_at(bits, 2 * (s + j), 2) << 1 |
                       bits_at(bits, 4 * (s + j), 4) << 3;
        *(eight *)(to + EIGHT * j) = *(const eight *)turned[all] | (uint16_t)(EIGHT * from[j]);
    }
}

/* Each of s numbers becomes two, the even one first, or second where its bit is set. */
static void split_two(size_t s, const uint64_t *bits, const uint16_t *from, uint16_t *to)
{
    for (size_t j = 0; j < s; j++) {
        uint16_t first = (uint16_t)(2u * from[j] | bits_at(bits, s + j, 1));
        to[2 * j] = first;
        to[2 * j + 1] = first ^ 1;
    }
}

static void nest(unsigned log2, const uint64_t *bits, uint16_t *spare, uint16_t *place)
{
    unsigned levels = log2 % LEVELS, steps = levels + log2 / LEVELS;
    uint16_t *here = steps % 2 ? spare : place, *there = steps % 2 ? place : spare;
    here[0] = 0;
    for (unsigned k = 0; k < log2; k += k < levels ? 1 : LEVELS) {
        if (k < levels)
            split_two((size_t)1 << k, bits, here, there);
        else
            split_eight((size_t)1 << k, bits, here, there);
        uint16_t *last = here;
        here = there;
        there = last;
    }
}

static void shift(size_t n, double location, double scale, double *x)
{
    for (size_t i = 0; i < n; i++)
        x[i] = location + scale * x[i];
}

const struct draw_kernels ISA_NAME(draw_kernels) = {jitter, cells, cells_at, chances,
                                                    steps,  net,   nest,     shift};
