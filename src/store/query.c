/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Statements of SQLite with errors that stick, and the one place where SQLite's result
 * codes become statuses and sentences. Owns the statement from query_new to query_end. */
#include "store/query.h"

#include <string.h>

static ohmen_status busy(const struct base *b, ohmen_error *e)
{
    return error_set(e, OHMEN_CONFLICT,
                     "another program is writing to %s; nothing was stored, try again", b->name);
}

static ohmen_status damaged(const struct base *b, ohmen_error *e)
{
    return error_set(e, OHMEN_REGISTER, "%s is damaged: %s", b->name, sqlite3_errmsg(b->db));
}

ohmen_status query_error(const struct base *b, int code, ohmen_error *e)
{
    switch (code & 0xff) {
    case SQLITE_NOMEM: return error_set(e, OHMEN_MEMORY, "out of memory while using %s", b->name);
    case SQLITE_BUSY:
    case SQLITE_LOCKED: return busy(b, e);
    case SQLITE_NOTADB:
        return error_set(e, OHMEN_REGISTER, "%s is no register: it is not an SQLite database",
                         b->name);
    case SQLITE_CORRUPT:
    case SQLITE_FORMAT: return damaged(b, e);
    case SQLITE_FULL: return error_set(e, OHMEN_IO, "there is no room left to write %s", b->name);
    case SQLITE_READONLY:
    case SQLITE_PERM:
        return error_set(e, OHMEN_IO, "%s cannot be written: %s", b->name, sqlite3_errmsg(b->db));
    case SQLITE_IOERR:
    case SQLITE_CANTOPEN:
    case SQLITE_PROTOCOL:
        return error_set(e, OHMEN_IO, "cannot read or write %s: %s", b->name,
                         sqlite3_errmsg(b->db));
    case SQLITE_TOOBIG:
        return error_set(e, OHMEN_INPUT, "a text is too long to be stored in %s", b->name);
    default: return error_set(e, OHMEN_INTERNAL, "%s: %s", b->name, sqlite3_errmsg(b->db));
    }
}

static bool is_cut_off(const struct base *b)
{
    return b->writing && sqlite3_get_autocommit(b->db);
}

static ohmen_status cut_off(const struct base *b, ohmen_error *e)
{
    return error_set(e, OHMEN_IO, "writing %s was cut off by a failure; nothing was stored",
                     b->name);
}

static bool failed(struct query *q, int code)
{
    if (code == SQLITE_OK || code == SQLITE_ROW || code == SQLITE_DONE)
        return false;
    if (q->status == OHMEN_OK)
        q->status = query_error(q->base, code, q->e);
    return true;
}

struct query query_new(const struct base *b, const char *sql, ohmen_error *e)
{
    struct query q = {.base = b, .e = e};
    failed(&q, sqlite3_prepare_v2(b->db, sql, -1, &q.stmt, NULL));
    return q;
}

void query_bind_text(struct query *q, int at, const char *s)
{
    if (q->status == OHMEN_OK)
        failed(q, sqlite3_bind_text(q->stmt, at, s, -1, SQLITE_STATIC));
}

void query_bind_int(struct query *q, int at, int64_t n)
{
    if (q->status == OHMEN_OK)
        failed(q, sqlite3_bind_int64(q->stmt, at, n));
}

void query_bind_null(struct query *q, int at)
{
    if (q->status == OHMEN_OK)
        failed(q, sqlite3_bind_null(q->stmt, at));
}

bool query_row(struct query *q)
{
    if (q->status != OHMEN_OK)
        return false;
    if (is_cut_off(q->base)) {
        q->status = cut_off(q->base, q->e);
        return false;
    }
    int code = sqlite3_step(q->stmt);
    return !failed(q, code) && code == SQLITE_ROW;
}

void query_reset(struct query *q)
{
    if (q->stmt)
        sqlite3_reset(q->stmt); /* repeats the code of the last step, which is known */
}

void query_run(struct query *q)
{
    while (query_row(q)) {
    }
    query_reset(q);
}

const char *query_text(struct query *q, int column)
{
    if (sqlite3_column_type(q->stmt, column) == SQLITE_NULL)
        return NULL;
    size_t n;
    return query_bytes(q, column, &n);
}

const char *query_name(struct query *q, int column)
{
    size_t n;
    return query_bytes(q, column, &n);
}

const char *query_bytes(struct query *q, int column, size_t *n)
{
    const char *s = (const char *)sqlite3_column_text(q->stmt, column);
    *n = 0;
    if (!s) {
        if (sqlite3_column_type(q->stmt, column) != SQLITE_NULL)
            failed(q, SQLITE_NOMEM);
        return "";
    }
    *n = (size_t)sqlite3_column_bytes(q->stmt, column);
    if (strlen(s) != *n)
        query_fail(q, OHMEN_REGISTER, "%s is damaged: a text holds a zero byte", q->base->name);
    return s;
}

int64_t query_int(struct query *q, int column)
{
    return sqlite3_column_int64(q->stmt, column);
}

bool query_is_null(struct query *q, int column)
{
    return sqlite3_column_type(q->stmt, column) == SQLITE_NULL;
}

const char *query_copy(struct query *q, int column, struct arena *a)
{
    const char *s = query_text(q, column);
    return s ? arena_str(a, s) : NULL;
}

void query_fail(struct query *q, ohmen_status status, const char *format, ...)
{
    if (q->status != OHMEN_OK)
        return;
    va_list args;
    va_start(args, format);
    q->status = error_vset(q->e, status, format, args);
    va_end(args);
}

ohmen_status query_end(struct query *q)
{
    sqlite3_finalize(q->stmt);
    q->stmt = NULL;
    return q->status;
}

ohmen_status query_exec(const struct base *b, const char *sql, ohmen_error *e)
{
    if (is_cut_off(b))
        return cut_off(b, e);
    int code = sqlite3_exec(b->db, sql, NULL, NULL, NULL);
    return code == SQLITE_OK ? OHMEN_OK : query_error(b, code, e);
}

ohmen_status query_number(const struct base *b, const char *sql, int64_t parameter,
                          int64_t fallback, int64_t *out, ohmen_error *e)
{
    struct query q = query_new(b, sql, e);
    int64_t n = fallback;
    if (q.status == OHMEN_OK && sqlite3_bind_parameter_count(q.stmt) > 0)
        query_bind_int(&q, 1, parameter);
    if (query_row(&q) && !query_is_null(&q, 0))
        n = query_int(&q, 0);
    ohmen_status status = query_end(&q);
    if (status == OHMEN_OK)
        *out = n;
    return status;
}
