/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Disturbed jobs on a register. Owns the scene's folder and what the shim remembers
 * for the length of one job. */
#include "scene.h"

#include <check.h>
#include <signal.h>
#include <stdio.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/file.h"
#include "sample.h"

void scene_must(ohmen_status status, const ohmen_error *e)
{
    if (status != OHMEN_OK)
        ck_abort_msg("%s: %s", ohmen_status_text(status), e->text);
}

static void content_of(struct arena *a, const char *path, char hash[STORE_HASH_TEXT])
{
    struct store *s;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *reading = arena_child(a);
    scene_must(store_open(reading, path, STORE_WRITE, &s, &e), &e);
    scene_must(store_content_hash(s, UINT64_MAX, hash, &e), &e);
    arena_free(reading);
}

/* Not by file_write, which waits until the disk has it: nobody cuts the power of the machine. */
void scene_back(const struct scene *c)
{
    static const char *const ends[] = {"-wal", "-shm"};
    for (size_t i = 0; i < 2; i++) {
        char name[4096];
        snprintf(name, sizeof name, "%s%s", c->path, ends[i]);
        unlink(name);
    }
    FILE *f = fopen(c->path, "wb");
    ck_assert_ptr_nonnull(f);
    ck_assert_uint_eq(fwrite(c->bytes, 1, c->n, f), c->n);
    ck_assert_int_eq(fclose(f), 0);
}

static struct known *known_new(struct arena *a)
{
    struct known *k = arena_alloc(a, sizeof *k);
    *k = (struct known){.a = a};
    return k;
}

struct scene scene_new(void (*make)(struct arena *a, const char *path), scene_job *job, void *ctx)
{
    struct scene c = {.a = arena_new(NULL), .job = job, .ctx = ctx};
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_ptr_nonnull(c.a);
    c.folder = sample_folder(c.a);
    c.path = arena_printf(c.a, "%s/quay.ohmen", c.folder);
    c.proven = known_new(c.a);
    c.done_again = known_new(c.a);
    make(c.a, c.path);
    scene_must(file_read(c.a, c.path, 1 << 28, &c.bytes, &c.n, &e), &e);
    content_of(c.a, c.path, c.before);
    struct arena *writing = arena_child(c.a);
    scene_must(job(ctx, NULL, writing, c.path, &e), &e);
    arena_free(writing);
    content_of(c.a, c.path, c.after);
    ck_assert_str_ne(c.before, c.after);
    return c;
}

/* Opens and proves the register; whether what the job brings is there. */
static bool prove(const struct scene *c)
{
    struct store *s;
    struct store_findings found = {0};
    char hash[STORE_HASH_TEXT];
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *a = arena_child(c->a);
    scene_must(store_open(a, c->path, STORE_WRITE, &s, &e), &e);
    scene_must(store_verify(s, &found, &e), &e);
    if (found.n > 0)
        ck_abort_msg("%zu findings, first: %s", found.n, found.at[0]);
    scene_must(store_content_hash(s, UINT64_MAX, hash, &e), &e);
    bool there = strcmp(hash, c->after) == 0;
    ck_assert(there || strcmp(hash, c->before) == 0);
    arena_free(a);
    return there;
}

bool scene_whole(const struct scene *c, ohmen_status status, bool certain)
{
    unsigned char key[KNOWN_KEY];
    int there;
    known_key(c->folder, key);
    if (!known_certain(c->proven, key, &there)) {
        there = prove(c);
        known_note(c->proven, key, there);
    }
    ck_assert(there || status != OHMEN_OK);
    ck_assert(!there || !certain || status == OHMEN_OK);
    return there;
}

void scene_retry(const struct scene *c, bool there)
{
    unsigned char key[KNOWN_KEY];
    int done;
    known_key(c->folder, key);
    if (known_certain(c->done_again, key, &done))
        return;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *a = arena_child(c->a);
    if (!there || c->repeats)
        scene_must(c->job(c->ctx, NULL, a, c->path, &e), &e);
    arena_free(a);
    ck_assert(scene_whole(c, OHMEN_OK, true));
    known_note(c->done_again, key, true);
}

bool scene_struck(const struct scene *c, enum shim_way way, size_t k, uint64_t seed,
                  ohmen_status *status, ohmen_error *e)
{
    struct shim f;
    scene_back(c);
    struct arena *a = arena_new(NULL);
    shim_install(&f, "shim", way, k);
    shim_for_all(&f);
    shim_same_chance();
    *e = (ohmen_error)OHMEN_ERROR_INIT;
    *status = c->job(c->ctx, "shim", a, c->path, e);
    arena_free(a);
    if (way == SHIM_POWER)
        shim_power_cut(&f, seed);
    shim_remove(&f);
    return f.struck;
}

static void kill_at(void *ctx, size_t number)
{
    if (number == *(const size_t *)ctx)
        raise(SIGKILL);
}

bool scene_killed(const struct scene *c, size_t k)
{
    scene_back(c);
    pid_t child = fork();
    ck_assert_int_ge(child, 0);
    if (child == 0) {
        struct shim f;
        shim_install(&f, "shim", SHIM_FAIL, SHIM_NEVER);
        shim_for_all(&f);
        shim_same_chance();
        f.on_operation = kill_at;
        f.ctx = &k;
        struct arena *a = arena_new(NULL);
        ohmen_status status = c->job(c->ctx, "shim", a, c->path, NULL);
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
