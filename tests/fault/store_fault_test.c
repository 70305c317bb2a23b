/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What happens to a register when the disk fails, fills up, loses power, when memory
 * runs out, when the process is killed: each at every single moment of a commit, until
 * the commit comes through. Afterwards the entry is wholly there or not at all, the
 * audit finds nothing, and the same commit made again works. */
#include <check.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/file.h"
#include "failmem.h"
#include "sample.h"
#include "shimvfs.h"
#include "store/internal.h"

/* --- the register before, and what it may be afterwards --- */

struct scene {
    struct arena *a;
    bool settings; /* the entry changes the settings: all derived tables are made anew */
    const char *path;
    char *bytes; /* of the register before, one closed file */
    size_t n;
    char before[STORE_HASH_TEXT], after[STORE_HASH_TEXT]; /* contents */
};

static void must(ohmen_status status, const ohmen_error *e)
{
    if (status != OHMEN_OK)
        ck_abort_msg("%s: %s", ohmen_status_text(status), e->text);
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

static ohmen_status commit_second(const struct scene *c, const char *vfs, struct arena *a,
                                  ohmen_error *e)
{
    struct store *s;
    struct sample t;
    uint64_t seq;
    ohmen_status status = store_open_on(vfs, a, c->path, STORE_WRITE, &s, e);
    if (status != OHMEN_OK)
        return status;
    second_entry(&t, a, c->settings);
    status = store_commit(s, sample_transaction(&t), &seq, e);
    if (status == OHMEN_OK && seq != 2)
        return error_set(e, OHMEN_INTERNAL, "the entry is number %llu", (unsigned long long)seq);
    return status;
}

/* Makes the register on its own file system and closes it. */
static void make_first(struct arena *a, const char *path)
{
    struct store *s;
    struct sample t;
    uint64_t seq;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(store_create(path, &e), &e);
    struct arena *writing = arena_child(a);
    must(store_open(writing, path, STORE_WRITE, &s, &e), &e);
    sample_begin(&t, writing, 0);
    sample_fill(&t);
    must(store_commit(s, sample_transaction(&t), &seq, &e), &e);
    arena_free(writing);
}

static void content_of(struct arena *a, const char *path, char hash[STORE_HASH_TEXT])
{
    struct store *s;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *reading = arena_child(a);
    must(store_open(reading, path, STORE_WRITE, &s, &e), &e);
    must(store_content_hash(s, UINT64_MAX, hash, &e), &e);
    arena_free(reading);
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

static struct scene scene_new(bool settings)
{
    struct scene c = {.a = arena_new(NULL), .settings = settings};
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_ptr_nonnull(c.a);
    c.path = arena_printf(c.a, "%s/quay.ohmen", sample_folder(c.a));
    make_first(c.a, c.path);
    must(file_read(c.a, c.path, 1 << 26, &c.bytes, &c.n, &e), &e);
    content_of(c.a, c.path, c.before);
    struct arena *writing = arena_child(c.a);
    must(commit_second(&c, NULL, writing, &e), &e);
    arena_free(writing);
    content_of(c.a, c.path, c.after);
    ck_assert_str_ne(c.before, c.after);
    return c;
}

/* Wholly there or not at all, and sound. `status`: what the commit said. With
 * `certain`, a commit that failed has left nothing (only a lost power may both end the
 * program and leave the entry). Returns whether the entry is there. */
static bool whole_or_nothing(const struct scene *c, ohmen_status status, bool certain)
{
    struct store *s;
    struct store_findings found = {0};
    char hash[STORE_HASH_TEXT];
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *a = arena_child(c->a);
    must(store_open(a, c->path, STORE_WRITE, &s, &e), &e);
    must(store_verify(s, &found, &e), &e);
    if (found.n > 0)
        ck_abort_msg("%zu findings, first: %s", found.n, found.at[0]);
    must(store_content_hash(s, UINT64_MAX, hash, &e), &e);
    bool there = strcmp(hash, c->after) == 0;
    ck_assert(there || strcmp(hash, c->before) == 0);
    ck_assert(there || status != OHMEN_OK);
    ck_assert(!there || !certain || status == OHMEN_OK);
    arena_free(a);
    return there;
}

/* The same commit again, where the entry is not there yet. */
static void retry(const struct scene *c, bool there)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *a = arena_child(c->a);
    if (!there)
        must(commit_second(c, NULL, a, &e), &e);
    arena_free(a);
    ck_assert(whole_or_nothing(c, OHMEN_OK, true));
}

/* --- the disk --- */

/* Runs the commit with the file system struck at operation k; false once it came through
 * untouched. */
static bool struck_commit(const struct scene *c, enum shim_way way, size_t k, uint64_t seed,
                          ohmen_status *status, ohmen_error *e)
{
    struct shim f;
    scene_back(c);
    struct arena *a = arena_new(NULL);
    shim_install(&f, "shim", way, k);
    *e = (ohmen_error)OHMEN_ERROR_INIT;
    *status = commit_second(c, "shim", a, e);
    arena_free(a);
    if (way == SHIM_POWER)
        shim_power_cut(&f, seed);
    shim_remove(&f);
    return f.struck;
}

static void fail_everywhere(bool settings)
{
    struct scene c = scene_new(settings);
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, failed = 0;
    for (; struck_commit(&c, SHIM_FAIL, k, 0, &status, &e); k++) {
        if (status != OHMEN_OK)
            failed++;
        ck_assert(status == OHMEN_OK || status == OHMEN_IO || status == OHMEN_REGISTER);
        retry(&c, whole_or_nothing(&c, status, true));
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(k, 40);
    ck_assert_uint_ge(failed, k / 3);
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
    struct scene c = scene_new(false);
    ohmen_status status;
    ohmen_error e;
    size_t k = 0, told = 0;
    for (; struck_commit(&c, SHIM_FULL, k, 0, &status, &e); k++) {
        ck_assert(status == OHMEN_OK || status == OHMEN_IO);
        if (status == OHMEN_IO && strstr(e.text, "no room left"))
            told++;
        retry(&c, whole_or_nothing(&c, status, true));
    }
    ck_assert_int_eq(status, OHMEN_OK);
    ck_assert_uint_ge(told, 10);
    arena_free(c.a);
}
END_TEST

/* Seed 0 loses all that was not synced; the others keep a random subset of sectors. */
static void cut_everywhere(bool settings, uint64_t seeds)
{
    struct scene c = scene_new(settings);
    size_t cuts = 0, there = 0;
    for (uint64_t seed = 0; seed < seeds; seed++) {
        ohmen_status status;
        ohmen_error e;
        size_t k = 0;
        for (; struck_commit(&c, SHIM_POWER, k, seed ? seed * 1000 + k : 0, &status, &e); k++) {
            bool whole = whole_or_nothing(&c, status, false);
            there += whole;
            cuts++;
            if (seed <= 1)
                retry(&c, whole);
        }
        ck_assert_int_eq(status, OHMEN_OK);
        ck_assert(whole_or_nothing(&c, status, true));
        ck_assert_uint_ge(k, 40);
    }
    ck_assert_uint_ge(there, seeds - 1); /* after the commit, while it is closed */
    ck_assert_uint_ge(cuts - there, 30 * seeds);
    arena_free(c.a);
}

START_TEST(a_power_cut_leaves_all_or_nothing)
{
    cut_everywhere(false, 6);
}
END_TEST

START_TEST(a_power_cut_during_a_rebuild_leaves_all_or_nothing)
{
    cut_everywhere(true, 3);
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
            must(store_open(reading, path, STORE_WRITE, &s, &e), &e);
            arena_free(reading);
            unlink(path);
        }
    }
    ck_assert_uint_ge(k, 20);
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
    ohmen_status status = commit_second(c, NULL, a, NULL);
    arena_free(a);
    return status;
}

START_TEST(failing_allocations_leave_nothing)
{
    struct scene c = scene_new(false);
    for (size_t k = 0;; k++) {
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
        retry(&c, whole_or_nothing(&c, status, true));
    }
    arena_free(c.a);
}
END_TEST

/* SQLite's own memory: a limit that is raised until the commit comes through. The limit
 * counts what is in use by the whole process, which here is what one register needs. */
START_TEST(sqlites_memory_leaves_nothing)
{
    struct scene c = scene_new(false);
    sqlite3_int64 least = 16384, step = 8192, limit;
    size_t failed = 0;
    for (limit = least;; limit += step) {
        scene_back(&c);
        struct arena *a = arena_new(NULL);
        ohmen_error e = OHMEN_ERROR_INIT;
        sqlite3_hard_heap_limit64(sqlite3_memory_used() + limit);
        ohmen_status status = commit_second(&c, NULL, a, &e);
        sqlite3_hard_heap_limit64(0);
        arena_free(a);
        whole_or_nothing(&c, status, true);
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

static void kill_at(void *ctx, size_t number)
{
    if (number == *(const size_t *)ctx)
        raise(SIGKILL);
}

/* Commits entry 2 in a child that dies at operation k; false when it lived. */
static bool killed_commit(const struct scene *c, size_t k)
{
    scene_back(c);
    pid_t child = fork();
    ck_assert_int_ge(child, 0);
    if (child == 0) {
        struct shim f;
        shim_install(&f, "shim", SHIM_FAIL, SHIM_NEVER);
        f.on_operation = kill_at;
        f.ctx = &k;
        struct arena *a = arena_new(NULL);
        ohmen_status status = commit_second(c, "shim", a, NULL);
        arena_free(a);
        _exit(status == OHMEN_OK ? 0 : 1);
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

/* Every operation of opening, committing and closing is a moment: more than 200. */
START_TEST(killed_at_any_moment)
{
    struct scene c = scene_new(false);
    size_t k = 0, there = 0;
    for (; killed_commit(&c, k); k++) {
        bool whole = whole_or_nothing(&c, OHMEN_IO, false);
        there += whole;
        retry(&c, whole);
    }
    ck_assert(whole_or_nothing(&c, OHMEN_OK, true));
    ck_assert_uint_ge(k, 200);
    ck_assert_uint_ge(there, 1);
    ck_assert_uint_le(there, k - 1);
    arena_free(c.a);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("store fault");
    TCase *tc = tcase_create("fault");
    tcase_set_timeout(tc, 600);
    tcase_add_test(tc, failing_io_leaves_all_or_nothing);
    tcase_add_test(tc, a_full_disk_leaves_all_or_nothing);
    tcase_add_test(tc, a_power_cut_leaves_all_or_nothing);
    tcase_add_test(tc, failing_io_during_a_rebuild_leaves_all_or_nothing);
    tcase_add_test(tc, a_power_cut_during_a_rebuild_leaves_all_or_nothing);
    tcase_add_test(tc, failing_io_leaves_no_half_register);
    tcase_add_test(tc, failing_allocations_leave_nothing);
    tcase_add_test(tc, sqlites_memory_leaves_nothing);
    tcase_add_test(tc, killed_at_any_moment);
    suite_add_tcase(suite, tc);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || !run ? EXIT_FAILURE : EXIT_SUCCESS;
}
