/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The import of the sample network through libohmen while the disk fails, fills up or
 * loses power, memory runs out, or the process is killed: each at every single moment.
 * Afterwards the register opens, the proof finds nothing, it holds wholly the old or
 * wholly the new, and the same import made again works. */
#include <check.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "failmem.h"
#include "moments.h"
#include "scene.h"
#include "work/work.h"

enum {
    FILES = 6,
    KILLS = 200 / MOMENT_STEP,
    RETRIES = 6 /* at every which moment the import is made again: it costs the most */
};

static const char *source; /* the folder of the sources, from the command line */

/* --- the register before, and what it may be afterwards --- */

struct import {
    const char *const *files;
    size_t n;
    const struct mem *mem;
};

static ohmen_status import_files(const char *path, const struct import *job, ohmen_error *e)
{
    ohmen_register *r = NULL;
    ohmen_report *out = NULL;
    ohmen_import_settings s = {
        .files = job->files, .n_files = job->n, .author = "A. Lindqvist", .reason = "Survey"};
    ohmen_status status = register_open(job->mem, path, OHMEN_WRITE, &r, e);
    if (status == OHMEN_OK)
        status = ohmen_import(r, &s, &out, e);
    ck_assert_int_eq(out != NULL, status == OHMEN_OK);
    ohmen_report_free(out);
    ohmen_close(r);
    return status;
}

/* The job of the scene. It opens the register by itself, on the usual file system. */
static ohmen_status import_sample(void *ctx, const char *vfs, struct arena *a, const char *path,
                                  ohmen_error *e)
{
    (void)vfs;
    (void)a;
    return import_files(path, ctx, e);
}

/* The same with memory from elsewhere. */
static ohmen_status import_with(const struct scene *c, const struct mem *mem, ohmen_error *e)
{
    struct import job = *(const struct import *)c->ctx;
    job.mem = mem;
    return import_files(c->path, &job, e);
}

/* Before: a small register of other things, which that of the hand calculations joins. */
static void make_other(struct arena *a, const char *path)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *good = arena_printf(a, "%s/tests/golden/bad/good.yaml", source);
    scene_must(ohmen_create(path, &e), &e);
    scene_must(import_files(path, &(struct import){.files = &good, .n = 1}, &e), &e);
}

/* The same import again gives the new content, whether it is there already or not. */
static struct scene import_scene(void)
{
    static const char *const names[FILES] = {"register.yaml", "network.yaml",   "hazards.yaml",
                                             "options.yaml",  "decisions.yaml", "observations.csv"};
    static char paths[FILES][4096];
    static const char *files[FILES];
    static struct import job = {.files = files, .n = FILES};
    for (size_t i = 0; i < FILES; i++) {
        snprintf(paths[i], sizeof paths[i], "%s/tests/published/hand/%s", source, names[i]);
        files[i] = paths[i];
    }
    struct scene c = scene_new(make_other, import_sample, &job);
    c.repeats = true;
    return c;
}

/* --- the disk --- */

START_TEST(failing_io)
{
    struct scene c = import_scene();
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, failed = 0;
    for (; scene_struck(&c, SHIM_FAIL, k, 0, &status, &e); k += MOMENT_STEP) {
        failed += status != OHMEN_OK;
        ck_assert_msg(status == OHMEN_OK || status == OHMEN_IO || status == OHMEN_REGISTER,
                      "operation %zu: status %d: %s", k, status, e.text);
        bool whole = scene_whole(&c, status, true);
        if (k % RETRIES == 0)
            scene_retry(&c, whole);
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(k, 100);
    ck_assert_uint_ge(failed, k / (3 * MOMENT_STEP));
    arena_free(c.a);
}
END_TEST

/* Every third moment: a write is seldom alone. */
START_TEST(a_full_disk)
{
    struct scene c = import_scene();
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, told = 0;
    for (; scene_struck(&c, SHIM_FULL, k, 0, &status, &e); k += 3 * MOMENT_STEP) {
        ck_assert(status == OHMEN_OK || status == OHMEN_IO);
        told += status == OHMEN_IO && strstr(e.text, "no room left") != NULL;
        scene_whole(&c, status, true);
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(told, 20 / MOMENT_STEP);
    scene_retry(&c, true);
    arena_free(c.a);
}
END_TEST

/* What was not synced is lost. */
START_TEST(a_power_cut)
{
    struct scene c = import_scene();
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, there = 0;
    for (; scene_struck(&c, SHIM_POWER, k, 0, &status, &e); k += MOMENT_STEP) {
        bool whole = scene_whole(&c, status, false);
        there += whole;
        if (k % RETRIES == 0)
            scene_retry(&c, whole);
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(k, 100);
    ck_assert_uint_le(there, k / 2);
    arena_free(c.a);
}
END_TEST

/* --- memory --- */

START_TEST(failing_allocations)
{
    struct scene c = import_scene();
    size_t k = 0;
    for (bool done = false; !done; k += MOMENT_STEP) {
        struct failmem f;
        ohmen_error e = OHMEN_ERROR_INIT;
        scene_back(&c);
        failmem_init(&f, k);
        ohmen_status status = import_with(&c, &f.mem, &e);
        failmem_check(&f);
        done = f.failed == 0;
        ck_assert_int_eq(status, done ? OHMEN_OK : OHMEN_MEMORY);
        ck_assert_int_eq(e.status, status);
        bool whole = scene_whole(&c, status, true);
        if (k % RETRIES == 0 || done)
            scene_retry(&c, whole);
    }
    ck_assert_uint_ge(k, 40);
    arena_free(c.a);
}
END_TEST

/* Only one fails, every seventh in turn, and what cleans up behind it has memory again. */
START_TEST(a_single_failing_allocation)
{
    struct scene c = import_scene();
    for (size_t k = 0;; k += 7 * MOMENT_STEP) {
        struct failmem f;
        scene_back(&c);
        failmem_init(&f, k);
        f.once = true;
        ohmen_status status = import_with(&c, &f.mem, NULL);
        failmem_check(&f);
        ck_assert_int_eq(status, f.failed ? OHMEN_MEMORY : OHMEN_OK);
        scene_whole(&c, status, true);
        if (!f.failed)
            break;
    }
    arena_free(c.a);
}
END_TEST

/* --- kill -9 --- */

static size_t count_operations(const struct scene *c)
{
    struct shim f;
    ohmen_error e = OHMEN_ERROR_INIT;
    scene_back(c);
    shim_install(&f, "shim", SHIM_FAIL, SHIM_NEVER);
    shim_for_all(&f);
    scene_must(import_with(c, NULL, &e), &e);
    shim_remove(&f);
    return f.operations;
}

/* 200 moments (KILLS), spread evenly over all operations from opening to closing. */
START_TEST(killed_at_200_moments)
{
    struct scene c = import_scene();
    size_t operations = count_operations(&c), there = 0;
    ck_assert_uint_ge(operations, KILLS);
    for (size_t i = 0; i < KILLS; i++) {
        ck_assert(scene_killed(&c, i * (operations - 1) / (KILLS - 1)));
        bool whole = scene_whole(&c, OHMEN_IO, false);
        there += whole;
        if (i % RETRIES == 0)
            scene_retry(&c, whole);
    }
    ck_assert(!scene_killed(&c, operations));
    ck_assert(scene_whole(&c, OHMEN_OK, true));
    if (MOMENT_STEP == 1)
        ck_assert_uint_ge(there, 1);
    ck_assert_uint_le(there, KILLS / 2);
    arena_free(c.a);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fputs("usage: import_fault_test SOURCE-FOLDER\n", stderr);
        return EXIT_FAILURE;
    }
    source = argv[1];
    setenv("OHMEN_CLOCK", "2026-12-01T08:00:00Z", 1);
    Suite *suite = suite_create("import fault");
    TCase *tc = tcase_create("fault");
    tcase_set_timeout(tc, 900);
    tcase_add_test(tc, failing_io);
    tcase_add_test(tc, a_full_disk);
    tcase_add_test(tc, a_power_cut);
    tcase_add_test(tc, failing_allocations);
    tcase_add_test(tc, a_single_failing_allocation);
    tcase_add_test(tc, killed_at_200_moments);
    suite_add_tcase(suite, tc);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || !run ? EXIT_FAILURE : EXIT_SUCCESS;
}
