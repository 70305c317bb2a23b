/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The loop over several threads (parallel.h). Threads live for one loop; they take the next step
 * from a counter. Owns nothing beyond the loop. */
#include "base/parallel.h"

#include <assert.h>
#include <pthread.h>
#include <stdatomic.h>
#include <unistd.h>

struct loop {
    atomic_size_t next;
    size_t n;
    parallel_step *step;
    void *ctx;
};

struct worker {
    struct loop *loop;
    size_t number;
    pthread_t thread;
};

static void *work(void *ctx)
{
    const struct worker *w = ctx;
    struct loop *l = w->loop;
    for (size_t i; (i = atomic_fetch_add(&l->next, 1)) < l->n;)
        l->step(l->ctx, w->number, i);
    return NULL;
}

void parallel_do(size_t threads, size_t n, parallel_step *step, void *ctx)
{
    assert(threads >= 1 && threads <= PARALLEL_MOST);
    struct loop l = {.n = n, .step = step, .ctx = ctx};
    struct worker workers[PARALLEL_MOST];
    size_t started = 1;
    workers[0] = (struct worker){.loop = &l};
    for (; started < threads && started < n; started++) {
        workers[started] = (struct worker){.loop = &l, .number = started};
        if (pthread_create(&workers[started].thread, NULL, work, &workers[started]) != 0)
            break;
    }
    work(&workers[0]);
    for (size_t i = 1; i < started; i++)
        pthread_join(workers[i].thread, NULL);
}

size_t parallel_processors(void)
{
    long n = sysconf(_SC_NPROCESSORS_ONLN);
    return n < 1 ? 1 : n > PARALLEL_MOST ? PARALLEL_MOST : (size_t)n;
}
