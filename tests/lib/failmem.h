/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A memory seam that fails on order and knows what is still held.
 *
 * The way of a fault test: fail allocation 0, then 1, 2, ... until the job
 * comes through, and see each time that the right error came and that nothing
 * was kept:
 *
 *     for (size_t k = 0;; k++) {
 *         struct failmem f;
 *         failmem_init(&f, k);
 *         status = job(&f.mem);
 *         failmem_check(&f);
 *         if (!f.failed) break;             // it came through: check its result
 *         ck_assert_int_eq(status, OHMEN_MEMORY);
 *     }
 *
 * Invariant: every block that is resized or freed was given out here, with the
 * size that the caller says; anything else aborts. Blocks carry guard bytes at
 * both ends, and are filled with garbage when given out and when freed. */
#ifndef TESTS_FAILMEM_H
#define TESTS_FAILMEM_H

#include <stdbool.h>

#include "base/arena.h"

#define FAILMEM_NEVER SIZE_MAX

struct failmem {
    struct mem mem;     /* hand &f->mem to the code under test */
    size_t fail_at;     /* number of the first allocation that fails, from 0 */
    bool once;          /* set after init: only that one fails, later ones work */
    size_t allocations; /* asked for so far: new blocks and growing ones */
    size_t failed;      /* of these, refused */
    size_t blocks, bytes; /* held now */
    size_t peak;          /* most bytes held at one time */
};

/* A seam whose allocations fail from number fail_at on. `f` must not move. */
void failmem_init(struct failmem *f, size_t fail_at);

/* Aborts with a message when anything is still held. */
void failmem_check(const struct failmem *f);

#endif
