/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The scales of spreads and the table of their numbers. Owns nothing.
 * Invariant: every value of a row has a place from 0 to 1 on its scale. */
#include "report/spreads.h"

#include <math.h>

#include "math/elementary.h"
#include "report/number.h"

/* From this many times the least value on, a linear scale would hide the small. */
static const double FAR_APART = 30;
/* Up to this many times the least value, a scale from 0 would hide what differs. */
static const double CLOSE = 1.5;

struct range {
    double least, greatest;
};

static struct range range_of(const struct spread *s)
{
    struct range r = {INFINITY, -INFINITY};
    for (int k = 0; k < SPREAD_PARTS; k++) {
        r.least = fmin(r.least, s->parts[k].value);
        r.greatest = fmax(r.greatest, s->parts[k].value);
    }
    return r;
}

static struct range range_of_all(const struct spreads *s)
{
    struct range all = {INFINITY, -INFINITY};
    for (size_t i = 0; i < s->n; i++) {
        struct range r = range_of(&s->at[i]);
        all.least = fmin(all.least, r.least);
        all.greatest = fmax(all.greatest, r.greatest);
    }
    return all;
}

static bool are_alike(const struct spreads *s)
{
    for (size_t i = 1; i < s->n; i++)
        if (!text_equal(s->at[i].unit, s->at[0].unit) || s->at[i].style != s->at[0].style)
            return false;
    return true;
}

static bool is_far(struct range r)
{
    return r.least > 0 && r.greatest / FAR_APART > r.least;
}

static int shift_of(const struct spread *s, struct range r)
{
    return number_shift(s->style, s->unit, r.least, r.greatest);
}

/* From 0, or to it, unless the numbers are close together and far from it. */
static void linear_ends(struct range r, double *low, double *high)
{
    bool above = r.least > 0 && r.greatest / CLOSE < r.least;
    bool below = r.greatest < 0 && r.least / CLOSE > r.greatest;
    *low = above ? r.least : fmin(r.least, 0);
    *high = below ? r.greatest : fmax(r.greatest, 0);
}

static void open_common(struct spreads_plane *g)
{
    struct range all = range_of_all(g->spreads);
    g->shift = shift_of(&g->spreads->at[0], all);
    g->log = is_far(all);
    linear_ends(all, &g->low, &g->high);
    if (!g->log)
        return;
    g->low = math_log10(all.least);
    g->high = math_log10(all.greatest);
}

/* Each row on its own: all log where all may be and one must. */
static void open_own(struct spreads_plane *g)
{
    bool positive = true;
    for (size_t i = 0; i < g->spreads->n; i++) {
        struct range r = range_of(&g->spreads->at[i]);
        positive = positive && r.least > 0;
        g->log = g->log || is_far(r);
    }
    g->log = g->log && positive;
    for (size_t i = 0; i < g->spreads->n && g->log; i++) {
        struct range r = range_of(&g->spreads->at[i]);
        g->decades = fmax(g->decades, math_log10(r.greatest) - math_log10(r.least));
    }
}

void spreads_open(struct spreads_plane *g, const struct page *p, const struct spreads *s)
{
    *g = (struct spreads_plane){
        .page = p, .spreads = s, .common = are_alike(s), .with_errors = true};
    if (s->n && g->common)
        open_common(g);
    else if (s->n)
        open_own(g);
}

double spreads_place(const struct spreads_plane *g, const struct spread *s, double value)
{
    struct range r = range_of(s);
    double low = g->low, high = g->high;
    if (!g->common && g->log) {
        double middle = (math_log10(r.least) + math_log10(r.greatest)) / 2;
        low = middle - g->decades / 2;
        high = middle + g->decades / 2;
    } else if (!g->common) {
        low = fmin(r.least, 0);
        high = fmax(r.greatest, 0);
    }
    double at = ((g->log ? math_log10(value) : value) - low) / (high - low);
    return high > low ? fmin(fmax(at, 0), 1) : 0.5;
}

/* --- words --- */

static int row_shift(const struct spreads_plane *g, const struct spread *s)
{
    return g->common ? g->shift : shift_of(s, range_of(s));
}

static const char *unit_of(const struct spreads_plane *g, const struct spread *s)
{
    int shift = row_shift(g, s);
    if (s->style == STYLE_PERCENT)
        return "%";
    return arena_printf(g->page->arena, "%s%s", shift > 0 ? money_prefix(shift) : "", s->unit);
}

static const char *number_of(const struct spreads_plane *g, const struct spread *s, double x)
{
    char number[32];
    return arena_str(g->page->arena, number_scaled(number, x, s->style, row_shift(g, s)));
}

const char *spreads_words(const struct spreads_plane *g, const struct spread *s)
{
    const char *unit = unit_of(g, s);
    return arena_printf(g->page->arena, "mean %s, 5 %% %s, median %s, 95 %% %s%s%s",
                        number_of(g, s, s->parts[SPREAD_MEAN].value),
                        number_of(g, s, s->parts[SPREAD_LOW].value),
                        number_of(g, s, s->parts[SPREAD_MEDIAN].value),
                        number_of(g, s, s->parts[SPREAD_HIGH].value), *unit ? " " : "", unit);
}

static const char *scale_words(const struct spreads_plane *g)
{
    char number[32];
    struct arena *a = g->page->arena;
    if (g->spreads->n == 0)
        return "Range";
    if (!g->common && g->log)
        return arena_printf(a, "Range, each row on a log scale of its own, %s decades wide",
                            number_digits(number, g->decades, 2, 0));
    if (!g->common)
        return "Range, each row on a scale of its own that has 0";
    const struct spread *s = &g->spreads->at[0];
    struct range all = range_of_all(g->spreads);
    return arena_printf(a, "Range, %s scale from %s to %s", g->log ? "log" : "linear",
                        number_of(g, s, g->log ? all.least : g->low),
                        number_of(g, s, g->log ? all.greatest : g->high));
}

/* --- the table --- */

static const char *const part_heads[SPREAD_PARTS] = {"Mean", "5 %", "Median", "95 %"};
static const char *const error_heads[SPREAD_PARTS] = {"Error (mean)", "Error (5 %)",
                                                      "Error (median)", "Error (95 %)"};

static bool has_error(const struct spreads *s, int part)
{
    for (size_t i = 0; i < s->n; i++)
        if (s->at[i].parts[part].error >= 0)
            return true;
    return false;
}

bool spreads_have_errors(const struct spreads *s)
{
    for (int k = 0; k < SPREAD_PARTS; k++)
        if (has_error(s, k))
            return true;
    return false;
}

static void add_column(struct report *r, struct block *b, const char *head, const char *unit,
                       unsigned keep)
{
    struct column *c = block_column(r, b, "part", head, unit, STYLE_PLAIN);
    c->own = true;
    c->keep = keep;
}

static void add_columns(const struct spreads_plane *g, struct report *r, struct block *b)
{
    const struct spreads *s = g->spreads;
    const char *unit = g->common && s->n ? unit_of(g, &s->at[0]) : "";
    block_column(r, b, "label", "Number", "", STYLE_PLAIN);
    for (int k = 0; k < SPREAD_PARTS; k++) {
        add_column(r, b, part_heads[k], unit, 0);
        if (g->with_errors && has_error(s, k))
            add_column(r, b, error_heads[k], unit,
                       k == SPREAD_MEAN ? SPREADS_MEAN_ERROR_KEEP : SPREADS_ERROR_KEEP);
    }
    if (!g->common)
        block_column(r, b, "unit", "Unit", "", STYLE_PLAIN);
    struct column *drawn = block_column(r, b, "range", scale_words(g), "", STYLE_PLAIN);
    drawn->keep = SPREADS_DRAWN_KEEP;
    drawn->drawn = true;
}

static void add_number(struct report *r, struct row *row, const struct spread *s, double number,
                       int shift, const char *figure)
{
    struct cell *c = row_number(r, row, number, figure);
    c->style = s->style;
    c->shift = shift;
}

static void add_row(const struct spreads_plane *g, struct report *r, struct block *b,
                    const struct spread *s)
{
    struct row *row = block_row(r, b);
    int shift = row_shift(g, s);
    row_text(r, row, s->label);
    for (int k = 0; k < SPREAD_PARTS; k++) {
        const struct spread_value *v = &s->parts[k];
        add_number(r, row, s, v->value, shift, v->figure);
        if (g->with_errors && v->error >= 0)
            add_number(r, row, s, v->error, shift, NULL);
        else if (g->with_errors && has_error(g->spreads, k))
            row_empty(r, row);
    }
    if (!g->common)
        row_text(r, row, unit_of(g, s));
}

struct block *spreads_table(const struct spreads_plane *g)
{
    struct report r;
    report_init(&r, g->page->arena);
    struct block *b = report_table(&r, NULL, NULL);
    add_columns(g, &r, b);
    for (size_t i = 0; i < g->spreads->n; i++)
        add_row(g, &r, b, &g->spreads->at[i]);
    return b;
}
