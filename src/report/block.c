/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Building reports. Every text is copied into the report's arena, so that a
 * report outlives the objects that it tells about. Owns nothing.
 * Invariant: a row holds at most one cell a column; cells that are missing at its
 * end count as empty. */
#include "report/block_add.h"

#include <assert.h>
#include <math.h>

const char *report_keep(struct report *r, const char *s)
{
    return s ? arena_str(r->arena, s) : NULL;
}

void report_init(struct report *r, struct arena *a)
{
    *r = (struct report){.arena = a};
}

struct block *report_add(struct report *r, enum block_type type, const char *key,
                         const char *title)
{
    struct block *b = array_push(r->arena, &r->blocks);
    b->type = type;
    b->key = report_keep(r, key);
    b->title = report_keep(r, title);
    return b;
}

struct block *report_heading(struct report *r, int level, const char *title)
{
    assert(level >= 1 && level <= 3 && title);
    struct block *b = report_add(r, BLOCK_HEADING, NULL, title);
    b->level = level;
    return b;
}

struct block *report_note(struct report *r, const char *key, const char *format, ...)
{
    struct block *b = report_add(r, BLOCK_NOTE, key, NULL);
    va_list args;
    va_start(args, format);
    b->text = arena_vprintf(r->arena, format, args);
    va_end(args);
    return b;
}

struct block *report_pairs(struct report *r, const char *key, const char *title)
{
    struct block *b = report_add(r, BLOCK_PAIRS, key, title);
    block_column(r, b, "name", "", "", STYLE_PLAIN);
    block_column(r, b, "value", "", "", STYLE_PLAIN);
    return b;
}

struct block *report_table(struct report *r, const char *key, const char *title)
{
    return report_add(r, BLOCK_TABLE, key, title);
}

struct block *report_signatures(struct report *r, const char *key, const char *title,
                                const char *const *roles, size_t n)
{
    struct block *b = report_add(r, BLOCK_SIGNATURES, key, title);
    block_column(r, b, "role", "", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name and signature", "", STYLE_PLAIN);
    block_column(r, b, "date", "Date", "", STYLE_PLAIN);
    for (size_t i = 0; i < n; i++) {
        struct row *row = block_row(r, b);
        row_text(r, row, roles[i]);
        row_empty(r, row);
        row_empty(r, row);
    }
    return b;
}

struct block *report_grid(struct report *r, const char *key, const char *title,
                          const char *currency)
{
    struct block *b = report_add(r, BLOCK_GRID, key, title);
    b->grid = NEW(r->arena, struct grid);
    b->grid->currency = arena_str(r->arena, currency);
    return b;
}

struct block *report_curve(struct report *r, const char *key, const char *title)
{
    struct block *b = report_add(r, BLOCK_CURVE, key, title);
    b->curve = NEW(r->arena, struct curve);
    curve_set_x(r, b, "x", NULL, NULL, STYLE_PLAIN);
    curve_set_y(r, b, "y", NULL, NULL, STYLE_PLAIN);
    return b;
}

struct column *block_column(struct report *r, struct block *b, const char *key, const char *head,
                            const char *unit, enum number_style style)
{
    assert(key && *key);
    struct column *c = array_push(r->arena, &b->columns);
    c->key = report_keep(r, key);
    c->head = report_keep(r, head ? head : "");
    c->unit = report_keep(r, unit ? unit : "");
    c->style = style;
    return c;
}

struct row *block_row(struct report *r, struct block *b)
{
    return array_push(r->arena, &b->rows);
}

static struct cell *add_cell(struct report *r, struct row *row, enum cell_type type)
{
    struct cell *c = array_push(r->arena, row);
    c->type = type;
    return c;
}

struct cell *row_text(struct report *r, struct row *row, const char *text)
{
    struct cell *c = add_cell(r, row, text ? CELL_TEXT : CELL_EMPTY);
    c->text = report_keep(r, text);
    return c;
}

struct cell *row_date(struct report *r, struct row *row, const char *date)
{
    struct cell *c = row_text(r, row, date);
    if (date)
        c->type = CELL_DATE;
    return c;
}

struct cell *row_number(struct report *r, struct row *row, double number, const char *figure)
{
    struct cell *c = add_cell(r, row, CELL_NUMBER);
    c->number = number;
    c->figure = report_keep(r, figure);
    return c;
}

struct cell *row_count(struct report *r, struct row *row, uint64_t n)
{
    struct cell *c = add_cell(r, row, CELL_COUNT);
    c->number = (double)n;
    return c;
}

struct cell *row_yes(struct report *r, struct row *row, bool yes)
{
    struct cell *c = add_cell(r, row, CELL_YES);
    c->number = yes;
    return c;
}

struct cell *row_empty(struct report *r, struct row *row)
{
    return add_cell(r, row, CELL_EMPTY);
}

struct row *block_pair(struct report *r, struct block *b, const char *name)
{
    struct row *row = block_row(r, b);
    row_text(r, row, name ? name : "");
    return row;
}

struct cell *pair_number(struct report *r, struct row *row, double number, const char *unit,
                         enum number_style style, const char *figure)
{
    struct cell *c = row_number(r, row, number, figure);
    c->unit = report_keep(r, unit ? unit : "");
    c->style = style;
    return c;
}

struct grid_mark *grid_add_mark(struct report *r, struct block *b, const char *label,
                                const char *name, double frequency, double damage)
{
    struct grid_mark *m = array_push(r->arena, &b->grid->marks);
    m->label = report_keep(r, label ? label : "");
    m->name = report_keep(r, name ? name : "");
    m->frequency = frequency;
    m->damage = damage;
    m->arrow_from = -1;
    m->part_of = -1;
    return m;
}

struct grid_line *grid_add_line(struct report *r, struct block *b, const char *name, double risk,
                                const char *symbol)
{
    assert(risk > 0);
    struct grid_line *l = array_push(r->arena, &b->grid->lines);
    l->name = report_keep(r, name ? name : "");
    l->risk = risk;
    l->symbol = report_keep(r, symbol ? symbol : "");
    return l;
}

struct curve_axis *report_set_axis(struct report *r, struct curve_axis *axis, const char *key,
                                   const char *head, const char *unit, enum number_style style)
{
    assert(key && *key);
    *axis = (struct curve_axis){.key = report_keep(r, key),
                                .head = report_keep(r, head ? head : ""),
                                .unit = report_keep(r, unit ? unit : ""),
                                .style = style};
    return axis;
}

struct curve_axis *curve_set_x(struct report *r, struct block *b, const char *key,
                               const char *head, const char *unit, enum number_style style)
{
    return report_set_axis(r, &b->curve->x, key, head, unit, style);
}

struct curve_axis *curve_set_y(struct report *r, struct block *b, const char *key,
                               const char *head, const char *unit, enum number_style style)
{
    return report_set_axis(r, &b->curve->y, key, head, unit, style);
}

struct curve_line *curve_add_line(struct report *r, struct block *b, const char *name,
                                  const char *symbol)
{
    struct curve_line *l = array_push(r->arena, &b->curve->lines);
    l->name = report_keep(r, name ? name : "");
    l->symbol = report_keep(r, symbol ? symbol : "");
    return l;
}

bool report_can_draw(double x)
{
    return isfinite(x) && fabs(x) <= 1e300;
}

void curve_add_point(struct report *r, struct curve_line *line, double x, double y)
{
    assert(report_can_draw(x) && report_can_draw(y));
    assert(line->points.n == 0 || line->points.at[line->points.n - 1].x <= x);
    *array_push(r->arena, &line->points) = (struct curve_point){x, y};
}

struct curve_mark *curve_add_mark(struct report *r, struct block *b, const char *label, double x,
                                  double y)
{
    assert(report_can_draw(x) && report_can_draw(y));
    struct curve_mark *m = array_push(r->arena, &b->curve->marks);
    m->label = report_keep(r, label ? label : "");
    m->x = x;
    m->y = y;
    return m;
}
