/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A register in the hands of several: two writers, a backup while it is written. */
#include <string.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "store_test.h"

enum { COMMITS = 25 };

/* Commits sites of its own, one an entry; 0 when all went well. Runs in a child. */
static int write_many(const char *path, const char *prefix)
{
    struct arena *a = arena_new(NULL);
    struct store *s;
    int failures = store_open(a, path, STORE_WRITE, &s, NULL) == OHMEN_OK ? 0 : 1;
    for (unsigned i = 0; i < COMMITS && !failures; i++) {
        struct sample t;
        uint64_t seq = 0;
        sample_begin(&t, a, 1);
        sample_change(&t, KIND_SITE, arena_printf(a, "%s-%u", prefix, i), i);
        if (store_commit(s, sample_transaction(&t), &seq, NULL) != OHMEN_OK || seq < 2)
            failures++;
    }
    arena_free(a);
    return failures;
}

static pid_t start_writer(const char *path, const char *prefix)
{
    pid_t child = fork();
    ck_assert_int_ge(child, 0);
    if (child == 0)
        _exit(write_many(path, prefix));
    return child;
}

static void wait_for(pid_t child)
{
    int status;
    ck_assert_int_eq(waitpid(child, &status, 0), child);
    ck_assert(WIFEXITED(status));
    ck_assert_int_eq(WEXITSTATUS(status), 0);
}

/* A register with entry 1, closed. */
static const char *closed_register(struct arena *a)
{
    struct arena *writing = arena_child(a);
    const char *path, *kept = test_path(a, "shared.ohmen");
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_backup(test_register(writing, &path), kept, &e), &e);
    arena_free(writing);
    return kept;
}

START_TEST(two_writers_take_turns)
{
    struct arena *a = test_arena();
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *path = closed_register(a);
    pid_t one = start_writer(path, "N"), two = start_writer(path, "W");
    wait_for(one);
    wait_for(two);
    struct store *s = test_open(a, path, STORE_READ);
    struct store_objects objects = {0};
    uint64_t head;
    MUST(store_head(s, &head, &e), &e);
    ck_assert_uint_eq(head, 1 + 2 * COMMITS);
    MUST(store_state(s, head, &objects, &e), &e);
    ck_assert_uint_eq(objects.n, 9 + 2 * COMMITS);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

/* Both prepared the same change on entry 1; one of them is told. */
START_TEST(one_of_two_wins)
{
    struct arena *a = test_arena();
    const char *path = closed_register(a);
    struct store *s[2] = {test_open(a, path, STORE_WRITE), test_open(a, path, STORE_WRITE)};
    ohmen_status status[2];
    for (unsigned i = 0; i < 2; i++) {
        struct sample t;
        uint64_t seq;
        sample_begin(&t, a, 1);
        sample_change(&t, KIND_SITE, "S-1", 50 + i);
        status[i] = store_commit(s[i], sample_transaction(&t), &seq, NULL);
    }
    ck_assert_int_eq(status[0], OHMEN_OK);
    ck_assert_int_eq(status[1], OHMEN_CONFLICT);
    test_is_sound(s[1]);
    arena_free(a);
}
END_TEST

START_TEST(a_held_lock_is_told)
{
    struct arena *a = test_arena();
    const char *path;
    struct store *s = test_register(a, &path);
    struct sample t;
    uint64_t seq = 0;
    ohmen_error e = OHMEN_ERROR_INIT;
    sqlite3 *db;
    ck_assert_int_eq(sqlite3_open(path, &db), SQLITE_OK);
    ck_assert_int_eq(sqlite3_exec(db, "BEGIN IMMEDIATE", NULL, NULL, NULL), SQLITE_OK);
    sqlite3_busy_timeout(s->base.db, 20);
    sample_begin(&t, a, 1);
    sample_change(&t, KIND_SITE, "S-1", 50);
    ck_assert_int_eq(store_commit(s, sample_transaction(&t), &seq, &e), OHMEN_CONFLICT);
    ck_assert_ptr_nonnull(strstr(e.text, "another program is writing"));
    test_is_sound(s); /* readers are not held up */
    sqlite3_close(db);
    e = (ohmen_error)OHMEN_ERROR_INIT;
    MUST(store_commit(s, sample_transaction(&t), &seq, &e), &e);
    ck_assert_uint_eq(seq, 2);
    arena_free(a);
}
END_TEST

/* Each copy is the register as of its newest entry. */
START_TEST(backups_are_whole_while_it_is_written)
{
    struct arena *a = test_arena();
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *path = closed_register(a);
    struct store *s = test_open(a, path, STORE_READ);
    pid_t writer = start_writer(path, "N");
    struct store *copies[6];
    for (unsigned i = 0; i < 6; i++) {
        const char *copy = arena_printf(a, "%s.copy-%u", path, i);
        MUST(store_backup(s, copy, &e), &e);
        copies[i] = test_open(a, copy, STORE_READ);
        test_is_sound(copies[i]);
    }
    wait_for(writer);
    for (unsigned i = 0; i < 6; i++) {
        uint64_t head;
        char of_copy[STORE_HASH_TEXT], of_register[STORE_HASH_TEXT];
        MUST(store_head(copies[i], &head, &e), &e);
        ck_assert_uint_ge(head, 1);
        MUST(store_content_hash(copies[i], UINT64_MAX, of_copy, &e), &e);
        MUST(store_content_hash(s, head, of_register, &e), &e);
        ck_assert_str_eq(of_copy, of_register);
    }
    arena_free(a);
}
END_TEST

START_TEST(a_backup_replaces_nothing)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    ck_assert_int_eq(store_backup(s, path, &e), OHMEN_IO);
    ck_assert_ptr_nonnull(strstr(e.text, "exists"));
    test_is_sound(s);
    arena_free(a);
}
END_TEST

START_TEST(a_backup_of_damage_gets_no_name)
{
    struct arena *a = test_arena();
    const char *path;
    struct stat st;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    test_tamper(path, "UPDATE observation SET count = 3");
    const char *copy = arena_printf(a, "%s.copy", path);
    ck_assert_int_eq(store_backup(s, copy, &e), OHMEN_REGISTER);
    ck_assert_ptr_nonnull(strstr(e.text, "is not sound"));
    ck_assert_int_ne(stat(copy, &st), 0);
    arena_free(a);
}
END_TEST

void store_share_tests(Suite *suite)
{
    TCase *tc = tcase_create("share");
    tcase_set_timeout(tc, 120);
    tcase_add_test(tc, two_writers_take_turns);
    tcase_add_test(tc, one_of_two_wins);
    tcase_add_test(tc, a_held_lock_is_told);
    tcase_add_test(tc, backups_are_whole_while_it_is_written);
    tcase_add_test(tc, a_backup_replaces_nothing);
    tcase_add_test(tc, a_backup_of_damage_gets_no_name);
    suite_add_tcase(suite, tc);
}
