/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reports as JSON (RFC 8259): blocks that have a key, in their order, each row on
 * a line of its own. Numbers are the shortest text that reads back as the same
 * double. Characters that could harm a terminal are escaped, nothing is changed.
 * Invariant: no number is infinite or undefined (asserted). Owns nothing. */
#include <assert.h>
#include <math.h>
#include <string.h>

#include "report/block.h"
#include "report/clean.h"

struct json {
    struct text *out;
    struct arena *arena;
};

/* Controls, bidirectional and invisible characters, line separators. */
static bool is_hidden(unsigned c)
{
    return c < 0x20 || (c >= 0x7f && c <= 0x9f) || c == 0xad || c == 0x61c
        || (c >= 0x200b && c <= 0x200f) || (c >= 0x2028 && c <= 0x202e)
        || (c >= 0x2060 && c <= 0x206f) || c == 0xfeff;
}

/* The character at s (valid UTF-8), and its bytes. */
static unsigned point_at(const char *s, size_t *n)
{
    const unsigned char *u = (const unsigned char *)s;
    *n = u[0] < 0x80 ? 1 : u[0] < 0xe0 ? 2 : u[0] < 0xf0 ? 3 : 4;
    unsigned c = *n == 1 ? u[0] : u[0] & (0x7fu >> *n);
    for (size_t i = 1; i < *n; i++)
        c = c << 6 | (u[i] & 0x3f);
    return c;
}

static void put_string(struct json *j, const char *text)
{
    text_byte(j->out, '"');
    for (const char *s = clean_valid(j->arena, text); *s;) {
        size_t n;
        unsigned c = point_at(s, &n);
        if (c == '"' || c == '\\')
            text_printf(j->out, "\\%c", (int)c);
        else if (c == '\n')
            text_add(j->out, "\\n");
        else if (is_hidden(c))
            text_printf(j->out, "\\u%04x", c);
        else
            text_addn(j->out, s, n);
        s += n;
    }
    text_byte(j->out, '"');
}

/* "key": with the comma before it when it is not the first of its object. */
static void put_key(struct json *j, const char *key, bool first)
{
    text_add(j->out, first ? "" : ", ");
    put_string(j, key);
    text_add(j->out, ": ");
}

static void put_member(struct json *j, const char *key, const char *text, bool first)
{
    put_key(j, key, first);
    put_string(j, text);
}

static void put_yes(struct json *j, const char *key, bool yes)
{
    put_key(j, key, false);
    text_add(j->out, yes ? "true" : "false");
}

static void put_double(struct json *j, double x)
{
    char buf[32];
    assert(isfinite(x));
    text_add(j->out, text_double(buf, x == 0 ? 0 : x));
}

static void put_value(struct json *j, double x, const char *unit, const char *figure)
{
    text_byte(j->out, '{');
    put_key(j, "value", true);
    put_double(j, x);
    if (unit && *unit)
        put_member(j, "unit", unit, false);
    if (figure)
        put_member(j, "figure", figure, false);
}

static void put_plain(struct json *j, const struct cell *c)
{
    if (c->type == CELL_EMPTY)
        text_add(j->out, "null");
    else if (c->type == CELL_YES)
        text_add(j->out, c->number != 0 ? "true" : "false");
    else
        put_string(j, c->text);
}

/* Texts, dates, yes and no stand for themselves unless they carry a mark. */
static void put_cell(struct json *j, const struct cell *c, const char *unit,
                     enum number_style style)
{
    bool number = c->type == CELL_NUMBER || c->type == CELL_COUNT;
    if (!number && !c->mark) {
        put_plain(j, c);
        return;
    }
    if (number) {
        put_value(j, c->number, style == STYLE_PERCENT ? NULL : unit, c->figure);
    } else {
        text_byte(j->out, '{');
        put_key(j, "value", true);
        put_plain(j, c);
    }
    if (c->mark)
        put_member(j, "mark", c->mark, false);
    text_byte(j->out, '}');
}

static const struct cell *cell_of(const struct row *row, size_t i)
{
    static const struct cell empty = {.type = CELL_EMPTY};
    return i < row->n ? &row->at[i] : &empty;
}

/* "name": [ and the elements, a line each, and ]. */
static void open_list(struct json *j, const char *name)
{
    put_key(j, name, false);
    text_byte(j->out, '[');
}

static void next_line(struct json *j, size_t i)
{
    text_add(j->out, i ? ",\n    " : "\n    ");
}

static void put_pairs(struct json *j, const struct block *b)
{
    open_list(j, "values");
    for (size_t i = 0; i < b->rows.n; i++) {
        const struct row *row = &b->rows.at[i];
        const struct cell *value = cell_of(row, 1);
        next_line(j, i);
        text_byte(j->out, '{');
        put_member(j, "name", cell_of(row, 0)->text, true);
        put_key(j, "value", false);
        put_cell(j, value, value->unit, value->style);
        text_byte(j->out, '}');
    }
    text_byte(j->out, ']');
}

static void put_columns(struct json *j, const struct block *b)
{
    open_list(j, "columns");
    for (size_t i = 0; i < b->columns.n; i++) {
        const struct column *c = &b->columns.at[i];
        next_line(j, i);
        text_byte(j->out, '{');
        put_member(j, "key", c->key, true);
        put_member(j, "head", c->head, false);
        if (c->unit && *c->unit && c->style != STYLE_PERCENT)
            put_member(j, "unit", c->unit, false);
        text_byte(j->out, '}');
    }
    text_byte(j->out, ']');
}

static void put_table(struct json *j, const struct block *b)
{
    put_columns(j, b);
    open_list(j, "rows");
    for (size_t i = 0; i < b->rows.n; i++) {
        next_line(j, i);
        text_byte(j->out, '{');
        for (size_t k = 0; k < b->columns.n; k++) {
            const struct column *c = &b->columns.at[k];
            put_key(j, c->key, k == 0);
            put_cell(j, cell_of(&b->rows.at[i], k), c->unit, c->style);
        }
        text_byte(j->out, '}');
    }
    text_byte(j->out, ']');
}

static void put_mark(struct json *j, const struct grid *g, const struct grid_mark *m)
{
    text_byte(j->out, '{');
    put_member(j, "label", m->label, true);
    put_member(j, "name", m->name, false);
    put_key(j, "frequency", false);
    put_value(j, m->frequency, "1/a", m->frequency_figure);
    text_byte(j->out, '}');
    put_key(j, "damage", false);
    put_value(j, m->damage, g->currency, m->damage_figure);
    text_byte(j->out, '}');
    if (m->arrow_from >= 0)
        put_member(j, "from", g->marks.at[m->arrow_from].label, false);
    if (m->part_of >= 0)
        put_member(j, "part-of", g->marks.at[m->part_of].label, false);
    text_byte(j->out, '}');
}

static void put_line(struct json *j, const struct grid *g, const struct grid_line *l)
{
    text_byte(j->out, '{');
    put_member(j, "name", l->name, true);
    put_key(j, "risk", false);
    put_value(j, l->risk, arena_printf(j->arena, "%s/a", g->currency), NULL);
    text_add(j->out, "}}");
}

static void put_grid(struct json *j, const struct grid *g)
{
    put_member(j, "currency", g->currency, false);
    open_list(j, "marks");
    for (size_t i = 0; i < g->marks.n; i++) {
        next_line(j, i);
        put_mark(j, g, &g->marks.at[i]);
    }
    text_byte(j->out, ']');
    open_list(j, "lines");
    for (size_t i = 0; i < g->lines.n; i++) {
        next_line(j, i);
        put_line(j, g, &g->lines.at[i]);
    }
    text_byte(j->out, ']');
}

static void put_axis(struct json *j, const char *name, const struct curve_axis *axis)
{
    put_key(j, name, false);
    text_byte(j->out, '{');
    put_member(j, "key", axis->key, true);
    put_member(j, "head", axis->head, false);
    if (*axis->unit && axis->style != STYLE_PERCENT)
        put_member(j, "unit", axis->unit, false);
    put_member(j, "scale", axis->log ? "log" : "linear", false);
    text_byte(j->out, '}');
}

static void put_points(struct json *j, const struct curve_line *l)
{
    open_list(j, "points");
    for (size_t i = 0; i < l->points.n; i++) {
        text_add(j->out, i ? ", [" : "[");
        put_double(j, l->points.at[i].x);
        text_add(j->out, ", ");
        put_double(j, l->points.at[i].y);
        text_byte(j->out, ']');
    }
    text_byte(j->out, ']');
}

static void put_curve_line(struct json *j, const struct curve_line *l)
{
    text_byte(j->out, '{');
    put_member(j, "name", l->name, true);
    put_member(j, "symbol", l->symbol, false);
    if (l->figure)
        put_member(j, "figure", l->figure, false);
    if (l->steps)
        put_yes(j, "steps", true);
    put_points(j, l);
    text_byte(j->out, '}');
}

static void put_place(struct json *j, const struct curve_axis *axis, const char *name, double x,
                      const char *figure)
{
    put_key(j, name, false);
    put_value(j, x, axis->style == STYLE_PERCENT ? NULL : axis->unit, figure);
    text_byte(j->out, '}');
}

static void put_curve_mark(struct json *j, const struct curve *c, const struct curve_mark *m)
{
    text_byte(j->out, '{');
    put_member(j, "label", m->label, true);
    put_place(j, &c->x, "x", m->x, m->x_figure);
    put_place(j, &c->y, "y", m->y, m->y_figure);
    text_byte(j->out, '}');
}

static void put_curve(struct json *j, const struct curve *c)
{
    put_axis(j, "x", &c->x);
    put_axis(j, "y", &c->y);
    open_list(j, "lines");
    for (size_t i = 0; i < c->lines.n; i++) {
        next_line(j, i);
        put_curve_line(j, &c->lines.at[i]);
    }
    text_byte(j->out, ']');
    open_list(j, "marks");
    for (size_t i = 0; i < c->marks.n; i++) {
        next_line(j, i);
        put_curve_mark(j, c, &c->marks.at[i]);
    }
    text_byte(j->out, ']');
}

/* --- swings --- */

static void put_swing(struct json *j, const struct curve_axis *axis, const struct swing *s)
{
    text_byte(j->out, '{');
    put_member(j, "label", s->label, true);
    put_member(j, "range", s->words, false);
    put_place(j, axis, "low", s->low, s->low_figure);
    put_key(j, "low-turns", false);
    text_add(j->out, s->low_turns ? "true" : "false");
    put_place(j, axis, "high", s->high, s->high_figure);
    put_key(j, "high-turns", false);
    text_add(j->out, s->high_turns ? "true}" : "false}");
}

static void put_swings(struct json *j, const struct swings *s)
{
    struct curve_axis axis = s->axis;
    axis.log = false;
    put_axis(j, "axis", &axis);
    put_place(j, &axis, "today", s->today, s->today_figure);
    put_member(j, "turns", s->turns, false);
    open_list(j, "rows");
    for (size_t i = 0; i < s->rows.n; i++) {
        next_line(j, i);
        put_swing(j, &axis, &s->rows.at[i]);
    }
    text_byte(j->out, ']');
}

/* --- maps --- */

static void put_map_values(struct json *j, const char *name, const double *values, size_t n)
{
    open_list(j, name);
    for (size_t i = 0; i < n; i++) {
        text_add(j->out, i ? ", " : "");
        put_double(j, values[i]);
    }
    text_byte(j->out, ']');
}

static void put_choices(struct json *j, const struct map *m)
{
    open_list(j, "choices");
    for (size_t i = 0; i < m->choices.n; i++) {
        const struct map_choice *c = &m->choices.at[i];
        next_line(j, i);
        text_byte(j->out, '{');
        put_member(j, "name", c->name, true);
        if (c->figure)
            put_member(j, "figure", c->figure, false);
        put_key(j, "nothing", false);
        text_add(j->out, c->nothing ? "true}" : "false}");
    }
    text_byte(j->out, ']');
}

/* Indices of choices, or their worths: a row for each y, from the least. */
static void put_cells(struct json *j, const char *name, const struct map *m, bool worths)
{
    open_list(j, name);
    size_t n = map_is_whole(m) ? m->cells.n : 0;
    for (size_t i = 0; i < n; i++) {
        bool first = i % m->xs.n == 0;
        if (first && i)
            text_byte(j->out, ']');
        if (first)
            next_line(j, i);
        text_add(j->out, first ? "[" : ", ");
        put_double(j, worths ? m->cells.at[i].worth : (double)m->cells.at[i].choice);
    }
    text_add(j->out, n ? "]]" : "]");
}

static void put_map(struct json *j, const struct map *m)
{
    put_axis(j, "x", &m->x);
    put_axis(j, "y", &m->y);
    put_axis(j, "worth", &m->worth);
    put_choices(j, m);
    put_map_values(j, "x-values", m->xs.at, m->xs.n);
    put_map_values(j, "y-values", m->ys.at, m->ys.n);
    put_cells(j, "rows", m, false);
    put_cells(j, "worths", m, true);
    if (!m->has_today)
        return;
    put_key(j, "today", false);
    text_byte(j->out, '{');
    put_member(j, "label", "today", true);
    put_place(j, &m->x, "x", m->today_x, m->today_x_figure);
    put_place(j, &m->y, "y", m->today_y, m->today_y_figure);
    text_byte(j->out, '}');
}

/* --- spreads --- */

static void put_spread(struct json *j, const struct spread *s)
{
    static const char *const names[SPREAD_PARTS] = {"mean", "p5", "p50", "p95"};
    const char *unit = s->style == STYLE_PERCENT ? NULL : s->unit;
    text_byte(j->out, '{');
    put_member(j, "label", s->label, true);
    for (int k = 0; k < SPREAD_PARTS; k++) {
        put_key(j, names[k], false);
        put_value(j, s->parts[k].value, unit, s->parts[k].figure);
        if (s->parts[k].error >= 0) {
            put_key(j, "error", false);
            put_double(j, s->parts[k].error);
        }
        text_byte(j->out, '}');
    }
    text_byte(j->out, '}');
}

static void put_spreads(struct json *j, const struct spreads *s)
{
    open_list(j, "rows");
    for (size_t i = 0; i < s->n; i++) {
        next_line(j, i);
        put_spread(j, &s->at[i]);
    }
    text_byte(j->out, ']');
}

/* --- trees --- */

static void put_named(struct json *j, const char *key, double x, const char *unit,
                      const char *figure)
{
    put_key(j, key, false);
    put_value(j, x, unit, figure);
    text_byte(j->out, '}');
}

static void put_node(struct json *j, const struct tree *t, const struct tree_node *n)
{
    static const char *const kinds[] = {"choice", "chance", "end"};
    text_byte(j->out, '{');
    put_member(j, "label", n->label, true);
    put_member(j, "kind", kinds[n->kind], false);
    if (n->steps)
        put_member(j, "steps", n->steps, false);
    if (n->has_probability)
        put_named(j, "probability", n->probability, NULL, n->probability_figure);
    put_named(j, "value", n->value, t->style == STYLE_PERCENT ? NULL : t->unit, n->value_figure);
    put_named(j, "reach", n->reach, NULL, n->reach_figure);
    put_yes(j, "best", n->best);
    put_yes(j, "folded", n->folded);
    put_key(j, "ends", false);
    text_printf(j->out, "%zu", n->ends);
    if (n->same_as)
        put_member(j, "same-as", n->same_as, false);
}

/* A node on a line of its own, its children within it. */
static void put_nodes(struct json *j, const struct tree *t, const struct tree_node *n)
{
    put_node(j, t, n);
    open_list(j, "children");
    for (size_t i = 0; i < n->children.n; i++) {
        next_line(j, i);
        put_nodes(j, t, n->children.at[i]);
    }
    text_add(j->out, "]}");
}

static void put_tree(struct json *j, const struct tree *t)
{
    put_member(j, "head", t->value_head, false);
    if (*t->unit && t->style != STYLE_PERCENT)
        put_member(j, "unit", t->unit, false);
    if (!t->root)
        return;
    put_key(j, "root", false);
    put_nodes(j, t, t->root);
}

/* --- policies --- */

static void put_actions(struct json *j, const struct policy *o)
{
    open_list(j, "actions");
    for (size_t i = 0; i < o->actions.n; i++) {
        next_line(j, i);
        text_byte(j->out, '{');
        put_member(j, "name", o->actions.at[i].name, true);
        put_yes(j, "nothing", o->actions.at[i].nothing);
        text_byte(j->out, '}');
    }
    text_byte(j->out, ']');
}

static void put_strings(struct json *j, const char *name, const char *const *at, size_t n)
{
    open_list(j, name);
    for (size_t i = 0; i < n; i++) {
        text_add(j->out, i ? ", " : "");
        put_string(j, at[i]);
    }
    text_byte(j->out, ']');
}

/* The index of the action, or null, and the probability of being there. */
static void put_policy_cell(struct json *j, const struct policy_cell *c)
{
    text_byte(j->out, '{');
    put_key(j, "action", true);
    if (c->action == POLICY_NONE)
        text_add(j->out, "null");
    else
        text_printf(j->out, "%zu", c->action);
    put_key(j, "reach", false);
    put_double(j, c->reach);
    if (c->figure)
        put_member(j, "figure", c->figure, false);
    text_byte(j->out, '}');
}

static void put_policy(struct json *j, const struct policy *o)
{
    put_actions(j, o);
    put_strings(j, "times", o->times.at, o->times.n);
    put_strings(j, "conditions", o->conditions.at, o->conditions.n);
    open_list(j, "rows");
    for (size_t i = 0; i < o->cells.n; i++) {
        bool first = i % o->times.n == 0;
        if (first && i)
            text_byte(j->out, ']');
        if (first)
            next_line(j, i);
        text_add(j->out, first ? "[" : ", ");
        put_policy_cell(j, &o->cells.at[i]);
    }
    text_add(j->out, o->cells.n ? "]]" : "]");
}

static void put_block(struct json *j, const struct block *b)
{
    static const char *const types[] = {"heading", "note",    "pairs",      "table",
                                        "grid",    "curve",   "signatures", "swings",
                                        "map",     "spreads", "tree",       "policy"};
    text_byte(j->out, '{');
    put_member(j, "key", b->key, true);
    put_member(j, "type", types[b->type], false);
    if (b->title)
        put_member(j, "title", b->title, false);
    switch (b->type) {
    case BLOCK_HEADING: break;
    case BLOCK_NOTE: put_member(j, "text", b->text, false); break;
    case BLOCK_PAIRS: put_pairs(j, b); break;
    case BLOCK_SIGNATURES:
    case BLOCK_TABLE: put_table(j, b); break;
    case BLOCK_GRID: put_grid(j, b->grid); break;
    case BLOCK_CURVE: put_curve(j, b->curve); break;
    case BLOCK_SWINGS: put_swings(j, b->swings); break;
    case BLOCK_MAP: put_map(j, b->map); break;
    case BLOCK_SPREADS: put_spreads(j, b->spreads); break;
    case BLOCK_TREE: put_tree(j, b->tree); break;
    case BLOCK_POLICY: put_policy(j, b->policy); break;
    }
    text_byte(j->out, '}');
}

void report_write_json(struct text *out, const struct report *r)
{
    struct json j = {out, arena_child(out->arena)};
    size_t n = 0;
    text_add(out, "{\"blocks\": [");
    for (size_t i = 0; i < r->blocks.n; i++) {
        if (!r->blocks.at[i].key)
            continue;
        text_add(out, n++ ? ",\n  " : "\n  ");
        put_block(&j, &r->blocks.at[i]);
    }
    text_add(out, "]}\n");
    arena_free(j.arena);
}
