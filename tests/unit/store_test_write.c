/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Commits: what is written, what is left out, what is refused. */
#include <string.h>

#include "store_test.h"

START_TEST(an_empty_register_has_no_entry)
{
    struct arena *a = test_arena();
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *path = test_path(a, "empty.ohmen");
    MUST(store_create(path, &e), &e);
    struct store *s = test_open(a, path, STORE_WRITE);
    uint64_t seq = 9;
    struct store_objects objects = {0};
    MUST(store_head(s, &seq, &e), &e);
    ck_assert_uint_eq(seq, 0);
    MUST(store_state(s, UINT64_MAX, &objects, &e), &e);
    ck_assert_uint_eq(objects.n, 0);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

START_TEST(one_entry_holds_what_was_given)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct store_objects objects = {0};
    struct store_entries entries = {0};
    MUST(store_state(s, UINT64_MAX, &objects, &e), &e);
    ck_assert_uint_eq(objects.n, 9);
    for (size_t i = 0; i < objects.n; i++) {
        ck_assert_uint_eq(objects.at[i].seq, 1);
        ck_assert(i == 0 || objects.at[i - 1].kind < objects.at[i].kind ||
                  strcmp(objects.at[i - 1].id, objects.at[i].id) < 0);
    }
    ck_assert_str_eq(objects.at[1].id, "S-1");
    ck_assert_str_eq(objects.at[1].json, sample_body(a, KIND_SITE, 7));
    ck_assert_uint_eq(objects.at[1].n, strlen(objects.at[1].json));
    MUST(store_entries(s, 0, UINT64_MAX, &entries, &e), &e);
    ck_assert_uint_eq(entries.n, 1);
    ck_assert_str_eq(entries.at[0].author, "J. Doe");
    ck_assert_str_eq(entries.at[0].reason, "survey \"north\"\nand south");
    ck_assert_uint_eq(entries.at[0].n_changes, 9);
    ck_assert_uint_eq(entries.at[0].n_observations, 2);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

START_TEST(what_is_known_is_left_out)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct sample again;
    sample_begin(&again, a, 1);
    sample_fill(&again);
    sample_remove(&again, KIND_SITE, "S-9");
    ck_assert_uint_eq(test_commit(s, &again), 0);
    uint64_t head;
    MUST(store_head(s, &head, &e), &e);
    ck_assert_uint_eq(head, 1);
    sample_change(&again, KIND_SITE, "S-2", 8);
    sample_observe(&again, "log-19", 20001, "V-1");
    sample_observe(&again, "log-19", 20002, "V-1");
    ck_assert_uint_eq(test_commit(s, &again), 2);
    struct store_entries entries = {0};
    MUST(store_entries(s, 2, 2, &entries, &e), &e);
    ck_assert_uint_eq(entries.at[0].n_changes, 1);
    ck_assert_uint_eq(entries.at[0].n_observations, 1);
    struct store_observations all = {0};
    MUST(store_state_observations(s, UINT64_MAX, &all, &e), &e);
    ck_assert_uint_eq(all.n, 3);
    ck_assert_str_eq(all.at[0].ident, "log-18");
    ck_assert_int_eq(all.at[2].day, 20001);
    ck_assert_uint_eq(all.at[2].number, 3);
    ck_assert_uint_eq(all.at[2].entry, 2);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

static ohmen_status try_commit(struct store *s, struct sample *sample, ohmen_error *e)
{
    uint64_t seq = 77;
    *e = (ohmen_error)OHMEN_ERROR_INIT;
    ohmen_status status = store_commit(s, sample_transaction(sample), &seq, e);
    if (status != OHMEN_OK)
        ck_assert_uint_eq(seq, 77);
    return status;
}

START_TEST(stale_writes_are_refused)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e;
    struct store *s = test_register(a, &path);
    struct sample other, mine;
    sample_begin(&other, a, 1);
    sample_change(&other, KIND_SITE, "S-1", 8);
    ck_assert_uint_eq(test_commit(s, &other), 2);

    sample_begin(&mine, a, 1);
    sample_change(&mine, KIND_SITE, "S-1", 9);
    ck_assert_int_eq(try_commit(s, &mine, &e), OHMEN_CONFLICT);
    ck_assert_ptr_nonnull(strstr(e.text, "S-1"));

    const char *const read[] = {"V-1", "S-1"};
    sample_begin(&mine, a, 1);
    sample_change(&mine, KIND_VALUE, "V-1", 9);
    mine.t.read = read;
    mine.t.n_read = 2;
    ck_assert_int_eq(try_commit(s, &mine, &e), OHMEN_CONFLICT);
    ck_assert_ptr_nonnull(strstr(e.text, ": S-1;"));

    mine.t.prepared_on = 2;
    ck_assert_int_eq(try_commit(s, &mine, &e), OHMEN_OK);
    mine.t.prepared_on = 4;
    ck_assert_int_eq(try_commit(s, &mine, &e), OHMEN_CONFLICT);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

START_TEST(many_stale_objects_are_counted)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e;
    struct store *s = test_register(a, &path);
    struct sample other, mine;
    sample_begin(&other, a, 1);
    sample_begin(&mine, a, 1);
    for (unsigned i = 0; i < 7; i++) {
        const char *id = arena_printf(a, "S-%u", i + 10);
        sample_change(&other, KIND_SITE, id, 1);
        sample_change(&mine, KIND_SITE, id, 2);
    }
    ck_assert_uint_eq(test_commit(s, &other), 2);
    ck_assert_int_eq(try_commit(s, &mine, &e), OHMEN_CONFLICT);
    ck_assert_ptr_nonnull(strstr(e.text, "S-10, S-11, S-12, S-13, S-14 and 2 more"));
    arena_free(a);
}
END_TEST

START_TEST(wrong_transactions_store_nothing)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e;
    struct store *s = test_register(a, &path);
    struct sample t;
    sample_begin(&t, a, 1);
    sample_change(&t, KIND_SITE, "S-2", 8);
    sample_change(&t, KIND_SITE, "S-2", 9);
    ck_assert_int_eq(try_commit(s, &t, &e), OHMEN_INTERNAL);

    sample_begin(&t, a, 1);
    sample_change(&t, KIND_SITE, "S-2", 8);
    t.t.reason = "caf\xc3";
    ck_assert_int_eq(try_commit(s, &t, &e), OHMEN_INPUT);
    ck_assert_ptr_nonnull(strstr(e.text, "reason"));

    static const char *const bodies[] = {"{\"name\":\"x\" }", "{\"nome\":\"x\"}", "[]",
                                         "{\"customers\":\"many\",\"name\":\"x\"}"};
    for (size_t i = 0; i < 4; i++) {
        sample_begin(&t, a, 1);
        *array_push(a, &t.changes) = (struct store_change){
            .kind = KIND_SITE, .id = "S-2", .json = bodies[i], .n = strlen(bodies[i])};
        ck_assert_int_ne(try_commit(s, &t, &e), OHMEN_OK);
    }
    sample_begin(&t, a, 1);
    sample_observe(&t, "log-20", 20000, "caf\xc3");
    ck_assert_int_eq(try_commit(s, &t, &e), OHMEN_INPUT);
    ck_assert_ptr_nonnull(strstr(e.text, "subject of an observation"));

    sample_begin(&t, a, 1);
    sample_observe(&t, "log-20", DAY_NONE, "V-1");
    ck_assert_int_eq(try_commit(s, &t, &e), OHMEN_INTERNAL);
    uint64_t head;
    MUST(store_head(s, &head, &e), &e);
    ck_assert_uint_eq(head, 1);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

START_TEST(a_reader_does_not_write)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e;
    test_register(a, &path);
    struct store *s = test_open(a, path, STORE_READ);
    struct sample t;
    sample_begin(&t, a, 1);
    sample_change(&t, KIND_SITE, "S-2", 8);
    ck_assert_int_eq(try_commit(s, &t, &e), OHMEN_INTERNAL);
    arena_free(a);
}
END_TEST

START_TEST(objects_come_back_after_removal)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct sample t;
    sample_begin(&t, a, 1);
    sample_remove(&t, KIND_DECISION, "D-1");
    ck_assert_uint_eq(test_commit(s, &t), 2);
    sample_begin(&t, a, 2);
    sample_change(&t, KIND_DECISION, "D-1", 1);
    ck_assert_uint_eq(test_commit(s, &t), 3);
    struct store_versions versions = {0};
    MUST(store_versions(s, "D-1", &versions, &e), &e);
    ck_assert_uint_eq(versions.n, 3);
    ck_assert_ptr_null(versions.at[1].json);
    ck_assert_uint_eq(versions.at[1].seq, 2);
    ck_assert_str_eq(versions.at[2].json, versions.at[0].json);
    ck_assert_int_eq(versions.at[2].kind, KIND_DECISION);
    MUST(store_versions(s, NULL, &versions, &e), &e);
    ck_assert_uint_eq(versions.n, 11);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

/* A body that is there already under its hash, but was tampered with. */
START_TEST(a_tampered_body_is_not_built_upon)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e;
    struct store *s = test_register(a, &path);
    struct sample t;
    sample_begin(&t, a, 1);
    sample_remove(&t, KIND_SITE, "S-1");
    ck_assert_uint_eq(test_commit(s, &t), 2);
    test_tamper(path, "UPDATE body SET json = replace(json, '107', '108') WHERE kind = 'site'");
    sample_begin(&t, a, 2);
    sample_change(&t, KIND_SITE, "S-1", 7);
    ck_assert_int_eq(try_commit(s, &t, &e), OHMEN_REGISTER);
    ck_assert_ptr_nonnull(strstr(e.text, "the body of site S-1"));
    uint64_t head;
    MUST(store_head(s, &head, &e), &e);
    ck_assert_uint_eq(head, 2);
    arena_free(a);
}
END_TEST

void store_write_tests(Suite *suite)
{
    TCase *tc = tcase_create("write");
    tcase_set_timeout(tc, 60);
    tcase_add_test(tc, an_empty_register_has_no_entry);
    tcase_add_test(tc, one_entry_holds_what_was_given);
    tcase_add_test(tc, what_is_known_is_left_out);
    tcase_add_test(tc, stale_writes_are_refused);
    tcase_add_test(tc, many_stale_objects_are_counted);
    tcase_add_test(tc, wrong_transactions_store_nothing);
    tcase_add_test(tc, a_reader_does_not_write);
    tcase_add_test(tc, objects_come_back_after_removal);
    tcase_add_test(tc, a_tampered_body_is_not_built_upon);
    suite_add_tcase(suite, tc);
}
