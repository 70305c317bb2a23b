/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Import: documents and lists in, one entry of the journal, or nothing.
 *
 * Everything is read and the whole register that would result is checked before
 * anything is written; the preview is made of the same differences. */
#include <string.h>

#include "base/date.h"
#include "base/file.h"
#include "base/utf8.h"
#include "doc/csv.h"
#include "doc/json.h"
#include "doc/yaml.h"
#include "model/documents.h"
#include "work/observations.h"

/* The largest file that is read at all; documents have a smaller limit of their own. */
#define FILE_BYTES ((size_t)CSV_BYTES)

struct importing {
    struct job *job;
    const ohmen_import_settings *settings;
    struct diags diags;
    struct model_sources stored;
    ARRAY(const struct node *) roots;
    ARRAY(const struct csv *) lists;
    struct store_observations observations;
    ARRAY(struct store_change) changes;
    ARRAY(const char *) read;
    size_t added, changed, removed;
};

/* --- reading --- */

static bool ends_with(const char *s, const char *end)
{
    size_t n = strlen(s), m = strlen(end);
    return n >= m && text_equal(s + n - m, end);
}

static ohmen_status read_one(struct importing *im, const char *name, ohmen_error *e)
{
    struct arena *a = im->job->arena;
    char *text;
    size_t n;
    ohmen_status status = file_read(a, name, FILE_BYTES, &text, &n, e);
    if (status != OHMEN_OK)
        return status;
    diags_file(&im->diags, name);
    if (ends_with(name, ".csv")) {
        const struct csv *csv = csv_read(a, name, text, n, &im->diags);
        if (csv)
            *array_push(a, &im->lists) = csv;
    } else {
        const struct node *root = yaml_read(a, name, text, n, &im->diags);
        if (root)
            *array_push(a, &im->roots) = root;
    }
    return OHMEN_OK;
}

static ohmen_status read_files(struct importing *im, ohmen_error *e)
{
    for (size_t i = 0; i < im->settings->n_files; i++) {
        job_progress(im->job, "reading", i, im->settings->n_files);
        ohmen_status status = read_one(im, im->settings->files[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

static ohmen_status load_stored(struct importing *im, ohmen_error *e)
{
    struct job *j = im->job;
    ohmen_status status = job_load_objects(j, e);
    for (size_t i = 0; status == OHMEN_OK && i < j->objects.n; i++) {
        struct node *node;
        const struct store_object *o = &j->objects.at[i];
        status = job_node(j, o, &node, e);
        if (status == OHMEN_OK)
            *array_push(j->arena, &im->stored) = (struct model_source){o->kind, o->id, node};
    }
    return status;
}

/* The register that would result, in job->model; none with diagnostics. */
static void check_objects(struct importing *im)
{
    struct job *j = im->job;
    struct model_sources all = {0};
    job_progress(j, "checking", 0, im->stored.n);
    if (documents_merge(j->arena, &im->stored, im->roots.n, im->roots.at, &all, &im->diags) &&
        all.n)
        j->model = model_load(j->arena, all.at, all.n, &im->diags);
}

/* Lists are checked even where a document is wrong, but then not against the objects. */
static void check_result(struct importing *im)
{
    struct job *j = im->job;
    bool any = im->roots.n || im->stored.n;
    if (any && im->diags.count == 0)
        check_objects(im);
    else if (any)
        documents_check_alone(j->arena, &im->stored, im->roots.n, im->roots.at, &im->diags);
    bool wrong = im->diags.count > 0;
    const struct model *known = wrong ? NULL : j->model ? j->model : model_new(j->arena);
    for (size_t i = 0; i < im->lists.n; i++)
        observations_read(j->arena, known, im->lists.at[i], &im->observations, &im->diags);
}

/* --- what changes --- */

static const char *canonical_bytes(struct arena *a, const struct node *node, size_t *n)
{
    struct text t;
    text_init(&t, a);
    json_write(&t, node);
    *n = t.n;
    return text_str(&t);
}

static void note_reads(struct importing *im, const struct object *o)
{
    struct arena *a = im->job->arena;
    for (size_t i = 0; i < o->refs.n; i++)
        *array_push(a, &im->read) = o->refs.at[i].id;
}

static void change_row(struct importing *im, struct block *b, const char *how, enum kind kind,
                       const char *id, const char *name)
{
    struct report *r = im->job->report;
    struct row *row = block_row(r, b);
    row_text(r, row, how);
    row_text(r, row, kinds[kind].name);
    row_text(r, row, id);
    row_text(r, row, name);
}

struct change_blocks {
    size_t objects, fields; /* indices of the report's blocks */
};

static struct block *block_at(struct importing *im, size_t i)
{
    return &im->job->report->blocks.at[i];
}

static void consider_object(struct importing *im, const struct object *o,
                            const struct strmap *stored, struct change_blocks *blocks)
{
    struct arena *a = im->job->arena;
    size_t n;
    const char *json = canonical_bytes(a, o->node, &n);
    const struct store_object *before = strmap_get(stored, o->id);
    if (before && before->n == n && memcmp(before->json, json, n) == 0)
        return;
    *array_push(a, &im->changes) = (struct store_change){o->kind, o->id, json, n};
    note_reads(im, o);
    im->added += !before;
    im->changed += before != NULL;
    change_row(im, block_at(im, blocks->objects), before ? "changed" : "added", o->kind, o->id,
               object_name(o));
    if (before)
        part_differences(im->job, block_at(im, blocks->fields), o->id,
                         im->stored.at[before - im->job->objects.at].node, o->node);
}

static void consider_removed(struct importing *im, struct change_blocks *blocks)
{
    struct job *j = im->job;
    for (size_t i = 0; i < j->objects.n; i++) {
        const struct store_object *o = &j->objects.at[i];
        if (j->model && model_find(j->model, o->id))
            continue;
        *array_push(j->arena, &im->changes) = (struct store_change){o->kind, o->id, NULL, 0};
        im->removed++;
        change_row(im, block_at(im, blocks->objects), "removed", o->kind, o->id, "");
    }
}

static void find_changes(struct importing *im)
{
    struct job *j = im->job;
    struct report *r = j->report;
    struct change_blocks blocks = {.objects = r->blocks.n};
    struct block *b = report_table(r, "changes", "Objects");
    block_column(r, b, "change", "Change", "", STYLE_PLAIN);
    block_column(r, b, "kind", "Kind", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "object", "Object", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 2;
    blocks.fields = r->blocks.n;
    part_difference_table(j, "fields", "Changed fields", "object", "Object");
    struct strmap stored = {0};
    for (size_t i = 0; i < j->objects.n; i++)
        strmap_set(j->arena, &stored, j->objects.at[i].id, &j->objects.at[i]);
    for (int k = 0; j->model && k < KIND_COUNT; k++)
        for (size_t i = 0; i < j->model->of[k].n; i++)
            consider_object(im, j->model->of[k].at[i], &stored, &blocks);
    consider_removed(im, &blocks);
    if (block_at(im, blocks.fields)->rows.n == 0)
        r->blocks.n--;
    if (block_at(im, blocks.objects)->rows.n == 0)
        r->blocks.n--;
}

/* Leaves out the observations that the register holds already. */
static ohmen_status find_new_observations(struct importing *im, ohmen_error *e)
{
    struct job *j = im->job;
    struct store_observations known = {0}, fresh = {0};
    struct strmap idents = {0};
    ohmen_status status = store_state_observations(j->store, j->at, &known, e);
    for (size_t i = 0; i < known.n; i++)
        strmap_set(j->arena, &idents, known.at[i].ident, (void *)known.at[i].ident);
    for (size_t i = 0; status == OHMEN_OK && i < im->observations.n; i++) {
        const struct store_observation *o = &im->observations.at[i];
        if (strmap_has(&idents, o->ident))
            continue;
        strmap_set(j->arena, &idents, o->ident, (void *)o->ident);
        *array_push(j->arena, &fresh) = *o;
        *array_push(j->arena, &im->read) = o->subject;
    }
    im->observations = fresh;
    return status;
}

static void observation_rows(struct importing *im)
{
    struct report *r = im->job->report;
    char date[DATE_TEXT];
    if (im->observations.n == 0)
        return;
    struct block *b = report_table(r, "observations", "Observations added");
    block_column(r, b, "date", "Date", "", STYLE_PLAIN);
    block_column(r, b, "kind", "Kind", "", STYLE_PLAIN);
    block_column(r, b, "object", "Object", "", STYLE_PLAIN);
    block_column(r, b, "count", "Count", "", STYLE_PLAIN);
    block_column(r, b, "result", "Result", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "note", "Note", "", STYLE_PLAIN)->keep = 2;
    for (size_t i = 0; i < im->observations.n; i++) {
        const struct store_observation *o = &im->observations.at[i];
        struct row *row = block_row(r, b);
        row_date(r, row, date_write(date, o->day));
        row_text(r, row, o->what);
        row_text(r, row, o->subject);
        row_count(r, row, (uint64_t)o->count);
        row_text(r, row, o->result);
        row_text(r, row, o->note);
    }
}

/* --- the end --- */

static ohmen_status refuse(struct importing *im, ohmen_error *e)
{
    struct job *j = im->job;
    struct report *r = j->report;
    diags_sort(&im->diags);
    struct block *b = report_table(r, "errors", "What is wrong");
    block_column(r, b, "place", "Place", "", STYLE_PLAIN);
    block_column(r, b, "line", "Line", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "column", "Column", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "error", "Error", "", STYLE_PLAIN);
    for (size_t i = 0; i < im->diags.list.n; i++) {
        const struct diag *d = &im->diags.list.at[i];
        struct row *row = block_row(r, b);
        row_text(r, row, d->place.line || !d->place.path ? d->place.file : d->place.path);
        row_count(r, row, d->place.line);
        row_count(r, row, d->place.column);
        row_text(r, row, d->text);
        *array_push(j->arena, &j->out->diagnostics) = diag_line(j->arena, d);
    }
    if (im->diags.count > im->diags.list.n)
        *array_push(j->arena, &j->out->diagnostics) =
            arena_printf(j->arena, "... and %zu more errors", im->diags.count - im->diags.list.n);
    j->keep_report = true;
    return error_set(e, OHMEN_INPUT, "%zu error%s; nothing was stored", im->diags.count,
                     im->diags.count == 1 ? "" : "s");
}

static ohmen_status commit(struct importing *im, uint64_t *seq, ohmen_error *e)
{
    struct job *j = im->job;
    const ohmen_import_settings *s = im->settings;
    struct store_transaction t = {.prepared_on = j->at,
                                  .utc = clock_now(),
                                  .author = s->author,
                                  .reason = s->reason,
                                  .command = "import",
                                  .tool = "ohmen " OHMEN_VERSION,
                                  .changes = im->changes.at,
                                  .n_changes = im->changes.n,
                                  .observations = im->observations.at,
                                  .n_observations = im->observations.n,
                                  .read = im->read.at,
                                  .n_read = im->read.n};
    job_progress(j, "storing", 0, im->changes.n);
    return store_commit(j->store, &t, seq, e);
}

static void add_part(struct text *t, size_t n, const char *one, const char *many, const char *how)
{
    if (n)
        text_printf(t, "%s%zu %s %s", t->n ? ", " : "", n, n == 1 ? one : many, how);
}

/* "3 objects added, 1 object removed, 12 observations added". */
static const char *summary(struct importing *im)
{
    struct text t;
    text_init(&t, im->job->arena);
    add_part(&t, im->added, "object", "objects", "added");
    add_part(&t, im->changed, "object", "objects", "changed");
    add_part(&t, im->removed, "object", "objects", "removed");
    add_part(&t, im->observations.n, "observation", "observations", "added");
    return text_str(&t);
}

static ohmen_status run_import(struct job *j, void *ctx, ohmen_error *e)
{
    struct importing im = {.job = j, .settings = ctx};
    diags_init(&im.diags, j->arena);
    ohmen_status status = load_stored(&im, e);
    if (status == OHMEN_OK)
        status = read_files(&im, e);
    if (status != OHMEN_OK)
        return status;
    check_result(&im);
    if (im.diags.count)
        return refuse(&im, e);
    find_changes(&im);
    status = find_new_observations(&im, e);
    if (status != OHMEN_OK)
        return status;
    observation_rows(&im);
    bool nothing = im.changes.n == 0 && im.observations.n == 0;
    uint64_t seq = 0;
    if (!im.settings->dry_run && !nothing)
        status = commit(&im, &seq, e);
    if (status != OHMEN_OK)
        return status;
    if (nothing)
        report_note(j->report, "result",
                    "Nothing to change: the register holds all of this already.");
    else if (im.settings->dry_run)
        report_note(j->report, "result", "Preview: %s. Nothing was stored.", summary(&im));
    else
        report_note(j->report, "result", "Stored as entry %llu: %s.", (unsigned long long)seq,
                    summary(&im));
    return OHMEN_OK;
}

static bool is_given(const char *s)
{
    return s && *s && utf8_check(s, strlen(s)) == strlen(s);
}

ohmen_status ohmen_import(ohmen_register *r, const ohmen_import_settings *s, ohmen_report **out,
                          ohmen_error *e)
{
    if (s->n_files == 0)
        return error_set(e, OHMEN_USAGE, "an import needs at least one file");
    if (!s->dry_run && r->mode != OHMEN_WRITE)
        return error_set(e, OHMEN_USAGE, "the register was opened for reading only");
    if (!s->dry_run && (!is_given(s->author) || !is_given(s->reason)))
        return error_set(e, OHMEN_USAGE,
                         "an import needs its author and its reason, in valid UTF-8");
    return job_do(r, s->dry_run ? STORE_READ : STORE_WRITE, NULL, run_import, (void *)s, out, e);
}
