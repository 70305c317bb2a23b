/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The enduring tables: made from the compiled-in text, and compared with what a file
 * holds by making them once more in memory. Tables beside them are derived and may
 * differ between versions; triggers and views beside them are none of ohmen's and a
 * sign of damage. Owns nothing. */
#include <stdio.h>

#include "base/text.h"
#include "store/internal.h"
#include "store/layout.h"

ohmen_status schema_create(const struct base *b, ohmen_error *e)
{
    char head[96];
    snprintf(head, sizeof head, "PRAGMA application_id = %d; PRAGMA user_version = %d",
             STORE_APPLICATION, STORE_FORMAT);
    ohmen_status status = query_exec(b, head, e);
    return status == OHMEN_OK ? query_exec(b, layout_sql, e) : status;
}

static ohmen_status check_head(struct store *s, ohmen_error *e)
{
    int64_t application = 0, format = 0;
    const char *name = s->base.name;
    ohmen_status status =
        query_number(&s->base, "PRAGMA application_id", 0, 0, &application, e);
    if (status == OHMEN_OK)
        status = query_number(&s->base, "PRAGMA user_version", 0, 0, &format, e);
    if (status != OHMEN_OK)
        return status;
    if (application != STORE_APPLICATION)
        return error_set(e, OHMEN_REGISTER,
                         "%s is no register: it is an SQLite database of another program", name);
    if (format > STORE_FORMAT)
        return error_set(e, OHMEN_REGISTER,
                         "%s was written by a newer ohmen: its format is %lld, this version reads "
                         "formats up to %d",
                         name, (long long)format, STORE_FORMAT);
    if (format < STORE_FORMAT)
        return error_set(e, OHMEN_REGISTER, "%s is damaged: there is no format %lld", name,
                         (long long)format);
    return OHMEN_OK;
}

static ohmen_status differs(const struct store *s, const char *type, const char *name,
                            ohmen_error *e)
{
    return error_set(e, OHMEN_REGISTER,
                     "%s is damaged: its %s %s is not as this format has it", s->base.name, type,
                     name);
}

#define SCHEMA_OBJECT_SQL                                                                          \
    "SELECT tbl_name, sql FROM sqlite_schema WHERE type = ?1 AND name = ?2"

static bool same_text(const char *a, const char *b)
{
    return a && b ? text_equal(a, b) : a == b;
}

/* Is each enduring object in the file, word by word? */
static ohmen_status check_enduring(struct store *s, const struct base *model, ohmen_error *e)
{
    struct query wanted = query_new(model, "SELECT type, name, tbl_name, sql FROM sqlite_schema", e);
    struct query found = query_new(&s->base, SCHEMA_OBJECT_SQL, e);
    while (query_row(&wanted) && found.status == OHMEN_OK) {
        const char *type = query_text(&wanted, 0), *name = query_text(&wanted, 1);
        query_bind_text(&found, 1, type);
        query_bind_text(&found, 2, name);
        bool same = query_row(&found) && same_text(query_text(&wanted, 2), query_text(&found, 0)) &&
                    same_text(query_text(&wanted, 3), query_text(&found, 1));
        query_reset(&found);
        if (!same && found.status == OHMEN_OK)
            wanted.status = differs(s, type, name, e);
    }
    ohmen_status status = query_end(&found);
    ohmen_status other = query_end(&wanted);
    return status != OHMEN_OK ? status : other;
}

/* Does anything act on enduring tables that is none of theirs? */
static ohmen_status check_foreign(struct store *s, const struct base *model, ohmen_error *e)
{
    struct query found =
        query_new(&s->base,
                  "SELECT type, name, tbl_name, '' FROM sqlite_schema "
                  "WHERE type NOT IN ('table', 'index') OR sql LIKE 'CREATE VIRTUAL%'",
                  e);
    struct query wanted = query_new(model, SCHEMA_OBJECT_SQL, e);
    while (query_row(&found) && wanted.status == OHMEN_OK) {
        const char *type = query_text(&found, 0), *name = query_text(&found, 1);
        query_bind_text(&wanted, 1, type);
        query_bind_text(&wanted, 2, name);
        bool known = query_row(&wanted);
        query_reset(&wanted);
        if (!known && wanted.status == OHMEN_OK)
            found.status = error_set(e, OHMEN_REGISTER,
                                     "%s is damaged: it holds a %s %s that ohmen does not make",
                                     s->base.name, type ? type : "thing", name ? name : "?");
    }
    ohmen_status status = query_end(&wanted);
    ohmen_status other = query_end(&found);
    return status != OHMEN_OK ? status : other;
}

/* meta is known word by word. */
static ohmen_status check_meta(struct store *s, const struct base *model, ohmen_error *e)
{
    static const char sql[] = "SELECT key, value FROM meta ORDER BY key";
    struct query wanted = query_new(model, sql, e), found = query_new(&s->base, sql, e);
    for (;;) {
        bool more = query_row(&wanted), there = query_row(&found);
        if (wanted.status != OHMEN_OK || found.status != OHMEN_OK || (!more && !there))
            break;
        if (more != there || !same_text(query_text(&wanted, 0), query_text(&found, 0)) ||
            !same_text(query_text(&wanted, 1), query_text(&found, 1))) {
            query_fail(&found, OHMEN_REGISTER, "%s is damaged: its table meta is not as it was made",
                       s->base.name);
            break;
        }
    }
    ohmen_status status = query_end(&found);
    ohmen_status other = query_end(&wanted);
    return status != OHMEN_OK ? status : other;
}

ohmen_status schema_check(struct store *s, ohmen_error *e)
{
    ohmen_status status = check_head(s, e);
    if (status != OHMEN_OK)
        return status;
    struct arena *a = arena_child(s->arena);
    struct base model;
    status = store_memory_base(a, &model, e);
    if (status == OHMEN_OK)
        status = query_exec(&model, layout_sql, e);
    if (status == OHMEN_OK)
        status = check_enduring(s, &model, e);
    if (status == OHMEN_OK)
        status = check_foreign(s, &model, e);
    if (status == OHMEN_OK)
        status = check_meta(s, &model, e);
    arena_free(a);
    return status;
}
