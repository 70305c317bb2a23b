/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Maps. The picture is read back from its text, and each place is compared with the cell that
 * is nearest on the scales, found here in long double. */
#include "report_test.h"

#include <math.h>
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
    block = report_map(&report, "map", NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* --- reading --- */

struct picture {
    struct page_lines lines;
    int rows, columns;
    size_t from; /* column of the page where cells begin */
};

/* The rows are the lines before the axis, which begins with the first plus below bars. */
static struct picture draw(unsigned width)
{
    struct picture p = {0};
    const char *s = text_of(arena, &report, width, true, false);
    check_page(arena, s, width, true);
    p.lines = lines_of(arena, s);
    if (*p.lines.at[0] == '(') /* "(log axis)" above a picture without a head */
        p.lines = (struct page_lines){p.lines.at + 1, p.lines.n - 1};
    for (size_t i = 0; i < p.lines.n && !p.columns; i++) {
        const char *line = p.lines.at[i], *axis = line + strspn(line, " ");
        size_t n = strlen(axis);
        if (n < 30 || *axis != '+' || strspn(axis, "+-") != n)
            continue;
        p.rows = (int)i;
        p.columns = (int)n - 1;
        p.from = (size_t)(axis - line) + 1;
    }
    ck_assert_msg(p.columns > 0, "no axis: %s", s);
    return p;
}

static char sign_at(const struct picture *p, int x, int y)
{
    const char *line = p->lines.at[p->rows - 1 - y];
    ck_assert(strlen(line) == p->from + (size_t)p->columns);
    return line[p->from + (size_t)x];
}

/* --- what must be there --- */

struct way {
    const double *values;
    size_t n;
    bool log;
};

static long double on_scale(const struct way *w, double value)
{
    return w->log ? log10l(value) : value;
}

static void ends_of(const struct way *w, long double *low, long double *high)
{
    *low = on_scale(w, w->values[0]);
    *high = on_scale(w, w->values[w->n - 1]);
    *low -= (on_scale(w, w->values[1]) - *low) / 2;
    *high += (*high - on_scale(w, w->values[w->n - 2])) / 2;
}

/* The nearest value to the centre of a cell of the page; -1 where two are as near. */
static long nearest(const struct way *w, int cell, int cells)
{
    long double low, high;
    ends_of(w, &low, &high);
    long double at = low + (high - low) * (cell + 0.5L) / cells, best = INFINITY, next = INFINITY;
    long found = -1;
    for (size_t i = 0; i < w->n; i++) {
        long double away = fabsl(on_scale(w, w->values[i]) - at);
        if (away < best) {
            next = best;
            best = away;
            found = (long)i;
        } else {
            next = fminl(next, away);
        }
    }
    return next - best < 1e-9L * (high - low) ? -1 : found;
}

static char letter_of(size_t choice)
{
    return choice == 0 ? '.' : (char)('A' + (int)choice - 1);
}

static int cell_of(const struct way *w, double value, int cells)
{
    long double low, high;
    ends_of(w, &low, &high);
    return (int)floorl((on_scale(w, value) - low) / (high - low) * cells);
}

static void check_cells(const struct picture *p)
{
    const struct map *m = block->map;
    struct way across = {m->xs.at, m->xs.n, m->x.log}, up = {m->ys.at, m->ys.n, m->y.log};
    int today_x = cell_of(&across, m->today_x, p->columns);
    int today_y = cell_of(&up, m->today_y, p->rows);
    for (int y = 0; y < p->rows; y++) {
        for (int x = 0; x < p->columns; x++) {
            long i = nearest(&across, x, p->columns), k = nearest(&up, y, p->rows);
            bool today = y == today_y && x >= today_x - 1 && x <= today_x + 1;
            char expected = today            ? x == today_x ? '+' : ' '
                            : i < 0 || k < 0 ? sign_at(p, x, y)
                                             : letter_of(m->cells.at[k * (long)m->xs.n + i].choice);
            ck_assert_msg(sign_at(p, x, y) == expected, "%d, %d: '%c' not '%c'", x, y,
                          sign_at(p, x, y), expected);
        }
    }
}

/* Values at uneven steps. */
static void add_values(struct random *r, size_t n, bool log,
                       void (*add)(struct report *, struct block *, double))
{
    double x = random_log_uniform(r, 1e-4, 1e3);
    for (size_t i = 0; i < n; i++) {
        add(&report, block, x);
        x = log ? x * random_uniform(r, 1.1, 3) : x + random_uniform(r, 0.5, 3);
    }
}

static void fill(struct random *r, size_t across, size_t up)
{
    struct map *m = block->map;
    m->x.log = random_index(r, 2);
    m->y.log = random_index(r, 2);
    for (int i = 0; i < 6; i++)
        map_add_choice(&report, block, arena_printf(arena, "choice%d", i), i == 0);
    add_values(r, across, m->x.log, map_add_x);
    add_values(r, up, m->y.log, map_add_y);
    for (size_t i = 0; i < across * up; i++)
        map_add_cell(&report, block, random_index(r, 6), random_uniform(r, -9, 99));
    map_set_today(block, m->xs.at[1] * 1.001, m->ys.at[up / 2] * 1.001);
}

START_TEST(cells_are_right)
{
    struct random r = random_seed(9300 + (uint64_t)_i);
    fill(&r, random_index(&r, 40) + 3, random_index(&r, 40) + 3);
    for (unsigned width = 60; width <= 200; width += 28) {
        struct picture p = draw(width);
        ck_assert_int_ge(p.rows, 8);
        ck_assert_int_le(p.rows, 20);
        check_cells(&p);
    }
}
END_TEST

START_TEST(the_key_names_all_choices)
{
    struct random r = random_seed(9400);
    fill(&r, 5, 4);
    map_set_worth(&report, block, "worth", "Worth", "EUR", STYLE_MONEY);
    const char *s = text_of(arena, &report, 100, true, false);
    ck_assert(strstr(s, ".   choice0") && strstr(s, "A   choice1") && strstr(s, "E   choice5"));
    ck_assert(strstr(s, "+   today") != NULL);
    map_set_today(block, 1e9, 1);
    ck_assert(strstr(text_of(arena, &report, 100, true, false), "outside the map") != NULL);
}
END_TEST

static void check_letters(void)
{
    struct text t;
    text_init(&t, arena);
    report_write_html(&t, &report);
    const char *from = strstr(text_str(&t), "<svg viewBox"), *end = strstr(from, "</svg>");
    const char *picture = arena_strn(arena, from, (size_t)(end - from));
    for (size_t i = 0; i < block->map->cells.n; i++) {
        size_t choice = block->map->cells.at[i].choice;
        const char *sign = choice ? arena_printf(arena, "%c", letter_of(choice)) : "·";
        const char *letter = arena_printf(arena, "\"middle\">%s</text>", sign);
        ck_assert_msg(strstr(picture, letter) != NULL, "no %s", sign);
    }
    ck_assert(strstr(picture, ">today</text>") != NULL);
}

/* Colour is never alone: each choice that has a cell has its letter in the picture. */
START_TEST(every_area_has_its_letter)
{
    struct random r = random_seed(9450 + (uint64_t)_i);
    fill(&r, random_index(&r, 20) + 3, random_index(&r, 20) + 3);
    check_letters();
}
END_TEST

/* Cells that are narrower than a letter. */
START_TEST(a_narrow_area_has_its_letter)
{
    for (int i = 0; i < 4; i++)
        map_add_choice(&report, block, "choice", i == 0);
    for (int i = 0; i < 80; i++)
        map_add_x(&report, block, i);
    map_add_y(&report, block, 1);
    for (size_t i = 0; i < 80; i++)
        map_add_cell(&report, block, i < 3 ? i : 3, 0);
    map_set_today(block, 40, 1);
    check_letters();
}
END_TEST

START_TEST(one_cell)
{
    map_add_choice(&report, block, "only", false);
    map_add_x(&report, block, 2.385);
    map_add_y(&report, block, 0);
    ck_assert(!map_is_whole(block->map));
    ck_assert_str_eq(text_of(arena, &report, 60, true, false), "(no cells)\n");
    map_add_cell(&report, block, 0, 1);
    struct picture p = draw(60);
    for (int x = 0; x < p.columns; x++)
        ck_assert_int_eq(sign_at(&p, x, p.rows / 2), 'A');
}
END_TEST

START_TEST(as_data)
{
    map_set_x(&report, block, "interval", "Interval", "a", STYLE_PLAIN)->log = true;
    map_set_y(&report, block, "rate", "Rate", "1/a", STYLE_FREQUENCY);
    map_set_worth(&report, block, "worth", "Worth", "EUR", STYLE_MONEY);
    map_add_choice(&report, block, "nothing", true);
    map_add_choice(&report, block, "a, b", false)->figure = "some.choice";
    map_add_x(&report, block, 1);
    map_add_x(&report, block, 10);
    map_add_y(&report, block, 0.5);
    map_add_y(&report, block, 0.75);
    for (size_t i = 0; i < 4; i++)
        map_add_cell(&report, block, i == 2, (double)i / 4);
    map_set_today(block, 2, 0.625);
    struct text json, csv;
    text_init(&json, arena);
    text_init(&csv, arena);
    report_write_json(&json, &report);
    report_write_csv(&csv, &report);
    const char *j = text_str(&json);
    ck_assert(json_check(j, json.n, NULL));
    ck_assert(json_is(j, "blocks/0/x/scale", "\"log\""));
    ck_assert(json_is(j, "blocks/0/x-values/1", "10"));
    ck_assert(json_is(j, "blocks/0/y-values/0", "0.5"));
    ck_assert(json_is(j, "blocks/0/choices/1/figure", "\"some.choice\""));
    ck_assert(json_is(j, "blocks/0/rows/0/1", "0"));
    ck_assert(json_is(j, "blocks/0/rows/1/0", "1"));
    ck_assert(json_is(j, "blocks/0/worths/1/1", "0.75"));
    ck_assert(json_is(j, "blocks/0/today/y/value", "0.625"));
    ck_assert_str_eq(text_str(&csv),
                     "interval-a,rate-1/a,choice,worth-EUR\r\n1,0.5,nothing,0\r\n"
                     "10,0.5,nothing,0.25\r\n1,0.75,\"a, b\",0.5\r\n10,0.75,nothing,0.75\r\n");
}
END_TEST

Suite *suite_report_map(void)
{
    Suite *s = suite_create("report map");
    TCase *t = tcase_create("map");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_loop_test(t, cells_are_right, 0, 24);
    tcase_add_test(t, the_key_names_all_choices);
    tcase_add_loop_test(t, every_area_has_its_letter, 0, 20);
    tcase_add_test(t, a_narrow_area_has_its_letter);
    tcase_add_test(t, one_cell);
    tcase_add_test(t, as_data);
    suite_add_tcase(s, t);
    return s;
}
