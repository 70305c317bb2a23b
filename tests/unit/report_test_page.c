/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Properties of whole pages over random reports full of nasty texts, at every width. */
#include "report_test.h"

#include <string.h>

#include "base/utf8.h"
#include "failmem.h"
#include "report_test_random.h"

START_TEST(no_line_is_too_wide)
{
    struct arena *a = arena_new(NULL);
    struct random r = random_seed(1000 + (uint64_t)_i);
    struct report report;
    report_init(&report, a);
    fill_at_random(&r, &report);
    for (unsigned width = 60; width <= 200; width++) {
        struct arena *scratch = arena_child(a);
        bool ascii = (width + (unsigned)_i) % 2;
        const char *s = text_of(scratch, &report, width, ascii, false);
        check_page(scratch, s, width, ascii);
        const char *coloured = text_of(scratch, &report, width, ascii, true);
        ck_assert_str_eq(without_colour(scratch, coloured), s);
        arena_free(scratch);
    }
    arena_free(a);
}
END_TEST

START_TEST(colour_is_used_and_only_when_asked)
{
    struct arena *a = arena_new(NULL);
    struct report report;
    report_init(&report, a);
    report_heading(&report, 1, "Head");
    struct block *b = report_pairs(&report, "p", NULL);
    pair_number(&report, block_pair(&report, b, "Risk"), 1, "EUR", STYLE_MONEY, NULL)->mark = "!";
    ck_assert_str_eq(text_of(a, &report, 60, true, true),
                     "\033[1mHead\033[0m\n====\n\nRisk  1 EUR \033[1;31m!\033[0m\n");
    ck_assert(!strchr(text_of(a, &report, 60, true, false), '\033'));
    arena_free(a);
}
END_TEST

START_TEST(notes_are_filled_and_kept_lines_kept)
{
    struct arena *a = arena_new(NULL);
    struct report report;
    report_init(&report, a);
    report_note(&report, "n", "one\ntwo three\n  kept   as is\n\nand %s",
                "four five six seven eight nine ten eleven twelve thirteen");
    ck_assert_str_eq(text_of(a, &report, 60, true, false),
                     "one two three\n  kept   as is\n\n"
                     "and four five six seven eight nine ten eleven twelve\nthirteen\n");
    arena_free(a);
}
END_TEST

START_TEST(pairs_stand_side_by_side)
{
    struct arena *a = arena_new(NULL);
    struct report report;
    report_init(&report, a);
    struct block *b = report_pairs(&report, "p", NULL);
    pair_number(&report, block_pair(&report, b, "Frequency"), 2.94e-3, "1/a", STYLE_FREQUENCY, "f");
    pair_number(&report, block_pair(&report, b, "Risk"), 12345, "EUR/a", STYLE_MONEY, "r");
    pair_number(&report, block_pair(&report, b, "On demand"), 0.0123, "", STYLE_PERCENT, "p");
    row_count(&report, block_pair(&report, b, "Faults"), 123456);
    row_yes(&report, block_pair(&report, b, "Signed"), false);
    block_pair(&report, b, "Nothing");
    ck_assert_str_eq(text_of(a, &report, 60, false, false), "Frequency  2.94e-3 /a, 1 in 340 a\n"
                                                            "Risk       12.3 kEUR/a\n"
                                                            "On demand  1.23 %\n"
                                                            "Faults     123456\n"
                                                            "Signed     no\n"
                                                            "Nothing    –\n");
    arena_free(a);
}
END_TEST

/* Builds and writes all kinds with the k-th allocation failing. */
static bool write_all(const struct mem *mem)
{
    jmp_buf out_of_memory;
    struct arena *a = arena_new(mem);
    if (!a)
        return false;
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &out_of_memory);
    struct random r = random_seed(42);
    struct report report;
    struct text t;
    report_init(&report, a);
    text_init(&t, a);
    add_some_pairs(&r, &report);
    add_some_table(&r, &report);
    add_some_grid(&r, &report);
    report_write_text(&t, &report, &(struct report_format){80, false, true});
    report_write_json(&t, &report);
    report_write_csv(&t, &report);
    add_some_curve(&r, &report);
    report_write_html(&t, &report);
    arena_free(a);
    return true;
}

START_TEST(memory_runs_out_cleanly)
{
    for (size_t k = 0;; k++) {
        struct failmem f;
        failmem_init(&f, k);
        bool done = write_all(&f.mem);
        failmem_check(&f);
        ck_assert(done == (f.failed == 0));
        if (done) {
            ck_assert_uint_gt(k, 3);
            break;
        }
    }
}
END_TEST

Suite *suite_report_page(void)
{
    Suite *s = suite_create("report page");
    TCase *t = tcase_create("page");
    tcase_set_timeout(t, 120);
    tcase_add_loop_test(t, no_line_is_too_wide, 0, 24);
    tcase_add_test(t, colour_is_used_and_only_when_asked);
    tcase_add_test(t, notes_are_filled_and_kept_lines_kept);
    tcase_add_test(t, pairs_stand_side_by_side);
    tcase_add_test(t, memory_runs_out_cleanly);
    suite_add_tcase(s, t);
    return s;
}
