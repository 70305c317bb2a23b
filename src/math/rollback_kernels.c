/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Kernels of rolling back (rollback_kernels.h), compiled once for each instruction set. Owns
 * nothing.
 *
 * Loops are over nodes, which compilers turn into vectors where the number of children is known:
 * so the usual numbers have a loop of their own. What is done to a node is the same in all. */
#include "math/rollback_kernels.h"

/* OVER_ARITIES(f, ...) calls f(..., arity) with a number that the compiler knows. */
#define OVER_ARITIES(f, arity, ...)                                                                \
    switch (arity) {                                                                               \
    case 1: f(__VA_ARGS__, 1); break;                                                              \
    case 2: f(__VA_ARGS__, 2); break;                                                              \
    case 3: f(__VA_ARGS__, 3); break;                                                              \
    case 4: f(__VA_ARGS__, 4); break;                                                              \
    case 5: f(__VA_ARGS__, 5); break;                                                              \
    case 6: f(__VA_ARGS__, 6); break;                                                              \
    case 8: f(__VA_ARGS__, 8); break;                                                              \
    default: f(__VA_ARGS__, arity); break;                                                         \
    }

static void end(size_t n, const double *restrict amount, double *restrict value)
{
    for (size_t i = 0; i < n; i++)
        value[i] = amount[i];
}

static inline void choose_each(size_t n, const double *restrict amount,
                               const double *restrict child, double *restrict value, size_t arity)
{
    for (size_t i = 0; i < n; i++) {
        double best = child[i * arity];
        for (size_t k = 1; k < arity; k++)
            best = child[i * arity + k] > best ? child[i * arity + k] : best;
        value[i] = amount[i] + best;
    }
}

static void choose(size_t n, uint32_t arity, const double *amount, const double *child,
                   double *value)
{
    OVER_ARITIES(choose_each, arity, n, amount, child, value)
}

static inline void chance_each(size_t n, const double *restrict amount, const double *restrict p,
                               const double *restrict child, double *restrict value, size_t arity)
{
    for (size_t i = 0; i < n; i++) {
        double sum = p[i * arity] * child[i * arity];
        for (size_t k = 1; k < arity; k++)
            sum += p[i * arity + k] * child[i * arity + k];
        value[i] = amount[i] + sum;
    }
}

static void chance(size_t n, uint32_t arity, const double *amount, const double *p,
                   const double *child, double *value)
{
    OVER_ARITIES(chance_each, arity, n, amount, p, child, value)
}

static inline void pick_each(size_t n, const double *restrict child, uint32_t *restrict chosen,
                             size_t arity)
{
    for (size_t i = 0; i < n; i++) {
        double best = child[i * arity];
        uint32_t at = 0;
        for (size_t k = 1; k < arity; k++) {
            at = child[i * arity + k] > best ? (uint32_t)k : at;
            best = child[i * arity + k] > best ? child[i * arity + k] : best;
        }
        chosen[i] = at;
    }
}

static void pick(size_t n, uint32_t arity, const double *child, uint32_t *chosen)
{
    OVER_ARITIES(pick_each, arity, n, child, chosen)
}

const struct rollback_kernels ISA_NAME(rollback_kernels) = {end, choose, chance, pick};
