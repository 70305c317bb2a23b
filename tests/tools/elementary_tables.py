#!/usr/bin/env python3
# SPDX-License-Identifier: GPL-3.0-or-later
"""Derives the numbers of src/math/elementary_core.h, elementary_tables.c and erfc.c.

  elementary_tables.py constants     the constants and coefficients, name = value
  elementary_tables.py tables        the whole of elementary_tables.c

Needs mpmath. Run by hand when a method changes; the unit test compares the tables
with MPFR, and the functions made of the coefficients too.
"""
import sys
from mpmath import mp, mpf, cos, erf, erfc, exp, floor, fsum, log, log1p, pi, sqrt

mp.prec = 400
STEPS = 128
LN2 = log(2)


def rounded(x, bits):
    """x to so many significant bits, nearest."""
    with mp.workprec(bits):
        return +mpf(x)


def on_grid(x, bits):
    """The multiple of 2^-bits nearest to x."""
    return floor(x * mpf(2)**bits + mpf(1) / 2) / mpf(2)**bits


def literal(x):
    return float(rounded(x, 53)).hex()


def interpolate(f, low, high, n):
    """Coefficients, lowest first, of the polynomial of degree n - 1 through f at the n
    Chebyshev nodes of [low, high], whose error is within a small factor of the least."""
    nodes = [(low + high) / 2 + (high - low) / 2 * cos(pi * (2 * i + 1) / (2 * n))
             for i in range(n)]
    matrix = mp.matrix(n, n)
    for i in range(n):
        for k in range(n):
            matrix[i, k] = nodes[i]**k
    return list(mp.lu_solve(matrix, mp.matrix([f(x) for x in nodes])))


def series(f, n, samples=400):
    """Coefficients of T_0 .. T_(n-1) of f on [-1, 1]; the first is halved."""
    angles = [pi * (2 * i + 1) / (2 * samples) for i in range(samples)]
    values = [f(cos(a)) for a in angles]
    c = [2 * fsum(v * cos(k * a) for v, a in zip(values, angles)) / samples for k in range(n)]
    return [c[0] / 2] + c[1:]


def constants():
    half_step = LN2 / (2 * STEPS) * mpf('1.001')
    yield 'exp: x^3 .. x^6', interpolate(
        lambda x: (exp(x) - 1 - x - x * x / 2) / x**3, -half_step, half_step, 4)
    step = mpf(1) / (2 * STEPS) * mpf('1.001')
    yield 'log: x^3 .. x^8', interpolate(
        lambda x: (log1p(x) - x + x * x / 2) / x**3, -step, step, 6)
    yield 'steps of exp in 1', [STEPS / LN2]
    head = rounded(LN2 / STEPS, 34)
    yield 'a step of exp, head and tail', [head, LN2 / STEPS - head]
    head = on_grid(LN2, 42)
    yield 'ln 2, head and tail', [head, LN2 - head]
    head = rounded(1 / log(10), 26)
    yield '1 / ln 10, head and tail', [head, 1 / log(10) - head]
    near = interpolate(lambda t: erf(sqrt(t)) / sqrt(t), mpf(0), mpf(1) / 4, 10)
    yield 'erf(x) / x in x^2, |x| < 1/2', near
    yield 'tail of the first', [near[0] - rounded(near[0], 53)]

    def scaled(s):
        x = mpf('3.75') * (1 + s) / (1 - s)
        return (1 + 2 * x) * exp(x * x) * erfc(x)
    far = series(scaled, 30)
    yield '(1 + 2 x) exp(x^2) erfc(x), T_0 ..', far
    yield 'tail of the first', [far[0] - rounded(far[0], 53)]


HEAD = '''/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The tables of exp and log. Owns nothing; made by tests/tools/elementary_tables.py,
 * and compared with MPFR entry by entry in tests/unit/elementary_test.c. */
#include "math/elementary_core.h"
'''


def tables():
    print(HEAD)
    print('const struct elementary_exp_row elementary_exp_table[ELEMENTARY_STEPS] = {')
    for j in range(STEPS):
        value = mpf(2)**(mpf(j) / STEPS)
        head = rounded(value, 26)
        print('    {%s, %s},' % (literal(head), literal(value - head)))
    print('};\n')
    print('const struct elementary_log_row elementary_log_table[ELEMENTARY_STEPS + 1] = {')
    for j in range(STEPS + 1):
        centre = 1 + mpf(j) / STEPS
        inverse = rounded(1 / (centre if centre < sqrt(2) else centre / 2), 24)
        head = on_grid(-log(inverse), 42)
        print('    {%s, %s, %s},' % (literal(inverse), literal(head),
                                     literal(-log(inverse) - head)))
    print('};')


if sys.argv[1:] == ['tables']:
    tables()
elif sys.argv[1:] == ['constants']:
    for name, values in constants():
        print(name)
        for value in values:
            print('    %s  %s' % (literal(value), mp.nstr(value, 22)))
else:
    sys.exit(__doc__)
