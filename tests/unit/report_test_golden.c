/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One invented report as text at four widths, as JSON and as CSV, compared with the files
 * in tests/golden/report. With OHMEN_ACCEPT=1 in the environment the files are
 * written anew instead: read the difference before you keep it. */
#include "report_test.h"

#include <stdlib.h>
#include <string.h>

#include "base/file.h"

static const struct hazard {
    const char *id, *name;
    double f, d;
    unsigned n;
    const char *mark;
} hazards[] = {
    {"H-BUS1", "Fault on busbar 1 that is cleared late", 2.94e-3, 4.2e6, 12, "!"},
    {"H-FEED-NORTH", "Feeder breaker fails to open", 0.0213, 185000, 3, NULL},
    {"H-TR2", "Inner fault of transformer 2, 母線保護 not tested", 1.2e-12, 23.4e6, 0, NULL},
    {"H-ROUTINE", "Unwanted operation on an outer fault", 3.12, 900, 140, NULL},
    {"H-NONE", "Nothing", 0, 0, 0, NULL},
};

static void add_summary(struct report *r)
{
    report_heading(r, 1, "Harbour: register of risks");
    struct block *b = report_pairs(r, "title", NULL);
    row_text(r, block_pair(r, b, "Register"), "harbour.ohmen");
    row_date(r, block_pair(r, b, "Date of data"), "2027-03-31");
    pair_number(r, block_pair(r, b, "Risk of all hazards"), 123456, "EUR/a", STYLE_MONEY, "risk")
        ->mark = "!";
    pair_number(r, block_pair(r, b, "Frequency of a busbar fault"), 2.94e-3, "1/a",
                STYLE_FREQUENCY, "H-BUS1.frequency");
    pair_number(r, block_pair(r, b, "Failure on demand"), 0.0123, "", STYLE_PERCENT, "p");
    report_note(r, "intro", "The figures rest on faults and tests up to the date of data. A rate "
                            "that was learnt from two faults in nine years is not a number but a "
                            "distribution.\n\n  ! : above the criterion, café included\n");
}

static void add_hazards(struct report *r)
{
    report_heading(r, 2, "Hazards");
    struct block *b = report_table(r, "hazards", "Hazards by risk");
    block_column(r, b, "id", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN);
    block_column(r, b, "frequency", "Frequency", "1/a", STYLE_FREQUENCY)->keep = 3;
    block_column(r, b, "damage", "Expected damage", "EUR", STYLE_MONEY)->keep = 2;
    block_column(r, b, "risk", "Risk", "EUR/a", STYLE_MONEY);
    block_column(r, b, "share", "Share of all risk", "", STYLE_PERCENT)->keep = 1;
    block_column(r, b, "tests", "Tests", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < sizeof hazards / sizeof *hazards; i++) {
        const struct hazard *h = &hazards[i];
        struct row *row = block_row(r, b);
        row_text(r, row, h->id);
        row_text(r, row, h->name);
        row_number(r, row, h->f, arena_printf(r->arena, "%s.frequency", h->id));
        if (i == 3)
            row_empty(r, row);
        else
            row_number(r, row, h->d, NULL);
        row_number(r, row, h->f * h->d, arena_printf(r->arena, "%s.risk", h->id))->mark = h->mark;
        row_number(r, row, h->f * h->d / 20000, NULL);
        row_count(r, row, h->n);
    }
}

static void add_picture(struct report *r)
{
    report_heading(r, 3, "Options for busbar 1");
    struct block *b = report_grid(r, "grid", "Risk today and with each option", "EUR");
    grid_add_mark(r, b, "BUS1", "Fault on busbar 1", 2.94e-3, 4.2e6);
    grid_add_mark(r, b, "a", "fit 87B to busbar 1", 2.5e-3, 2.1e5)->arrow_from = 0;
    grid_add_mark(r, b, "b", "test twice a year", 2e-4, 4.2e6)->arrow_from = 0;
    grid_add_mark(r, b, "FEED", "Feeder breaker fails to open", 0.0213, 185000);
    grid_add_mark(r, b, "TR2", "Inner fault of transformer 2", 2e-5, 2.3e7);
    grid_add_mark(r, b, "c", "as b, but cheap", 2.01e-4, 4.1e6)->arrow_from = 0;
    grid_add_mark(r, b, "d", "a and b together", 1e-4, 3e4)->arrow_from = 0;
    grid_add_mark(r, b, "ROUT", "Unwanted operation", 3.12, 900);
    grid_add_mark(r, b, "NONE", "Nothing ever", 0, 900);
    grid_add_line(r, b, "intolerable above 30 kEUR/a", 3e4, "#");
    grid_add_line(r, b, "acceptable", 300, "=");
}

static struct report sample(struct arena *a)
{
    struct report r;
    report_init(&r, a);
    add_summary(&r);
    add_hazards(&r);
    add_picture(&r);
    return r;
}

static void compare(struct arena *a, const char *name, const char *s, size_t n)
{
    const char *path = arena_printf(a, "%s/%s", report_golden_folder, name);
    const char *accept = getenv("OHMEN_ACCEPT");
    char *expected;
    size_t size;
    ohmen_error e = OHMEN_ERROR_INIT;
    if (accept && text_equal(accept, "1"))
        ck_assert_msg(file_write(path, s, n, &e) == OHMEN_OK, "%s", e.text);
    ck_assert_msg(file_read(a, path, 1 << 20, &expected, &size, &e) == OHMEN_OK, "%s", e.text);
    size_t same = 0, line = 1;
    while (same < n && same < size && s[same] == expected[same])
        line += s[same++] == '\n';
    ck_assert_msg(same == n && same == size, "%s differs in line %zu: %.60s", name, line, s + same);
}

static const struct { unsigned width; bool ascii, colour; } formats[] = {
    {60, false, false}, {60, true, false},   {80, false, false},  {80, true, false},
    {120, false, false}, {120, true, false}, {200, false, false}, {200, true, false},
    {80, false, true}};

START_TEST(as_text)
{
    struct arena *a = arena_new(NULL);
    struct report r = sample(a);
    const char *s = text_of(a, &r, formats[_i].width, formats[_i].ascii, formats[_i].colour);
    const char *kind = formats[_i].colour ? "colour" : formats[_i].ascii ? "ascii" : "utf8";
    compare(a, arena_printf(a, "text-%u-%s.txt", formats[_i].width, kind), s, strlen(s));
    arena_free(a);
}
END_TEST

START_TEST(as_data)
{
    struct arena *a = arena_new(NULL);
    struct report r = sample(a);
    struct text json, csv;
    text_init(&json, a);
    text_init(&csv, a);
    report_write_json(&json, &r);
    report_write_csv(&csv, &r);
    compare(a, "report.json", json.at, json.n);
    compare(a, "report.csv", csv.at, csv.n);
    arena_free(a);
}
END_TEST

Suite *suite_report_golden(void)
{
    Suite *s = suite_create("report golden");
    TCase *t = tcase_create("golden");
    tcase_add_loop_test(t, as_text, 0, (int)(sizeof formats / sizeof *formats));
    tcase_add_test(t, as_data);
    suite_add_tcase(s, t);
    return s;
}
