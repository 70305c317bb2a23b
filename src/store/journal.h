/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The bytes that are hashed. Final: nothing here can change once registers exist;
 * another layout needs another number in its type line. docs/journal-format.md
 * describes them for readers, with test vectors.
 *
 * Every preimage begins with a type line. Texts are canonical JSON strings, numbers
 * are decimal, hashes lower-case hex, NULL is null, lines end in a line feed. */
#ifndef STORE_JOURNAL_H
#define STORE_JOURNAL_H

#include <sodium.h>

#include "base/text.h"
#include "store/query.h"
#include "store/store.h"

#define JOURNAL_FIRST "0000000000000000000000000000000000000000000000000000000000000000"

/* A hash that grows line by line. */
struct hashing {
    crypto_generichash_state state;
    struct text line; /* the line that is being made */
};
void hashing_begin(struct hashing *h, struct arena *a, const char *type_line);
/* Fields of the present line, parted by blanks; hashing_line ends it. */
void hashing_word(struct hashing *h, const char *word);
void hashing_text(struct hashing *h, const char *s); /* NULL is null */
void hashing_int(struct hashing *h, int64_t n);
void hashing_line(struct hashing *h);
void hashing_end(struct hashing *h, char hash[STORE_HASH_TEXT]);

/* "ohmen body 1": kind, format, number of bytes, the bytes. */
void journal_body_hash(struct arena *a, const char *kind, int64_t format, const char *json,
                       size_t n, char hash[STORE_HASH_TEXT]);

/* "ohmen entry 1": all columns but the hash itself. */
struct journal_entry {
    int64_t seq, utc;
    const char *author, *reason, *command, *tool;
    int64_t changes, observations, withdrawals, records;
    const char *digest, *prev, *hash;
};
void journal_entry_hash(struct arena *a, const struct journal_entry *entry,
                        char hash[STORE_HASH_TEXT]);
#define JOURNAL_ENTRY_COLUMNS                                                                      \
    "seq, utc, author, reason, command, tool, changes, observations, withdrawals, records, "       \
    "digest, prev, hash"
/* Reads those columns of the present row. */
void journal_entry_read(struct query *q, struct arena *a, struct journal_entry *out);

/* Lines of "ohmen digest 1", in this order, each group sorted as its function says. */
void journal_version_line(struct hashing *h, const char *kind, const char *id,
                          const char *body); /* by bytes of kind and id */
struct journal_observation {
    int64_t number, count;
    const char *ident, *day, *what, *subject, *result, *note;
};
void journal_observation_line(struct hashing *h,
                              const struct journal_observation *o); /* by number */

/* The digest of an entry over its rows as they stand in the file, and their numbers
 * (of `counted` only the four numbers are set). */
ohmen_status journal_digest(const struct base *b, struct arena *a, int64_t seq,
                            struct journal_entry *counted, char digest[STORE_HASH_TEXT],
                            ohmen_error *e);

/* "ohmen signature 1" and "ohmen seal 1": all columns but the hash itself, of the
 * present row of SELECT * FROM signature or seal. */
void journal_signature_hash(struct query *q, struct arena *a, char hash[STORE_HASH_TEXT]);
void journal_seal_hash(struct query *q, struct arena *a, char hash[STORE_HASH_TEXT]);

#endif
