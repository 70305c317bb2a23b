/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the journal knew: as of an entry, a day and a second; history, backup, proof. */
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

#include "base/file.h"
#include "work_test.h"

#define ONE "2026-03-01T10:00:00Z"
#define TWO "2026-03-02T23:59:59Z"
#define THREE "2026-03-03T00:00:00Z"

static void at(struct arena *a, const char *reg, const char *clock, const char *yaml)
{
    setenv("OHMEN_CLOCK", clock, 1);
    test_import_text(a, reg, yaml);
    setenv("OHMEN_CLOCK", "2026-12-01T08:00:00Z", 1);
}

/* Three entries: the relay fails in 1, 2 and 3 % of the demands. */
static const char *three_entries(struct arena *a)
{
    const char *reg = test_new(a);
    at(a, reg, ONE, test_read(a, "tests/golden/bad/good.yaml"));
    at(a, reg, TWO, "elements: {RELAY: {per-demand: 0.02}}\n");
    at(a, reg, THREE, "elements: {RELAY: {per-demand: 0.03}}\n");
    return reg;
}

static const char *hazards_as_of(struct arena *a, const char *reg, const char *as_of)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_query q = ohmen_query_defaults();
    q.as_of = as_of;
    ohmen_register *open = test_open(reg, OHMEN_READ);
    must(ohmen_hazards(open, &q, &r, &e), &e);
    ohmen_close(open);
    return test_json(a, r);
}

START_TEST(as_of_an_entry_a_day_and_a_second)
{
    static const struct {
        const char *entry, *same[3];
    } times[] = {{"1", {"2026-03-01", ONE, "2026-03-02T23:59:58Z"}},
                 {"2", {"2026-03-02", TWO, TWO}},
                 {"3", {"2026-03-03", THREE, "2030-01-01"}}};
    struct arena *a = test_arena();
    const char *reg = three_entries(a), *seen[3];
    for (size_t i = 0; i < 3; i++) {
        seen[i] = hazards_as_of(a, reg, times[i].entry);
        for (size_t k = 0; k < 3; k++)
            ck_assert_str_eq(hazards_as_of(a, reg, times[i].same[k]), seen[i]);
    }
    ck_assert_str_ne(seen[0], seen[1]);
    ck_assert_str_ne(seen[1], seen[2]);
    ck_assert_str_eq(hazards_as_of(a, reg, NULL), seen[2]);
    arena_free(a);
}
END_TEST

/* The past is what a register held that stopped there. */
START_TEST(the_past_is_a_register_of_its_own)
{
    struct arena *a = test_arena();
    const char *reg = three_entries(a), *short_one = test_new(a);
    at(a, short_one, ONE, test_read(a, "tests/golden/bad/good.yaml"));
    ck_assert_str_eq(hazards_as_of(a, reg, "1"), hazards_as_of(a, short_one, NULL));
    arena_free(a);
}
END_TEST

START_TEST(history_of_the_register)
{
    struct arena *a = test_arena();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *open = test_open(three_entries(a), OHMEN_READ);
    must(ohmen_history(open, NULL, &r, &e), &e);
    const char *json = test_json(a, r);
    ck_assert_uint_eq(test_count(json, "{\"entry\": {"), 3);
    ck_assert_ptr_nonnull(strstr(json, "\"time\": \"" TWO "\", \"author\": \"A. Lindqvist\", "
                                       "\"reason\": \"Survey\", \"changes\": {\"value\": 1}"));
    ohmen_close(open);
    arena_free(a);
}
END_TEST

START_TEST(history_of_an_object)
{
    struct arena *a = test_arena();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *reg = three_entries(a);
    test_import_text(a, reg, "removed: [D-BUS]\n");
    ohmen_register *open = test_open(reg, OHMEN_READ);
    must(ohmen_history(open, "RELAY", &r, &e), &e);
    const char *json = test_json(a, r);
    ck_assert_uint_eq(test_count(json, "\"change\": \"added\""), 1);
    ck_assert_uint_eq(test_count(json, "\"change\": \"changed\""), 2);
    ck_assert_ptr_nonnull(strstr(json, "\"entry\": \"3\", \"field\": \"per-demand/is\", "
                                       "\"before\": \"0.02\", \"after\": \"0.03\""));
    must(ohmen_history(open, "D-BUS", &r, &e), &e);
    json = test_json(a, r);
    ck_assert_uint_eq(test_count(json, "{\"entry\": "), 2);
    ck_assert_uint_eq(test_count(json, "\"change\": \"removed\""), 1);
    ohmen_close(open);
    arena_free(a);
}
END_TEST

START_TEST(a_backup_is_the_register)
{
    struct arena *a = test_arena();
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *reg = three_entries(a);
    const char *copy = arena_printf(a, "%s.copy", reg);
    ohmen_register *open = test_open(reg, OHMEN_READ);
    must(ohmen_backup(open, copy, &e), &e);
    struct test_state before = test_state(reg);
    test_same_state(copy, &before);
    ck_assert_str_eq(hazards_as_of(a, copy, "2"), hazards_as_of(a, reg, "2"));
    ck_assert_int_eq(ohmen_backup(open, copy, &e), OHMEN_IO); /* it exists */
    test_same_state(copy, &before);
    ohmen_close(open);
    arena_free(a);
}
END_TEST

START_TEST(a_sound_register_is_told_so)
{
    struct arena *a = test_arena();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *open = test_open(three_entries(a), OHMEN_READ);
    must(ohmen_verify(open, &r, &e), &e);
    ck_assert_ptr_nonnull(strstr(test_json(a, r), "is whole"));
    ohmen_close(open);
    arena_free(a);
}
END_TEST

/* One digit in a stored body, changed behind SQLite's back. */
START_TEST(an_altered_register_is_told_so)
{
    struct arena *a = test_arena();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *reg = three_entries(a), needle[] = "{\"is\":\"0.03\"}";
    char *bytes;
    size_t n, hits = 0;
    must(file_read(a, reg, 1 << 26, &bytes, &n, &e), &e);
    for (size_t i = 0; i + sizeof needle < n; i++)
        if (memcmp(bytes + i, needle, sizeof needle - 1) == 0) {
            bytes[i + sizeof needle - 4] = '1';
            hits++;
        }
    ck_assert_uint_ge(hits, 1);
    must(file_write(reg, bytes, n, &e), &e);
    ohmen_register *open = test_open(reg, OHMEN_READ);
    ck_assert_int_eq(ohmen_verify(open, &r, &e), OHMEN_REGISTER);
    ck_assert_ptr_nonnull(r);
    ck_assert_ptr_nonnull(strstr(test_json(a, r), "RELAY"));
    ohmen_close(open);
    arena_free(a);
}
END_TEST

void work_journal_tests(Suite *suite)
{
    TCase *t = tcase_create("journal");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, as_of_an_entry_a_day_and_a_second);
    tcase_add_test(t, the_past_is_a_register_of_its_own);
    tcase_add_test(t, history_of_the_register);
    tcase_add_test(t, history_of_an_object);
    tcase_add_test(t, a_backup_is_the_register);
    tcase_add_test(t, a_sound_register_is_told_so);
    tcase_add_test(t, an_altered_register_is_told_so);
    suite_add_tcase(suite, t);
}
