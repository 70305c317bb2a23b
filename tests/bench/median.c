/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The clocks, medians and threads of the bench programs. Owns nothing. */
#include "median.h"

#include <math.h>
#include <pthread.h>
#include <stdbool.h>
#include <stdio.h>
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

/* ---- threads ---- */

enum { COUNTING = 40000000 };

static void *count(void *to)
{
    volatile long *x = to;
    for (long i = 0; i < COUNTING; i++)
        *x += i;
    return NULL;
}

/* Twice the same, one after the other, or at the same time. */
static double time_counting(bool together)
{
    long first = 0, second = 0;
    pthread_t thread;
    double begin = bench_now();
    bool has_thread = together && pthread_create(&thread, NULL, count, &first) == 0;
    if (!has_thread)
        count(&first);
    count(&second);
    if (has_thread)
        pthread_join(thread, NULL);
    return bench_now() - begin;
}

void bench_tell_threads(double one[RUNS], double two[RUNS])
{
    double apart[RUNS], together[RUNS], load = NAN;
    for (int i = 0; i < RUNS; i++) {
        apart[i] = time_counting(false);
        together[i] = time_counting(true);
    }
    getloadavg(&load, 1);
    printf("  two threads: %.2f times by the medians, %.2f by the best; a loop that counts %.2f, "
           "%.2f; load %.1f\n",
           bench_median(one) / bench_median(two), bench_least(one) / bench_least(two),
           bench_median(apart) / bench_median(together), bench_least(apart) / bench_least(together),
           load);
}
