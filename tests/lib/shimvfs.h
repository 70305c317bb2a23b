/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A file system for SQLite that fails on order, and that knows what a power cut would
 * leave on the disk.
 *
 * It stands in front of the usual one and counts operations: open, delete, read, write,
 * truncate, sync, size, shared memory. At operation number `fail_at` (from 0) it does one
 * of these:
 *
 *   SHIM_FAIL   that one fails with an I/O error; later ones work
 *   SHIM_FULL   that one, when it is a write, fails for want of room, and so do all
 *               later writes; others work
 *   SHIM_POWER  the power goes: that one and all later ones fail. What was written
 *               since the last sync of a file may be lost: shim_power_cut puts files
 *               into a state that the disk may be in.
 *
 * The way of a fault test:
 *
 *     for (size_t k = 0;; k++) {
 *         struct shim f;
 *         shim_install(&f, "shim", SHIM_POWER, k);
 *         status = job("shim");
 *         shim_power_cut(&f, seed);
 *         shim_remove(&f);
 *         if (!f.struck) break;             // it came through: check its result
 *         ...open with the usual file system: wholly there or not at all
 *     }
 *
 * Invariant: every write since a file's last sync is remembered with the bytes that it
 * replaced on the disk. Files deleted or made count as durable at once (the folder is
 * taken to be synced by SQLite where it matters to it). */
#ifndef TESTS_SHIMVFS_H
#define TESTS_SHIMVFS_H

#include <sqlite3.h>
#include <stdbool.h>
#include <stddef.h>
#include <stdint.h>

enum shim_way { SHIM_FAIL, SHIM_FULL, SHIM_POWER };
#define SHIM_NEVER SIZE_MAX

struct shim_image; /* what is durable of one file */

struct shim {
    sqlite3_vfs vfs;
    sqlite3_vfs *below;
    enum shim_way way;
    size_t fail_at;
    size_t operations;                              /* so far */
    bool struck;                                    /* the operation was reached */
    void (*on_operation)(void *ctx, size_t number); /* called before each; may be NULL */
    void *ctx;
    struct shim_image *images;
};

/* Registers it under `name` (borrowed). `s` must not move until shim_remove. */
void shim_install(struct shim *s, const char *name, enum shim_way way, size_t fail_at);

/* Makes it the file system of whoever names none, until shim_remove. */
void shim_for_all(struct shim *s);

/* Starts SQLite's random numbers (the salt of a log is one) anew from those of the file system
 * of whoever names none; the shim's are always the same. */
void shim_same_chance(void);

/* Puts all files that were written through it into a state that a power cut may leave:
 * what was synced, and of the 512-byte sectors written since a random subset (seed 0:
 * none). To be called once all connections are closed. */
void shim_power_cut(struct shim *s, uint64_t seed);

/* Unregisters it and frees what it remembers. */
void shim_remove(struct shim *s);

#endif
