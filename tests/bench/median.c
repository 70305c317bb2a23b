/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The clock and the median of the bench programs. Owns nothing. */
#include "median.h"

#include <math.h>
#include <stdlib.h>
#include <time.h>

static double milliseconds(clockid_t clock)
{
    struct timespec t;
    clock_gettime(clock, &t);
    return (double)t.tv_sec * 1e3 + (double)t.tv_nsec / 1e6;
}

double bench_now(void)
{
    return milliseconds(CLOCK_MONOTONIC);
}

double bench_worked(void)
{
    return milliseconds(CLOCK_THREAD_CPUTIME_ID);
}

static int by_size(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

double bench_median(double times[RUNS])
{
    qsort(times, RUNS, sizeof *times, by_size);
    return times[RUNS / 2];
}

double bench_least(const double times[RUNS])
{
    double least = times[0];
    for (int i = 1; i < RUNS; i++)
        least = times[i] < least ? times[i] : least;
    return least;
}

double bench_load(void)
{
    double load;
    return getloadavg(&load, 1) == 1 ? load : NAN;
}
