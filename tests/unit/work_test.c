/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tests of the whole job: what they share, and the run. Owns the two paths that come from
 * the command line. */
#include "work_test.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/file.h"
#include "base/utf8.h"
#include "html_check.h"
#include "json_check.h"

const char *test_source, *test_tool;

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

/* --- registers --- */

const char *test_new(struct arena *a)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *path = arena_printf(a, "%s/quay.ohmen", sample_folder(a));
    must(ohmen_create(path, &e), &e);
    return path;
}

const char *test_file(struct arena *a, const char *reg, const char *name, const char *text)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *path = arena_printf(a, "%.*s/%s", (int)(strrchr(reg, '/') - reg), reg, name);
    must(file_write(path, text, strlen(text), &e), &e);
    return path;
}

const char *test_read(struct arena *a, const char *path)
{
    char *text;
    size_t n;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(file_read(a, arena_printf(a, "%s/%s", test_source, path), 1 << 26, &text, &n, &e), &e);
    return text;
}

ohmen_register *test_open(const char *reg, ohmen_mode mode)
{
    ohmen_register *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_open(reg, mode, &r, &e), &e);
    return r;
}

ohmen_status test_import(const char *reg, const char *const *files, ohmen_report **out,
                         ohmen_error *e)
{
    ohmen_report *report = NULL;
    ohmen_register *r = test_open(reg, OHMEN_WRITE);
    ohmen_import_settings s = {.files = files, .author = "A. Lindqvist", .reason = "Survey"};
    while (files[s.n_files])
        s.n_files++;
    ohmen_status status = ohmen_import(r, &s, &report, e);
    ohmen_close(r);
    if (out && report)
        *out = report;
    else
        ohmen_report_free(report);
    return status;
}

void test_import_text(struct arena *a, const char *reg, const char *yaml)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *const files[] = {test_file(a, reg, "document.yaml", yaml), NULL};
    must(test_import(reg, files, NULL, &e), &e);
}

const char *const *test_skerry_files(struct arena *a)
{
    static const char *const names[] = {"register.yaml",   "network.yaml", "hazards.yaml",
                                        "states.yaml",     "options.yaml", "decisions.yaml",
                                        "observations.csv"};
    enum { FILES = sizeof names / sizeof *names };
    const char **files = NEW_ARRAY(a, FILES + 1, const char *);
    for (size_t i = 0; i < FILES; i++)
        files[i] = arena_printf(a, "%s/samples/skerry/%s", test_source, names[i]);
    return files;
}

const char *test_skerry(struct arena *a)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *reg = test_new(a);
    must(test_import(reg, test_skerry_files(a), NULL, &e), &e);
    return reg;
}

const char *test_mill(struct arena *a)
{
    const char *reg = test_new(a);
    test_import_text(a, reg, test_read(a, "samples/mill-street.yaml"));
    return reg;
}

struct test_state test_state(const char *reg)
{
    struct test_state state;
    struct store *s;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *a = test_arena();
    must(store_open(a, reg, STORE_READ, &s, &e), &e);
    must(store_head(s, &state.head, &e), &e);
    must(store_content_hash(s, UINT64_MAX, state.hash, &e), &e);
    arena_free(a);
    return state;
}

void test_same_state(const char *reg, const struct test_state *before)
{
    struct test_state now = test_state(reg);
    ck_assert_uint_eq(now.head, before->head);
    ck_assert_str_eq(now.hash, before->hash);
}

const char *test_export(struct arena *a, const char *reg, ohmen_export_part part)
{
    ohmen_report *out = NULL;
    const char *text = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *r = test_open(reg, OHMEN_READ);
    must(ohmen_export(r, NULL, part, &out, &text, &e), &e);
    text = arena_str(a, text);
    ohmen_report_free(out);
    ohmen_close(r);
    return text;
}

/* --- reports --- */

/* Cells of the line at s (RFC 4180); *next is behind its end. */
static size_t count_cells(const char *s, const char **next)
{
    size_t n = 1;
    bool quoted = false;
    for (;; s++) {
        ck_assert_msg(*s, "a line without an end, or a quote that is not closed");
        if (*s == '"')
            quoted = !quoted;
        else if (!quoted && *s == ',')
            n++;
        else if (!quoted && s[0] == '\r' && s[1] == '\n')
            break;
    }
    *next = s + 2;
    return n;
}

static void check_csv(const char *s)
{
    size_t columns = 0;
    while (*s) {
        const char *next;
        size_t n = count_cells(s, &next);
        if (next == s + 2) { /* an empty line parts two tables */
            ck_assert_uint_gt(columns, 0);
            columns = 0;
        } else if (columns == 0) {
            columns = n;
        } else {
            ck_assert_msg(n == columns, "%zu cells where the header has %zu: %.*s", n, columns,
                          (int)(next - s), s);
        }
        s = next;
    }
}

const char *test_report(ohmen_report *r)
{
    size_t bad;
    const char *text = ohmen_report_text(r, NULL);
    ck_assert_ptr_nonnull(text);
    size_t n = strlen(text);
    ck_assert_uint_eq(utf8_check(text, n), n);
    ck_assert(n > 0 && text[n - 1] == '\n');
    const char *csv = ohmen_report_csv(r);
    ck_assert_ptr_nonnull(csv);
    check_csv(csv);
    const char *html = ohmen_report_html(r);
    ck_assert_ptr_nonnull(html);
    const char *fault = html_check(html, strlen(html), &bad);
    if (fault)
        ck_abort_msg("%s: %.60s", fault, html + bad);
    const char *json = ohmen_report_json(r);
    ck_assert_ptr_nonnull(json);
    if (!json_check(json, strlen(json), &bad))
        ck_abort_msg("no JSON from byte %zu: %.60s", bad, json + bad);
    return json;
}

const char *test_json(struct arena *a, ohmen_report *r)
{
    const char *json = arena_str(a, test_report(r));
    ohmen_report_free(r);
    return json;
}

size_t test_count(const char *text, const char *part)
{
    size_t n = 0;
    for (const char *s = text; (s = strstr(s, part)) != NULL; s += strlen(part))
        n++;
    return n;
}

int main(int argc, char **argv)
{
    if (argc != 3) {
        fputs("usage: work_test SOURCE-FOLDER TOOL\n", stderr);
        return EXIT_FAILURE;
    }
    test_source = argv[1];
    test_tool = argv[2];
    setenv("OHMEN_CLOCK", "2026-12-01T08:00:00Z", 1);
    Suite *suite = suite_create("work");
    work_report_tests(suite);
    work_figure_tests(suite);
    work_import_tests(suite);
    work_journal_tests(suite);
    work_error_tests(suite);
    work_round_tests(suite);
    work_bad_tests(suite);
    work_protection_tests(suite);
    work_turn_tests(suite);
    work_show_tests(suite);
    work_filter_tests(suite);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || !run ? EXIT_FAILURE : EXIT_SUCCESS;
}
