/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Writing one entry, all or nothing: what is refused, what is left out.
 *
 * The order inside BEGIN IMMEDIATE: refuse what is stale; leave out what is known;
 * write, read back and let the derived tables follow (commit_write.c); commit. Owns the
 * prepared change until then. */
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"
#include "store/commit.h"

/* --- what is given --- */

static ohmen_status check_text(const char *name, const char *s, ohmen_error *e)
{
    size_t n = strlen(s), bad = utf8_check(s, n);
    return bad == n ? OHMEN_OK
                    : error_set(e, OHMEN_INPUT, "the %s is no valid UTF-8 at byte %zu", name, bad);
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
    ohmen_status status = check_text("author of the entry", c->entry.author, c->e);
    if (status == OHMEN_OK)
        status = check_text("reason of the entry", c->entry.reason, c->e);
    if (status == OHMEN_OK)
        status = check_text("command of the entry", c->entry.command, c->e);
    return status == OHMEN_OK ? check_text("tool of the entry", c->entry.tool, c->e) : status;
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
    struct query written =
        query_new(&c->s->base,
                  "SELECT 1 FROM version WHERE id = ?1 AND seq > ?2 AND kind = ?3 LIMIT 1", c->e);
    for (size_t i = 0; i < c->changes.n; i++)
        look_for(c, &written, c->changes.at[i].in->id, c->changes.at[i].kind, stale);
    ohmen_status status = query_end(&written);
    if (status != OHMEN_OK)
        return status;
    struct query read =
        query_new(&c->s->base, "SELECT 1 FROM version WHERE id = ?1 AND seq > ?2 LIMIT 1", c->e);
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
    bool known =
        present && change->body ? text_equal(present, change->body) : !present && !change->body;
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

static ohmen_status check_observation(const struct journal_observation *o, ohmen_error *e)
{
    const struct {
        const char *name, *text;
    } all[] = {{"ident of an observation", o->ident},
               {"kind of an observation", o->what},
               {"subject of an observation", o->subject},
               {"result of an observation", o->result},
               {"note of an observation", o->note}};
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < sizeof all / sizeof all[0] && status == OHMEN_OK; i++)
        status = check_text(all[i].name, all[i].text, e);
    return status;
}

static ohmen_status add_observation(struct commit *c, const struct store_observation *o,
                                    int64_t number)
{
    char date[DATE_TEXT];
    if (o->day == DAY_NONE)
        return error_set(c->e, OHMEN_INTERNAL, "observation %s has no date", o->ident);
    struct journal_observation *new = array_push(c->a, &c->observations);
    *new = (struct journal_observation){.number = number,
                                        .count = o->count,
                                        .ident = o->ident,
                                        .day = arena_str(c->a, date_write(date, o->day)),
                                        .what = or_empty(o->what),
                                        .subject = or_empty(o->subject),
                                        .result = or_empty(o->result),
                                        .note = or_empty(o->note)};
    return check_observation(new, c->e);
}

static ohmen_status take_observations(struct commit *c)
{
    int64_t last;
    struct strmap seen = {0};
    ohmen_status status =
        query_number(&c->s->base, "SELECT max(number) FROM observation", 0, 0, &last, c->e);
    struct query q = query_new(&c->s->base, "SELECT 1 FROM observation WHERE ident = ?1", c->e);
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

/* --- the whole --- */

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
    return commit_write(c, head);
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
