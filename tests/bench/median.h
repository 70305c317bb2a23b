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

/* Tells how much faster two threads were than one, by the medians and by the best of RUNS times of
 * the clock; beside it the same of a loop that only counts, measured now, which is what the machine
 * has to give at all; and how many threads wanted to run in the last minute. */
void bench_tell_threads(double one[RUNS], double two[RUNS]);

#endif
