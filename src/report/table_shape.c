/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The widths of a table's columns. Cells are turned into text first, then measured;
 * widths are shared out so that the widest text columns wrap first.
 * Invariant: columns that are not dropped, with their gutters, fill at most the
 * page (when `fits`). Owns nothing. */
#include "report/table_shape.h"

#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "report/number.h"

enum {
    LEAST_TEXT = 16,   /* a text column is not made narrower while others can go */
    LONGEST_WORD = 24, /* words up to this are whole while others can go */
    BROKEN_WORD = 8,   /* the last resort */
    EASY_TEXT = 28,    /* a text column this wide reads well beside return periods */
    EASY_HEAD = 14,    /* a head may widen a column of numbers so far */
    EASY_OWN_HEAD = 8  /* the same where cells have styles of their own: beside a picture */
};

static size_t larger(size_t a, size_t b)
{
    return a > b ? a : b;
}

static size_t smaller(size_t a, size_t b)
{
    return a < b ? a : b;
}

static const struct cell *cell_at(const struct block *b, size_t row, size_t column)
{
    static const struct cell empty = {.type = CELL_EMPTY};
    const struct row *r = &b->rows.at[row];
    return column < r->n ? &r->at[column] : &empty;
}

static bool holds_numbers(const struct block *b, size_t column)
{
    for (size_t i = 0; i < b->rows.n; i++) {
        enum cell_type type = cell_at(b, i, column)->type;
        if (type == CELL_NUMBER || type == CELL_COUNT)
            return true;
    }
    return false;
}

/* The shift of a column: that of its prefix of money, or of the per cent. */
static int column_shift(const struct block *b, size_t column)
{
    const struct column *c = &b->columns.at[column];
    int largest = -400, smallest = 400;
    if (c->own)
        return 0;
    if (c->style == STYLE_PERCENT)
        return -2;
    if (c->style != STYLE_MONEY || !c->unit || !*c->unit)
        return 0;
    for (size_t i = 0; i < b->rows.n; i++) {
        const struct cell *cell = cell_at(b, i, column);
        if (cell->type != CELL_NUMBER || !isfinite(cell->number) || cell->number == 0)
            continue;
        int e = number_exponent(cell->number);
        largest = e > largest ? e : largest;
        smallest = e < smallest ? e : smallest;
    }
    return money_shift(largest, smallest);
}

static void show_number(const struct page *p, struct shown *s, const char *digits)
{
    size_t whole = strcspn(digits, ".e");
    s->number = true;
    s->left = arena_strn(p->arena, digits, whole);
    s->right = arena_str(p->arena, digits + whole);
}

static void show_value(const struct page *p, struct shown *s, const struct cell *c,
                       enum number_style style, int shift)
{
    char digits[32], period[32];
    if (c->type == CELL_COUNT || !isfinite(c->number)) {
        s->text = cell_words(p, c, STYLE_PLAIN, "");
        if (c->type == CELL_COUNT && isfinite(c->number))
            show_number(p, s, s->text);
        return;
    }
    show_number(p, s, number_scaled(digits, c->number, style, shift));
    if (style == STYLE_FREQUENCY && c->number >= 0)
        s->period = arena_str(p->arena, return_period_text(period, c->number));
}

/* A finite number in the style and with the shift of its cell. */
static void show_own(const struct page *p, struct shown *s, const struct cell *c)
{
    char digits[32];
    show_number(p, s, number_scaled(digits, c->number, c->style, c->shift));
}

/* Nothing is a dash among numbers, and a blank among texts. */
static struct shown show_cell(const struct page *p, const struct cell *c,
                              const struct column *column, bool number, int shift)
{
    struct shown s = {
        .left = "", .right = "", .text = "", .period = "", .mark = page_clean(p, c->mark)};
    if (column->own && c->type == CELL_NUMBER)
        show_own(p, &s, c);
    else if (c->type == CELL_NUMBER || c->type == CELL_COUNT)
        show_value(p, &s, c, column->style, shift);
    else if (c->type != CELL_EMPTY)
        s.text = cell_words(p, c, STYLE_PLAIN, "");
    else if (number)
        s.number = true, s.left = p->ascii ? "-" : "–";
    if (!s.number && *s.mark)
        s.text = arena_printf(p->arena, "%s %s", s.text, s.mark);
    return s;
}

static const char *shown_unit(const struct page *p, const struct column *c, int shift)
{
    if (c->style == STYLE_PERCENT)
        return "%";
    const char *unit = page_clean(p, c->unit);
    return shift > 0 ? arena_printf(p->arena, "%s%s", money_prefix(shift), unit) : unit;
}

static void show_column(const struct page *p, struct table_shape *t, size_t j)
{
    const struct column *c = &t->block->columns.at[j];
    struct table_column *to = &t->columns[j];
    int shift = column_shift(t->block, j);
    to->head = page_clean(p, c->head);
    to->number = holds_numbers(t->block, j);
    to->unit = to->number || c->style != STYLE_PERCENT ? shown_unit(p, c, shift) : "";
    to->to_right = to->number || c->right;
    to->keep = c->keep;
    to->data = c->data;
    to->drawn = c->drawn;
    to->own = c->own;
    to->dropped = c->data;
    for (size_t i = 0; i < t->n_rows; i++)
        t->cells[i * t->n_columns + j] =
            show_cell(p, cell_at(t->block, i, j), c, to->number, shift);
}

static void measure_number(struct table_column *c, const struct shown *s)
{
    c->left = larger(c->left, utf8_columns(s->left));
    size_t mark = *s->mark ? 1 + utf8_columns(s->mark) : 0;
    c->right = larger(c->right, utf8_columns(s->right) + mark);
    c->period = larger(c->period, utf8_columns(s->period));
}

/* Least and natural width of a column, words counting at most `longest` columns. */
static void measure_column(const struct page *p, struct table_shape *t, size_t j, size_t longest)
{
    struct table_column *c = &t->columns[j];
    size_t word = larger(page_widest_word(p, c->head), page_widest_word(p, c->unit)), whole = 0;
    for (size_t i = 0; i < t->n_rows; i++) {
        const struct shown *s = &t->cells[i * t->n_columns + j];
        if (s->number)
            measure_number(c, s);
        word = larger(word, page_widest_word(p, s->text));
        whole = larger(whole, utf8_columns(s->text));
    }
    size_t numbers = c->left + c->right, head = utf8_columns(c->head);
    c->least = larger(larger(numbers, smaller(word, longest)), 2);
    if (c->drawn)
        c->least = larger(c->least, whole);
    if (c->number)
        head = smaller(head, c->own ? EASY_OWN_HEAD : EASY_HEAD);
    c->natural = larger(larger(c->least, word), larger(whole, head));
    if (!c->number && longest == LONGEST_WORD)
        c->least = larger(c->least, smaller(c->natural, LEAST_TEXT));
}

static size_t easy_width(const struct table_column *c)
{
    return c->number ? c->least : smaller(c->natural, larger(c->least, EASY_TEXT));
}

static size_t period_width(const struct table_column *c)
{
    return c->period ? TABLE_GUTTER + c->period : 0;
}

/* Columns of the whole table when each column has the width that `of` tells. */
static size_t total(const struct table_shape *t, size_t (*of)(const struct table_column *c))
{
    size_t sum = 0, n = 0;
    for (size_t j = 0; j < t->n_columns; j++) {
        if (t->columns[j].dropped)
            continue;
        sum += of(&t->columns[j]) + period_width(&t->columns[j]);
        n++;
    }
    return n ? sum + (n - 1) * TABLE_GUTTER : 0;
}

static size_t least_width(const struct table_column *c)
{
    return c->least;
}

static size_t given_width(const struct table_column *c)
{
    return c->width;
}

static void forget_periods(struct table_shape *t)
{
    for (size_t j = 0; j < t->n_columns; j++)
        t->columns[j].period = 0;
}

/* Drops the column that matters least; false when all must stay. */
static bool drop_one(struct table_shape *t)
{
    struct table_column *least = NULL;
    for (size_t j = 0; j < t->n_columns; j++) {
        struct table_column *c = &t->columns[j];
        if (!c->dropped && c->keep > 0 && (!least || c->keep <= least->keep))
            least = c;
    }
    if (least)
        least->dropped = true;
    return least != NULL;
}

/* One more column of the page for each column narrower than its nature, the
 * narrowest first, until the page is full: so the widest wrap. */
static void share_out(struct table_shape *t, size_t width)
{
    for (size_t j = 0; j < t->n_columns; j++)
        t->columns[j].width = t->columns[j].least;
    for (size_t used = total(t, given_width); used < width; used++) {
        struct table_column *narrow = NULL;
        for (size_t j = 0; j < t->n_columns; j++) {
            struct table_column *c = &t->columns[j];
            if (!c->dropped && c->width < c->natural && (!narrow || c->width < narrow->width))
                narrow = c;
        }
        if (!narrow)
            break;
        narrow->width++;
    }
    t->width = total(t, given_width);
}

static void fit(const struct page *p, struct table_shape *t)
{
    if (total(t, easy_width) > p->width)
        forget_periods(t);
    while (total(t, least_width) > p->width && drop_one(t))
        continue;
    if (total(t, least_width) > p->width) {
        for (size_t j = 0; j < t->n_columns; j++)
            measure_column(p, t, j, BROKEN_WORD);
        forget_periods(t);
    }
    t->fits = total(t, least_width) <= p->width;
    if (t->fits)
        share_out(t, p->width);
}

struct table_shape table_shape_of(const struct page *p, const struct block *b)
{
    struct table_shape t = {.block = b, .n_columns = b->columns.n, .n_rows = b->rows.n};
    t.columns = NEW_ARRAY(p->arena, t.n_columns, struct table_column);
    t.cells = NEW_ARRAY(p->arena, t.n_rows * t.n_columns, struct shown);
    for (size_t j = 0; j < t.n_columns; j++) {
        show_column(p, &t, j);
        measure_column(p, &t, j, LONGEST_WORD);
    }
    fit(p, &t);
    return t;
}

bool table_has_room(const struct page *p, const struct block *b, unsigned keep, bool easy)
{
    struct table_shape t = table_shape_of(p, b);
    for (size_t j = 0; j < t.n_columns; j++) {
        const struct table_column *c = &t.columns[j];
        bool wraps = !c->number && !c->drawn && c->width < smaller(c->natural, EASY_TEXT);
        if (!t.fits || (c->dropped && c->keep >= keep) || (easy && !c->dropped && wraps))
            return false;
    }
    return true;
}
