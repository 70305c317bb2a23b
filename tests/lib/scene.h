/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A register, a job that changes it, and every way to disturb the job: I/O that fails,
 * a full disk, a power cut, a kill. Whatever happens, the register is afterwards sound
 * and holds what it held before, or all that the job brings; and the job can be done
 * again.
 *
 * A state of the files that was proven twice is taken as proven, and a job done again twice on
 * the same files as done: known.h tells why that leaves nothing unproven. Chance is the same
 * each time (shimvfs.h), so that the same moment leaves the same files.
 *
 *     struct scene c = scene_new(make, job, ctx);
 *     for (k = 0; scene_struck(&c, SHIM_POWER, k, seed, &status, &e); k++)
 *         scene_whole(&c, status, false);
 *     arena_free(c.a);
 *
 * Violations end the test through Check. */
#ifndef TESTS_SCENE_H
#define TESTS_SCENE_H

#include "known.h"
#include "shimvfs.h"
#include "store/store.h"

/* Opens the register on SQLite's file system `vfs` (NULL: the usual one) with memory
 * from `a`, changes it, and says how that went; closing is freeing `a`. */
typedef ohmen_status scene_job(void *ctx, const char *vfs, struct arena *a, const char *path,
                               ohmen_error *e);

struct scene {
    struct arena *a;
    const char *folder, *path;
    scene_job *job;
    void *ctx;
    bool repeats; /* the job may also be done where what it brings is there; scene_new: false */
    char *bytes;  /* of the register before, one closed file */
    size_t n;
    char before[STORE_HASH_TEXT], after[STORE_HASH_TEXT]; /* contents */
    struct known *proven, *done_again;
};

/* `make` makes the register at `path` and closes it. The job is done once, so that it is
 * known what it brings; it must bring something. */
struct scene scene_new(void (*make)(struct arena *a, const char *path), scene_job *job, void *ctx);

/* The register as it was before. */
void scene_back(const struct scene *c);

/* Does the job on the register as it was before, struck at operation k (see shimvfs.h);
 * false once it came through untouched. After SHIM_POWER the files are as the disk has
 * them. The shim is also the file system of whoever names none. */
bool scene_struck(const struct scene *c, enum shim_way way, size_t k, uint64_t seed,
                  ohmen_status *status, ohmen_error *e);

/* The same in a child of this process that is killed at operation k; false when it lived. */
bool scene_killed(const struct scene *c, size_t k);

/* Proves that the register is sound and that what the job brings is wholly there or not at
 * all. `status`: what the job said; when it said that it went well it must be there. With
 * `certain`, a job that failed has left nothing (only a lost power or a kill may end the
 * program and leave the entry). Returns whether it is there. */
bool scene_whole(const struct scene *c, ohmen_status status, bool certain);

/* Does the job again, undisturbed, where it is not there yet or the job repeats, and proves that
 * it is there then. */
void scene_retry(const struct scene *c, bool there);

/* Fails the test with the error's text when it is one. */
void scene_must(ohmen_status status, const ohmen_error *e);

#endif
