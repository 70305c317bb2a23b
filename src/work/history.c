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

static ohmen_status list_versions(struct job *j, const char *id, ohmen_error *e)
{
    struct store_versions all = {0};
    ohmen_status status = store_versions(j->store, id, &all, e);
    if (status != OHMEN_OK)
        return status;
    if (all.n == 0)
        return error_set(e, OHMEN_UNKNOWN, "the journal knows nothing of \"%s\"", id);
    struct block *b =
        part_difference_table(j, "versions", arena_printf(j->arena, "History of %s", id), "Entry");
    struct node *before = NULL;
    for (size_t i = 0; i < all.n; i++) {
        struct node *after;
        status = version_node(j, &all.at[i], &after, e);
        if (status != OHMEN_OK)
            return status;
        const char *entry = arena_printf(j->arena, "%llu", (unsigned long long)all.at[i].seq);
        part_differences(j, b, entry, id, before, after);
        before = after;
    }
    return OHMEN_OK;
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
        report_note(
            r, "result",
            "%s is whole: %llu entries, every hash, the chain, and all derived tables hold.",
            j->path, (unsigned long long)head);
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
