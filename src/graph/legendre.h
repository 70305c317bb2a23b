/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Gauss-Legendre quadrature on 0 .. 1 (Abramowitz and Stegun, 25.4.29 and .30), and how far
 * each rule reaches for the functions that averages are made of. */
#ifndef GRAPH_LEGENDRE_H
#define GRAPH_LEGENDRE_H

#include <stddef.h>

enum { LEGENDRE_RULES = 9, LEGENDRE_ORDERS = 17, LEGENDRE_MOST = 16 };

struct legendre_node {
    double at, weight; /* weights of a rule sum up to 1 */
};

struct legendre_rule {
    size_t n; /* rising; the last has LEGENDRE_MOST */
    const struct legendre_node *nodes;
};
extern const struct legendre_rule legendre_rules[LEGENDRE_RULES];

/* legendre_reach[c][j][r]: what rule r integrates to 1e-12 (c = 0) or 1e-7 (c = 1) relative:
 * products of exponentials exp(-s t) and of at most j factors 1 - exp(-s t), on a piece of length
 * L, where the sum of all s L is at most this. Orders beyond the last are taken for the last. */
extern const double legendre_reach[2][LEGENDRE_ORDERS][LEGENDRE_RULES];

#endif
