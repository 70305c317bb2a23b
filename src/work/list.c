/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Everything of one kind as a table: what each object says in the few fields that one
 * compares such objects by. `show` has the others. Owns nothing. */
#include <string.h>

#include "work/filter.h"

/* Columns of what one field says in a list. */
enum { BRIEF = 100, ALTERNATIVES = 3 };

/* Where a column of a list comes from: the first of these paths that is given. */
struct list_column {
    enum kind kind;
    const char *key, *head;
    unsigned keep;
    const char *paths[ALTERNATIVES];
};

static const struct list_column list_columns[] = {
    {KIND_REGISTER, "currency", "Currency", 5, {"currency"}},
    {KIND_REGISTER, "prices", "Prices", 4, {"prices"}},
    {KIND_REGISTER, "horizon", "Horizon", 3, {"horizon"}},
    {KIND_REGISTER, "discount", "Interest", 2, {"discount"}},
    {KIND_SOURCE, "kind", "Kind", 4, {"kind"}},
    {KIND_SOURCE, "by", "By", 1, {"by"}},
    {KIND_SOURCE, "date", "Date", 2, {"date"}},
    {KIND_SOURCE, "verified", "Verified", 3, {"verified"}},
    {KIND_SITE, "in", "In", 4, {"in"}},
    {KIND_SITE, "customers", "Customers", 3, {"customers"}},
    {KIND_SITE, "load", "Load", 2, {"load"}},
    {KIND_GROUP, "persons", "Persons", 3, {"persons"}},
    {KIND_GROUP, "site", "Site", 2, {"site"}},
    {KIND_VALUE, "is", "Is", 4, {"is"}},
    {KIND_VALUE, "varies", "Varies", 3, {"varies"}},
    {KIND_VALUE, "source", "Source", 2, {"source"}},
    {KIND_RATE, "stated", "As stated", 4, {"is", "prior"}},
    {KIND_RATE, "per", "Per", 1, {"per"}},
    {KIND_RATE, "source", "Source", 2, {"prior/source", "source"}},
    {KIND_TYPE, "kind", "Kind", 3, {"kind"}},
    {KIND_TYPE, "per-demand", "Fails on demand", 3, {"per-demand"}},
    {KIND_TYPE, "undetected", "Fails undetected", 4, {"undetected"}},
    {KIND_TYPE, "source", "Source", 2, {"per-demand/source", "source"}},
    {KIND_ELEMENT, "kind", "Kind", 1, {"kind"}},
    {KIND_ELEMENT, "site", "Site", 4, {"site"}},
    {KIND_ELEMENT, "type", "Type", 4, {"type"}},
    {KIND_ELEMENT, "per-demand", "Fails on demand", 3, {"per-demand"}},
    {KIND_ELEMENT, "test-every", "Tested every", 4, {"test/every"}},
    {KIND_ELEMENT, "source", "Source", 2, {"per-demand/source", "source"}},
    {KIND_COMMON_CAUSE, "beta", "Beta", 4, {"beta"}},
    {KIND_COMMON_CAUSE, "of", "Elements", 3, {"of"}},
    {KIND_COMMON_CAUSE, "source", "Source", 2, {"source"}},
    {KIND_SCHEME, "site", "Site", 2, {"site"}},
    {KIND_SCHEME, "works", "Works by", 4, {"works"}},
    {KIND_HAZARD, "site", "Site", 2, {"site"}},
    {KIND_HAZARD, "frequency", "Frequency as stated", 1, {"frequency"}},
    {KIND_HAZARD, "owner", "Owner", 3, {"owner"}},
    {KIND_HAZARD, "status", "Status", 4, {"status"}},
    {KIND_HAZARD, "review", "Review", 5, {"review"}},
    {KIND_STATE, "is", "Is", 4, {"is"}},
    {KIND_STATE, "varies", "Varies", 3, {"varies"}},
    {KIND_OPTION, "site", "Site", 2, {"site"}},
    {KIND_OPTION, "invest", "Investment", 4, {"invest/is", "invest"}},
    {KIND_OPTION, "running", "Running cost", 3, {"running/is", "running"}},
    {KIND_OPTION, "in-service", "In service", 3, {"in-service"}},
    {KIND_OPTION, "owner", "Owner", 3, {"owner"}},
    {KIND_OPTION, "life", "Life", 2, {"life"}},
    {KIND_DECISION, "options", "Options", 3, {"options"}},
    {KIND_DECISION, "owner", "Owner", 4, {"owner"}},
    {KIND_DECISION, "review", "Review", 5, {"review"}},
    {KIND_PLAN, "options", "Options", 4, {"options"}},
};

struct columns ARRAY_BODY(struct list_column);

enum { N_COLUMNS = sizeof list_columns / sizeof *list_columns };

/* The node under "a/b", or NULL. */
static const struct node *node_at(struct arena *a, const struct node *n, const char *path)
{
    while (n && *path) {
        size_t step = strcspn(path, "/");
        n = n->type == NODE_MAP ? node_get(n, arena_strn(a, path, step)) : NULL;
        path += step + (path[step] == '/');
    }
    return n;
}

/* A map without the key of its source, which has a column of its own. */
static const struct node *without_source(struct arena *a, const struct node *n)
{
    if (n->type != NODE_MAP)
        return n;
    struct node *rest = node_map(a, n->place);
    for (size_t i = 0; i < n->n; i++)
        if (!text_equal(n->pairs[i].key, "source"))
            node_add(a, rest, n->pairs[i].key, n->pairs[i].place, n->pairs[i].value);
    bool plain = rest->n == 1 && text_equal(rest->pairs[0].key, "is");
    return plain ? rest->pairs[0].value : rest;
}

/* A day of review, marked where it has passed; then whether it has. */
static void review_cells(struct job *j, struct row *row, const struct node *n)
{
    day due;
    if (!n || !date_read(n->text, &due)) {
        row_empty(j->report, row);
        row_empty(j->report, row);
        return;
    }
    bool overdue = due < j->date;
    row_date(j->report, row, n->text)->mark = overdue ? "overdue" : NULL;
    row_yes(j->report, row, overdue);
}

static bool is_review(const struct list_column *c)
{
    return text_equal(c->key, "review");
}

static void list_cell(struct job *j, struct row *row, const struct node *doc,
                      const struct list_column *c)
{
    const struct node *n = NULL;
    for (size_t i = 0; i < ALTERNATIVES && !n && c->paths[i]; i++)
        n = node_at(j->arena, doc, c->paths[i]);
    if (is_review(c))
        review_cells(j, row, n);
    else if (n)
        row_text(j->report, row, node_says(j->arena, without_source(j->arena, n), BRIEF));
    else
        row_empty(j->report, row);
}

static void list_row(struct job *j, struct block *b, const struct object *o,
                     const struct columns *columns)
{
    struct row *row = block_row(j->report, b);
    const struct node *doc = object_document(j->arena, o);
    row_text(j->report, row, o->id);
    row_text(j->report, row, object_name(o));
    for (size_t i = 0; i < columns->n; i++)
        list_cell(j, row, doc, &columns->at[i]);
}

/* --- columns --- */

/* A field that the query asks for is dropped last. */
enum { KEEP_NAME = 5, KEEP_ASKED = 6 };

static bool shows(const struct list_column *c, const char *path)
{
    for (size_t i = 0; i < ALTERNATIVES && c->paths[i]; i++)
        if (text_equal(c->paths[i], path))
            return true;
    return false;
}

/* The path without the key of a short form: documents may leave it out. */
static const char *short_path(struct arena *a, const char *path)
{
    static const char key[] = "/is";
    size_t n = strlen(path), m = strlen(key);
    return n > m && text_equal(path + n - m, key) ? arena_strn(a, path, n - m) : NULL;
}

static void ask_column(struct job *j, struct columns *columns, enum kind kind, const char *path)
{
    const char *key = filter_column_key(j->arena, path);
    for (size_t i = 0; i < columns->n; i++) {
        struct list_column *c = &columns->at[i];
        bool shown = shows(c, path);
        c->keep = shown ? KEEP_ASKED : c->keep;
        if (shown || text_equal(c->key, key))
            return;
    }
    *array_push(j->arena, columns) =
        (struct list_column){kind, key, path, KEEP_ASKED, {path, short_path(j->arena, path)}};
}

/* Those of the kind, and behind them the fields that the query asks for beside them. */
static struct columns columns_for(struct job *j, enum kind kind, const struct filter *f)
{
    struct columns columns = {0};
    const struct filter_field *asked;
    for (size_t i = 0; i < N_COLUMNS; i++)
        if (list_columns[i].kind == kind)
            *array_push(j->arena, &columns) = list_columns[i];
    for (size_t i = 0; (asked = filter_asked(f, i)); i++)
        ask_column(j, &columns, kind, asked->path);
    return columns;
}

/* --- the table --- */

static struct block *make_table(struct job *j, enum kind kind, const struct columns *columns)
{
    struct report *r = j->report;
    const char *name = kind == KIND_DECISION ? "Question" : "Name";
    struct block *b = report_table(r, kinds[kind].section, NULL);
    block_column(r, b, "id", kind_title(j->arena, kind), "", STYLE_PLAIN);
    block_column(r, b, "name", name, "", STYLE_PLAIN)->keep = KEEP_NAME;
    for (size_t i = 0; i < columns->n; i++) {
        const struct list_column *c = &columns->at[i];
        block_column(r, b, c->key, c->head, "", STYLE_PLAIN)->keep = c->keep;
        if (is_review(c))
            block_column(r, b, "overdue", "Overdue", "", STYLE_PLAIN)->data = true;
    }
    return b;
}

static void list_table(struct job *j, enum kind kind, struct filter *f)
{
    const struct objects *all = &j->model->of[kind];
    struct filter_items items = {0};
    struct columns columns = columns_for(j, kind, f);
    struct block *b = make_table(j, kind, &columns);
    for (size_t i = 0; i < all->n; i++)
        if (job_has_at_site(j, all->at[i]))
            *array_push(j->arena, &items) = (struct filter_item){.object = all->at[i]};
    filter_apply(f, &items);
    for (size_t i = 0; i < items.n; i++)
        list_row(j, b, items.at[i].object, &columns);
    part_filter(j, f);
}

static ohmen_status unknown_kind(struct job *j, const char *section, ohmen_error *e)
{
    struct nearest near;
    struct text all;
    nearest_init(&near, section);
    text_init(&all, j->arena);
    for (int k = 0; k < KIND_COUNT; k++) {
        nearest_offer(&near, kinds[k].section);
        text_printf(&all, "%s%s", k ? ", " : "", kinds[k].section);
    }
    const char *best = nearest_take(&near);
    if (best)
        return error_set(e, OHMEN_UNKNOWN, "there is no section \"%s\" (did you mean \"%s\"?)",
                         section, best);
    return error_set(e, OHMEN_UNKNOWN, "there is no section \"%s\"; the sections are %s", section,
                     text_str(&all));
}

static ohmen_status run_list(struct job *j, void *ctx, ohmen_error *e)
{
    struct filter *f = NULL;
    enum kind kind = kind_of_section(ctx);
    if (kind == KIND_COUNT)
        return unknown_kind(j, ctx, e);
    ohmen_status status = job_load_model(j, e);
    if (status == OHMEN_OK)
        status = job_check_site(j, e);
    if (status == OHMEN_OK)
        status = filter_read(j, kind, NULL, 0, &f, e);
    if (status != OHMEN_OK)
        return status;
    list_table(j, kind, f);
    return OHMEN_OK;
}

ohmen_status ohmen_list(ohmen_register *r, const ohmen_query *q, const char *kind,
                        ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_list, (void *)kind, out, e);
}
