/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Swings. The picture is read back from its text, column by column, and compared with where
 * bars must be: in long double, from the numbers and the width of the axis alone. */
#include "report_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "json_check.h"
#include "random.h"

enum { MARGIN = 3, WIDEST = 200 };

static struct arena *arena;
static struct report report;
static struct block *block;

static void setup(void)
{
    arena = arena_new(NULL);
    report_init(&report, arena);
    block = NULL;
}

static void teardown(void)
{
    arena_free(arena);
}

static void begin(double today)
{
    block = report_swings(&report, "swings", NULL, today, "all.today");
    swings_set_axis(&report, block, "result", "Zed", "", STYLE_PLAIN);
}

static struct swing *add(const char *label, double low, double high)
{
    return swings_add(&report, block, label, "a..b", low, high);
}

/* --- reading --- */

struct picture {
    struct page_lines lines;
    size_t from; /* its column on the page */
    int columns;
    long double least, greatest;
};

static bool is_axis(const char *line, size_t from)
{
    size_t n = strlen(line);
    return n > from && strspn(line, " ") >= from && strspn(line + from, "+-|") == n - from;
}

static struct picture draw(unsigned width)
{
    struct picture p = {.least = block->swings->today, .greatest = block->swings->today};
    const char *s = text_of(arena, &report, width, true, false);
    check_page(arena, s, width, true);
    p.lines = lines_of(arena, s);
    for (size_t i = 0; i < p.lines.n; i++) {
        const char *head = strstr(p.lines.at[i], "Zed");
        if (head && !p.from)
            p.from = (size_t)(head - p.lines.at[i]);
        else if (p.from && !p.columns && is_axis(p.lines.at[i], p.from))
            p.columns = (int)(strlen(p.lines.at[i]) - p.from);
    }
    ck_assert_msg(p.columns >= 18, "no picture: %s", s);
    for (size_t i = 0; i < block->swings->rows.n; i++) {
        const struct swing *row = &block->swings->rows.at[i];
        p.least = fminl(p.least, fminl(row->low, row->high));
        p.greatest = fmaxl(p.greatest, fmaxl(row->low, row->high));
    }
    return p;
}

static const char *line_of(const struct picture *p, const char *label)
{
    for (size_t i = 0; i < p->lines.n; i++)
        if (text_starts(p->lines.at[i], label) && strchr(" :", p->lines.at[i][strlen(label)]))
            return p->lines.at[i];
    ck_abort_msg("no row %s", label);
}

/* A row's picture, blanks to the end. */
static const char *bars_of(const struct picture *p, const char *label)
{
    const char *line = line_of(p, label);
    char *bars = NEW_ARRAY(arena, WIDEST + 1, char);
    memset(bars, ' ', (size_t)p->columns);
    size_t n = strlen(line);
    if (n > p->from)
        memcpy(bars, line + p->from, n - p->from);
    return bars;
}

/* --- what must be there --- */

/* The place of a value, in columns from the first. */
static long double place(const struct picture *p, double value)
{
    return MARGIN + (value - p->least) / (p->greatest - p->least) * (p->columns - 1 - 2 * MARGIN);
}

static bool on_the_brink(long double at)
{
    return fabsl(at - floorl(at) - 0.5L) < 1e-9L;
}

static bool covers(int x, int today, int end)
{
    return (today < x && x <= end) || (end <= x && x < today);
}

static char expected_at(const struct picture *p, const struct swing *s, int x)
{
    int today = (int)floorl(place(p, block->swings->today) + 0.5L);
    int low = (int)floorl(place(p, s->low) + 0.5L), high = (int)floorl(place(p, s->high) + 0.5L);
    if (x == today)
        return '|';
    if (covers(x, today, low) || covers(x, today, high))
        return covers(x, today, low) ? covers(x, today, high) ? '#' : '-' : '=';
    int side = x - today;
    for (int k = 0; k < 2; k++) {
        double end = k ? s->high : s->low;
        int way = (end > block->swings->today) - (end < block->swings->today);
        if (way && side == way && (k ? high : low) == today)
            return '.';
    }
    return ' ';
}

static void check_row(const struct picture *p, const struct swing *s)
{
    const char *bars = bars_of(p, s->label);
    if (on_the_brink(place(p, s->low)) || on_the_brink(place(p, s->high)) ||
        on_the_brink(place(p, block->swings->today)))
        return;
    for (int x = 0; x < p->columns; x++)
        ck_assert_msg(bars[x] == expected_at(p, s, x), "%s, column %d of %d: '%c' not '%c'\n%s",
                      s->label, x, p->columns, bars[x], expected_at(p, s, x), bars);
}

static void check_numbers(const struct picture *p, const struct swing *s)
{
    char low[32], high[32];
    number_text(low, s->low, STYLE_PLAIN);
    number_text(high, s->high, STYLE_PLAIN);
    ck_assert_msg(strstr(line_of(p, s->label), low) != NULL, "%s lacks %s", s->label, low);
    ck_assert_msg(strstr(line_of(p, s->label), high) != NULL, "%s lacks %s", s->label, high);
}

static double some_result(struct random *r)
{
    double x = random_log_uniform(r, 1e-2, 1e4);
    return random_index(r, 4) ? x : -x;
}

START_TEST(bars_are_right)
{
    struct random r = random_seed(9100 + (uint64_t)_i);
    begin(some_result(&r));
    for (size_t i = random_index(&r, 9) + 1; i-- > 0;) {
        double low = random_index(&r, 6) ? some_result(&r) : block->swings->today;
        struct swing *s = add(arena_printf(arena, "r%zu", i), low, some_result(&r));
        s->high_turns = random_index(&r, 5) == 0;
    }
    for (unsigned width = 60; width <= 200; width += 7) {
        struct picture p = draw(width);
        for (size_t i = 0; i < block->swings->rows.n; i++) {
            check_row(&p, &block->swings->rows.at[i]);
            check_numbers(&p, &block->swings->rows.at[i]);
        }
    }
}
END_TEST

/* --- by hand --- */

/* What is drawn, without the blanks around it. */
static const char *bare(const char *bars)
{
    bars += strspn(bars, " ");
    size_t n = strlen(bars);
    while (n > 0 && bars[n - 1] == ' ')
        n--;
    return arena_strn(arena, bars, n);
}

START_TEST(equal_results_are_a_line_alone)
{
    begin(2.385);
    add("same", 2.385, 2.385);
    struct picture p = draw(100);
    ck_assert_str_eq(bare(bars_of(&p, "same")), "|");
}
END_TEST

START_TEST(very_small_changes_are_points)
{
    begin(1);
    add("wide", -1e6, 1e6);
    add("small", 0, 2);
    add("one", 1, 3);
    add("both", 2, 3);
    struct picture p = draw(100);
    ck_assert_str_eq(bare(bars_of(&p, "small")), ".|.");
    ck_assert_str_eq(bare(bars_of(&p, "one")), "|.");
    ck_assert_str_eq(bare(bars_of(&p, "both")), "|.");
    const char *wide = bare(bars_of(&p, "wide"));
    ck_assert(wide[0] == '-' && wide[strlen(wide) - 1] == '=');
}
END_TEST

/* Both ends above today: what both cover, then what the farther one alone does. */
START_TEST(bars_on_one_side_are_told_apart)
{
    begin(0);
    add("low far", 10, 5);
    add("high far", 5, 10);
    struct picture p = draw(140);
    const char *low = bare(bars_of(&p, "low far")), *high = bare(bars_of(&p, "high far"));
    ck_assert(low[0] == '|' && low[1] == '#' && low[strlen(low) - 1] == '-');
    ck_assert(high[0] == '|' && high[1] == '#' && high[strlen(high) - 1] == '=');
    ck_assert(labs((long)strspn(low + 1, "#") * 2 - (long)strlen(low)) <= 2);
}
END_TEST

START_TEST(ends_that_turn_are_marked)
{
    begin(2.385);
    swings_set_turns(&report, block, "all is different here");
    struct swing *s = add("row", 1, 4);
    ck_assert(!strstr(text_of(arena, &report, 80, false, false), "!"));
    s->low_turns = true;
    const char *text = text_of(arena, &report, 80, false, false);
    ck_assert(strstr(text, "1 !") && strstr(text, "!   all is different here"));
    ck_assert(strstr(text, "Today: 2.38") != NULL);
}
END_TEST

START_TEST(as_data)
{
    begin(0.25);
    swings_set_axis(&report, block, "cost", "Cost", "EUR/a", STYLE_MONEY);
    struct swing *s = add("=first", 0.125, 8);
    s->low_figure = "some.low";
    s->high_turns = true;
    struct text json, csv;
    text_init(&json, arena);
    text_init(&csv, arena);
    report_write_json(&json, &report);
    report_write_csv(&csv, &report);
    const char *j = text_str(&json);
    ck_assert(json_check(j, json.n, NULL));
    ck_assert(json_is(j, "blocks/0/type", "\"swings\""));
    ck_assert(json_is(j, "blocks/0/today/figure", "\"all.today\""));
    ck_assert(json_is(j, "blocks/0/rows/0/low/value", "0.125"));
    ck_assert(json_is(j, "blocks/0/rows/0/low/figure", "\"some.low\""));
    ck_assert(json_is(j, "blocks/0/rows/0/high/unit", "\"EUR/a\""));
    ck_assert(json_is(j, "blocks/0/rows/0/high-turns", "true"));
    ck_assert(json_is(j, "blocks/0/rows/0/low-turns", "false"));
    ck_assert_str_eq(text_str(&csv),
                     "input,range,low-cost-EUR/a,high-cost-EUR/a,today-cost-EUR/a,low-turns,"
                     "high-turns\r\n'=first,a..b,0.125,8,0.25,no,yes\r\n");
}
END_TEST

/* --- HTML --- */

static const char *html_of_report(void)
{
    struct text t;
    text_init(&t, arena);
    report_write_html(&t, &report);
    return text_str(&t);
}

/* The number behind `before` in the next element that begins with `element`. */
static double number_in(const char **at, const char *element, const char *before)
{
    const char *found = strstr(*at, element);
    ck_assert_msg(found != NULL, "no %s", element);
    *at = found + strlen(element);
    found = strstr(found, before);
    return strtod(found + strlen(before), NULL);
}

/* The end of the next bar of the class: its side that is not at the line of today. */
static double end_of_bar(const char **at, const char *class, double today)
{
    const char *element = arena_printf(arena, "<path class=\"%s\" ", class);
    const char *from_here = *at;
    double left = number_in(at, element, "d=\"M");
    double right = number_in(&from_here, element, "H");
    ck_assert_msg(fabs(left - today) < 0.06 || fabs(right - today) < 0.06, "%g %g away from %g",
                  left, right, today);
    return fabs(left - today) < 0.06 ? right : left;
}

/* Bars are as long as the changes, in the same proportion, to a tenth of the picture's unit. */
START_TEST(bars_of_the_picture_are_right)
{
    struct random r = random_seed(9200 + (uint64_t)_i);
    begin(some_result(&r));
    size_t n = random_index(&r, 9) + 1;
    double today = block->swings->today, widest = 0;
    for (size_t i = 0; i < n; i++) {
        struct swing *s = add("row", some_result(&r), some_result(&r));
        widest = fmax(widest, fmax(fabs(s->low - today), fabs(s->high - today)));
    }
    const char *page = strstr(html_of_report(), "<svg viewBox"), *at = page;
    double line = number_in(&at, "<line class=\"today\"", "x1=\""), unit = 0;
    for (int pass = 0; pass < 2; pass++) {
        const char *hollow = page, *solid = page;
        for (size_t i = 0; i < n; i++) {
            const struct swing *s = &block->swings->rows.at[i];
            double changes[] = {s->low - today, s->high - today};
            double ends[] = {end_of_bar(&hollow, "hollow", line),
                             end_of_bar(&solid, "solid", line)};
            for (int k = 0; k < 2; k++) {
                double wanted = changes[k] * unit;
                if (pass == 0 && fabs(changes[k]) == widest)
                    unit = (ends[k] - line) / changes[k];
                if (pass == 1 && fabs(wanted) > 2.7) /* shorter ones are made longer, to be seen */
                    ck_assert_msg(fabs(ends[k] - line - wanted) < 0.25, "%g not %g", ends[k] - line,
                                  wanted);
            }
        }
    }
    ck_assert(unit > 0);
}
END_TEST

START_TEST(without_rows)
{
    begin(2.5);
    ck_assert_str_eq(text_of(arena, &report, 60, true, false), "Today: 2.5\n(no inputs)\n");
}
END_TEST

Suite *suite_report_swings(void)
{
    Suite *s = suite_create("report swings");
    TCase *t = tcase_create("swings");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_loop_test(t, bars_are_right, 0, 60);
    tcase_add_test(t, equal_results_are_a_line_alone);
    tcase_add_test(t, very_small_changes_are_points);
    tcase_add_test(t, bars_on_one_side_are_told_apart);
    tcase_add_test(t, ends_that_turn_are_marked);
    tcase_add_test(t, as_data);
    tcase_add_loop_test(t, bars_of_the_picture_are_right, 0, 30);
    tcase_add_test(t, without_rows);
    suite_add_tcase(s, t);
    return s;
}
