/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Preimages of entries, digests, signatures and seals, fed by rows of the file. The
 * same functions serve writing, reading back and the audit, so that what is proved is
 * what stands in the file. Owns nothing. */
#include "store/journal.h"

static void line_text(struct hashing *h, const char *word, const char *s)
{
    hashing_word(h, word);
    hashing_text(h, s);
    hashing_line(h);
}

static void line_int(struct hashing *h, const char *word, int64_t n)
{
    hashing_word(h, word);
    hashing_int(h, n);
    hashing_line(h);
}

void journal_entry_hash(struct arena *a, const struct journal_entry *entry,
                        char hash[STORE_HASH_TEXT])
{
    struct hashing h;
    hashing_begin(&h, a, "ohmen entry 1");
    line_int(&h, "seq", entry->seq);
    line_int(&h, "utc", entry->utc);
    line_text(&h, "author", entry->author);
    line_text(&h, "reason", entry->reason);
    line_text(&h, "command", entry->command);
    line_text(&h, "tool", entry->tool);
    line_int(&h, "changes", entry->changes);
    line_int(&h, "observations", entry->observations);
    line_int(&h, "withdrawals", entry->withdrawals);
    line_int(&h, "records", entry->records);
    line_text(&h, "digest", entry->digest);
    line_text(&h, "prev", entry->prev);
    hashing_end(&h, hash);
}

void journal_entry_read(struct query *q, struct arena *a, struct journal_entry *out)
{
    *out = (struct journal_entry){
        .seq = query_int(q, 0),
        .utc = query_int(q, 1),
        .author = query_copy(q, 2, a),
        .reason = query_copy(q, 3, a),
        .command = query_copy(q, 4, a),
        .tool = query_copy(q, 5, a),
        .changes = query_int(q, 6),
        .observations = query_int(q, 7),
        .withdrawals = query_int(q, 8),
        .records = query_int(q, 9),
        .digest = query_copy(q, 10, a),
        .prev = query_copy(q, 11, a),
        .hash = query_copy(q, 12, a),
    };
}

void journal_version_line(struct hashing *h, const char *kind, const char *id, const char *body)
{
    hashing_word(h, "version");
    hashing_text(h, kind);
    hashing_text(h, id);
    hashing_text(h, body);
    hashing_line(h);
}

void journal_observation_line(struct hashing *h, const struct journal_observation *o)
{
    hashing_word(h, "observation");
    hashing_int(h, o->number);
    hashing_text(h, o->ident);
    hashing_text(h, o->day);
    hashing_text(h, o->what);
    hashing_text(h, o->subject);
    hashing_text(h, o->result);
    hashing_int(h, o->count);
    hashing_text(h, o->note);
    hashing_line(h);
}

static void version_row(struct hashing *h, struct query *q)
{
    const char *kind = query_text(q, 0), *id = query_text(q, 1);
    journal_version_line(h, kind, id, query_text(q, 2));
}

static void observation_row(struct hashing *h, struct query *q)
{
    const struct journal_observation o = {
        .number = query_int(q, 0),
        .ident = query_text(q, 1),
        .day = query_text(q, 2),
        .what = query_text(q, 3),
        .subject = query_text(q, 4),
        .result = query_text(q, 5),
        .count = query_int(q, 6),
        .note = query_text(q, 7),
    };
    journal_observation_line(h, &o);
}

static void withdrawal_row(struct hashing *h, struct query *q)
{
    hashing_word(h, "withdrawal");
    hashing_int(h, query_int(q, 0));
    if (query_is_null(q, 1))
        hashing_text(h, NULL);
    else
        hashing_int(h, query_int(q, 1));
    hashing_line(h);
}

static void hashed_column(struct hashing *h, struct query *q, int column)
{
    char hash[STORE_HASH_TEXT];
    size_t n;
    const char *bytes = query_bytes(q, column, &n);
    store_hash(bytes, n, hash);
    hashing_text(h, hash);
}

static void record_row(struct hashing *h, struct query *q)
{
    hashing_word(h, "record");
    hashing_text(h, query_text(q, 0));
    hashed_column(h, q, 1);
    hashed_column(h, q, 2);
    hashed_column(h, q, 3);
    hashing_text(h, query_text(q, 4));
    hashing_line(h);
}

/* Feeds the rows of one table that belong to an entry; returns how many. */
static int64_t feed_rows(const struct base *b, struct hashing *h, const char *sql, int64_t seq,
                         void (*row)(struct hashing *, struct query *), ohmen_status *status,
                         ohmen_error *e)
{
    int64_t n = 0;
    if (*status != OHMEN_OK)
        return 0;
    struct query q = query_new(b, sql, e);
    query_bind_int(&q, 1, seq);
    for (; query_row(&q); n++)
        row(h, &q);
    *status = query_end(&q);
    return n;
}

ohmen_status journal_digest(const struct base *b, struct arena *a, int64_t seq,
                            struct journal_entry *counted, char digest[STORE_HASH_TEXT],
                            ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    struct hashing h;
    hashing_begin(&h, a, "ohmen digest 1");
    counted->changes =
        feed_rows(b, &h, "SELECT kind, id, body FROM version WHERE seq = ?1 ORDER BY kind, id", seq,
                  version_row, &status, e);
    counted->observations =
        feed_rows(b, &h,
                  "SELECT number, ident, day, what, subject, result, count, note FROM observation "
                  "WHERE seq = ?1 ORDER BY number",
                  seq, observation_row, &status, e);
    counted->withdrawals = feed_rows(b, &h,
                                     "SELECT observation, replaced_by FROM withdrawal "
                                     "WHERE seq = ?1 ORDER BY observation",
                                     seq, withdrawal_row, &status, e);
    counted->records = feed_rows(b, &h,
                                 "SELECT id, manifest, results, text, supersedes FROM record "
                                 "WHERE seq = ?1 ORDER BY id",
                                 seq, record_row, &status, e);
    hashing_end(&h, digest);
    return status;
}

void journal_signature_hash(struct query *q, struct arena *a, char hash[STORE_HASH_TEXT])
{
    struct hashing h;
    hashing_begin(&h, a, "ohmen signature 1");
    line_int(&h, "number", query_int(q, 0));
    line_text(&h, "of", query_text(q, 1));
    line_text(&h, "role", query_text(q, 2));
    line_text(&h, "key", query_text(q, 3));
    line_text(&h, "sig", query_text(q, 4));
    line_int(&h, "utc", query_int(q, 5));
    line_text(&h, "prev", query_text(q, 6));
    hashing_end(&h, hash);
}

void journal_seal_hash(struct query *q, struct arena *a, char hash[STORE_HASH_TEXT])
{
    struct hashing h;
    hashing_begin(&h, a, "ohmen seal 1");
    line_int(&h, "number", query_int(q, 0));
    line_int(&h, "seq", query_int(q, 1));
    line_text(&h, "text", query_text(q, 2));
    line_text(&h, "sig", query_text(q, 3));
    line_text(&h, "prev", query_text(q, 4));
    hashing_end(&h, hash);
}
