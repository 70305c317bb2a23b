/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The register file: an SQLite database that keeps every version of every object in
 * an append-only, hash-chained journal.
 *
 * Truth is bodies: each version of an object is a canonical JSON text, addressed by
 * its BLAKE2b-256 hash. One *entry* per transaction ties versions, observations and
 * withdrawals together: number, UTC, author, reason, command, tool, a digest over its
 * rows, the hash of the entry before, and its own hash. Relational tables are derived
 * from the bodies and can be dropped and rebuilt at any time. docs/journal-format.md
 * has the bytes.
 *
 * Only src/store knows SQLite and libsodium. */
#ifndef STORE_STORE_H
#define STORE_STORE_H

#include "base/error.h"
#include "model/kinds.h"

#define STORE_HASH_TEXT 65 /* bytes of a hash in lower-case hex with its zero */

struct store;

enum store_mode {
    STORE_READ, /* stores nothing; pages that a crash left in the log may be moved into the
                   file; read-only media are opened immutable */
    STORE_WRITE
};

/* Creates a new register file, all or nothing; a name that is taken is refused
 * (OHMEN_IO). It has no entry yet. */
ohmen_status store_create(const char *path, ohmen_error *e);

/* Opens a register; closed when `a` is freed. Refused, each with a sentence of its
 * own: no such file (OHMEN_UNKNOWN), no register (not SQLite, other application),
 * written by a newer ohmen, damaged (enduring tables or meta differ), not writable, on
 * a file system shared over a network. Only store_verify looks at every page; damage
 * that a read meets is OHMEN_REGISTER then. All memory but SQLite's own comes from `a`,
 * results included: they live as long as `a`. */
ohmen_status store_open(struct arena *a, const char *path, enum store_mode mode, struct store **out,
                        ohmen_error *e);

/* Number of the newest entry, 0 in an empty register. */
ohmen_status store_head(struct store *s, uint64_t *seq, ohmen_error *e);

struct store_object {
    enum kind kind;
    const char *id;
    const char *json; /* canonical body of n bytes, zero-terminated */
    size_t n;
    uint64_t seq; /* of the entry that made this version */
    char hash[STORE_HASH_TEXT];
};
struct store_objects ARRAY_BODY(struct store_object);

struct store_observation {
    uint64_t entry, number; /* number: order of arrival, unique */
    const char *ident;      /* its key at the source, or content hash plus ordinal */
    day day;
    const char *what, *subject, *result, *note; /* what: kind of observation; NULL is "" */
    int64_t count;                              /* n; 1 where a row is one event */
};
struct store_observations ARRAY_BODY(struct store_observation);

/* All live objects as of entry `at` (UINT64_MAX: the newest), in order of enum kind and
 * bytes of id; bodies are re-hashed on reading and a wrong one is OHMEN_REGISTER. Costs
 * no more than a constant factor over reading the present, whatever `at` is (snapshots). */
ohmen_status store_state(struct store *s, uint64_t at, struct store_objects *out, ohmen_error *e);

/* Observations that are not withdrawn as of `at`, in order of day, what, subject, ident. */
ohmen_status store_state_observations(struct store *s, uint64_t at, struct store_observations *out,
                                      ohmen_error *e);

/* The number of the last entry at or before that second; 0 when there is none. */
ohmen_status store_at_time(struct store *s, int64_t utc, uint64_t *seq, ohmen_error *e);

/* Hash of the whole state as of `at`: objects and observations, not the history that led
 * there; the same for any register that holds the same. */
ohmen_status store_content_hash(struct store *s, uint64_t at, char hash[STORE_HASH_TEXT],
                                ohmen_error *e);

struct store_change {
    enum kind kind;
    const char *id;
    const char *json; /* canonical body that fits its kind, zero-terminated; NULL: removed */
    size_t n;
};

struct store_entry {
    uint64_t seq;
    int64_t utc;
    const char *author, *reason, *command, *tool;
    uint64_t n_changes, n_observations;
    char prev[STORE_HASH_TEXT], digest[STORE_HASH_TEXT], hash[STORE_HASH_TEXT];
};

struct store_transaction {
    uint64_t prepared_on; /* the head that the changes were prepared on */
    int64_t utc;
    const char *author, *reason, *command, *tool;
    const struct store_change *changes; /* unique (kind, id) */
    size_t n_changes;
    const struct store_observation *observations; /* entry and number are ignored; those
                                                     whose ident is known are skipped */
    size_t n_observations;
    const char *const *read; /* ids of objects that the changes rely on */
    size_t n_read;
};

/* Writes one entry, all or nothing: BEGIN IMMEDIATE, write, read back and re-hash,
 * commit. Changes that equal the present version and observations that are known are
 * left out; when nothing is left no entry is written and *seq is 0. OHMEN_CONFLICT,
 * naming the objects, when any object that is written or read changed since
 * `prepared_on`, or when another writer holds the lock for more than five seconds. A
 * withdrawn observation stays known. Derived tables, references and snapshots follow in
 * the same transaction. */
ohmen_status store_commit(struct store *s, const struct store_transaction *t, uint64_t *seq,
                          ohmen_error *e);

/* Entries first .. last in order (0 .. UINT64_MAX: all). */
struct store_entries ARRAY_BODY(struct store_entry);
ohmen_status store_entries(struct store *s, uint64_t first, uint64_t last,
                           struct store_entries *out, ohmen_error *e);

/* Versions of one object (or, with id NULL, all versions of all), in order of entry. */
struct store_version {
    uint64_t seq;
    enum kind kind;
    const char *id;
    const char *json; /* NULL: removed */
    size_t n;
};
struct store_versions ARRAY_BODY(struct store_version);
ohmen_status store_versions(struct store *s, const char *id, struct store_versions *out,
                            ohmen_error *e);

/* Proof of the whole file: each body re-hashed, each entry's digest and chain, each
 * version's body there, observations under their entry's digest, derived tables
 * equal to a fresh derivation, SQLite's own integrity check. Each finding is one
 * sentence that names what is wrong (a derived table: the object and the field). */
struct store_findings ARRAY_BODY(const char *);
ohmen_status store_verify(struct store *s, struct store_findings *out, ohmen_error *e);

/* Drops and rebuilds everything that is derived. */
ohmen_status store_rebuild(struct store *s, ohmen_error *e);

/* A copy of the register while it is in use (SQLite's online backup), verified before it
 * gets its name. An existing file is refused. */
ohmen_status store_backup(struct store *s, const char *path, ohmen_error *e);

/* BLAKE2b-256 of n bytes as lower-case hex. */
void store_hash(const void *bytes, size_t n, char hash[STORE_HASH_TEXT]);

#endif
