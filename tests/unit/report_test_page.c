/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Properties of whole pages over random reports full of nasty texts, at every width. */
#include "report_test.h"

#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "failmem.h"
#include "random.h"

static const char *const nasty[] = {
    "",
    " ",
    "   ",
    "plain",
    "H-BUS1",
    "two words",
    "\033[31mred\033[0m",
    "tab\tand\nnewline\r",
    "\xe2\x80\xae right to left \xe2\x80\xac",
    "母線保護装置の不動作",
    "e\xcc\x81\xcc\x81 combined",
    "\xcc\x81",
    "zero\xe2\x80\x8bwidth",
    "\xf0\x9f\x98\x80 face",
    "bad \xff\xc3 bytes",
    "é",
    "-1",
    "=1+1",
    "a_very_long_word_without_any_blank_that_is_wider_than_most_columns_of_a_table",
    "many short words that must be wrapped on to several lines since they cannot all stand on one",
    "\x7f\xc2\x85",
    "wide 母 between",
    "1e5",
    "\xe2\x80\xa8separator",
    "soft\xc2\xadhyphen",
    "母",
    "\xcc\x88母線",
    "!",
    "100 % \\u{1234} \"quoted\" 'x'"};

static const double extremes[] = {
    0, -0.0, 1, 1e-12, 5e-324, 1.7976931348623157e308, -3.5e-7, 123456789, 0.9999999, 99950, -1e15};

static const char *some_text(struct random *r)
{
    return random_pick(r, nasty);
}

static double some_number(struct random *r)
{
    return random_index(r, 3) ? random_log_uniform(r, 1e-9, 1e9) : random_pick(r, extremes);
}

static void add_some_cell(struct random *r, struct report *report, struct row *row, bool number)
{
    struct cell *c;
    switch (random_index(r, 10)) {
    case 0: c = row_empty(report, row); break;
    case 1: c = row_count(report, row, random_next(r)); break;
    case 2: c = row_yes(report, row, random_index(r, 2)); break;
    case 3: c = row_date(report, row, "2027-03-31"); break;
    case 4: c = row_text(report, row, some_text(r)); break;
    default:
        c = number ? row_number(report, row, some_number(r), "figure")
                   : row_text(report, row, some_text(r));
    }
    if (random_index(r, 6) == 0)
        c->mark = random_index(r, 3) ? "!" : some_text(r);
}

static void add_some_table(struct random *r, struct report *report)
{
    struct block *b = report_table(report, "table", some_text(r));
    bool number[12];
    size_t columns = random_index(r, 12) + 1, rows = random_index(r, 6);
    for (size_t j = 0; j < columns; j++) {
        number[j] = random_index(r, 2);
        struct column *c = block_column(report, b, arena_printf(report->arena, "k%zu", j),
                                        some_text(r), random_index(r, 3) ? "EUR/a" : some_text(r),
                                        (enum number_style)random_index(r, 6));
        c->right = random_index(r, 2);
        c->keep = (unsigned)random_index(r, 4);
    }
    for (size_t i = 0; i < rows; i++) {
        struct row *row = block_row(report, b);
        for (size_t j = 0; j < columns - random_index(r, 2); j++)
            add_some_cell(r, report, row, number[j]);
    }
}

static void add_some_pairs(struct random *r, struct report *report)
{
    struct block *b = report_pairs(report, "pairs", some_text(r));
    for (size_t i = random_index(r, 5); i-- > 0;) {
        struct row *row = block_pair(report, b, some_text(r));
        if (random_index(r, 2))
            add_some_cell(r, report, row, false);
        else
            pair_number(report, row, some_number(r), some_text(r),
                        (enum number_style)random_index(r, 6), NULL)
                ->mark = some_text(r);
    }
}

static void add_some_grid(struct random *r, struct report *report)
{
    struct block *b =
        report_grid(report, "grid", some_text(r), random_index(r, 2) ? "EUR" : some_text(r));
    size_t n = random_index(r, 12);
    for (size_t i = 0; i < n; i++) {
        struct grid_mark *m = grid_add_mark(report, b, some_text(r), some_text(r),
                                            fabs(some_number(r)), fabs(some_number(r)));
        m->arrow_from = (int)random_index(r, n + 1) - 1;
    }
    for (size_t i = random_index(r, 3); i-- > 0;)
        grid_add_line(report, b, some_text(r), random_log_uniform(r, 1e-3, 1e6), some_text(r));
}

static double drawable(double x)
{
    return fabs(x) <= 1e300 ? x : 2.385;
}

static void add_some_curve(struct random *r, struct report *report)
{
    struct block *b = report_curve(report, "curve", some_text(r));
    curve_set_x(report, b, "x", some_text(r), some_text(r),
                (enum number_style)random_index(r, 7))
        ->log = random_index(r, 2);
    struct curve_axis *y = curve_set_y(report, b, "y", some_text(r), some_text(r),
                                       (enum number_style)random_index(r, 7));
    y->log = random_index(r, 2);
    y->from_data = random_index(r, 2);
    for (size_t i = random_index(r, 4); i-- > 0;) {
        struct curve_line *l = curve_add_line(report, b, some_text(r), some_text(r));
        double x = drawable(some_number(r));
        for (size_t k = random_index(r, 20); k-- > 0; x = fmax(x, drawable(some_number(r))))
            curve_add_point(report, l, x, drawable(some_number(r)));
    }
    for (size_t i = random_index(r, 4); i-- > 0;)
        curve_add_mark(report, b, some_text(r), drawable(some_number(r)),
                       drawable(some_number(r)));
}

static void fill_at_random(struct random *r, struct report *report)
{
    for (size_t i = random_index(r, 6) + 1; i-- > 0;) {
        switch (random_index(r, 6)) {
        case 0: report_heading(report, (int)random_index(r, 3) + 1, some_text(r)); break;
        case 1:
            report_note(report, "note", "%s %s\n  %s\n\n%s", some_text(r), some_text(r),
                        some_text(r), some_text(r));
            break;
        case 2: add_some_pairs(r, report); break;
        case 3: add_some_table(r, report); break;
        case 4: add_some_grid(r, report); break;
        case 5: add_some_curve(r, report); break;
        }
    }
}

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
