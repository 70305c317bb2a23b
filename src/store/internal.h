/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the store share, and the seam by which tests open a register
 * through a file system of their own. Private to src/store and the tests. */
#ifndef STORE_INTERNAL_H
#define STORE_INTERNAL_H

#include "store/query.h"
#include "store/store.h"

#define STORE_APPLICATION 0x4F484D4E /* "OHMN", at byte 68 of the file */
#define STORE_FORMAT 1               /* of the enduring tables, at byte 60 of the file */
#define STORE_BODY_FORMAT 1          /* of the bodies that are written */

struct projection;

struct store {
    struct arena *arena;
    struct base base;
    const char *path; /* with all links followed: the side files stand beside it */
    enum store_mode mode;
    const char *vfs;               /* name of SQLite's file system; NULL: the usual one */
    struct projection *projection; /* made when first needed */
};

/* --- connection.c --- */

/* store_create and store_open on an SQLite file system by its name. */
ohmen_status store_create_on(const char *vfs, const struct mem *mem, const char *path,
                             ohmen_error *e);
ohmen_status store_open_on(const char *vfs, struct arena *a, const char *path, enum store_mode mode,
                           struct store **out, ohmen_error *e);

/* A stretch in which all reads see one state of the file. */
ohmen_status store_read_begin(struct store *s, ohmen_error *e);
/* Ends it and returns `status`, or what went wrong now. */
ohmen_status store_read_end(struct store *s, ohmen_status status, ohmen_error *e);

/* The same for writing; waits a few seconds for the lock. Refused on a store that was
 * opened to read. store_write_end commits when `status` is OHMEN_OK, otherwise rolls
 * back and returns `status`. */
ohmen_status store_write_begin(struct store *s, ohmen_error *e);
ohmen_status store_write_end(struct store *s, ohmen_status status, ohmen_error *e);

/* Brings all pages into the file itself. */
ohmen_status store_checkpoint(const struct base *b, ohmen_error *e);

/* A new database file. */
ohmen_status store_new_base(struct arena *a, const char *vfs, const char *path, struct base *out,
                            ohmen_error *e);

/* A database in memory without any table, closed with `a`. */
ohmen_status store_memory_base(struct arena *a, struct base *out, ohmen_error *e);

/* --- place.c --- */

/* The folder that a path lies in. */
const char *place_folder(struct arena *a, const char *path);
/* Is a file system of this type shared over a network ("nfs4", "fuse.sshfs")? There
 * SQLite's locks and shared memory do not hold. */
bool place_is_network(const char *type);
/* Refuses a path whose folder is on such a file system; `name` is for the message. */
ohmen_status place_check(struct arena *a, const char *path, const char *name, ohmen_error *e);
/* Can a file be made there? The message names the file that is wanted. */
ohmen_status place_writable(struct arena *a, const char *path, ohmen_error *e);
/* What place_publish does where the file system has no links: claims the name with an
 * empty file and renames over it. 0 or the errno. */
int place_rename(const char *part, const char *path);
/* Gives a finished file its name, durably; a name that is taken is refused. */
ohmen_status place_publish(struct arena *a, const char *part, const char *path, ohmen_error *e);
/* A free name beside `path` for a file that is not finished, which is removed under
 * that name when `a` is freed. */
const char *place_part(struct arena *a, const char *path);

/* --- schema.c --- */

/* Makes the enduring tables and meta. */
ohmen_status schema_create(const struct base *b, ohmen_error *e);
/* Compares application, format, meta and the enduring tables with what this version
 * makes; anything else that is no table or index is damage too. */
ohmen_status schema_check(struct store *s, ohmen_error *e);

/* --- projection.c, derive.c: see src/store/projection.h --- */

/* --- state.c --- */

struct state_row {
    const char *kind, *id, *body; /* body: hash */
    int64_t seq;
};
struct state_rows ARRAY_BODY(struct state_row);

/* The live versions as of `at`, sorted by bytes of kind and id; the caller holds a
 * read transaction. */
ohmen_status state_rows(struct store *s, struct arena *a, uint64_t at, struct state_rows *out,
                        ohmen_error *e);
/* A body by its hash, re-hashed; `what` names the object for messages. *json lives in a. */
ohmen_status state_body(struct query *bodies, struct arena *a, const char *hash,
                        const struct state_row *of, const char **json, size_t *n);
#define STATE_BODY_SQL "SELECT kind, format, json FROM body WHERE hash = ?1"

/* SELECT of the observations that are not withdrawn as of ?1; columns in the order of
 * struct store_observation. */
#define STATE_OBSERVATIONS_SQL                                                                     \
    "SELECT seq, number, ident, day, what, subject, result, note, count FROM observation o "       \
    "WHERE seq <= ?1 AND NOT EXISTS (SELECT 1 FROM withdrawal w "                                  \
    "WHERE w.observation = o.number AND w.seq <= ?1) ORDER BY day, what, subject, ident"

/* An entry number for SQL: UINT64_MAX and all that no entry can have become the greatest. */
int64_t state_limit(uint64_t at);

#endif
