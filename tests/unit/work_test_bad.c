/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Every bad document of tests/golden/bad, imported into a register that holds the good
 * one: refused at the place and with the words of its .expect file, by the library and by
 * the tool (exit status 3), and the register stays as it was. */
#include <dirent.h>
#include <fcntl.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/text.h"
#include "work_test.h"

#define BAD "tests/golden/bad"

static bool ends_with(const char *s, const char *end)
{
    size_t n = strlen(s), m = strlen(end);
    return n >= m && strcmp(s + n - m, end) == 0;
}

/* A line must begin with "FILE:LINE:COLUMN: " and hold each further line of `expect`. */
static void expect_line(struct arena *a, const char *lines, const char *file, const char *expect)
{
    size_t n = strcspn(expect, "\n");
    const char *place = arena_printf(a, "%s:%.*s: ", file, (int)n, expect);
    const char *line = strstr(lines, file);
    ck_assert_msg(line && strncmp(line, place, strlen(place)) == 0, "%s\nis not at %s", lines,
                  place);
    line = arena_strn(a, line, strcspn(line, "\n"));
    for (const char *s = expect + n; *s;) {
        s++;
        n = strcspn(s, "\n");
        const char *words = arena_strn(a, s, n);
        ck_assert_msg(strstr(line, words) != NULL, "%s\nlacks: %s", line, words);
        s += n;
    }
}

static const char *all_diagnostics(struct arena *a, const ohmen_report *r)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; ohmen_report_diagnostic(r, i); i++)
        text_printf(&t, "%s\n", ohmen_report_diagnostic(r, i));
    return text_str(&t);
}

/* Runs `ohmen import` on one file; its exit status, and what it says on standard error. */
static int run_tool(struct arena *a, const char *reg, const char *file, const char **said)
{
    int ends[2], status;
    char buffer[4096];
    struct text t;
    text_init(&t, a);
    ck_assert_int_eq(pipe(ends), 0);
    pid_t child = fork();
    ck_assert_int_ge(child, 0);
    if (child == 0) {
        dup2(ends[1], STDERR_FILENO);
        dup2(open("/dev/null", O_WRONLY), STDOUT_FILENO);
        close(ends[0]);
        close(ends[1]);
        execl(test_tool, "ohmen", "-r", reg, "import", file, "--why", "test", "--by", "test",
              (char *)NULL);
        _exit(127);
    }
    close(ends[1]);
    for (ssize_t n; (n = read(ends[0], buffer, sizeof buffer)) > 0;)
        text_addn(&t, buffer, (size_t)n);
    close(ends[0]);
    ck_assert_int_eq(waitpid(child, &status, 0), child);
    ck_assert(WIFEXITED(status));
    *said = text_str(&t);
    return WEXITSTATUS(status);
}

static void expect_refused(struct arena *a, const char *reg, const char *name)
{
    struct test_state before = test_state(reg);
    const char *file = arena_printf(a, "%s/" BAD "/%s", test_source, name);
    const char *expect =
        test_read(a, arena_printf(a, BAD "/%.*s.expect", (int)strlen(name) - 5, name));
    const char *const files[] = {file, NULL}, *said;
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_msg(test_import(reg, files, &r, &e) == OHMEN_INPUT, "%s: %s", name, e.text);
    ck_assert_ptr_nonnull(r);
    ck_assert_msg(!ohmen_report_diagnostic(r, 1), "a second error: %s", all_diagnostics(a, r));
    expect_line(a, all_diagnostics(a, r), file, expect);
    test_json(a, r);
    test_same_state(reg, &before);
    ck_assert_int_eq(run_tool(a, reg, file, &said), 3);
    expect_line(a, said, file, expect);
    test_same_state(reg, &before);
}

/* The good document so that no bad one leans on it: without its countable unit, which not
 * all of them declare whose settings take the place of its own, and with its relay under
 * another name. */
static const char *plain_good(struct arena *a)
{
    struct text t;
    text_init(&t, a);
    for (const char *s = test_read(a, BAD "/good.yaml"); *s; s++) {
        bool unit = strncmp(s, "section ", 8) == 0, relay = strncmp(s, "RELAY", 5) == 0;
        if (relay)
            text_add(&t, "DEVICE");
        else if (!unit)
            text_byte(&t, *s);
        s += unit ? 7 : relay ? 4 : 0;
    }
    return text_str(&t);
}

START_TEST(bad_documents_are_refused)
{
    struct arena *a = test_arena();
    const char *reg = test_new(a);
    test_import_text(a, reg, plain_good(a));
    DIR *d = opendir(arena_printf(a, "%s/" BAD, test_source));
    size_t n = 0;
    ck_assert_ptr_nonnull(d);
    for (struct dirent *f; (f = readdir(d)) != NULL;) {
        if (!ends_with(f->d_name, ".yaml") || strcmp(f->d_name, "good.yaml") == 0)
            continue;
        expect_refused(a, reg, f->d_name);
        n++;
    }
    closedir(d);
    ck_assert_uint_ge(n, 24);
    arena_free(a);
}
END_TEST

/* The good one comes through, so that no bad one is refused for another reason. */
START_TEST(the_good_document_comes_through)
{
    struct arena *a = test_arena();
    const char *reg = test_new(a), *said;
    const char *file = arena_printf(a, "%s/" BAD "/good.yaml", test_source);
    fflush(stdout);
    ck_assert_int_eq(run_tool(a, reg, file, &said), 0);
    ck_assert_str_eq(said, "");
    ck_assert_uint_eq(test_state(reg).head, 1);
    arena_free(a);
}
END_TEST

void work_bad_tests(Suite *suite)
{
    TCase *t = tcase_create("bad documents");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, bad_documents_are_refused);
    tcase_add_test(t, the_good_document_comes_through);
    suite_add_tcase(suite, t);
}
