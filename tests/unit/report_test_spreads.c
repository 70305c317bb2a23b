/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Spreads. Strips are read back from the text, and their signs compared with where the values
 * are on the scale, found here in long double. */
#include "report_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "json_check.h"
#include "random.h"

static struct arena *arena;
static struct report report;
static struct block *block;

static void setup(void)
{
    arena = arena_new(NULL);
    report_init(&report, arena);
    block = report_spreads(&report, "spreads", NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

static struct spread *add(const char *label, const char *unit, double low, double median,
                          double mean, double high)
{
    struct spread *s = spreads_add(&report, block, label, unit, STYLE_PLAIN);
    spread_set(&report, s, SPREAD_MEAN, mean, -1, "some.mean");
    spread_set(&report, s, SPREAD_LOW, low, -1, NULL);
    spread_set(&report, s, SPREAD_MEDIAN, median, -1, NULL);
    spread_set(&report, s, SPREAD_HIGH, high, -1, NULL);
    return s;
}

static const char *line_of(const char *text, const char *label)
{
    struct page_lines lines = lines_of(arena, text);
    for (size_t i = 0; i < lines.n; i++)
        if (text_starts(lines.at[i], label))
            return lines.at[i];
    ck_abort_msg("no row %s", label);
}

/* The last word of the row. */
static const char *strip_of(const char *text, const char *label)
{
    return strrchr(line_of(text, label), ' ') + 1;
}

static long double on_scale(bool log, double x)
{
    return log ? log10l(x) : x;
}

struct ends {
    bool log;
    long double low, high;
};

static int column_of(const struct ends *e, double value, int columns)
{
    long double at = (on_scale(e->log, value) - e->low) / (e->high - e->low) * (columns - 1);
    return (int)floorl(at + 0.5L);
}

static bool on_the_brink(const struct ends *e, double value, int columns)
{
    long double at = (on_scale(e->log, value) - e->low) / (e->high - e->low) * (columns - 1);
    return fabsl(at - floorl(at) - 0.5L) < 1e-9L;
}

static void check_strip(const char *strip, const struct spread *s, const struct ends *e)
{
    int n = (int)strlen(strip), at[SPREAD_PARTS];
    for (int k = 0; k < SPREAD_PARTS; k++) {
        at[k] = column_of(e, s->parts[k].value, n);
        if (on_the_brink(e, s->parts[k].value, n))
            return;
    }
    for (int x = 0; x < n; x++) {
        bool mean = x == at[SPREAD_MEAN], median = x == at[SPREAD_MEDIAN];
        bool low = x == at[SPREAD_LOW], high = x == at[SPREAD_HIGH];
        bool within = at[SPREAD_LOW] < x && x < at[SPREAD_HIGH];
        char expected = mean     ? median ? '@' : 'o'
                        : median ? '|'
                        : low    ? high ? '|' : '['
                        : high   ? ']'
                        : within ? '-'
                                 : '.';
        ck_assert_msg(strip[x] == expected, "%s, column %d: '%c' not '%c'", strip, x, strip[x],
                      expected);
    }
}

static void add_some(struct random *r, const char *unit, double least, double greatest)
{
    double x[SPREAD_PARTS];
    for (int k = 0; k < SPREAD_PARTS; k++)
        x[k] = random_log_uniform(r, least, greatest);
    double low = fmin(x[0], fmin(x[1], x[2])), high = fmax(x[0], fmax(x[1], x[2]));
    add(arena_printf(arena, "r%zu", block->spreads->n), unit, low, x[0] + x[1] + x[2] - low - high,
        x[3], high);
}

static struct ends range_of(const struct spread *s, size_t n)
{
    struct ends e = {.low = INFINITY, .high = -INFINITY};
    for (size_t i = 0; i < n; i++)
        for (int k = 0; k < SPREAD_PARTS; k++) {
            e.low = fminl(e.low, s[i].parts[k].value);
            e.high = fmaxl(e.high, s[i].parts[k].value);
        }
    return e;
}

/* The widest factor between the numbers of a row. */
static long double decades_of(const struct spreads *s)
{
    long double most = 0;
    for (size_t i = 0; i < s->n; i++) {
        struct ends e = range_of(&s->at[i], 1);
        most = fmaxl(most, log10l(e.high) - log10l(e.low));
    }
    return most;
}

static struct ends ends_for(const struct spreads *s, size_t i, bool common)
{
    struct ends e = common ? range_of(s->at, s->n) : range_of(&s->at[i], 1);
    e.log = common ? e.high / e.low > 30 : decades_of(s) > log10l(30);
    if (e.log && !common) {
        long double middle = (log10l(e.low) + log10l(e.high)) / 2, half = decades_of(s) / 2;
        return (struct ends){true, middle - half, middle + half};
    }
    if (e.log)
        return (struct ends){true, log10l(e.low), log10l(e.high)};
    if (!common || e.high / e.low >= 1.5L)
        e.low = 0;
    return e;
}

START_TEST(strips_are_right)
{
    struct random r = random_seed(9500 + (uint64_t)_i);
    bool common = _i % 2;
    double greatest = _i % 3 == 0 ? 1e4 : _i % 3 == 1 ? 5 : 1.2;
    for (size_t i = random_index(&r, 5) + 2; i-- > 0;)
        add_some(&r, common ? "a" : i % 2 ? "b" : "c", 1, greatest);
    for (unsigned width = 80; width <= 200; width += 12) {
        const char *s = text_of(arena, &report, width, true, false);
        check_page(arena, s, width, true);
        ck_assert(strstr(s, "Range,") != NULL);
        for (size_t i = 0; i < block->spreads->n; i++) {
            struct ends e = ends_for(block->spreads, i, common);
            ck_assert_int_eq(e.log, strstr(s, " log") != NULL);
            check_strip(strip_of(s, block->spreads->at[i].label), &block->spreads->at[i], &e);
        }
    }
}
END_TEST

START_TEST(all_numbers_are_told)
{
    struct random r = random_seed(9600 + (uint64_t)_i);
    for (size_t i = 0; i < 4; i++)
        add_some(&r, i % 2 ? "a" : "b", 1e-9, 1e9);
    block->spreads->at[2].parts[SPREAD_HIGH].error = 0.125;
    struct text json;
    text_init(&json, arena);
    report_write_json(&json, &report);
    ck_assert(json_check(json.at, json.n, NULL));
    ck_assert(json_is(text_str(&json), "blocks/0/rows/2/p95/error", "0.125"));
    for (unsigned width = 60; width <= 200; width += 20) {
        const char *s = text_of(arena, &report, width, true, false);
        check_page(arena, s, width, true);
        for (size_t i = 0; i < 4; i++) {
            const struct spread *row = &block->spreads->at[i];
            for (int k = 0; k < SPREAD_PARTS; k++) {
                char number[32], exact[32];
                number_text(number, row->parts[k].value, STYLE_PLAIN);
                text_double(exact, row->parts[k].value);
                ck_assert(strstr(line_of(s, row->label), number) != NULL);
                ck_assert(strstr(text_str(&json), exact) != NULL);
            }
        }
    }
}
END_TEST

/* --- HTML --- */

static double number_behind(const char **at, const char *before)
{
    const char *found = strstr(*at, before);
    ck_assert_msg(found != NULL, "no %s", before);
    *at = found + strlen(before);
    return strtod(*at, NULL);
}

/* On a scale from 0 places are in proportion to values, to a tenth of the strip's unit. */
START_TEST(strips_of_the_page_are_right)
{
    add("first", "a", 1, 3, 5, 10);
    add("second", "a", 2, 4, 4, 7.5);
    struct text t;
    text_init(&t, arena);
    report_write_html(&t, &report);
    const char *at = strstr(text_str(&t), "<tbody>");
    for (size_t i = 0; i < 2; i++) {
        const struct spread *s = &block->spreads->at[i];
        double zero = number_behind(&at, "class=\"faint\" x1=\"");
        double ten = number_behind(&at, "x2=\"");
        double low = number_behind(&at, "class=\"rule\" x1=\""), high = number_behind(&at, "x2=\"");
        double median = number_behind(&at, "class=\"median\" x1=\"");
        double places[] = {number_behind(&at, "cx=\""), low, median, high};
        for (int k = 0; k < SPREAD_PARTS; k++)
            ck_assert_double_eq_tol(places[k], zero + (ten - zero) * s->parts[k].value / 10, 0.051);
    }
    ck_assert(strstr(text_str(&t), "aria-label=\"mean 5, 5 % 1, median 3, 95 % 10 a\"") != NULL);
}
END_TEST

/* --- by hand --- */

START_TEST(a_number_that_is_known)
{
    add("exact", "a", 4, 4, 4, 4);
    add("wide", "a", 1, 2, 3, 8);
    const char *s = text_of(arena, &report, 100, true, false), *strip = strip_of(s, "exact");
    ck_assert_uint_eq(strspn(strip, ".") + 1 + strspn(strchr(strip, '@') + 1, "."), strlen(strip));
}
END_TEST

START_TEST(numbers_on_both_sides_of_0)
{
    add("loss", "EUR", -100, -60, -50, 20);
    const char *s = text_of(arena, &report, 120, true, false);
    ck_assert(strstr(s, "linear scale from -100 to 20") != NULL);
    const char *strip = strip_of(s, "loss");
    ck_assert(strip[0] == '[' && strip[strlen(strip) - 1] == ']');
}
END_TEST

/* From 30 times the least on a scale is logarithmic, where all are above 0. */
START_TEST(a_log_scale_is_for_what_is_far_apart)
{
    add("first", "a", 1, 2, 3, 29.9);
    ck_assert(strstr(text_of(arena, &report, 120, true, false), "linear scale from 0 to 29.9"));
    add("second", "a", 1, 2, 3, 30.1);
    ck_assert(strstr(text_of(arena, &report, 120, true, false), "log scale from 1 to 30.1"));
    add("third", "a", 0, 2, 3, 30.1);
    ck_assert(strstr(text_of(arena, &report, 120, true, false), "linear scale from 0 to 30.1"));
}
END_TEST

START_TEST(as_csv)
{
    struct spread *s = add("a, b", "EUR/a", 1, 2, 2.5, 8);
    s->parts[SPREAD_MEAN].error = 0.5;
    struct text csv;
    text_init(&csv, arena);
    report_write_csv(&csv, &report);
    ck_assert_str_eq(text_str(&csv),
                     "label,unit,mean,p5,p50,p95,mean-error,p5-error,p50-error,p95-error\r\n"
                     "\"a, b\",EUR/a,2.5,1,2,8,0.5,,,\r\n");
}
END_TEST

Suite *suite_report_spreads(void)
{
    Suite *s = suite_create("report spreads");
    TCase *t = tcase_create("spreads");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_loop_test(t, strips_are_right, 0, 60);
    tcase_add_loop_test(t, all_numbers_are_told, 0, 10);
    tcase_add_test(t, a_number_that_is_known);
    tcase_add_test(t, numbers_on_both_sides_of_0);
    tcase_add_test(t, strips_of_the_page_are_right);
    tcase_add_test(t, a_log_scale_is_for_what_is_far_apart);
    tcase_add_test(t, as_csv);
    suite_add_tcase(s, t);
    return s;
}
