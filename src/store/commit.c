/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Writing one entry, all or nothing.
 *
 * The order inside BEGIN IMMEDIATE: refuse what is stale; leave out what is known;
 * write bodies, entry, versions, observations; read them back and re-hash; let heads,
 * snapshot, tables and references follow; commit. Owns the prepared change until then.
 * Invariant: nothing is committed that was not read back as it was meant. */
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"
#include "store/journal.h"
#include "store/projection.h"

struct change {
    const char *kind; /* name */
    const struct store_change *in;
    const char *body; /* hash; NULL: removed */
};

struct commit {
    struct store *s;
    const struct store_transaction *t;
    struct arena *a;
    ohmen_error *e;
    ARRAY(struct change) changes; /* sorted by bytes of kind and id; only real ones */
    ARRAY(struct journal_observation) observations; /* only new ones */
    struct journal_entry entry;
    bool settings; /* the register's own object is among the changes */
};

/* --- what is given --- */

static ohmen_status check_text(const char *name, const char *s, ohmen_error *e)
{
    size_t n = strlen(s), bad = utf8_check(s, n);
    if (bad < n)
        return error_set(e, OHMEN_INPUT, "the %s of the entry is no valid UTF-8 at byte %zu", name,
                         bad);
    return OHMEN_OK;
}

static const char *or_empty(const char *s)
{
    return s ? s : "";
}

static ohmen_status take_texts(struct commit *c)
{
    const struct store_transaction *t = c->t;
    c->entry.utc = t->utc;
    c->entry.author = or_empty(t->author);
    c->entry.reason = or_empty(t->reason);
    c->entry.command = or_empty(t->command);
    c->entry.tool = or_empty(t->tool);
    ohmen_status status = check_text("author", c->entry.author, c->e);
    if (status == OHMEN_OK)
        status = check_text("reason", c->entry.reason, c->e);
    if (status == OHMEN_OK)
        status = check_text("command", c->entry.command, c->e);
    return status == OHMEN_OK ? check_text("tool", c->entry.tool, c->e) : status;
}

static int compare_changes(const void *p, const void *q)
{
    const struct change *a = p, *b = q;
    int order = text_compare(a->kind, b->kind);
    return order ? order : text_compare(a->in->id, b->in->id);
}

static void hash_change(struct commit *c, const struct store_change *in)
{
    struct change *change = array_push(c->a, &c->changes);
    change->kind = kinds[in->kind].name;
    change->in = in;
    if (!in->json)
        return;
    char *hash = arena_alloc(c->a, STORE_HASH_TEXT);
    journal_body_hash(c->a, change->kind, STORE_BODY_FORMAT, in->json, in->n, hash);
    change->body = hash;
}

static ohmen_status take_changes(struct commit *c)
{
    for (size_t i = 0; i < c->t->n_changes; i++)
        hash_change(c, &c->t->changes[i]);
    if (c->changes.n > 1)
        qsort(c->changes.at, c->changes.n, sizeof *c->changes.at, compare_changes);
    for (size_t i = 1; i < c->changes.n; i++)
        if (compare_changes(&c->changes.at[i - 1], &c->changes.at[i]) == 0)
            return error_set(c->e, OHMEN_INTERNAL, "%s %s is changed twice in one entry",
                             c->changes.at[i].kind, c->changes.at[i].in->id);
    return OHMEN_OK;
}

/* --- stale writes --- */

#define NAMES_TOLD 5

struct stale {
    struct text names;
    size_t n;
};

static void note_stale(struct stale *stale, const char *id)
{
    if (stale->n++ < NAMES_TOLD)
        text_printf(&stale->names, "%s%s", stale->n > 1 ? ", " : "", id);
}

/* A row: the object changed since the head that the changes were prepared on. */
static void look_for(struct commit *c, struct query *q, const char *id, const char *kind,
                     struct stale *stale)
{
    query_bind_text(q, 1, id);
    query_bind_int(q, 2, (int64_t)c->t->prepared_on);
    if (kind)
        query_bind_text(q, 3, kind);
    if (query_row(q))
        note_stale(stale, id);
    query_reset(q);
}

static ohmen_status find_stale(struct commit *c, struct stale *stale)
{
    struct query written = query_new(
        &c->s->base, "SELECT 1 FROM version WHERE id = ?1 AND seq > ?2 AND kind = ?3 LIMIT 1", c->e);
    for (size_t i = 0; i < c->changes.n; i++)
        look_for(c, &written, c->changes.at[i].in->id, c->changes.at[i].kind, stale);
    ohmen_status status = query_end(&written);
    if (status != OHMEN_OK)
        return status;
    struct query read = query_new(
        &c->s->base, "SELECT 1 FROM version WHERE id = ?1 AND seq > ?2 LIMIT 1", c->e);
    for (size_t i = 0; i < c->t->n_read; i++)
        look_for(c, &read, c->t->read[i], NULL, stale);
    return query_end(&read);
}

static ohmen_status refuse_stale(struct commit *c, int64_t head)
{
    unsigned long long on = c->t->prepared_on;
    if (c->t->prepared_on > (uint64_t)head)
        return error_set(c->e, OHMEN_CONFLICT,
                         "the changes were prepared on entry %llu, but %s ends with entry %lld", on,
                         c->s->base.name, (long long)head);
    struct stale stale = {0};
    text_init(&stale.names, c->a);
    ohmen_status status = find_stale(c, &stale);
    if (status != OHMEN_OK || stale.n == 0)
        return status;
    if (stale.n > NAMES_TOLD)
        text_printf(&stale.names, " and %zu more", stale.n - NAMES_TOLD);
    return error_set(c->e, OHMEN_CONFLICT,
                     "changed since entry %llu, on which the changes were prepared: %s; nothing "
                     "was stored",
                     on, text_str(&stale.names));
}

/* --- leaving out what is known --- */

static bool is_known(struct query *q, const struct change *change)
{
    query_bind_text(q, 1, change->in->id);
    query_bind_text(q, 2, change->kind);
    const char *present = query_row(q) ? query_text(q, 0) : NULL;
    bool known = present && change->body ? text_equal(present, change->body)
                                         : !present && !change->body;
    query_reset(q);
    return known;
}

static ohmen_status drop_known_changes(struct commit *c)
{
    struct query q = query_new(&c->s->base,
                               "SELECT body FROM version WHERE id = ?1 AND kind = ?2 "
                               "ORDER BY seq DESC LIMIT 1",
                               c->e);
    size_t kept = 0;
    for (size_t i = 0; i < c->changes.n; i++) {
        struct change change = c->changes.at[i];
        if (is_known(&q, &change))
            continue;
        c->changes.at[kept++] = change;
        c->settings = c->settings || change.in->kind == KIND_REGISTER;
    }
    c->changes.n = kept;
    return query_end(&q);
}

static ohmen_status add_observation(struct commit *c, const struct store_observation *o,
                                    int64_t number)
{
    char date[DATE_TEXT];
    if (o->day == DAY_NONE)
        return error_set(c->e, OHMEN_INTERNAL, "observation %s has no date", o->ident);
    *array_push(c->a, &c->observations) =
        (struct journal_observation){.number = number,
                                     .count = o->count,
                                     .ident = o->ident,
                                     .day = arena_str(c->a, date_write(date, o->day)),
                                     .what = or_empty(o->what),
                                     .subject = or_empty(o->subject),
                                     .result = or_empty(o->result),
                                     .note = or_empty(o->note)};
    return OHMEN_OK;
}

static ohmen_status take_observations(struct commit *c)
{
    int64_t last;
    struct strmap seen = {0};
    ohmen_status status =
        query_number(&c->s->base, "SELECT max(number) FROM observation", 0, 0, &last, c->e);
    struct query q =
        query_new(&c->s->base, "SELECT 1 FROM observation WHERE ident = ?1", c->e);
    for (size_t i = 0; i < c->t->n_observations && status == OHMEN_OK; i++) {
        const struct store_observation *o = &c->t->observations[i];
        query_bind_text(&q, 1, o->ident);
        bool known = query_row(&q) || strmap_has(&seen, o->ident);
        query_reset(&q);
        strmap_set(c->a, &seen, o->ident, c);
        status = q.status;
        if (!known && status == OHMEN_OK)
            status = add_observation(c, o, last + 1 + (int64_t)c->observations.n);
    }
    ohmen_status end = query_end(&q);
    return status != OHMEN_OK ? status : end;
}

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
    struct query q = query_new(
        &c->s->base, "SELECT " JOURNAL_ENTRY_COLUMNS " FROM entry WHERE seq = ?1", c->e);
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
    for (size_t i = 0; i < c->changes.n && put.status == OHMEN_OK && drop.status == OHMEN_OK; i++) {
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
        status = query_number(b, "SELECT count(*) FROM version WHERE seq > ?1", last, 0, &changes,
                              c->e);
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
    struct derivation *d =
        derive_begin(c->a, &c->s->base, store_projection(c->s), &units, c->e);
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

/* --- the whole --- */

static ohmen_status write_all(struct commit *c, int64_t head)
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

/* Under the lock. c->entry.seq stays 0 when nothing is left to write. */
static ohmen_status commit_locked(struct commit *c)
{
    int64_t head;
    ohmen_status status =
        query_number(&c->s->base, "SELECT max(seq) FROM entry", 0, 0, &head, c->e);
    if (status == OHMEN_OK)
        status = refuse_stale(c, head);
    if (status == OHMEN_OK)
        status = drop_known_changes(c);
    if (status == OHMEN_OK)
        status = take_observations(c);
    if (status != OHMEN_OK || (c->changes.n == 0 && c->observations.n == 0))
        return status;
    return write_all(c, head);
}

ohmen_status store_commit(struct store *s, const struct store_transaction *t, uint64_t *seq,
                          ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    struct commit c = {.s = s, .t = t, .a = a, .e = e};
    ohmen_status status = take_texts(&c);
    if (status == OHMEN_OK)
        status = take_changes(&c);
    if (status == OHMEN_OK)
        status = store_write_begin(s, e);
    if (status == OHMEN_OK)
        status = store_write_end(s, commit_locked(&c), e);
    if (status == OHMEN_OK)
        *seq = (uint64_t)c.entry.seq;
    arena_free(a);
    return status;
}
