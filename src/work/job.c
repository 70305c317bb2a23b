/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Registers, jobs and reports: the frame in which every use case runs.
 *
 * Owns the arenas. Invariant: on failure nothing of a job is left, unless it hands out a
 * report of what is wrong. */
#include <string.h>

#include "base/date.h"
#include "doc/json.h"
#include "work/work.h"

/* --- registers --- */

const char *ohmen_version(void)
{
    return OHMEN_VERSION;
}

void ohmen_keep_memory(void)
{
    mem_system_keep();
}

ohmen_status ohmen_create(const char *path, ohmen_error *e)
{
    return store_create(path, e);
}

/* Opens and closes the file: what is wrong with it is told now. */
static ohmen_status try_open(const struct mem *mem, const char *path, ohmen_mode mode,
                             ohmen_error *e)
{
    jmp_buf guard;
    struct store *s;
    struct arena *a = arena_new(mem);
    if (!a)
        return error_set(e, OHMEN_MEMORY, "out of memory");
    if (setjmp(guard)) {
        arena_free(a);
        return error_set(e, OHMEN_MEMORY, "out of memory");
    }
    arena_guard(a, &guard);
    ohmen_status status =
        store_open(a, path, mode == OHMEN_WRITE ? STORE_WRITE : STORE_READ, &s, e);
    arena_free(a);
    return status;
}

static ohmen_register *make_register(const struct mem *mem, const char *path, ohmen_mode mode)
{
    jmp_buf guard;
    struct arena *a = arena_new(mem);
    if (!a)
        return NULL;
    if (setjmp(guard)) {
        arena_free(a);
        return NULL;
    }
    arena_guard(a, &guard);
    ohmen_register *r = NEW(a, ohmen_register);
    *r = (ohmen_register){.arena = a, .mem = mem, .path = arena_str(a, path), .mode = mode};
    arena_guard(a, NULL);
    return r;
}

ohmen_status register_open(const struct mem *mem, const char *path, ohmen_mode mode,
                           ohmen_register **out, ohmen_error *e)
{
    ohmen_status status = try_open(mem, path, mode, e);
    if (status != OHMEN_OK)
        return status;
    ohmen_register *r = make_register(mem, path, mode);
    if (!r)
        return error_set(e, OHMEN_MEMORY, "out of memory");
    *out = r;
    return OHMEN_OK;
}

ohmen_status ohmen_open(const char *path, ohmen_mode mode, ohmen_register **out, ohmen_error *e)
{
    return register_open(NULL, path, mode, out, e);
}

void ohmen_close(ohmen_register *r)
{
    if (r)
        arena_free(r->arena);
}

void ohmen_watch(ohmen_register *r, ohmen_progress *progress, void *ctx)
{
    r->progress = progress;
    r->progress_ctx = ctx;
}

void ohmen_stop_when(ohmen_register *r, ohmen_stop *stop, void *ctx)
{
    r->stop = stop;
    r->stop_ctx = ctx;
}

void job_progress(const struct job *j, const char *phase, size_t done, size_t total)
{
    if (j->reg->progress)
        j->reg->progress(j->reg->progress_ctx, phase, done, total);
}

ohmen_query ohmen_query_defaults(void)
{
    return (ohmen_query){0};
}

/* --- jobs --- */

/* Objects between two calls of whoever watches. */
enum { STEPS = 1024 };

enum { SECONDS = 86400 }; /* of a day */

/* Days since 1970, rounded down. */
static day today(void)
{
    int64_t now = clock_now();
    return (day)(now / SECONDS - (now % SECONDS < 0));
}

static ohmen_status find_date(struct job *j, ohmen_error *e)
{
    if (!j->query.date)
        j->date = today();
    else if (!date_read(j->query.date, &j->date))
        return error_set(e, OHMEN_USAGE, "\"%s\" is no date such as 2027-06-30", j->query.date);
    return OHMEN_OK;
}

static ohmen_status run_guarded(struct arena *a, ohmen_register *r, enum store_mode mode,
                                const ohmen_query *query, job_run *run, void *ctx,
                                ohmen_report **out, ohmen_error *e)
{
    struct job *j = NEW(a, struct job);
    j->arena = a;
    j->reg = r;
    j->path = r->path;
    j->query = query ? *query : ohmen_query_defaults();
    j->out = NEW(a, struct ohmen_report);
    j->out->arena = a;
    j->report = &j->out->report;
    report_init(j->report, a);
    ohmen_status status = find_date(j, e);
    if (status == OHMEN_OK)
        status = store_open(a, r->path, mode, &j->store, e);
    if (status == OHMEN_OK)
        status = run(j, ctx, e);
    if (status == OHMEN_OK && j->interrupted) {
        j->keep_report = true;
        status =
            error_set(e, OHMEN_INTERRUPTED,
                      "the sampling was interrupted: the report says how much of it there was");
    }
    if (status == OHMEN_OK || j->keep_report)
        *out = j->out;
    return status;
}

ohmen_status job_do(ohmen_register *r, enum store_mode mode, const ohmen_query *query, job_run *run,
                    void *ctx, ohmen_report **out, ohmen_error *e)
{
    jmp_buf guard;
    ohmen_report *made = NULL;
    struct arena *a = arena_new(r->mem);
    if (!a)
        return error_set(e, OHMEN_MEMORY, "out of memory");
    if (setjmp(guard)) {
        arena_free(a);
        return error_set(e, OHMEN_MEMORY, "out of memory");
    }
    arena_guard(a, &guard);
    ohmen_status status = run_guarded(a, r, mode, query, run, ctx, &made, e);
    arena_guard(a, NULL);
    if (made)
        *out = made;
    else
        arena_free(a);
    return status;
}

/* --- loading --- */

const char *job_path(struct arena *a, enum kind kind, const char *id)
{
    if (kind == KIND_REGISTER)
        return kinds[kind].section;
    return arena_printf(a, "%s/%s", kinds[kind].section, id);
}

/* An entry's number, a date, or a second. */
static ohmen_status find_entry(struct job *j, const char *as_of, ohmen_error *e)
{
    int64_t second;
    day d;
    size_t n = strlen(as_of);
    if (n > 0 && n <= 15 && strspn(as_of, "0123456789") == n) {
        uint64_t head, wanted = 0;
        for (size_t i = 0; i < n; i++)
            wanted = wanted * 10 + (uint64_t)(as_of[i] - '0');
        ohmen_status status = store_head(j->store, &head, e);
        if (status != OHMEN_OK)
            return status;
        if (wanted < 1 || wanted > head)
            return error_set(e, OHMEN_UNKNOWN, "there is no entry %s; the newest is %llu", as_of,
                             (unsigned long long)head);
        j->at = wanted;
        return OHMEN_OK;
    }
    if (date_read(as_of, &d))
        second = (int64_t)d * SECONDS + SECONDS - 1;
    else if (!utc_read(as_of, &second))
        return error_set(
            e, OHMEN_USAGE,
            "\"%s\" is neither an entry's number, a date such as 2027-06-30, nor a second such "
            "as 2027-06-30T12:00:00Z",
            as_of);
    return store_at_time(j->store, second, &j->at, e);
}

ohmen_status job_load_objects(struct job *j, ohmen_error *e)
{
    ohmen_status status =
        j->query.as_of ? find_entry(j, j->query.as_of, e) : store_head(j->store, &j->at, e);
    if (status == OHMEN_OK)
        status = store_state(j->store, j->at, &j->objects, e);
    return status;
}

ohmen_status job_node(struct job *j, const struct store_object *o, struct node **out,
                      ohmen_error *e)
{
    return json_read(j->arena, o->json, o->n, job_path(j->arena, o->kind, o->id), out, e);
}

static ohmen_status no_objects(struct job *j, ohmen_error *e)
{
    uint64_t head = 0;
    ohmen_status status = store_head(j->store, &head, e);
    if (status != OHMEN_OK)
        return status;
    if (j->at != head)
        return error_set(e, OHMEN_UNKNOWN, "%s held nothing as of %s", j->path, j->query.as_of);
    return error_set(e, OHMEN_UNKNOWN, "%s %s: import documents into it first", j->path,
                     j->at == 0 ? "is empty" : "holds no objects");
}

ohmen_status job_load_model(struct job *j, ohmen_error *e)
{
    ohmen_status status = job_load_objects(j, e);
    if (status == OHMEN_OK && j->objects.n == 0)
        return no_objects(j, e);
    struct model_source *sources = NEW_ARRAY(j->arena, j->objects.n, struct model_source);
    for (size_t i = 0; status == OHMEN_OK && i < j->objects.n; i++) {
        struct node *node;
        if (i % STEPS == 0)
            job_progress(j, "reading", i, j->objects.n);
        const struct store_object *o = &j->objects.at[i];
        status = job_node(j, o, &node, e);
        if (status == OHMEN_OK)
            sources[i] = (struct model_source){o->kind, o->id, node};
    }
    if (status != OHMEN_OK)
        return status;
    struct diags d;
    diags_init(&d, j->arena);
    job_progress(j, "checking", 0, j->objects.n);
    j->model = model_load(j->arena, sources, j->objects.n, &d);
    if (j->model)
        return OHMEN_OK;
    diags_sort(&d);
    return error_set(e, OHMEN_REGISTER,
                     "the register holds something that this version refuses: %s",
                     diag_line(j->arena, &d.list.at[0]));
}

ohmen_status job_load_figures(struct job *j, ohmen_error *e)
{
    ohmen_status status = job_load_model(j, e);
    if (status == OHMEN_OK)
        status = figures_new(j->arena, j->model, j->query.perspective, j->date, &j->figures, e);
    if (status == OHMEN_OK)
        status = figures_variant(j->figures, 0, NULL, &j->base, e);
    if (status == OHMEN_OK)
        status = job_find_plan(j, e);
    return status;
}

bool job_at_site(const struct job *j, const char *site)
{
    return !j->query.site || site_is_in(j->model, site, j->query.site);
}

bool job_has_at_site(const struct job *j, const struct object *o)
{
    const struct node *site = node_get(o->node, "site");
    if (o->kind == KIND_SITE)
        return job_at_site(j, o->id);
    if (!table_field(kinds[o->kind].table, "site"))
        return true;
    return job_at_site(j, site ? site->text : NULL);
}

ohmen_status job_check_site(struct job *j, ohmen_error *e)
{
    if (!j->query.site || model_get(j->model, KIND_SITE, j->query.site))
        return OHMEN_OK;
    struct nearest near;
    nearest_init(&near, j->query.site);
    for (size_t i = 0; i < j->model->of[KIND_SITE].n; i++)
        nearest_offer(&near, j->model->of[KIND_SITE].at[i]->id);
    return error_set(e, OHMEN_UNKNOWN, "there is no site \"%s\"%s", j->query.site,
                     nearest_hint(j->arena, &near));
}

ohmen_status job_leave_out(struct job *j, const char *id, ohmen_status status,
                           const ohmen_error *why, ohmen_error *e)
{
    if (status != OHMEN_COMPUTE)
        return error_set(e, status, "%s", why->text);
    *array_push(j->arena, &j->not_computed) =
        (struct not_computed){id, arena_str(j->arena, why->text)};
    return OHMEN_OK;
}

ohmen_status job_compile_hazards(struct job *j, struct hazards *out, ohmen_error *e)
{
    ohmen_status status = job_check_site(j, e);
    const struct objects *all = &j->model->of[KIND_HAZARD];
    for (size_t i = 0; status == OHMEN_OK && i < all->n; i++) {
        const struct hazard *h = all->at[i]->data;
        if (i % STEPS == 0)
            job_progress(j, "computing", i, all->n);
        if (!job_at_site(j, h->site))
            continue;
        const struct compiled *c;
        ohmen_error why = OHMEN_ERROR_INIT;
        status = figures_compile(j->figures, j->base, all->at[i]->id, &c, &why);
        if (status == OHMEN_OK)
            *array_push(j->arena, out) = c;
        else
            status = job_leave_out(j, all->at[i]->id, status, &why, e);
    }
    return status;
}

/* --- reports --- */

ohmen_layout ohmen_layout_defaults(void)
{
    return (ohmen_layout){.width = 100};
}

typedef void report_writer(struct text *out, const struct report *r, const ohmen_layout *layout);

static void as_text(struct text *out, const struct report *r, const ohmen_layout *layout)
{
    unsigned width = layout->width < 60 ? 60 : layout->width > 200 ? 200 : layout->width;
    struct report_format f = {.width = width, .ascii = layout->ascii, .colour = layout->colour};
    report_write_text(out, r, &f);
}

static void as_json(struct text *out, const struct report *r, const ohmen_layout *layout)
{
    (void)layout;
    report_write_json(out, r);
}

static void as_csv(struct text *out, const struct report *r, const ohmen_layout *layout)
{
    (void)layout;
    report_write_csv(out, r);
}

static void as_html(struct text *out, const struct report *r, const ohmen_layout *layout)
{
    (void)layout;
    report_write_html(out, r);
}

static const char *write_report(ohmen_report *r, report_writer *writer, const ohmen_layout *layout)
{
    struct text out;
    if (setjmp(r->guard)) {
        arena_guard(r->arena, NULL);
        return NULL;
    }
    arena_guard(r->arena, &r->guard);
    text_init(&out, r->arena);
    writer(&out, &r->report, layout);
    arena_guard(r->arena, NULL); /* the frame to jump to ends here */
    return text_str(&out);
}

const char *ohmen_report_text(ohmen_report *r, const ohmen_layout *layout)
{
    ohmen_layout defaults = ohmen_layout_defaults();
    return write_report(r, as_text, layout ? layout : &defaults);
}

const char *ohmen_report_json(ohmen_report *r)
{
    return write_report(r, as_json, NULL);
}

const char *ohmen_report_csv(ohmen_report *r)
{
    return write_report(r, as_csv, NULL);
}

const char *ohmen_report_html(ohmen_report *r)
{
    return write_report(r, as_html, NULL);
}

void ohmen_report_free(ohmen_report *r)
{
    if (r)
        arena_free(r->arena);
}

const char *ohmen_report_diagnostic(const ohmen_report *r, size_t i)
{
    return i < r->diagnostics.n ? r->diagnostics.at[i] : NULL;
}
