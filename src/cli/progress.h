/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Progress on a terminal: one line on standard error that is drawn over itself, from two
 * seconds on and twice a second, and wiped away at the end. A thread of its own draws
 * it, so that a long step without news shows too. Nothing, and no thread, where standard
 * error is no terminal. */
#ifndef CLI_PROGRESS_H
#define CLI_PROGRESS_H

#include <pthread.h>
#include <stdbool.h>

#include <ohmen/ohmen.h>

struct progress {
    bool running; /* the thread is there */
    pthread_t thread;
    pthread_mutex_t lock; /* of what follows */
    pthread_cond_t ended;
    bool over;
    const char *phase; /* NULL: nothing to tell yet */
    size_t done, total;
};

void progress_begin(struct progress *p);
/* An ohmen_progress; ctx is the struct progress. */
void progress_show(void *ctx, const char *phase, size_t done, size_t total);
/* Wipes the line; may be called more than once. */
void progress_end(struct progress *p);

#endif
