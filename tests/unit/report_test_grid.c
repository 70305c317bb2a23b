/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The iso-risk grid. The picture is read back from its ASCII text (axes from their own
 * labels) and every cell is compared with where the logarithms say it must be,
 * computed here in long double. */
#include "report_test_picture.h"

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

static size_t company_of(const struct picture *p, struct where w)
{
    size_t n = 0;
    for (size_t i = 0; i < block->grid->marks.n; i++) {
        const struct grid_mark *m = &block->grid->marks.at[i];
        if (!picture_holds(m))
            continue;
        struct where o = picture_where(p, m);
        n += o.x == w.x && o.y == w.y;
    }
    return n;
}

/* ---- the checks ---- */

/* A decade is about as long across as up, a cell being twice as high as wide, and
 * exactly so where it is not squeezed (few columns) or stretched (much room left). */
static void check_decades(const struct picture *p, unsigned width)
{
    int up = p->frequency_high - p->frequency_low, across = p->damage_high - p->damage_low;
    ck_assert(up >= 2 && up <= 12 && across >= 2 && across <= 12);
    ck_assert_int_eq((p->rows - 1) % p->high, 0);
    ck_assert_int_eq((p->columns - 1) % p->wide, 0);
    int high = 2 * p->high, wide = p->wide;
    ck_assert_int_le(5 * (wide > high ? wide : high), 7 * (wide > high ? high : wide));
    bool narrow = 10 * (p->columns - 1) < 7 * (int)(width - p->axis);
    if (wide > 3 && !narrow)
        ck_assert_int_eq(wide, high);
    ck_assert_int_le(p->rows - 1, width > 120 ? 32 + (int)(width - 120) / 10 : 32);
}

static void check_axes(const struct picture *p)
{
    for (int y = 0; y < p->rows; y++) {
        const char *line = p->lines.at[p->top + (size_t)y];
        ck_assert_int_eq(line[p->axis], y % p->high ? '|' : '+');
        if (y % p->high == 0)
            ck_assert_int_eq(picture_power(line, p->axis), p->frequency_high - y / p->high);
    }
}

/* No mark at the ends of an axis of n cells; no decade that holds none, but for the
 * two that are least and a mark that would otherwise stand at the end. */
static void check_range(long double least, long double most, int n, int decade)
{
    if (n - 1 == 12 * decade)
        return;
    ck_assert(least >= 0.5L && most < n - 1.5L);
    if (n - 1 > 2 * decade)
        ck_assert(least < decade + 1 && most > n - 1 - decade - 1);
}

static void check_ranges(const struct picture *p)
{
    long double left = INFINITY, right = -INFINITY, top = INFINITY, bottom = -INFINITY;
    for (size_t i = 0; i < block->grid->marks.n; i++) {
        const struct grid_mark *m = &block->grid->marks.at[i];
        if (!picture_holds(m))
            continue;
        left = fminl(left, picture_column(p, m->damage));
        right = fmaxl(right, picture_column(p, m->damage));
        top = fminl(top, picture_row(p, m->frequency));
        bottom = fmaxl(bottom, picture_row(p, m->frequency));
    }
    check_range(left, right, p->columns, p->wide);
    check_range(top, bottom, p->rows, p->high);
}

static void check_mark(const struct picture *p, const struct grid_mark *m)
{
    struct where w = picture_where(p, m);
    char expected = company_of(p, w) == 1 ? '*' : '@';
    char found = cell_at(p, w.x, w.y);
    ck_assert_msg(found == expected, "%s at %d,%d: '%c' for '%c'", m->label, w.x, w.y, found,
                  expected);
}

/* ---- labels: "M01", or "M01,M02", or "M01,M02.." of marks in one cell ---- */

static bool same_cell(const struct picture *p, size_t i, size_t k)
{
    const struct grid_mark *a = &block->grid->marks.at[i], *b = &block->grid->marks.at[k];
    if (!picture_holds(a) || !picture_holds(b))
        return false;
    struct where v = picture_where(p, a), w = picture_where(p, b);
    return v.x == w.x && v.y == w.y;
}

/* Reads the label whose first character is at x, y, counts the marks that it names,
 * and returns its length: they are those of one cell, from the first one on. */
static int read_label(const struct picture *p, int x, int y, size_t *first, size_t *seen)
{
    const char *s = p->lines.at[p->top + (size_t)y] + p->axis + 1 + x;
    size_t i = *first = (size_t)atoi(s + 1);
    size_t left = company_of(p, picture_where(p, &block->grid->marks.at[i]));
    int n = 0;
    for (; left > 0; i++) {
        if (!same_cell(p, *first, i))
            continue;
        if (n > 0 && text_starts(s + n, ".."))
            return n + 2;
        const char *label = block->grid->marks.at[i].label;
        const char *expected = arena_printf(arena, "%s%s", n ? "," : "", label);
        ck_assert_msg(text_starts(s + n, expected), "%s for %s", s + n, expected);
        n += (int)strlen(expected);
        seen[i]++;
        left--;
    }
    return n;
}

/* A blank, the right edge or the own mark. */
static bool is_apart(const struct picture *p, struct where w, int x, int y)
{
    return x >= p->columns || (x == w.x && y == w.y) || (x >= 0 && cell_at(p, x, y) == ' ');
}

static void check_place(const struct picture *p, struct where w, int x, int y, int n)
{
    ck_assert(is_apart(p, w, x - 1, y) && is_apart(p, w, x + n, y));
    if (y == w.y) {
        ck_assert(x - 1 == w.x || x + n == w.x);
        return;
    }
    ck_assert(abs(y - w.y) == 1 && x >= w.x - n - 1 && x <= w.x + 2);
    for (int row = y - 1; row <= y + 1; row++)
        for (int i = x - 1; i <= x + n; i++)
            ck_assert(!strchr("*@", cell_at(p, i, row)) || (i == w.x && row == w.y));
}

/* The paragraph below the picture that begins so, unwrapped; "" when there is none. */
static const char *remark(const struct picture *p, const char *start)
{
    static const char *const starts[] = {"At one place", "Arrows:",   "In the picture",
                                         "Beyond",       "Not drawn", "Not in the picture, "};
    struct text t;
    text_init(&t, arena);
    for (size_t i = p->top + (size_t)p->rows; i < p->lines.n; i++) {
        const char *line = p->lines.at[i];
        bool other = !*line;
        for (size_t k = 0; k < sizeof starts / sizeof *starts; k++)
            other = other || text_starts(line, starts[k]);
        if (t.n && other)
            break;
        if (t.n || text_starts(line, start))
            text_printf(&t, "%s%s", t.n ? " " : "", line);
    }
    return text_str(&t);
}

/* All labels of the picture; in the key every mark, and those without a label. */
static void check_labels(const struct picture *p)
{
    size_t n = block->grid->marks.n;
    size_t *seen = NEW_ARRAY(arena, n, size_t), first;
    size_t *labels = NEW_ARRAY(arena, n, size_t);
    for (int y = 0; y < p->rows; y++) {
        for (int x = 0; x < p->columns; x++) {
            if (cell_at(p, x, y) != 'M')
                continue;
            int length = read_label(p, x, y, &first, seen);
            check_place(p, picture_where(p, &block->grid->marks.at[first]), x, y, length);
            labels[first]++;
            x += length;
        }
    }
    const char *before = "In the picture without a label, for want of room:";
    struct text none;
    text_init(&none, arena);
    for (size_t i = 0; i < n; i++) {
        size_t k = 0;
        while (k < i && !same_cell(p, k, i))
            k++;
        ck_assert(labels[i] <= 1 && seen[i] <= 1);
        if (picture_holds(&block->grid->marks.at[i]) && !labels[k])
            text_printf(&none, "%s %s", none.n ? "," : before, block->grid->marks.at[i].label);
    }
    ck_assert_str_eq(remark(p, "In the picture without"), text_str(&none));
}

static void check_key(const struct picture *p)
{
    for (size_t i = 0; i < block->grid->marks.n; i++) {
        const char *row = arena_printf(arena, "%s ", block->grid->marks.at[i].label);
        size_t n = 0;
        for (size_t k = p->top + (size_t)p->rows; k < p->lines.n; k++)
            n += text_starts(p->lines.at[k], row);
        ck_assert_uint_ge(n, 1);
    }
}

/* "At one place (@): M01, M02; M05, M06" */
static void check_company(const struct picture *p)
{
    size_t n = block->grid->marks.n;
    struct text t;
    text_init(&t, arena);
    for (size_t i = 0; i < n; i++) {
        const struct grid_mark *m = &block->grid->marks.at[i];
        size_t before = 0;
        for (size_t k = 0; k < i; k++)
            before += same_cell(p, k, i);
        if (!picture_holds(m) || before || company_of(p, picture_where(p, m)) < 2)
            continue;
        text_printf(&t, "%s %s", t.n ? ";" : "At one place (@):", m->label);
        for (size_t k = i + 1; k < n; k++)
            if (same_cell(p, i, k))
                text_printf(&t, ", %s", block->grid->marks.at[k].label);
    }
    ck_assert_str_eq(remark(p, "At one place"), text_str(&t));
}

/* A dot of "M01,M02.." is none of a line; a blank beside a label may hide one. */
static bool is_label_dot(const struct picture *p, int x, int y)
{
    while (x > 0 && cell_at(p, x, y) == '.')
        x--;
    return cell_at(p, x, y) >= '0' && cell_at(p, x, y) <= '9';
}

static bool is_beside_label(const struct picture *p, int x, int y)
{
    char before = cell_at(p, x - 1, y);
    return cell_at(p, x + 1, y) == 'M' || (before >= '0' && before <= '9') ||
           (before == '.' && is_label_dot(p, x - 1, y));
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
                ck_assert_msg(cell_at(p, at, y) != ' ' || is_beside_label(p, at, y),
                              "risk 1e%d is missing in row %d", k, y);
        }
        for (int x = 0; x < p->columns; x++) {
            double k = (double)x / p->wide - (double)y / p->high;
            if (cell_at(p, x, y) == '.' && !is_label_dot(p, x, y))
                ck_assert_msg(fabs(k - round(k)) * p->wide <= 0.51, "a stray dot at %d,%d", x, y);
        }
    }
}

/* The label right of the picture in a decade's row is the risk of its right end. */
static void check_risk_labels(const struct picture *p)
{
    for (int y = p->high; y < p->rows; y += p->high) {
        const char *line = p->lines.at[p->top + (size_t)y] + p->axis + 1 + (size_t)p->columns + 1;
        ck_assert_int_eq(picture_exponent(line), p->damage_high + p->frequency_high - y / p->high);
    }
}

static bool near_symbol(const struct picture *p, int x, int y, char symbol)
{
    return cell_at(p, x, y) == symbol || cell_at(p, x, y - 1) == symbol ||
           cell_at(p, x, y + 1) == symbol;
}

static void check_criterion(const struct picture *p, const struct grid_line *l)
{
    for (int x = 0; x < p->columns; x++) {
        long double damage = p->damage_low + (long double)x / p->wide;
        long double exact = (p->frequency_high - (log10l(l->risk) - damage)) * p->high;
        int y = (int)floorl(exact + 0.5L);
        if (exact > 1 && exact < p->rows - 2)
            ck_assert_msg(near_symbol(p, x, y, *l->symbol) || !strchr(" .", cell_at(p, x, y)),
                          "%s is missing in column %d", l->name, x);
        for (int k = 0; k < p->rows; k++)
            if (cell_at(p, x, k) == *l->symbol)
                ck_assert_msg(fabsl(k - exact) <= 1, "%s strayed to %d,%d", l->name, x, k);
    }
}

/* ---- arrows ---- */

static bool is_head(char c)
{
    return c == '<' || c == '>' || c == '^' || c == 'v';
}

/* Cells around x, y that `test` picks. */
static int count_around(const struct picture *p, int x, int y, bool (*test)(char c))
{
    int n = 0;
    for (int dy = -1; dy <= 1; dy++)
        for (int dx = -1; dx <= 1; dx++)
            n += (dx || dy) && test(cell_at(p, x + dx, y + dy));
    return n;
}

static bool is_mark(char c)
{
    return c == '*' || c == '@';
}

/* Room for a head: of the cell before the mark on the straight way and the two beside
 * it, across the longer side of the way, one touches the mark and is free of marks. */
static bool has_room(const struct picture *p, struct where a, struct where b)
{
    int dx = b.x - a.x, dy = b.y - a.y;
    int n = abs(dx) > abs(dy) ? abs(dx) : abs(dy);
    double part = (n - 1.0) / n;
    int x = a.x + (int)lround(dx * part), y = a.y + (int)lround(dy * part);
    bool room = false;
    for (int k = -1; k <= 1; k++) {
        int cx = abs(dx) > abs(dy) ? x : x + k, cy = abs(dx) > abs(dy) ? y + k : y;
        bool inside = cx >= 0 && cy >= 0 && cx < p->columns && cy < p->rows;
        bool touches = abs(cx - b.x) <= 1 && abs(cy - b.y) <= 1;
        room = room || (inside && touches && !is_mark(cell_at(p, cx, cy)));
    }
    return room;
}

static void check_arrow(const struct picture *p, const struct grid_mark *m)
{
    const struct grid_mark *from = &block->grid->marks.at[m->arrow_from];
    if (!picture_holds(m) || !picture_holds(from))
        return;
    struct where a = picture_where(p, from), b = picture_where(p, m);
    if (abs(a.x - b.x) <= 1 && abs(a.y - b.y) <= 1)
        return;
    if (has_room(p, a, b))
        ck_assert_msg(count_around(p, b.x, b.y, is_head) > 0, "no arrow ends at %s", m->label);
}

/* Every head touches a mark; "Arrows: M01 -> M02, M03; M04 -> M05". */
static void check_arrows(const struct picture *p)
{
    const struct grid *g = block->grid;
    struct text t;
    text_init(&t, arena);
    for (int y = 0; y < p->rows; y++)
        for (int x = 0; x < p->columns; x++)
            ck_assert(!is_head(cell_at(p, x, y)) || count_around(p, x, y, is_mark) > 0);
    for (size_t from = 0; from < g->marks.n; from++) {
        const char *before =
            arena_printf(arena, "%s %s ->", t.n ? ";" : "Arrows:", g->marks.at[from].label);
        for (size_t i = 0; i < g->marks.n; i++) {
            if (g->marks.at[i].arrow_from != (int)from)
                continue;
            text_printf(&t, "%s %s", before, g->marks.at[i].label);
            before = ",";
            check_arrow(p, &g->marks.at[i]);
        }
    }
    ck_assert_str_eq(remark(p, "Arrows:"), text_str(&t));
}

static void check_picture(const struct picture *p, unsigned width)
{
    const struct grid *g = block->grid;
    check_decades(p, width);
    check_axes(p);
    check_ranges(p);
    check_equal_risk(p);
    check_risk_labels(p);
    for (size_t i = 0; i < g->lines.n; i++)
        check_criterion(p, &g->lines.at[i]);
    for (size_t i = 0; i < g->marks.n; i++)
        if (picture_holds(&g->marks.at[i]))
            check_mark(p, &g->marks.at[i]);
    check_labels(p);
    check_key(p);
    check_company(p);
    check_arrows(p);
}

/* The sign in ASCII for a character of the picture in UTF-8. */
static char ascii_of(const char *s, size_t n)
{
    static const char *const signs[] = {"·.", "│|",  "─-", "┤+", "└+", "┬+", "●*",
                                        "◆@", "╲\\", "╱/", "↑^", "↓v", "←<", "→>"};
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
        if (picture_holds(&block->grid->marks.at[i]))
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
        struct picture p = picture_read(arena, s);
        check_picture(&p, width);
        check_same_in_utf8(&p, utf8);
    }
}
END_TEST

static size_t count_in_picture(const struct picture *p, const char *s)
{
    size_t n = 0;
    for (size_t i = 0; i < (size_t)p->rows; i++)
        for (const char *at = p->lines.at[p->top + i]; (at = strstr(at, s)); at++)
            n++;
    return n;
}

/* ---- parts of marks ---- */

enum { WHOLES = 12, PARTS = 20 };

static double between(struct random *r, double a, double b)
{
    return a == b ? a : random_log_uniform(r, fmin(a, b), fmax(a, b));
}

/* Parts lie between whole marks, so that they do not change the axes. */
static void add_parts(struct random *r)
{
    struct grid *g = block->grid;
    for (size_t i = 0; i < PARTS; i++) {
        size_t j = random_index(r, WHOLES), k = random_index(r, WHOLES);
        double f = between(r, g->marks.at[j].frequency, g->marks.at[k].frequency);
        double d = between(r, g->marks.at[j].damage, g->marks.at[k].damage);
        struct grid_mark *m =
            grid_add_mark(&report, block, arena_printf(arena, "p%02zu", i), "a part", f, d);
        m->part_of = (int)j;
    }
}

/* A label stands in the picture: as a whole word. */
static bool is_drawn(const struct picture *p, const char *label)
{
    for (size_t i = 0; i < (size_t)p->rows; i++)
        if (strstr(p->lines.at[p->top + i] + p->axis, label))
            return true;
    return false;
}

/* Each cell of whole marks and their labels is as it was without the parts. */
static void check_untouched(const struct picture *before, const struct picture *p)
{
    ck_assert(before->rows == p->rows && before->columns == p->columns);
    for (int y = 0; y < p->rows; y++)
        for (int x = 0; x < p->columns; x++) {
            char c = cell_at(before, x, y);
            if (is_mark(c) || c == 'M' || c == ',' || (c >= '0' && c <= '9'))
                ck_assert_int_eq(cell_at(p, x, y), c);
        }
}

/* Drawn where its logarithms are, or named by the remark; a label may be left out beside
 * another part at the same place. The remark counts. */
static size_t check_parts(const struct picture *p)
{
    const char *said = remark(p, "Not drawn, for want of room: ");
    size_t gone = 0, drawn = 0;
    for (size_t i = WHOLES; i < WHOLES + PARTS; i++) {
        const struct grid_mark *m = &block->grid->marks.at[i];
        struct where w = picture_where(p, m);
        char c = cell_at(p, w.x, w.y);
        bool named = strstr(said, m->label) != NULL;
        if (named)
            ck_assert(!is_drawn(p, m->label));
        else
            ck_assert_msg(c == 'o' || c == 'O', "%s: '%c'", m->label, c);
        if (c == 'o' && !named)
            ck_assert_msg(is_drawn(p, m->label), "%s has no label", m->label);
        gone += named;
        drawn += !named;
    }
    const char *count = arena_printf(arena, "%zu of the %d hollow marks", gone, PARTS);
    ck_assert(gone ? strstr(said, count) != NULL : !*said);
    return drawn;
}

START_TEST(parts_take_nothing)
{
    struct random r = random_seed(88000 + (uint64_t)_i);
    size_t drawn = 0;
    for (size_t i = 0; i < WHOLES; i++)
        grid_add_mark(&report, block, arena_printf(arena, "M%02zu", i), "a name",
                      random_log_uniform(&r, 1e-4, 1), random_log_uniform(&r, 1e3, 1e7));
    const char *alone[] = {text_of(arena, &report, 60, true, false),
                           text_of(arena, &report, 120, true, false)};
    add_parts(&r);
    for (unsigned k = 0; k < 2; k++) {
        const char *s = text_of(arena, &report, 60 + 60 * k, true, false);
        check_page(arena, s, 60 + 60 * k, true);
        struct picture was = picture_read(arena, alone[k]), p = picture_read(arena, s);
        check_untouched(&was, &p);
        drawn += check_parts(&p);
        check_key(&p);
    }
    ck_assert_uint_gt(drawn, 0);
}
END_TEST

/* Two signs, told in words; a part upon its mark is not drawn; parts at one place. */
START_TEST(parts_are_told_in_words)
{
    block->grid->wholes = "a hazard";
    block->grid->parts = "an outcome";
    grid_add_mark(&report, block, "1", "Fault", 1e-2, 1e5);
    grid_add_mark(&report, block, "1a", "small", 9.9e-3, 1e5)->part_of = 0;
    grid_add_mark(&report, block, "1b", "large", 1e-4, 1e7)->part_of = 0;
    grid_add_mark(&report, block, "1c", "as large", 1e-4, 1e7)->part_of = 0;
    const char *s = text_of(arena, &report, 80, true, false);
    struct picture p = picture_read(arena, s);
    ck_assert_uint_eq(count_in_picture(&p, "O1b,1c"), 1);
    ck_assert_uint_eq(count_in_picture(&p, "1a"), 0);
    ck_assert(strstr(s, "\n*    a hazard\nO    an outcome; O: several\n"));
    ck_assert(strstr(s, "\nAt one place (O): 1b, 1c\n"));
    ck_assert(strstr(s, "\nNot drawn, for want of room: 1 of the 3 hollow marks (1a)\n"));
    ck_assert(strstr(s, "\n1a    small"));
}
END_TEST

/* ---- chosen grids ---- */

/* Marks of one cell have one sign and one label, cut where it would be too long (a
 * quarter of the picture); other marks keep their own. */
START_TEST(labels_are_joined)
{
    grid_add_mark(&report, block, "ONE", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "TWO", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "TRI", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "FOR", "", 1e-3, 1e5);
    grid_add_mark(&report, block, "FAR", "", 3e-2, 3e3);
    static const char *const labels[] = {"@ONE,TWO..", "@ONE,TWO,TRI..", "@ONE,TWO,TRI,FOR"};
    size_t seen[3] = {0};
    for (unsigned width = 60; width <= 200; width++) {
        const char *s = text_of(arena, &report, width, true, false);
        struct picture p = picture_read(arena, s);
        size_t expected = p.columns / 4 >= 15 ? 2 : p.columns / 4 >= 13 ? 1 : 0;
        seen[expected]++;
        for (size_t i = 0; i < 3; i++)
            ck_assert_uint_eq(count_in_picture(&p, labels[i]), i == expected);
        ck_assert_uint_eq(count_in_picture(&p, "*FAR"), 1);
        ck_assert(strstr(s, "\nAt one place (@): ONE, TWO, TRI, FOR\n"));
    }
    ck_assert(seen[0] && seen[1] && seen[2]);
}
END_TEST

/* A mark in the way that the arrow has nothing to do with. */
START_TEST(arrows_pass_other_marks)
{
    grid_add_mark(&report, block, "OLD", "", 3e-3, 3e6);
    grid_add_mark(&report, block, "WALL", "", 3e-3, 3e5);
    grid_add_mark(&report, block, "FAR", "", 3e-3, 3e4)->arrow_from = 0;
    for (unsigned width = 60; width <= 200; width++) {
        struct picture p = picture_read(arena, text_of(arena, &report, width, true, false));
        struct where old = picture_where(&p, &block->grid->marks.at[0]);
        struct where wall = picture_where(&p, &block->grid->marks.at[1]);
        struct where far = picture_where(&p, &block->grid->marks.at[2]);
        ck_assert_int_ne(cell_at(&p, wall.x + 1, wall.y), '-');
        ck_assert_int_ne(cell_at(&p, wall.x - 1, wall.y), '-');
        ck_assert_int_eq(cell_at(&p, far.x + 1, far.y), '<');
        for (int x = far.x + 2; x < old.x - 1; x++)
            ck_assert_int_eq(cell_at(&p, x, old.y - 1), '-');
    }
}
END_TEST

/* A mark in the way of an arrow: the arrow goes around it, and both heads are seen. */
START_TEST(arrows_go_around_marks)
{
    grid_add_mark(&report, block, "OLD", "", 3e-3, 3e6);
    grid_add_mark(&report, block, "NEAR", "", 3e-3, 3e5)->arrow_from = 0;
    grid_add_mark(&report, block, "FAR", "", 3e-3, 3e4)->arrow_from = 0;
    for (unsigned width = 60; width <= 200; width++) {
        struct picture p = picture_read(arena, text_of(arena, &report, width, true, false));
        struct where old = picture_where(&p, &block->grid->marks.at[0]);
        struct where near = picture_where(&p, &block->grid->marks.at[1]);
        struct where far = picture_where(&p, &block->grid->marks.at[2]);
        ck_assert_int_eq(cell_at(&p, near.x + 1, near.y), '<');
        ck_assert_int_ne(cell_at(&p, near.x - 1, near.y), '-');
        ck_assert_int_eq(cell_at(&p, far.x + 1, far.y), '<');
        for (int x = far.x + 2; x < old.x - 1; x++)
            ck_assert_int_eq(cell_at(&p, x, old.y - 1), '-');
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
        struct picture p = picture_read(arena, s);
        struct where rare = picture_where(&p, &block->grid->marks.at[1]);
        struct where less = picture_where(&p, &block->grid->marks.at[2]);
        struct where old = picture_where(&p, &block->grid->marks.at[0]);
        ck_assert_int_eq(cell_at(&p, rare.x, rare.y - 1), 'v');
        ck_assert_int_eq(cell_at(&p, less.x + 1, less.y), '<');
        for (int y = old.y + 1; y < rare.y - 1; y++)
            ck_assert_int_eq(cell_at(&p, old.x, y), '|');
        for (int x = less.x + 2; x < old.x; x++)
            ck_assert_int_eq(cell_at(&p, x, old.y), '-');
        ck_assert(strstr(s, "Arrows: OLD -> RARE, LESS, SAME\n"));
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
    tcase_add_loop_test(t, parts_take_nothing, 0, 40);
    tcase_add_test(t, parts_are_told_in_words);
    tcase_add_test(t, labels_are_joined);
    tcase_add_test(t, arrows_pass_other_marks);
    tcase_add_test(t, arrows_go_around_marks);
    tcase_add_test(t, arrows_end_at_their_marks);
    tcase_add_test(t, what_the_picture_cannot_show_is_said);
    tcase_add_test(t, grids_without_a_picture);
    suite_add_tcase(s, t);
    return s;
}
