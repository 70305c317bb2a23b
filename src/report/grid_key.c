/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The key of a grid. Its table of marks is an ordinary table block, so that its
 * numbers look as they do everywhere. Owns nothing. */
#include "report/grid_key.h"

#include <string.h>

#include "math/elementary.h"

static const char *label_of(const struct grid_plane *g, size_t i)
{
    return page_clean(g->page, g->grid->marks.at[i].label);
}

/* Names of the criteria often hold their risk already. */
static const char *line_words(const struct grid_plane *g, const struct grid_line *l)
{
    struct arena *a = g->page->arena;
    const char *unit = page_clean(g->page, arena_printf(a, "%s/a", g->grid->currency));
    const char *risk = money_text(a, l->risk, unit), *name = page_clean(g->page, l->name);
    return strstr(name, risk) ? name : arena_printf(a, "%s: %s", name, risk);
}

/* A line of the plane is seen when its risk is between those of two corners. */
static bool crosses_plane(const struct grid_plane *g, double risk)
{
    double k = math_log10(risk);
    return k > g->frequency_low + g->damage_low && k < g->frequency_high + g->damage_high;
}

const char *grid_key_line(const struct grid_plane *g, size_t i)
{
    const char *words = line_words(g, &g->grid->lines.at[i]);
    if (crosses_plane(g, g->grid->lines.at[i].risk))
        return words;
    return arena_printf(g->page->arena, "%s (outside the picture)", words);
}

const char *grid_key_wholes(const struct grid_plane *g)
{
    const char *words = page_clean(g->page, g->grid->wholes);
    return *words ? words : "a mark";
}

const char *grid_key_parts(const struct grid_plane *g)
{
    const char *words = page_clean(g->page, g->grid->parts);
    return *words ? words : "a part of another mark";
}

bool grid_key_has_parts(const struct grid_plane *g, bool shared)
{
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        const struct grid_spot *s = &g->spots[i];
        if (grid_is_part(g->grid, i) && s->labelled && (s->company > 1) == shared)
            return true;
    }
    return false;
}

/* The signs of marks are told where there are two sorts of them. */
static size_t add_mark_signs(struct pair *pairs, const struct grid_plane *g)
{
    const struct page *p = g->page;
    bool lone = grid_key_has_parts(g, false), shared = grid_key_has_parts(g, true);
    if (!lone && !shared)
        return 0;
    pairs[0] = (struct pair){grid_lone_glyph(p, false), grid_key_wholes(g), ""};
    const char *sign = lone && shared ? arena_printf(p->arena, "%s %s", grid_lone_glyph(p, true),
                                                     grid_shared_glyph(p, true))
                       : lone         ? grid_lone_glyph(p, true)
                                      : grid_shared_glyph(p, true);
    const char *words = grid_key_parts(g);
    pairs[1] = (struct pair){
        sign,
        shared ? arena_printf(p->arena, "%s; %s: several", words, grid_shared_glyph(p, true))
               : words,
        ""};
    return 2;
}

enum { MARK_SIGNS = 2 };

static void write_signs(struct page *p, const struct grid_plane *g)
{
    const struct grid *grid = g->grid;
    size_t n = grid->lines.n;
    struct pair *pairs = NEW_ARRAY(p->arena, n + 1 + MARK_SIGNS, struct pair);
    for (size_t i = 0; i < n; i++) {
        const char *s = g->symbols[i];
        pairs[i] =
            (struct pair){arena_printf(p->arena, "%s%s%s%s", s, s, s, s), grid_key_line(g, i), ""};
    }
    pairs[n++] = (struct pair){p->ascii ? ". ." : "· ·", GRID_KEY_DECADES, ""};
    n += add_mark_signs(&pairs[n], g);
    page_pairs(p, pairs, n);
    page_blank(p);
}

const struct block *grid_key_marks(const struct page *p, const struct grid *grid)
{
    struct report r;
    report_init(&r, p->arena);
    struct block *b = report_table(&r, NULL, NULL);
    const char *risk = arena_printf(p->arena, "%s/a", grid->currency);
    block_column(&r, b, "mark", "Mark", "", STYLE_PLAIN);
    block_column(&r, b, "name", "Name", "", STYLE_PLAIN);
    block_column(&r, b, "frequency", "Frequency", "1/a", STYLE_FREQUENCY)->keep = 2;
    block_column(&r, b, "damage", "Damage", grid->currency, STYLE_MONEY)->keep = 1;
    block_column(&r, b, "risk", "Risk", risk, STYLE_MONEY)->keep = 3;
    for (size_t i = 0; i < grid->marks.n; i++) {
        const struct grid_mark *m = &grid->marks.at[i];
        struct row *row = block_row(&r, b);
        row_text(&r, row, m->label);
        row_text(&r, row, m->name);
        row_number(&r, row, m->frequency, m->frequency_figure);
        row_number(&r, row, m->damage, m->damage_figure);
        row_number(&r, row, m->frequency * m->damage, NULL);
    }
    return b;
}

static void add_remark(const struct grid_plane *g, struct lines *to, const struct text *t)
{
    if (t->n)
        *array_push(g->page->arena, to) = text_str(t);
}

/* "before: A, B." for the marks that `test` picks; nothing when there are none. */
static void list_marks(struct lines *to, const struct grid_plane *g, const char *before,
                       bool (*test)(const struct grid_plane *g, size_t i))
{
    struct text t;
    text_init(&t, g->page->arena);
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (test(g, i))
            text_printf(&t, "%s %s", t.n ? "," : before, label_of(g, i));
    add_remark(g, to, &t);
}

static void add_company(struct text *t, const struct grid_plane *g, size_t first)
{
    for (size_t i = first; i < g->grid->marks.n; i++)
        if (g->spots[i].placed && g->spots[i].first == first)
            text_printf(t, "%s %s", i == first ? "" : ",", label_of(g, i));
}

static void list_company(struct lines *to, const struct grid_plane *g, bool part)
{
    struct text t;
    text_init(&t, g->page->arena);
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        const struct grid_spot *s = &g->spots[i];
        if (!s->placed || s->first != i || s->company < 2 || grid_is_part(g->grid, i) != part ||
            (part && !s->labelled))
            continue;
        if (t.n)
            text_add(&t, ";");
        else
            text_printf(&t, "At one place (%s):", grid_shared_glyph(g->page, part));
        add_company(&t, g, i);
    }
    add_remark(g, to, &t);
}

/* "Not drawn, for want of room: 3 of 20 hollow marks (1a, 2b, 7a)" */
static void list_yielding(struct lines *to, const struct grid_plane *g)
{
    struct text t, all;
    text_init(&t, g->page->arena);
    text_init(&all, g->page->arena);
    size_t n = 0, of = 0;
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        if (!grid_is_part(g->grid, i) || !g->spots[i].placed)
            continue;
        of++;
        if (g->spots[g->spots[i].first].labelled)
            continue;
        text_printf(&t, "%s%s", n++ ? ", " : "", label_of(g, i));
    }
    if (n)
        text_printf(&all, "Not drawn, for want of room: %zu of the %zu hollow marks (%s)", n, of,
                    text_str(&t));
    add_remark(g, to, &all);
}

/* "5 -> 5a, 5b": all arrows from one mark. */
static void add_arrows_from(struct text *t, const struct grid_plane *g, size_t from)
{
    bool first = true;
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        if (g->grid->marks.at[i].arrow_from != (int)from)
            continue;
        if (first)
            text_printf(t, "%s %s %s %s", t->n ? ";" : "Arrows:", label_of(g, from),
                        g->page->ascii ? "->" : "→", label_of(g, i));
        else
            text_printf(t, ", %s", label_of(g, i));
        first = false;
    }
}

static void list_arrows(struct lines *to, const struct grid_plane *g)
{
    struct text t;
    text_init(&t, g->page->arena);
    for (size_t from = 0; from < g->grid->marks.n; from++)
        add_arrows_from(&t, g, from);
    add_remark(g, to, &t);
}

static bool is_crowded(const struct grid_plane *g, size_t i)
{
    return g->spots[i].placed && !g->spots[g->spots[i].first].labelled && !grid_is_part(g->grid, i);
}

static bool is_clamped(const struct grid_plane *g, size_t i)
{
    bool drawn = !grid_is_part(g->grid, i) || g->spots[g->spots[i].first].labelled;
    return g->spots[i].placed && g->spots[i].clamped && drawn;
}

static bool is_never(const struct grid_plane *g, size_t i)
{
    return g->grid->marks.at[i].frequency == 0;
}

static bool is_harmless(const struct grid_plane *g, size_t i)
{
    return g->grid->marks.at[i].damage == 0;
}

/* Infinite, negative or undefined: no place on a log axis. */
static bool is_nowhere(const struct grid_plane *g, size_t i)
{
    return !g->spots[i].placed && !is_never(g, i) && !is_harmless(g, i);
}

struct lines grid_key_remarks(const struct grid_plane *g)
{
    struct lines to = {0};
    list_company(&to, g, false);
    list_company(&to, g, true);
    list_arrows(&to, g);
    list_marks(&to, g, "In the picture without a label, for want of room:", is_crowded);
    list_yielding(&to, g);
    list_marks(&to, g, "Beyond the axes, drawn at the edge of the picture:", is_clamped);
    list_marks(&to, g, "Not in the picture, for it never happens:", is_never);
    list_marks(&to, g, "Not in the picture, for it does no damage:", is_harmless);
    list_marks(&to, g, "Not in the picture, for it has no place on the axes:", is_nowhere);
    return to;
}

/* All lines below the table; an empty line parts them from it when there are any. */
static void write_remarks(struct page *p, const struct grid_plane *g)
{
    struct lines remarks = grid_key_remarks(g);
    if (remarks.n)
        page_blank(p);
    for (size_t i = 0; i < remarks.n; i++)
        page_paragraph(p, remarks.at[i], 0, INK_PLAIN);
}

void grid_write_key(struct page *p, const struct grid_plane *g)
{
    if (g->grid->marks.n == 0) {
        page_paragraph(p, "(no marks)", 0, INK_PLAIN);
        return;
    }
    if (g->n_placed)
        write_signs(p, g);
    page_table(p, grid_key_marks(p, g->grid));
    write_remarks(p, g);
}
