/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Pages of HTML: over random reports full of hostile texts they are well formed, harmless
 * and the same each time; they hold every word of their blocks and every word of the text
 * report; labels of pictures do not overlap. Markup that matters is compared by hand. */
#include "report_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"
#include "html_check.h"
#include "report/html_place.h"
#include "report/html_svg.h"
#include "report_test_random.h"

static struct arena *arena;
static struct report report;

static void set_up(void)
{
    arena = arena_new(NULL);
    report_init(&report, arena);
}

static void tear_down(void)
{
    arena_free(arena);
}

static const char *page_of_report(void)
{
    struct text t;
    text_init(&t, arena);
    report_write_html(&t, &report);
    return text_str(&t);
}

/* A heading without an id cannot be led to. */
static void check_headings(const char *page)
{
    for (const char *at = page; (at = strstr(at, "<h")); at += 2)
        if (at[2] >= '1' && at[2] <= '6')
            ck_assert_msg(text_starts(at + 3, " id=\""), "a heading without an id: %.60s", at);
}

static void check_html(const char *s)
{
    check_headings(s);
    size_t bad = 0, n = strlen(s);
    const char *fault = html_check(s, n, &bad);
    size_t from = bad > 60 ? bad - 60 : 0;
    ck_assert_msg(!fault, "%s at %zu: ...%.120s", fault, bad, s + from);
    ck_assert_msg(!strstr(s, "<script") && !strstr(s, "<img"), "markup from a text");
}

static const char *words_of_page(const char *page)
{
    char *words = NEW_ARRAY(arena, strlen(page) + 1, char);
    html_words(page, strlen(page), words);
    return words;
}

/* --- words as a multiset --- */

struct words ARRAY_BODY(const char *);

static int by_bytes(const void *a, const void *b)
{
    return text_compare(*(const char *const *)a, *(const char *const *)b);
}

static struct words split(const char *s)
{
    struct words w = {0};
    while (*(s += strspn(s, " \n"))) {
        size_t n = strcspn(s, " \n");
        *array_push(arena, &w) = arena_strn(arena, s, n);
        s += n;
    }
    if (w.n)
        qsort(w.at, w.n, sizeof *w.at, by_bytes);
    return w;
}

/* Each word of `few` is in `many`, at least as often. */
static void check_within(const struct words *few, const struct words *many)
{
    size_t k = 0;
    for (size_t i = 0; i < few->n; i++, k++) {
        while (k < many->n && text_compare(many->at[k], few->at[i]) < 0)
            k++;
        ck_assert_msg(k < many->n && text_equal(many->at[k], few->at[i]), "the page lacks: %s",
                      few->at[i]);
    }
}

static void check_holds(const char *words, const char *s)
{
    struct words few = split(s ? utf8_clean(arena, s, false) : "");
    struct words many = split(words);
    check_within(&few, &many);
}

/* --- every word of the blocks --- */

static const char *as_valid(const char *s)
{
    size_t n = s ? strlen(s) : 0;
    return s && utf8_check(s, n) == n ? s : "";
}

static void check_cell(const char *words, const struct cell *c, enum number_style style)
{
    char buf[32];
    check_holds(words, as_valid(c->mark));
    if (c->type == CELL_TEXT || c->type == CELL_DATE)
        check_holds(words, as_valid(c->text));
    if (c->type == CELL_NUMBER && style != STYLE_MONEY && c->mark == NULL)
        check_holds(words, number_text(buf, c->number, style));
}

static void check_rows(const char *words, const struct block *b)
{
    for (size_t i = 0; i < b->rows.n; i++)
        for (size_t j = 0; j < b->rows.at[i].n && j < b->columns.n; j++) {
            const struct cell *c = &b->rows.at[i].at[j];
            bool pairs = b->type == BLOCK_PAIRS;
            if (!(pairs && c->style == STYLE_FREQUENCY)) /* "3.1," behind a comma */
                check_cell(words, c, pairs ? c->style : b->columns.at[j].style);
        }
    for (size_t j = 0; b->type == BLOCK_TABLE && j < b->columns.n; j++)
        check_holds(words, as_valid(b->columns.at[j].head));
}

static void check_pictures(const char *words, const struct block *b)
{
    for (size_t i = 0; b->grid && i < b->grid->marks.n; i++) {
        check_holds(words, as_valid(b->grid->marks.at[i].label));
        check_holds(words, as_valid(b->grid->marks.at[i].name));
    }
    for (size_t i = 0; b->curve && i < b->curve->lines.n; i++)
        check_holds(words, as_valid(b->curve->lines.at[i].name));
    for (size_t i = 0; b->curve && i < b->curve->marks.n; i++)
        check_holds(words, as_valid(b->curve->marks.at[i].label));
    for (size_t i = 0; b->swings && i < b->swings->rows.n; i++) {
        check_holds(words, as_valid(b->swings->rows.at[i].label));
        check_holds(words, as_valid(b->swings->rows.at[i].words));
    }
    for (size_t i = 0; b->map && map_is_whole(b->map) && i < b->map->choices.n; i++)
        check_holds(words, as_valid(b->map->choices.at[i].name));
    for (size_t i = 0; b->spreads && i < b->spreads->n; i++)
        check_holds(words, as_valid(b->spreads->at[i].label));
}

START_TEST(random_pages_are_well_formed_and_whole)
{
    struct random r = random_seed(9000 + (uint64_t)_i);
    fill_at_random(&r, &report);
    const char *page = page_of_report();
    check_html(page);
    ck_assert_str_eq(page, page_of_report());
    const char *words = words_of_page(page);
    for (size_t i = 0; i < report.blocks.n; i++) {
        const struct block *b = &report.blocks.at[i];
        check_holds(words, as_valid(b->title));
        check_rows(words, b);
        check_pictures(words, b);
    }
}
END_TEST

/* --- every word of the text report --- */

static const char *const tame[] = {"H-BUS1", "late", "two words", "94.1", "busbar 2", "!",
                                   "母線",   "a<b",  "R&D",       "it's", "\"so\""};

static const char *tame_text(struct random *r)
{
    return random_pick(r, tame);
}

static void add_tame_cell(struct random *r, struct row *row, bool number)
{
    struct cell *c;
    if (number && random_index(r, 5))
        c = row_number(&report, row, random_index(r, 9) ? random_log_uniform(r, 1e-7, 1e8) : 0,
                       "some.figure");
    else if (number)
        c = random_index(r, 2) ? row_count(&report, row, random_next(r) >> 44)
                               : row_empty(&report, row);
    else
        c = row_text(&report, row, tame_text(r));
    if (random_index(r, 5) == 0)
        c->mark = "!";
}

static void add_tame_table(struct random *r)
{
    struct block *b = report_table(&report, "table", "Some table");
    size_t columns = random_index(r, 5) + 1;
    for (size_t j = 0; j < columns; j++)
        block_column(&report, b, arena_printf(arena, "k%zu", j), tame_text(r), "EUR/a",
                     (enum number_style)random_index(r, 7));
    for (size_t i = random_index(r, 7); i-- > 0;) {
        struct row *row = block_row(&report, b);
        for (size_t j = 0; j < columns; j++)
            add_tame_cell(r, row, j % 2);
    }
    b->entries = b->rows.n && random_index(r, 4) == 0;
    for (size_t j = 0; b->entries && j < columns; j++)
        b->columns.at[j].keep = j > 1 ? 4 + (unsigned)random_index(r, 2) : 0;
}

static void add_tame_pairs(struct random *r)
{
    struct block *b = report_pairs(&report, "pairs", "Some pairs");
    for (size_t i = random_index(r, 6) + 1; i-- > 0;)
        pair_number(&report, block_pair(&report, b, tame_text(r)), random_log_uniform(r, 1e-9, 1e9),
                    "EUR/a", (enum number_style)random_index(r, 7), "other.figure")
            ->mark = random_index(r, 3) ? NULL : "!";
}

/* Rules of the text are strokes of a line alone. */
static const char *without_rules(const char *s)
{
    struct text t;
    text_init(&t, arena);
    struct page_lines lines = lines_of(arena, s);
    for (size_t i = 0; i < lines.n; i++)
        if (!text_starts(lines.at[i], "─") && !text_starts(lines.at[i], "━"))
            text_printf(&t, "%s\n", lines.at[i]);
    return text_str(&t);
}

START_TEST(a_page_holds_the_text_report)
{
    struct random r = random_seed(9500 + (uint64_t)_i);
    report_heading(&report, 1, "Some head & tail");
    report_note(&report, "note", "One line\nand another\n\n  kept: %s\n\nend", tame_text(&r));
    add_tame_table(&r);
    add_tame_pairs(&r);
    const char *page = page_of_report();
    check_html(page);
    struct words many = split(words_of_page(page));
    struct words few = split(without_rules(text_of(arena, &report, 200, false, false)));
    ck_assert_uint_gt(few.n, 10);
    check_within(&few, &many);
}
END_TEST

/* --- markup by hand --- */

static void check_has(const char *page, const char *part)
{
    ck_assert_msg(strstr(page, part), "the page lacks %s", part);
}

START_TEST(cells_have_their_markup)
{
    struct block *b = report_table(&report, "risks", "By risk");
    block_column(&report, b, "id", "Mark", "", STYLE_PLAIN);
    block_column(&report, b, "f", "Occurs", "1/a", STYLE_FREQUENCY);
    block_column(&report, b, "risk", "Risk", "EUR/a", STYLE_MONEY);
    struct row *row = block_row(&report, b);
    row_text(&report, row, "A<1>");
    row_number(&report, row, 2.94e-3, "A.frequency");
    row_number(&report, row, 12345, "A.\"risk\"")->mark = "!";
    row = block_row(&report, b);
    row_text(&report, row, "\xd7\xa9");
    row_number(&report, row, 0.5, NULL);
    row_number(&report, row, 678, NULL);
    const char *page = page_of_report();
    check_html(page);
    check_has(page, "<title>By risk</title>");
    check_has(page, "<table class=\"fits\" id=\"risks\">\n<caption>By risk</caption>");
    check_has(page, "<th scope=\"col\" class=\"n\">Risk <span class=\"u\">kEUR/a</span></th>");
    check_has(page, "<th scope=\"row\" class=\"k\">A&lt;1&gt;</th>");
    check_has(page, "<td class=\"n\" data-figure=\"A.frequency\" title=\"A.frequency\">"
                    "<span>2</span><span class=\"w6\">.94e-3</span></td>"
                    "<td class=\"p\">1 in 340 a</td>");
    check_has(page,
              "data-figure=\"A.&quot;risk&quot;\" title=\"A.&quot;risk&quot;\"><span>12</span>"
              "<span class=\"w4\">.3 <b>!</b></span></td>");
    check_has(page, "<bdi>\xd7\xa9</bdi>");
    check_has(page, "<span>0</span><span class=\"w4\">.678</span>");
}
END_TEST

START_TEST(ids_differ_and_the_contents_lead_to_them)
{
    report_heading(&report, 1, "Harbour");
    report_heading(&report, 2, "Main");
    report_heading(&report, 2, "Main!");
    report_table(&report, "names", "Names");
    report_heading(&report, 3, "\xe6\xaf\x8d");
    const char *page = page_of_report();
    check_html(page);
    check_has(page, "<h1 id=\"harbour\">Harbour</h1>\n<nav id=\"contents\"");
    check_has(page, "<li class=\"c2\"><a href=\"#main-2\">Main</a></li>\n"
                    "<li class=\"c2\"><a href=\"#main-3\">Main!</a></li>\n"
                    "<li class=\"c4\"><a href=\"#names-2\">Names</a></li>\n"
                    "<li class=\"c3\"><a href=\"#part\">\xe6\xaf\x8d</a></li>\n");
    check_has(page, "<h2 id=\"main-3\">Main!</h2>");
}
END_TEST

START_TEST(notes_are_paragraphs_and_kept_lines)
{
    report_note(&report, "n", "one\ntwo\n  kept <1>\n    deeper\n\nthree\n");
    const char *page = page_of_report();
    check_html(page);
    check_has(page,
              "<p>one\ntwo</p>\n<pre>  kept &lt;1&gt;\n    deeper</pre>\n<p>three</p>\n</main>");
    ck_assert_msg(!strstr(page, "id=\"names\""), "a switch for names where there are none");
}
END_TEST

START_TEST(a_titled_note_is_where_the_contents_lead)
{
    report_heading(&report, 2, "One");
    report_heading(&report, 2, "Two");
    report_heading(&report, 2, "Three");
    report_note(&report, "weak", "Q1 <alone>")->title = "Weak points";
    const char *page = page_of_report();
    check_html(page);
    check_has(page, "<a href=\"#weak\">Weak points</a>");
    check_has(page, "<p class=\"title\" id=\"weak\">Weak points</p>\n<p>Q1 &lt;alone&gt;</p>");
}
END_TEST

START_TEST(an_empty_report_is_a_page)
{
    const char *page = page_of_report();
    check_html(page);
    check_has(page, "<title>Report</title>");
}
END_TEST

/* --- pictures --- */

/* At one decade a hand's breadth, 4.2e6 and 2.94e-3 stand where their logarithms do. */
START_TEST(marks_stand_at_their_logarithms)
{
    struct block *b = report_grid(&report, "grid", "Grid", "EUR");
    grid_add_mark(&report, b, "low", "Low", 1e-3, 1e4)->frequency_figure = "low.frequency";
    grid_add_mark(&report, b, "high", "High", 1e-1, 1e6);
    grid_add_mark(&report, b, "mid", "Middle", pow(10, -1.75), pow(10, 5.25))->arrow_from = 0;
    const char *page = page_of_report();
    check_html(page);
    double x[3], y[3];
    const char *at = strstr(page, "<svg viewBox");
    for (int i = 0; i < 3; i++) {
        at = strstr(at, "<circle") + 1;
        x[i] = strtod(strstr(at, "cx=\"") + 4, NULL);
        y[i] = strtod(strstr(at, "cy=\"") + 4, NULL);
    }
    double decade = (x[1] - x[0]) / 2;
    ck_assert_double_gt(decade, 50);
    ck_assert_double_eq_tol(y[0] - y[1], 2 * decade, 0.11);
    ck_assert_double_eq_tol(x[2], x[0] + 1.25 * decade, 0.11);
    ck_assert_double_eq_tol(y[2], y[0] - 1.25 * decade, 0.11);
    check_has(page, "<path class=\"head\"");
    check_has(page, "data-figure=\"low.frequency\"");
}
END_TEST

static bool overlap(const struct place_box *a, const struct place_box *b)
{
    return a->x < b->x + b->width && b->x < a->x + a->width && a->y < b->y + b->height &&
           b->y < a->y + a->height;
}

enum { MARKS = 60 };

/* Marks first, as pictures do it: then no label covers a mark or another label. */
START_TEST(labels_never_overlap)
{
    struct random r = random_seed(9800 + (uint64_t)_i);
    struct places p = {.arena = arena, .bounds = {0, 0, 300, 300}};
    for (size_t i = 0; i < MARKS; i++) {
        double x = random_uniform(&r, 5, 290), y = random_uniform(&r, 5, 290);
        place_add_box(&p, x, y, 6, 6);
        if (i % 7 == 0)
            place_add_stroke(&p, x, y, random_uniform(&r, 0, 300), random_uniform(&r, 0, 300));
    }
    size_t placed = 0;
    struct place_box at;
    for (size_t i = 0; i < MARKS; i++)
        placed += place_label(&p, p.boxes.at[i].x + 3, p.boxes.at[i].y + 3, 4,
                              random_uniform(&r, 8, 60), 14, &at);
    ck_assert_uint_gt(placed, 20);
    ck_assert_uint_eq(p.boxes.n, MARKS + placed);
    for (size_t i = MARKS; i < p.boxes.n; i++) {
        const struct place_box *b = &p.boxes.at[i];
        ck_assert(b->x >= 0 && b->y >= 0 && b->x + b->width <= 300 && b->y + b->height <= 300);
        for (size_t k = 0; k < i; k++)
            ck_assert(!overlap(b, &p.boxes.at[k]));
    }
}
END_TEST

/* The first place that crosses no stroke: not to the right, where one passes. */
START_TEST(labels_avoid_strokes)
{
    struct places p = {.arena = arena, .bounds = {0, 0, 100, 100}};
    struct place_box at;
    place_add_stroke(&p, 60, 0, 60, 100);
    ck_assert(place_label(&p, 50, 50, 6, 8, 14, &at));
    ck_assert_double_eq(at.x + at.width, 44);
    ck_assert(place_label(&p, 50, 50, 6, 8, 14, &at));
    ck_assert(at.x + at.width <= 60 && !(at.x + at.width <= 44));
}
END_TEST

START_TEST(lengths_are_in_tenths)
{
    static const struct {
        double x;
        const char *s;
    } cases[] = {{0, "0"},     {12, "12"},      {12.34, "12.3"}, {12.36, "12.4"},
                 {-0.04, "0"}, {-3.27, "-3.3"}, {99.96, "100"}};
    char buf[32];
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
        ck_assert_str_eq(svg_length(buf, cases[i].x), cases[i].s);
}
END_TEST

/* --- the checker itself --- */

#define HEAD "<!DOCTYPE html>\n<html lang=\"en\">\n<head><title>t</title><style>a{}</style></head>"
#define PAGE(inner) HEAD "<body><main id=\"m\">" inner "</main></body></html>"

START_TEST(the_checker_refuses)
{
    static const char *const bad[] = {PAGE("<p>"),
                                      PAGE("</p>"),
                                      PAGE("<p><b></p></b>"),
                                      PAGE("<script>1</script>"),
                                      PAGE("<p onclick=\"x\">a</p>"),
                                      PAGE("<p id=\"m\">a</p>"),
                                      PAGE("<a href=\"#n\">a</a>"),
                                      PAGE("<a href=\"x\">a</a>"),
                                      PAGE("a & b"),
                                      PAGE("a > b"),
                                      PAGE("it's"),
                                      PAGE("\xe2\x80\xae"),
                                      PAGE("\033[0m"),
                                      PAGE("\xff"),
                                      PAGE("<p id=x>a</p>"),
                                      PAGE("<p title=\"a\" title=\"b\">a</p>"),
                                      PAGE("<p style=\"a\">a</p>"),
                                      PAGE("<main>a</main>"),
                                      HEAD,
                                      PAGE("<img src=\"x\">")};
    const char *good = PAGE("<p id=\"n\">a &amp; <bdi>b</bdi><a href=\"#n\">c</a></p>");
    ck_assert_ptr_null(html_check(good, strlen(good), NULL));
    for (size_t i = 0; i < sizeof bad / sizeof *bad; i++)
        ck_assert_msg(html_check(bad[i], strlen(bad[i]), NULL), "accepted: %s", bad[i]);
}
END_TEST

Suite *suite_report_html(void)
{
    Suite *s = suite_create("report html");
    TCase *t = tcase_create("html");
    tcase_add_checked_fixture(t, set_up, tear_down);
    tcase_set_timeout(t, 60);
    tcase_add_loop_test(t, random_pages_are_well_formed_and_whole, 0, 120);
    tcase_add_loop_test(t, a_page_holds_the_text_report, 0, 60);
    tcase_add_test(t, cells_have_their_markup);
    tcase_add_test(t, ids_differ_and_the_contents_lead_to_them);
    tcase_add_test(t, notes_are_paragraphs_and_kept_lines);
    tcase_add_test(t, a_titled_note_is_where_the_contents_lead);
    tcase_add_test(t, an_empty_report_is_a_page);
    tcase_add_test(t, marks_stand_at_their_logarithms);
    tcase_add_loop_test(t, labels_never_overlap, 0, 20);
    tcase_add_test(t, labels_avoid_strokes);
    tcase_add_test(t, lengths_are_in_tenths);
    tcase_add_test(t, the_checker_refuses);
    suite_add_tcase(s, t);
    return s;
}
