/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The register as of an entry: the newest snapshot before it, and the versions since.
 *
 * A snapshot is taken whenever changes since the last exceed half the live objects, so
 * that the delta is never larger than a share of what is read anyway. Both streams come
 * sorted by bytes of kind and id and are merged. Every read of the register goes
 * through here. Owns nothing. */
#include <stdio.h>

#include "base/text.h"
#include "store/internal.h"
#include "store/journal.h"

int64_t state_limit(uint64_t at)
{
    return at > INT64_MAX ? INT64_MAX : (int64_t)at;
}

ohmen_status store_head(struct store *s, uint64_t *seq, ohmen_error *e)
{
    int64_t head;
    ohmen_status status = query_number(&s->base, "SELECT max(seq) FROM entry", 0, 0, &head, e);
    if (status == OHMEN_OK)
        *seq = (uint64_t)head;
    return status;
}

ohmen_status store_at_time(struct store *s, int64_t utc, uint64_t *seq, ohmen_error *e)
{
    int64_t found;
    ohmen_status status =
        query_number(&s->base, "SELECT seq FROM entry WHERE utc <= ?1 ORDER BY seq DESC LIMIT 1",
                     utc, 0, &found, e);
    if (status == OHMEN_OK)
        *seq = (uint64_t)found;
    return status;
}

/* Rows of kind, id, body, seq into an array. */
static ohmen_status collect(struct query *q, struct arena *a, struct state_rows *out)
{
    while (query_row(q)) {
        struct state_row row = {.kind = query_copy(q, 0, a),
                                .id = query_copy(q, 1, a),
                                .body = query_copy(q, 2, a),
                                .seq = query_int(q, 3)};
        if (!row.kind || !row.id)
            query_fail(q, OHMEN_REGISTER, "%s is damaged: a version has no kind or no id",
                       q->base->name);
        else
            *array_push(a, out) = row;
    }
    return query_end(q);
}

static int compare_rows(const struct state_row *p, const struct state_row *q)
{
    int order = text_compare(p->kind, q->kind);
    return order ? order : text_compare(p->id, q->id);
}

/* The last of the versions of one object, which follow each other in order of seq. */
static size_t last_of(const struct state_rows *delta, size_t i)
{
    while (i + 1 < delta->n && compare_rows(&delta->at[i], &delta->at[i + 1]) == 0)
        i++;
    return i;
}

/* `older` overlaid by `delta`; removed objects left out. */
static void merge(struct arena *a, const struct state_rows *older, const struct state_rows *delta,
                  struct state_rows *out)
{
    size_t i = 0, j = 0;
    array_reserve(a, out, older->n + delta->n);
    while (i < older->n || j < delta->n) {
        int order = i == older->n   ? 1
                    : j == delta->n ? -1
                                    : compare_rows(&older->at[i], &delta->at[j]);
        const struct state_row *row = order < 0 ? &older->at[i] : NULL;
        if (order <= 0)
            i++;
        if (order >= 0) {
            j = last_of(delta, j);
            row = &delta->at[j++];
        }
        if (row->body)
            out->at[out->n++] = *row;
    }
}

ohmen_status state_rows(struct store *s, struct arena *a, uint64_t at, struct state_rows *out,
                        ohmen_error *e)
{
    int64_t snapshot, limit = state_limit(at);
    ohmen_status status = query_number(&s->base, "SELECT max(at) FROM snapshot WHERE at <= ?1",
                                       limit, 0, &snapshot, e);
    if (status != OHMEN_OK)
        return status;
    struct state_rows older = {0}, delta = {0};
    struct query q = query_new(
        &s->base, "SELECT kind, id, body, seq FROM snapshot WHERE at = ?1 ORDER BY kind, id", e);
    query_bind_int(&q, 1, snapshot);
    status = collect(&q, a, &older);
    if (status != OHMEN_OK)
        return status;
    q = query_new(&s->base,
                  "SELECT kind, id, body, seq FROM version WHERE seq > ?1 AND seq <= ?2 "
                  "ORDER BY kind, id, seq",
                  e);
    query_bind_int(&q, 1, snapshot);
    query_bind_int(&q, 2, limit);
    status = collect(&q, a, &delta);
    if (status == OHMEN_OK)
        merge(a, &older, &delta, out);
    return status;
}

static bool body_is_sound(struct query *bodies, struct arena *a, const char *hash, size_t *n)
{
    char found[STORE_HASH_TEXT];
    size_t kind_n;
    const char *kind = query_bytes(bodies, 0, &kind_n), *json = query_bytes(bodies, 2, n);
    if (bodies->status != OHMEN_OK)
        return false;
    journal_body_hash(a, kind, query_int(bodies, 1), json, *n, found);
    return text_equal(found, hash);
}

ohmen_status state_body(struct query *bodies, struct arena *a, const char *hash,
                        const struct state_row *of, const char **json, size_t *n)
{
    query_bind_text(bodies, 1, hash);
    if (!query_row(bodies))
        query_fail(bodies, OHMEN_REGISTER, "%s is damaged: there is no body of %s %s",
                   bodies->base->name, of->kind, of->id);
    else if (!body_is_sound(bodies, a, hash, n) || !text_equal(query_name(bodies, 0), of->kind))
        query_fail(bodies, OHMEN_REGISTER,
                   "%s is damaged: the body of %s %s is not the one that was stored",
                   bodies->base->name, of->kind, of->id);
    else if (query_int(bodies, 1) > STORE_BODY_FORMAT)
        query_fail(bodies, OHMEN_REGISTER,
                   "%s was written by a newer ohmen: the body of %s %s has format %lld",
                   bodies->base->name, of->kind, of->id, (long long)query_int(bodies, 1));
    else
        *json = arena_strn(a, query_name(bodies, 2), *n);
    query_reset(bodies);
    return bodies->status;
}

/* The object of a row, its body read and proved. */
static void read_object(struct query *bodies, struct arena *a, const struct state_row *row,
                        struct store_object *out)
{
    out->kind = kind_named(row->kind);
    out->id = row->id;
    out->seq = (uint64_t)row->seq;
    if (out->kind == KIND_COUNT)
        query_fail(bodies, OHMEN_REGISTER, "%s is damaged: there is no kind of object \"%s\"",
                   bodies->base->name, row->kind);
    else if (state_body(bodies, a, row->body, row, &out->json, &out->n) == OHMEN_OK)
        snprintf(out->hash, sizeof out->hash, "%s", row->body);
}

/* Rows come by bytes of the kind's name, objects go out by enum kind: two passes, each
 * stable. */
static ohmen_status read_objects(struct store *s, const struct state_rows *rows,
                                 struct store_objects *out, ohmen_error *e)
{
    struct query bodies = query_new(&s->base, STATE_BODY_SQL, e);
    struct store_objects of[KIND_COUNT] = {0};
    for (size_t i = 0; i < rows->n && bodies.status == OHMEN_OK; i++) {
        struct store_object object = {0};
        read_object(&bodies, s->arena, &rows->at[i], &object);
        if (bodies.status == OHMEN_OK)
            *array_push(s->arena, &of[object.kind]) = object;
    }
    ohmen_status status = query_end(&bodies);
    if (status != OHMEN_OK)
        return status;
    struct store_objects all = {0};
    array_reserve(s->arena, &all, rows->n);
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < of[k].n; i++)
            all.at[all.n++] = of[k].at[i];
    *out = all;
    return OHMEN_OK;
}

ohmen_status store_state(struct store *s, uint64_t at, struct store_objects *out, ohmen_error *e)
{
    struct state_rows rows = {0};
    struct store_objects found = {0};
    ohmen_status status = store_read_begin(s, e);
    if (status != OHMEN_OK)
        return status;
    status = state_rows(s, s->arena, at, &rows, e);
    if (status == OHMEN_OK)
        status = read_objects(s, &rows, &found, e);
    status = store_read_end(s, status, e);
    if (status == OHMEN_OK)
        *out = found;
    return status;
}

static void read_observation(struct query *q, struct arena *a, struct store_observation *out)
{
    const char *date = query_text(q, 3);
    *out = (struct store_observation){.entry = (uint64_t)query_int(q, 0),
                                      .number = (uint64_t)query_int(q, 1),
                                      .ident = query_copy(q, 2, a),
                                      .what = query_copy(q, 4, a),
                                      .subject = query_copy(q, 5, a),
                                      .result = query_copy(q, 6, a),
                                      .note = query_copy(q, 7, a),
                                      .count = query_int(q, 8)};
    if (!date || !date_read(date, &out->day))
        query_fail(q, OHMEN_REGISTER, "%s is damaged: observation %llu has no date", q->base->name,
                   (unsigned long long)out->number);
}

ohmen_status store_state_observations(struct store *s, uint64_t at, struct store_observations *out,
                                      ohmen_error *e)
{
    struct store_observations found = {0};
    struct query q = query_new(&s->base, STATE_OBSERVATIONS_SQL, e);
    query_bind_int(&q, 1, state_limit(at));
    while (query_row(&q))
        read_observation(&q, s->arena, array_push(s->arena, &found));
    ohmen_status status = query_end(&q);
    if (status == OHMEN_OK)
        *out = found;
    return status;
}

/* --- content --- */

static ohmen_status hash_observations(struct store *s, uint64_t at, struct hashing *h,
                                      ohmen_error *e)
{
    struct query q = query_new(&s->base, STATE_OBSERVATIONS_SQL, e);
    query_bind_int(&q, 1, state_limit(at));
    while (query_row(&q)) {
        hashing_word(h, "observation");
        for (int column = 2; column <= 7; column++)
            hashing_text(h, query_text(&q, column));
        hashing_int(h, query_int(&q, 8));
        hashing_line(h);
    }
    return query_end(&q);
}

ohmen_status store_content_hash(struct store *s, uint64_t at, char hash[STORE_HASH_TEXT],
                                ohmen_error *e)
{
    struct arena *a = arena_child(s->arena);
    struct state_rows rows = {0};
    struct hashing h;
    hashing_begin(&h, a, "ohmen content 1");
    ohmen_status status = store_read_begin(s, e);
    if (status == OHMEN_OK) {
        status = state_rows(s, a, at, &rows, e);
        for (size_t i = 0; i < rows.n; i++) {
            hashing_word(&h, "object");
            hashing_text(&h, rows.at[i].kind);
            hashing_text(&h, rows.at[i].id);
            hashing_text(&h, rows.at[i].body);
            hashing_line(&h);
        }
        if (status == OHMEN_OK)
            status = hash_observations(s, at, &h, e);
        status = store_read_end(s, status, e);
    }
    if (status == OHMEN_OK)
        hashing_end(&h, hash);
    arena_free(a);
    return status;
}
