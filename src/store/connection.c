/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Opening, closing and transactions. Owns the database handle, which is closed when
 * the store's arena is freed; statements that a jump left open are finalised then, and
 * a transaction that was under way is rolled back.
 *
 * Invariant: no store is handed out before its file is known to be a register of a
 * format that this version reads, with exactly the enduring tables it makes. */
#include <errno.h>
#include <limits.h>
#include <sodium.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/text.h"
#include "store/projection.h"

enum { WAIT_MILLISECONDS = 5000 };

static void close_database(void *object)
{
    sqlite3 *db = object;
    sqlite3_stmt *left;
    while ((left = sqlite3_next_stmt(db, NULL)) != NULL)
        sqlite3_finalize(left);
    sqlite3_close(db);
}

/* Nothing that stands in the file may run or reach out: no functions from a schema,
 * no writable schema, no names in double quotes taken for texts. */
static ohmen_status harden(const struct base *b, ohmen_error *e)
{
    sqlite3_db_config(b->db, SQLITE_DBCONFIG_DEFENSIVE, 1, (int *)NULL);
    sqlite3_db_config(b->db, SQLITE_DBCONFIG_TRUSTED_SCHEMA, 0, (int *)NULL);
    sqlite3_db_config(b->db, SQLITE_DBCONFIG_DQS_DML, 0, (int *)NULL);
    sqlite3_db_config(b->db, SQLITE_DBCONFIG_DQS_DDL, 0, (int *)NULL);
    sqlite3_busy_timeout(b->db, WAIT_MILLISECONDS);
    return query_exec(b,
                      "PRAGMA foreign_keys = ON; PRAGMA recursive_triggers = ON;"
                      "PRAGMA cell_size_check = ON; PRAGMA temp_store = MEMORY;"
                      "PRAGMA cache_size = -65536; PRAGMA synchronous = FULL",
                      e);
}

static ohmen_status open_database(struct arena *a, const char *uri, int flags, const char *vfs,
                                  struct base *b, ohmen_error *e)
{
    flags |= SQLITE_OPEN_URI | SQLITE_OPEN_NOMUTEX | SQLITE_OPEN_EXRESCODE;
    int code = sqlite3_open_v2(uri, &b->db, flags, vfs);
    if (!b->db)
        return error_set(e, OHMEN_MEMORY, "out of memory while opening %s", b->name);
    arena_defer(a, close_database, b->db);
    if (code != SQLITE_OK)
        return query_error(b, code, e);
    return harden(b, e);
}

ohmen_status store_memory_base(struct arena *a, struct base *out, ohmen_error *e)
{
    struct base b = {.name = "the database in memory"};
    ohmen_status status = open_database(
        a, ":memory:", SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE | SQLITE_OPEN_MEMORY, NULL, &b,
        e);
    if (status == OHMEN_OK)
        *out = b;
    return status;
}

/* A path as a URI, so that names with ? # % mean themselves. */
static const char *uri_of(struct arena *a, const char *path, const char *parameters)
{
    struct text t;
    text_init(&t, a);
    text_add(&t, path[0] == '/' ? "file://" : "file:");
    for (const char *p = path; *p; p++) {
        if (strchr("?#%", *p))
            text_printf(&t, "%%%02x", (unsigned char)*p);
        else
            text_byte(&t, *p);
    }
    text_add(&t, parameters);
    return text_str(&t);
}

/* --- create --- */

ohmen_status store_checkpoint(const struct base *b, ohmen_error *e)
{
    int code = sqlite3_wal_checkpoint_v2(b->db, NULL, SQLITE_CHECKPOINT_TRUNCATE, NULL, NULL);
    return code == SQLITE_OK ? OHMEN_OK : query_error(b, code, e);
}

ohmen_status store_new_base(struct arena *a, const char *vfs, const char *path, struct base *out,
                            ohmen_error *e)
{
    struct base b = {.name = path};
    ohmen_status status = open_database(a, uri_of(a, path, ""),
                                        SQLITE_OPEN_READWRITE | SQLITE_OPEN_CREATE, vfs, &b, e);
    if (status == OHMEN_OK)
        *out = b;
    return status;
}

/* Fills a new file; the connection is closed with `a`. */
static ohmen_status fill_new(struct arena *a, const char *vfs, const char *part, ohmen_error *e)
{
    struct base b;
    ohmen_status status = store_new_base(a, vfs, part, &b, e);
    if (status == OHMEN_OK)
        status = query_exec(&b, "PRAGMA journal_mode = WAL; BEGIN IMMEDIATE", e);
    if (status == OHMEN_OK)
        status = schema_create(&b, e);
    if (status == OHMEN_OK)
        status = derive_create(a, &b, projection_new(a), e);
    if (status == OHMEN_OK)
        status = query_exec(&b, "COMMIT", e);
    return status == OHMEN_OK ? store_checkpoint(&b, e) : status;
}

static ohmen_status create(struct arena *a, const char *vfs, const char *path, ohmen_error *e)
{
    struct stat st;
    if (lstat(path, &st) == 0)
        return error_set(e, OHMEN_IO, "cannot make %s: a file of this name exists", path);
    ohmen_status status = place_check(a, path, path, e);
    if (status == OHMEN_OK)
        status = place_writable(a, path, e);
    if (status != OHMEN_OK)
        return status;
    const char *part = place_part(a, path);
    struct arena *filling = arena_child(a);
    status = fill_new(filling, vfs, part, e);
    arena_free(filling);
    return status == OHMEN_OK ? place_publish(a, part, path, e) : status;
}

ohmen_status store_create_on(const char *vfs, const struct mem *mem, const char *path,
                             ohmen_error *e)
{
    jmp_buf out_of_memory;
    struct arena *a = arena_new(mem);
    if (!a)
        return error_set(e, OHMEN_MEMORY, "out of memory while making %s", path);
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return error_set(e, OHMEN_MEMORY, "out of memory while making %s", path);
    }
    arena_guard(a, &out_of_memory);
    ohmen_status status = sodium_init() < 0
                              ? error_set(e, OHMEN_INTERNAL, "the hash function does not start")
                              : create(a, vfs, path, e);
    arena_free(a);
    return status;
}

ohmen_status store_create(const char *path, ohmen_error *e)
{
    return store_create_on(NULL, NULL, path, e);
}

/* --- open --- */

/* What can be said of a file before SQLite looks at it. */
static ohmen_status look_at(const char *path, enum store_mode mode, ohmen_error *e)
{
    struct stat st;
    if (stat(path, &st) != 0)
        return errno == ENOENT || errno == ENOTDIR
                   ? error_set(e, OHMEN_UNKNOWN, "there is no register %s", path)
                   : error_set(e, OHMEN_IO, "cannot open %s: %s", path, error_system(errno));
    if (S_ISDIR(st.st_mode))
        return error_set(e, OHMEN_REGISTER, "%s is a folder, not a register", path);
    if (!S_ISREG(st.st_mode))
        return error_set(e, OHMEN_REGISTER, "%s is no plain file and no register", path);
    if (st.st_size == 0)
        return error_set(e, OHMEN_REGISTER, "%s is empty and no register", path);
    if (access(path, R_OK) != 0)
        return error_set(e, OHMEN_IO, "cannot read %s: %s", path, error_system(errno));
    if (mode == STORE_WRITE && access(path, W_OK) != 0)
        return error_set(e, OHMEN_IO, "%s cannot be written: %s", path, error_system(errno));
    return OHMEN_OK;
}

/* Reads the first page, which SQLite puts off until something is asked. */
static ohmen_status first_read(struct store *s, ohmen_error *e)
{
    return query_exec(&s->base, "SELECT count(*) FROM sqlite_schema", e);
}

static bool has_pages_outside(struct arena *a, const char *path)
{
    struct stat st;
    return stat(arena_printf(a, "%s-wal", path), &st) == 0 && st.st_size > 0;
}

/* One way to open; what it took is given back when it fails. */
static ohmen_status try_open(struct store *s, const char *parameters, int flags, ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    ohmen_status status =
        open_database(a, uri_of(a, s->path, parameters), flags, s->vfs, &s->base, e);
    if (status == OHMEN_OK)
        status = first_read(s, e);
    if (status == OHMEN_OK)
        return status;
    arena_free(a);
    s->base.db = NULL;
    return status;
}

/* Where the file could be written it is opened so, with all writing of rows switched
 * off: only then does SQLite clear its side files away on closing. */
static ohmen_status open_as_owner(struct store *s, ohmen_error *e)
{
    ohmen_status status = try_open(s, "?mode=rw", SQLITE_OPEN_READWRITE, e);
    return status == OHMEN_OK ? query_exec(&s->base, "PRAGMA query_only = ON", e) : status;
}

/* In a folder where SQLite cannot make its shared memory (read-only media, another
 * user's folder) the file is read as one that nobody changes, which is right only while
 * no pages stand outside of it. */
static ohmen_status open_as_guest(struct store *s, ohmen_error *e)
{
    ohmen_error first = OHMEN_ERROR_INIT;
    ohmen_status status = try_open(s, "?mode=ro", SQLITE_OPEN_READONLY, &first);
    if (status == OHMEN_OK)
        return status;
    if (status != OHMEN_IO)
        return error_set(e, status, "%s", first.text);
    if (has_pages_outside(s->arena, s->path))
        return error_set(e, OHMEN_IO,
                         "%s was not closed properly and its folder cannot be written; copy it "
                         "together with %s-wal into a folder of yours",
                         s->base.name, s->base.name);
    return try_open(s, "?mode=ro&immutable=1", SQLITE_OPEN_READONLY, e);
}

static ohmen_status open_to_read(struct store *s, ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    const char *folder = place_folder(a, s->path);
    bool owner = access(s->path, W_OK) == 0 && access(folder, W_OK) == 0;
    arena_free(a);
    return owner ? open_as_owner(s, e) : open_as_guest(s, e);
}

static ohmen_status open_to_write(struct store *s, ohmen_error *e)
{
    ohmen_status status = open_database(s->arena, uri_of(s->arena, s->path, "?mode=rw"),
                                        SQLITE_OPEN_READWRITE, s->vfs, &s->base, e);
    if (status == OHMEN_OK)
        status = first_read(s, e);
    if (status == OHMEN_OK && sqlite3_db_readonly(s->base.db, "main") == 1)
        status = error_set(e, OHMEN_IO, "%s cannot be written", s->base.name);
    return status;
}

ohmen_status store_open_on(const char *vfs, struct arena *a, const char *path, enum store_mode mode,
                           struct store **out, ohmen_error *e)
{
    char real[PATH_MAX];
    ohmen_status status = look_at(path, mode, e);
    if (status == OHMEN_OK && !realpath(path, real))
        status = error_set(e, OHMEN_IO, "cannot open %s: %s", path, error_system(errno));
    if (status == OHMEN_OK)
        status = place_check(a, real, path, e);
    if (status == OHMEN_OK && sodium_init() < 0)
        status = error_set(e, OHMEN_INTERNAL, "the hash function does not start");
    if (status != OHMEN_OK)
        return status;
    struct arena *own = arena_child(a);
    struct store *s = NEW(own, struct store);
    s->arena = own;
    s->base.name = arena_str(own, path);
    s->path = arena_str(own, real);
    s->mode = mode;
    s->vfs = vfs;
    status = mode == STORE_WRITE ? open_to_write(s, e) : open_to_read(s, e);
    if (status == OHMEN_OK)
        status = schema_check(s, e);
    if (status == OHMEN_OK)
        *out = s;
    else
        arena_free(own);
    return status;
}

ohmen_status store_open(struct arena *a, const char *path, enum store_mode mode, struct store **out,
                        ohmen_error *e)
{
    return store_open_on(NULL, a, path, mode, out, e);
}

/* --- transactions --- */

ohmen_status store_read_begin(struct store *s, ohmen_error *e)
{
    return query_exec(&s->base, "BEGIN", e);
}

ohmen_status store_write_begin(struct store *s, ohmen_error *e)
{
    if (s->mode != STORE_WRITE)
        return error_set(e, OHMEN_INTERNAL, "%s was opened to read only", s->base.name);
    ohmen_status status = query_exec(&s->base, "BEGIN IMMEDIATE", e);
    s->base.writing = status == OHMEN_OK;
    return status;
}

static ohmen_status end(struct store *s, ohmen_status status, ohmen_error *e)
{
    if (status == OHMEN_OK)
        status = query_exec(&s->base, "COMMIT", e);
    s->base.writing = false;
    if (status != OHMEN_OK && !sqlite3_get_autocommit(s->base.db))
        sqlite3_exec(s->base.db, "ROLLBACK", NULL, NULL, NULL); /* what failed first is told */
    return status;
}

ohmen_status store_read_end(struct store *s, ohmen_status status, ohmen_error *e)
{
    return end(s, status, e);
}

ohmen_status store_write_end(struct store *s, ohmen_status status, ohmen_error *e)
{
    return end(s, status, e);
}
