/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The derived tables as a whole: replayed from the enduring ones, entry by entry, just
 * as the commits made them. Owns nothing.
 *
 * Invariant: what rebuild_fill makes in an empty database is equal to what the commits
 * made in the file, row by row; the audit compares the two. */
#include <string.h>

#include "doc/json.h"
#include "model/model.h"
#include "store/projection.h"

struct projection *store_projection(struct store *s)
{
    if (!s->projection)
        s->projection = projection_new(s->arena);
    return s->projection;
}

/* --- snapshots and heads --- */

bool rebuild_snapshot_due(int64_t changes, int64_t live)
{
    return changes > live / 2;
}

ohmen_status rebuild_snapshot(const struct base *to, int64_t seq, ohmen_error *e)
{
    struct query q = query_new(to,
                               "INSERT INTO snapshot(at, kind, id, seq, body) "
                               "SELECT ?1, kind, id, seq, body FROM object",
                               e);
    query_bind_int(&q, 1, seq);
    query_run(&q);
    return query_end(&q);
}

void rebuild_head(struct query *put, struct query *drop, const struct state_row *row)
{
    struct query *q = row->body ? put : drop;
    query_bind_text(q, 1, row->kind);
    query_bind_text(q, 2, row->id);
    if (row->body) {
        query_bind_int(q, 3, row->seq);
        query_bind_text(q, 4, row->body);
    }
    query_run(q);
}

/* --- replay --- */

struct replay {
    const struct base *to;
    struct query put, drop;
    int64_t seq;           /* of the entry under way; 0: none */
    int64_t changes, live; /* since the last snapshot; now */
    ohmen_status status;
    ohmen_error *e;
};

/* Behind the last version of an entry. */
static void end_entry(struct replay *r)
{
    if (r->seq == 0 || r->status != OHMEN_OK || !rebuild_snapshot_due(r->changes, r->live))
        return;
    r->status = rebuild_snapshot(r->to, r->seq, r->e);
    r->changes = 0;
}

static void replay_row(struct replay *r, const struct state_row *row, bool was_live)
{
    if (row->seq != r->seq)
        end_entry(r);
    r->seq = row->seq;
    rebuild_head(&r->put, &r->drop, row);
    r->changes++;
    r->live += (row->body ? 1 : 0) - (was_live ? 1 : 0);
    if (r->status == OHMEN_OK)
        r->status = r->put.status != OHMEN_OK ? r->put.status : r->drop.status;
}

/* Every version with whether its object was live before it. */
#define VERSIONS_SQL                                                                               \
    "SELECT seq, kind, id, body, (SELECT p.body IS NOT NULL FROM version p "                       \
    "WHERE p.id = v.id AND p.kind = v.kind AND p.seq < v.seq ORDER BY p.seq DESC LIMIT 1) "        \
    "FROM version v ORDER BY seq, kind, id"

static ohmen_status fill_heads(struct store *s, const struct base *to, ohmen_error *e)
{
    struct replay r = {.to = to, .e = e};
    r.put = query_new(to, REBUILD_PUT_SQL, e);
    r.drop = query_new(to, REBUILD_DROP_SQL, e);
    struct query q = query_new(&s->base, VERSIONS_SQL, e);
    while (r.status == OHMEN_OK && query_row(&q)) {
        struct state_row row = {.seq = query_int(&q, 0),
                                .kind = query_text(&q, 1),
                                .id = query_text(&q, 2),
                                .body = query_text(&q, 3)};
        replay_row(&r, &row, query_int(&q, 4) != 0);
    }
    end_entry(&r);
    ohmen_status status = query_end(&q);
    ohmen_status put = query_end(&r.put), drop = query_end(&r.drop);
    return status != OHMEN_OK     ? status
           : r.status != OHMEN_OK ? r.status
           : put != OHMEN_OK      ? put
                                  : drop;
}

/* --- rows of the live objects --- */

ohmen_status rebuild_units(struct store *s, struct arena *a, struct units *out, ohmen_error *e)
{
    struct query q = query_new(&s->base,
                               "SELECT v.body, b.json FROM version v LEFT JOIN body b "
                               "ON b.hash = v.body WHERE v.id = ?1 AND v.kind = ?2 "
                               "ORDER BY v.seq DESC LIMIT 1",
                               e);
    query_bind_text(&q, 1, REGISTER_ID);
    query_bind_text(&q, 2, kinds[KIND_REGISTER].name);
    const char *json = NULL;
    if (query_row(&q))
        json = query_copy(&q, 1, a);
    ohmen_status status = query_end(&q);
    struct node *settings = NULL;
    if (status == OHMEN_OK && json)
        status = json_read(a, json, strlen(json), REGISTER_ID, &settings, e);
    if (status == OHMEN_OK)
        *out = model_units(a, settings);
    return status;
}

static void derive_row(struct derivation *d, struct query *bodies, struct arena *a,
                       const struct state_row *row)
{
    const char *json;
    size_t n;
    enum kind kind = kind_named(row->kind);
    if (kind == KIND_COUNT)
        query_fail(bodies, OHMEN_REGISTER, "%s is damaged: there is no kind of object \"%s\"",
                   bodies->base->name, row->kind);
    else if (state_body(bodies, a, row->body, row, &json, &n) == OHMEN_OK)
        bodies->status = derive_object(d, kind, row->id, json, n);
}

static ohmen_status fill_objects(struct store *s, struct arena *a, const struct base *to,
                                 ohmen_error *e)
{
    struct units units;
    ohmen_status status = rebuild_units(s, a, &units, e);
    if (status != OHMEN_OK)
        return status;
    struct derivation *d = derive_begin(a, to, store_projection(s), &units, e);
    struct query bodies = query_new(&s->base, STATE_BODY_SQL, e);
    struct query q = query_new(to, "SELECT kind, id, body, seq FROM object", e);
    while (bodies.status == OHMEN_OK && query_row(&q)) {
        struct arena *scratch = arena_child(a);
        struct state_row row = {.kind = query_name(&q, 0),
                                .id = arena_str(scratch, query_name(&q, 1)),
                                .body = query_name(&q, 2)};
        derive_row(d, &bodies, scratch, &row);
        arena_free(scratch);
    }
    status = query_end(&q);
    ohmen_status read = query_end(&bodies), written = derive_end(d);
    return status != OHMEN_OK ? status : read != OHMEN_OK ? read : written;
}

ohmen_status rebuild_fill(struct store *s, const struct base *to, ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    ohmen_status status = fill_heads(s, to, e);
    if (status == OHMEN_OK)
        status = fill_objects(s, a, to, e);
    arena_free(a);
    return status;
}

/* --- the layout --- */

/* SQL without its comments: another wording of a help text is no other layout. */
static const char *bare(struct arena *a, const char *sql)
{
    struct text t;
    text_init(&t, a);
    while (*sql) {
        size_t n = strcspn(sql, "\n"), keep = n;
        for (size_t i = 0; i + 1 < n && keep == n; i++)
            if (sql[i] == '-' && sql[i + 1] == '-')
                keep = i;
        text_addn(&t, sql, keep);
        sql += n + (sql[n] == '\n');
    }
    return text_str(&t);
}

static bool has_layout(struct query *q, struct arena *a, const char *name, const char *sql)
{
    query_bind_text(q, 1, name);
    bool same = query_row(q) && text_equal(bare(a, query_name(q, 0)), bare(a, sql));
    query_reset(q);
    return same;
}

ohmen_status rebuild_layout_is_ours(struct store *s, bool *ours, ohmen_error *e)
{
    struct projection *p = store_projection(s);
    struct arena *a = arena_child(s->arena);
    struct query q = query_new(&s->base, "SELECT sql FROM sqlite_schema WHERE name = ?1", e);
    bool same = true;
    for (size_t i = 0; i < projection_n_fixed && same; i++)
        same = has_layout(&q, a, projection_fixed[i].name, projection_fixed[i].sql);
    for (size_t i = 0; i < p->relations.n && same; i++)
        same = has_layout(&q, a, p->relations.at[i]->name, projection_sql(a, p->relations.at[i]));
    ohmen_status status = query_end(&q);
    arena_free(a);
    if (status == OHMEN_OK)
        *ours = same;
    return status;
}

/* Tables that are not enduring ones; their indexes go with them. */
static ohmen_status drop_derived(struct store *s, struct arena *a, ohmen_error *e)
{
    ARRAY(const char *) names = {0};
    struct query q = query_new(&s->base,
                               "SELECT name FROM sqlite_schema WHERE type = 'table' AND name NOT "
                               "IN ('meta', 'entry', 'body', 'version', 'observation', "
                               "'withdrawal', 'record', 'signature', 'seal') "
                               "AND name NOT LIKE 'sqlite%' ORDER BY name",
                               e);
    while (query_row(&q))
        *array_push(a, &names) = query_copy(&q, 0, a);
    ohmen_status status = query_end(&q);
    for (size_t i = 0; i < names.n && status == OHMEN_OK; i++) {
        char *sql = sqlite3_mprintf("DROP TABLE \"%w\"", names.at[i]);
        if (!sql)
            return error_set(e, OHMEN_MEMORY, "out of memory while using %s", s->base.name);
        status = query_exec(&s->base, sql, e);
        sqlite3_free(sql);
    }
    return status;
}

ohmen_status rebuild_all(struct store *s, ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    ohmen_status status = drop_derived(s, a, e);
    if (status == OHMEN_OK)
        status = derive_create(a, &s->base, store_projection(s), e);
    if (status == OHMEN_OK)
        status = rebuild_fill(s, &s->base, e);
    arena_free(a);
    return status;
}

ohmen_status store_rebuild(struct store *s, ohmen_error *e)
{
    ohmen_status status = store_write_begin(s, e);
    if (status != OHMEN_OK)
        return status;
    return store_write_end(s, rebuild_all(s, e), e);
}
