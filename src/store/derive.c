/* SPDX-License-Identifier: GPL-3.0-or-later */
/* From a body to its rows in the derived tables: the body is read, bound by its field
 * table, and walked; each visit lands at the spot that the projection has for it.
 *
 * Owns the statements of one derivation. Invariant: a row is written once all its
 * columns are known, that is behind the last visit below it. */
#include <stdlib.h>

#include "doc/json.h"
#include "model/bind.h"
#include "model/supplied.h"
#include "store/projection.h"

struct cell {
    const char *text; /* NULL with `whole` false: NULL */
    int64_t number;
    bool whole;
};

/* A row that is being filled. */
struct row {
    const struct relation *relation;
    const char *path;
    struct cell *cells;
};

/* What is walked into: the spot, and the row that its columns belong to. */
struct level {
    const struct spots *below;
    struct row *row;
    bool ends_row; /* the row is written behind this level */
};

struct derivation {
    const struct base *to;
    struct projection *projection;
    const struct units *units;
    ohmen_error *e;
    ohmen_status status;
    struct query *insert, *remove; /* by relation; prepared when first needed */
    struct query reference, unreference;
    struct arena *arena;   /* the derivation's */
    struct arena *scratch; /* of the present object */
    enum kind kind;
    const char *id;
    ARRAY(struct level) levels;
};

ohmen_status derive_create(struct arena *a, const struct base *to, const struct projection *p,
                           ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < projection_n_fixed && status == OHMEN_OK; i++)
        status = query_exec(to, projection_fixed[i].sql, e);
    for (size_t i = 0; i < p->relations.n && status == OHMEN_OK; i++)
        status = query_exec(to, projection_sql(a, p->relations.at[i]), e);
    return status;
}

static const char *insert_sql(struct arena *a, const struct relation *r)
{
    struct text t;
    text_init(&t, a);
    text_printf(&t, "INSERT INTO \"%s\" VALUES(", r->name);
    for (size_t i = 0; i < r->columns.n; i++)
        text_printf(&t, "%s?%zu", i ? ", " : "", i + 1);
    text_byte(&t, ')');
    return text_str(&t);
}

/* --- rows --- */

static struct row *open_row(struct derivation *d, const struct relation *r)
{
    struct row *row = NEW(d->scratch, struct row);
    row->relation = r;
    row->cells = NEW_ARRAY(d->scratch, r->columns.n, struct cell);
    row->cells[0].text = d->id;
    row->path = "";
    return row;
}

/* A row inside the object, at `path`, inside the row `in`. */
static struct row *open_inner(struct derivation *d, const struct relation *r, const char *path,
                              const struct row *in)
{
    struct row *row = open_row(d, r);
    row->path = arena_str(d->scratch, path);
    row->cells[ROW_PATH].text = row->path;
    row->cells[ROW_WITHIN].text = in->path;
    return row;
}

static void set_whole(struct row *row, size_t column, int64_t n)
{
    row->cells[column] = (struct cell){.number = n, .whole = true};
}

/* Binds what a row holds; the texts outlive the step. */
static void write_row(struct derivation *d, const struct row *row)
{
    struct query *q = &d->insert[row->relation->index];
    if (d->status != OHMEN_OK)
        return;
    if (!q->base)
        *q = query_new(d->to, insert_sql(d->arena, row->relation), d->e);
    for (size_t i = 0; i < row->relation->columns.n; i++) {
        if (row->cells[i].whole)
            query_bind_int(q, (int)i + 1, row->cells[i].number);
        else
            query_bind_text(q, (int)i + 1, row->cells[i].text);
    }
    query_run(q);
    d->status = q->status;
}

/* How a node reads in a column of text: scalars as they are, the rest as JSON. */
static const char *node_text(struct derivation *d, const struct node *n)
{
    if (n->type == NODE_SCALAR)
        return n->text;
    struct text t;
    text_init(&t, d->scratch);
    json_write(&t, n);
    return text_str(&t);
}

static void set_column(struct derivation *d, struct row *row, size_t column, const struct node *n)
{
    if (!row->relation->columns.at[column].whole)
        row->cells[column].text = node_text(d, n);
    else if (n->form == FORM_COUNT)
        set_whole(row, column, strtoll(n->text, NULL, 10));
    else
        set_whole(row, column, n->form == FORM_YES);
}

/* --- sets, structures, changes --- */

static const char *path_below(struct derivation *d, const char *path, size_t i)
{
    return arena_printf(d->scratch, "%s/%zu", path, i);
}

static void write_set(struct derivation *d, const struct spot *s, const struct visit *v,
                      const struct row *in)
{
    for (size_t i = 0; i < v->node->n; i++) {
        struct row *row = open_inner(d, s->relation, path_below(d, v->path, i), in);
        set_whole(row, ROW_KEY, (int64_t)i);
        row->cells[ROW_KEY + 1].text = node_text(d, v->node->items[i]);
        write_row(d, row);
    }
}

static const char *structure_word(const struct structure *s)
{
    if (s->op == STRUCTURE_NAME)
        return "name";
    if (s->op == STRUCTURE_ABSENT)
        return "absent";
    return s->k == s->n ? "all" : s->k == 1 ? "any" : "at-least";
}

static void write_structure(struct derivation *d, const struct relation *r, const char *path,
                            size_t position, const struct structure *s, const struct row *in)
{
    struct row *row = open_inner(d, r, path, in);
    set_whole(row, ROW_KEY, (int64_t)position);
    row->cells[ROW_KEY + 1].text = structure_word(s);
    if (s->op == STRUCTURE_AT_LEAST)
        set_whole(row, ROW_KEY + 2, s->k);
    if (s->op == STRUCTURE_NAME)
        row->cells[ROW_KEY + 3].text = s->name;
    write_row(d, row);
    for (size_t i = 0; i < s->n; i++)
        write_structure(d, r, path_below(d, path, i), i, s->of[i], row);
}

/* `path` is in the object, `at` inside the change. */
static void write_change(struct derivation *d, const struct relation *r, const char *path,
                         const char *at, const struct node *n, const struct row *in)
{
    if (n->type == NODE_MAP && n->n > 0) {
        for (size_t i = 0; i < n->n; i++) {
            const char *key = n->pairs[i].key;
            write_change(d, r, arena_printf(d->scratch, "%s/%s", path, key),
                         at[0] ? arena_printf(d->scratch, "%s/%s", at, key) : key,
                         n->pairs[i].value, in);
        }
        return;
    }
    struct row *row = open_inner(d, r, path, in);
    row->cells[ROW_KEY].text = at;
    row->cells[ROW_KEY + 1].text = node_text(d, n);
    write_row(d, row);
}

static void write_content(struct derivation *d, const struct spot *s, const struct visit *v,
                          const struct row *in)
{
    if (s->shape == SPOT_SET)
        write_set(d, s, v, in);
    else if (s->shape == SPOT_STRUCTURE)
        write_structure(d, s->relation, v->path, 0, *(struct structure *const *)v->member, in);
    else
        write_change(d, s->relation, v->path, "", v->node, in);
}

/* --- the walk --- */

static enum walk go_into(struct derivation *d, const struct spots *below, struct row *row,
                         bool ends_row)
{
    *array_push(d->scratch, &d->levels) = (struct level){below, row, ends_row};
    return WALK_INTO;
}

static enum walk enter_row(struct derivation *d, const struct spot *s, const struct visit *v,
                           const struct row *in)
{
    struct row *row = open_inner(d, s->relation, v->path, in);
    if (v->key)
        row->cells[ROW_KEY].text = arena_str(d->scratch, v->key);
    else
        set_whole(row, ROW_KEY, (int64_t)v->index);
    if (!s->column && !s->content)
        return go_into(d, s->below, row, true);
    if (s->column)
        set_column(d, row, s->column, v->node);
    else
        write_content(d, s->content, v, row);
    write_row(d, row);
    return WALK_PAST;
}

static const struct spot *find_spot(const struct spots *below, const struct field *f)
{
    for (size_t i = 0; i < below->n; i++)
        if (below->at[i]->field == f)
            return below->at[i];
    return NULL;
}

static enum walk enter(void *ctx, const struct visit *v)
{
    struct derivation *d = ctx;
    const struct level *top = array_last(&d->levels);
    const struct spot *s = find_spot(top->below, v->field);
    if (!s || d->status != OHMEN_OK)
        return WALK_PAST;
    switch (s->shape) {
    case SPOT_COLUMN: set_column(d, top->row, s->column, v->node); return WALK_PAST;
    case SPOT_GROUP:
    case SPOT_ROWS: return go_into(d, s->below, top->row, false);
    case SPOT_ROW: return enter_row(d, s, v, top->row);
    default: write_content(d, s, v, top->row); return WALK_PAST;
    }
}

static void leave(void *ctx, const struct visit *v)
{
    (void)v;
    struct derivation *d = ctx;
    const struct level *top = &d->levels.at[--d->levels.n];
    if (top->ends_row)
        write_row(d, top->row);
}

static void write_rows(struct derivation *d, const struct node *node, const void *data)
{
    struct row *row = open_row(d, d->projection->of[d->kind]);
    struct walker w = {.ctx = d, .enter = enter, .leave = leave};
    d->levels.n = d->levels.cap = 0;
    go_into(d, d->projection->spots[d->kind], row, false);
    walk_table(d->scratch, kinds[d->kind].table, node, data, &w);
    write_row(d, row);
}

/* --- references --- */

static void write_references(struct derivation *d, const struct node *node, const void *data)
{
    struct references refs = {0};
    struct query *q = &d->reference;
    kind_references(d->scratch, d->kind, node, data, &refs);
    for (size_t i = 0; i < refs.n && d->status == OHMEN_OK; i++) {
        query_bind_text(q, 1, kinds[d->kind].name);
        query_bind_text(q, 2, d->id);
        query_bind_text(q, 3, refs.at[i].path);
        query_bind_text(q, 4, refs.at[i].id);
        query_bind_int(q, 5, refs.at[i].trace);
        query_run(q);
        d->status = q->status;
    }
}

/* --- objects --- */

struct derivation *derive_begin(struct arena *a, const struct base *to, struct projection *p,
                                const struct units *units, ohmen_error *e)
{
    struct derivation *d = NEW(a, struct derivation);
    *d = (struct derivation){.to = to, .projection = p, .units = units, .e = e, .arena = a};
    d->insert = NEW_ARRAY(a, p->relations.n, struct query);
    d->remove = NEW_ARRAY(a, p->relations.n, struct query);
    d->reference = query_new(to, "INSERT OR IGNORE INTO reference VALUES(?1, ?2, ?3, ?4, ?5)", e);
    d->unreference = query_new(to, "DELETE FROM reference WHERE kind = ?1 AND \"from\" = ?2", e);
    d->status = d->reference.status != OHMEN_OK ? d->reference.status : d->unreference.status;
    return d;
}

static void remove_from(struct derivation *d, const struct relation *r)
{
    struct query *q = &d->remove[r->index];
    if (!q->base)
        *q = query_new(d->to,
                       arena_printf(d->arena, "DELETE FROM \"%s\" WHERE \"%s\" = ?1", r->name,
                                    r->columns.at[0].name),
                       d->e);
    query_bind_text(q, 1, d->id);
    query_run(q);
    d->status = q->status;
}

static void remove_rows(struct derivation *d)
{
    for (size_t i = 0; i < d->projection->relations.n && d->status == OHMEN_OK; i++)
        if (d->projection->relations.at[i]->kind == d->kind)
            remove_from(d, d->projection->relations.at[i]);
    if (d->status != OHMEN_OK)
        return;
    query_bind_text(&d->unreference, 1, kinds[d->kind].name);
    query_bind_text(&d->unreference, 2, d->id);
    query_run(&d->unreference);
    d->status = d->unreference.status;
}

/* A body binds: the program that wrote it bound it before. The settings are bound with
 * the standard units only, since there the counts are plain names. */
static bool bind_body(struct derivation *d, const char *json, size_t n, struct node **node,
                      void **data)
{
    struct node *read;
    const char *path = arena_printf(d->scratch, "%s/%s", kinds[d->kind].section, d->id);
    d->status = json_read(d->scratch, json, n, path, &read, d->e);
    if (d->status != OHMEN_OK)
        return false;
    struct diags diags;
    diags_init(&diags, d->scratch);
    const struct units standard = {.currency = d->units->currency};
    struct binding b = {.arena = d->scratch,
                        .units = d->kind == KIND_REGISTER ? &standard : d->units,
                        .diags = &diags};
    if (bind_object(&b, kinds[d->kind].table, read, node, data))
        return true;
    d->status = error_set(d->e, OHMEN_INTERNAL, "the body of %s %s does not fit its kind: %s",
                          kinds[d->kind].name, d->id,
                          diags.list.n ? diags.list.at[0].text : "no reason was told");
    return false;
}

static void write_object(struct derivation *d, const char *json, size_t n)
{
    struct node *node;
    void *data;
    if (!bind_body(d, json, n, &node, &data))
        return;
    write_rows(d, node, data);
    write_references(d, node, data);
}

ohmen_status derive_object(struct derivation *d, enum kind kind, const char *id, const char *json,
                           size_t n)
{
    d->scratch = arena_child(d->arena);
    d->kind = kind;
    d->id = id;
    if (d->status == OHMEN_OK)
        remove_rows(d);
    if (d->status == OHMEN_OK && json)
        write_object(d, json, n);
    arena_free(d->scratch);
    return d->status;
}

ohmen_status derive_end(struct derivation *d)
{
    for (size_t i = 0; i < d->projection->relations.n; i++) {
        query_end(&d->insert[i]);
        query_end(&d->remove[i]);
    }
    query_end(&d->reference);
    query_end(&d->unreference);
    return d->status;
}
