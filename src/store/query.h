/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One SQL statement at work: bind, step, read, with errors that stick.
 *
 * Invariant: values reach SQL only through parameters. After the first failure every
 * call does nothing and query_end returns what failed first, as status and sentence.
 * A query that a jump (out of memory) leaves behind is finalised when its database is
 * closed.
 *
 *     struct query q = query_new(base, "SELECT json FROM body WHERE hash = ?1", e);
 *     query_bind_text(&q, 1, hash);
 *     while (query_row(&q))
 *         use(query_text(&q, 0));
 *     return query_end(&q); */
#ifndef STORE_QUERY_H
#define STORE_QUERY_H

#include <sqlite3.h>
#include <stdbool.h>

#include "base/arena.h"
#include "base/error.h"

/* A database under a name for messages. While `writing` is set a transaction is under
 * way; SQLite ends it by itself on some failures (I/O, no room, no memory), and what
 * came after would then be stored on its own: every step is refused instead. */
struct base {
    sqlite3 *db;
    const char *name;
    bool writing;
};

struct query {
    const struct base *base;
    sqlite3_stmt *stmt;
    ohmen_status status;
    ohmen_error *e;
};

/* Prepares one statement. */
struct query query_new(const struct base *b, const char *sql, ohmen_error *e);

void query_bind_text(struct query *q, int at,
                     const char *s); /* s outlives the step; NULL is NULL */
void query_bind_int(struct query *q, int at, int64_t n);
void query_bind_null(struct query *q, int at);

/* The next row; false at the end or after a failure. */
bool query_row(struct query *q);
/* Steps to the end and makes the statement ready for new parameters. */
void query_run(struct query *q);
/* Makes the statement ready for new parameters. */
void query_reset(struct query *q);

/* Columns of the present row, from 0. A text lives until the next step; NULL where the
 * column is NULL. A text that holds a zero byte, which ohmen never writes, is damage. */
const char *query_text(struct query *q, int column);
/* The same, but "" where the column is NULL. */
const char *query_name(struct query *q, int column);
/* The same, its bytes to *n. */
const char *query_bytes(struct query *q, int column, size_t *n);
int64_t query_int(struct query *q, int column);
bool query_is_null(struct query *q, int column);
/* A copy in an arena; NULL stays NULL. */
const char *query_copy(struct query *q, int column, struct arena *a);

/* Fails the query with a sentence of the caller's. */
void query_fail(struct query *q, ohmen_status status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* Finalises. Safe to call twice. */
ohmen_status query_end(struct query *q);

/* Runs statements without parameters and without rows. */
ohmen_status query_exec(const struct base *b, const char *sql, ohmen_error *e);

/* One number from a statement with at most one number as parameter; `fallback` when
 * there is no row or it is NULL. */
ohmen_status query_number(const struct base *b, const char *sql, int64_t parameter,
                          int64_t fallback, int64_t *out, ohmen_error *e);

/* Sets the error for a result code of SQLite. */
ohmen_status query_error(const struct base *b, int code, ohmen_error *e);

#endif
