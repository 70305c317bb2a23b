/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A loop over several threads.
 *
 * Steps are taken in rising order by whichever thread is free, so they must not depend on one
 * another, nor on which thread takes them: then the result does not depend on their number. */
#ifndef BASE_PARALLEL_H
#define BASE_PARALLEL_H

#include <stddef.h>

enum { PARALLEL_MOST = 64 }; /* threads */

/* `worker` is below the number of threads, and no two calls at the same time have the same one:
 * work space is kept by it. A step must not allocate from an arena that others use, and must not
 * jump out. */
typedef void parallel_step(void *ctx, size_t worker, size_t step);

/* Takes steps 0 .. n - 1 on up to `threads` threads (1 .. PARALLEL_MOST), of which the calling one
 * is worker 0; fewer where the system has no more to give. Returns when all are done. */
void parallel_do(size_t threads, size_t n, parallel_step *step, void *ctx);

/* How many processors this process may use: a good number of threads, at least 1, at most
 * PARALLEL_MOST. */
size_t parallel_processors(void);

#endif
