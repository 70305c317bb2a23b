/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The audit: every column of every enduring table changed, every kind of derived row
 * changed, bytes of the file flipped. Nothing may pass in silence. */
#include <fcntl.h>
#include <stdio.h>
#include <string.h>
#include <unistd.h>

#include "base/file.h"
#include "store/journal.h"
#include "store_test.h"

/* --- a register with rows in all tables --- */

static void run(sqlite3 *db, const char *sql)
{
    if (sqlite3_exec(db, sql, NULL, NULL, NULL) != SQLITE_OK)
        ck_abort_msg("%s: %s", sql, sqlite3_errmsg(db));
}

/* Writes entry 2, whose withdrawal and record no command makes yet. */
static void write_entry_2(struct arena *a, const struct base *b)
{
    char digest[STORE_HASH_TEXT], hash[STORE_HASH_TEXT];
    ohmen_error e = OHMEN_ERROR_INIT;
    struct journal_entry n = {0};
    run(b->db, "INSERT INTO withdrawal VALUES(1, 2, 2);"
               "INSERT INTO record VALUES('R-1', 2, '{\"a\":1}', '{\"b\":2}', 'text', NULL);"
               "INSERT INTO record VALUES('R-2', 2, '{\"a\":2}', '{\"b\":3}', 'more', 'R-1')");
    MUST(journal_digest(b, a, 2, &n, digest, &e), &e);
    struct query q = query_new(b, "SELECT hash FROM entry WHERE seq = 1", &e);
    ck_assert(query_row(&q));
    n.prev = query_copy(&q, 0, a);
    query_end(&q);
    n.seq = 2;
    n.utc = 1767323999;
    n.author = n.reason = n.command = n.tool = "x";
    n.digest = digest;
    journal_entry_hash(a, &n, hash);
    run(b->db,
        arena_printf(a,
                     "INSERT INTO entry VALUES(2, 1767323999, 'x', 'x', 'x', 'x', 0, 0, 1, 2,"
                     " '%s', '%s', '%s')",
                     digest, n.prev, hash));
}

/* Two rows each; the hash of the first is the second's prev. */
static void write_chain(struct arena *a, const struct base *b, const char *table,
                        const char *columns, int n_columns,
                        void (*hash_row)(struct query *, struct arena *, char[STORE_HASH_TEXT]))
{
    char hash[STORE_HASH_TEXT] = JOURNAL_FIRST;
    for (int number = 1; number <= 2; number++) {
        ohmen_error e = OHMEN_ERROR_INIT;
        const char *row = arena_printf(a, "%d, %s, '%s'", number, columns, hash);
        struct query q = query_new(b, arena_printf(a, "SELECT %s", row), &e);
        ck_assert(query_row(&q));
        ck_assert_int_eq(sqlite3_column_count(q.stmt), n_columns);
        hash_row(&q, a, hash);
        query_end(&q);
        run(b->db, arena_printf(a, "INSERT INTO %s VALUES(%s, '%s')", table, row, hash));
    }
}

/* A closed register of one file; its bytes. */
static const char *full_register(struct arena *a, char **bytes, size_t *n)
{
    struct arena *writing = arena_child(a);
    const char *path, *kept;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(writing, &path);
    struct base b = {.name = "raw"};
    ck_assert_int_eq(sqlite3_open(path, &b.db), SQLITE_OK);
    write_entry_2(a, &b);
    write_chain(a, &b, "signature", "'abc', 'author', 'k', 's', 5", 7, journal_signature_hash);
    write_chain(a, &b, "seal", "2, 'kept outside', 's'", 5, journal_seal_hash);
    sqlite3_close(b.db);
    test_is_sound(s);
    kept = test_path(a, "kept.ohmen");
    MUST(store_backup(s, kept, &e), &e);
    arena_free(writing);
    MUST(file_read(a, kept, 1 << 26, bytes, n, &e), &e);
    return kept;
}

static void put_back(struct arena *a, const char *path, const char *bytes, size_t n)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    unlink(arena_printf(a, "%s-wal", path));
    unlink(arena_printf(a, "%s-shm", path));
    MUST(file_write(path, bytes, n, &e), &e);
}

/* Opens and audits: the number of findings; a register that is refused is one. */
static size_t findings(const char *path, const char **first)
{
    static char text[OHMEN_ERROR_TEXT];
    struct arena *a = test_arena();
    struct store *s;
    struct store_findings found = {0};
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = store_open(a, path, STORE_READ, &s, &e);
    if (status == OHMEN_OK)
        status = store_verify(s, &found, &e);
    if (status != OHMEN_OK)
        snprintf(text, sizeof text, "%s", e.text);
    else
        snprintf(text, sizeof text, "%s", found.n ? found.at[0] : "");
    size_t n = status != OHMEN_OK ? 1 : found.n;
    arena_free(a);
    *first = text;
    return n;
}

/* --- every column --- */

/* SQL that changes one byte of one column in one row, by the type that stands there. */
static const char *change_sql(struct arena *a, const char *table, const char *column, int row)
{
    const char *key = strcmp(table, "version") == 0 ? "seq || kind || id"
                      : strcmp(table, "meta") == 0  ? "key"
                                                    : "rowid";
    return arena_printf(
        a,
        "PRAGMA foreign_keys = OFF;"
        "UPDATE OR FAIL \"%s\" SET \"%s\" = CASE typeof(\"%s\") WHEN 'integer' THEN \"%s\" + 1000 "
        "WHEN 'null' THEN %s ELSE substr(\"%s\", 1, length(\"%s\") - 1) || "
        "char(unicode(substr('0' || \"%s\", -1)) + 5) END "
        "WHERE %s = (SELECT %s FROM \"%s\" ORDER BY %s LIMIT 1 OFFSET %d)",
        table, column, column, column, strcmp(table, "withdrawal") == 0 ? "2" : "'R-1'", column,
        column, column, key, key, table, key, row);
}

struct columns ARRAY_BODY(const char *);
static struct columns columns_of(struct arena *a, const char *path, const char *table)
{
    sqlite3 *db;
    sqlite3_stmt *q;
    struct columns names = {0};
    ck_assert_int_eq(sqlite3_open(path, &db), SQLITE_OK);
    const char *sql = arena_printf(a, "SELECT name FROM pragma_table_info('%s')", table);
    ck_assert_int_eq(sqlite3_prepare_v2(db, sql, -1, &q, NULL), SQLITE_OK);
    while (sqlite3_step(q) == SQLITE_ROW)
        *array_push(a, &names) = arena_str(a, (const char *)sqlite3_column_text(q, 0));
    sqlite3_finalize(q);
    sqlite3_close(db);
    return names;
}

START_TEST(every_column_is_under_a_hash)
{
    static const struct {
        const char *table, *words;
    } all[] = {{"meta", "meta"},     {"entry", "entry"},         {"body", "body"},
               {"version", "entry"}, {"observation", "entry"},   {"withdrawal", "entry"},
               {"record", "entry"},  {"signature", "signature"}, {"seal", "seal"}};
    struct arena *a = test_arena();
    char *bytes;
    size_t n, changes = 0;
    const char *path = full_register(a, &bytes, &n), *first;
    ck_assert_uint_eq(findings(path, &first), 0);
    for (size_t t = 0; t < sizeof all / sizeof all[0]; t++) {
        struct columns columns = columns_of(a, path, all[t].table);
        ck_assert_uint_ge(columns.n, 2);
        int rows = strcmp(all[t].table, "withdrawal") == 0 ? 1 : 2;
        for (size_t c = 0; c < columns.n; c++)
            for (int row = 0; row < rows; row++, changes++) {
                put_back(a, path, bytes, n);
                test_tamper(path, change_sql(a, all[t].table, columns.at[c], row));
                if (findings(path, &first) == 0)
                    ck_abort_msg("%s.%s changed and not found", all[t].table, columns.at[c]);
                if (!strstr(first, all[t].words) && !strstr(first, "file") &&
                    !strstr(first, "refers"))
                    ck_abort_msg("%s.%s: \"%s\"", all[t].table, columns.at[c], first);
            }
    }
    ck_assert_uint_eq(changes, 2 * (2 + 13 + 4 + 4 + 9 + 6 + 8 + 6) + 3);
    arena_free(a);
}
END_TEST

/* --- rows that come, go, or hide --- */

START_TEST(rows_that_come_and_go_are_found)
{
    static const struct {
        const char *sql, *words;
    } all[] = {
        {"DELETE FROM body WHERE kind = 'site'", "is missing"},
        {"DELETE FROM version WHERE id = 'S-1'", "digest"},
        {"DELETE FROM observation WHERE number = 1", "digest"},
        {"DELETE FROM entry WHERE seq = 1", "entry 2 stands where entry 1 should"},
        {"DELETE FROM withdrawal", "digest"},
        {"DELETE FROM record WHERE id = 'R-2'", "digest"},
        {"DELETE FROM signature WHERE number = 1", "signature 2 stands where 1 should"},
        {"DELETE FROM seal WHERE number = 1", "seal 2 stands where 1 should"},
        {"INSERT INTO body VALUES('00', 'site', 1, '{}')", "belongs to no version"},
        {"INSERT INTO version VALUES(9, 'site', 'S-9', NULL)", "belongs to entry 9"},
        {"INSERT INTO observation SELECT 9, 9, 'x', day, what, subject, result, count, note "
         "FROM observation LIMIT 1",
         "belongs to entry 9"},
        {"UPDATE body SET json = json || char(0) || 'x' WHERE kind = 'site'", "zero byte"},
        {"UPDATE version SET kind = 'sight' WHERE id = 'S-1'",
         "a kind \"sight\" that there is not"},
    };
    struct arena *a = test_arena();
    char *bytes;
    size_t n;
    const char *path = full_register(a, &bytes, &n);
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) {
        put_back(a, path, bytes, n);
        test_tamper(path, arena_printf(a, "PRAGMA foreign_keys = OFF; %s", all[i].sql));
        struct arena *reading = arena_child(a);
        if (!test_finds(test_open(reading, path, STORE_READ), all[i].words))
            ck_abort_msg("%s is not found", all[i].sql);
        arena_free(reading);
    }
    arena_free(a);
}
END_TEST

START_TEST(tampered_derived_rows_are_named)
{
    static const struct {
        const char *sql, *words;
    } all[] = {
        {"UPDATE site SET name = 'Station 8'", "derived table site, S-1, field name: it holds "
                                               "\"Station 8\", the bodies make \"Station 7\""},
        {"UPDATE damage SET \"is\" = '1 kEUR'",
         "derived table damage, H-1, outcomes/burnt/damage/rebuild, field is"},
        {"DELETE FROM outcome WHERE key = 'slow'",
         "outcome: the row H-1, outcomes/slow is missing"},
        {"INSERT INTO object VALUES('site', 'S-8', 1, '00')", "the row site, S-8 does not follow"},
        {"UPDATE snapshot SET seq = 2 WHERE id = 'E-1'", "snapshot, 1, element, E-1, field seq"},
        {"UPDATE reference SET trace = 0 WHERE \"to\" = 'S-1'", "S-1, field trace"},
        {"UPDATE site SET customers = NULL", "field customers: it holds \"\""},
        {"DROP TABLE damage", "not laid out"},
    };
    struct arena *a = test_arena();
    char *bytes;
    size_t n;
    const char *path = full_register(a, &bytes, &n);
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) {
        put_back(a, path, bytes, n);
        test_tamper(path, all[i].sql);
        struct arena *open = arena_child(a);
        ohmen_error e = OHMEN_ERROR_INIT;
        struct store *s = test_open(open, path, STORE_WRITE);
        if (!test_finds(s, all[i].words))
            ck_abort_msg("%s is not found", all[i].sql);
        MUST(store_rebuild(s, &e), &e);
        test_is_sound(s);
        arena_free(open);
    }
    arena_free(a);
}
END_TEST

/* A read that meets a tampered body tells so, without any audit. */
START_TEST(reading_proves_bodies)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    test_tamper(path, "UPDATE body SET json = replace(json, '107', '108') WHERE kind = 'site'");
    struct store_objects objects = {0};
    struct store_versions versions = {0};
    ck_assert_int_eq(store_state(s, UINT64_MAX, &objects, &e), OHMEN_REGISTER);
    ck_assert_ptr_nonnull(strstr(e.text, "the body of site S-1 is not the one"));
    e = (ohmen_error)OHMEN_ERROR_INIT;
    ck_assert_int_eq(store_versions(s, "S-1", &versions, &e), OHMEN_REGISTER);
    arena_free(a);
}
END_TEST

/* --- bytes of the file --- */

/* Everything that the register tells, or NULL when something was reported. */
static const char *told(struct arena *a, const char *path)
{
    struct store *s;
    struct store_findings found = {0};
    const char *dump;
    if (store_open(a, path, STORE_READ, &s, NULL) != OHMEN_OK ||
        sample_dump(a, s, UINT64_MAX, &dump, NULL) != OHMEN_OK ||
        store_verify(s, &found, NULL) != OHMEN_OK || found.n > 0)
        return NULL;
    return dump;
}

/* Every STRIDE-th byte, and another bit each time: a prime, so that all places in a
 * page are met. */
enum { STRIDE = 151 };

START_TEST(flipped_bytes_are_told_or_do_not_matter)
{
    struct arena *a = test_arena();
    char *bytes;
    size_t n, reported = 0, flips = 0;
    const char *path = full_register(a, &bytes, &n), *whole = told(a, path);
    ck_assert_ptr_nonnull(whole);
    int fd = open(path, O_RDWR);
    for (size_t at = 0; at < n; at += STRIDE, flips++) {
        struct arena *reading = test_arena();
        char flipped = (char)(bytes[at] ^ (1 << (flips % 8)));
        ck_assert_int_eq(pwrite(fd, &flipped, 1, (off_t)at), 1);
        const char *after = told(reading, path);
        if (!after)
            reported++;
        else if (strcmp(after, whole) != 0)
            ck_abort_msg("byte %zu changed what is told, and nothing was reported", at);
        ck_assert_int_eq(pwrite(fd, &bytes[at], 1, (off_t)at), 1);
        arena_free(reading);
    }
    close(fd);
    ck_assert_uint_ge(reported, 20);
    ck_assert_str_eq(told(a, path), whole);
    arena_free(a);
}
END_TEST

void store_audit_tests(Suite *suite)
{
    TCase *tc = tcase_create("audit");
    tcase_set_timeout(tc, 600);
    tcase_add_test(tc, every_column_is_under_a_hash);
    tcase_add_test(tc, rows_that_come_and_go_are_found);
    tcase_add_test(tc, tampered_derived_rows_are_named);
    tcase_add_test(tc, reading_proves_bodies);
    tcase_add_test(tc, flipped_bytes_are_told_or_do_not_matter);
    suite_add_tcase(suite, tc);
}
