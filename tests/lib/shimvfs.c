/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The file system that fails and forgets. Owns an image of what is durable of each file
 * that was written through it; the file itself always holds what the program wrote. */
#include "shimvfs.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

enum { SECTOR = 512 };

struct bytes {
    unsigned char *at;
    size_t n;
};

struct shim_image {
    struct shim_image *next;
    char *path;
    struct bytes durable;
};

struct shim_file {
    sqlite3_file base;
    struct shim *shim;
    struct shim_image *image; /* NULL: opened to read, or without a name */
    sqlite3_file *real;       /* behind this struct */
};

static struct shim_file *file_of(sqlite3_file *f)
{
    return (struct shim_file *)f;
}

static void *need(void *p)
{
    if (!p) {
        fputs("shimvfs: the machine is out of memory\n", stderr);
        abort();
    }
    return p;
}

/* --- whole files --- */

static struct bytes load(const char *path)
{
    struct bytes b = {need(malloc(1)), 0};
    FILE *f = fopen(path, "rb");
    if (!f)
        return b;
    fseek(f, 0, SEEK_END);
    long n = ftell(f);
    rewind(f);
    b.at = need(realloc(b.at, (size_t)n + 1));
    b.n = fread(b.at, 1, (size_t)n, f);
    fclose(f);
    return b;
}

static void save(const char *path, struct bytes b)
{
    FILE *f = need(fopen(path, "wb"));
    if (fwrite(b.at, 1, b.n, f) != b.n || fclose(f) != 0) {
        perror(path);
        abort();
    }
}

static struct shim_image *find_image(struct shim *s, const char *path)
{
    for (struct shim_image *i = s->images; i; i = i->next)
        if (strcmp(i->path, path) == 0)
            return i;
    return NULL;
}

static struct shim_image *make_image(struct shim *s, const char *path)
{
    struct shim_image *i = find_image(s, path);
    if (i)
        return i;
    i = need(calloc(1, sizeof *i));
    i->path = need(strdup(path));
    i->durable = load(path);
    i->next = s->images;
    s->images = i;
    return i;
}

static void keep(struct shim_image *i)
{
    if (!i)
        return;
    free(i->durable.at);
    i->durable = load(i->path);
}

static void free_image(struct shim_image *i)
{
    free(i->durable.at);
    free(i->path);
    free(i);
}

static void forget(struct shim *s, const char *path)
{
    for (struct shim_image **link = &s->images; *link; link = &(*link)->next)
        if (strcmp((*link)->path, path) == 0) {
            struct shim_image *gone = *link;
            *link = gone->next;
            free_image(gone);
            return;
        }
}

/* --- the count --- */

/* Counts one operation and tells with which code it fails; SQLITE_OK: it does not. */
static int strike(struct shim *s, int code, bool writes)
{
    size_t number = s->operations++;
    if (s->on_operation)
        s->on_operation(s->ctx, number);
    bool hit = s->way == SHIM_FAIL    ? number == s->fail_at
               : s->way == SHIM_POWER ? number >= s->fail_at
                                      : number >= s->fail_at && writes;
    if (!hit)
        return SQLITE_OK;
    s->struck = true;
    return s->way == SHIM_FULL ? SQLITE_FULL : code;
}

/* --- one file --- */

static int shim_close(sqlite3_file *f)
{
    return file_of(f)->real->pMethods->xClose(file_of(f)->real);
}

static int shim_read(sqlite3_file *f, void *to, int n, sqlite3_int64 at)
{
    int code = strike(file_of(f)->shim, SQLITE_IOERR_READ, false);
    return code ? code : file_of(f)->real->pMethods->xRead(file_of(f)->real, to, n, at);
}

static int shim_write(sqlite3_file *f, const void *from, int n, sqlite3_int64 at)
{
    int code = strike(file_of(f)->shim, SQLITE_IOERR_WRITE, true);
    return code ? code : file_of(f)->real->pMethods->xWrite(file_of(f)->real, from, n, at);
}

static int shim_truncate(sqlite3_file *f, sqlite3_int64 n)
{
    int code = strike(file_of(f)->shim, SQLITE_IOERR_TRUNCATE, false);
    return code ? code : file_of(f)->real->pMethods->xTruncate(file_of(f)->real, n);
}

/* The file below is not synced in truth: the image stands for the disk. */
static int shim_sync(sqlite3_file *f, int flags)
{
    (void)flags;
    int code = strike(file_of(f)->shim, SQLITE_IOERR_FSYNC, false);
    if (code == SQLITE_OK)
        keep(file_of(f)->image);
    return code;
}

static int shim_size(sqlite3_file *f, sqlite3_int64 *n)
{
    int code = strike(file_of(f)->shim, SQLITE_IOERR_FSTAT, false);
    return code ? code : file_of(f)->real->pMethods->xFileSize(file_of(f)->real, n);
}

static int shim_lock(sqlite3_file *f, int level)
{
    return file_of(f)->real->pMethods->xLock(file_of(f)->real, level);
}

static int shim_unlock(sqlite3_file *f, int level)
{
    return file_of(f)->real->pMethods->xUnlock(file_of(f)->real, level);
}

static int shim_is_locked(sqlite3_file *f, int *out)
{
    return file_of(f)->real->pMethods->xCheckReservedLock(file_of(f)->real, out);
}

static int shim_control(sqlite3_file *f, int op, void *arg)
{
    return file_of(f)->real->pMethods->xFileControl(file_of(f)->real, op, arg);
}

static int shim_sector(sqlite3_file *f)
{
    (void)f;
    return SECTOR;
}

static int shim_traits(sqlite3_file *f)
{
    return file_of(f)->real->pMethods->xDeviceCharacteristics(file_of(f)->real);
}

static int shim_shm_map(sqlite3_file *f, int page, int size, int extend, void volatile **out)
{
    int code = strike(file_of(f)->shim, SQLITE_IOERR_SHMMAP, false);
    return code ? code
                : file_of(f)->real->pMethods->xShmMap(file_of(f)->real, page, size, extend, out);
}

static int shim_shm_lock(sqlite3_file *f, int at, int n, int flags)
{
    return file_of(f)->real->pMethods->xShmLock(file_of(f)->real, at, n, flags);
}

static void shim_shm_barrier(sqlite3_file *f)
{
    file_of(f)->real->pMethods->xShmBarrier(file_of(f)->real);
}

static int shim_shm_unmap(sqlite3_file *f, int remove)
{
    return file_of(f)->real->pMethods->xShmUnmap(file_of(f)->real, remove);
}

/* Version 2: no memory mapping, so that every byte passes here. */
static const sqlite3_io_methods shim_methods = {
    .iVersion = 2,
    .xClose = shim_close,
    .xRead = shim_read,
    .xWrite = shim_write,
    .xTruncate = shim_truncate,
    .xSync = shim_sync,
    .xFileSize = shim_size,
    .xLock = shim_lock,
    .xUnlock = shim_unlock,
    .xCheckReservedLock = shim_is_locked,
    .xFileControl = shim_control,
    .xSectorSize = shim_sector,
    .xDeviceCharacteristics = shim_traits,
    .xShmMap = shim_shm_map,
    .xShmLock = shim_shm_lock,
    .xShmBarrier = shim_shm_barrier,
    .xShmUnmap = shim_shm_unmap,
};

/* --- the file system --- */

static struct shim *shim_of(sqlite3_vfs *v)
{
    return v->pAppData;
}

static int shim_open(sqlite3_vfs *v, const char *name, sqlite3_file *f, int flags, int *out_flags)
{
    struct shim *s = shim_of(v);
    struct shim_file *file = file_of(f);
    *file = (struct shim_file){.shim = s, .real = (sqlite3_file *)(file + 1)};
    int code = strike(s, SQLITE_CANTOPEN, false);
    if (code)
        return code;
    bool writes = name && (flags & SQLITE_OPEN_READWRITE);
    if (writes)
        file->image = make_image(s, name);
    code = s->below->xOpen(s->below, name, file->real, flags, out_flags);
    if (code == SQLITE_OK)
        file->base.pMethods = &shim_methods;
    return code;
}

static int shim_delete(sqlite3_vfs *v, const char *name, int sync)
{
    struct shim *s = shim_of(v);
    int code = strike(s, SQLITE_IOERR_DELETE, false);
    if (code)
        return code;
    code = s->below->xDelete(s->below, name, sync);
    if (code == SQLITE_OK)
        forget(s, name);
    return code;
}

static int shim_access(sqlite3_vfs *v, const char *name, int flags, int *out)
{
    int code = strike(shim_of(v), SQLITE_IOERR_ACCESS, false);
    return code ? code : shim_of(v)->below->xAccess(shim_of(v)->below, name, flags, out);
}

static int shim_full_path(sqlite3_vfs *v, const char *name, int n, char *out)
{
    return shim_of(v)->below->xFullPathname(shim_of(v)->below, name, n, out);
}

/* What SQLite starts its random numbers from: always the same. */
static int shim_randomness(sqlite3_vfs *v, int n, char *out)
{
    (void)v;
    memset(out, 1, (size_t)n);
    return n;
}

void shim_same_chance(void)
{
    sqlite3_randomness(0, NULL);
}

void shim_install(struct shim *s, const char *name, enum shim_way way, size_t fail_at)
{
    *s = (struct shim){.way = way, .fail_at = fail_at, .below = sqlite3_vfs_find(NULL)};
    s->vfs = *s->below;
    s->vfs.pNext = NULL;
    s->vfs.zName = name;
    s->vfs.pAppData = s;
    s->vfs.szOsFile = (int)sizeof(struct shim_file) + s->below->szOsFile;
    s->vfs.xOpen = shim_open;
    s->vfs.xDelete = shim_delete;
    s->vfs.xAccess = shim_access;
    s->vfs.xFullPathname = shim_full_path;
    s->vfs.xRandomness = shim_randomness;
    sqlite3_vfs_register(&s->vfs, 0);
}

void shim_for_all(struct shim *s)
{
    sqlite3_vfs_register(&s->vfs, 1);
}

void shim_remove(struct shim *s)
{
    sqlite3_vfs_unregister(&s->vfs);
    sqlite3_vfs_register(s->below, 1);
    while (s->images) {
        struct shim_image *next = s->images->next;
        free_image(s->images);
        s->images = next;
    }
}

/* --- the power cut --- */

/* splitmix64 (Steele, Lea, Flood 2014): a stream from any seed. */
static uint64_t next_random(uint64_t *state)
{
    uint64_t z = *state += 0x9E3779B97F4A7C15u;
    z = (z ^ (z >> 30)) * 0xBF58476D1CE4E5B9u;
    z = (z ^ (z >> 27)) * 0x94D049BB133111EBu;
    return z ^ (z >> 31);
}

/* One sector of one of two files; what lies behind the end is zero. */
static void copy_sector(unsigned char *to, struct bytes from, size_t at, size_t n)
{
    memset(to, 0, n);
    if (at < from.n)
        memcpy(to, from.at + at, from.n - at < n ? from.n - at : n);
}

static void cut(const struct shim_image *i, uint64_t *state, bool lucky)
{
    if (access(i->path, F_OK) != 0)
        return;
    struct bytes written = load(i->path), left;
    left.n = lucky && next_random(state) % 2 ? written.n : i->durable.n;
    left.at = need(malloc(left.n + 1));
    for (size_t at = 0; at < left.n; at += SECTOR) {
        size_t n = left.n - at < SECTOR ? left.n - at : SECTOR;
        bool reached = lucky && next_random(state) % 2;
        copy_sector(left.at + at, reached ? written : i->durable, at, n);
    }
    save(i->path, left);
    free(written.at);
    free(left.at);
}

void shim_power_cut(struct shim *s, uint64_t seed)
{
    uint64_t state = seed;
    for (struct shim_image *i = s->images; i; i = i->next) {
        cut(i, &state, seed != 0);
        size_t n = strlen(i->path) + 5;
        char *shared = need(malloc(n));
        snprintf(shared, n, "%s-shm", i->path);
        unlink(shared);
        free(shared);
    }
}
