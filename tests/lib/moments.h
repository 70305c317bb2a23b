/* SPDX-License-Identifier: GPL-3.0-or-later */
/* At which moments the fault tests strike.
 *
 * Plain builds strike at every one. A build with the address sanitizer is ten times slower
 * and looks for something else, wrong memory on the ways back: there every MOMENT_STEP-th
 * moment must do. The step is prime to the strides at which jobs are done again. */
#ifndef TESTS_MOMENTS_H
#define TESTS_MOMENTS_H

#if defined(__SANITIZE_ADDRESS__)
#define MOMENTS_ARE_DEAR 1
#elif defined(__has_feature)
#if __has_feature(address_sanitizer)
#define MOMENTS_ARE_DEAR 1
#endif
#endif

#ifdef MOMENTS_ARE_DEAR
enum { MOMENT_STEP = 7 };
#else
enum { MOMENT_STEP = 1 };
#endif

#endif
