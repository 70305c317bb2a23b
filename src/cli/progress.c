/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The progress line. Owns nothing; the clock is the monotonic one, so that setting the
 * time of day does not matter. */
#include "cli/progress.h"

#include <stdio.h>
#include <unistd.h>

enum { QUIET_SECONDS = 2, LINE = 40 };

void progress_begin(struct progress *p)
{
    *p = (struct progress){.terminal = isatty(STDERR_FILENO) == 1};
    clock_gettime(CLOCK_MONOTONIC, &p->begun);
}

static double seconds_since(const struct timespec *begun)
{
    struct timespec now;
    clock_gettime(CLOCK_MONOTONIC, &now);
    return (double)(now.tv_sec - begun->tv_sec) + 1e-9 * (double)(now.tv_nsec - begun->tv_nsec);
}

void progress_show(void *ctx, const char *phase, size_t done, size_t total)
{
    struct progress *p = ctx;
    char line[LINE + 1];
    if (!p->terminal || seconds_since(&p->begun) < QUIET_SECONDS)
        return;
    if (done > 0)
        snprintf(line, sizeof line, "%s, %zu of %zu", phase, done, total);
    else
        snprintf(line, sizeof line, "%s ...", phase);
    fprintf(stderr, "\r%-*s", LINE, line);
    fflush(stderr);
    p->shown = true;
}

void progress_end(struct progress *p)
{
    if (p->shown)
        fprintf(stderr, "\r%*s\r", LINE, "");
    p->shown = false;
}
