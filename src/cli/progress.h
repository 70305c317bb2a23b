/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Progress on a terminal: one line on standard error that is drawn over itself, from two
 * seconds on, and wiped away at the end. Nothing where standard error is no terminal. */
#ifndef CLI_PROGRESS_H
#define CLI_PROGRESS_H

#include <stdbool.h>
#include <time.h>

#include <ohmen/ohmen.h>

struct progress {
    struct timespec begun;
    bool terminal, shown;
};

void progress_begin(struct progress *p);
/* An ohmen_progress; ctx is the struct progress. */
void progress_show(void *ctx, const char *phase, size_t done, size_t total);
void progress_end(struct progress *p);

#endif
