/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Imports: previews, repetition, changes field by field, removal, observations, and what
 * is refused. */
#include <string.h>

#include "json_check.h"
#include "work_test.h"

static const char good[] = "tests/golden/bad/good.yaml";

/* The small good register. */
static const char *small(struct arena *a)
{
    const char *reg = test_new(a);
    test_import_text(a, reg, test_read(a, good));
    return reg;
}

static const char *import_json(struct arena *a, const char *reg, const char *const *files)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(test_import(reg, files, &r, &e), &e);
    return test_json(a, r);
}

START_TEST(the_first_import_adds_everything)
{
    struct arena *a = test_arena();
    const char *json = import_json(a, test_new(a), test_skerry_files(a));
    ck_assert_uint_eq(test_count(json, "{\"change\": \"added\""), 181);
    ck_assert_uint_eq(test_count(json, "{\"date\": \""), 20);
    ck_assert_ptr_nonnull(strstr(json, "entry 1: 181 objects added"));
    ck_assert_ptr_nonnull(strstr(json, "20 observations added"));
    arena_free(a);
}
END_TEST

/* Exactly the columns of observations, not those of a table that was empty. */
START_TEST(observations_have_their_own_columns)
{
    struct arena *a = test_arena();
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(test_import(test_new(a), test_skerry_files(a), &r, &e), &e);
    const char *head = strstr(ohmen_report_csv(r), "\r\n\r\n");
    ck_assert_ptr_nonnull(head);
    ck_assert(strncmp(head + 4, "date,kind,object,count,result,note\r\n", 36) == 0);
    ohmen_report_free(r);
    arena_free(a);
}
END_TEST

START_TEST(the_same_files_twice_change_nothing)
{
    struct arena *a = test_arena();
    const char *reg = test_skerry(a);
    struct test_state before = test_state(reg);
    const char *json = import_json(a, reg, test_skerry_files(a));
    ck_assert_ptr_nonnull(strstr(json, "Nothing to change"));
    ck_assert_ptr_null(strstr(json, "\"table\""));
    test_same_state(reg, &before);
    import_json(a, reg, test_skerry_files(a) + 5); /* the observations alone */
    test_same_state(reg, &before);
    arena_free(a);
}
END_TEST

/* Rows without a key: equal ones are told apart by their ordinal in the file. */
START_TEST(equal_rows_count_each_once)
{
    static const char rows[] = "date,kind,object,note\n"
                               "2024-01-05,fault,bus-fault,storm\n"
                               "2024-01-05,fault,bus-fault,storm\n"
                               "2024-01-05,fault,bus-fault,\"storm, again\"\n";
    struct arena *a = test_arena();
    const char *reg = small(a);
    const char *files[] = {test_file(a, reg, "rows.csv", rows), NULL};
    ck_assert_uint_eq(test_count(import_json(a, reg, files), "{\"date\": \""), 3);
    struct test_state before = test_state(reg);
    import_json(a, reg, files);
    test_same_state(reg, &before);
    const char *more = arena_printf(a, "%s2024-01-05,fault,bus-fault,storm\n", rows);
    files[0] = test_file(a, reg, "more.csv", more);
    ck_assert_uint_eq(test_count(import_json(a, reg, files), "{\"date\": \""), 1);
    ck_assert_uint_eq(test_state(reg).head, before.head + 1);
    arena_free(a);
}
END_TEST

/* A preview tells the same as the import, and stores nothing. */
START_TEST(a_dry_run_stores_nothing)
{
    struct arena *a = test_arena();
    const char *reg = test_new(a), *const *files = test_skerry_files(a);
    struct test_state before = test_state(reg);
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_import_settings s = {.files = files, .n_files = 7, .dry_run = true};
    ohmen_register *open = test_open(reg, OHMEN_READ);
    must(ohmen_import(open, &s, &r, &e), &e);
    ohmen_close(open);
    const char *preview = test_json(a, r);
    test_same_state(reg, &before);
    ck_assert_ptr_nonnull(strstr(preview, "Nothing was stored"));
    const char *stored = import_json(a, reg, files);
    size_t same = strstr(preview, "{\"key\": \"result\"") - preview;
    ck_assert_int_eq(strncmp(preview, stored, same), 0);
    arena_free(a);
}
END_TEST

START_TEST(changes_are_told_field_by_field)
{
    struct arena *a = test_arena();
    const char *reg = small(a);
    const char *files[] = {test_file(a, reg, "change.yaml",
                                     "elements:\n  RELAY: {name: Relay, per-demand: 0.02}\n"
                                     "  NEW: {per-demand: 0.5}\n"),
                           NULL};
    const char *json = import_json(a, reg, files);
    ck_assert_uint_eq(test_count(json, "{\"change\": "), 2);
    ck_assert_ptr_nonnull(strstr(json, "{\"change\": \"added\", \"kind\": \"element\", "
                                       "\"object\": \"NEW\""));
    ck_assert_ptr_nonnull(strstr(json, "{\"object\": \"RELAY\", \"field\": \"per-demand/is\", "
                                       "\"before\": \"0.01\", \"after\": \"0.02\"}"));
    ck_assert_ptr_nonnull(strstr(json, "{\"object\": \"RELAY\", \"field\": \"name\", "
                                       "\"before\": null, \"after\": \"Relay\"}"));
    ck_assert_ptr_nonnull(strstr(json, "1 object added, 1 object changed"));
    arena_free(a);
}
END_TEST

START_TEST(removal)
{
    struct arena *a = test_arena();
    const char *reg = small(a);
    struct test_state before = test_state(reg);
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *files[] = {test_file(a, reg, "used.yaml", "removed: [RELAY]\n"), NULL};
    ck_assert_int_eq(test_import(reg, files, NULL, &e), OHMEN_INPUT); /* MAIN needs it */
    test_same_state(reg, &before);
    files[0] = test_file(a, reg, "free.yaml", "removed: [D-BUS, NEW-RELAY]\n");
    const char *json = import_json(a, reg, files);
    ck_assert_uint_eq(test_count(json, "{\"change\": \"removed\""), 2);
    ck_assert_ptr_null(strstr(test_export(a, reg, OHMEN_EXPORT_OBJECTS), "NEW-RELAY"));
    test_import_text(a, reg, test_read(a, good)); /* and back */
    ck_assert_str_eq(test_state(reg).hash, before.hash);
    ck_assert_uint_eq(test_state(reg).head, 3);
    arena_free(a);
}
END_TEST

/* All errors of all files in one run, in the order of the files. */
START_TEST(all_files_are_checked)
{
    struct arena *a = test_arena();
    const char *reg = small(a);
    struct test_state before = test_state(reg);
    const char *z = test_file(a, reg, "z.yaml", "elements:\n  A1: {per-demnd: 1 %}\n");
    const char *y = test_file(a, reg, "a.yaml", "schemes:\n  A2: {all: [RELAY, RELAI]}\n");
    const char *const files[] = {z, y, NULL};
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(test_import(reg, files, &r, &e), OHMEN_INPUT);
    ck_assert_ptr_nonnull(r);
    ck_assert_ptr_nonnull(strstr(ohmen_report_diagnostic(r, 0), "z.yaml:2:8: "));
    size_t n = 0;
    while (ohmen_report_diagnostic(r, n))
        n++;
    ck_assert_uint_eq(n, 2);
    ck_assert_ptr_nonnull(strstr(ohmen_report_diagnostic(r, n - 1), "a.yaml:2:21: "));
    ck_assert_ptr_null(ohmen_report_diagnostic(r, n + 5));
    ck_assert_ptr_nonnull(strstr(e.text, arena_printf(a, "%zu errors; nothing was stored", n)));
    ck_assert_uint_eq(test_count(test_json(a, r), "{\"place\": "), n);
    test_same_state(reg, &before);
    arena_free(a);
}
END_TEST

/* What is wrong in a list has the line and column of its cell. */
START_TEST(bad_lists)
{
    static const struct {
        const char *text, *expect;
    } lists[] = {
        {"date,kind,object\n2024-02-30,fault,bus-fault\n", "rows.csv:2:1: \"2024-02-30\" is no"},
        {"date,kind,object\n2024-02-29,falt,bus-fault\n", "rows.csv:2:12: \"falt\" is none of"},
        {"date,kind,object\n2024-02-29,fault,bus-falt\n",
         "rows.csv:2:18: there is no \"bus-falt\" in the register (did you mean \"bus-fault\"?)"},
        {"date,kind,object,count\n2024-02-29,fault,bus-fault,0\n", "rows.csv:2:28: expected a w"},
        {"date,kind,object,count\n2024-02-29,fault,bus-fault,1e3\n", "rows.csv:2:28: expected a w"},
        {"date,kind,object,result\n2024-02-29,test,RELAY,good\n", "rows.csv:2:23: \"good\" is"},
        {"date,kind\n2024-02-29,fault\n", "lacks the column \"object\""},
        {"date,kind,objct\n2024-02-29,fault,bus-fault\n", "rows.csv:1:11: "},
        {"date,kind,object,key\n2024-02-29,fault,bus-fault,K\n2024-02-28,fault,bus-fault,K\n",
         "rows.csv:3:28: the key \"K\" stands twice; the first is in line 2"},
    };
    struct arena *a = test_arena();
    const char *reg = small(a);
    struct test_state before = test_state(reg);
    for (size_t i = 0; i < sizeof lists / sizeof *lists; i++) {
        const char *const files[] = {test_file(a, reg, "rows.csv", lists[i].text), NULL};
        ohmen_report *r = NULL;
        ohmen_error e = OHMEN_ERROR_INIT;
        ck_assert_msg(test_import(reg, files, &r, &e) == OHMEN_INPUT, "%s", lists[i].text);
        bool found = false;
        for (size_t k = 0; ohmen_report_diagnostic(r, k); k++)
            found = found || strstr(ohmen_report_diagnostic(r, k), lists[i].expect);
        ck_assert_msg(found, "%s, not %s", ohmen_report_diagnostic(r, 0), lists[i].expect);
        test_json(a, r);
        test_same_state(reg, &before);
    }
    arena_free(a);
}
END_TEST

/* One bad file spoils the whole import, whatever else is good in it. */
START_TEST(good_and_bad_together)
{
    struct arena *a = test_arena();
    const char *reg = small(a);
    struct test_state before = test_state(reg);
    const char *const files[] = {
        test_file(a, reg, "fine.yaml", "elements:\n  FINE: {per-demand: 0.1}\n"),
        test_file(a, reg, "rows.csv", "date,kind,object\n2024-02-29,test,FINE\n"),
        test_file(a, reg, "bad.csv", "date,kind,object\nyesterday,fault,bus-fault\n"), NULL};
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(test_import(reg, files, NULL, &e), OHMEN_INPUT);
    test_same_state(reg, &before);
    arena_free(a);
}
END_TEST

void work_import_tests(Suite *suite)
{
    TCase *t = tcase_create("import");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, the_first_import_adds_everything);
    tcase_add_test(t, observations_have_their_own_columns);
    tcase_add_test(t, the_same_files_twice_change_nothing);
    tcase_add_test(t, equal_rows_count_each_once);
    tcase_add_test(t, a_dry_run_stores_nothing);
    tcase_add_test(t, changes_are_told_field_by_field);
    tcase_add_test(t, removal);
    tcase_add_test(t, all_files_are_checked);
    tcase_add_test(t, bad_lists);
    tcase_add_test(t, good_and_bad_together);
    suite_add_tcase(suite, t);
}
