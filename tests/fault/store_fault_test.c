/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What happens to a register when the disk fails, fills up, loses power, when memory
 * runs out, when the process is killed: each at every single moment of a commit, until
 * the commit comes through. Afterwards the entry is wholly there or not at all, the
 * audit finds nothing, and the same commit made again works. */
#include <check.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "failmem.h"
#include "moments.h"
#include "sample.h"
#include "scene.h"
#include "store/internal.h"

/* --- the job --- */

/* Entry 1: the sample. */
static void make_first(struct arena *a, const char *path)
{
    struct store *s;
    struct sample t;
    uint64_t seq;
    ohmen_error e = OHMEN_ERROR_INIT;
    scene_must(store_create(path, &e), &e);
    struct arena *writing = arena_child(a);
    scene_must(store_open(writing, path, STORE_WRITE, &s, &e), &e);
    sample_begin(&t, writing, 0);
    sample_fill(&t);
    scene_must(store_commit(s, sample_transaction(&t), &seq, &e), &e);
    arena_free(writing);
}

/* A realistic entry: new, changed and removed objects of several kinds, observations. */
static void second_entry(struct sample *t, struct arena *a, bool settings)
{
    sample_begin(t, a, 1);
    if (settings)
        sample_change(t, KIND_REGISTER, REGISTER_ID, 73);
    sample_change(t, KIND_HAZARD, "H-1", 70);
    sample_change(t, KIND_HAZARD, "H-2", 71);
    sample_change(t, KIND_SCHEME, "C-1", 72);
    sample_remove(t, KIND_DECISION, "D-1");
    for (unsigned i = 0; i < 6; i++)
        sample_change(t, KIND_ELEMENT, arena_printf(a, "E-%u", i + 10), i);
    sample_observe(t, "log-30", 20003, "V-1");
    sample_observe(t, "log-31", 20004, "V-1");
}

static ohmen_status commit_second(void *settings, const char *vfs, struct arena *a,
                                  const char *path, ohmen_error *e)
{
    struct store *s;
    struct sample t;
    uint64_t seq;
    ohmen_status status = store_open_on(vfs, a, path, STORE_WRITE, &s, e);
    if (status != OHMEN_OK)
        return status;
    second_entry(&t, a, settings != NULL);
    status = store_commit(s, sample_transaction(&t), &seq, e);
    if (status == OHMEN_OK && seq != 2)
        return error_set(e, OHMEN_INTERNAL, "the entry is number %llu", (unsigned long long)seq);
    return status;
}

/* With `settings` the entry changes the settings too: all derived tables are made anew. */
static struct scene commit_scene(bool settings)
{
    static int yes;
    return scene_new(make_first, commit_second, settings ? &yes : NULL);
}

/* Every operation is struck; behind each of these the commit is also made again. */
enum { RETRY_EACH = 5 };

/* --- the disk --- */

static void fail_everywhere(bool settings)
{
    struct scene c = commit_scene(settings);
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, failed = 0;
    for (; scene_struck(&c, SHIM_FAIL, k, 0, &status, &e); k += MOMENT_STEP) {
        if (status != OHMEN_OK)
            failed++;
        ck_assert(status == OHMEN_OK || status == OHMEN_IO || status == OHMEN_REGISTER);
        bool whole = scene_whole(&c, status, true);
        if (k % RETRY_EACH == 0)
            scene_retry(&c, whole);
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(k, 40);
    ck_assert_uint_ge(failed, k / (3 * MOMENT_STEP));
    arena_free(c.a);
}

START_TEST(failing_io_leaves_all_or_nothing)
{
    fail_everywhere(false);
}
END_TEST

START_TEST(failing_io_during_a_rebuild_leaves_all_or_nothing)
{
    fail_everywhere(true);
}
END_TEST

START_TEST(a_full_disk_leaves_all_or_nothing)
{
    struct scene c = commit_scene(false);
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, told = 0;
    for (; scene_struck(&c, SHIM_FULL, k, 0, &status, &e); k += MOMENT_STEP) {
        ck_assert(status == OHMEN_OK || status == OHMEN_IO);
        if (status == OHMEN_IO && strstr(e.text, "no room left"))
            told++;
        bool whole = scene_whole(&c, status, true);
        if (k % RETRY_EACH == 0)
            scene_retry(&c, whole);
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(told, 10 / MOMENT_STEP);
    arena_free(c.a);
}
END_TEST

/* Seed 0 loses all that was not synced; the others keep a random subset of sectors. */
static void cut_everywhere(bool settings, uint64_t seeds)
{
    struct scene c = commit_scene(settings);
    size_t cuts = 0, there = 0;
    for (uint64_t seed = 0; seed < seeds; seed++) {
        ohmen_status status;
        ohmen_error e;
        size_t k = 0;
        for (; scene_struck(&c, SHIM_POWER, k, seed ? seed * 1000 + k : 0, &status, &e);
             k += MOMENT_STEP) {
            bool whole = scene_whole(&c, status, false);
            there += whole;
            cuts++;
            if ((k + seed) % RETRY_EACH == 0)
                scene_retry(&c, whole);
        }
        ck_assert_int_eq(status, OHMEN_OK);
        ck_assert(scene_whole(&c, status, true));
        ck_assert_uint_ge(k, 40);
    }
    if (MOMENT_STEP == 1)
        ck_assert_uint_ge(there, seeds - 1); /* after the commit, while it is closed */
    ck_assert_uint_ge(cuts - there, 30 * seeds / MOMENT_STEP);
    arena_free(c.a);
}

START_TEST(a_power_cut_leaves_all_or_nothing)
{
    cut_everywhere(false, 5);
}
END_TEST

START_TEST(a_power_cut_during_a_rebuild_leaves_all_or_nothing)
{
    cut_everywhere(true, 2);
}
END_TEST

/* --- creation --- */

START_TEST(failing_io_leaves_no_half_register)
{
    struct arena *a = arena_new(NULL);
    const char *path = arena_printf(a, "%s/new.ohmen", sample_folder(a));
    size_t k = 0;
    for (;; k++) {
        struct shim f;
        struct stat st;
        ohmen_error e = OHMEN_ERROR_INIT;
        shim_install(&f, "shim", SHIM_FAIL, k);
        ohmen_status status = store_create_on("shim", NULL, path, &e);
        shim_remove(&f);
        ck_assert_int_eq(stat(path, &st) == 0, status == OHMEN_OK);
        if (!f.struck)
            break;
        if (status == OHMEN_OK) {
            struct store *s;
            struct arena *reading = arena_child(a);
            scene_must(store_open(reading, path, STORE_WRITE, &s, &e), &e);
            arena_free(reading);
            unlink(path);
        }
    }
    ck_assert_uint_ge(k, 20);
    arena_free(a);
}
END_TEST

START_TEST(failing_io_leaves_no_half_backup)
{
    struct arena *a = arena_new(NULL);
    const char *path = arena_printf(a, "%s/quay.ohmen", sample_folder(a));
    const char *copy = arena_printf(a, "%s.copy", path);
    size_t k = 0, failed = 0;
    make_first(a, path);
    for (;; k++) {
        struct shim f;
        struct stat st;
        struct store *s;
        ohmen_error e = OHMEN_ERROR_INIT;
        struct arena *copying = arena_child(a);
        shim_install(&f, "shim", SHIM_FAIL, k);
        ohmen_status status = store_open_on("shim", copying, path, STORE_READ, &s, &e);
        if (status == OHMEN_OK)
            status = store_backup(s, copy, &e);
        arena_free(copying);
        shim_remove(&f);
        failed += status != OHMEN_OK;
        ck_assert_int_eq(stat(copy, &st) == 0, status == OHMEN_OK);
        unlink(copy);
        if (!f.struck)
            break;
    }
    ck_assert_uint_ge(failed, k / 3);
    ck_assert_uint_ge(k, 100);
    arena_free(a);
}
END_TEST

/* --- memory --- */

static ohmen_status commit_with(const struct scene *c, const struct mem *mem)
{
    jmp_buf out_of_memory;
    struct arena *a = arena_new(mem);
    if (!a)
        return OHMEN_MEMORY;
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return OHMEN_MEMORY;
    }
    arena_guard(a, &out_of_memory);
    ohmen_status status = c->job(c->ctx, NULL, a, c->path, NULL);
    arena_free(a);
    return status;
}

START_TEST(failing_allocations_leave_nothing)
{
    struct scene c = commit_scene(false);
    for (size_t k = 0;; k += MOMENT_STEP) {
        struct failmem f;
        scene_back(&c);
        failmem_init(&f, k);
        ohmen_status status = commit_with(&c, &f.mem);
        failmem_check(&f);
        if (!f.failed) {
            ck_assert_int_eq(status, OHMEN_OK);
            ck_assert_uint_ge(k, 20);
            break;
        }
        ck_assert_int_eq(status, OHMEN_MEMORY);
        scene_retry(&c, scene_whole(&c, status, true));
    }
    arena_free(c.a);
}
END_TEST

/* Runs a job on a path with memory that fails at every k in turn; returns how often. */
static size_t starve(ohmen_status (*job)(struct arena *, const char *), const char *path)
{
    for (size_t k = 0;; k++) {
        jmp_buf out_of_memory;
        struct failmem f;
        failmem_init(&f, k);
        ohmen_status status = OHMEN_MEMORY;
        struct arena *a = arena_new(&f.mem);
        if (a && setjmp(out_of_memory) == 0) {
            arena_guard(a, &out_of_memory);
            status = job(a, path);
        }
        arena_free(a);
        failmem_check(&f);
        if (!f.failed) {
            ck_assert_int_eq(status, OHMEN_OK);
            return k;
        }
        ck_assert_int_eq(status, OHMEN_MEMORY);
    }
}

static ohmen_status read_all(struct arena *a, const char *path)
{
    struct store *s;
    struct store_findings found = {0};
    const char *dump;
    ohmen_status status = store_open(a, path, STORE_READ, &s, NULL);
    if (status == OHMEN_OK)
        status = sample_dump(a, s, UINT64_MAX, &dump, NULL);
    if (status == OHMEN_OK)
        status = store_verify(s, &found, NULL);
    return status == OHMEN_OK && found.n > 0 ? OHMEN_REGISTER : status;
}

START_TEST(failing_allocations_do_not_harm_readers)
{
    struct arena *a = arena_new(NULL);
    const char *path = arena_printf(a, "%s/quay.ohmen", sample_folder(a));
    make_first(a, path);
    ck_assert_uint_ge(starve(read_all, path), 20);
    arena_free(a);
}
END_TEST

static ohmen_status create_with(struct arena *a, const char *path)
{
    ohmen_status status = store_create_on(NULL, arena_mem(a), path, NULL);
    struct stat st;
    ck_assert_int_eq(stat(path, &st) == 0, status == OHMEN_OK);
    return status;
}

START_TEST(failing_allocations_leave_no_half_register)
{
    struct arena *a = arena_new(NULL);
    const char *path = arena_printf(a, "%s/new.ohmen", sample_folder(a));
    ck_assert_uint_ge(starve(create_with, path), 10);
    arena_free(a);
}
END_TEST

/* SQLite's own memory: a limit that is raised until the commit comes through. The limit
 * counts what is in use by the whole process, which here is what one register needs. */
START_TEST(sqlites_memory_leaves_nothing)
{
    struct scene c = commit_scene(false);
    sqlite3_int64 least = 16384, step = 8192, limit;
    size_t failed = 0;
    for (limit = least;; limit += step) {
        scene_back(&c);
        struct arena *a = arena_new(NULL);
        ohmen_error e = OHMEN_ERROR_INIT;
        sqlite3_hard_heap_limit64(sqlite3_memory_used() + limit);
        ohmen_status status = c.job(c.ctx, NULL, a, c.path, &e);
        sqlite3_hard_heap_limit64(0);
        arena_free(a);
        scene_whole(&c, status, true);
        if (status == OHMEN_OK)
            break;
        ck_assert_int_eq(status, OHMEN_MEMORY);
        failed++;
    }
    ck_assert_uint_ge(failed, 20);
    arena_free(c.a);
}
END_TEST

/* --- kill -9 --- */

/* Every operation of opening, committing and closing is a moment: more than 200. */
START_TEST(killed_at_any_moment)
{
    struct scene c = commit_scene(false);
    size_t k = 0, there = 0;
    for (; scene_killed(&c, k); k += MOMENT_STEP) {
        bool whole = scene_whole(&c, OHMEN_IO, false);
        there += whole;
        if (k % RETRY_EACH == 0)
            scene_retry(&c, whole);
    }
    ck_assert(scene_whole(&c, OHMEN_OK, true));
    ck_assert_uint_ge(k, 200);
    if (MOMENT_STEP == 1)
        ck_assert_uint_ge(there, 1);
    ck_assert_uint_le(there, k - 1);
    arena_free(c.a);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("store fault");
    TCase *tc = tcase_create("fault");
    tcase_set_timeout(tc, 1800);
    tcase_add_test(tc, failing_io_leaves_all_or_nothing);
    tcase_add_test(tc, a_full_disk_leaves_all_or_nothing);
    tcase_add_test(tc, a_power_cut_leaves_all_or_nothing);
    tcase_add_test(tc, failing_io_during_a_rebuild_leaves_all_or_nothing);
    tcase_add_test(tc, a_power_cut_during_a_rebuild_leaves_all_or_nothing);
    tcase_add_test(tc, failing_io_leaves_no_half_register);
    tcase_add_test(tc, failing_io_leaves_no_half_backup);
    tcase_add_test(tc, failing_allocations_leave_nothing);
    tcase_add_test(tc, failing_allocations_do_not_harm_readers);
    tcase_add_test(tc, failing_allocations_leave_no_half_register);
    tcase_add_test(tc, sqlites_memory_leaves_nothing);
    tcase_add_test(tc, killed_at_any_moment);
    suite_add_tcase(suite, tc);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || !run ? EXIT_FAILURE : EXIT_SUCCESS;
}
