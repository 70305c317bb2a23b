/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The relations that the field tables make. Owns nothing; all is the arena's and does
 * not change once projection_new has returned.
 *
 * Invariant: what is made depends on the field tables alone, so that every version of
 * ohmen with the same tables makes the same SQL text. */
#include "store/projection.h"

/* Made names that a better one is known for. */
static const char *const better_names[][2] = {
    {"hazard_response", "response_row"},
    {"hazard_outcomes", "outcome"},
    {"hazard_branch", "branch"},
    {"outcome_damage", "damage"},
    {"outcome_interruptions", "interruption"},
    {"outcome_harm", "harm"},
    {"rate_exposure", "exposure"},
    {"scheme_works", "scheme_member"},
    {"scheme_trips_on", "scheme_trip_member"},
    {"decision_step", "step"},
    {"decision_chance_branch", "chance_branch"},
};

struct making {
    struct arena *a;
    struct projection *p;
    enum kind kind;
    /* Maps that may contain themselves, known by their table, with their relation. */
    ARRAY(struct known {
        const struct table *table;
        struct spot *row;
    })
    known;
};

static const char *snake(struct arena *a, const char *s)
{
    char *name = arena_str(a, s);
    for (char *p = name; *p; p++)
        if (*p == '-' || *p == ' ')
            *p = '_';
    return name;
}

static const char *joined(struct arena *a, const char *p, const char *q)
{
    const char *name = arena_printf(a, "%s_%s", p, q);
    for (size_t i = 0; i < sizeof better_names / sizeof better_names[0]; i++)
        if (text_equal(better_names[i][0], name))
            return better_names[i][1];
    return name;
}

static size_t add_column(struct making *m, struct relation *r, const char *name, bool whole,
                         bool needed, const char *help)
{
    *array_push(m->a, &r->columns) =
        (struct column){.name = name, .whole = whole, .needed = needed, .help = help};
    return r->columns.n - 1;
}

static struct relation *add_relation(struct making *m, const char *name, size_t n_key,
                                     const char *help)
{
    struct relation *r = NEW(m->a, struct relation);
    *r = (struct relation){
        .name = name, .help = help, .n_key = n_key, .kind = m->kind, .index = m->p->relations.n};
    *array_push(m->a, &m->p->relations) = r;
    return r;
}

/* A relation of rows inside objects. `listed`: they stand in a list. */
static struct relation *add_rows_relation(struct making *m, const char *name, bool listed,
                                          const char *help)
{
    struct relation *r = add_relation(m, name, ROW_KEYS, help);
    add_column(m, r, snake(m->a, kinds[m->kind].name), false, true, "Id of the object");
    add_column(m, r, "path", false, true, "Where in the object it stands");
    add_column(m, r, "within", false, true, "Path of the row that it stands in; empty: none");
    if (listed)
        add_column(m, r, "position", true, true, "Place in the list, from 0");
    else
        add_column(m, r, "key", false, true, "Name of the row");
    return r;
}

static bool is_scalar(const struct field *f)
{
    switch (f->type) {
    case FIELD_TEXT:
    case FIELD_NAME:
    case FIELD_REF:
    case FIELD_WORD:
    case FIELD_YES:
    case FIELD_COUNT:
    case FIELD_DATE:
    case FIELD_WHEN:
    case FIELD_UNIT:
    case FIELD_QUANTITY: return true;
    default: return false;
    }
}

static bool is_whole(const struct field *f)
{
    return f->type == FIELD_COUNT || f->type == FIELD_YES;
}

/* The map that a field holds, itself or in its rows; NULL: none. */
static const struct table *table_below(const struct field *f)
{
    while (f->part)
        f = f->part;
    return f->type == FIELD_STRUCT ? f->table : NULL;
}

enum { TABLES_DEEP = 16 };

/* Does `wanted` stand somewhere inside t? The tables on the way are in `above`. */
static bool contains(const struct table *t, const struct table *wanted, const struct table **above,
                     size_t depth)
{
    for (size_t i = 0; i < depth; i++)
        if (above[i] == t)
            return false;
    if (depth == TABLES_DEEP)
        return false;
    above[depth] = t;
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct table *below = table_below(&t->fields[i]);
        if (below && (below == wanted || contains(below, wanted, above, depth + 1)))
            return true;
    }
    return false;
}

static bool contains_itself(const struct table *t)
{
    const struct table *above[TABLES_DEEP];
    return contains(t, t, above, 0);
}

static struct spot *new_spot(struct making *m, enum spot_shape shape, const struct field *f)
{
    struct spot *s = NEW(m->a, struct spot);
    s->shape = shape;
    s->field = f;
    s->below = NEW(m->a, struct spots);
    return s;
}

static void add_fields(struct making *m, struct relation *r, const char *prefix,
                       const struct table *t, struct spots *below);
static struct spot *part_spot(struct making *m, const struct field *part, const char *name,
                              bool listed);

/* A set, a structure, a change: rows without rows below them. */
static struct spot *content_spot(struct making *m, const struct field *f, const char *name)
{
    if (f->type == FIELD_STRUCTURE) {
        struct spot *s = new_spot(m, SPOT_STRUCTURE, f);
        s->relation = add_rows_relation(m, name, true, f->help);
        add_column(m, s->relation, "op", false, true, "name, all, any, at-least or absent");
        add_column(m, s->relation, "k", true, false, "Of at-least: how many");
        add_column(m, s->relation, "name", false, false, "Element or scheme");
        return s;
    }
    if (f->type == FIELD_CHANGE) {
        struct spot *s = new_spot(m, SPOT_CHANGE, f);
        s->relation = add_rows_relation(m, name, false, f->help);
        s->relation->columns.at[ROW_KEY].name = "at";
        s->relation->columns.at[ROW_KEY].help = "Path in the register that is changed";
        add_column(m, s->relation, "value", false, true, "What is set there; no: removed");
        return s;
    }
    struct spot *s = new_spot(m, SPOT_SET, f);
    s->relation = add_rows_relation(m, name, true, f->help);
    add_column(m, s->relation, "value", false, true, "Name in the set");
    return s;
}

static bool is_content(const struct field *f)
{
    return f->type == FIELD_STRUCTURE || f->type == FIELD_CHANGE || f->type == FIELD_REFS ||
           f->type == FIELD_NAMES || f->type == FIELD_ORDERED;
}

static struct spot *rows_spot(struct making *m, const struct field *f, const char *name)
{
    struct spot *s = new_spot(m, SPOT_ROWS, f);
    *array_push(m->a, s->below) = part_spot(m, f->part, name, f->type == FIELD_LIST);
    return s;
}

/* The one relation of a map that may contain itself. */
static struct spot *recursive_spot(struct making *m, const struct field *f, bool listed)
{
    struct spot *s = new_spot(m, SPOT_ROW, f);
    for (size_t i = 0; i < m->known.n; i++)
        if (m->known.at[i].table == f->table) {
            s->relation = m->known.at[i].row->relation;
            s->below = m->known.at[i].row->below;
            return s;
        }
    const char *name = joined(m->a, snake(m->a, kinds[m->kind].name), snake(m->a, f->table->name));
    s->relation = add_rows_relation(m, name, listed, f->table->help);
    *array_push(m->a, &m->known) = (struct known){f->table, s};
    add_fields(m, s->relation, "", f->table, s->below);
    return s;
}

/* One member of rows or of a list. */
static struct spot *part_spot(struct making *m, const struct field *part, const char *name,
                              bool listed)
{
    if (part->type == FIELD_STRUCT && contains_itself(part->table))
        return recursive_spot(m, part, listed);
    struct spot *s = new_spot(m, SPOT_ROW, part);
    s->relation = add_rows_relation(m, name, listed,
                                    part->type == FIELD_STRUCT ? part->table->help : part->help);
    const char *inner = arena_printf(m->a, "%s_item", name);
    if (is_scalar(part))
        s->column = add_column(m, s->relation, "value", is_whole(part), false, part->help);
    else if (part->type == FIELD_STRUCT)
        add_fields(m, s->relation, "", part->table, s->below);
    else if (is_content(part))
        s->content = content_spot(m, part, inner);
    else
        *array_push(m->a, s->below) = part_spot(m, part->part, inner, part->type == FIELD_LIST);
    return s;
}

static struct spot *field_spot(struct making *m, struct relation *r, const char *prefix,
                               const struct field *f)
{
    const char *key = arena_printf(m->a, "%s%s", prefix, snake(m->a, f->key));
    if (is_scalar(f)) {
        struct spot *s = new_spot(m, SPOT_COLUMN, f);
        s->column = add_column(m, r, key, is_whole(f), false, f->help);
        return s;
    }
    if (is_content(f))
        return content_spot(m, f, joined(m->a, r->name, key));
    if (f->type != FIELD_STRUCT)
        return rows_spot(m, f, joined(m->a, r->name, key));
    if (contains_itself(f->table))
        return recursive_spot(m, f, false);
    struct spot *s = new_spot(m, SPOT_GROUP, f);
    add_fields(m, r, arena_printf(m->a, "%s_", key), f->table, s->below);
    return s;
}

static void add_fields(struct making *m, struct relation *r, const char *prefix,
                       const struct table *t, struct spots *below)
{
    for (size_t i = 0; i < t->n_fields; i++)
        *array_push(m->a, below) = field_spot(m, r, prefix, &t->fields[i]);
}

struct projection *projection_new(struct arena *a)
{
    struct projection *p = NEW(a, struct projection);
    for (int k = 0; k < KIND_COUNT; k++) {
        struct making m = {.a = a, .p = p, .kind = (enum kind)k};
        struct relation *r =
            add_relation(&m, snake(a, kinds[k].name), KIND_KEYS, kinds[k].table->help);
        add_column(&m, r, "id", false, true, "Id of the object");
        p->of[k] = r;
        p->spots[k] = NEW(a, struct spots);
        add_fields(&m, r, "", kinds[k].table, p->spots[k]);
    }
    return p;
}
