/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The audit of the enduring tables: every column of every row is held against a hash,
 * and every hash against the chain.
 *
 * Owns nothing. Invariant: each check goes on after a finding; a check that the file is
 * too damaged for is itself a finding. */
#include <string.h>

#include "store/journal.h"
#include "store/verify.h"

void audit_find(struct audit *v, const char *format, ...)
{
    if (v->count++ >= VERIFY_KEPT)
        return;
    va_list args;
    va_start(args, format);
    *array_push(v->s->arena, &v->found) = arena_vprintf(v->s->arena, format, args);
    va_end(args);
}

ohmen_status audit_outcome(struct audit *v, const char *what, ohmen_status status,
                           const ohmen_error *why)
{
    if (status == OHMEN_OK)
        return OHMEN_OK;
    if (status == OHMEN_REGISTER || status == OHMEN_INTERNAL) {
        audit_find(v, "%s cannot be proved: %s", what, why->text);
        return OHMEN_OK;
    }
    return error_set(v->e, status, "%s", why->text);
}

static bool is_hash(const char *s)
{
    return s && strlen(s) == STORE_HASH_TEXT - 1 &&
           strspn(s, "0123456789abcdef") == STORE_HASH_TEXT - 1;
}

static bool same(const char *p, const char *q)
{
    return p && q && text_equal(p, q);
}

/* --- SQLite's own checks --- */

static ohmen_status check_pages(struct audit *v, ohmen_error *e)
{
    struct query q = query_new(&v->s->base, "PRAGMA integrity_check", e);
    while (query_row(&q))
        if (!text_equal(query_name(&q, 0), "ok"))
            audit_find(v, "the file is damaged: %s", query_name(&q, 0));
    return query_end(&q);
}

static ohmen_status check_keys(struct audit *v, ohmen_error *e)
{
    struct query q = query_new(&v->s->base, "PRAGMA foreign_key_check", e);
    while (query_row(&q))
        audit_find(v, "a row of %s refers to a row of %s that is not there", query_name(&q, 0),
                   query_name(&q, 2));
    return query_end(&q);
}

static ohmen_status check_schema(struct audit *v, ohmen_error *e)
{
    return schema_check(v->s, e);
}

/* --- bodies --- */

static void check_body(struct audit *v, struct query *q)
{
    char hash[STORE_HASH_TEXT];
    size_t n;
    const char *json = query_bytes(q, 3, &n), *kind = query_name(q, 1);
    journal_body_hash(v->a, kind, query_int(q, 2), json, n, hash);
    if (!same(hash, query_text(q, 0)))
        audit_find(v, "body %s of kind %s is not what was stored: its hash is %s", query_name(q, 0),
                   kind, hash);
    if (!query_int(q, 4))
        audit_find(v, "body %s belongs to no version", query_name(q, 0));
}

static ohmen_status check_bodies(struct audit *v, ohmen_error *e)
{
    struct query q = query_new(&v->s->base,
                               "SELECT hash, kind, format, json, EXISTS(SELECT 1 FROM version "
                               "WHERE version.body = body.hash) FROM body ORDER BY hash",
                               e);
    while (query_row(&q))
        check_body(v, &q);
    return query_end(&q);
}

static ohmen_status check_versions(struct audit *v, ohmen_error *e)
{
    struct query q = query_new(&v->s->base,
                               "SELECT v.seq, v.kind, v.id, v.body, b.kind FROM version v "
                               "LEFT JOIN body b ON b.hash = v.body ORDER BY v.seq, v.kind, v.id",
                               e);
    while (query_row(&q)) {
        const char *kind = query_name(&q, 1), *id = query_name(&q, 2);
        long long seq = query_int(&q, 0);
        if (kind_named(kind) == KIND_COUNT)
            audit_find(v, "entry %lld: %s has a kind \"%s\" that there is not", seq, id, kind);
        if (!query_is_null(&q, 3) && query_is_null(&q, 4))
            audit_find(v, "entry %lld: the body of %s %s is missing", seq, kind, id);
        else if (!query_is_null(&q, 3) && !same(query_text(&q, 4), kind))
            audit_find(v, "entry %lld: the body of %s %s is one of kind %s", seq, kind, id,
                       query_name(&q, 4));
    }
    return query_end(&q);
}

/* --- entries --- */

static void check_counts(struct audit *v, const struct journal_entry *entry,
                         const struct journal_entry *counted)
{
    const struct {
        const char *what;
        int64_t told, found;
    } all[] = {{"changes", entry->changes, counted->changes},
               {"observations", entry->observations, counted->observations},
               {"withdrawals", entry->withdrawals, counted->withdrawals},
               {"records", entry->records, counted->records}};
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++)
        if (all[i].told != all[i].found)
            audit_find(v, "entry %lld tells of %lld %s, but has %lld", (long long)entry->seq,
                       (long long)all[i].told, all[i].what, (long long)all[i].found);
}

static ohmen_status check_entry(struct audit *v, const struct journal_entry *entry,
                                const char *prev, int64_t seq, ohmen_error *e)
{
    char digest[STORE_HASH_TEXT], hash[STORE_HASH_TEXT];
    struct journal_entry counted = {0};
    long long number = entry->seq;
    if (entry->seq != seq)
        audit_find(v, "entry %lld stands where entry %lld should", number, (long long)seq);
    if (!same(entry->prev, prev))
        audit_find(v, "entry %lld does not follow the one before it: it tells of another hash",
                   number);
    journal_entry_hash(v->a, entry, hash);
    if (!same(entry->hash, hash))
        audit_find(v, "entry %lld is not what was stored: its hash is %s", number, hash);
    ohmen_status status = journal_digest(&v->s->base, v->a, entry->seq, &counted, digest, e);
    if (status != OHMEN_OK)
        return status;
    if (!same(entry->digest, digest))
        audit_find(v,
                   "entry %lld: its versions, observations, withdrawals or records are not what "
                   "was stored: their digest is %s",
                   number, digest);
    check_counts(v, entry, &counted);
    return OHMEN_OK;
}

static ohmen_status check_entries(struct audit *v, ohmen_error *e)
{
    const char *prev = JOURNAL_FIRST;
    int64_t seq = 0;
    struct query q =
        query_new(&v->s->base, "SELECT " JOURNAL_ENTRY_COLUMNS " FROM entry ORDER BY seq", e);
    while (query_row(&q)) {
        struct journal_entry entry;
        journal_entry_read(&q, v->a, &entry);
        if (q.status == OHMEN_OK)
            q.status = check_entry(v, &entry, prev, ++seq, e);
        prev = is_hash(entry.hash) ? entry.hash : "";
    }
    return query_end(&q);
}

/* Rows under a number that no entry has are under no digest. */
static ohmen_status check_strays(struct audit *v, ohmen_error *e)
{
    struct query q = query_new(
        &v->s->base,
        "SELECT 'version', seq FROM version WHERE seq NOT IN (SELECT seq FROM entry) UNION ALL "
        "SELECT 'observation', seq FROM observation WHERE seq NOT IN (SELECT seq FROM entry) "
        "UNION ALL "
        "SELECT 'withdrawal', seq FROM withdrawal WHERE seq NOT IN (SELECT seq FROM entry) "
        "UNION ALL "
        "SELECT 'record', seq FROM record WHERE seq NOT IN (SELECT seq FROM entry) UNION ALL "
        "SELECT 'seal', seq FROM seal WHERE seq NOT IN (SELECT seq FROM entry)",
        e);
    while (query_row(&q))
        audit_find(v, "a %s belongs to entry %lld, which is not there", query_name(&q, 0),
                   (long long)query_int(&q, 1));
    return query_end(&q);
}

/* --- signatures and seals: chains of their own --- */

static ohmen_status
check_chain(struct audit *v, const char *what, const char *sql, int prev_column,
            void (*hash_row)(struct query *, struct arena *, char[STORE_HASH_TEXT]), ohmen_error *e)
{
    const char *prev = JOURNAL_FIRST;
    int64_t number = 0;
    struct query q = query_new(&v->s->base, sql, e);
    while (query_row(&q)) {
        char hash[STORE_HASH_TEXT];
        long long found = query_int(&q, 0);
        if (found != ++number)
            audit_find(v, "%s %lld stands where %lld should", what, found, (long long)number);
        if (!same(query_text(&q, prev_column), prev))
            audit_find(v, "%s %lld does not follow the one before it", what, found);
        hash_row(&q, v->a, hash);
        if (!same(query_text(&q, prev_column + 1), hash))
            audit_find(v, "%s %lld is not what was stored: its hash is %s", what, found, hash);
        prev = arena_str(v->a, query_name(&q, prev_column + 1));
    }
    return query_end(&q);
}

static ohmen_status check_signatures(struct audit *v, ohmen_error *e)
{
    return check_chain(v, "signature",
                       "SELECT number, of, role, key, sig, utc, prev, hash FROM signature "
                       "ORDER BY number",
                       6, journal_signature_hash, e);
}

static ohmen_status check_seals(struct audit *v, ohmen_error *e)
{
    return check_chain(v, "seal",
                       "SELECT number, seq, text, sig, prev, hash FROM seal ORDER BY number", 4,
                       journal_seal_hash, e);
}

/* --- the whole --- */

static ohmen_status check_all(struct audit *v)
{
    static const struct {
        const char *what;
        ohmen_status (*check)(struct audit *, ohmen_error *);
    } checks[] = {{"the schema", check_schema},
                  {"the file", check_pages},
                  {"the ties of rows", check_keys},
                  {"bodies", check_bodies},
                  {"versions", check_versions},
                  {"entries", check_entries},
                  {"ties to entries", check_strays},
                  {"signatures", check_signatures},
                  {"seals", check_seals}};
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < sizeof checks / sizeof checks[0] && status == OHMEN_OK; i++) {
        ohmen_error why = OHMEN_ERROR_INIT;
        ohmen_status ended = checks[i].check(v, &why);
        status = audit_outcome(v, checks[i].what, ended, &why);
    }
    return status == OHMEN_OK ? audit_derived(v) : status;
}

ohmen_status store_verify(struct store *s, struct store_findings *out, ohmen_error *e)
{
    struct audit v = {.s = s, .a = arena_child(s->arena), .e = e};
    ohmen_error why = OHMEN_ERROR_INIT;
    ohmen_status status = audit_outcome(&v, "the file", store_read_begin(s, &why), &why);
    if (status == OHMEN_OK)
        status = store_read_end(s, check_all(&v), e);
    arena_free(v.a);
    if (status != OHMEN_OK)
        return status;
    if (v.count > VERIFY_KEPT)
        *array_push(s->arena, &v.found) =
            arena_printf(s->arena, "and %zu findings more", v.count - VERIFY_KEPT);
    *out = v.found;
    return OHMEN_OK;
}
