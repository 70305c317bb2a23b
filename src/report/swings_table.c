/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The scale of swings and the table of their numbers, all in one unit: that of the ticks.
 * Owns nothing. */
#include "report/swings.h"

#include <math.h>

#include "report/number.h"

void swings_open(struct swings_plane *g, const struct page *p, const struct swings *s, int cells)
{
    double least = s->today, greatest = s->today;
    for (size_t i = 0; i < s->rows.n; i++) {
        const struct swing *row = &s->rows.at[i];
        least = fmin(least, fmin(row->low, row->high));
        greatest = fmax(greatest, fmax(row->low, row->high));
    }
    g->page = p;
    g->swings = s;
    g->axis = s->axis;
    g->axis.log = false;
    g->scale = (struct curve_scale){.axis = &g->axis};
    curve_scale_x(&g->scale, least, greatest, cells);
    curve_tick_x(&g->scale, p->arena);
}

static const char *unit_of(const struct swings_plane *g)
{
    if (g->axis.style == STYLE_PERCENT)
        return "%";
    return arena_printf(g->page->arena, "%s%s",
                        g->scale.shift > 0 ? money_prefix(g->scale.shift) : "", g->axis.unit);
}

const char *swings_today(const struct swings_plane *g)
{
    char number[32];
    number_scaled(number, g->swings->today, g->axis.style, g->scale.shift);
    const char *unit = page_clean(g->page, unit_of(g));
    unit += text_starts(unit, "1/") ? 1 : 0; /* "/a" reads better behind a number */
    return arena_printf(g->page->arena, "Today: %s%s%s", number, *unit ? " " : "", unit);
}

bool swings_turn(const struct swings *s)
{
    for (size_t i = 0; i < s->rows.n; i++)
        if (s->rows.at[i].low_turns || s->rows.at[i].high_turns)
            return true;
    return false;
}

static void add_end(const struct swings_plane *g, struct report *r, struct row *row, double value,
                    const char *figure, bool turns)
{
    struct cell *c = row_number(r, row, value, figure);
    c->style = g->axis.style;
    c->shift = g->scale.shift;
    c->mark = turns ? SWINGS_TURNS : NULL;
}

static const char *words_of(const struct swings_plane *g, const struct swing *s)
{
    const char *between = *s->label && *s->words ? ": " : "";
    return arena_printf(g->page->arena, "%s%s%s", s->label, between, s->words);
}

static void add_row(const struct swings_plane *g, struct report *r, struct block *b,
                    const struct swing *s, bool joined)
{
    struct row *row = block_row(r, b);
    row_text(r, row, joined ? words_of(g, s) : s->label);
    if (!joined)
        row_text(r, row, s->words);
    add_end(g, r, row, s->low, s->low_figure, s->low_turns);
    add_end(g, r, row, s->high, s->high_figure, s->high_turns);
}

static void add_today(const struct swings_plane *g, struct report *r, struct block *b)
{
    struct row *row = block_row(r, b);
    row_text(r, row, swings_today(g));
    while (row->n < b->columns.n)
        row_text(r, row, "");
}

struct block *swings_table(const struct swings_plane *g, bool joined, bool with_today)
{
    struct report r;
    report_init(&r, g->page->arena);
    struct block *b = report_table(&r, NULL, NULL);
    const char *unit = unit_of(g);
    block_column(&r, b, "input", joined ? "Input: its range" : "Input", "", STYLE_PLAIN);
    if (!joined)
        block_column(&r, b, "words", "Its range", "", STYLE_PLAIN)->keep = 1;
    block_column(&r, b, "low", "At low", unit, STYLE_PLAIN)->own = true;
    block_column(&r, b, "high", "At high", unit, STYLE_PLAIN)->own = true;
    if (with_today)
        add_today(g, &r, b);
    for (size_t i = 0; i < g->swings->rows.n; i++)
        add_row(g, &r, b, &g->swings->rows.at[i], joined);
    return b;
}
