/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tables as text: the point, the order in which columns go, wrapping, records. */
#include "report_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"
#include "random.h"

static struct arena *arena;
static struct report report;

static void setup(void)
{
    arena = arena_new(NULL);
    report_init(&report, arena);
}

static void teardown(void)
{
    arena_free(arena);
}

START_TEST(a_small_table)
{
    struct block *b = report_table(&report, "t", "Hazards");
    block_column(&report, b, "id", "Hazard", "", STYLE_PLAIN);
    block_column(&report, b, "f", "Frequency", "1/a", STYLE_FREQUENCY);
    block_column(&report, b, "r", "Risk", "EUR/a", STYLE_MONEY);
    block_column(&report, b, "s", "Share", "", STYLE_PERCENT);
    block_column(&report, b, "late", "Late", "", STYLE_PLAIN)->right = true;
    struct row *row = block_row(&report, b);
    row_text(&report, row, "H-1");
    row_number(&report, row, 2.94e-3, NULL);
    row_number(&report, row, 12345, NULL)->mark = "!";
    row_number(&report, row, 0.9999, NULL);
    row_yes(&report, row, true);
    row = block_row(&report, b);
    row_text(&report, row, "H-22")->mark = "new";
    row_number(&report, row, 0, NULL);
    row_number(&report, row, -600, NULL);
    row_empty(&report, row);
    row_yes(&report, row, false);
    static const char *const expected = "Hazards\n"
                                        "\n"
                                        "Hazard    Frequency                Risk  Share  Late\n"
                                        "                1/a              kEUR/a      %\n"
                                        "----------------------------------------------------\n"
                                        "H-1         2.94e-3  1 in 340 a  12.3 !  99.99   yes\n"
                                        "H-22 new    0        never       -0.6     -       no\n";
    ck_assert_str_eq(text_of(arena, &report, 80, true, false), expected);
}
END_TEST

/* A column of data stands in JSON and CSV, whatever the width; the page marks it. */
START_TEST(columns_of_data_are_not_on_a_page)
{
    struct block *b = report_table(&report, "t", NULL);
    struct text csv, json, html;
    block_column(&report, b, "id", "Hazard", "", STYLE_PLAIN);
    block_column(&report, b, "due", "Due", "", STYLE_PLAIN);
    block_column(&report, b, "late", "Late", "", STYLE_PLAIN)->data = true;
    struct row *row = block_row(&report, b);
    row_text(&report, row, "H-1");
    row_date(&report, row, "2026-05-01")->mark = "overdue";
    row_yes(&report, row, true);
    static const char *const expected = "Hazard  Due\n"
                                        "--------------------------\n"
                                        "H-1     2026-05-01 overdue\n";
    ck_assert_str_eq(text_of(arena, &report, 80, true, false), expected);
    text_init(&csv, arena);
    text_init(&json, arena);
    text_init(&html, arena);
    report_write_csv(&csv, &report);
    report_write_json(&json, &report);
    report_write_html(&html, &report);
    ck_assert_str_eq(text_str(&csv), "id,due,late\r\nH-1,2026-05-01,yes\r\n");
    ck_assert_ptr_nonnull(strstr(text_str(&json), "\"late\": true"));
    ck_assert_ptr_nonnull(strstr(text_str(&html), "overdue"));
    ck_assert_ptr_null(strstr(text_str(&html), "Late"));
}
END_TEST

/* The amounts of one column have one prefix, that of the largest, and three digits each: by
 * hand from the rule of STYLE_MONEY. The second column keeps a prefix with four digits before
 * the point, for 3.2 would be 0.0032 in the next one. */
START_TEST(amounts_of_one_column)
{
    static const struct {
        double net, damage;
    } rows[] = {{12412, 465000}, {1398, 29900},    {8.95, 1571000}, {0, 3204},
                {-32000, 70100}, {-34740, 999600}, {0.4, 57000}};
    struct block *b = report_table(&report, "t", NULL);
    block_column(&report, b, "net", "Net", "EUR", STYLE_MONEY);
    block_column(&report, b, "damage", "Damage", "EUR", STYLE_MONEY);
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        struct row *row = block_row(&report, b);
        row_number(&report, row, rows[i].net, NULL);
        row_number(&report, row, rows[i].damage, NULL);
    }
    static const char *const expected = "      Net   Damage\n"
                                        "     kEUR     kEUR\n"
                                        "------------------\n"
                                        " 12.4       465\n"
                                        "  1.40       29.9\n"
                                        "  0.00895  1570\n"
                                        "  0           3.20\n"
                                        "-32          70.1\n"
                                        "-34.7      1000\n"
                                        "  4e-4       57\n";
    ck_assert_str_eq(text_of(arena, &report, 80, true, false), expected);
}
END_TEST

/* Where the decimal point of the last word of a line is, or would be. */
static size_t point_of(const char *line)
{
    const char *word = strrchr(line, ' ');
    word = word ? word + 1 : line;
    return (size_t)(word - line) + strcspn(word, ".e");
}

START_TEST(numbers_align_on_the_point)
{
    struct random r = random_seed(_i);
    enum number_style style = (enum number_style)(_i % 6);
    struct block *b = report_table(&report, "t", NULL);
    block_column(&report, b, "id", "Id", "", STYLE_PLAIN);
    block_column(&report, b, "x", "x", "", style == STYLE_FREQUENCY ? STYLE_PLAIN : style);
    for (int i = 0; i < 30; i++) {
        struct row *row = block_row(&report, b);
        row_text(&report, row, "id");
        double x = random_log_uniform(&r, 1e-12, 1e12);
        row_number(&report, row, i == 7 ? 0 : i % 3 ? x : -x, NULL);
    }
    struct page_lines lines = lines_of(arena, text_of(arena, &report, 60, _i % 2, false));
    size_t first = lines.n - 30;
    for (size_t i = first; i < lines.n; i++)
        ck_assert_msg(point_of(lines.at[i]) == point_of(lines.at[first]), "%s", lines.at[i]);
}
END_TEST

/* Names that are hard to measure, and the columns that they take, counted by hand: East Asian
 * wide characters and emoji are two, marks that combine none, what is hidden or steers a
 * terminal is written out. */
static const struct {
    const char *name;
    size_t columns;
} hard_names[] = {
    {"plain", 5},
    {"母線保護", 8},
    {"cafe\xcc\x81 e\xcc\x81\xcc\xa3", 6},
    {"שלום", 4},
    {"\xf0\x9f\x91\xa9", 2},
    {"\xf0\x9f\x91\xa9\xe2\x80\x8d\xf0\x9f\x91\xa7", 12}, /* woman \u{200d} girl */
    {"a\xe2\x80\x8b"
     "b",
     10},                 /* a\u{200b}b */
    {"\xe2\x80\xaex", 9}, /* \u{202e}x */
    {"\033[31m", 8},      /* \x1b[31m */
    {"\xc2\x9b"
     "1",
     9},           /* \u{009b}1 */
    {"\t=1+1", 8}, /* \x09=1+1 */
    {"\xff", 1},   /* the sign for what is no UTF-8 */
};

/* Everything behind the name is ASCII: the column of the point follows from its bytes. */
START_TEST(columns_stay_aligned_behind_hard_names)
{
    enum { WIDEST = 12, N = sizeof hard_names / sizeof *hard_names };
    struct block *b = report_table(&report, "t", NULL);
    block_column(&report, b, "name", "Name", "", STYLE_PLAIN);
    block_column(&report, b, "x", "x", "", STYLE_PLAIN);
    for (size_t i = 0; i < N; i++) {
        struct row *row = block_row(&report, b);
        row_text(&report, row, hard_names[i].name);
        row_number(&report, row, 1.25, NULL);
    }
    const char *coloured = text_of(arena, &report, 60, false, true);
    struct page_lines lines = lines_of(arena, without_colour(arena, coloured));
    ck_assert_uint_eq(lines.n, 2 + N);
    for (size_t i = 0; i < N; i++) {
        const char *line = lines.at[2 + i], *blank = strrchr(line, ' ');
        size_t gap = 1;
        while (blank[-1] == ' ')
            blank--, gap++;
        ck_assert_msg(hard_names[i].columns + gap == WIDEST + 2, "%s", line);
        ck_assert_str_eq(blank + gap, "1.25");
    }
}
END_TEST

/* keep of the j-th of 12 columns: every number once, in no order. */
static unsigned keep_of(unsigned j)
{
    return (j * 5) % 12 + 1;
}

static void add_wide_table(void)
{
    struct block *b = report_table(&report, "t", NULL);
    block_column(&report, b, "id", "Id", "", STYLE_PLAIN);
    for (unsigned j = 0; j < 12; j++) {
        const char *key = arena_printf(arena, "k%u", j);
        const char *head = arena_printf(arena, "Col%02u", keep_of(j));
        block_column(&report, b, key, head, "", STYLE_PLAIN)->keep = keep_of(j);
    }
    struct row *row = block_row(&report, b);
    row_text(&report, row, "an-id-of-twenty-two-cc");
    for (unsigned j = 0; j < 12; j++)
        row_number(&report, row, 1.23e-12 * (j + 1), NULL);
}

/* The columns that go are always those with the smallest keep; each is either a head or
 * named below, and the page is used: one more column would not have fitted. */
START_TEST(the_least_columns_go_first)
{
    add_wide_table();
    for (unsigned width = 60; width <= 200; width++) {
        const char *s = text_of(arena, &report, width, true, false);
        struct page_lines lines = lines_of(arena, s);
        const char *below = strstr(s, "Left out for want of width:");
        unsigned gone = 0;
        check_page(arena, s, width, true);
        for (unsigned keep = 1; keep <= 12; keep++) {
            const char *head = arena_printf(arena, "Col%02u", keep);
            bool shown = strstr(lines.at[0], head) != NULL;
            bool named = below && strstr(below, head);
            ck_assert_msg(shown != named, "width %u, column %s:\n%s", width, head, s);
            ck_assert_msg(shown || gone == keep - 1, "width %u: %s went too early", width, head);
            gone += !shown;
        }
        ck_assert_msg(gone == 0 || utf8_columns(lines.at[1]) + 2 + 9 > width, "%u: %s", width, s);
        ck_assert_msg(strstr(s, "an-id-of-twenty-two-cc"), "width %u: the id was broken", width);
    }
}
END_TEST

/* The words of the text column, in order, from the lines of a table of two columns. */
static const char *words_of_column(const struct page_lines *lines, size_t from, size_t column)
{
    struct text t;
    text_init(&t, arena);
    for (size_t i = from; i < lines->n; i++)
        if (strlen(lines->at[i]) > column)
            text_printf(&t, "%s%s", t.n ? " " : "", lines->at[i] + column);
    return text_str(&t);
}

START_TEST(texts_wrap_and_lose_nothing)
{
    static const char *const words =
        "A description of what happens that is much longer than any page is wide, with "
        "H-BUS1-NORTH in it, and with enough further words that even two hundred columns cannot "
        "hold it: the "
        "breaker of the incomer stays closed until the backup of the grid clears the fault.";
    struct block *b = report_table(&report, "t", NULL);
    block_column(&report, b, "id", "Id", "", STYLE_PLAIN);
    block_column(&report, b, "what", "What", "", STYLE_PLAIN);
    struct row *row = block_row(&report, b);
    row_text(&report, row, "H-1");
    row_text(&report, row, words);
    for (unsigned width = 60; width <= 200; width++) {
        struct page_lines lines = lines_of(arena, text_of(arena, &report, width, true, false));
        ck_assert_str_eq(words_of_column(&lines, 2, 5), words);
        ck_assert_uint_le(lines.n, 2 + strlen(words) / (width - 5 - 14) + 1);
    }
}
END_TEST

START_TEST(frequencies_keep_their_period_when_there_is_room)
{
    struct block *b = report_table(&report, "t", NULL);
    block_column(&report, b, "id", "Id", "", STYLE_PLAIN);
    for (int j = 0; j < 4; j++)
        block_column(&report, b, arena_printf(arena, "f%d", j), "F", "1/a", STYLE_FREQUENCY);
    struct row *row = block_row(&report, b);
    row_text(&report, row, "H-1");
    for (int j = 0; j < 4; j++)
        row_number(&report, row, 2.94e-3, NULL);
    /* 3 + 4 * (2 + 7 + 2 + 10) = 87 columns with the periods */
    ck_assert(!strstr(text_of(arena, &report, 86, true, false), "1 in 340 a"));
    ck_assert(strstr(text_of(arena, &report, 87, true, false), "1 in 340 a"));
}
END_TEST

/* Thirty columns that must all stay: no table, but a line a cell. */
START_TEST(what_cannot_be_a_table_becomes_records)
{
    struct block *b = report_table(&report, "t", NULL);
    for (int j = 0; j < 30; j++)
        block_column(&report, b, arena_printf(arena, "k%d", j), arena_printf(arena, "Head%02d", j),
                     "EUR", STYLE_MONEY);
    struct row *row = block_row(&report, b);
    for (int j = 0; j < 30; j++)
        row_number(&report, row, 12345 + 1000 * j, NULL)->mark = "!";
    const char *s = text_of(arena, &report, 100, true, false);
    check_page(arena, s, 100, true);
    ck_assert(strstr(s, "Head00  12.3 kEUR !\n") && strstr(s, "Head29  41.3 kEUR !\n"));
}
END_TEST

START_TEST(tables_without_rows_or_columns)
{
    struct block *b = report_table(&report, "t", "Empty");
    ck_assert_str_eq(text_of(arena, &report, 60, true, false), "Empty\n\n");
    block_column(&report, b, "a", "A", "x", STYLE_PLAIN);
    ck_assert_str_eq(text_of(arena, &report, 60, true, false), "Empty\n\nA\nx\n--\n(none)\n");
}
END_TEST

START_TEST(numbers_that_are_no_numbers)
{
    struct block *b = report_table(&report, "t", NULL);
    block_column(&report, b, "x", "Ratio", "", STYLE_RATIO);
    row_number(&report, block_row(&report, b), 1.25, NULL);
    row_number(&report, block_row(&report, b), INFINITY, NULL);
    row_text(&report, block_row(&report, b), "n/a");
    row_empty(&report, block_row(&report, b));
    row_number(&report, block_row(&report, b), -0.0, NULL);
    ck_assert_str_eq(text_of(arena, &report, 60, false, false),
                     "   Ratio\n────────\n    1.25\ninfinite\n     n/a\n    –\n    0\n");
}
END_TEST

Suite *suite_report_table(void)
{
    Suite *s = suite_create("report table");
    TCase *t = tcase_create("table");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, a_small_table);
    tcase_add_test(t, columns_of_data_are_not_on_a_page);
    tcase_add_test(t, amounts_of_one_column);
    tcase_add_test(t, columns_stay_aligned_behind_hard_names);
    tcase_add_loop_test(t, numbers_align_on_the_point, 0, 12);
    tcase_add_test(t, the_least_columns_go_first);
    tcase_add_test(t, texts_wrap_and_lose_nothing);
    tcase_add_test(t, frequencies_keep_their_period_when_there_is_room);
    tcase_add_test(t, what_cannot_be_a_table_becomes_records);
    tcase_add_test(t, tables_without_rows_or_columns);
    tcase_add_test(t, numbers_that_are_no_numbers);
    suite_add_tcase(s, t);
    return s;
}
