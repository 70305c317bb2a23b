/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Swings as text: the table of their numbers, whose last column is the picture: a line that
 * stands on the value of today, from which two bars go in each row, one in the upper half of
 * the row and one in the lower half. Owns nothing.
 * Invariant: a bar ends in the column of its value; one that differs from today's is seen. */
#include "report/swings.h"

#include "base/utf8.h"
#include "report/table_shape.h"

enum {
    LEAST_PICTURE = 18,
    WIDEST_PICTURE = 96,
    MARGIN = 3,          /* columns at both ends, for the halves of labels */
    SEPARATE_WIDTH = 100 /* on pages this wide an input's range has a column of its own */
};

/* What stands in a column of the picture. */
enum { NEITHER, LOW = 1, HIGH = 2, BOTH = LOW | HIGH, NEAR, LINE, SORTS };

static const char *glyph_of(const struct page *p, int sort)
{
    static const char *const utf8[SORTS] = {" ", "▀", "▄", "█", "·", "│"};
    static const char *const ascii[SORTS] = {" ", "-", "=", "#", ".", "|"};
    return p->ascii ? ascii[sort] : utf8[sort];
}

struct drawing {
    struct swings_plane plane;
    int columns, today;
    bool used[SORTS];
};

static int column_of(const struct drawing *d, double value)
{
    return MARGIN + curve_cell_of(&d->plane.scale, value);
}

static void open_drawing(struct drawing *d, const struct page *p, const struct swings *s,
                         int columns)
{
    *d = (struct drawing){.columns = columns};
    swings_open(&d->plane, p, s, columns - 1 - 2 * MARGIN);
    d->today = column_of(d, s->today);
}

/* From the column beside the line to the end; a point where that is not a column away. */
static void lay_bar(const struct drawing *d, int *sorts, double end, int sort)
{
    int to = column_of(d, end), way = to > d->today ? 1 : -1;
    for (int x = d->today; x != to; x += way)
        sorts[x + way] = (sorts[x + way] & BOTH) | sort;
    int beside = d->today + (end > d->plane.swings->today ? 1 : -1);
    if (to == d->today && end != d->plane.swings->today && sorts[beside] == NEITHER)
        sorts[beside] = NEAR;
}

static const char *draw_bars(struct drawing *d, const struct swing *s)
{
    struct arena *a = d->plane.page->arena;
    int *sorts = NEW_ARRAY(a, (size_t)d->columns, int);
    if (s) {
        lay_bar(d, sorts, s->low, LOW);
        lay_bar(d, sorts, s->high, HIGH);
    }
    sorts[d->today] = LINE;
    struct text t;
    text_init(&t, a);
    for (int x = 0; x < d->columns; x++) {
        text_add(&t, glyph_of(d->plane.page, sorts[x]));
        d->used[sorts[x]] = true;
    }
    return text_str(&t);
}

static bool is_tick(const struct drawing *d, int x)
{
    for (size_t i = 0; i < d->plane.scale.ticks.n; i++)
        if (d->plane.scale.ticks.at[i].at + MARGIN == x)
            return true;
    return false;
}

static const char *draw_axis(const struct drawing *d)
{
    const struct page *p = d->plane.page;
    struct text t;
    text_init(&t, p->arena);
    for (int x = 0; x < d->columns; x++) {
        bool tick = is_tick(d, x), today = x == d->today;
        if (p->ascii)
            text_add(&t, tick ? "+" : today ? "|" : "-");
        else
            text_add(&t, tick ? today ? "┼" : "┬" : today ? "┴" : "─");
    }
    return text_str(&t);
}

/* Each below its tick, as far as the picture goes; one that would touch another is left out. */
static const char *draw_labels(const struct drawing *d)
{
    struct text t;
    text_init(&t, d->plane.page->arena);
    int end = 0;
    for (size_t i = 0; i < d->plane.scale.ticks.n; i++) {
        const struct curve_tick *tick = &d->plane.scale.ticks.at[i];
        int columns = (int)utf8_columns(tick->label), from = tick->at + MARGIN - columns / 2;
        from = from + columns > d->columns ? d->columns - columns : from;
        from = from < 0 ? 0 : from;
        if ((end && from <= end) || from + columns > d->columns)
            continue;
        text_repeat(&t, " ", (size_t)(from - end));
        text_add(&t, tick->label);
        end = from + columns;
    }
    return text_str(&t);
}

/* A row of the table that has only its picture. */
static void add_drawn(struct report *r, struct block *b, const char *picture)
{
    struct row *row = block_row(r, b);
    while (row->n + 1 < b->columns.n)
        row_text(r, row, "");
    row_text(r, row, picture);
}

static const struct block *drawn_table(struct drawing *d, bool joined)
{
    struct report r;
    report_init(&r, d->plane.page->arena);
    struct block *b = swings_table(&d->plane, joined, true);
    const char *head = curve_x_words(d->plane.page, &d->plane.scale);
    struct column *c = block_column(&r, b, "picture", *head ? head : "Picture", "", STYLE_PLAIN);
    c->keep = 2;
    c->drawn = true;
    for (size_t i = 0; i < b->rows.n; i++) {
        struct row *row = &b->rows.at[i];
        while (row->n + 1 < b->columns.n)
            row_text(&r, row, "");
        row_text(&r, row, draw_bars(d, i ? &d->plane.swings->rows.at[i - 1] : NULL));
    }
    add_drawn(&r, b, draw_axis(d));
    add_drawn(&r, b, draw_labels(d));
    return b;
}

/* The widest picture that leaves room for the rest; NULL when there is none. */
static const struct block *widest_table(struct drawing *d, const struct page *p,
                                        const struct swings *s, bool joined, bool easy)
{
    int widest = (int)(p->width / 2);
    for (int n = widest < WIDEST_PICTURE ? widest : WIDEST_PICTURE; n >= LEAST_PICTURE; n -= 2) {
        open_drawing(d, p, s, n);
        const struct block *b = drawn_table(d, joined);
        if (table_has_room(p, b, 1, easy))
            return b;
    }
    return NULL;
}

static const struct block *best_table(struct drawing *d, const struct page *p,
                                      const struct swings *s)
{
    const struct block *b = NULL;
    for (int easy = 1; easy >= 0 && !b; easy--) {
        if (p->width >= SEPARATE_WIDTH)
            b = widest_table(d, p, s, false, easy);
        if (!b)
            b = widest_table(d, p, s, true, easy);
    }
    return b;
}

static void write_key(struct page *p, const struct drawing *d)
{
    static const struct {
        int sort;
        const char *words;
    } signs[] = {{LOW, SWINGS_LOW_WORDS},
                 {HIGH, SWINGS_HIGH_WORDS},
                 {BOTH, "either end"},
                 {NEAR, "a change of less than half a column"},
                 {LINE, "today"}};
    struct pair pairs[SORTS + 1];
    size_t n = 0;
    for (size_t i = 0; i < sizeof signs / sizeof *signs; i++)
        if (d->used[signs[i].sort])
            pairs[n++] = (struct pair){glyph_of(p, signs[i].sort), signs[i].words, ""};
    if (swings_turn(d->plane.swings))
        pairs[n++] = (struct pair){SWINGS_TURNS, page_clean(p, d->plane.swings->turns), ""};
    if (n)
        page_blank(p);
    page_pairs(p, pairs, n);
}

void page_swings(struct page *p, const struct swings *s)
{
    struct drawing d;
    if (s->rows.n == 0) {
        swings_open(&d.plane, p, s, LEAST_PICTURE);
        page_paragraph(p, swings_today(&d.plane), 0, INK_PLAIN);
        page_paragraph(p, "(no inputs)", 0, INK_PLAIN);
        return;
    }
    const struct block *b = best_table(&d, p, s);
    if (!b) {
        open_drawing(&d, p, s, LEAST_PICTURE);
        for (int i = 0; i < SORTS; i++)
            d.used[i] = false;
        b = swings_table(&d.plane, true, true);
    }
    page_table(p, b);
    write_key(p, &d);
}
