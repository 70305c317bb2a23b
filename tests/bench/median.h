/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Times of repeated runs: each measured side by side with the others, in turn, so that
 * whatever else the machine does meets all of them; the median is told. */
#ifndef TESTS_BENCH_MEDIAN_H
#define TESTS_BENCH_MEDIAN_H

#define RUNS 11

/* Milliseconds of a clock that never goes back. */
double bench_now(void);
/* Milliseconds that this thread has worked: others of the machine do not count. */
double bench_worked(void);

/* The median of RUNS times; sorts them. */
double bench_median(double times[RUNS]);
double bench_least(const double times[RUNS]);

/* How many threads wanted to run in the last minute, these among them; NAN: not to be known. */
double bench_load(void);

#endif
