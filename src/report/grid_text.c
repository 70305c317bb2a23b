/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The iso-risk grid as text: the plane in its axes, the ends of the lines of equal
 * risk labelled, the key below. Owns nothing.
 * Invariant: every mark is in the picture or named by the key, and the key has all
 * numbers that the picture only shows. */
#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "report/grid_key.h"
#include "report/grid_plane.h"
#include "report/grid_words.h"
#include "report/number.h"

enum {
    ROOMY_PAGE = 80,     /* from here both labels of a decade of frequency share a line */
    WIDEST_RISK = 12,    /* columns to the right for "100 kEUR/a" */
    WIDEST_CURRENCY = 5, /* a longer name of the currency is left to the key */
    WIDE_DECADE = 4      /* columns of a decade that are worth more than units at the lines */
};

/* The frame around a plane. */
struct frame {
    struct grid_plane *plane;
    const char *currency; /* clean; "" when too long for the axes */
    size_t power, period; /* columns of the two labels of a frequency */
    bool roomy;
    size_t gutter;  /* columns to the left of the axis */
    bool long_risk; /* labels of risk with their unit */
    size_t risk;    /* columns of the widest label of risk */
};

static bool ascii(const struct frame *f)
{
    return f->plane->page->ascii;
}

static const char *risk_label(const struct frame *f, int k, bool with_unit)
{
    struct arena *a = f->plane->page->arena;
    const char *unit = *f->currency ? arena_printf(a, "%s/a", f->currency) : "";
    return grid_amount_of_power(f->plane->page, k, with_unit ? unit : "");
}

static size_t larger(size_t a, size_t b)
{
    return a > b ? a : b;
}

static size_t widest_risk(const struct frame *f, bool with_unit)
{
    const struct grid_plane *g = f->plane;
    size_t widest = 0;
    for (int k = g->frequency_low + g->damage_low; k < g->frequency_high + g->damage_high; k++)
        widest = larger(widest, utf8_columns(risk_label(f, k, with_unit)));
    return widest;
}

/* Columns for the plane: less the gutter, the axis, a blank, the labels of risk. */
static int columns_left(const struct frame *f)
{
    return (int)f->plane->page->width - (int)f->gutter - 1 - 1 - (int)f->risk - 1;
}

static void measure(struct frame *f)
{
    struct grid_plane *g = f->plane;
    f->currency = page_clean(g->page, g->grid->currency);
    if (utf8_columns(f->currency) > WIDEST_CURRENCY)
        f->currency = "";
    for (int k = g->frequency_low; k <= g->frequency_high; k++) {
        f->power = larger(f->power, utf8_columns(grid_power_text(f->plane->page, k)));
        f->period = larger(f->period, utf8_columns(grid_period_of_power(f->plane->page, k)));
    }
    f->roomy = g->page->width >= ROOMY_PAGE;
    f->gutter = f->roomy ? f->period + 2 + f->power : larger(f->period, f->power);
    /* two blanks more: the first amount is centred below the axis and reaches over it */
    f->gutter = larger(f->gutter, strlen("damage, ") + utf8_columns(f->currency) + 2) + 1;
    f->risk = widest_risk(f, true);
    f->long_risk =
        f->risk <= WIDEST_RISK && columns_left(f) / (g->damage_high - g->damage_low) >= WIDE_DECADE;
    if (!f->long_risk)
        f->risk = widest_risk(f, false);
    grid_plane_size(g, columns_left(f));
}

/* The labels of the decade that row y belongs to: the power beside its tick, the
 * period beside it or on the line below. */
static void put_row_labels(const struct frame *f, struct line *l, int y)
{
    const struct grid_plane *g = f->plane;
    int k = g->frequency_high - y / g->decade_rows, below = y % g->decade_rows;
    if (below == 0 && f->roomy)
        line_add_right(l, grid_period_of_power(g->page, k), f->gutter - 1 - f->power - 2,
                       INK_PLAIN);
    if (below == 0)
        line_add_right(l, grid_power_text(f->plane->page, k), f->gutter - 1, INK_PLAIN);
    else if (below == 1 && !f->roomy)
        line_add_right(l, grid_period_of_power(f->plane->page, k), f->gutter - 1, INK_PLAIN);
    line_to(l, f->gutter);
}

static enum ink ink_of(enum grid_layer layer)
{
    switch (layer) {
    case LAYER_RISK: return INK_FAINT;
    case LAYER_LINE: return INK_ALARM;
    case LAYER_LABEL:
    case LAYER_MARK: return INK_HEAD;
    default: return INK_PLAIN;
    }
}

/* Neighbours in one ink are written together. */
static void put_cells(const struct frame *f, struct line *l, int y)
{
    const struct grid_plane *g = f->plane;
    for (int x = 0; x < g->columns;) {
        enum grid_layer layer = grid_cell_at(g, x, y)->layer;
        struct text run;
        text_init(&run, g->page->arena);
        for (; x < g->columns && grid_cell_at(g, x, y)->layer == layer; x++)
            text_add(&run, layer == LAYER_NONE ? " " : grid_cell_at(g, x, y)->glyph);
        line_add(l, text_str(&run), ink_of(layer));
    }
}

static void write_plane_row(const struct frame *f, struct page *p, int y)
{
    const struct grid_plane *g = f->plane;
    bool decade = y % g->decade_rows == 0;
    struct line l = line_begin(p);
    put_row_labels(f, &l, y);
    line_add(&l, ascii(f) ? decade ? "+" : "|" : decade ? "┤" : "│", INK_PLAIN);
    put_cells(f, &l, y);
    if (decade && y > 0) {
        int k = g->damage_high + g->frequency_high - y / g->decade_rows;
        line_to(&l, f->gutter + 1 + (size_t)g->columns + 1);
        line_add(&l, risk_label(f, k, f->long_risk), INK_PLAIN);
    }
    line_end(&l);
}

static void write_axis(const struct frame *f, struct page *p)
{
    const struct grid_plane *g = f->plane;
    struct line l = line_begin(p);
    put_row_labels(f, &l, g->rows);
    line_add(&l, ascii(f) ? "+" : "└", INK_PLAIN);
    for (int x = 0; x < g->columns; x++) {
        bool decade = x % g->decade_columns == 0;
        line_add(&l, ascii(f) ? decade ? "+" : "-" : decade ? "┬" : "─", INK_PLAIN);
    }
    line_end(&l);
}

/* A label centred below the k-th decade of damage. */
static void put_below(const struct frame *f, struct line *l, int k, const char *s)
{
    size_t at = f->gutter + 1 + (size_t)(k * f->plane->decade_columns);
    line_to(l, at - utf8_columns(s) / 2);
    line_add(l, s, INK_PLAIN);
}

static const char *with_currency(const struct frame *f, const char *what, const char *behind)
{
    if (!*f->currency)
        return what;
    return arena_printf(f->plane->page->arena, "%s, %s%s", what, f->currency, behind);
}

/* Every decade, or every second, third ... one when they stand too close. */
static void write_damages(const struct frame *f, struct page *p)
{
    const struct grid_plane *g = f->plane;
    int across = g->damage_high - g->damage_low;
    size_t widest = 0;
    for (int k = 0; k <= across; k++)
        widest = larger(widest,
                        utf8_columns(grid_amount_of_power(g->page, g->damage_low + k, "")));
    int step = 1 + (int)widest / g->decade_columns;
    struct line l = line_begin(p);
    line_add(&l, with_currency(f, "damage", ""), INK_PLAIN);
    for (int k = 0; k <= across; k += step)
        put_below(f, &l, k, grid_amount_of_power(f->plane->page, g->damage_low + k, ""));
    line_end(&l);
}

/* The lines that end below: all are labelled, on as many rows as that takes. */
static void write_risks(const struct frame *f, struct page *p)
{
    const struct grid_plane *g = f->plane;
    int across = g->damage_high - g->damage_low;
    size_t widest = widest_risk(f, true);
    bool with_unit = f->long_risk && (int)widest < g->decade_columns;
    if (!with_unit)
        widest = widest_risk(f, false);
    int rows = 1 + (int)widest / g->decade_columns;
    for (int row = 0; row < rows; row++) {
        struct line l = line_begin(p);
        if (row == 0)
            line_add(&l, with_unit ? "risk" : with_currency(f, "risk", "/a"), INK_PLAIN);
        for (int k = 1 + row; k < across; k += rows)
            put_below(f, &l, k, risk_label(f, g->frequency_low + g->damage_low + k, with_unit));
        line_end(&l);
    }
}

static void write_picture(struct page *p, struct grid_plane *g)
{
    struct frame f;
    do {
        f = (struct frame){.plane = g};
        measure(&f);
    } while (grid_plane_widen(g));
    grid_plane_open(g);
    grid_draw_lines(g);
    grid_draw_marks(g);
    grid_draw_arrows(g);
    grid_draw_labels(g);
    page_paragraph(p, "frequency, per year", 0, INK_PLAIN);
    for (int y = 0; y < g->rows; y++)
        write_plane_row(&f, p, y);
    write_axis(&f, p);
    write_damages(&f, p);
    write_risks(&f, p);
    page_blank(p);
}

void page_grid(struct page *p, const struct grid *grid)
{
    struct grid_plane g = {.page = p, .grid = grid};
    grid_plane_range(&g);
    if (g.n_placed)
        write_picture(p, &g);
    grid_write_key(p, &g);
}
