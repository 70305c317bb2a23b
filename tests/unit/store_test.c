/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Unit tests of the store: what they share, and the run. */
#include "store_test.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/file.h"
#include "store/projection.h"

struct arena *test_arena(void)
{
    struct arena *a = arena_new(NULL);
    ck_assert_ptr_nonnull(a);
    return a;
}

void must(ohmen_status status, const ohmen_error *e)
{
    if (status != OHMEN_OK)
        ck_abort_msg("%s: %s", ohmen_status_text(status), e->text);
}

const char *test_path(struct arena *a, const char *name)
{
    return arena_printf(a, "%s/%s", sample_folder(a), name);
}

struct store *test_open(struct arena *a, const char *path, enum store_mode mode)
{
    struct store *s;
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_open(a, path, mode, &s, &e), &e);
    return s;
}

uint64_t test_commit(struct store *s, struct sample *sample)
{
    uint64_t seq = 0;
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_commit(s, sample_transaction(sample), &seq, &e), &e);
    return seq;
}

struct store *test_register(struct arena *a, const char **path)
{
    struct sample sample;
    ohmen_error e = OHMEN_ERROR_INIT;
    *path = test_path(a, "quay.ohmen");
    MUST(store_create(*path, &e), &e);
    struct store *s = test_open(a, *path, STORE_WRITE);
    sample_begin(&sample, a, 0);
    sample_fill(&sample);
    ck_assert_uint_eq(test_commit(s, &sample), 1);
    return s;
}

void test_is_sound(struct store *s)
{
    struct store_findings findings = {0};
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_verify(s, &findings, &e), &e);
    if (findings.n > 0)
        ck_abort_msg("%zu findings, first: %s", findings.n, findings.at[0]);
}

bool test_finds(struct store *s, const char *words)
{
    struct store_findings findings = {0};
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_verify(s, &findings, &e), &e);
    for (size_t i = 0; i < findings.n; i++)
        if (strstr(findings.at[i], words))
            return true;
    for (size_t i = 0; i < findings.n; i++)
        fprintf(stderr, "found: %s\n", findings.at[i]);
    return false;
}

static char *triggers_of(sqlite3 *db, struct arena *a, bool drop)
{
    struct text t;
    sqlite3_stmt *q;
    text_init(&t, a);
    ck_assert_int_eq(
        sqlite3_prepare_v2(db, "SELECT name, sql FROM sqlite_schema WHERE type = 'trigger'", -1, &q,
                           NULL),
        SQLITE_OK);
    while (sqlite3_step(q) == SQLITE_ROW)
        text_printf(&t, drop ? "DROP TRIGGER %s;" : "%.0s%s;", sqlite3_column_text(q, 0),
                    sqlite3_column_text(q, 1));
    sqlite3_finalize(q);
    return arena_str(a, text_str(&t));
}

void test_tamper(const char *path, const char *sql)
{
    sqlite3 *db;
    struct arena *a = arena_new(NULL);
    ck_assert_int_eq(sqlite3_open_v2(path, &db, SQLITE_OPEN_READWRITE, NULL), SQLITE_OK);
    char *back = triggers_of(db, a, false), *drop = triggers_of(db, a, true);
    const char *const steps[] = {"PRAGMA ignore_check_constraints = ON", drop, sql, back};
    for (size_t i = 0; i < 4; i++)
        if (sqlite3_exec(db, steps[i], NULL, NULL, NULL) != SQLITE_OK)
            ck_abort_msg("%s: %s", steps[i], sqlite3_errmsg(db));
    sqlite3_close(db);
    arena_free(a);
}

const char *test_source;

/* Writes schema/derived.sql as the program makes the tables now. */
static int accept_derived(void)
{
    struct arena *a = arena_new(NULL);
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *text = projection_text(a);
    const char *name = arena_printf(a, "%s/schema/derived.sql", test_source);
    ohmen_status status = file_write(name, text, strlen(text), &e);
    if (status != OHMEN_OK)
        fprintf(stderr, "%s\n", e.text);
    arena_free(a);
    return status == OHMEN_OK ? EXIT_SUCCESS : EXIT_FAILURE;
}

int main(int argc, char **argv)
{
    if (argc < 2) {
        fputs("usage: store_test SOURCE-FOLDER [accept]\n", stderr);
        return EXIT_FAILURE;
    }
    test_source = argv[1];
    if (argc == 3 && strcmp(argv[2], "accept") == 0)
        return accept_derived();
    Suite *suite = suite_create("store");
    store_write_tests(suite);
    store_read_tests(suite);
    store_open_tests(suite);
    store_hash_tests(suite);
    store_derived_tests(suite);
    store_audit_tests(suite);
    store_share_tests(suite);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || !run ? EXIT_FAILURE : EXIT_SUCCESS;
}
