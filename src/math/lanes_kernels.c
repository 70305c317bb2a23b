/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The functions of lanes.h, compiled once for each instruction set (base/isa.h). Owns nothing.
 *
 * Invariant: a value goes through the same operations wherever it stands: the last ones, too few
 * for a vector, are computed as a vector that is filled up. */
#define ELEMENTARY_VECTOR

#include "math/elementary.h"
#include "math/elementary_core.h"
#include "math/lanes_kernels.h"
#include "math/normal_core.h"

enum { LANES = ELEMENTARY_LANES };

static inline real load(const double *x)
{
    real v;
    memcpy(&v, x, sizeof v);
    return v;
}

static inline void store(double *y, real v)
{
    memcpy(y, &v, sizeof v);
}

/* The first n < LANES only. */
static inline real load_first(size_t n, const double *x)
{
    double v[LANES] = {0};
    memcpy(v, x, n * sizeof *x);
    return load(v);
}

static inline void store_first(size_t n, double *y, real v)
{
    memcpy(y, &v, n * sizeof *y);
}

#define OVER_ALL(name)                                                                             \
    static void name##_all(size_t n, const double *x, double *y)                                   \
    {                                                                                              \
        size_t i = 0;                                                                              \
        for (; i + LANES <= n; i += LANES)                                                         \
            store(y + i, elementary_##name(load(x + i)));                                          \
        if (i < n)                                                                                 \
            store_first(n - i, y + i, elementary_##name(load_first(n - i, x + i)));                \
    }

OVER_ALL(exp)
OVER_ALL(log)
OVER_ALL(log10)
OVER_ALL(expm1)
OVER_ALL(log1p)

static inline int in_all(truth t)
{
    uint64_t all = ~UINT64_C(0);
    for (int i = 0; i < LANES; i++)
        all &= (uint64_t)t[i];
    return all != 0;
}

/* Numbers that the core does not see to are left to the scalar function. */
static inline real pow_of(real x, real y)
{
    truth ordinary = (x > 0) & (x < INFINITY) & (y > -INFINITY) & (y < INFINITY);
    if (in_all(ordinary))
        return elementary_pow(x, y);
    real z = x;
    for (int i = 0; i < LANES; i++)
        z[i] = math_pow(x[i], y[i]);
    return z;
}

static void pow_all(size_t n, const double *x, const double *y, double *z)
{
    size_t i = 0;
    for (; i + LANES <= n; i += LANES)
        store(z + i, pow_of(load(x + i), load(y + i)));
    if (i < n)
        store_first(n - i, z + i, pow_of(load_first(n - i, x + i), load_first(n - i, y + i)));
}

/* Deviates are computed in blocks: the centre's for all, which is wrong in the tails; the tails
 * are brought together, so that whole vectors of them take the longer way. */
enum { BLOCK = 256 };

struct block {
    size_t n;
    double least[BLOCK]; /* the smaller of p and q */
    double side[BLOCK];  /* 1 where that is p, else -1 */
    size_t tails, at[BLOCK];
    double tail[BLOCK]; /* the tails' `least`, then the size of the deviate */
};

static inline void take(struct block *b, size_t i, real p, real q)
{
    store(b->least + i, elementary_choose(p <= q, p, q));
    store(b->side + i, elementary_choose(p <= q, elementary_every(1), elementary_every(-1)));
}

static void take_all(struct block *b, const double *p, const double *q)
{
    size_t n = b->n, i = 0;
    for (; i + LANES <= n; i += LANES)
        take(b, i, load(p + i), load(q + i));
    if (i < n)
        take(b, i, load_first(n - i, p + i), load_first(n - i, q + i));
}

static inline real centre_of(const struct block *b, size_t i)
{
    return load(b->side + i) * normal_centre(load(b->least + i) - 0.5);
}

static void centre_all(const struct block *b, double *z)
{
    size_t n = b->n, i = 0;
    for (; i + LANES <= n; i += LANES)
        store(z + i, centre_of(b, i));
    if (i < n)
        store_first(n - i, z + i, centre_of(b, i));
}

/* Without a branch, which would be guessed wrong too often. */
static void find_tails(struct block *b)
{
    size_t tails = 0;
    for (size_t i = 0; i < b->n; i++) {
        b->tail[tails] = b->least[i];
        b->at[tails] = i;
        tails += b->least[i] - 0.5 < -NORMAL_CENTRE;
    }
    b->tails = tails;
}

static inline real tail_of(real p)
{
    real root = normal_tail_root(p);
    truth near = root <= NORMAL_FAR;
    real z = normal_tail(root);
    return in_all(near) ? z : elementary_choose(near, z, normal_far_tail(root));
}

static void tails_all(struct block *b, double *z)
{
    for (size_t i = b->tails; i % LANES != 0; i++)
        b->tail[i] = 0.5;
    for (size_t i = 0; i < b->tails; i += LANES)
        store(b->tail + i, tail_of(load(b->tail + i)));
    for (size_t i = 0; i < b->tails; i++)
        z[b->at[i]] = b->side[b->at[i]] * -b->tail[i];
}

static void deviate_all(size_t n, const double *p, const double *q, double *z)
{
    struct block b;
    for (size_t i = 0; i < n; i += b.n) {
        b.n = n - i < BLOCK ? n - i : BLOCK;
        take_all(&b, p + i, q + i);
        centre_all(&b, z + i);
        find_tails(&b);
        tails_all(&b, z + i);
    }
}

const struct lanes_functions ISA_NAME(lanes_kernels) = {
    .exp = exp_all,
    .log = log_all,
    .log10 = log10_all,
    .expm1 = expm1_all,
    .log1p = log1p_all,
    .pow = pow_all,
    .deviate = deviate_all,
};
