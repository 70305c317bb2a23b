/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Fields by their paths: found in the field tables, read in the bound objects. Owns nothing.
 * Invariant: what is found in the tables can be read of every object of the kind. */
#include <math.h>
#include <string.h>

#include "work/filter.h"

/* --- types --- */

bool filter_is_number(const struct filter_field *f)
{
    return f->type == FIELD_COUNT || f->type == FIELD_DATE || f->type == FIELD_WHEN ||
           f->type == FIELD_QUANTITY;
}

bool filter_is_set(const struct filter_field *f)
{
    return f->type == FIELD_REFS || f->type == FIELD_NAMES || f->type == FIELD_ORDERED;
}

bool filter_has_parts(const struct filter_field *f)
{
    return f->type == FIELD_STRUCT || f->type == FIELD_ROWS || f->type == FIELD_LIST ||
           f->type == FIELD_STRUCTURE || f->type == FIELD_CHANGE;
}

const char *filter_type_words(const struct filter_field *f)
{
    switch (f->type) {
    case FIELD_WORD: return "a word";
    case FIELD_YES: return "yes or no";
    case FIELD_COUNT: return "a whole number";
    case FIELD_DATE:
    case FIELD_WHEN: return "a date";
    case FIELD_QUANTITY: return "a quantity";
    case FIELD_REF: return "the id of an object";
    case FIELD_REFS:
    case FIELD_NAMES:
    case FIELD_ORDERED: return "a set of names";
    case FIELD_STRUCT:
    case FIELD_ROWS:
    case FIELD_LIST:
    case FIELD_STRUCTURE:
    case FIELD_CHANGE: return "no single value";
    default: return "a text";
    }
}

/* --- finding --- */

struct finding {
    struct job *j;
    enum kind kind;
    const struct filter_column *columns;
    size_t n_columns;
    struct filter_field *out;
};

static void offer_table(struct finding *f, struct nearest *near, const char *before,
                        const struct table *t)
{
    for (size_t i = 0; i < t->n_fields; i++)
        nearest_offer(near, arena_printf(f->j->arena, "%s%s", before, t->fields[i].key));
}

/* before: the path down to the table in which the next key was sought. */
static ohmen_status unknown_field(struct finding *f, const char *before, const struct table *t,
                                  ohmen_error *e)
{
    struct nearest near;
    const char *name = kinds[f->kind].table->name;
    nearest_init(&near, f->out->path);
    if (!*before) {
        nearest_offer(&near, "id");
        nearest_offer(&near, "name");
        for (size_t i = 0; i < f->n_columns; i++)
            nearest_offer(&near, f->columns[i].key);
    }
    if (t)
        offer_table(f, &near, before, t);
    return error_set(e, OHMEN_UNKNOWN, "%s %s has no field \"%s\"%s",
                     strchr("aeiou", *name) ? "an" : "a", name, f->out->path,
                     nearest_hint(f->j->arena, &near));
}

static void take_leaf(struct filter_field *out, const struct field *leaf)
{
    out->origin = FILTER_FIELD;
    out->leaf = leaf;
    out->type = leaf->type;
    out->dim = leaf->dim;
}

/* A part with a short form is what the short form says. */
static void take_short(struct finding *f, const struct field *leaf)
{
    f->out->n_asked = f->out->steps.n;
    if (leaf->type == FIELD_STRUCT && leaf->table->short_key) {
        *array_push(f->j->arena, &f->out->steps) = leaf->table->short_key;
        leaf = table_field(leaf->table, leaf->table->short_key);
    }
    take_leaf(f->out, leaf);
}

/* Follows the path from the table of the kind; any key is one of rows. */
static ohmen_status find_path(struct finding *f, ohmen_error *e)
{
    struct arena *a = f->j->arena;
    const struct table *t = kinds[f->kind].table;
    const struct field *at = NULL;
    const char *rest = f->out->path;
    do {
        size_t n = strcspn(rest, "/");
        const char *key = arena_strn(a, rest, n);
        const char *before = arena_strn(a, f->out->path, (size_t)(rest - f->out->path));
        at = t ? table_field(t, key) : at && at->type == FIELD_ROWS && *key ? at->part : NULL;
        if (!at)
            return unknown_field(f, before, t, e);
        *array_push(a, &f->out->steps) = key;
        t = at->type == FIELD_STRUCT ? at->table : NULL;
        rest += n;
    } while (*rest++ == '/');
    take_short(f, at);
    return OHMEN_OK;
}

ohmen_status filter_find(struct job *j, enum kind kind, const struct filter_column *columns,
                         size_t n_columns, const char *path, struct filter_field *out,
                         ohmen_error *e)
{
    struct finding f = {j, kind, columns, n_columns, out};
    *out = (struct filter_field){.path = path, .type = FIELD_TEXT};
    for (size_t i = 0; i < n_columns; i++)
        if (text_equal(columns[i].key, path)) {
            out->origin = FILTER_COMPUTED;
            out->type = columns[i].type;
            out->dim = columns[i].dim;
            out->column = i;
            return OHMEN_OK;
        }
    if (text_equal(path, "id") || text_equal(path, "name")) {
        out->origin = *path == 'i' ? FILTER_ID : FILTER_NAME;
        return OHMEN_OK;
    }
    return find_path(&f, e);
}

/* --- reading --- */

/* A member of a bound struct with its node; node NULL: not given. */
struct spot {
    const struct node *node;
    const void *member;
};

static struct spot row_spot(const struct field *rows_field, struct spot at, const char *key)
{
    const struct rows *rows = at.member;
    for (size_t i = 0; i < rows->n; i++)
        if (text_equal(rows->keys[i], key))
            return (struct spot){node_get(at.node, key),
                                 (const char *)rows->at + i * field_size(rows_field->part)};
    return (struct spot){0};
}

static struct spot field_spot(const struct field *f, const struct node *map, const void *data)
{
    return (struct spot){map->type == NODE_MAP ? node_get(map, f->key) : NULL,
                         (const char *)data + f->offset};
}

static struct spot find_spot(const struct filter_field *f, const struct object *o, size_t n)
{
    const struct table *t = kinds[o->kind].table;
    const struct field *at = NULL;
    struct spot s = {o->node, o->data};
    const void *data = o->data;
    for (size_t i = 0; i < n && s.node; i++) {
        const char *key = f->steps.at[i];
        const struct field *next = t ? table_field(t, key) : at->part;
        s = t ? field_spot(next, s.node, data) : row_spot(at, s, key);
        at = next;
        t = at->type == FIELD_STRUCT ? at->table : NULL;
        data = t && s.node ? *(void *const *)s.member : NULL;
    }
    return s;
}

static void quantity_value(const struct quantity *q, struct filter_value *v)
{
    if (q->shape == SHAPE_EXPRESSION && (!q->expr || !quantity_is_constant(q)))
        return;
    v->value = q->shape == SHAPE_EXPRESSION ? expr_constant(q->expr) : quantity_mean(q);
    v->dim = q->dim;
    v->number = isfinite(v->value);
}

static const char *names_text(struct arena *a, const struct names *names)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < names->n; i++)
        text_printf(&t, "%s%s", i ? ", " : "", names->at[i]);
    return text_str(&t);
}

static struct filter_value read_field(struct job *j, const struct filter_field *f,
                                      const struct object *o)
{
    struct filter_value v = {0};
    struct spot s = find_spot(f, o, f->steps.n);
    if (!s.node)
        return v;
    v.given = true;
    v.text = s.node->type == NODE_SCALAR ? s.node->text : node_says(j->arena, s.node, SIZE_MAX);
    if (filter_is_set(f)) {
        v.set = s.member;
        v.text = names_text(j->arena, v.set);
    } else if (f->type == FIELD_QUANTITY) {
        quantity_value(*(struct quantity *const *)s.member, &v);
    } else if (filter_is_number(f)) {
        v.number = true;
        v.value = f->type == FIELD_COUNT ? (double)*(const int64_t *)s.member
                                         : (double)*(const day *)s.member;
    }
    return v;
}

struct filter_value filter_value_of(struct job *j, const struct filter_field *f,
                                    const struct filter_item *item)
{
    const char *name;
    switch (f->origin) {
    case FILTER_COMPUTED: return item->computed[f->column];
    case FILTER_ID: return (struct filter_value){.given = true, .text = item->object->id};
    case FILTER_NAME:
        name = object_name(item->object);
        return (struct filter_value){.given = *name != 0, .text = name};
    case FILTER_FIELD: break;
    }
    return read_field(j, f, item->object);
}

bool filter_is_given(struct job *j, const struct filter_field *f, const struct filter_item *item)
{
    if (f->origin == FILTER_FIELD)
        return find_spot(f, item->object, f->n_asked).node != NULL;
    return filter_value_of(j, f, item).given;
}
