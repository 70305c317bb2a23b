/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the suites of the report layer. A run without a test is a failure. */
#include "report_test.h"

#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"

const char *report_golden_folder;

const char *text_of(struct arena *a, const struct report *r, unsigned width, bool ascii,
                    bool colour)
{
    struct text t;
    text_init(&t, a);
    report_write_text(&t, r, &(struct report_format){width, ascii, colour});
    return text_str(&t);
}

const char *without_colour(struct arena *a, const char *s)
{
    struct text t;
    text_init(&t, a);
    while (*s) {
        if (s[0] == '\033' && s[1] == '[') {
            s += 2 + strspn(s + 2, "0123456789;");
            ck_assert_int_eq(*s++, 'm');
        } else {
            text_byte(&t, *s++);
        }
    }
    return text_str(&t);
}

struct page_lines lines_of(struct arena *a, const char *s)
{
    struct page_lines l = {0};
    for (const char *p = s; *p; p++)
        l.n += *p == '\n';
    l.at = NEW_ARRAY(a, l.n + 1, char *);
    for (size_t i = 0; i < l.n; i++) {
        size_t n = strcspn(s, "\n");
        l.at[i] = arena_strn(a, s, n);
        s += n + 1;
    }
    ck_assert_msg(*s == 0, "the last line has no end");
    return l;
}

void check_page(struct arena *a, const char *s, unsigned width, bool ascii)
{
    struct page_lines lines = lines_of(a, s);
    for (size_t i = 0; i < lines.n; i++) {
        const char *line = lines.at[i];
        size_t n = strlen(line);
        ck_assert_msg(utf8_check(line, n) == n, "not UTF-8: %s", line);
        ck_assert_msg(utf8_columns(line) <= width, "%zu columns of %u: %s", utf8_columns(line),
                      width, line);
        ck_assert_msg(n == 0 || line[n - 1] != ' ', "a blank at the end: %s", line);
        ck_assert_msg(text_equal(utf8_clean(a, line, false), line), "not clean: %s", line);
        for (size_t k = 0; ascii && k < n; k++)
            ck_assert_msg((unsigned char)line[k] < 0x80, "not ASCII: %s", line);
    }
}

int main(int argc, char **argv)
{
    report_golden_folder = argc > 1 ? argv[1] : "tests/golden/report";
    SRunner *sr = srunner_create(suite_report_number());
    srunner_add_suite(sr, suite_report_json());
    srunner_add_suite(sr, suite_report_csv());
    srunner_add_suite(sr, suite_report_table());
    srunner_add_suite(sr, suite_report_page());
    srunner_add_suite(sr, suite_report_grid());
    srunner_add_suite(sr, suite_report_curve());
    srunner_add_suite(sr, suite_report_swings());
    srunner_add_suite(sr, suite_report_map());
    srunner_add_suite(sr, suite_report_spreads());
    srunner_add_suite(sr, suite_report_html());
    srunner_add_suite(sr, suite_report_golden());
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
