/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The progress line and the thread that draws it. The clock is the monotonic one, so that
 * setting the time of day does not matter. Invariant: between progress_end and the next
 * line of output nothing is on the terminal's line. */
#include "cli/progress.h"

#include <stdio.h>
#include <time.h>
#include <unistd.h>

enum { QUIET_MILLISECONDS = 2000, REDRAW_MILLISECONDS = 500, LINE = 40 };

static void draw(const struct progress *p)
{
    char line[LINE + 1];
    if (!p->phase)
        return;
    if (p->done > 0)
        snprintf(line, sizeof line, "%s, %zu of %zu", p->phase, p->done, p->total);
    else
        snprintf(line, sizeof line, "%s ...", p->phase);
    fprintf(stderr, "\r%-*s", LINE, line);
    fflush(stderr);
}

/* Waits until the end or for so long; the lock is held. */
static void wait_for(struct progress *p, long milliseconds)
{
    struct timespec until;
    clock_gettime(CLOCK_MONOTONIC, &until);
    until.tv_sec += milliseconds / 1000;
    until.tv_nsec += milliseconds % 1000 * 1000000;
    if (until.tv_nsec >= 1000000000) {
        until.tv_nsec -= 1000000000;
        until.tv_sec++;
    }
    while (!p->over && pthread_cond_timedwait(&p->ended, &p->lock, &until) == 0)
        ;
}

static void *run(void *ctx)
{
    struct progress *p = ctx;
    bool shown = false;
    pthread_mutex_lock(&p->lock);
    wait_for(p, QUIET_MILLISECONDS);
    while (!p->over) {
        draw(p);
        shown = shown || p->phase;
        wait_for(p, REDRAW_MILLISECONDS);
    }
    if (shown)
        fprintf(stderr, "\r%*s\r", LINE, "");
    pthread_mutex_unlock(&p->lock);
    return NULL;
}

void progress_begin(struct progress *p)
{
    pthread_condattr_t clock;
    *p = (struct progress){0};
    if (isatty(STDERR_FILENO) != 1)
        return;
    pthread_mutex_init(&p->lock, NULL);
    pthread_condattr_init(&clock);
    pthread_condattr_setclock(&clock, CLOCK_MONOTONIC);
    pthread_cond_init(&p->ended, &clock);
    pthread_condattr_destroy(&clock);
    p->running = pthread_create(&p->thread, NULL, run, p) == 0;
}

void progress_show(void *ctx, const char *phase, size_t done, size_t total)
{
    struct progress *p = ctx;
    if (!p->running)
        return;
    pthread_mutex_lock(&p->lock);
    p->phase = phase;
    p->done = done;
    p->total = total;
    pthread_mutex_unlock(&p->lock);
}

void progress_end(struct progress *p)
{
    if (!p->running)
        return;
    pthread_mutex_lock(&p->lock);
    p->over = true;
    pthread_cond_signal(&p->ended);
    pthread_mutex_unlock(&p->lock);
    pthread_join(p->thread, NULL);
    p->running = false;
}
