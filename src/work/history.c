/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The journal for people: entries, versions of an object, proof of the file. */
#include "base/date.h"
#include "doc/json.h"
#include "work/work.h"

static ohmen_status list_entries(struct job *j, ohmen_error *e)
{
    struct report *r = j->report;
    struct store_entries all = {0};
    char utc[UTC_TEXT];
    ohmen_status status = store_entries(j->store, 0, UINT64_MAX, &all, e);
    if (status != OHMEN_OK)
        return status;
    struct block *b = report_table(r, "entries", "Journal");
    block_column(r, b, "entry", "Entry", "", STYLE_PLAIN);
    block_column(r, b, "time", "Time (UTC)", "", STYLE_PLAIN);
    block_column(r, b, "author", "By", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "reason", "Why", "", STYLE_PLAIN);
    block_column(r, b, "changes", "Objects", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "observations", "Observations", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "hash", "Hash", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < all.n; i++) {
        const struct store_entry *x = &all.at[i];
        struct row *row = block_row(r, b);
        row_count(r, row, x->seq);
        row_text(r, row, utc_write(utc, x->utc));
        row_text(r, row, x->author);
        row_text(r, row, x->reason);
        row_count(r, row, x->n_changes);
        row_count(r, row, x->n_observations);
        row_text(r, row, arena_printf(j->arena, "%.16s", x->hash));
    }
    return OHMEN_OK;
}

static ohmen_status version_node(struct job *j, const struct store_version *v, struct node **out,
                                 ohmen_error *e)
{
    *out = NULL;
    if (!v->json)
        return OHMEN_OK;
    return json_read(j->arena, v->json, v->n, job_path(j->arena, v->kind, v->id), out, e);
}

/* The entry of a version: when, by whom and why; what became of the object in it. */
static ohmen_status version_row(struct job *j, struct block *b, const struct store_version *v,
                                const char *change, ohmen_error *e)
{
    struct report *r = j->report;
    struct store_entries entry = {0};
    char utc[UTC_TEXT];
    ohmen_status status = store_entries(j->store, v->seq, v->seq, &entry, e);
    if (status != OHMEN_OK)
        return status;
    if (entry.n == 0)
        return error_set(e, OHMEN_REGISTER, "entry %llu is not there: see what verify finds",
                         (unsigned long long)v->seq);
    struct row *row = block_row(r, b);
    row_count(r, row, v->seq);
    row_text(r, row, utc_write(utc, entry.at[0].utc));
    row_text(r, row, entry.at[0].author);
    row_text(r, row, entry.at[0].reason);
    row_text(r, row, change);
    return OHMEN_OK;
}

static ohmen_status versions_table(struct job *j, const char *id, const struct store_versions *all,
                                   ohmen_error *e)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "versions", arena_printf(j->arena, "History of %s", id));
    block_column(r, b, "entry", "Entry", "", STYLE_PLAIN);
    block_column(r, b, "time", "Time (UTC)", "", STYLE_PLAIN);
    block_column(r, b, "author", "By", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "reason", "Why", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "change", "Change", "", STYLE_PLAIN);
    for (size_t i = 0; i < all->n; i++) {
        bool before = i > 0 && all->at[i - 1].json;
        const char *change = !all->at[i].json ? "removed" : before ? "changed" : "added";
        ohmen_status status = version_row(j, b, &all->at[i], change, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

/* What changed from version to version, field by field. */
static ohmen_status changes_table(struct job *j, const struct store_versions *all, ohmen_error *e)
{
    struct node *before = NULL, *after;
    struct block *b = part_difference_table(j, "fields", "Changed fields", "entry", "Entry");
    for (size_t i = 0; i < all->n; i++) {
        ohmen_status status = version_node(j, &all->at[i], &after, e);
        if (status != OHMEN_OK)
            return status;
        const char *entry = arena_printf(j->arena, "%llu", (unsigned long long)all->at[i].seq);
        if (before && after)
            part_differences(j, b, entry, before, after);
        before = after;
    }
    if (b->rows.n == 0)
        j->report->blocks.n--;
    return OHMEN_OK;
}

static ohmen_status unknown_object(struct job *j, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    ohmen_status status = job_load_objects(j, e);
    if (status != OHMEN_OK)
        return status;
    for (size_t i = 0; i < j->objects.n; i++)
        nearest_offer(&near, j->objects.at[i].id);
    return error_set(e, OHMEN_UNKNOWN, "the journal knows nothing of \"%s\"%s", id,
                     nearest_hint(j->arena, &near));
}

static ohmen_status list_versions(struct job *j, const char *id, ohmen_error *e)
{
    struct store_versions all = {0};
    ohmen_status status = store_versions(j->store, id, &all, e);
    if (status == OHMEN_OK && all.n == 0)
        return unknown_object(j, id, e);
    if (status == OHMEN_OK)
        status = versions_table(j, id, &all, e);
    if (status == OHMEN_OK)
        status = changes_table(j, &all, e);
    if (status == OHMEN_OK)
        report_note(j->report, "as-of", "What it said then: show %s --as-of ENTRY.", id);
    return status;
}

static ohmen_status run_history(struct job *j, void *ctx, ohmen_error *e)
{
    return ctx ? list_versions(j, ctx, e) : list_entries(j, e);
}

ohmen_status ohmen_history(ohmen_register *r, const char *id, ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, NULL, run_history, (void *)id, out, e);
}

static ohmen_status run_verify(struct job *j, void *ctx, ohmen_error *e)
{
    struct store_findings found = {0};
    struct report *r = j->report;
    uint64_t head;
    (void)ctx;
    ohmen_status status = store_verify(j->store, &found, e);
    if (status == OHMEN_OK)
        status = store_head(j->store, &head, e);
    if (status != OHMEN_OK)
        return status;
    if (found.n == 0) {
        report_note(r, "result",
                    "%s is whole: %s, every hash, the chain, and all derived tables hold.", j->path,
                    count_words(j->arena, head, "entry", "entries"));
        return OHMEN_OK;
    }
    struct block *b = report_table(r, "findings", "What is wrong with the file");
    block_column(r, b, "finding", "Finding", "", STYLE_PLAIN);
    for (size_t i = 0; i < found.n; i++)
        row_text(r, block_row(r, b), found.at[i]);
    j->keep_report = true;
    return error_set(e, OHMEN_REGISTER, "%zu finding%s: the register was altered or damaged",
                     found.n, found.n == 1 ? "" : "s");
}

ohmen_status ohmen_verify(ohmen_register *r, ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, NULL, run_verify, NULL, out, e);
}
