/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Opening: what is refused, with which sentence; places that cannot be written. */
#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/file.h"
#include "store_test.h"

static void refused(struct arena *a, const char *path, enum store_mode mode, ohmen_status status,
                    const char *words)
{
    struct store *s = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(store_open(a, path, mode, &s, &e), status);
    ck_assert_ptr_null(s);
    if (!strstr(e.text, words) || !strstr(e.text, path))
        ck_abort_msg("\"%s\" does not tell of \"%s\"", e.text, words);
}

static const char *made_of(struct arena *a, const char *bytes, size_t n)
{
    const char *path = test_path(a, "some.ohmen");
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(file_write(path, bytes, n, &e), &e);
    return path;
}

START_TEST(what_is_no_register_is_refused)
{
    struct arena *a = test_arena();
    const char *folder = sample_folder(a);
    refused(a, arena_printf(a, "%s/none.ohmen", folder), STORE_READ, OHMEN_UNKNOWN, "no register");
    refused(a, folder, STORE_READ, OHMEN_REGISTER, "is a folder");
    refused(a, made_of(a, "", 0), STORE_READ, OHMEN_REGISTER, "is empty");
    static const char yaml[] = "register: {title: A text that is long enough to be looked at}\n"
                               "sites: {S-1: {name: Station one}, S-2: {name: Station two}}\n";
    refused(a, made_of(a, yaml, sizeof yaml - 1), STORE_READ, OHMEN_REGISTER, "not an SQLite");
    refused(a, made_of(a, yaml, sizeof yaml - 1), STORE_WRITE, OHMEN_REGISTER, "not an SQLite");
    arena_free(a);
}
END_TEST

/* Each tampering with its sentence. */
START_TEST(damage_and_other_versions_are_told)
{
    static const struct {
        const char *sql, *words;
    } all[] = {
        {"PRAGMA application_id = 7", "of another program"},
        {"PRAGMA user_version = 2", "newer ohmen: its format is 2"},
        {"PRAGMA user_version = 0", "no format 0"},
        {"DROP TABLE seal; CREATE TABLE seal(number INTEGER PRIMARY KEY) STRICT", "table seal"},
        {"DROP INDEX version_of_body", "index version_of_body"},
        {"ALTER TABLE body ADD COLUMN more TEXT", "table body"},
        {"CREATE TRIGGER quiet AFTER INSERT ON entry BEGIN DELETE FROM meta; END",
         "a trigger quiet"},
        {"CREATE VIEW look AS SELECT * FROM body", "a view look"},
        {"UPDATE meta SET value = 'SHA-1' WHERE key = 'hash'", "table meta"},
        {"INSERT INTO meta VALUES('more', '1')", "table meta"},
    };
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) {
        struct arena *a = test_arena();
        const char *path = test_path(a, "quay.ohmen");
        ohmen_error e = OHMEN_ERROR_INIT;
        MUST(store_create(path, &e), &e);
        test_tamper(path, all[i].sql);
        refused(a, path, STORE_READ, OHMEN_REGISTER, all[i].words);
        refused(a, path, STORE_WRITE, OHMEN_REGISTER, all[i].words);
        arena_free(a);
    }
}
END_TEST

START_TEST(a_missing_trigger_is_damage)
{
    struct arena *a = test_arena();
    const char *path = test_path(a, "quay.ohmen");
    ohmen_error e = OHMEN_ERROR_INIT;
    sqlite3 *db;
    MUST(store_create(path, &e), &e);
    ck_assert_int_eq(sqlite3_open(path, &db), SQLITE_OK);
    ck_assert_int_eq(sqlite3_exec(db, "DROP TRIGGER body_no_update", NULL, NULL, NULL), SQLITE_OK);
    sqlite3_close(db);
    refused(a, path, STORE_READ, OHMEN_REGISTER, "trigger body_no_update");
    arena_free(a);
}
END_TEST

/* Every table, index and trigger of schema/register.sql, one after the other. */
START_TEST(each_enduring_object_is_missed)
{
    struct arena *a = test_arena();
    char *sql;
    size_t n, objects = 0;
    sqlite3 *db;
    sqlite3_stmt *q;
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(
        file_read(a, arena_printf(a, "%s/schema/register.sql", test_source), 1 << 20, &sql, &n, &e),
        &e);
    ck_assert_int_eq(sqlite3_open(":memory:", &db), SQLITE_OK);
    ck_assert_int_eq(sqlite3_exec(db, sql, NULL, NULL, NULL), SQLITE_OK);
    ck_assert_int_eq(
        sqlite3_prepare_v2(db, "SELECT type, name FROM sqlite_schema WHERE sql IS NOT NULL", -1, &q,
                           NULL),
        SQLITE_OK);
    for (; sqlite3_step(q) == SQLITE_ROW; objects++) {
        sqlite3 *file;
        const char *type = (const char *)sqlite3_column_text(q, 0);
        const char *name = (const char *)sqlite3_column_text(q, 1);
        const char *path = test_path(a, "quay.ohmen");
        MUST(store_create(path, &e), &e);
        ck_assert_int_eq(sqlite3_open(path, &file), SQLITE_OK);
        const char *drop = arena_printf(a, "DROP %s %s", type, name);
        ck_assert_int_eq(sqlite3_exec(file, drop, NULL, NULL, NULL), SQLITE_OK);
        sqlite3_close(file);
        refused(a, path, STORE_READ, OHMEN_REGISTER, name);
    }
    ck_assert_uint_eq(objects, 9 + 5 + 18);
    sqlite3_finalize(q);
    sqlite3_close(db);
    arena_free(a);
}
END_TEST

START_TEST(a_name_that_is_taken_is_refused)
{
    struct arena *a = test_arena();
    const char *path = test_path(a, "quay.ohmen");
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_create(path, &e), &e);
    ck_assert_int_eq(store_create(path, &e), OHMEN_IO);
    ck_assert_ptr_nonnull(strstr(e.text, "exists"));
    ohmen_error no_folder = OHMEN_ERROR_INIT;
    ck_assert_int_eq(store_create(test_path(a, "none/quay.ohmen"), &no_folder), OHMEN_IO);
    arena_free(a);
}
END_TEST

START_TEST(names_with_signs_are_names)
{
    struct arena *a = test_arena();
    const char *folder = sample_folder(a);
    static const char *const names[] = {"a?mode=memory", "b#c", "d%41", "e f", "caf\xc3\xa9"};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++) {
        ohmen_error e = OHMEN_ERROR_INIT;
        struct stat st;
        const char *path = arena_printf(a, "%s/%s", folder, names[i]);
        MUST(store_create(path, &e), &e);
        ck_assert_int_eq(stat(path, &st), 0);
        test_open(a, path, STORE_READ);
    }
    arena_free(a);
}
END_TEST

/* The tables are append-only for everybody who opens the file. */
START_TEST(enduring_tables_do_not_change)
{
    static const char *const tables[] = {"meta",    "entry",       "body",
                                         "version", "observation", "withdrawal",
                                         "record",  "signature",   "seal"};
    struct arena *a = test_arena();
    const char *path;
    test_register(a, &path);
    test_tamper(path, "INSERT INTO withdrawal VALUES(1, 1, NULL);"
                      "INSERT INTO record VALUES('R-1', 1, '{}', '{}', 'text', NULL);"
                      "INSERT INTO signature VALUES(1, 'a', 'b', 'c', 'd', 5, 'e', 'f');"
                      "INSERT INTO seal VALUES(1, 1, 'a', 'b', 'c', 'd')");
    sqlite3 *db;
    ck_assert_int_eq(sqlite3_open(path, &db), SQLITE_OK);
    for (size_t i = 0; i < sizeof tables / sizeof tables[0]; i++) {
        const char *sql = arena_printf(a, "DELETE FROM %s", tables[i]);
        ck_assert_int_ne(sqlite3_exec(db, sql, NULL, NULL, NULL), SQLITE_OK);
        ck_assert_ptr_nonnull(strstr(sqlite3_errmsg(db), "append-only"));
        sql = arena_printf(a, "UPDATE %s SET rowid = rowid", tables[i]);
        if (i != 0 && i != 3) /* these two have no rowid */
            ck_assert_int_ne(sqlite3_exec(db, sql, NULL, NULL, NULL), SQLITE_OK);
    }
    ck_assert_int_ne(sqlite3_exec(db, "UPDATE version SET body = NULL", NULL, NULL, NULL),
                     SQLITE_OK);
    ck_assert_int_ne(sqlite3_exec(db, "UPDATE meta SET value = ''", NULL, NULL, NULL), SQLITE_OK);
    sqlite3_close(db);
    arena_free(a);
}
END_TEST

/* Runs in a child of this process without the rights of root, which no mode stops. */
static int without_rights(int (*job)(struct arena *, const char *), const char *path)
{
    pid_t child = fork();
    ck_assert_int_ge(child, 0);
    if (child == 0) {
        if (getuid() == 0 && setuid(65534) != 0)
            _exit(99);
        struct arena *a = arena_new(NULL);
        int result = job(a, path);
        arena_free(a);
        _exit(result);
    }
    int status;
    ck_assert_int_eq(waitpid(child, &status, 0), child);
    ck_assert(WIFEXITED(status));
    return WEXITSTATUS(status);
}

static int read_it(struct arena *a, const char *path)
{
    struct store *s;
    struct store_objects objects = {0};
    struct store_findings findings = {0};
    ohmen_error e = OHMEN_ERROR_INIT;
    if (store_open(a, path, STORE_READ, &s, &e) != OHMEN_OK ||
        store_state(s, UINT64_MAX, &objects, &e) != OHMEN_OK ||
        store_verify(s, &findings, &e) != OHMEN_OK) {
        fprintf(stderr, "%s\n", e.text);
        return 1;
    }
    return objects.n == 9 && findings.n == 0 ? 0 : 2;
}

static int fail_to_write_it(struct arena *a, const char *path)
{
    struct store *s;
    ohmen_error e = OHMEN_ERROR_INIT;
    if (store_open(a, path, STORE_WRITE, &s, &e) != OHMEN_IO)
        return 1;
    return strstr(e.text, "cannot be written") ? 0 : 2;
}

static int fail_to_read_it(struct arena *a, const char *path)
{
    struct store *s;
    ohmen_error e = OHMEN_ERROR_INIT;
    if (store_open(a, path, STORE_READ, &s, &e) != OHMEN_IO)
        return 1;
    return strstr(e.text, "not closed properly") ? 0 : 2;
}

static const char *folder_part(struct arena *a, const char *path)
{
    return arena_strn(a, path, (size_t)(strrchr(path, '/') - path));
}

START_TEST(a_read_only_folder_can_be_read)
{
    struct arena *a = test_arena(), *writing = arena_child(a);
    const char *path;
    test_register(writing, &path);
    path = arena_str(a, path);
    const char *folder = folder_part(a, path);
    char *copy = arena_printf(a, "%s/copy.ohmen", folder);
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_open(writing, path, STORE_READ);
    MUST(store_backup(s, copy, &e), &e);
    ck_assert_int_eq(chmod(copy, 0444), 0);
    ck_assert_int_eq(chmod(folder, 0555), 0);
    ck_assert_int_eq(without_rights(read_it, copy), 0);
    ck_assert_int_eq(without_rights(fail_to_write_it, copy), 0);
    ck_assert_int_eq(chmod(folder, 0755), 0);
    arena_free(a);
}
END_TEST

/* A register that a crash left with pages outside of it, in a folder of somebody else's. */
START_TEST(an_unfinished_register_is_not_read_by_halves)
{
    struct arena *a = test_arena();
    const char *path;
    test_register(a, &path); /* stays open: its pages are still outside */
    const char *folder = folder_part(a, path), *left = test_path(a, "left.ohmen");
    const char *ends[] = {"", "-wal"};
    for (size_t i = 0; i < 2; i++) {
        char *bytes;
        size_t n;
        ohmen_error e = OHMEN_ERROR_INIT;
        const char *to = arena_printf(a, "%s%s", left, ends[i]);
        MUST(file_read(a, arena_printf(a, "%s%s", path, ends[i]), 1 << 24, &bytes, &n, &e), &e);
        MUST(file_write(to, bytes, n, &e), &e);
        ck_assert_int_eq(chmod(to, 0444), 0);
    }
    ck_assert_ptr_nonnull(folder);
    ck_assert_int_eq(chmod(folder_part(a, left), 0555), 0);
    ck_assert_int_eq(without_rights(fail_to_read_it, left), 0);
    ck_assert_int_eq(chmod(folder_part(a, left), 0755), 0);
    arena_free(a);
}
END_TEST

/* A link to a register: the pages outside stand beside the file, not beside the link. */
START_TEST(links_are_followed)
{
    struct arena *a = test_arena();
    const char *path, *name = test_path(a, "link.ohmen");
    ohmen_error e = OHMEN_ERROR_INIT;
    test_register(a, &path);
    ck_assert_int_eq(symlink(path, name), 0);
    struct store *s = test_open(a, name, STORE_WRITE);
    struct sample t;
    uint64_t head;
    sample_begin(&t, a, 1);
    sample_change(&t, KIND_SITE, "S-1", 8);
    ck_assert_uint_eq(test_commit(s, &t), 2);
    MUST(store_head(test_open(a, path, STORE_READ), &head, &e), &e);
    ck_assert_uint_eq(head, 2);
    char real[4096];
    ck_assert_ptr_nonnull(realpath(path, real));
    ck_assert_str_eq(s->path, real);
    arena_free(a);
}
END_TEST

/* Where a file system has no links: the same promise by another way. */
START_TEST(a_rename_replaces_nothing)
{
    struct arena *a = test_arena();
    const char *part = test_path(a, "part"), *path = arena_printf(a, "%s-whole", part);
    char *bytes;
    size_t n;
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(file_write(part, "new", 3, &e), &e);
    ck_assert_int_eq(place_rename(part, path), 0);
    MUST(file_read(a, path, 10, &bytes, &n, &e), &e);
    ck_assert_str_eq(bytes, "new");
    MUST(file_write(part, "newer", 5, &e), &e);
    ck_assert_int_eq(place_rename(part, path), EEXIST);
    MUST(file_read(a, path, 10, &bytes, &n, &e), &e);
    ck_assert_str_eq(bytes, "new");
    arena_free(a);
}
END_TEST

START_TEST(reading_leaves_the_file_as_it_is)
{
    struct arena *a = test_arena(), *writing = arena_child(a);
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    test_register(writing, &path);
    char *copy = arena_printf(a, "%s-2", path);
    MUST(store_backup(test_open(writing, path, STORE_READ), copy, &e), &e);
    char *before, *after;
    size_t n_before, n_after;
    MUST(file_read(a, copy, 1 << 24, &before, &n_before, &e), &e);
    struct arena *reading = arena_child(a);
    test_is_sound(test_open(reading, copy, STORE_READ));
    arena_free(reading);
    MUST(file_read(a, copy, 1 << 24, &after, &n_after, &e), &e);
    ck_assert_uint_eq(n_before, n_after);
    ck_assert_mem_eq(before, after, n_before);
    struct stat st;
    ck_assert_int_ne(stat(arena_printf(a, "%s-wal", copy), &st), 0);
    ck_assert_int_ne(stat(arena_printf(a, "%s-shm", copy), &st), 0);
    arena_free(a);
}
END_TEST

START_TEST(shared_file_systems_are_known)
{
    static const char *const shared[] = {"nfs", "nfs4", "cifs", "smb3", "fuse.sshfs", "9p"};
    static const char *const local[] = {"ext4",    "xfs",     "btrfs", "tmpfs",
                                        "overlay", "fuseblk", "zfs",   "vfat"};
    for (size_t i = 0; i < sizeof shared / sizeof shared[0]; i++)
        ck_assert(place_is_network(shared[i]));
    for (size_t i = 0; i < sizeof local / sizeof local[0]; i++)
        ck_assert(!place_is_network(local[i]));
}
END_TEST

void store_open_tests(Suite *suite)
{
    TCase *tc = tcase_create("open");
    tcase_set_timeout(tc, 60);
    tcase_add_test(tc, what_is_no_register_is_refused);
    tcase_add_test(tc, damage_and_other_versions_are_told);
    tcase_add_test(tc, a_missing_trigger_is_damage);
    tcase_add_test(tc, each_enduring_object_is_missed);
    tcase_add_test(tc, a_name_that_is_taken_is_refused);
    tcase_add_test(tc, names_with_signs_are_names);
    tcase_add_test(tc, enduring_tables_do_not_change);
    tcase_add_test(tc, a_read_only_folder_can_be_read);
    tcase_add_test(tc, an_unfinished_register_is_not_read_by_halves);
    tcase_add_test(tc, links_are_followed);
    tcase_add_test(tc, a_rename_replaces_nothing);
    tcase_add_test(tc, reading_leaves_the_file_as_it_is);
    tcase_add_test(tc, shared_file_systems_are_known);
    suite_add_tcase(suite, tc);
}
