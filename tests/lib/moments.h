/* SPDX-License-Identifier: GPL-3.0-or-later */
/* At which moments the fault tests strike.
 *
 * The plain build by gcc strikes at every one. A build with the address sanitizer is ten times
 * slower and looks for something else, wrong memory on the ways back; one by clang has the
 * same ways and differs in its code alone: there every MOMENT_STEP-th moment must do. The step
 * is prime to the strides at which jobs are done again. */
#ifndef TESTS_MOMENTS_H
#define TESTS_MOMENTS_H

#if defined(__SANITIZE_ADDRESS__) || defined(__clang__)
#define MOMENTS_ARE_DEAR 1
#endif

#ifdef MOMENTS_ARE_DEAR
enum { MOMENT_STEP = 7 };
#else
enum { MOMENT_STEP = 1 };
#endif

#endif
