/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The signs, columns and key of a policy. Owns nothing. */
#include "report/policy_plane.h"

#include <assert.h>
#include <math.h>

#include "report/map_plane.h"

void policy_open(struct policy_plane *g, const struct page *p, const struct policy *o)
{
    assert(policy_is_whole(o));
    *g = (struct policy_plane){.page = p, .policy = o};
    g->signs = NEW_ARRAY(p->arena, o->actions.n, const char *);
    size_t letter = 0;
    for (size_t i = 0; i < o->actions.n; i++)
        g->signs[i] = o->actions.at[i].nothing ? map_nothing_sign(p) : map_letter(p, letter++);
}

struct policy_cell policy_cell_at(const struct policy *o, size_t condition, size_t time)
{
    if (o->cells.n == 0)
        return (struct policy_cell){.action = POLICY_NONE};
    return o->cells.at[condition * o->times.n + time];
}

const char *policy_sign(const struct policy_plane *g, const struct policy_cell *c)
{
    if (c->action != POLICY_NONE)
        return g->signs[c->action];
    return c->reach > 0 ? POLICY_SILENT_SIGN : "";
}

/* --- columns --- */

static bool look_alike(const struct policy *o, size_t a, size_t b)
{
    for (size_t i = 0; i < o->conditions.n; i++) {
        struct policy_cell x = policy_cell_at(o, i, a), y = policy_cell_at(o, i, b);
        if (x.action != y.action || (x.reach > 0) != (y.reach > 0))
            return false;
    }
    return true;
}

struct policy_spans policy_columns(const struct policy_plane *g, bool joined)
{
    const struct policy *o = g->policy;
    struct policy_spans spans = {0};
    for (size_t t = 0; t < o->times.n; t++) {
        if (joined && t && look_alike(o, t - 1, t))
            array_last(&spans)->until = t + 1;
        else
            *array_push(g->page->arena, &spans) = (struct policy_span){t, t + 1};
    }
    return spans;
}

const char *policy_time(const struct policy_plane *g, const struct policy_span *s)
{
    const struct page *p = g->page;
    const char *first = page_clean(p, g->policy->times.at[s->from]);
    const char *last = page_clean(p, g->policy->times.at[s->until - 1]);
    if (s->until - s->from == 1)
        return first;
    return arena_printf(p->arena, "%s%s%s", first, p->ascii ? "-" : "–", last);
}

/* --- the key --- */

/* Cells that hold a thing, and the greatest probability of being in one. */
struct share {
    size_t cells;
    double greatest;
};

static struct share share_of(const struct policy *o, size_t action)
{
    struct share s = {0};
    for (size_t i = 0; i < o->cells.n; i++) {
        if (o->cells.at[i].action != action)
            continue;
        s.cells++;
        s.greatest = fmax(s.greatest, o->cells.at[i].reach);
    }
    return s;
}

const struct block *policy_key(const struct policy_plane *g)
{
    const struct policy *o = g->policy;
    struct report r;
    report_init(&r, g->page->arena);
    struct block *b = report_table(&r, NULL, NULL);
    block_column(&r, b, "sign", "", "", STYLE_PLAIN);
    block_column(&r, b, "action", "Action", "", STYLE_PLAIN);
    block_column(&r, b, "cells", "Cells", "", STYLE_PLAIN)->keep = 1;
    block_column(&r, b, "reach", "Reached at most", "", STYLE_PROBABILITY)->keep = 2;
    for (size_t i = 0; i < o->actions.n; i++) {
        struct share s = share_of(o, i);
        struct row *row = block_row(&r, b);
        row_text(&r, row, g->signs[i]);
        row_text(&r, row, o->actions.at[i].name);
        row_count(&r, row, s.cells);
        row_number(&r, row, s.greatest, NULL);
    }
    return b;
}

bool policy_has_unreached(const struct policy *o)
{
    for (size_t i = 0; i < o->cells.n; i++)
        if (o->cells.at[i].action != POLICY_NONE && !(o->cells.at[i].reach > 0))
            return true;
    return false;
}

/* Whether a cell has no action, and is reached or not. */
static bool has_none(const struct policy *o, bool reached)
{
    for (size_t i = 0; i < o->cells.n; i++)
        if (o->cells.at[i].action == POLICY_NONE && (o->cells.at[i].reach > 0) == reached)
            return true;
    return o->cells.n == 0 && !reached;
}

struct lines policy_remarks(const struct policy_plane *g)
{
    struct arena *a = g->page->arena;
    struct lines remarks = {0};
    if (policy_has_unreached(g->policy))
        *array_push(a, &remarks) = "In brackets: " POLICY_UNREACHED_WORDS ".";
    if (has_none(g->policy, false))
        *array_push(a, &remarks) = "Blank: " POLICY_EMPTY_WORDS ".";
    if (has_none(g->policy, true))
        *array_push(a, &remarks) = POLICY_SILENT_SIGN ": " POLICY_SILENT_WORDS ".";
    return remarks;
}

/* --- runs --- */

/* The first time, from `from` on, at which a condition has another sign. */
static size_t run_end(const struct policy *o, size_t condition, size_t from)
{
    struct policy_cell first = policy_cell_at(o, condition, from);
    size_t end = from + 1;
    for (; end < o->times.n; end++) {
        struct policy_cell c = policy_cell_at(o, condition, end);
        if (c.action != first.action || (c.reach > 0) != (first.reach > 0))
            break;
    }
    return end;
}

static void add_run(const struct policy_plane *g, struct report *r, struct block *b,
                    size_t condition, const struct policy_span *s)
{
    const struct policy *o = g->policy;
    struct policy_cell c = policy_cell_at(o, condition, s->from);
    double least = c.reach, greatest = c.reach;
    for (size_t t = s->from; t < s->until; t++) {
        least = fmin(least, policy_cell_at(o, condition, t).reach);
        greatest = fmax(greatest, policy_cell_at(o, condition, t).reach);
    }
    struct row *row = block_row(r, b);
    row_text(r, row, o->conditions.at[condition]);
    row_text(r, row, policy_time(g, s));
    row_text(r, row, c.action == POLICY_NONE ? POLICY_SILENT_WORDS : o->actions.at[c.action].name);
    row_number(r, row, least, s->until - s->from == 1 ? c.figure : NULL);
    row_number(r, row, greatest, NULL);
}

const struct block *policy_runs(const struct policy_plane *g)
{
    const struct policy *o = g->policy;
    struct report r;
    report_init(&r, g->page->arena);
    struct block *b = report_table(&r, NULL, NULL);
    block_column(&r, b, "condition", "Condition", "", STYLE_PLAIN);
    block_column(&r, b, "times", "Times", "", STYLE_PLAIN);
    block_column(&r, b, "action", "Action", "", STYLE_PLAIN);
    block_column(&r, b, "least", "Reached at least", "", STYLE_PROBABILITY);
    block_column(&r, b, "greatest", "Reached at most", "", STYLE_PROBABILITY);
    for (size_t i = 0; i < o->conditions.n; i++) {
        for (size_t from = 0, end; from < o->times.n; from = end) {
            end = run_end(o, i, from);
            struct policy_cell c = policy_cell_at(o, i, from);
            if (*policy_sign(g, &c))
                add_run(g, &r, b, i, &(struct policy_span){from, end});
        }
    }
    return b;
}

/* --- all of it --- */

static void add_data(struct report *r, struct block *b, const struct policy *o, size_t condition,
                     size_t time)
{
    struct policy_cell c = policy_cell_at(o, condition, time);
    struct row *row = block_row(r, b);
    row_text(r, row, o->conditions.at[condition]);
    row_text(r, row, o->times.at[time]);
    row_text(r, row, c.action == POLICY_NONE ? NULL : o->actions.at[c.action].name);
    row_number(r, row, c.reach, c.figure);
}

const struct block *policy_data(struct arena *a, const struct policy *o)
{
    static const char *const keys[] = {"condition", "time", "action", "reach"};
    static const char *const heads[] = {"Condition", "Time", "Action", "Reached"};
    struct report r;
    report_init(&r, a);
    struct block *b = report_table(&r, NULL, NULL);
    for (size_t j = 0; j < sizeof keys / sizeof *keys; j++)
        block_column(&r, b, keys[j], heads[j], "", STYLE_PROBABILITY);
    for (size_t i = 0; i < o->conditions.n; i++)
        for (size_t t = 0; t < o->times.n; t++)
            add_data(&r, b, o, i, t);
    return b;
}
