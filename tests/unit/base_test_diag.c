/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Diagnostics (order, doubles, limit) and the error object (first cause, cut). */
#include <errno.h>
#include <locale.h>
#include <string.h>

#include "base/diag.h"
#include "base/error.h"
#include "base/utf8.h"
#include "base_test.h"

START_TEST(sorted_by_file_line_column)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    diags_file(&d, "z.yaml");
    diag_add(&d, (struct place){.file = "a.yaml", .line = 2, .column = 1}, "four");
    diag_add(&d, (struct place){.file = "z.yaml", .line = 10, .column = 1}, "three");
    diag_add(&d, (struct place){.file = "z.yaml", .line = 9, .column = 12}, "one");
    diag_add(&d, (struct place){.file = "z.yaml", .line = 9, .column = 12}, "two, %s", "stable");
    diag_add(&d, (struct place){.file = "z.yaml", .line = 9, .column = 2}, "zero");
    diags_sort(&d);
    static const char *const lines[] = {"z.yaml:9:2: zero", "z.yaml:9:12: one",
                                        "z.yaml:9:12: two, stable", "z.yaml:10:1: three",
                                        "a.yaml:2:1: four"};
    ck_assert_uint_eq(d.list.n, 5);
    for (int i = 0; i < 5; i++)
        ck_assert_str_eq(diag_line(a, &d.list.at[i]), lines[i]);
    arena_free(a);
}
END_TEST

START_TEST(places_in_the_register)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    diag_add(&d, (struct place){.path = "parts/P-1/size"}, "too small");
    diag_add(&d, (struct place){.path = "parts/P-2/size"}, "too small");
    diag_add(&d, (struct place){.file = "register", .path = "parts/P-2/size"}, "too small");
    diag_add(&d, (struct place){0}, "empty");
    ck_assert_uint_eq(d.count, 3);
    ck_assert_str_eq(diag_line(a, &d.list.at[0]), "parts/P-1/size: too small");
    ck_assert_str_eq(diag_line(a, &d.list.at[1]), "parts/P-2/size: too small");
    ck_assert_str_eq(diag_line(a, &d.list.at[2]), "register: empty");
    arena_free(a);
}
END_TEST

START_TEST(doubles_are_dropped)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct place p = {.file = "a.yaml", .line = 3, .column = 7};
    diag_add(&d, p, "unknown key");
    diag_add(&d, p, "unknown key");
    p.path = "told/otherwise";
    diag_add(&d, p, "unknown key");
    ck_assert_uint_eq(d.count, 1);
    diag_add(&d, p, "another text");
    p.column = 8;
    diag_add(&d, p, "unknown key");
    p.file = "b.yaml";
    diag_add(&d, p, "unknown key");
    ck_assert_uint_eq(d.count, 4);
    ck_assert_uint_eq(d.list.n, 4);
    arena_free(a);
}
END_TEST

START_TEST(kept_up_to_the_limit)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    for (uint32_t i = 0; i < DIAG_KEPT + 1; i++) {
        ck_assert_uint_eq(d.count, i);
        ck_assert_uint_eq(d.list.n, i);
        diag_add(&d, (struct place){.file = "a.yaml", .line = DIAG_KEPT + 1 - i, .column = 1}, "x");
    }
    ck_assert_uint_eq(d.list.n, DIAG_KEPT);
    ck_assert_uint_eq(d.count, DIAG_KEPT + 1);
    diags_sort(&d);
    for (size_t i = 0; i < DIAG_KEPT; i++)
        ck_assert_uint_eq(d.list.at[i].place.line, i + 2);
    arena_free(a);
}
END_TEST

START_TEST(first_cause_wins)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(error_set(&e, OHMEN_INPUT, "line %d is wrong", 7), OHMEN_INPUT);
    ck_assert_int_eq(error_set(&e, OHMEN_IO, "cannot go on"), OHMEN_IO);
    ck_assert_int_eq(e.status, OHMEN_INPUT);
    ck_assert_str_eq(e.text, "line 7 is wrong");
    ck_assert_int_eq(error_set(NULL, OHMEN_IO, "nobody listens"), OHMEN_IO);
}
END_TEST

/* A text of `size` bytes: `lead` times x, then as many euro signs as fit. */
static void euro_text(char *text, size_t lead, size_t size)
{
    memset(text, 'x', lead);
    size_t n = lead;
    for (; n + 3 <= size; n += 3)
        memcpy(text + n, "\xE2\x82\xAC", 3);
    text[n] = 0;
}

START_TEST(long_texts_are_cut_between_characters)
{
    for (size_t lead = 0; lead < 3; lead++) {
        char text[1100];
        euro_text(text, lead, sizeof text - 1);
        ohmen_error e = OHMEN_ERROR_INIT;
        error_set(&e, OHMEN_INPUT, "%s", text);
        size_t n = strlen(e.text);
        ck_assert_uint_le(n, OHMEN_ERROR_TEXT - 1);
        ck_assert_uint_gt(n, OHMEN_ERROR_TEXT - 4);
        ck_assert_str_eq(e.text + n - 3, "...");
        ck_assert_uint_eq(utf8_check(e.text, n), n);
        ck_assert_mem_eq(e.text, text, n - 3);
    }
}
END_TEST

START_TEST(texts_at_the_limit_are_whole)
{
    for (size_t more = 0; more < 2; more++) {
        char text[OHMEN_ERROR_TEXT + 1];
        memset(text, 'x', sizeof text);
        text[OHMEN_ERROR_TEXT - 1 + more] = 0;
        ohmen_error e = OHMEN_ERROR_INIT;
        error_set(&e, OHMEN_INPUT, "%s", text);
        ck_assert_uint_eq(strlen(e.text), OHMEN_ERROR_TEXT - 1);
        ck_assert_str_eq(e.text + OHMEN_ERROR_TEXT - 4, more ? "..." : "xxx");
    }
}
END_TEST

START_TEST(each_status_has_an_exit_and_a_text)
{
    static const int exits[] = {
#define X(name, exit_status, text) exit_status,
        OHMEN_STATUS_LIST(X)
#undef X
    };
    int n = sizeof exits / sizeof exits[0];
    for (int i = 0; i < n; i++) {
        ck_assert_int_eq(ohmen_status_exit((ohmen_status)i), exits[i]);
        ck_assert(exits[i] >= 0 && exits[i] < 126); /* beyond: the shell's own */
        ck_assert_uint_gt(strlen(ohmen_status_text((ohmen_status)i)), 0);
        for (int k = 0; k < i; k++)
            ck_assert_int_ne(exits[i], exits[k]);
    }
    ck_assert_int_eq(ohmen_status_exit((ohmen_status)n), 70);
    ck_assert_str_eq(ohmen_status_text((ohmen_status)n), ohmen_status_text(OHMEN_INTERNAL));
}
END_TEST

START_TEST(system_errors_speak_english)
{
    ck_assert_ptr_nonnull(setlocale(LC_ALL, "de_DE.UTF-8"));
    char text[64];
    strncpy(text, error_system(ENOENT), sizeof text - 1);
    text[sizeof text - 1] = 0;
    setlocale(LC_ALL, "C");
    ck_assert_str_eq(text, "No such file or directory");
}
END_TEST

Suite *suite_diag(void)
{
    Suite *s = suite_create("diagnostics and errors");
    TCase *t = tcase_create("diagnostics");
    tcase_add_test(t, sorted_by_file_line_column);
    tcase_add_test(t, places_in_the_register);
    tcase_add_test(t, doubles_are_dropped);
    tcase_add_test(t, kept_up_to_the_limit);
    suite_add_tcase(s, t);
    t = tcase_create("errors");
    tcase_add_test(t, first_cause_wins);
    tcase_add_test(t, long_texts_are_cut_between_characters);
    tcase_add_test(t, texts_at_the_limit_are_whole);
    tcase_add_test(t, each_status_has_an_exit_and_a_text);
    tcase_add_test(t, system_errors_speak_english);
    suite_add_tcase(s, t);
    return s;
}
