/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The iso-risk grid. The picture is read back from its ASCII text (axes from their own
 * labels) and every cell is compared with where the logarithms say it must be,
 * computed here in long double. */
#include "report_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"
#include "random.h"

static struct arena *arena;
static struct report report;
static struct block *block;

static void setup(void)
{
    arena = arena_new(NULL);
    report_init(&report, arena);
    block = report_grid(&report, "grid", NULL, "EUR");
}

static void teardown(void)
{
    arena_free(arena);
}

/* ---- reading a picture ---- */

struct picture {
    struct page_lines lines;
    size_t top, axis; /* first row; column of the axis */
    int columns, rows, wide, high;
    int frequency_high, frequency_low, damage_low, damage_high;
};

static char cell(const struct picture *p, int x, int y)
{
    const char *line = p->lines.at[p->top + (size_t)y];
    size_t at = p->axis + 1 + (size_t)x;
    return x >= 0 && x < p->columns && at < strlen(line) ? line[at] : ' ';
}

static bool is_axis_line(const char *line, size_t axis)
{
    return strlen(line) > axis + 4 && strspn(line + axis, "+-") == strlen(line + axis)
        && line[axis] == '+' && line[axis + 1] == '+' && strchr(line + axis, '-');
}

/* The power that the label before the axis ends in: "1e-3 +". */
static int power_before(const char *line, size_t axis)
{
    size_t from = axis - 1;
    while (from > 0 && line[from - 1] != ' ')
        from--;
    ck_assert_msg(text_starts(line + from, "1e"), "no power: %s", line);
    return atoi(line + from + 2);
}

/* Reads "100", "1 k", "0.1", "1e12", "10 MEUR/a". */
static int exponent_of(const char *s)
{
    char *end;
    double x = strtod(s, &end);
    const char *prefix = end[0] == ' ' && end[1] ? strchr("kMG", end[1]) : NULL;
    double factor = !prefix ? 1 : *prefix == 'k' ? 1e3 : *prefix == 'M' ? 1e6 : 1e9;
    ck_assert_msg(end != s, "no amount: %s", s);
    return (int)lround(log10(x * factor));
}

static struct picture read_picture(const char *s)
{
    struct picture p = {.lines = lines_of(arena, s)};
    while (!text_equal(p.lines.at[p.top], "frequency, per year"))
        p.top++;
    p.top++;
    const char *first = p.lines.at[p.top];
    p.axis = strcspn(first, "+");
    while (!is_axis_line(p.lines.at[p.top + (size_t)p.rows], p.axis))
        p.rows++;
    const char *below = p.lines.at[p.top + (size_t)p.rows] + p.axis + 1;
    p.columns = (int)strlen(below);
    p.wide = 1 + (int)strcspn(below + 1, "+");
    for (p.high = 1; p.lines.at[p.top + (size_t)p.high][p.axis] != '+';)
        p.high++;
    p.frequency_high = power_before(first, p.axis);
    p.frequency_low = p.frequency_high - (p.rows - 1) / p.high;
    const char *damages = p.lines.at[p.top + (size_t)p.rows + 1];
    ck_assert(text_starts(damages, "damage, EUR "));
    damages += strlen("damage, EUR");
    p.damage_low = exponent_of(damages + strspn(damages, " "));
    p.damage_high = p.damage_low + (p.columns - 1) / p.wide;
    return p;
}

/* ---- where things must be ---- */

static long double column_of(const struct picture *p, double damage)
{
    return (log10l(damage) - p->damage_low) * p->wide;
}

static long double row_of(const struct picture *p, double frequency)
{
    return (p->frequency_high - log10l(frequency)) * p->high;
}

static int cell_of(long double x, int n)
{
    long double rounded = floorl(x + 0.5L);
    return rounded < 0 ? 0 : rounded > n - 1 ? n - 1 : (int)rounded;
}

static bool placed(const struct grid_mark *m)
{
    return m->frequency > 0 && m->damage > 0;
}

struct where {
    int x, y;
};

static struct where where_is(const struct picture *p, const struct grid_mark *m)
{
    return (struct where){cell_of(column_of(p, m->damage), p->columns),
                          cell_of(row_of(p, m->frequency), p->rows)};
}

static size_t company_of(const struct picture *p, struct where w)
{
    size_t n = 0;
    for (size_t i = 0; i < block->grid->marks.n; i++) {
        const struct grid_mark *m = &block->grid->marks.at[i];
        if (!placed(m))
            continue;
        struct where o = where_is(p, m);
        n += o.x == w.x && o.y == w.y;
    }
    return n;
}

/* ---- the checks ---- */

static void check_axes(const struct picture *p)
{
    int up = p->frequency_high - p->frequency_low, across = p->damage_high - p->damage_low;
    ck_assert(up >= 3 && up <= 12 && across >= 3 && across <= 12);
    ck_assert_int_eq((p->rows - 1) % p->high, 0);
    ck_assert_int_eq((p->columns - 1) % p->wide, 0);
    /* a decade is as long across as up, a cell being twice as high as wide */
    ck_assert_int_le(abs(2 * p->high - p->wide), 1);
    for (int y = 0; y < p->rows; y++) {
        const char *line = p->lines.at[p->top + (size_t)y];
        ck_assert_int_eq(line[p->axis], y % p->high ? '|' : '+');
        if (y % p->high == 0)
            ck_assert_int_eq(power_before(line, p->axis), p->frequency_high - y / p->high);
    }
}

static void check_mark(const struct picture *p, const struct grid_mark *m)
{
    struct where w = where_is(p, m);
    size_t n = company_of(p, w);
    char expected = n == 1 ? '*' : n > 9 ? '+' : (char)('0' + n);
    ck_assert_msg(cell(p, w.x, w.y) == expected, "%s at %d,%d: '%c' for '%c'", m->label, w.x, w.y,
                  cell(p, w.x, w.y), expected);
}

/* In the key, always; in the picture, when it is there, beside its mark. */
static void check_label(const struct picture *p, const struct grid_mark *m)
{
    bool in_key = false;
    size_t end = p->top + (size_t)p->rows;
    for (size_t i = end; i < p->lines.n; i++)
        in_key = in_key || text_starts(p->lines.at[i], m->label);
    ck_assert_msg(in_key, "%s is not in the key", m->label);
    for (size_t i = p->top; i < end; i++) {
        const char *at = strstr(p->lines.at[i], m->label);
        if (!at)
            continue;
        struct where w = where_is(p, m);
        int x = (int)(at - p->lines.at[i] - (ptrdiff_t)p->axis - 1), y = (int)(i - p->top);
        int n = (int)strlen(m->label);
        ck_assert_msg(placed(m) && abs(y - w.y) <= 1 && x >= w.x - n - 1 && x <= w.x + 2,
                      "%s strayed", m->label);
    }
}

/* Each decade of risk k: f * d = 10^k, so x - x0 = (y - y0) * wide / high: it falls. */
static void check_equal_risk(const struct picture *p)
{
    int least = p->frequency_low + p->damage_low, most = p->frequency_high + p->damage_high;
    for (int y = 0; y < p->rows; y++) {
        for (int k = least + 1; k < most; k++) {
            double x = (k - p->frequency_high - p->damage_low + (double)y / p->high) * p->wide;
            int at = (int)floor(x + 0.5);
            if (at >= 0 && at < p->columns)
                ck_assert_msg(cell(p, at, y) != ' ', "risk 1e%d is missing in row %d", k, y);
        }
        for (int x = 0; x < p->columns; x++) {
            double k = (double)x / p->wide - (double)y / p->high;
            if (cell(p, x, y) == '.')
                ck_assert_msg(fabs(k - round(k)) * p->wide <= 0.51, "a stray dot at %d,%d", x, y);
        }
    }
}

/* The label right of the picture in a decade's row is the risk of its right end. */
static void check_risk_labels(const struct picture *p)
{
    for (int y = p->high; y < p->rows; y += p->high) {
        const char *line = p->lines.at[p->top + (size_t)y] + p->axis + 1 + (size_t)p->columns + 1;
        ck_assert_int_eq(exponent_of(line),
                         p->damage_high + p->frequency_high - y / p->high);
    }
}

static bool near_symbol(const struct picture *p, int x, int y, char symbol)
{
    return cell(p, x, y) == symbol || cell(p, x, y - 1) == symbol || cell(p, x, y + 1) == symbol;
}

static void check_criterion(const struct picture *p, const struct grid_line *l)
{
    for (int x = 0; x < p->columns; x++) {
        long double damage = p->damage_low + (long double)x / p->wide;
        long double exact = (p->frequency_high - (log10l(l->risk) - damage)) * p->high;
        int y = (int)floorl(exact + 0.5L);
        if (exact > 1 && exact < p->rows - 2)
            ck_assert_msg(near_symbol(p, x, y, *l->symbol) || !strchr(" .", cell(p, x, y)),
                          "%s is missing in column %d", l->name, x);
        for (int k = 0; k < p->rows; k++)
            if (cell(p, x, k) == *l->symbol)
                ck_assert_msg(fabsl(k - exact) <= 1, "%s strayed to %d,%d", l->name, x, k);
    }
}

/* A head beside the mark, unless the marks are neighbours or another mark stands there. */
static void check_arrow(const struct picture *p, const struct grid_mark *m)
{
    const struct grid_mark *from = &block->grid->marks.at[m->arrow_from];
    if (!placed(m) || !placed(from))
        return;
    struct where a = where_is(p, from), b = where_is(p, m);
    if (abs(a.x - b.x) <= 1 && abs(a.y - b.y) <= 1)
        return;
    bool found = false;
    for (int dy = -1; dy <= 1; dy++)
        for (int dx = -1; dx <= 1; dx++) {
            char c = cell(p, b.x + dx, b.y + dy);
            found = found || ((dx || dy) && c != ' ' && strchr("<>^v*23456789+", c));
        }
    ck_assert_msg(found, "no arrow ends at %s", m->label);
}

static void check_picture(const struct picture *p)
{
    const struct grid *g = block->grid;
    check_axes(p);
    check_equal_risk(p);
    check_risk_labels(p);
    for (size_t i = 0; i < g->lines.n; i++)
        check_criterion(p, &g->lines.at[i]);
    for (size_t i = 0; i < g->marks.n; i++) {
        check_label(p, &g->marks.at[i]);
        if (placed(&g->marks.at[i]))
            check_mark(p, &g->marks.at[i]);
        if (g->marks.at[i].arrow_from >= 0)
            check_arrow(p, &g->marks.at[i]);
    }
}

/* The sign in ASCII for a character of the picture in UTF-8. */
static char ascii_of(const char *s, size_t n)
{
    static const char *const signs[] = {"·.", "│|", "─-", "┤+", "└+", "┬+", "●*",
                                        "╲\\", "╱/", "↑^", "↓v", "←<", "→>"};
    if (n == 1)
        return *s;
    for (size_t i = 0; i < sizeof signs / sizeof *signs; i++)
        if (strlen(signs[i]) == n + 1 && memcmp(signs[i], s, n) == 0)
            return signs[i][n];
    return '?';
}

/* Both variants are the same picture, cell by cell. */
static void check_same_in_utf8(const struct picture *p, const char *utf8)
{
    struct page_lines lines = lines_of(arena, utf8);
    for (size_t i = 0; i <= (size_t)p->rows; i++) {
        const char *s = lines.at[p->top + i], *expected = p->lines.at[p->top + i];
        s += utf8_prefix(s, p->axis);
        for (size_t x = p->axis; *s; x++) {
            size_t n = utf8_prefix(s, 1);
            ck_assert_int_eq(ascii_of(s, n), expected[x]);
            s += n;
        }
    }
}

/* ---- random grids ---- */

static void add_random_marks(struct random *r)
{
    size_t n = random_index(r, 60) + 1;
    double f = random_log_uniform(r, 1e-9, 1), d = random_log_uniform(r, 10, 1e6);
    double spread = random_index(r, 4) ? random_log_uniform(r, 2, 1e6) : 1e16;
    for (size_t i = 0; i < n; i++) {
        double frequency = random_index(r, 15) ? f * random_log_uniform(r, 1, spread) : 0;
        double damage = random_index(r, 15) ? d * random_log_uniform(r, 1, spread) : 0;
        if (i && random_index(r, 8) == 0) {
            frequency = block->grid->marks.at[i - 1].frequency;
            damage = block->grid->marks.at[i - 1].damage;
        }
        struct grid_mark *m = grid_add_mark(&report, block, arena_printf(arena, "M%02zu", i),
                                            "a name", frequency, damage);
        m->arrow_from = random_index(r, 3) ? -1 : (int)random_index(r, n);
    }
    grid_add_line(&report, block, "intolerable", f * d * spread, "#");
    grid_add_line(&report, block, "acceptable", f * d * sqrt(spread), "=");
}

static bool any_placed(void)
{
    for (size_t i = 0; i < block->grid->marks.n; i++)
        if (placed(&block->grid->marks.at[i]))
            return true;
    return false;
}

START_TEST(random_grids_are_right)
{
    struct random r = random_seed(77000 + (uint64_t)_i);
    add_random_marks(&r);
    for (unsigned width = 60 + (unsigned)(_i % 7); width <= 200; width += 7) {
        const char *s = text_of(arena, &report, width, true, false);
        const char *utf8 = text_of(arena, &report, width, false, false);
        check_page(arena, s, width, true);
        check_page(arena, utf8, width, false);
        ck_assert_str_eq(s, text_of(arena, &report, width, true, false));
        if (!any_placed())
            continue;
        struct picture p = read_picture(s);
        check_picture(&p);
        check_same_in_utf8(&p, utf8);
    }
}
END_TEST

/* ---- chosen grids ---- */

static size_t count_in_picture(const struct picture *p, const char *s)
{
    size_t n = 0;
    for (size_t i = 0; i < (size_t)p->rows; i++)
        for (const char *at = p->lines.at[p->top + i]; (at = strstr(at, s)); at++)
            n++;
    return n;
}

/* With room, every label stands in the picture; four marks in one cell fan out. */
START_TEST(labels_fan_out)
{
    grid_add_mark(&report, block, "ONE", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "TWO", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "TRI", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "FOR", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "FAR", "", 3e-2, 3e3);
    for (unsigned width = 60; width <= 200; width++) {
        const char *s = text_of(arena, &report, width, true, false);
        struct picture p = read_picture(s);
        for (size_t i = 0; i < 5; i++)
            ck_assert_uint_eq(count_in_picture(&p, block->grid->marks.at[i].label), 1);
        ck_assert_uint_eq(count_in_picture(&p, "TWO4ONE"), 1);
        ck_assert_uint_eq(count_in_picture(&p, "*FAR"), 1);
        ck_assert(strstr(s, "\n4 at one place: ONE, TWO, TRI, FOR\n"));
    }
}
END_TEST

/* Straight down and straight to the left: the head is the cell before the mark. */
START_TEST(arrows_end_at_their_marks)
{
    grid_add_mark(&report, block, "OLD", "", 0.03, 1e6);
    grid_add_mark(&report, block, "RARE", "", 1e-4, 1e6)->arrow_from = 0;
    grid_add_mark(&report, block, "LESS", "", 0.03, 1e3)->arrow_from = 0;
    grid_add_mark(&report, block, "SAME", "", 0.03, 1e6)->arrow_from = 0;
    for (unsigned width = 60; width <= 200; width++) {
        const char *s = text_of(arena, &report, width, true, false);
        struct picture p = read_picture(s);
        struct where rare = where_is(&p, &block->grid->marks.at[1]);
        struct where less = where_is(&p, &block->grid->marks.at[2]);
        struct where old = where_is(&p, &block->grid->marks.at[0]);
        ck_assert_int_eq(cell(&p, rare.x, rare.y - 1), 'v');
        ck_assert_int_eq(cell(&p, less.x + 1, less.y), '<');
        for (int y = old.y + 1; y < rare.y - 1; y++)
            ck_assert_int_eq(cell(&p, old.x, y), '|');
        for (int x = less.x + 2; x < old.x; x++)
            ck_assert_int_eq(cell(&p, x, old.y), '-');
        ck_assert(strstr(s, "OLD -> RARE; OLD -> LESS; OLD -> SAME"));
    }
}
END_TEST

START_TEST(what_the_picture_cannot_show_is_said)
{
    grid_add_mark(&report, block, "HIGH", "", 1, 1e6);
    grid_add_mark(&report, block, "TINY", "", 1e-20, 1e3);
    grid_add_mark(&report, block, "NEVER", "", 0, 1e3);
    grid_add_mark(&report, block, "GRATIS", "", 0.5, 0);
    grid_add_mark(&report, block, "NOWHERE", "", INFINITY, 1e3);
    grid_add_line(&report, block, "far off", 1e30, "#");
    grid_add_line(&report, block, "above 5 kEUR/a", 5000, "母");
    const char *s = text_of(arena, &report, 80, true, false);
    ck_assert(strstr(s, "Beyond the axes, drawn at the edge of the picture: TINY\n"));
    ck_assert(strstr(s, "Not in the picture, for it never happens: NEVER\n"));
    ck_assert(strstr(s, "Not in the picture, for it does no damage: GRATIS\n"));
    ck_assert(strstr(s, "Not in the picture, for it has no place on the axes: NOWHERE\n"));
    ck_assert(strstr(s, "####  far off: 1e21 GEUR/a (outside the picture)\n"));
    ck_assert(strstr(s, "####  above 5 kEUR/a\n"));
}
END_TEST

START_TEST(grids_without_a_picture)
{
    ck_assert_str_eq(text_of(arena, &report, 60, true, false), "(no marks)\n");
    grid_add_mark(&report, block, "NEVER", "name", 0, 1e3);
    ck_assert_str_eq(text_of(arena, &report, 80, true, false),
                     "Mark   Name  Frequency         Damage   Risk\n"
                     "                   1/a           kEUR  EUR/a\n"
                     "--------------------------------------------\n"
                     "NEVER  name          0  never       1      0\n"
                     "\n"
                     "Not in the picture, for it never happens: NEVER\n");
}
END_TEST

Suite *suite_report_grid(void)
{
    Suite *s = suite_create("report grid");
    TCase *t = tcase_create("grid");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_loop_test(t, random_grids_are_right, 0, 35);
    tcase_add_test(t, labels_fan_out);
    tcase_add_test(t, arrows_end_at_their_marks);
    tcase_add_test(t, what_the_picture_cannot_show_is_said);
    tcase_add_test(t, grids_without_a_picture);
    suite_add_tcase(s, t);
    return s;
}
