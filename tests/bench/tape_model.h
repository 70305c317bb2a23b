/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The model of tests/bench/tape.c as one loop written by hand, compiled once for each instruction
 * set, with the options of the kernels: 40 operations a hazard. With inputs x and constants c,
 *     rate = x0 c0                exposed = rate c1
 *     p[i] = min(x[1 + i] c[2 + i]; 1), i = 0 .. 3         q[i] = 1 - p[i], i = 0 .. 2
 *     a = p1 c6 + q1 c7           b = p2 c8 + q2 c9        harm = p0 a + q0 b
 *     n = x5 c10                  m = x6 c11               e1 = exposed p0, e2 = exposed q0
 *     risk = c14 SUM(e1 p3 n; e1 m a; e2 n b; e2 m c12; exposed harm c13; rate m c12)
 * which is 2 + 8 + 3 + 9 + 2 + 2 + 12 + 1 + 1; SUM compensates six times. */
#ifndef TESTS_BENCH_TAPE_MODEL_H
#define TESTS_BENCH_TAPE_MODEL_H

#include "base/isa.h"

#include <stddef.h>

enum { MODEL_INPUTS = 7, MODEL_CONSTANTS = 15, MODEL_OPERATIONS = 40 };

typedef void tape_model(size_t n, const double *const *x, const double *c, double *risk);

#define X(name, needs) tape_model tape_model_##name;
ISAS(X)
#undef X

#endif
