/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The rows of one entry: inserted, read back and re-hashed, and what follows from them.
 * Owns nothing. Invariant: commit_write succeeds only if what stands in the file hashes
 * to what was meant. */
#include "store/commit.h"

/* --- writing --- */

static void make_digest(struct commit *c)
{
    struct hashing h;
    char *digest = arena_alloc(c->a, STORE_HASH_TEXT);
    hashing_begin(&h, c->a, "ohmen digest 1");
    for (size_t i = 0; i < c->changes.n; i++)
        journal_version_line(&h, c->changes.at[i].kind, c->changes.at[i].in->id,
                             c->changes.at[i].body);
    for (size_t i = 0; i < c->observations.n; i++)
        journal_observation_line(&h, &c->observations.at[i]);
    hashing_end(&h, digest);
    c->entry.digest = digest;
    c->entry.changes = (int64_t)c->changes.n;
    c->entry.observations = (int64_t)c->observations.n;
}

static ohmen_status make_entry(struct commit *c, int64_t head)
{
    char *hash = arena_alloc(c->a, STORE_HASH_TEXT);
    struct query q = query_new(&c->s->base, "SELECT hash FROM entry WHERE seq = ?1", c->e);
    query_bind_int(&q, 1, head);
    c->entry.prev = query_row(&q) ? query_copy(&q, 0, c->a) : JOURNAL_FIRST;
    c->entry.seq = head + 1;
    make_digest(c);
    journal_entry_hash(c->a, &c->entry, hash);
    c->entry.hash = hash;
    return query_end(&q);
}

static ohmen_status write_entry(struct commit *c)
{
    const struct journal_entry *n = &c->entry;
    struct query q = query_new(&c->s->base,
                               "INSERT INTO entry(" JOURNAL_ENTRY_COLUMNS ") VALUES(?1, ?2, ?3, "
                               "?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13)",
                               c->e);
    query_bind_int(&q, 1, n->seq);
    query_bind_int(&q, 2, n->utc);
    query_bind_text(&q, 3, n->author);
    query_bind_text(&q, 4, n->reason);
    query_bind_text(&q, 5, n->command);
    query_bind_text(&q, 6, n->tool);
    query_bind_int(&q, 7, n->changes);
    query_bind_int(&q, 8, n->observations);
    query_bind_int(&q, 9, n->withdrawals);
    query_bind_int(&q, 10, n->records);
    query_bind_text(&q, 11, n->digest);
    query_bind_text(&q, 12, n->prev);
    query_bind_text(&q, 13, n->hash);
    query_run(&q);
    return query_end(&q);
}

/* A body that is there already stays; reading back tells whether it is the same. */
static ohmen_status write_bodies(struct commit *c)
{
    struct query q = query_new(&c->s->base,
                               "INSERT INTO body(hash, kind, format, json) "
                               "VALUES(?1, ?2, ?3, ?4) ON CONFLICT(hash) DO NOTHING",
                               c->e);
    for (size_t i = 0; i < c->changes.n; i++) {
        if (!c->changes.at[i].body)
            continue;
        query_bind_text(&q, 1, c->changes.at[i].body);
        query_bind_text(&q, 2, c->changes.at[i].kind);
        query_bind_int(&q, 3, STORE_BODY_FORMAT);
        query_bind_text(&q, 4, c->changes.at[i].in->json);
        query_run(&q);
    }
    return query_end(&q);
}

static ohmen_status write_versions(struct commit *c)
{
    struct query q = query_new(
        &c->s->base, "INSERT INTO version(seq, kind, id, body) VALUES(?1, ?2, ?3, ?4)", c->e);
    for (size_t i = 0; i < c->changes.n; i++) {
        query_bind_int(&q, 1, c->entry.seq);
        query_bind_text(&q, 2, c->changes.at[i].kind);
        query_bind_text(&q, 3, c->changes.at[i].in->id);
        query_bind_text(&q, 4, c->changes.at[i].body);
        query_run(&q);
    }
    return query_end(&q);
}

static ohmen_status write_observations(struct commit *c)
{
    struct query q = query_new(&c->s->base,
                               "INSERT INTO observation(number, seq, ident, day, what, subject, "
                               "result, count, note) VALUES(?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9)",
                               c->e);
    for (size_t i = 0; i < c->observations.n; i++) {
        const struct journal_observation *o = &c->observations.at[i];
        query_bind_int(&q, 1, o->number);
        query_bind_int(&q, 2, c->entry.seq);
        query_bind_text(&q, 3, o->ident);
        query_bind_text(&q, 4, o->day);
        query_bind_text(&q, 5, o->what);
        query_bind_text(&q, 6, o->subject);
        query_bind_text(&q, 7, o->result);
        query_bind_int(&q, 8, o->count);
        query_bind_text(&q, 9, o->note);
        query_run(&q);
    }
    return query_end(&q);
}

/* --- reading back --- */

static ohmen_status not_as_meant(struct commit *c, const char *what)
{
    return error_set(c->e, OHMEN_IO,
                     "what was written to %s does not read back as it was meant (%s); nothing was "
                     "stored",
                     c->s->base.name, what);
}

static ohmen_status prove_entry(struct commit *c)
{
    char digest[STORE_HASH_TEXT], hash[STORE_HASH_TEXT];
    struct journal_entry found = {0}, counted = {0};
    struct query q =
        query_new(&c->s->base, "SELECT " JOURNAL_ENTRY_COLUMNS " FROM entry WHERE seq = ?1", c->e);
    query_bind_int(&q, 1, c->entry.seq);
    if (query_row(&q))
        journal_entry_read(&q, c->a, &found);
    ohmen_status status = query_end(&q);
    if (status == OHMEN_OK)
        status = journal_digest(&c->s->base, c->a, c->entry.seq, &counted, digest, c->e);
    if (status != OHMEN_OK)
        return status;
    if (found.seq != c->entry.seq || !text_equal(digest, c->entry.digest))
        return not_as_meant(c, "the digest");
    journal_entry_hash(c->a, &found, hash);
    return text_equal(hash, c->entry.hash) && text_equal(found.hash, c->entry.hash)
               ? OHMEN_OK
               : not_as_meant(c, "the entry");
}

static ohmen_status prove_bodies(struct commit *c)
{
    struct query bodies = query_new(&c->s->base, STATE_BODY_SQL, c->e);
    for (size_t i = 0; i < c->changes.n && bodies.status == OHMEN_OK; i++) {
        const struct change *change = &c->changes.at[i];
        const struct state_row row = {.kind = change->kind, .id = change->in->id};
        struct arena *scratch = arena_child(c->a);
        const char *json;
        size_t n;
        if (change->body)
            state_body(&bodies, scratch, change->body, &row, &json, &n);
        arena_free(scratch);
    }
    return query_end(&bodies);
}

/* --- what follows --- */

static ohmen_status update_heads(struct commit *c)
{
    struct query put = query_new(&c->s->base, REBUILD_PUT_SQL, c->e);
    struct query drop = query_new(&c->s->base, REBUILD_DROP_SQL, c->e);
    for (size_t i = 0; i < c->changes.n; i++) {
        const struct change *change = &c->changes.at[i];
        const struct state_row row = {
            .kind = change->kind, .id = change->in->id, .body = change->body, .seq = c->entry.seq};
        rebuild_head(&put, &drop, &row);
    }
    ohmen_status status = query_end(&put), other = query_end(&drop);
    return status != OHMEN_OK ? status : other;
}

static ohmen_status take_snapshot(struct commit *c)
{
    const struct base *b = &c->s->base;
    int64_t last, changes = 0, live = 0;
    ohmen_status status = query_number(b, "SELECT max(at) FROM snapshot", 0, 0, &last, c->e);
    if (status == OHMEN_OK)
        status =
            query_number(b, "SELECT count(*) FROM version WHERE seq > ?1", last, 0, &changes, c->e);
    if (status == OHMEN_OK)
        status = query_number(b, "SELECT count(*) FROM object", 0, 0, &live, c->e);
    if (status != OHMEN_OK || !rebuild_snapshot_due(changes, live))
        return status;
    return rebuild_snapshot(b, c->entry.seq, c->e);
}

static ohmen_status update_rows(struct commit *c)
{
    struct units units;
    ohmen_status status = rebuild_units(c->s, c->a, &units, c->e);
    if (status != OHMEN_OK)
        return status;
    struct derivation *d = derive_begin(c->a, &c->s->base, store_projection(c->s), &units, c->e);
    for (size_t i = 0; i < c->changes.n && status == OHMEN_OK; i++) {
        const struct store_change *in = c->changes.at[i].in;
        status = derive_object(d, in->kind, in->id, in->json, in->n);
    }
    ohmen_status end = derive_end(d);
    return status != OHMEN_OK ? status : end;
}

/* Units decide how every quantity reads, so that a change of the settings derives all
 * anew; so does a file whose derived tables another version made. */
static ohmen_status follow(struct commit *c)
{
    bool ours;
    if (c->changes.n == 0)
        return OHMEN_OK;
    ohmen_status status = rebuild_layout_is_ours(c->s, &ours, c->e);
    if (status != OHMEN_OK)
        return status;
    if (c->settings || !ours)
        return rebuild_all(c->s, c->e);
    status = update_heads(c);
    if (status == OHMEN_OK)
        status = take_snapshot(c);
    return status == OHMEN_OK ? update_rows(c) : status;
}

ohmen_status commit_write(struct commit *c, int64_t head)
{
    ohmen_status status = make_entry(c, head);
    if (status == OHMEN_OK)
        status = write_entry(c);
    if (status == OHMEN_OK)
        status = write_bodies(c);
    if (status == OHMEN_OK)
        status = write_versions(c);
    if (status == OHMEN_OK)
        status = write_observations(c);
    if (status == OHMEN_OK)
        status = prove_entry(c);
    if (status == OHMEN_OK)
        status = prove_bodies(c);
    return status == OHMEN_OK ? follow(c) : status;
}
