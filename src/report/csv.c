/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The tables of a report and the numbers of its pictures (marks of grids, points of curves, rows of
 * swings and spreads, cells of maps) as comma-separated values (RFC 4180: CR LF, quotes where
 * needed). Control and invisible characters are shown, not sent; texts that a spreadsheet would
 * take for a formula are guarded. Owns nothing. */
#include <assert.h>
#include <math.h>
#include <string.h>

#include "report/block.h"
#include "report/clean.h"
#include "report/policy_plane.h"
#include "report/tree_list.h"

struct csv_out {
    struct text *out;
    struct arena *arena;
};

static bool is_plain_number(const char *s)
{
    double x;
    s += *s == '-' || *s == '+';
    return text_to_double(s, s + strlen(s), &x);
}

/* Spreadsheets compute a cell that begins with one of these. A cell that begins
 * with an apostrophe already is left: it is no formula. */
static bool is_formula(const char *s)
{
    return *s && strchr("=+-@\t\r", *s) && !is_plain_number(s);
}

static void csv_cell(struct csv_out *w, const char *s)
{
    const char *guard = is_formula(s) ? "'" : "";
    if (!s[strcspn(s, ",\"\r\n")] && *s != ' ' && (!*s || s[strlen(s) - 1] != ' ')) {
        text_printf(w->out, "%s%s", guard, s);
        return;
    }
    text_printf(w->out, "\"%s", guard);
    for (; *s; s++)
        text_addn(w->out, *s == '"' ? "\"\"" : s, *s == '"' ? 2 : 1);
    text_byte(w->out, '"');
}

static const char *cell_value(struct csv_out *w, const struct cell *c)
{
    char buf[32];
    switch (c->type) {
    case CELL_EMPTY: return "";
    case CELL_YES: return c->number != 0 ? "yes" : "no";
    case CELL_TEXT:
    case CELL_DATE: return clean_text(w->arena, c->text, false);
    case CELL_NUMBER:
    case CELL_COUNT: break;
    }
    assert(isfinite(c->number));
    return arena_str(w->arena, text_double(buf, c->number == 0 ? 0 : c->number));
}

static const char *header_value(struct csv_out *w, const char *name, const char *in,
                                enum number_style style)
{
    const char *key = clean_text(w->arena, name, false);
    const char *unit = clean_text(w->arena, style == STYLE_PERCENT ? "" : in, false);
    return *unit ? arena_printf(w->arena, "%s-%s", key, unit) : key;
}

static void write_header(struct csv_out *w, const struct block *b)
{
    for (size_t j = 0; j < b->columns.n; j++) {
        const struct column *c = &b->columns.at[j];
        text_add(w->out, j ? "," : "");
        csv_cell(w, header_value(w, c->key, c->unit, c->style));
    }
    text_add(w->out, "\r\n");
}

/* A row of one empty cell is quoted: an empty line would part two tables. */
static void write_row(struct csv_out *w, const struct block *b, const struct row *row)
{
    static const struct cell empty = {.type = CELL_EMPTY};
    for (size_t j = 0; j < b->columns.n; j++) {
        const char *value = cell_value(w, j < row->n ? &row->at[j] : &empty);
        text_add(w->out, j ? "," : "");
        if (b->columns.n == 1 && !*value)
            text_add(w->out, "\"\"");
        else
            csv_cell(w, value);
    }
    text_add(w->out, "\r\n");
}

/* --- grids --- */

static const char *label_at(struct csv_out *w, const struct grid *g, int i)
{
    return i < 0 ? "" : clean_text(w->arena, g->marks.at[i].label, false);
}

static void write_mark(struct csv_out *w, const struct grid *g, const struct grid_mark *m)
{
    const struct cell frequency = {.type = CELL_NUMBER, .number = m->frequency};
    const struct cell damage = {.type = CELL_NUMBER, .number = m->damage};
    const char *values[] = {clean_text(w->arena, m->label, false),
                            clean_text(w->arena, m->name, false),
                            cell_value(w, &frequency),
                            cell_value(w, &damage),
                            label_at(w, g, m->arrow_from),
                            label_at(w, g, m->part_of)};
    for (size_t j = 0; j < sizeof values / sizeof *values; j++) {
        text_add(w->out, j ? "," : "");
        csv_cell(w, values[j]);
    }
    text_add(w->out, "\r\n");
}

/* One row a mark; "from" is the mark at the other end of its arrow, "part-of" the one that it
 * is a part of. */
static void write_grid(struct csv_out *w, const struct grid *g)
{
    text_add(w->out, "mark,name,frequency-1/a,");
    csv_cell(w, arena_printf(w->arena, "damage-%s", clean_text(w->arena, g->currency, false)));
    text_add(w->out, ",from,part-of\r\n");
    for (size_t i = 0; i < g->marks.n; i++)
        write_mark(w, g, &g->marks.at[i]);
}

/* --- curves --- */

static void write_place(struct csv_out *w, const char *line, const char *mark, double x, double y)
{
    const struct cell across = {.type = CELL_NUMBER, .number = x};
    const struct cell up = {.type = CELL_NUMBER, .number = y};
    csv_cell(w, clean_text(w->arena, line, false));
    text_byte(w->out, ',');
    csv_cell(w, clean_text(w->arena, mark, false));
    text_printf(w->out, ",%s,%s\r\n", cell_value(w, &across), cell_value(w, &up));
}

/* One row a point, then one row a mark. */
static void write_curve(struct csv_out *w, const struct curve *c)
{
    text_add(w->out, "line,mark,");
    csv_cell(w, header_value(w, c->x.key, c->x.unit, c->x.style));
    text_byte(w->out, ',');
    csv_cell(w, header_value(w, c->y.key, c->y.unit, c->y.style));
    text_add(w->out, "\r\n");
    for (size_t i = 0; i < c->lines.n; i++) {
        const struct curve_line *l = &c->lines.at[i];
        for (size_t k = 0; k < l->points.n; k++)
            write_place(w, l->name, "", l->points.at[k].x, l->points.at[k].y);
    }
    for (size_t i = 0; i < c->marks.n; i++)
        write_place(w, "", c->marks.at[i].label, c->marks.at[i].x, c->marks.at[i].y);
}

/* --- swings, maps and spreads --- */

static void write_number(struct csv_out *w, double x)
{
    const struct cell c = {.type = CELL_NUMBER, .number = x};
    text_printf(w->out, ",%s", cell_value(w, &c));
}

static void write_text(struct csv_out *w, const char *s)
{
    csv_cell(w, clean_text(w->arena, s, false));
}

/* ",KEY-UNIT" of a number of the axis, behind "low-" and the like. */
static void write_axis_header(struct csv_out *w, const char *before, const struct curve_axis *a)
{
    const char *name = arena_printf(w->arena, "%s%s", before, a->key);
    text_byte(w->out, ',');
    csv_cell(w, header_value(w, name, a->unit, a->style));
}

/* One row an input; the result of today in each. */
static void write_swings(struct csv_out *w, const struct swings *s)
{
    text_add(w->out, "input,range");
    write_axis_header(w, "low-", &s->axis);
    write_axis_header(w, "high-", &s->axis);
    write_axis_header(w, "today-", &s->axis);
    text_add(w->out, ",low-turns,high-turns\r\n");
    for (size_t i = 0; i < s->rows.n; i++) {
        const struct swing *row = &s->rows.at[i];
        write_text(w, row->label);
        text_byte(w->out, ',');
        write_text(w, row->words);
        write_number(w, row->low);
        write_number(w, row->high);
        write_number(w, s->today);
        text_printf(w->out, ",%s,%s\r\n", row->low_turns ? "yes" : "no",
                    row->high_turns ? "yes" : "no");
    }
}

/* One row a cell: all x of the least y first. */
static void write_map(struct csv_out *w, const struct map *m)
{
    csv_cell(w, header_value(w, m->x.key, m->x.unit, m->x.style));
    write_axis_header(w, "", &m->y);
    text_add(w->out, ",choice");
    write_axis_header(w, "", &m->worth);
    text_add(w->out, "\r\n");
    for (size_t i = 0; i < m->cells.n; i++) {
        const struct cell x = {.type = CELL_NUMBER, .number = m->xs.at[i % m->xs.n]};
        text_add(w->out, cell_value(w, &x));
        write_number(w, m->ys.at[i / m->xs.n]);
        text_byte(w->out, ',');
        write_text(w, m->choices.at[m->cells.at[i].choice].name);
        write_number(w, m->cells.at[i].worth);
        text_add(w->out, "\r\n");
    }
}

static void write_spread(struct csv_out *w, const struct spread *s)
{
    write_text(w, s->label);
    text_byte(w->out, ',');
    write_text(w, s->style == STYLE_PERCENT ? "" : s->unit);
    for (int k = 0; k < SPREAD_PARTS; k++)
        write_number(w, s->parts[k].value);
    for (int k = 0; k < SPREAD_PARTS; k++) {
        if (s->parts[k].error >= 0)
            write_number(w, s->parts[k].error);
        else
            text_byte(w->out, ',');
    }
    text_add(w->out, "\r\n");
}

static void write_spreads(struct csv_out *w, const struct spreads *s)
{
    text_add(w->out, "label,unit,mean,p5,p50,p95,mean-error,p5-error,p50-error,p95-error\r\n");
    for (size_t i = 0; i < s->n; i++)
        write_spread(w, &s->at[i]);
}

/* --- reports --- */

static void write_table(struct csv_out *w, const struct block *b)
{
    write_header(w, b);
    for (size_t k = 0; k < b->rows.n; k++)
        write_row(w, b, &b->rows.at[k]);
}

static bool has_points(const struct curve *c)
{
    for (size_t i = 0; i < c->lines.n; i++)
        if (c->lines.at[i].points.n)
            return true;
    return c->marks.n > 0;
}

static bool is_table(const struct block *b)
{
    switch (b->type) {
    case BLOCK_SIGNATURES: return b->rows.n > 0;
    case BLOCK_TABLE: return b->columns.n > 0;
    case BLOCK_GRID: return b->grid->marks.n > 0;
    case BLOCK_CURVE: return has_points(b->curve);
    case BLOCK_SWINGS: return b->swings->rows.n > 0;
    case BLOCK_MAP: return map_is_whole(b->map);
    case BLOCK_SPREADS: return b->spreads->n > 0;
    case BLOCK_TREE: return b->tree->root != NULL;
    case BLOCK_POLICY: return policy_is_whole(b->policy);
    default: return false;
    }
}

static void write_block(struct csv_out *w, const struct block *b)
{
    switch (b->type) {
    case BLOCK_GRID: write_grid(w, b->grid); break;
    case BLOCK_CURVE: write_curve(w, b->curve); break;
    case BLOCK_SWINGS: write_swings(w, b->swings); break;
    case BLOCK_MAP: write_map(w, b->map); break;
    case BLOCK_SPREADS: write_spreads(w, b->spreads); break;
    case BLOCK_TREE: write_table(w, tree_data(w->arena, b->tree)); break;
    case BLOCK_POLICY: write_table(w, policy_data(w->arena, b->policy)); break;
    default: write_table(w, b);
    }
}

void report_write_csv(struct text *out, const struct report *r)
{
    struct csv_out w = {out, arena_child(out->arena)};
    size_t n = 0;
    for (size_t i = 0; i < r->blocks.n; i++) {
        const struct block *b = &r->blocks.at[i];
        if (!is_table(b))
            continue;
        text_add(out, n++ ? "\r\n" : "");
        write_block(&w, b);
    }
    arena_free(w.arena);
}
