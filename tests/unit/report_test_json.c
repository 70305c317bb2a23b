/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reports as JSON, read by the strict reader of tests/lib, which is tested first. */
#include "report_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "json_check.h"
#include "random.h"

static bool valid(const char *s)
{
    return json_check(s, strlen(s), NULL);
}

/* The grammar of RFC 8259; the examples are ours. */
START_TEST(the_reader_is_strict)
{
    static const char *const good[] = {
        "0", "-0.5e+3", " [1 , 2] ", "{}", "[]", "\"\\u00e9\\n\"", "{\"a\":{\"a\":null}}",
        "\"\\ud83d\\ude00\"", "\"é\"", "[true,false]", "1E5", "-0"};
    static const char *const bad[] = {
        "", "01", "+1", "1.", ".5", "-", "1e", "[1,]", "{\"a\":1,}", "{a:1}", "{\"a\" 1}",
        "{\"a\":1,\"a\":2}", "'a'", "\"\t\"", "\"\\x\"", "\"\\ud83d\"", "\"\\ude00\"", "NaN",
        "Infinity", "nul", "True", "[1 2]", "[", "\"a", "1 2", "\"\xff\"", "\"\xc0\x80\"",
        "\"\xed\xa0\x80\"", "\xef\xbb\xbf[]", "// a\n1", "\"\\u12g4\""};
    for (size_t i = 0; i < sizeof good / sizeof *good; i++)
        ck_assert_msg(valid(good[i]), "refused: %s", good[i]);
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
        ck_assert_msg(!valid(bad[i]), "accepted: %s", bad[i]);
    size_t at = 0;
    ck_assert(!json_check("[1, x]", 6, &at) && at == 4);
    ck_assert(json_is("{\"a\": [0, {\"b\": \"c\"}]}", "a/1/b", "\"c\""));
    ck_assert(!json_is("{\"a\": [0]}", "a/1", "0"));
}
END_TEST

static const char *json_of(struct arena *a, const struct report *r)
{
    struct text t;
    size_t bad = 0;
    text_init(&t, a);
    report_write_json(&t, r);
    ck_assert_msg(json_check(t.at, t.n, &bad), "not JSON at %zu: %s", bad, t.at);
    ck_assert_int_eq(t.at[t.n - 1], '\n');
    return text_str(&t);
}

START_TEST(an_empty_report)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    report_init(&r, a);
    ck_assert_str_eq(json_of(a, &r), "{\"blocks\": []}\n");
    report_heading(&r, 1, "A heading has no key");
    ck_assert_str_eq(json_of(a, &r), "{\"blocks\": []}\n");
    arena_free(a);
}
END_TEST

static void add_table(struct report *r)
{
    struct block *b = report_table(r, "hazards", "Hazards");
    block_column(r, b, "id", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "risk", "Risk", "EUR/a", STYLE_MONEY);
    block_column(r, b, "share", "Share", "%", STYLE_PERCENT);
    block_column(r, b, "tests", "Tests", "", STYLE_PLAIN);
    block_column(r, b, "day", "Last", "", STYLE_PLAIN);
    block_column(r, b, "late", "Late", "", STYLE_PLAIN);
    struct row *row = block_row(r, b);
    row_text(r, row, "H-1");
    row_number(r, row, 12345.678, "H-1.risk")->mark = "!";
    row_number(r, row, 0.123, NULL);
    row_count(r, row, 9007199254740992u);
    row_date(r, row, "2027-03-31");
    row_yes(r, row, true);
    row = block_row(r, b);
    row_text(r, row, "H-2")->mark = "new";
    row_number(r, row, -0.0, NULL);
    row_empty(r, row);
}

START_TEST(cells_of_a_table)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    report_init(&r, a);
    add_table(&r);
    const char *s = json_of(a, &r);
    static const struct { const char *path, *raw; } cells[] = {
        {"blocks/0/key", "\"hazards\""},
        {"blocks/0/type", "\"table\""},
        {"blocks/0/columns/1", "{\"key\": \"risk\", \"head\": \"Risk\", \"unit\": \"EUR/a\"}"},
        {"blocks/0/columns/2", "{\"key\": \"share\", \"head\": \"Share\"}"},
        {"blocks/0/rows/0/id", "\"H-1\""},
        {"blocks/0/rows/0/risk", "{\"value\": 12345.678, \"unit\": \"EUR/a\", "
                                 "\"figure\": \"H-1.risk\", \"mark\": \"!\"}"},
        {"blocks/0/rows/0/share", "{\"value\": 0.123}"},
        {"blocks/0/rows/0/tests/value", "9007199254740992"},
        {"blocks/0/rows/0/day", "\"2027-03-31\""},
        {"blocks/0/rows/0/late", "true"},
        {"blocks/0/rows/1/id", "{\"value\": \"H-2\", \"mark\": \"new\"}"},
        {"blocks/0/rows/1/risk/value", "0"},
        {"blocks/0/rows/1/share", "null"},
        {"blocks/0/rows/1/late", "null"}};
    for (size_t i = 0; i < sizeof cells / sizeof *cells; i++)
        ck_assert_msg(json_is(s, cells[i].path, cells[i].raw), "%s in %s", cells[i].path, s);
    arena_free(a);
}
END_TEST

START_TEST(other_blocks)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    report_init(&r, a);
    struct block *b = report_pairs(&r, "sum", "Sum");
    pair_number(&r, block_pair(&r, b, "Risk"), 2.385, "EUR/a", STYLE_MONEY, "risk");
    row_text(&r, block_pair(&r, b, "Who"), "a \"b\" \\ c");
    block_pair(&r, b, "Nothing");
    report_note(&r, "note", "two %s\nlines", "plain");
    b = report_grid(&r, "grid", NULL, "EUR");
    grid_add_mark(&r, b, "A", "first", 1e-3, 2e6)->frequency_figure = "A.frequency";
    grid_add_mark(&r, b, "B", "second", 1e-4, 2e5)->arrow_from = 0;
    grid_add_mark(&r, b, "Aa", "half of it", 1e-4, 2e5)->part_of = 0;
    grid_add_line(&r, b, "limit", 1e5, "#");
    const char *s = json_of(a, &r);
    static const struct { const char *path, *raw;
    } cells[] = {
        {"blocks/0/values/0",
         "{\"name\": \"Risk\", \"value\": {\"value\": 2.385, \"unit\": \"EUR/a\", "
         "\"figure\": \"risk\"}}"},
        {"blocks/0/values/1/value", "\"a \\\"b\\\" \\\\ c\""},
        {"blocks/0/values/2/value", "null"},
        {"blocks/1/text", "\"two plain\\nlines\""},
        {"blocks/2/marks/0/frequency",
         "{\"value\": 0.001, \"unit\": \"1/a\", \"figure\": \"A.frequency\"}"},
        {"blocks/2/marks/1/from", "\"A\""},
        {"blocks/2/marks/2",
         "{\"label\": \"Aa\", \"name\": \"half of it\", \"frequency\": {\"value\": 0.0001, "
         "\"unit\": \"1/a\"}, \"damage\": {\"value\": 200000, \"unit\": \"EUR\"}, "
         "\"part-of\": \"A\"}"},
        {"blocks/2/marks/1/damage", "{\"value\": 200000, \"unit\": \"EUR\"}"},
        {"blocks/2/lines/0/risk", "{\"value\": 100000, \"unit\": \"EUR/a\"}"}};
    for (size_t i = 0; i < sizeof cells / sizeof *cells; i++)
        ck_assert_msg(json_is(s, cells[i].path, cells[i].raw), "%s in %s", cells[i].path, s);
    arena_free(a);
}
END_TEST

/* No control or invisible character is sent; all come back from their escapes. */
START_TEST(texts_are_harmless)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    report_init(&r, a);
    report_note(&r, "note", "%s",
                "\033[31m\x7f\xc2\x9b\xe2\x80\xae\xef\xbb\xbf\xff é 母\t\xf0\x9f\x98\x80");
    const char *s = json_of(a, &r);
    ck_assert(json_is(s, "blocks/0/text",
                      "\"\\u001b[31m\\u007f\\u009b\\u202e\\ufeff\xef\xbf\xbd é 母\\u0009"
                      "\xf0\x9f\x98\x80\""));
    arena_free(a);
}
END_TEST

START_TEST(doubles_come_back)
{
    struct arena *a = arena_new(NULL);
    struct report r;
    struct random rng = random_seed(7);
    double xs[500];
    report_init(&r, a);
    struct block *b = report_table(&r, "t", NULL);
    block_column(&r, b, "x", "x", "", STYLE_PLAIN);
    for (size_t i = 0; i < 500; i++) {
        xs[i] = random_double(&rng);
        row_number(&r, block_row(&r, b), xs[i], NULL);
    }
    const char *s = json_of(a, &r);
    for (size_t i = 0; i < 500; i++) {
        size_t n;
        const char *raw = json_pick(s, arena_printf(a, "blocks/0/rows/%zu/x/value", i), &n);
        ck_assert(raw && strtod(raw, NULL) == xs[i]);
    }
    arena_free(a);
}
END_TEST

Suite *suite_report_json(void)
{
    Suite *s = suite_create("report json");
    TCase *t = tcase_create("json");
    tcase_add_test(t, the_reader_is_strict);
    tcase_add_test(t, an_empty_report);
    tcase_add_test(t, cells_of_a_table);
    tcase_add_test(t, other_blocks);
    tcase_add_test(t, texts_are_harmless);
    tcase_add_test(t, doubles_come_back);
    suite_add_tcase(s, t);
    return s;
}
