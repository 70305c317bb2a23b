/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Spreads as text: the table of their numbers, whose last column is a strip for each row.
 * Owns nothing.
 * Invariant: a mark stands in the column of its value; a mean or a median covers an end. */
#include "report/spreads.h"

#include <math.h>

#include "report/table_shape.h"

enum { LEAST_DRAWN = 16 }; /* columns of a strip */

enum { TRACK, RANGE, LOW_END, HIGH_END, NO_RANGE, MEDIAN, MEAN, BOTH, SORTS };

static const char *glyph_of(const struct page *p, int sort)
{
    static const char *const utf8[SORTS] = {"·", "─", "├", "┤", "│", "┼", "○", "●"};
    static const char *const ascii[SORTS] = {".", "-", "[", "]", "|", "|", "o", "@"};
    return p->ascii ? ascii[sort] : utf8[sort];
}

static int column_of(const struct spreads_plane *g, const struct spread *s, enum spread_part part,
                     int columns)
{
    double at = spreads_place(g, s, s->parts[part].value);
    return (int)floor(at * (columns - 1) + 0.5);
}

static const char *draw_strip(const struct spreads_plane *g, const struct spread *s, int columns)
{
    int low = column_of(g, s, SPREAD_LOW, columns), high = column_of(g, s, SPREAD_HIGH, columns);
    int median = column_of(g, s, SPREAD_MEDIAN, columns);
    int mean = column_of(g, s, SPREAD_MEAN, columns);
    struct text t;
    text_init(&t, g->page->arena);
    for (int x = 0; x < columns; x++) {
        int sort = x == mean && x == median                         ? BOTH
                   : x == mean                                      ? MEAN
                   : x == median                                    ? MEDIAN
                   : x == low && x == high                          ? NO_RANGE
                   : x == low                                       ? LOW_END
                   : x == high                                      ? HIGH_END
                   : (x > low && x < high) || (x > high && x < low) ? RANGE
                                                                    : TRACK;
        text_add(&t, glyph_of(g->page, sort));
    }
    return text_str(&t);
}

static struct block *drawn_table(const struct spreads_plane *g, int columns)
{
    struct block *b = spreads_table(g);
    struct report r;
    report_init(&r, g->page->arena);
    for (size_t i = 0; i < b->rows.n; i++)
        row_text(&r, &b->rows.at[i], draw_strip(g, &g->spreads->at[i], columns));
    return b;
}

/* Strips wide enough for the page, or none: then the last column goes. */
static const struct block *widest_table(const struct spreads_plane *g, bool *drawn)
{
    static const int widths[] = {60, 48, 36, 30, 24, 20, LEAST_DRAWN};
    unsigned keep = g->with_errors ? SPREADS_ERROR_KEEP : SPREADS_DRAWN_KEEP;
    *drawn = true;
    for (int easy = 1; easy >= 0; easy--) {
        for (size_t i = 0; i < sizeof widths / sizeof *widths; i++) {
            struct block *b = drawn_table(g, widths[i]);
            if (widths[i] * 3 <= (int)g->page->width && table_has_room(g->page, b, keep, easy))
                return b;
        }
    }
    *drawn = false;
    struct block *b = spreads_table(g);
    b->columns.n--;
    return b;
}

/* Is there room for all errors, beside the narrowest picture or without one? */
static bool have_errors_room(struct spreads_plane *g)
{
    return table_has_room(g->page, drawn_table(g, LEAST_DRAWN), SPREADS_ERROR_KEEP, false);
}

static void write_key(struct page *p)
{
    const struct pair pairs[] = {{p->ascii ? "[--]" : "├──┤", SPREADS_RANGE_WORDS, ""},
                                 {glyph_of(p, MEDIAN), SPREADS_MEDIAN_WORDS, ""},
                                 {glyph_of(p, MEAN), SPREADS_MEAN_WORDS, ""},
                                 {glyph_of(p, BOTH), "both in one place", ""}};
    page_blank(p);
    page_pairs(p, pairs, sizeof pairs / sizeof *pairs);
}

void page_spreads(struct page *p, const struct spreads *s)
{
    struct spreads_plane g;
    bool drawn;
    spreads_open(&g, p, s);
    g.with_errors = have_errors_room(&g);
    const struct block *b = widest_table(&g, &drawn);
    page_table(p, b);
    if (s->n && drawn)
        write_key(p);
    if (spreads_have_errors(s)) {
        page_blank(p);
        page_paragraph(p, g.with_errors ? SPREADS_ERROR_WORDS : SPREADS_NO_ERROR_WORDS, 0,
                       INK_PLAIN);
    }
}
