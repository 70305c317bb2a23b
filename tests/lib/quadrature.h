/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Adaptive quadrature in long double, of several functions at once: an oracle for averages over
 * time. Gauss and Legendre's rule of twelve points on a stretch and on its halves, which are halved
 * until both agree, fourteen times at most (any textbook of numerical analysis); the nodes are
 * computed by Newton's method. Knows nothing of the program. */
#ifndef TESTS_QUADRATURE_H
#define TESTS_QUADRATURE_H

#include <stddef.h>

#define QUADRATURE_FUNCTIONS 96

/* Fills out[0 .. n) with the functions at t. */
typedef void quadrature_function(void *ctx, long double t, long double *out);

/* Adds to sum[0 .. n) the integrals from a to b (a <= b; n <= QUADRATURE_FUNCTIONS) of functions
 * that are smooth inside; they are never asked for at a or b themselves. Within 1e-15 of the
 * integral of their magnitude, relative. */
void quadrature_add(quadrature_function *f, void *ctx, size_t n, long double a, long double b,
                    long double *sum);

#endif
