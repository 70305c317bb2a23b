/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Loops over several threads: every step once, work spaces of one thread at a time. */
#include "base/parallel.h"
#include "base_test.h"

#include <stdatomic.h>

enum { STEPS = 1000 };

struct world {
    atomic_int taken[STEPS];
    atomic_int busy[PARALLEL_MOST];
    atomic_int clashes;
    size_t threads;
};

static void step(void *ctx, size_t worker, size_t i)
{
    struct world *w = ctx;
    if (worker >= w->threads || atomic_fetch_add(&w->busy[worker], 1) != 0)
        atomic_fetch_add(&w->clashes, 1);
    atomic_fetch_add(&w->taken[i], 1);
    atomic_fetch_sub(&w->busy[worker], 1);
}

START_TEST(every_step_is_taken_once)
{
    static const size_t threads[] = {1, 2, 3, PARALLEL_MOST}, steps[] = {0, 1, 2, 63, STEPS};
    for (size_t t = 0; t < 4; t++)
        for (size_t n = 0; n < 5; n++) {
            static struct world w;
            w = (struct world){.threads = threads[t]};
            parallel_do(threads[t], steps[n], step, &w);
            ck_assert_int_eq(w.clashes, 0);
            for (size_t i = 0; i < STEPS; i++)
                ck_assert_int_eq(w.taken[i], i < steps[n]);
        }
}
END_TEST

START_TEST(some_processor_is_there)
{
    ck_assert(parallel_processors() >= 1 && parallel_processors() <= PARALLEL_MOST);
}
END_TEST

Suite *suite_parallel(void)
{
    Suite *s = suite_create("parallel");
    TCase *t = tcase_create("parallel");
    tcase_add_test(t, every_step_is_taken_once);
    tcase_add_test(t, some_processor_is_there);
    suite_add_tcase(s, t);
    return s;
}
