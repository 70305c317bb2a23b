/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A policy as text: a table with the sign of an action for each condition and time, with the
 * probability of being there while there is room for it; the key below. Times that do not fit
 * are joined where they are equal, and what does not fit then goes on in a table below. Owns
 * nothing. */
#include "report/map_plane.h"
#include "report/policy_plane.h"

#include "base/utf8.h"
#include "report/table_shape.h"

enum { LEAST_CONDITION = 16 /* columns of the conditions on any page */ };

struct drawing {
    struct policy_plane plane;
    struct policy_spans columns;
    bool numbers; /* reaches beside the signs */
};

/* Signs stand below each other, within their brackets or without. */
static const char *words_of(const struct drawing *d, size_t condition, const struct policy_span *s)
{
    const struct policy_plane *g = &d->plane;
    struct policy_cell c = policy_cell_at(g->policy, condition, s->from);
    const char *sign = policy_sign(g, &c);
    char number[32];
    if (!*sign)
        return "";
    if (!(c.reach > 0))
        return arena_printf(g->page->arena, "(%s)", sign);
    if (!d->numbers)
        return arena_printf(g->page->arena, " %s", sign);
    return arena_printf(g->page->arena, " %s  %s", sign,
                        number_text(number, c.reach, STYLE_PROBABILITY));
}

/* The columns from..until - 1 of the drawing. */
static const struct block *table_of(const struct drawing *d, size_t from, size_t until)
{
    const struct policy *o = d->plane.policy;
    struct report r;
    report_init(&r, d->plane.page->arena);
    struct block *b = report_table(&r, NULL, NULL);
    block_column(&r, b, "condition", "Condition", "", STYLE_PLAIN);
    for (size_t j = from; j < until; j++) {
        const char *head = policy_time(&d->plane, &d->columns.at[j]);
        block_column(&r, b, "time", head, "", STYLE_PLAIN)->drawn = true;
    }
    for (size_t i = 0; i < o->conditions.n; i++) {
        struct row *row = block_row(&r, b);
        row_text(&r, row, o->conditions.at[i]);
        for (size_t j = from; j < until; j++)
            row_text(&r, row, words_of(d, i, &d->columns.at[j]));
    }
    return b;
}

/* The columns of the page that a column of the drawing takes, with its gutter. */
static size_t width_of(const struct drawing *d, size_t j)
{
    size_t widest = utf8_columns(policy_time(&d->plane, &d->columns.at[j]));
    for (size_t i = 0; i < d->plane.policy->conditions.n; i++) {
        size_t columns = utf8_columns(words_of(d, i, &d->columns.at[j]));
        widest = columns > widest ? columns : widest;
    }
    return TABLE_GUTTER + widest;
}

static size_t room_for(const struct drawing *d)
{
    const struct policy_plane *g = &d->plane;
    size_t widest = utf8_columns("Condition");
    for (size_t i = 0; i < g->policy->conditions.n; i++) {
        size_t columns = utf8_columns(page_clean(g->page, g->policy->conditions.at[i]));
        widest = columns > widest ? columns : widest;
    }
    return g->page->width - (widest < LEAST_CONDITION ? widest : LEAST_CONDITION);
}

/* How many columns, from this one on, fit beside the conditions; at least one. */
static size_t fitting(const struct drawing *d, size_t from)
{
    size_t room = room_for(d), used = 0, j = from;
    while (j < d->columns.n && (j == from || used + width_of(d, j) <= room))
        used += width_of(d, j++);
    return j;
}

/* With numbers, without them, joined: the first that fits, or the last. */
static void choose(struct drawing *d)
{
    d->columns = policy_columns(&d->plane, false);
    for (int numbers = 1; numbers >= 0; numbers--) {
        d->numbers = numbers;
        if (fitting(d, 0) == d->columns.n)
            return;
    }
    d->columns = policy_columns(&d->plane, true);
}

void page_policy(struct page *p, const struct policy *o)
{
    struct drawing d = {0};
    if (!policy_is_whole(o)) {
        page_paragraph(p, "(no cells)", 0, INK_PLAIN);
        return;
    }
    policy_open(&d.plane, p, o);
    choose(&d);
    for (size_t from = 0, until; from < d.columns.n; from = until) {
        until = fitting(&d, from);
        page_table(p, table_of(&d, from, until));
        page_blank(p);
    }
    struct lines remarks = policy_remarks(&d.plane);
    if (d.numbers)
        page_paragraph(p, POLICY_REACH_WORDS, 0, INK_PLAIN);
    for (size_t i = 0; i < remarks.n; i++)
        page_paragraph(p, remarks.at[i], 0, INK_PLAIN);
    if (o->actions.n) {
        page_blank(p);
        page_table(p, policy_key(&d.plane));
    }
}
