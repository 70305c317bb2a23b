/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The discrete Fourier transform of 2^k complex numbers.
 *
 * Invariant: the same bits on any machine: the passes are GSL's, which only add and multiply, and
 * the sines are our own (sine_core.h). */
#ifndef MATH_FFT_H
#define MATH_FFT_H

#include "base/arena.h"

enum { FFT_MOST_LOG2 = 22 };

struct fft;

/* Of 2^log2 numbers, log2 <= FFT_MOST_LOG2. Lives in `a`; several threads may use it. */
struct fft *fft_new(struct arena *a, unsigned log2);

/* In place: x has real and imaginary parts in turn, work as many doubles.
 *     forward: X_k = sum_j x_j exp(-2 pi i j k / n);  inverse: the other sign, over n */
void fft_forward(const struct fft *f, double *x, double *work);
void fft_inverse(const struct fft *f, double *x, double *work);

#endif
