/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The import of the sample network through libohmen while the disk fails, fills up or
 * loses power, memory runs out, or the process is killed: each at every single moment.
 * Afterwards the register opens, the proof finds nothing, it holds wholly the old or
 * wholly the new, and the same import made again works. */
#include <check.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/file.h"
#include "failmem.h"
#include "moments.h"
#include "sample.h"
#include "shimvfs.h"
#include "work/work.h"

enum {
    FILES = 6,
    KILLS = 200 / MOMENT_STEP,
    RETRIES = 6 /* at every which moment the import is made again: it costs the most */
};

static const char *source; /* the folder of the sources, from the command line */

/* --- the register before, and what it may be afterwards --- */

struct scene {
    struct arena *a;
    const char *path;
    char *bytes; /* of the register before, one closed file */
    size_t n;
    const char *files[FILES];
    char before[STORE_HASH_TEXT], after[STORE_HASH_TEXT]; /* contents */
};

static void must(ohmen_status status, const ohmen_error *e)
{
    if (status != OHMEN_OK)
        ck_abort_msg("%s: %s", ohmen_status_text(status), e->text);
}

static ohmen_status import(const struct scene *c, const struct mem *mem, const char *const *files,
                           size_t n, ohmen_error *e)
{
    ohmen_register *r = NULL;
    ohmen_report *out = NULL;
    ohmen_import_settings s = {
        .files = files, .n_files = n, .author = "A. Lindqvist", .reason = "Survey"};
    ohmen_status status = register_open(mem, c->path, OHMEN_WRITE, &r, e);
    if (status == OHMEN_OK)
        status = ohmen_import(r, &s, &out, e);
    ck_assert_int_eq(out != NULL, status == OHMEN_OK);
    ohmen_report_free(out);
    ohmen_close(r);
    return status;
}

static ohmen_status import_sample(const struct scene *c, const struct mem *mem, ohmen_error *e)
{
    return import(c, mem, c->files, FILES, e);
}

static void content_of(const char *path, char hash[STORE_HASH_TEXT])
{
    struct store *s;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *a = arena_new(NULL);
    must(store_open(a, path, STORE_WRITE, &s, &e), &e);
    must(store_content_hash(s, UINT64_MAX, hash, &e), &e);
    arena_free(a);
}

static void scene_back(const struct scene *c)
{
    static const char *const ends[] = {"-wal", "-shm"};
    ohmen_error e = OHMEN_ERROR_INIT;
    for (size_t i = 0; i < 2; i++) {
        char name[4096];
        snprintf(name, sizeof name, "%s%s", c->path, ends[i]);
        unlink(name);
    }
    must(file_write(c->path, c->bytes, c->n, &e), &e);
}

/* Before: a small register of other things, which that of the hand calculations joins. */
static struct scene scene_new(void)
{
    static const char *const names[FILES] = {"register.yaml", "network.yaml",   "hazards.yaml",
                                             "options.yaml",  "decisions.yaml", "observations.csv"};
    struct scene c = {.a = arena_new(NULL)};
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_ptr_nonnull(c.a);
    c.path = arena_printf(c.a, "%s/quay.ohmen", sample_folder(c.a));
    must(ohmen_create(c.path, &e), &e);
    const char *good = arena_printf(c.a, "%s/tests/golden/bad/good.yaml", source);
    must(import(&c, NULL, &good, 1, &e), &e);
    content_of(c.path, c.before);
    must(file_read(c.a, c.path, 1 << 26, &c.bytes, &c.n, &e), &e);
    for (size_t i = 0; i < FILES; i++)
        c.files[i] = arena_printf(c.a, "%s/tests/published/hand/%s", source, names[i]);
    must(import_sample(&c, NULL, &e), &e);
    content_of(c.path, c.after);
    ck_assert_str_ne(c.before, c.after);
    return c;
}

/* Wholly the new or wholly the old, and sound. With `certain`, an import that failed has
 * left nothing (only a lost power may both end it and leave the entry). */
static bool whole_or_nothing(const struct scene *c, ohmen_status status, bool certain)
{
    char hash[STORE_HASH_TEXT];
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *open;
    struct store_findings found = {0};
    struct arena *a = arena_new(NULL);
    must(store_open(a, c->path, STORE_WRITE, &open, &e), &e);
    must(store_verify(open, &found, &e), &e);
    if (found.n > 0)
        ck_abort_msg("%zu findings, first: %s", found.n, found.at[0]);
    must(store_content_hash(open, UINT64_MAX, hash, &e), &e);
    arena_free(a);
    bool there = strcmp(hash, c->after) == 0;
    ck_assert(there || strcmp(hash, c->before) == 0);
    ck_assert(there || status != OHMEN_OK);
    ck_assert(!there || !certain || status == OHMEN_OK);
    return there;
}

/* The same import again gives the new content, whether it is there already or not. */
static void retry(const struct scene *c)
{
    char hash[STORE_HASH_TEXT];
    ohmen_error e = OHMEN_ERROR_INIT;
    must(import_sample(c, NULL, &e), &e);
    content_of(c->path, hash);
    ck_assert_str_eq(hash, c->after);
}

/* --- the disk --- */

/* The shim as the usual file system of the process, so that it is reached through the
 * public functions. */
static void shim_begin(struct shim *f, enum shim_way way, size_t k)
{
    shim_install(f, "shim", way, k);
    ck_assert_int_eq(sqlite3_vfs_register(&f->vfs, 1), SQLITE_OK);
}

static void shim_end(struct shim *f)
{
    sqlite3_vfs *below = f->below;
    shim_remove(f);
    ck_assert_int_eq(sqlite3_vfs_register(below, 1), SQLITE_OK);
}

/* Runs the import with the file system struck at operation k; false once it came through
 * untouched. */
static bool struck(const struct scene *c, enum shim_way way, size_t k, ohmen_status *status,
                   ohmen_error *e)
{
    struct shim f;
    scene_back(c);
    shim_begin(&f, way, k);
    *e = (ohmen_error)OHMEN_ERROR_INIT;
    *status = import_sample(c, NULL, e);
    if (way == SHIM_POWER)
        shim_power_cut(&f, 0);
    shim_end(&f);
    return f.struck;
}

START_TEST(failing_io)
{
    struct scene c = scene_new();
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, failed = 0;
    for (; struck(&c, SHIM_FAIL, k, &status, &e); k += MOMENT_STEP) {
        failed += status != OHMEN_OK;
        ck_assert_msg(status == OHMEN_OK || status == OHMEN_IO || status == OHMEN_REGISTER,
                      "operation %zu: status %d: %s", k, status, e.text);
        whole_or_nothing(&c, status, true);
        if (k % RETRIES == 0)
            retry(&c);
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
    struct scene c = scene_new();
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, told = 0;
    for (; struck(&c, SHIM_FULL, k, &status, &e); k += 3 * MOMENT_STEP) {
        ck_assert(status == OHMEN_OK || status == OHMEN_IO);
        told += status == OHMEN_IO && strstr(e.text, "no room left") != NULL;
        whole_or_nothing(&c, status, true);
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(told, 20 / MOMENT_STEP);
    retry(&c);
    arena_free(c.a);
}
END_TEST

/* What was not synced is lost. */
START_TEST(a_power_cut)
{
    struct scene c = scene_new();
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, there = 0;
    for (; struck(&c, SHIM_POWER, k, &status, &e); k += MOMENT_STEP) {
        there += whole_or_nothing(&c, status, false);
        if (k % RETRIES == 0)
            retry(&c);
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
    struct scene c = scene_new();
    size_t k = 0;
    for (bool done = false; !done; k += MOMENT_STEP) {
        struct failmem f;
        ohmen_error e = OHMEN_ERROR_INIT;
        scene_back(&c);
        failmem_init(&f, k);
        ohmen_status status = import_sample(&c, &f.mem, &e);
        failmem_check(&f);
        done = f.failed == 0;
        ck_assert_int_eq(status, done ? OHMEN_OK : OHMEN_MEMORY);
        ck_assert_int_eq(e.status, status);
        whole_or_nothing(&c, status, true);
        if (k % RETRIES == 0 || done)
            retry(&c);
    }
    ck_assert_uint_ge(k, 40);
    arena_free(c.a);
}
END_TEST

/* Only one fails, every seventh in turn, and what cleans up behind it has memory again. */
START_TEST(a_single_failing_allocation)
{
    struct scene c = scene_new();
    for (size_t k = 0;; k += 7 * MOMENT_STEP) {
        struct failmem f;
        scene_back(&c);
        failmem_init(&f, k);
        f.once = true;
        ohmen_status status = import_sample(&c, &f.mem, NULL);
        failmem_check(&f);
        ck_assert_int_eq(status, f.failed ? OHMEN_MEMORY : OHMEN_OK);
        whole_or_nothing(&c, status, true);
        if (!f.failed)
            break;
    }
    arena_free(c.a);
}
END_TEST

/* --- kill -9 --- */

static void kill_at(void *ctx, size_t number)
{
    if (number == *(const size_t *)ctx)
        raise(SIGKILL);
}

/* Imports in a child that dies at operation k of its file system; false when it lived. */
static bool killed(const struct scene *c, size_t k)
{
    scene_back(c);
    pid_t child = fork();
    ck_assert_int_ge(child, 0);
    if (child == 0) {
        struct shim f;
        shim_begin(&f, SHIM_FAIL, SHIM_NEVER);
        f.on_operation = kill_at;
        f.ctx = &k;
        _exit(import_sample(c, NULL, NULL) == OHMEN_OK ? 0 : 1);
    }
    int status;
    ck_assert_int_eq(waitpid(child, &status, 0), child);
    if (WIFSIGNALED(status)) {
        ck_assert_int_eq(WTERMSIG(status), SIGKILL);
        return true;
    }
    ck_assert_int_eq(WEXITSTATUS(status), 0);
    return false;
}

static size_t count_operations(const struct scene *c)
{
    struct shim f;
    ohmen_error e = OHMEN_ERROR_INIT;
    scene_back(c);
    shim_begin(&f, SHIM_FAIL, SHIM_NEVER);
    must(import_sample(c, NULL, &e), &e);
    shim_end(&f);
    return f.operations;
}

/* 200 moments (KILLS), spread evenly over all operations from opening to closing. */
START_TEST(killed_at_200_moments)
{
    struct scene c = scene_new();
    size_t operations = count_operations(&c), there = 0;
    ck_assert_uint_ge(operations, KILLS);
    for (size_t i = 0; i < KILLS; i++) {
        ck_assert(killed(&c, i * (operations - 1) / (KILLS - 1)));
        there += whole_or_nothing(&c, OHMEN_IO, false);
        if (i % RETRIES == 0)
            retry(&c);
    }
    ck_assert(!killed(&c, operations));
    ck_assert(whole_or_nothing(&c, OHMEN_OK, true));
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
