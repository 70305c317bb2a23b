/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The audit of the derived tables: all are derived once more in memory, and both are
 * stepped through in the order of their keys. Owns nothing. */
#include "store/verify.h"

/* One table in both databases. */
struct pair_of_tables {
    struct audit *v;
    const char *name;
    size_t n_key, n_columns;
    struct query file, fresh;
};

/* Order of two cells: NULL, then numbers, then texts by bytes (as SQLite sorts). */
static int compare_cells(struct query *p, struct query *q, int column)
{
    bool no_p = query_is_null(p, column), no_q = query_is_null(q, column);
    if (no_p || no_q)
        return (int)no_q - (int)no_p;
    int type_p = sqlite3_column_type(p->stmt, column),
        type_q = sqlite3_column_type(q->stmt, column);
    if (type_p != type_q)
        return type_p < type_q ? -1 : 1;
    if (type_p != SQLITE_INTEGER)
        return text_compare(query_name(p, column), query_name(q, column));
    int64_t a = query_int(p, column), b = query_int(q, column);
    return (a > b) - (a < b);
}

static int compare_keys(struct pair_of_tables *t)
{
    for (size_t i = 0; i < t->n_key; i++) {
        int order = compare_cells(&t->file, &t->fresh, (int)i);
        if (order)
            return order;
    }
    return 0;
}

/* The key of a row for a message: H-BUS1, outcomes/slow. */
static const char *key_text(struct pair_of_tables *t, struct query *q)
{
    struct text key;
    text_init(&key, t->v->a);
    for (size_t i = 0; i < t->n_key; i++)
        text_printf(&key, "%s%s", i ? ", " : "", query_name(q, (int)i));
    return text_str(&key);
}

static void compare_fields(struct pair_of_tables *t)
{
    for (size_t i = t->n_key; i < t->n_columns; i++) {
        if (compare_cells(&t->file, &t->fresh, (int)i) == 0)
            continue;
        audit_find(t->v, "derived table %s, %s, field %s: it holds \"%s\", the bodies make \"%s\"",
                   t->name, key_text(t, &t->file), sqlite3_column_name(t->file.stmt, (int)i),
                   query_name(&t->file, (int)i), query_name(&t->fresh, (int)i));
    }
}

static void compare_tables(struct pair_of_tables *t)
{
    bool in_file = query_row(&t->file), in_fresh = query_row(&t->fresh);
    while (in_file || in_fresh) {
        int order = !in_file ? 1 : !in_fresh ? -1 : compare_keys(t);
        if (order == 0)
            compare_fields(t);
        else if (order < 0)
            audit_find(t->v, "derived table %s: the row %s does not follow from the bodies",
                       t->name, key_text(t, &t->file));
        else
            audit_find(t->v, "derived table %s: the row %s is missing", t->name,
                       key_text(t, &t->fresh));
        in_file = order <= 0 ? query_row(&t->file) : in_file;
        in_fresh = order >= 0 ? query_row(&t->fresh) : in_fresh;
    }
}

/* Quotes in names of relations are none: the names are those of the field tables. */
static ohmen_status audit_table(struct audit *v, const struct base *fresh, const char *name,
                                size_t n_key)
{
    ohmen_error why = OHMEN_ERROR_INIT;
    struct text order;
    text_init(&order, v->a);
    for (size_t i = 0; i < n_key; i++)
        text_printf(&order, "%s%zu", i ? ", " : "", i + 1);
    const char *sql =
        arena_printf(v->a, "SELECT * FROM \"%s\" ORDER BY %s", name, text_str(&order));
    struct pair_of_tables t = {.v = v, .name = name, .n_key = n_key};
    t.fresh = query_new(fresh, sql, &why);
    t.file = query_new(&v->s->base, sql, &why);
    if (t.fresh.status == OHMEN_OK && t.file.status == OHMEN_OK) {
        t.n_columns = (size_t)sqlite3_column_count(t.fresh.stmt);
        compare_tables(&t);
    }
    ohmen_status status = query_end(&t.file), other = query_end(&t.fresh);
    return audit_outcome(v, arena_printf(v->a, "derived table %s", name),
                         status != OHMEN_OK ? status : other, &why);
}

static ohmen_status audit_tables(struct audit *v, const struct base *fresh)
{
    const struct projection *p = store_projection(v->s);
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; i < projection_n_fixed && status == OHMEN_OK; i++)
        if (projection_fixed[i].n_key)
            status = audit_table(v, fresh, projection_fixed[i].name, projection_fixed[i].n_key);
    for (size_t i = 0; i < p->relations.n && status == OHMEN_OK; i++)
        status = audit_table(v, fresh, p->relations.at[i]->name, p->relations.at[i]->n_key);
    return status;
}

/* Makes the fresh derivation; *made tells whether the bodies allowed it. */
static ohmen_status derive_fresh(struct audit *v, struct base *fresh, bool *made)
{
    ohmen_error why = OHMEN_ERROR_INIT;
    ohmen_status status = store_memory_base(v->a, fresh, &why);
    if (status == OHMEN_OK)
        status = derive_create(v->a, fresh, store_projection(v->s), &why);
    if (status == OHMEN_OK)
        status = rebuild_fill(v->s, fresh, &why);
    *made = status == OHMEN_OK;
    return audit_outcome(v, "derived tables", status, &why);
}

ohmen_status audit_derived(struct audit *v)
{
    ohmen_error why = OHMEN_ERROR_INIT;
    struct base fresh;
    bool ours = false, made = false;
    ohmen_status status = rebuild_layout_is_ours(v->s, &ours, &why);
    status = audit_outcome(v, "derived tables", status, &why);
    if (status == OHMEN_OK && !ours) {
        audit_find(v, "the derived tables are not laid out as this version of ohmen makes them; "
                      "they have to be rebuilt");
        return OHMEN_OK;
    }
    if (status == OHMEN_OK)
        status = derive_fresh(v, &fresh, &made);
    return status == OHMEN_OK && made ? audit_tables(v, &fresh) : status;
}
