/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Each status that a caller may meet, reached through the public API; a failure leaves
 * outputs and register as they were. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/file.h"
#include "failmem.h"
#include "work/work.h"
#include "work_test.h"

/* A report that no failure may replace. */
static ohmen_report *const untouched = (ohmen_report *)&test_source;

enum call {
    HAZARDS,
    PROTECTION,
    LIST,
    SHOW,
    WEIGH,
    SENSITIVITY,
    DAMAGE,
    GRID,
    EXPLAIN,
    REPORT,
    HISTORY
};

static ohmen_status call_one(enum call call, ohmen_register *r, const ohmen_query *q,
                             const char *operand, ohmen_report **out, ohmen_error *e)
{
    switch (call) {
    case HAZARDS: return ohmen_hazards(r, q, out, e);
    case PROTECTION: return ohmen_protection(r, q, out, e);
    case LIST: return ohmen_list(r, q, operand, out, e);
    case SHOW: return ohmen_show(r, q, operand, out, e);
    case WEIGH: return ohmen_weigh(r, q, operand, out, e);
    case SENSITIVITY: return ohmen_sensitivity(r, q, operand, NULL, NULL, out, e);
    case DAMAGE: return ohmen_damage(r, q, operand, out, e);
    case GRID: return ohmen_grid(r, q, operand, out, e);
    case EXPLAIN: return ohmen_explain(r, q, operand, 0, out, e);
    case REPORT: return ohmen_report_all(r, q, out, e);
    case HISTORY: return ohmen_history(r, operand, out, e);
    }
    return OHMEN_INTERNAL;
}

/* Fails with the status, with a sentence that holds the words, and touches nothing. */
static void expect(ohmen_register *r, enum call call, const ohmen_query *q, const char *operand,
                   ohmen_status status, const char *words)
{
    ohmen_report *out = untouched;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status got = call_one(call, r, q, operand, &out, &e);
    ck_assert_msg(got == status, "call %d (%s): status %d, not %d: %s", call,
                  operand ? operand : "", got, status, e.text);
    ck_assert_int_eq(e.status, status);
    ck_assert_msg(strstr(e.text, words) != NULL, "\"%s\" lacks \"%s\"", e.text, words);
    ck_assert_ptr_eq(out, untouched);
    out = untouched; /* and without an error object */
    ck_assert_int_eq(call_one(call, r, q, operand, &out, NULL), status);
    ck_assert_ptr_eq(out, untouched);
}

START_TEST(unknown_things)
{
    struct arena *a = test_arena();
    ohmen_register *r = test_open(test_skerry(a), OHMEN_READ);
    expect(r, LIST, NULL, "elemnts", OHMEN_UNKNOWN, "did you mean \"elements\"?");
    expect(r, SHOW, NULL, "H-VH-BUS3", OHMEN_UNKNOWN, "H-VH-BUS");
    expect(r, WEIGH, NULL, "D-VH", OHMEN_UNKNOWN, "D-VH");
    expect(r, WEIGH, NULL, "H-VH-BUS1", OHMEN_UNKNOWN, "H-VH-BUS1");
    expect(r, SENSITIVITY, NULL, "D-VH", OHMEN_UNKNOWN, "D-VH");
    expect(r, DAMAGE, NULL, "D-VH", OHMEN_UNKNOWN, "D-VH");
    expect(r, EXPLAIN, NULL, "D-TQ.worst-1[TQ-ARK]", OHMEN_UNKNOWN, "D-TQ.worst-1[TQ-ARC]");
    expect(r, EXPLAIN, NULL, "register.worst-1[todai]", OHMEN_UNKNOWN, "register.worst-1[today]");
    expect(r, GRID, NULL, "D-VH", OHMEN_UNKNOWN, "D-VH");
    expect(r, EXPLAIN, NULL, "H-VH-BUS1.rsk", OHMEN_UNKNOWN, "did you mean \"risk\"?");
    expect(r, EXPLAIN, NULL, "", OHMEN_UNKNOWN, "");
    expect(r, EXPLAIN, NULL, "H-VH-BUS1.risk@NOTHING", OHMEN_UNKNOWN, "NOTHING");
    expect(r, HISTORY, NULL, "H-VH-BUS3", OHMEN_UNKNOWN, "H-VH-BUS3");
    ohmen_close(r);
    arena_free(a);
}
END_TEST

START_TEST(queries_that_find_nothing)
{
    struct arena *a = test_arena();
    ohmen_register *r = test_open(test_skerry(a), OHMEN_READ);
    for (int call = HAZARDS; call <= REPORT; call++) {
        const char *operand = call == LIST                                           ? "elements"
                              : call == SHOW                                         ? "VH-51A"
                              : call == WEIGH || call == GRID || call == SENSITIVITY ? "D-TQ"
                              : call == EXPLAIN ? "H-VH-T1.risk"
                                                : NULL;
        ohmen_query q = {.as_of = "2"};
        expect(r, call, &q, operand, OHMEN_UNKNOWN, "the newest is 1");
        q.as_of = "0";
        expect(r, call, &q, operand, OHMEN_UNKNOWN, "the newest is 1");
        q.as_of = "123456789012345678";
        expect(r, call, &q, operand, OHMEN_USAGE, "123456789012345678");
        q.as_of = "yesterday";
        expect(r, call, &q, operand, OHMEN_USAGE, "yesterday");
        q.as_of = "2026-02-30";
        expect(r, call, &q, operand, OHMEN_USAGE, "2026-02-30");
        q.as_of = "2026-11-30"; /* the day before the first entry */
        expect(r, call, &q, operand, OHMEN_UNKNOWN, "");
        if (call == LIST)
            continue;
        q = (ohmen_query){.perspective = "compny"};
        expect(r, call, &q, operand, OHMEN_UNKNOWN, "company");
    }
    ohmen_query q = {.site = "VHX"};
    expect(r, HAZARDS, &q, NULL, OHMEN_UNKNOWN, "did you mean \"VH\"?");
    expect(r, PROTECTION, &q, NULL, OHMEN_UNKNOWN, "did you mean \"VH\"?");
    expect(r, REPORT, &q, NULL, OHMEN_UNKNOWN, "did you mean \"VH\"?");
    ohmen_close(r);
    arena_free(a);
}
END_TEST

START_TEST(an_empty_register_has_no_figures)
{
    struct arena *a = test_arena();
    ohmen_register *r = test_open(test_new(a), OHMEN_READ);
    expect(r, HAZARDS, NULL, NULL, OHMEN_UNKNOWN, "is empty");
    expect(r, PROTECTION, NULL, NULL, OHMEN_UNKNOWN, "is empty");
    expect(r, REPORT, NULL, NULL, OHMEN_UNKNOWN, "is empty");
    expect(r, LIST, NULL, "hazards", OHMEN_UNKNOWN, "is empty");
    ohmen_close(r);
    arena_free(a);
}
END_TEST

/* --- imports --- */

static void expect_import(const char *reg, ohmen_mode mode, const ohmen_import_settings *s,
                          ohmen_status status, const char *words)
{
    struct test_state before = test_state(reg);
    ohmen_report *out = untouched;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *r = test_open(reg, mode);
    ck_assert_int_eq(ohmen_import(r, s, &out, &e), status);
    ck_assert_msg(strstr(e.text, words) != NULL, "\"%s\" lacks \"%s\"", e.text, words);
    ck_assert_ptr_eq(out, untouched);
    ohmen_close(r);
    test_same_state(reg, &before);
}

START_TEST(imports_that_are_wrong)
{
    struct arena *a = test_arena();
    const char *reg = test_new(a);
    const char *file = test_file(a, reg, "x.yaml", test_read(a, "tests/golden/bad/good.yaml"));
    const char *missing[] = {file, "no/such/file.yaml"};
    ohmen_import_settings s = {.files = &file, .n_files = 1, .author = "me", .reason = "why"};
    expect_import(reg, OHMEN_READ, &s, OHMEN_USAGE, "reading only");
    s.n_files = 0;
    expect_import(reg, OHMEN_WRITE, &s, OHMEN_USAGE, "at least one file");
    s.n_files = 1;
    s.author = "";
    expect_import(reg, OHMEN_WRITE, &s, OHMEN_USAGE, "author");
    s.author = "\xff";
    expect_import(reg, OHMEN_WRITE, &s, OHMEN_USAGE, "UTF-8");
    s.author = "me";
    s.reason = NULL;
    expect_import(reg, OHMEN_WRITE, &s, OHMEN_USAGE, "reason");
    s = (ohmen_import_settings){.files = missing, .n_files = 2, .author = "me", .reason = "why"};
    expect_import(reg, OHMEN_WRITE, &s, OHMEN_IO, "no/such/file.yaml");
    const char *folder = arena_strn(a, reg, (size_t)(strrchr(reg, '/') - reg));
    s.files = &folder;
    s.n_files = 1;
    expect_import(reg, OHMEN_WRITE, &s, OHMEN_IO, folder);
    arena_free(a);
}
END_TEST

/* Another program changes an object while an import, which rests on it, still reads: the
 * importer waits for a pipe that the other one fills when it is done. */
START_TEST(a_register_that_changed_meanwhile)
{
    struct arena *a = test_arena();
    const char *reg = test_new(a);
    test_import_text(a, reg, test_read(a, "tests/golden/bad/good.yaml"));
    const char *pipe = arena_printf(a, "%s.yaml", reg);
    ck_assert_int_eq(mkfifo(pipe, 0600), 0);
    pid_t other = fork();
    ck_assert_int_ge(other, 0);
    if (other == 0) {
        FILE *f = fopen(pipe, "w"); /* waits until the importer opens it */
        test_import_text(a, reg, "elements: {RELAY: {per-demand: 0.25}}\n");
        fputs("elements: {RELAY: {per-demand: 0.75}}\n", f);
        _exit(fclose(f) == 0 ? 0 : 1);
    }
    ohmen_report *out = untouched;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_import_settings s = {.files = &pipe, .n_files = 1, .author = "me", .reason = "why"};
    ohmen_register *r = test_open(reg, OHMEN_WRITE);
    ck_assert_int_eq(ohmen_import(r, &s, &out, &e), OHMEN_CONFLICT);
    ck_assert_ptr_nonnull(strstr(e.text, "RELAY"));
    ck_assert_ptr_eq(out, untouched);
    ohmen_close(r);
    int status;
    ck_assert_int_eq(waitpid(other, &status, 0), other);
    ck_assert_int_eq(status, 0);
    ck_assert_uint_eq(test_state(reg).head, 2);
    ck_assert_ptr_nonnull(strstr(test_export(a, reg, OHMEN_EXPORT_OBJECTS), "0.25"));
    arena_free(a);
}
END_TEST

/* --- files --- */

static void expect_open(const char *path, ohmen_mode mode, ohmen_status status, const char *words)
{
    ohmen_register *const kept = (ohmen_register *)&test_source, *r = kept;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(ohmen_open(path, mode, &r, &e), status);
    ck_assert_msg(strstr(e.text, words) != NULL, "\"%s\" lacks \"%s\"", e.text, words);
    ck_assert_ptr_eq(r, kept);
}

START_TEST(files_that_are_no_register)
{
    struct arena *a = test_arena();
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *reg = test_skerry(a), *folder = sample_folder(a);
    const char *text = test_file(a, reg, "text.ohmen", "no register, but a text of some length\n");
    const char *empty = test_file(a, reg, "empty.ohmen", "");
    expect_open("no/such/register.ohmen", OHMEN_READ, OHMEN_UNKNOWN, "no/such/register.ohmen");
    for (int mode = OHMEN_READ; mode <= OHMEN_WRITE; mode++) {
        expect_open(text, mode, OHMEN_REGISTER, "text.ohmen");
        expect_open(empty, mode, OHMEN_REGISTER, "empty.ohmen");
        expect_open(folder, mode, OHMEN_REGISTER, folder);
    }
    ck_assert_int_eq(ohmen_create(reg, &e), OHMEN_IO);
    ck_assert_ptr_nonnull(strstr(e.text, "exists"));
    ck_assert_uint_eq(test_state(reg).head, 1);
    e = (ohmen_error)OHMEN_ERROR_INIT;
    ck_assert_int_eq(ohmen_create(arena_printf(a, "%s/no/x.ohmen", folder), &e), OHMEN_IO);
    arena_free(a);
}
END_TEST

/* A register that vanishes while it is open is told at the next call. */
START_TEST(a_register_that_is_gone)
{
    struct arena *a = test_arena();
    const char *reg = test_skerry(a);
    ohmen_register *r = test_open(reg, OHMEN_READ);
    ck_assert_int_eq(unlink(reg), 0);
    expect(r, HAZARDS, NULL, NULL, OHMEN_UNKNOWN, "there is no register");
    ohmen_close(r);
    arena_free(a);
}
END_TEST

/* --- figures --- */

/* What is left out of a report is said in it, with the reason. */
static void expect_left_out(struct arena *a, ohmen_register *r, enum call call, const char *words)
{
    ohmen_report *out = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(call_one(call, r, NULL, NULL, &out, &e), &e);
    const char *text = ohmen_report_text(out, NULL);
    const char *from = strstr(text, "LEFT OUT: what cannot be computed");
    ck_assert_ptr_nonnull(from);
    ck_assert_ptr_nonnull(strstr(from, words));
    test_json(a, out);
}

/* Of an element about which nothing tells how it fails there is no figure: only what needs it
 * is left out. */
START_TEST(figures_that_cannot_be_computed)
{
    struct arena *a = test_arena();
    const char *reg = test_new(a);
    test_import_text(a, reg, test_read(a, "tests/golden/bad/good.yaml"));
    test_import_text(a, reg,
                     "elements: {SPARE: {repair: 8 h}}\n"
                     "hazards:\n"
                     "  H-SPARE:\n"
                     "    name: The spare relay fails\n"
                     "    frequency: 14 per a * fails(SPARE)\n"
                     "    response: {never: {outcome: dark}}\n"
                     "    outcomes: {dark: {name: Dark, damage: {loss: {category: equipment, "
                     "is: 2.385 kEUR}}}}\n");
    ohmen_register *r = test_open(reg, OHMEN_READ);
    expect_left_out(a, r, HAZARDS, "\"SPARE\"");
    expect_left_out(a, r, REPORT, "\"SPARE\"");
    expect_left_out(a, r, GRID, "\"SPARE\"");
    expect(r, EXPLAIN, NULL, "H-SPARE.risk", OHMEN_COMPUTE, "SPARE");
    ohmen_report *out = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_explain(r, NULL, "H-BUS.risk", 0, &out, &e), &e);
    ohmen_report_free(out);
    must(ohmen_list(r, NULL, "elements", &out, &e), &e);
    test_json(a, out);
    ohmen_close(r);
    arena_free(a);
}
END_TEST

/* --- memory --- */

START_TEST(reading_without_memory)
{
    struct arena *a = test_arena();
    const char *reg = test_mill(a);
    size_t k = 0;
    for (bool done = false; !done; k++) {
        struct failmem f;
        ohmen_register *r = NULL;
        ohmen_report *out = NULL;
        ohmen_error e = OHMEN_ERROR_INIT;
        failmem_init(&f, k);
        ohmen_status status = register_open(&f.mem, reg, OHMEN_READ, &r, &e);
        if (status == OHMEN_OK)
            status = ohmen_report_all(r, NULL, &out, &e);
        const char *text = status == OHMEN_OK ? ohmen_report_json(out) : NULL;
        done = f.failed == 0;
        ck_assert_int_eq(text != NULL, done);
        ck_assert(status == OHMEN_MEMORY || (status == OHMEN_OK && out));
        ohmen_report_free(out);
        ohmen_close(r);
        failmem_check(&f);
    }
    ck_assert_uint_ge(k, 30);
    arena_free(a);
}
END_TEST

START_TEST(nothing_is_freed_in_vain)
{
    ohmen_close(NULL);
    ohmen_report_free(NULL);
    ck_assert_int_eq(ohmen_status_exit(OHMEN_INPUT), 3);
}
END_TEST

void work_error_tests(Suite *suite)
{
    TCase *t = tcase_create("errors");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, unknown_things);
    tcase_add_test(t, queries_that_find_nothing);
    tcase_add_test(t, an_empty_register_has_no_figures);
    tcase_add_test(t, imports_that_are_wrong);
    tcase_add_test(t, a_register_that_changed_meanwhile);
    tcase_add_test(t, files_that_are_no_register);
    tcase_add_test(t, a_register_that_is_gone);
    tcase_add_test(t, figures_that_cannot_be_computed);
    tcase_add_test(t, reading_without_memory);
    tcase_add_test(t, nothing_is_freed_in_vain);
    suite_add_tcase(suite, t);
}
