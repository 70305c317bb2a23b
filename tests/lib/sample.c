/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sample registers. Owns the folders it makes. */
#include "sample.h"

#include <dirent.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>

#include "base/text.h"

static void remove_folder(void *object)
{
    char name[4096];
    DIR *folder = opendir(object);
    for (struct dirent *d; folder && (d = readdir(folder)) != NULL;) {
        if (d->d_name[0] == '.' && (!d->d_name[1] || d->d_name[1] == '.'))
            continue;
        snprintf(name, sizeof name, "%s/%s", (const char *)object, d->d_name);
        chmod(object, 0700);
        unlink(name);
    }
    if (folder)
        closedir(folder);
    rmdir(object);
}

const char *sample_folder(struct arena *a)
{
    const char *parent = getenv("TMPDIR");
    char *name = arena_printf(a, "%s/ohmen-test-XXXXXX", parent && *parent ? parent : P_tmpdir);
    if (!mkdtemp(name)) {
        perror(name);
        abort();
    }
    arena_defer(a, remove_folder, name);
    return name;
}

const char *sample_body(struct arena *a, enum kind kind, unsigned n)
{
    switch (kind) {
    case KIND_REGISTER:
        return arena_printf(
            a,
            "{\"counts\":[\"bay\"],\"currency\":\"EUR\",\"discount\":\"4 %% per a\","
            "\"horizon\":\"%u a\",\"prices\":2026,\"title\":\"Quay network\"}",
            n + 20);
    case KIND_SITE:
        return arena_printf(a, "{\"customers\":%u,\"name\":\"Station %u\"}", 100 + n, n);
    case KIND_VALUE:
        return arena_printf(a, "{\"is\":\"0.%03u per a\",\"name\":\"How often\"}", n + 1);
    case KIND_ELEMENT:
        return arena_printf(a,
                            "{\"kind\":\"relay\",\"name\":\"Relay %u\",\"per-demand\":{\"is\":"
                            "\"%u %%\"},\"site\":\"S-1\",\"test\":{\"every\":\"4 a\",\"last\":"
                            "\"2017-09-20\"}}",
                            n, n % 90 + 1);
    case KIND_SCHEME:
        return arena_printf(a,
                            "{\"name\":\"Scheme %u\",\"works\":[\"all\",\"E-1\",[\"any\",\"E-1\","
                            "\"E-2\"]]}",
                            n);
    case KIND_HAZARD:
        return arena_printf(
            a,
            "{\"frequency\":\"V-1\",\"name\":\"Fault %u\",\"outcomes\":{\"burnt\":{\"damage\":{"
            "\"rebuild\":{\"category\":\"equipment\",\"is\":\"%u kEUR\"}},\"name\":\"Burnt out\"},"
            "\"slow\":{\"name\":\"Cleared late\"}},\"response\":{\"main\":{\"cleared-by\":\"C-1\","
            "\"in\":\"1.1 s\",\"outcome\":\"slow\"},\"never\":{\"split\":{\"fire\":{\"outcome\":"
            "\"burnt\",\"share\":\"20 "
            "%%\"},\"no-fire\":{\"outcome\":\"slow\",\"share\":\"rest\"}}}},"
            "\"site\":\"S-1\"}",
            n, n + 40);
    case KIND_OPTION:
        return arena_printf(a,
                            "{\"change\":{\"hazards\":{\"H-1\":{\"frequency\":\"0.6 * was\"}}},"
                            "\"invest\":{\"is\":\"%u kEUR\"},\"name\":\"Fit a relay\"}",
                            n + 140);
    case KIND_DECISION:
        return arena_printf(
            a,
            "{\"choose\":{\"keep\":[],\"renew\":[{\"pay\":\"%u kEUR\"},{\"choose\":{"
            "\"now\":[{\"apply\":\"P-1\"}],\"wait\":[]}}]},\"question\":\"When?\"}",
            n + 1);
    default: abort(); /* the samples have no such kind */
    }
}

void sample_begin(struct sample *s, struct arena *a, uint64_t prepared_on)
{
    *s = (struct sample){.arena = a};
    s->t = (struct store_transaction){.prepared_on = prepared_on,
                                      .utc = 1767323045 + (int64_t)prepared_on * 3600,
                                      .author = "J. Doe",
                                      .reason = "survey \"north\"\nand south",
                                      .command = "import",
                                      .tool = "ohmen 0.1.0"};
}

void sample_change(struct sample *s, enum kind kind, const char *id, unsigned number)
{
    const char *json = sample_body(s->arena, kind, number);
    *array_push(s->arena, &s->changes) = (struct store_change){
        .kind = kind, .id = arena_str(s->arena, id), .json = json, .n = strlen(json)};
}

void sample_remove(struct sample *s, enum kind kind, const char *id)
{
    *array_push(s->arena, &s->changes) =
        (struct store_change){.kind = kind, .id = arena_str(s->arena, id)};
}

void sample_observe(struct sample *s, const char *ident, day date, const char *subject)
{
    *array_push(s->arena, &s->observations) =
        (struct store_observation){.ident = arena_str(s->arena, ident),
                                   .day = date,
                                   .what = "fault",
                                   .subject = arena_str(s->arena, subject),
                                   .result = "cleared",
                                   .note = "wet \"day\"",
                                   .count = 2};
}

const struct store_transaction *sample_transaction(struct sample *s)
{
    s->t.changes = s->changes.at;
    s->t.n_changes = s->changes.n;
    s->t.observations = s->observations.at;
    s->t.n_observations = s->observations.n;
    return &s->t;
}

void sample_fill(struct sample *s)
{
    sample_change(s, KIND_REGISTER, REGISTER_ID, 5);
    sample_change(s, KIND_SITE, "S-1", 7);
    sample_change(s, KIND_VALUE, "V-1", 2);
    sample_change(s, KIND_ELEMENT, "E-1", 1);
    sample_change(s, KIND_ELEMENT, "E-2", 2);
    sample_change(s, KIND_SCHEME, "C-1", 1);
    sample_change(s, KIND_HAZARD, "H-1", 1);
    sample_change(s, KIND_OPTION, "P-1", 1);
    sample_change(s, KIND_DECISION, "D-1", 1);
    sample_observe(s, "log-17", 20000, "V-1");
    sample_observe(s, "log-18", 19990, "H-1");
}

static void dump_objects(struct text *t, const struct store_objects *objects)
{
    for (size_t i = 0; i < objects->n; i++)
        text_printf(t, "%s %s %llu %s %s\n", kinds[objects->at[i].kind].name, objects->at[i].id,
                    (unsigned long long)objects->at[i].seq, objects->at[i].hash,
                    objects->at[i].json);
}

static void dump_observations(struct text *t, const struct store_observations *all)
{
    for (size_t i = 0; i < all->n; i++) {
        const struct store_observation *o = &all->at[i];
        text_printf(t, "%llu %llu %s %d %s %s %s %s %lld\n", (unsigned long long)o->entry,
                    (unsigned long long)o->number, o->ident, (int)o->day, o->what, o->subject,
                    o->result, o->note, (long long)o->count);
    }
}

static void dump_entries(struct text *t, const struct store_entries *all)
{
    for (size_t i = 0; i < all->n; i++) {
        const struct store_entry *n = &all->at[i];
        text_printf(t, "%llu %lld %s %s %s %s %llu %llu %s %s %s\n", (unsigned long long)n->seq,
                    (long long)n->utc, n->author, n->reason, n->command, n->tool,
                    (unsigned long long)n->n_changes, (unsigned long long)n->n_observations,
                    n->prev, n->digest, n->hash);
    }
}

ohmen_status sample_dump(struct arena *a, struct store *s, uint64_t at, const char **out,
                         ohmen_error *e)
{
    struct store_objects objects = {0};
    struct store_observations observations = {0};
    struct store_entries entries = {0};
    ohmen_status status = store_state(s, at, &objects, e);
    if (status == OHMEN_OK)
        status = store_state_observations(s, at, &observations, e);
    if (status == OHMEN_OK)
        status = store_entries(s, 0, at, &entries, e);
    if (status != OHMEN_OK)
        return status;
    struct text t;
    text_init(&t, a);
    dump_objects(&t, &objects);
    dump_observations(&t, &observations);
    dump_entries(&t, &entries);
    *out = text_str(&t);
    return OHMEN_OK;
}
