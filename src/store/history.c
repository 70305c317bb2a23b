/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The journal as it is listed: entries, and the versions of objects. Owns nothing. */
#include <stdio.h>

#include "base/text.h"
#include "store/internal.h"
#include "store/journal.h"

static void copy_hash(char to[STORE_HASH_TEXT], const char *from)
{
    snprintf(to, STORE_HASH_TEXT, "%s", from ? from : "");
}

static void read_entry(struct query *q, struct arena *a, struct store_entry *out)
{
    struct journal_entry found;
    journal_entry_read(q, a, &found);
    *out = (struct store_entry){.seq = (uint64_t)found.seq,
                                .utc = found.utc,
                                .author = found.author,
                                .reason = found.reason,
                                .command = found.command,
                                .tool = found.tool,
                                .n_changes = (uint64_t)found.changes,
                                .n_observations = (uint64_t)found.observations};
    copy_hash(out->prev, found.prev);
    copy_hash(out->digest, found.digest);
    copy_hash(out->hash, found.hash);
}

ohmen_status store_entries(struct store *s, uint64_t first, uint64_t last,
                           struct store_entries *out, ohmen_error *e)
{
    struct store_entries found = {0};
    struct query q = query_new(&s->base,
                               "SELECT " JOURNAL_ENTRY_COLUMNS " FROM entry "
                               "WHERE seq >= ?1 AND seq <= ?2 ORDER BY seq",
                               e);
    query_bind_int(&q, 1, state_limit(first));
    query_bind_int(&q, 2, state_limit(last));
    while (query_row(&q))
        read_entry(&q, s->arena, array_push(s->arena, &found));
    ohmen_status status = query_end(&q);
    if (status == OHMEN_OK)
        *out = found;
    return status;
}

static void read_version(struct query *q, struct query *bodies, struct arena *a,
                         struct store_version *out)
{
    const struct state_row row = {.kind = query_name(q, 1), .id = arena_str(a, query_name(q, 2))};
    out->seq = (uint64_t)query_int(q, 0);
    out->kind = kind_named(row.kind);
    out->id = row.id;
    if (out->kind == KIND_COUNT)
        query_fail(q, OHMEN_REGISTER, "%s is damaged: there is no kind of object \"%s\"",
                   q->base->name, row.kind);
    else if (!query_is_null(q, 3))
        q->status = state_body(bodies, a, query_text(q, 3), &row, &out->json, &out->n);
}

ohmen_status store_versions(struct store *s, const char *id, struct store_versions *out,
                            ohmen_error *e)
{
    struct store_versions found = {0};
    ohmen_status status = store_read_begin(s, e);
    if (status != OHMEN_OK)
        return status;
    struct query bodies = query_new(&s->base, STATE_BODY_SQL, e);
    struct query q =
        query_new(&s->base,
                  id ? "SELECT seq, kind, id, body FROM version WHERE id = ?1 ORDER BY seq, kind"
                     : "SELECT seq, kind, id, body FROM version ORDER BY seq, kind, id",
                  e);
    if (id)
        query_bind_text(&q, 1, id);
    while (bodies.status == OHMEN_OK && query_row(&q))
        read_version(&q, &bodies, s->arena, array_push(s->arena, &found));
    query_end(&bodies);
    status = store_read_end(s, query_end(&q), e);
    if (status == OHMEN_OK)
        *out = found;
    return status;
}
