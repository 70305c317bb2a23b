/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The enduring tables: made from the compiled-in text, and compared with it word by
 * word. SQLite keeps each CREATE statement as it was written, up to its semicolon.
 * Tables beside them are derived and may differ between versions; triggers and views
 * beside them are none of ohmen's and a sign of damage. Owns nothing. */
#include <stdio.h>
#include <string.h>

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
    ohmen_status status = query_number(&s->base, "PRAGMA application_id", 0, 0, &application, e);
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

/* --- the compiled-in text, statement by statement --- */

struct statement {
    const char *type, *name, *sql;
};
struct statements ARRAY_BODY(struct statement);

/* The word behind `at`: letters and underscores. */
static const char *word_at(struct arena *a, const char *at)
{
    return arena_strn(a, at, strspn(at, "abcdefghijklmnopqrstuvwxyz_"));
}

/* "CREATE TABLE name(...": statements begin at the start of a line and end with a
 * semicolon at the end of one. */
static void add_statement(struct arena *a, const char *sql, size_t n, struct statements *out)
{
    static const struct {
        const char *begin, *type;
    } forms[] = {
        {"CREATE TABLE ", "table"}, {"CREATE INDEX ", "index"}, {"CREATE TRIGGER ", "trigger"}};
    for (size_t i = 0; i < sizeof forms / sizeof forms[0]; i++)
        if (text_starts(sql, forms[i].begin))
            *array_push(a, out) = (struct statement){
                forms[i].type, word_at(a, sql + strlen(forms[i].begin)), arena_strn(a, sql, n)};
}

static struct statements enduring(struct arena *a)
{
    struct statements found = {0};
    const char *at = layout_sql;
    while ((at = strstr(at, "\nCREATE ")) != NULL) {
        const char *end = strstr(++at, ";\n");
        if (!end)
            break;
        add_statement(a, at, (size_t)(end - at), &found);
        at = end;
    }
    return found;
}

/* --- comparing --- */

/* Is each enduring object in the file, word by word? */
static ohmen_status check_enduring(struct store *s, const struct statements *all, ohmen_error *e)
{
    struct query q = query_new(
        &s->base, "SELECT 1 FROM sqlite_schema WHERE type = ?1 AND name = ?2 AND sql = ?3", e);
    for (size_t i = 0; i < all->n; i++) {
        query_bind_text(&q, 1, all->at[i].type);
        query_bind_text(&q, 2, all->at[i].name);
        query_bind_text(&q, 3, all->at[i].sql);
        if (!query_row(&q))
            query_fail(&q, OHMEN_REGISTER, "%s is damaged: its %s %s is not as this format has it",
                       s->base.name, all->at[i].type, all->at[i].name);
        query_reset(&q);
    }
    return query_end(&q);
}

static bool is_enduring(const struct statements *all, const char *type, const char *name)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i].type, type) && text_equal(all->at[i].name, name))
            return true;
    return false;
}

/* Does anything act on tables that is none of ohmen's? */
static ohmen_status check_foreign(struct store *s, const struct statements *all, ohmen_error *e)
{
    struct query q = query_new(&s->base,
                               "SELECT type, name FROM sqlite_schema WHERE type NOT IN ('table', "
                               "'index') OR sql LIKE 'CREATE VIRTUAL%'",
                               e);
    while (query_row(&q)) {
        const char *type = query_name(&q, 0), *name = query_name(&q, 1);
        if (!is_enduring(all, type, name))
            query_fail(&q, OHMEN_REGISTER,
                       "%s is damaged: it holds a %s %s that ohmen does not make", s->base.name,
                       type, name);
    }
    return query_end(&q);
}

/* meta as schema/register.sql fills it. */
static const char *const meta[][2] = {
    {"application", "ohmen"}, {"format", "1"}, {"hash", "BLAKE2b-256"}};

static ohmen_status check_meta(struct store *s, ohmen_error *e)
{
    size_t rows = 0, n = sizeof meta / sizeof meta[0];
    struct query q = query_new(&s->base, "SELECT key, value FROM meta ORDER BY key", e);
    bool same = true;
    for (; query_row(&q); rows++)
        same = same && rows < n && text_equal(query_name(&q, 0), meta[rows][0]) &&
               text_equal(query_name(&q, 1), meta[rows][1]);
    if (!same || rows != n)
        query_fail(&q, OHMEN_REGISTER, "%s is damaged: its table meta is not as it was made",
                   s->base.name);
    return query_end(&q);
}

ohmen_status schema_check(struct store *s, ohmen_error *e)
{
    ohmen_status status = check_head(s, e);
    if (status != OHMEN_OK)
        return status;
    struct arena *a = arena_child(s->arena);
    struct statements all = enduring(a);
    status = check_enduring(s, &all, e);
    if (status == OHMEN_OK)
        status = check_foreign(s, &all, e);
    if (status == OHMEN_OK)
        status = check_meta(s, e);
    arena_free(a);
    return status;
}
