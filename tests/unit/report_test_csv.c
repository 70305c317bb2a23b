/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tables as CSV, as exact bytes (RFC 4180, section 2). */
#include "report_test.h"

static void add_text_row(struct report *r, struct block *b, const char *x, const char *y)
{
    struct row *row = block_row(r, b);
    row_text(r, row, x);
    row_text(r, row, y);
}

START_TEST(quotes_and_guards)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    struct text t;
    report_init(&r, a);
    text_init(&t, a);
    struct block *b = report_table(&r, "t", "Title");
    block_column(&r, b, "x", "X", "", STYLE_PLAIN);
    block_column(&r, b, "y", "Y", "", STYLE_PLAIN);
    add_text_row(&r, b, "plain", "a,b");
    add_text_row(&r, b, "say \"no\"", " blank");
    add_text_row(&r, b, "=1+1", "@cmd");
    add_text_row(&r, b, "-1.5", "+2e-3");
    add_text_row(&r, b, "-x", "+");
    add_text_row(&r, b, "=\"a\"", "two\nlines");
    add_text_row(&r, b, "\tx", "\rx");
    add_text_row(&r, b, NULL, "\033[1mé 母");
    report_write_csv(&t, &r);
    ck_assert_str_eq(text_str(&t), "x,y\r\n"
                                   "plain,\"a,b\"\r\n"
                                   "\"say \"\"no\"\"\",\" blank\"\r\n"
                                   "'=1+1,'@cmd\r\n"
                                   "-1.5,+2e-3\r\n"
                                   "'-x,'+\r\n"
                                   "\"'=\"\"a\"\"\",two\\x0alines\r\n"
                                   "\\x09x,\\x0dx\r\n"
                                   ",\\x1b[1mé 母\r\n");
    arena_free(a);
}
END_TEST

START_TEST(tables_units_and_types)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    struct text t;
    report_init(&r, a);
    text_init(&t, a);
    report_heading(&r, 1, "Not a table");
    report_note(&r, "n", "neither");
    struct block *b = report_table(&r, "t", NULL);
    block_column(&r, b, "risk", "Risk", "EUR/a", STYLE_MONEY)->keep = 1;
    block_column(&r, b, "share", "Share", "", STYLE_PERCENT);
    block_column(&r, b, "n", "N", "", STYLE_PLAIN);
    block_column(&r, b, "late", "Late", "", STYLE_PLAIN);
    struct row *row = block_row(&r, b);
    row_number(&r, row, 12345.678, "f")->mark = "!";
    row_number(&r, row, 0.123, NULL);
    row_count(&r, row, 42);
    row_yes(&r, row, false);
    block_row(&r, b);
    b = report_table(&r, "u", NULL);
    block_column(&r, b, "only", "Only", "", STYLE_PLAIN);
    row_empty(&r, block_row(&r, b));
    row_number(&r, block_row(&r, b), -0.0, NULL);
    report_write_csv(&t, &r);
    ck_assert_str_eq(text_str(&t), "risk-EUR/a,share,n,late\r\n"
                                   "12345.678,0.123,42,no\r\n"
                                   ",,,\r\n"
                                   "\r\n"
                                   "only\r\n"
                                   "\"\"\r\n"
                                   "0\r\n");
    arena_free(a);
}
END_TEST

/* A grid is a table of its marks, parted from the table before it. */
START_TEST(grid_marks)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    struct text t;
    report_init(&r, a);
    text_init(&t, a);
    struct block *b = report_table(&r, "t", "Title");
    block_column(&r, b, "x", "X", "", STYLE_PLAIN);
    row_text(&r, block_row(&r, b), "1");
    b = report_grid(&r, "g", "Grid", "EUR");
    grid_add_mark(&r, b, "1", "Fault, today", 2.385e-3, 1.25e6)->arrow_from = -1;
    grid_add_mark(&r, b, "1a", "=Fault", 0, 40)->arrow_from = 0;
    grid_add_mark(&r, b, "1b", "half", 1e-3, 20)->part_of = 0;
    report_grid(&r, "empty", "No marks", "EUR");
    report_write_csv(&t, &r);
    ck_assert_str_eq(text_str(&t), "x\r\n1\r\n\r\n"
                                   "mark,name,frequency-1/a,damage-EUR,from,part-of\r\n"
                                   "1,\"Fault, today\",0.002385,1250000,,\r\n"
                                   "1a,'=Fault,0,40,1,\r\n"
                                   "1b,half,0.001,20,,1\r\n");
    arena_free(a);
}
END_TEST

Suite *suite_report_csv(void)
{
    Suite *s = suite_create("report csv");
    TCase *t = tcase_create("csv");
    tcase_add_test(t, quotes_and_guards);
    tcase_add_test(t, tables_units_and_types);
    tcase_add_test(t, grid_marks);
    suite_add_tcase(s, t);
    return s;
}
