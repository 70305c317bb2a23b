/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Curves. The picture is read back from its text, the y axis from its own labels, and each
 * column is compared with what the line does between that column's edges, computed here in
 * long double from the points. */
#include "report_test.h"

#include <math.h>
#include <signal.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/resource.h>
#include <sys/wait.h>
#include <unistd.h>

#include "base/utf8.h"
#include "json_check.h"
#include "random.h"

enum { ROWS = 13, WIDEST = 200 };

static struct arena *arena;
static struct report report;
static struct block *block;

static void setup(void)
{
    arena = arena_new(NULL);
    report_init(&report, arena);
    block = report_curve(&report, "curve", NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* --- reading a picture; row 0 is the x axis --- */

struct picture {
    const char *cells[ROWS][WIDEST];
    const char *labels; /* below the x axis */
    int columns, axis;  /* axis: its column on the page */
    double low, high;   /* first and last label of the y axis */
};

static bool is_one_of(const char *glyph, const char *const *set)
{
    for (; *set; set++)
        if (text_equal(glyph, *set))
            return true;
    return false;
}

static const char *glyph_of(const char **s)
{
    size_t n = 1;
    while (((unsigned char)(*s)[n] & 0xc0) == 0x80)
        n++;
    *s += n;
    return arena_strn(arena, *s - n, n);
}

static int read_row(struct picture *p, const char *line, int y)
{
    static const char *const axes[] = {"|", "+", "│", "┤", "└", NULL};
    int at = 0, x = 0;
    while (!is_one_of(glyph_of(&line), axes))
        at++;
    ck_assert_msg(p->axis == 0 || p->axis == at, "the axis is not straight");
    p->axis = at;
    while (*line)
        p->cells[y][x++] = glyph_of(&line);
    int columns = x;
    while (x < WIDEST)
        p->cells[y][x++] = " ";
    return columns;
}

/* A picture at the start of s, without heads but for what is said in brackets. */
static struct picture picture_of(const char *s)
{
    struct picture p = {0};
    struct page_lines lines = lines_of(arena, s);
    if (*lines.at[0] == '(')
        lines.at++;
    for (int i = 0; i < ROWS; i++)
        p.columns = read_row(&p, lines.at[i], ROWS - 1 - i);
    p.high = strtod(lines.at[0], NULL);
    p.low = strtod(lines.at[ROWS - 1], NULL);
    p.labels = lines.at[ROWS];
    ck_assert(p.high > p.low);
    return p;
}

static struct picture draw(unsigned width, bool ascii)
{
    const char *s = text_of(arena, &report, width, ascii, false);
    check_page(arena, s, width, ascii);
    return picture_of(s);
}

/* --- what a line does in a column --- */

struct truth {
    bool any, steady; /* steady: only rises or only falls, without a jump */
    long double least, greatest, centre;
};

static long double place(double v, bool log, double low, double high, int cells)
{
    long double lo = log ? log10l(low) : low, hi = log ? log10l(high) : high;
    return ((log ? log10l(v) : v) - lo) / (hi - lo) * cells;
}

static void see(struct truth *t, long double y, long double *last, int *way)
{
    int now = t->any ? (y > *last) - (y < *last) : 0;
    t->steady = t->steady && (!now || !*way || now == *way);
    *way = now ? now : *way;
    t->least = t->any ? fminl(t->least, y) : y;
    t->greatest = t->any ? fmaxl(t->greatest, y) : y;
    *last = y;
    t->any = true;
}

/* Points of `l` as columns and rows: the stretch from point k to the next, cut to the
 * column. */
static struct truth truth_at(const struct picture *p, const struct curve_line *l, int column)
{
    const struct curve *c = block->curve;
    const struct curve_point *at = l->points.at;
    double lo = c->lines.at[0].points.at[0].x;
    double hi = c->lines.at[0].points.at[c->lines.at[0].points.n - 1].x;
    struct truth t = {.steady = true, .centre = NAN};
    long double last = 0, left = column - 0.5L, right = column + 0.5L;
    int way = 0;
    for (size_t k = 0; k + 1 < l->points.n; k++) {
        long double ax = place(at[k].x, c->x.log, lo, hi, p->columns - 1);
        long double bx = place(at[k + 1].x, c->x.log, lo, hi, p->columns - 1);
        long double ay = place(at[k].y, c->y.log, p->low, p->high, ROWS - 1);
        long double by = place(at[k + 1].y, c->y.log, p->low, p->high, ROWS - 1);
        if (bx < left || ax >= right)
            continue;
        long double slope = bx > ax ? (by - ay) / (bx - ax) : 0;
        see(&t, ax < left ? ay + slope * (left - ax) : ay, &last, &way);
        see(&t, bx > right ? ay + slope * (right - ax) : by, &last, &way);
        t.steady = t.steady && (ax < bx || ay == by);
        if (ax <= column && column <= bx)
            t.centre = ax < bx ? ay + slope * (column - ax) : by;
    }
    return t;
}

/* Points at awkward places, sometimes with a jump. All lines have the same ends. */
static void add_some_line(struct random *r, double lo, double hi, double least, double greatest,
                          const char *symbol)
{
    struct curve_line *l = curve_add_line(&report, block, "line", symbol);
    int n = (int)random_range(r, 2, 60);
    for (int i = 0; i < n; i++) {
        double part = i + 1 == n ? 1 : i == 0 ? 0 : (i + random_uniform(r, -0.4, 0.4)) / (n - 1);
        double x = block->curve->x.log ? lo * pow(hi / lo, part) : lo + (hi - lo) * part;
        if (i == 0 || i + 1 == n)
            x = i ? hi : lo;
        bool log = block->curve->y.log;
        for (int64_t k = random_range(r, 0, 4) / 4; k >= 0; k--)
            curve_add_point(&report, l, x,
                            log ? random_log_uniform(r, least, greatest)
                                : random_uniform(r, least, greatest));
    }
}

/* --- areas --- */

/* Eighths of a row from the bottom that are filled; a '.' is the lower half. */
static int eighths_of(const char *glyph)
{
    static const char *const parts[] = {" ", "▁", "▂", "▃", "▄", "▅", "▆", "▇", "█"};
    if (*glyph == '.')
        return 4;
    if (*glyph == ':')
        return 8;
    for (int i = 0; i < 9; i++)
        if (text_equal(glyph, parts[i]))
            return i;
    return -1;
}

static void check_area_column(const struct picture *p, int x, bool ascii)
{
    struct truth t = truth_at(p, &block->curve->lines.at[0], x);
    int y = 1, filled = 0, band = 0;
    for (; y < ROWS && eighths_of(p->cells[y][x]) > 0; y++)
        filled += eighths_of(p->cells[y][x]);
    for (; y < ROWS && text_equal(p->cells[y][x], ascii ? "|" : "░"); y++)
        band++;
    for (; y < ROWS; y++)
        ck_assert_str_eq(p->cells[y][x], " ");
    long double solid = 0.5L + filled / 8.0L, fine = (ascii ? 0.25L : 1 / 16.0L) + 1e-6L;
    bool wide = !t.steady && t.greatest - t.least >= 1;
    ck_assert(t.any);
    ck_assert_int_eq(band > 0, wide);
    if (wide) {
        ck_assert(fabsl(solid - t.least) <= 0.5L + 1e-6L);
        ck_assert(fabsl(solid + band - t.greatest) <= 0.5L + 1e-6L);
        return;
    }
    long double value = t.steady ? t.centre : (t.least + t.greatest) / 2;
    ck_assert_msg(fabsl(solid - fmaxl(value, 0.5L)) <= fine, "column %d: %Lg, not %Lg", x, solid,
                  value);
}

START_TEST(areas_are_right)
{
    struct random r = random_seed(7100 + (uint64_t)_i);
    block->curve->x.log = _i % 3 == 0;
    double lo = random_log_uniform(&r, 1e-3, 1e3), top = random_log_uniform(&r, 1e-2, 1e4);
    add_some_line(&r, lo, lo * random_uniform(&r, 3, 300), 0, top, "o");
    for (unsigned width = 60; width <= 200; width += 13) {
        bool ascii = width % 2;
        struct picture p = draw(width, ascii);
        ck_assert_double_eq(p.low, 0);
        for (int x = 0; x < p.columns; x++)
            check_area_column(&p, x, ascii);
    }
}
END_TEST

/* 400 teeth on fewer columns: each column shows the whole tooth. */
START_TEST(a_narrow_sawtooth_stays)
{
    struct curve_line *l = curve_add_line(&report, block, "teeth", "o");
    for (int i = 0; i < 400; i++) {
        curve_add_point(&report, l, i, 0);
        curve_add_point(&report, l, i + 1, 2.385);
    }
    struct picture p = draw(60, true);
    int top = (int)floor(2.385 / p.high * 12);
    ck_assert_int_gt(top, 8);
    for (int x = 0; x < p.columns; x++)
        for (int y = 1; y < ROWS; y++)
            ck_assert_str_eq(p.cells[y][x], y <= top ? "|" : " ");
}
END_TEST

/* --- strokes: an axis that happens to begin at 0 has an area --- */

/* Lower half 1, upper half 2. */
static int halves_of(const char *glyph)
{
    if (*glyph == '.' || text_equal(glyph, "▄"))
        return 1;
    if (*glyph == '\'' || text_equal(glyph, "▀"))
        return 2;
    return *glyph == ':' || text_equal(glyph, "█") ? 3 : 0;
}

static void check_stroke(const struct picture *p, struct truth t, int x)
{
    int first = -1, last = -1, n = 0;
    for (int half = 0; half < 2 * ROWS; half++) {
        if (!(halves_of(p->cells[half / 2][x]) & 1 << half % 2))
            continue;
        first = first < 0 ? half : first;
        last = half;
        n++;
    }
    ck_assert(t.any && n > 0 && n == last - first + 1);
    bool flat = t.greatest - t.least < 0.5L;
    long double middle = (t.least + t.greatest) / 2;
    long double least = flat ? middle : t.least, greatest = flat ? middle : t.greatest;
    ck_assert_msg(fabsl(first / 2.0L - 0.25L - least) <= 0.25L + 1e-6L,
                  "column %d: %d, not %Lg .. %Lg; %g", x, first, least, greatest, p->low);
    ck_assert(fabsl(last / 2.0L - 0.25L - greatest) <= 0.25L + 1e-6L);
}

static void check_stroke_column(const struct picture *p, int x)
{
    check_stroke(p, truth_at(p, &block->curve->lines.at[0], x), x);
}

START_TEST(strokes_are_right)
{
    struct random r = random_seed(7200 + (uint64_t)_i);
    bool log = _i % 2;
    block->curve->y.log = log;
    block->curve->y.from_data = true;
    double least = log ? random_log_uniform(&r, 1e-9, 1) : random_uniform(&r, -300, 300);
    double greatest =
        log ? least * random_log_uniform(&r, 20, 1e8) : least + random_log_uniform(&r, 1, 1e3);
    add_some_line(&r, 2.385, 61.7, least, greatest, "o");
    for (unsigned width = 60; width <= 200; width += 13) {
        struct picture p = draw(width, width % 2);
        for (int x = 0; x < p.columns; x++) {
            if (p.low == 0 && !log)
                check_area_column(&p, x, width % 2);
            else
                check_stroke_column(&p, x);
        }
    }
}
END_TEST

/* --- several lines --- */

static bool holds(const struct truth *t, int y)
{
    bool flat = t->greatest - t->least < 1;
    long double middle = (t->least + t->greatest) / 2;
    long double least = flat ? middle : t->least, greatest = flat ? middle : t->greatest;
    return t->any && floorl(least + 0.5L) <= y && y <= floorl(greatest + 0.5L);
}

START_TEST(several_lines_are_right)
{
    static const char *const symbols[] = {"a", "b", "c"};
    struct random r = random_seed(7300 + (uint64_t)_i);
    block->curve->x.log = _i % 2;
    for (int i = 0; i < 3; i++)
        add_some_line(&r, 0.2385, 7.61, 0, 61.7, symbols[i]);
    for (unsigned width = 60; width <= 200; width += 13) {
        struct picture p = draw(width, width % 2);
        for (int x = 0; x < p.columns; x++) {
            struct truth t[3];
            for (int i = 0; i < 3; i++)
                t[i] = truth_at(&p, &block->curve->lines.at[i], x);
            for (int y = 0; y < ROWS; y++) {
                const char *drawn = strchr("abc", *p.cells[y][x]);
                bool any = holds(&t[0], y) || holds(&t[1], y) || holds(&t[2], y);
                ck_assert_int_eq(drawn != NULL, any);
                ck_assert(!drawn || holds(&t[*drawn - 'a'], y));
            }
        }
    }
}
END_TEST

/* --- steps --- */

/* By what a step is: the values that hold anywhere between the edges of the column. */
static struct truth step_truth_at(const struct picture *p, const struct curve_line *l, int column)
{
    const struct curve *c = block->curve;
    const struct curve_point *at = l->points.at;
    double lo = c->lines.at[0].points.at[0].x, hi = array_last(&c->lines.at[0].points)->x;
    struct truth t = {0};
    for (size_t k = 0; k < l->points.n; k++) {
        bool last = k + 1 == l->points.n;
        long double from = place(at[k].x, c->x.log, lo, hi, p->columns - 1);
        long double until = last ? from : place(at[k + 1].x, c->x.log, lo, hi, p->columns - 1);
        long double y = place(at[k].y, c->y.log, p->low, p->high, ROWS - 1);
        if (until < column - 0.5L || from >= column + 0.5L)
            continue;
        t.least = t.any ? fminl(t.least, y) : y;
        t.greatest = t.any ? fmaxl(t.greatest, y) : y;
        t.any = true;
    }
    return t;
}

/* One that only falls, from 1 to the sixth decade below it. */
START_TEST(steps_are_right)
{
    struct random r = random_seed(7600 + (uint64_t)_i);
    block->curve->x.log = _i % 2;
    block->curve->y.log = true;
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    l->steps = true;
    int n = (int)random_range(&r, 3, 30);
    double x = random_log_uniform(&r, 1, 1e6), y = 1;
    for (int i = 0; i < n; i++) {
        x *= random_uniform(&r, 1.1, 3);
        y *= random_uniform(&r, 0.65, 0.9);
        curve_add_point(&report, l, x, i + 1 == n ? 1.0385e-6 : y);
    }
    for (unsigned width = 60; width <= 200; width += 13) {
        struct picture p = draw(width, width % 2);
        ck_assert_double_eq(p.high, 1);
        ck_assert_double_eq_tol(p.low, 1e-6, 1e-18);
        for (int i = 0; i < p.columns; i++)
            check_stroke(&p, step_truth_at(&p, l, i), i);
    }
}
END_TEST

START_TEST(several_steps_are_right)
{
    struct random r = random_seed(7700 + (uint64_t)_i);
    for (int i = 0; i < 2; i++) {
        add_some_line(&r, 0.2385, 7.61, 0, 61.7, i ? "b" : "a");
        block->curve->lines.at[i].steps = true;
    }
    struct picture p = draw(60 + (unsigned)_i, false);
    for (int x = 0; x < p.columns; x++) {
        struct truth a = step_truth_at(&p, &block->curve->lines.at[0], x);
        struct truth b = step_truth_at(&p, &block->curve->lines.at[1], x);
        for (int y = 0; y < ROWS; y++) {
            char drawn = *p.cells[y][x];
            ck_assert_int_eq(drawn == 'a' || drawn == 'b', holds(&a, y) || holds(&b, y));
            ck_assert(drawn != 'a' || holds(&a, y));
            ck_assert(drawn != 'b' || holds(&b, y));
        }
    }
}
END_TEST

/* Each stretch is level or upright; the numbers are those that were given. */
START_TEST(steps_of_a_picture)
{
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    struct text html, json;
    text_init(&html, arena);
    text_init(&json, arena);
    l->steps = true;
    curve_add_point(&report, l, 0, 0.25);
    curve_add_point(&report, l, 1, 1);
    curve_add_point(&report, l, 3, 1);
    report_write_html(&html, &report);
    report_write_json(&json, &report);
    ck_assert(json_is(text_str(&json), "blocks/0/lines/0/steps", "true"));
    ck_assert(json_is(text_str(&json), "blocks/0/lines/0/points/1/1", "1"));
    double x[4], y[4];
    const char *s = strstr(text_str(&html), "<path class=\"line l0\" d=\"M");
    s = strchr(s, 'M');
    for (int i = 0; i < 4; i++) {
        char *end;
        ck_assert(*s == (i ? 'L' : 'M'));
        x[i] = strtod(s + 1, &end);
        y[i] = strtod(end, &end);
        s = end;
    }
    ck_assert(*s == '"');
    ck_assert(x[0] < x[1] && x[1] == x[2] && x[2] < x[3]);
    ck_assert(y[0] == y[1] && y[1] > y[2] && y[2] == y[3]);
    ck_assert_double_eq_tol(x[3] - x[2], 2 * (x[1] - x[0]), 0.11);
}
END_TEST

/* Two lines at one place are seen in turn; a symbol is used once. */
START_TEST(equal_lines_are_both_seen)
{
    for (int i = 0; i < 2; i++) {
        struct curve_line *l = curve_add_line(&report, block, i ? "two" : "one", "o");
        curve_add_point(&report, l, 0, 2.385);
        curve_add_point(&report, l, 10, 2.385);
    }
    const char *s = text_of(arena, &report, 60, false, false);
    ck_assert(strstr(s, "oxoxoxoxoxoxox"));
    ck_assert(strstr(s, "\no   one") && strstr(s, "\nx   two"));
}
END_TEST

/* --- ticks --- */

static const struct {
    double lo, hi;
    bool log;
    enum number_style style;
    unsigned width;
    const char *labels;
} ticks[] = {
    {2027, 2052, false, STYLE_YEAR, 80, "2030 2035 2040 2045 2050"},
    {2027.25, 2030.5, false, STYLE_YEAR, 80, "2028 2029 2030"},
    {2027.25, 2028.5, false, STYLE_YEAR, 80, "2027.4 2027.6 2027.8 2028 2028.2 2028.4"},
    {2027, 2043, false, STYLE_YEAR, 80, "2028 2030 2032 2034 2036 2038 2040 2042"},
    {2027, 2044, false, STYLE_YEAR, 80, "2028 2032 2036 2040 2044"},
    {0, 25, false, STYLE_PLAIN, 60, "0 5 10 15 20 25"},
    {0.25, 8, true, STYLE_PLAIN, 60, "0.25 0.5 1 2 4 8"},
    {0.25, 4, true, STYLE_PLAIN, 200, "0.25 0.5 1 2 4"},
    {0.03, 0.9, true, STYLE_PLAIN, 80, "0.05 0.1 0.2 0.5"},
    {1e-4, 1, true, STYLE_PROBABILITY, 80, "1e-4 1e-3 0.01 0.1 1"},
    {1e-200, 1e200, true, STYLE_PLAIN, 60, "1e-200 1e-100 1 1e100 1e200"},
    {1.1, 1.9, true, STYLE_PLAIN, 80, "1.2 1.4 1.6 1.8"},
    {1e6, 1e6 + 8, false, STYLE_PLAIN, 120, "1000000 1000002 1000004 1000006 1000008"},
    {0, 1e-5, false, STYLE_PLAIN, 80, "0 2e-6 4e-6 6e-6 8e-6 10e-6"},
    {-1e300, 1e300, false, STYLE_PLAIN, 80, "-10e299 -5e299 0 5e299 10e299"},
    {0, 0.5, false, STYLE_PERCENT, 80, "0 10 20 30 40 50"},
    {7, 7, false, STYLE_PLAIN, 80, "4 5 6 7 8 9 10"},
    {0, 0, false, STYLE_PLAIN, 80, "-1 -0.5 0 0.5 1"},
    {2027, 2027, false, STYLE_YEAR, 80, "2026 2027 2028"},
    {3, 3, true, STYLE_PLAIN, 80, "0.5 1 2 4 8 16"},
};

static const char *words_of(const char *s)
{
    struct text t;
    text_init(&t, arena);
    while (*(s += strspn(s, " "))) {
        size_t n = strcspn(s, " ");
        text_add(&t, t.n ? " " : "");
        text_addn(&t, s, n);
        s += n;
    }
    return text_str(&t);
}

START_TEST(ticks_are_round)
{
    curve_set_x(&report, block, "x", "", "", ticks[_i].style)->log = ticks[_i].log;
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    curve_add_point(&report, l, ticks[_i].lo, 1);
    curve_add_point(&report, l, ticks[_i].hi, 2);
    struct picture p = draw(ticks[_i].width, true);
    ck_assert_str_eq(words_of(p.labels), ticks[_i].labels);
}
END_TEST

/* Each label stands centred below a tick, which is within half a column of its value. */
START_TEST(ticks_are_at_their_values)
{
    struct random r = random_seed(7400 + (uint64_t)_i);
    bool log = _i % 2;
    double lo = random_log_uniform(&r, 1e-3, 1e3), hi = lo * random_log_uniform(&r, 1.5, 1e5);
    block->curve->x.log = log;
    add_some_line(&r, lo, hi, 0, 1, "o");
    for (unsigned width = 60; width <= 200; width += 3) {
        struct picture p = draw(width, true);
        int n = 0;
        for (const char *s = p.labels; *(s += strspn(s, " ")); s += strcspn(s, " "), n++) {
            int columns = (int)strcspn(s, " "), at = (int)(s - p.labels) + columns / 2;
            int column = at - p.axis - 1;
            long double true_place = place(strtod(s, NULL), log, lo, hi, p.columns - 1);
            ck_assert_str_eq(p.cells[0][column], "+");
            ck_assert_msg(fabsl(true_place - column) <= 0.5L + 1e-6L, "%s", p.labels);
        }
        ck_assert_msg(n >= (log ? 3 : 4) && n <= 8, "%d ticks: %s", n, p.labels);
    }
}
END_TEST

/* Top, bottom and at least one between; the same number of rows for the same step. */
START_TEST(y_labels_are_evenly_spaced)
{
    struct random r = random_seed(7500 + (uint64_t)_i);
    double top = random_log_uniform(&r, 1e-7, 1e9);
    add_some_line(&r, 0, 10, top / 3, top, "o");
    struct page_lines lines = lines_of(arena, text_of(arena, &report, 80, true, false));
    double high = strtod(lines.at[0], NULL), most = 0;
    int n = 0;
    for (int i = 0; i < ROWS; i++) {
        if (lines.at[i][strspn(lines.at[i], " ")] == '|')
            continue;
        char *end;
        double value = strtod(lines.at[i], &end);
        ck_assert(end != lines.at[i]);
        ck_assert_double_eq_tol(value, high * (12 - i) / 12, 1e-9 * high);
        n++;
    }
    for (size_t k = 0; k < block->curve->lines.at[0].points.n; k++)
        most = fmax(most, block->curve->lines.at[0].points.at[k].y);
    ck_assert(n >= 3 && n <= 7);
    ck_assert(high >= most * (1 - 1e-9) && high <= 2 * most);
}
END_TEST

START_TEST(money_has_a_prefix)
{
    curve_set_x(&report, block, "x", "Years", "a", STYLE_PLAIN);
    curve_set_y(&report, block, "y", "Risk", "EUR/a", STYLE_MONEY);
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    curve_add_point(&report, l, 0, 23850);
    curve_add_point(&report, l, 1, 41200);
    const char *s = text_of(arena, &report, 60, true, false);
    ck_assert_msg(text_starts(s, "Risk, kEUR/a\n50 +"), "%s", s);
    ck_assert(strstr(s, "Years, a\n"));
    block->curve->y.from_data = true;
    s = text_of(arena, &report, 60, true, false);
    ck_assert_msg(text_starts(s, "Risk, kEUR/a (the axis does not begin at 0)\n"), "%s", s);
}
END_TEST

/* --- what is out of the common --- */

START_TEST(curves_without_points)
{
    ck_assert_str_eq(text_of(arena, &report, 60, true, false), "(no points)\n");
    curve_add_line(&report, block, "idle", "o");
    const char *s = text_of(arena, &report, 60, true, false);
    ck_assert_msg(!strstr(s, "+") && strstr(s, "idle"), "%s", s);
}
END_TEST

START_TEST(one_point_is_seen)
{
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    curve_add_point(&report, l, 7, 2.385);
    struct picture p = draw(60, true);
    int n = 0;
    for (int x = 0; x < p.columns; x++)
        n += *p.cells[1][x] != ' ';
    ck_assert_int_eq(n, 1);
    ck_assert_str_eq(p.cells[1][p.columns / 2], ":");
}
END_TEST

/* The axis of a line of zeros is heavy. */
START_TEST(zeros_are_seen)
{
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    curve_add_point(&report, l, 0, 0);
    curve_add_point(&report, l, 10, 0);
    struct picture p = draw(60, true);
    ck_assert_double_eq(p.high, 1);
    for (int x = 0; x < p.columns; x++)
        ck_assert(*p.cells[0][x] == '=' || *p.cells[0][x] == '+');
}
END_TEST

START_TEST(equal_values_far_from_zero)
{
    block->curve->y.from_data = true;
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    curve_add_point(&report, l, 0, -300);
    curve_add_point(&report, l, 10, -300);
    struct picture p = draw(60, true);
    ck_assert(p.low <= -300 && p.high >= -300);
    check_stroke_column(&p, 7);
}
END_TEST

START_TEST(a_log_axis_has_no_zero)
{
    block->curve->y.log = true;
    struct curve_line *l = curve_add_line(&report, block, "teeth", "o");
    static const double y[] = {1e-3, 1e-2, 0, 1e-3, 1e-2, -1};
    for (int i = 0; i < 6; i++)
        curve_add_point(&report, l, i < 3 ? i : i + 4, y[i]);
    curve_add_mark(&report, block, "nil", 3, 0);
    const char *s = text_of(arena, &report, 120, true, false);
    ck_assert_msg(strstr(s, "Not in the picture, for a log axis has no place at or below 0: "
                            "2 points of teeth, nil\n"),
                  "%s", s);
    struct picture p = picture_of(s);
    int gap = 0;
    for (int x = 0; x < p.columns; x++) {
        int n = 0;
        for (int y_row = 0; y_row < ROWS; y_row++)
            n += halves_of(p.cells[y_row][x]) > 0;
        gap += n == 0;
    }
    ck_assert_int_gt(gap, p.columns / 2); /* from 1 to 7 of 0 to 8 */
    block->curve->lines.n = 0;
    s = text_of(arena, &report, 120, true, false);
    ck_assert_msg(!strstr(s, "+-") && strstr(s, "at or below 0: nil\n"), "%s", s);
}
END_TEST

START_TEST(huge_ranges)
{
    for (int k = 0; k < 8; k++) {
        struct report r;
        report_init(&r, arena);
        struct block *b = report_curve(&r, "curve", NULL);
        b->curve->x.log = k & 1;
        b->curve->y.log = k & 2;
        struct curve_line *l = curve_add_line(&r, b, "line", "o");
        curve_add_point(&r, l, k & 1 ? 1e-300 : -1e300, k & 2 ? 1e-300 : -1e300);
        curve_add_point(&r, l, 1e300, k & 4 ? 1e300 : 5e-324);
        curve_add_mark(&r, b, "here", 1, 1);
        for (unsigned width = 60; width <= 200; width += 3)
            check_page(arena, text_of(arena, &r, width, true, false), width, true);
    }
}
END_TEST

/* Does this end the process? Tried in one of its own. */
static bool aborts(void (*what)(void))
{
    int status = 0;
    fflush(NULL);
    pid_t child = fork();
    ck_assert_int_ge(child, 0);
    if (child == 0) {
        struct rlimit none = {0, 0};
        setrlimit(RLIMIT_CORE, &none);
        if (freopen("/dev/null", "w", stderr))
            what();
        _exit(0);
    }
    ck_assert_int_eq(waitpid(child, &status, 0), child);
    return WIFSIGNALED(status) && WTERMSIG(status) == SIGABRT;
}

static void add_undefined_point(void)
{
    curve_add_point(&report, curve_add_line(&report, block, "", ""), 0, NAN);
}

static void go_back(void)
{
    struct curve_line *l = curve_add_line(&report, block, "", "");
    curve_add_point(&report, l, 1, 0);
    curve_add_point(&report, l, 0.5, 0);
}

START_TEST(wrong_points_are_refused)
{
    ck_assert(aborts(add_undefined_point));
    ck_assert(aborts(go_back));
}
END_TEST

/* --- marks --- */

START_TEST(marks_stand_at_their_places)
{
    struct curve_line *l = curve_add_line(&report, block, "line", "o");
    curve_add_point(&report, l, 0, 40);
    curve_add_point(&report, l, 5, 10);
    curve_add_point(&report, l, 10, 40);
    curve_add_mark(&report, block, "best", 5, 10);
    for (unsigned width = 60; width <= 200; width += 3) {
        const char *s = text_of(arena, &report, width, true, false);
        struct picture p = picture_of(s);
        int x = (p.columns - 1) / 2 + (p.columns - 1) % 2;
        ck_assert_str_eq(p.cells[3][x], "*");
        ck_assert(strstr(s, " best ") && !strstr(s, "for want of room"));
    }
    for (int i = 0; i < 30; i++)
        curve_add_mark(&report, block, arena_printf(arena, "number %d", i), 5, 10);
    ck_assert(strstr(text_of(arena, &report, 60, true, false),
                     "In the picture without a label, for want of room: "));
}
END_TEST

/* --- JSON and CSV --- */

static void add_data(void)
{
    curve_set_x(&report, block, "interval", "Interval", "a", STYLE_PLAIN)->log = true;
    curve_set_y(&report, block, "share", "Share", "%", STYLE_PERCENT);
    struct curve_line *l = curve_add_line(&report, block, "a \"b\", \033c", "o");
    l->figure = "X.share";
    curve_add_point(&report, l, 0.25, 0.2385);
    curve_add_point(&report, l, 0.25, -0.0);
    curve_add_mark(&report, block, "=best", 2.5, 0.1)->x_figure = "X.best";
}

START_TEST(as_json)
{
    struct text t;
    size_t bad = 0;
    text_init(&t, arena);
    add_data();
    report_write_json(&t, &report);
    ck_assert_msg(json_check(t.at, t.n, &bad), "not JSON at %zu: %s", bad, t.at);
    ck_assert_str_eq(
        text_str(&t),
        "{\"blocks\": [\n  {\"key\": \"curve\", \"type\": \"curve\", \"x\": {\"key\": "
        "\"interval\", \"head\": \"Interval\", \"unit\": \"a\", \"scale\": \"log\"}, \"y\": "
        "{\"key\": \"share\", \"head\": \"Share\", \"scale\": \"linear\"}, \"lines\": [\n    "
        "{\"name\": \"a \\\"b\\\", \\u001bc\", \"symbol\": \"o\", \"figure\": \"X.share\", "
        "\"points\": [[0.25, 0.2385], [0.25, 0]]}], \"marks\": [\n    {\"label\": \"=best\", "
        "\"x\": {\"value\": 2.5, \"unit\": \"a\", \"figure\": \"X.best\"}, \"y\": {\"value\": "
        "0.1}}]}]}\n");
}
END_TEST

START_TEST(as_csv)
{
    struct text t;
    text_init(&t, arena);
    report_write_csv(&t, &report);
    ck_assert_uint_eq(t.n, 0);
    add_data();
    report_write_csv(&t, &report);
    ck_assert_str_eq(text_str(&t), "line,mark,interval-a,share\r\n"
                                   "\"a \"\"b\"\", \\x1bc\",,0.25,0.2385\r\n"
                                   "\"a \"\"b\"\", \\x1bc\",,0.25,0\r\n"
                                   ",'=best,2.5,0.1\r\n");
}
END_TEST

Suite *suite_report_curve(void)
{
    Suite *s = suite_create("report curve");
    TCase *t = tcase_create("curve");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_loop_test(t, areas_are_right, 0, 20);
    tcase_add_loop_test(t, strokes_are_right, 0, 20);
    tcase_add_loop_test(t, several_lines_are_right, 0, 20);
    tcase_add_loop_test(t, steps_are_right, 0, 20);
    tcase_add_loop_test(t, several_steps_are_right, 0, 20);
    tcase_add_test(t, steps_of_a_picture);
    tcase_add_loop_test(t, ticks_are_round, 0, (int)(sizeof ticks / sizeof *ticks));
    tcase_add_loop_test(t, ticks_are_at_their_values, 0, 10);
    tcase_add_loop_test(t, y_labels_are_evenly_spaced, 0, 30);
    tcase_add_test(t, a_narrow_sawtooth_stays);
    tcase_add_test(t, equal_lines_are_both_seen);
    tcase_add_test(t, money_has_a_prefix);
    tcase_add_test(t, curves_without_points);
    tcase_add_test(t, one_point_is_seen);
    tcase_add_test(t, zeros_are_seen);
    tcase_add_test(t, equal_values_far_from_zero);
    tcase_add_test(t, a_log_axis_has_no_zero);
    tcase_add_test(t, huge_ranges);
    tcase_add_test(t, wrong_points_are_refused);
    tcase_add_test(t, marks_stand_at_their_places);
    tcase_add_test(t, as_json);
    tcase_add_test(t, as_csv);
    suite_add_tcase(s, t);
    return s;
}
