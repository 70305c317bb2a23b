/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The way back: canonical nodes as people write them. Short forms where they say the
 * same, structures as maps; everything else as it is. */
#include "model/binder.h"

static struct node *document_field(struct arena *a, const struct field *f, const struct node *node);

static struct node *structure_map(struct arena *a, const struct node *node)
{
    if (node->type != NODE_LIST)
        return (struct node *)node;
    const char *op = node->items[0]->text;
    bool at_least = text_equal(op, "at-least");
    struct node *map = node_map(a, node->place), *parts = node_list(a, node->place);
    for (size_t i = at_least ? 2 : 1; i < node->n; i++)
        node_push(a, parts, structure_map(a, node->items[i]));
    if (at_least)
        node_add(a, map, op, node->place, node->items[1]);
    node_add(a, map, at_least ? "of" : op, node->place, parts);
    return map;
}

/* Is this one key all there is, and does its value stand for the whole? A list does not
 * (only tables of structures take one), nor does a map that has keys of the table. */
static bool may_shorten(const struct table *t, const struct node *map)
{
    if (!t->short_key || map->n != 1 || !text_equal(map->pairs[0].key, t->short_key))
        return false;
    const struct node *value = map->pairs[0].value;
    if (value->type == NODE_SCALAR)
        return value->form != FORM_NO;
    if (value->type != NODE_MAP || t->structure_keys)
        return value->type == NODE_MAP;
    for (size_t i = 0; i < value->n; i++)
        if (table_field(t, value->pairs[i].key) || !bind_is_quantity_key(value->pairs[i].key))
            return false;
    return true;
}

static struct node *document_map(struct arena *a, const struct table *t, const struct node *map)
{
    struct node *out = node_map(a, map->place);
    for (size_t i = 0; i < map->n; i++) {
        const struct pair *p = &map->pairs[i];
        const struct field *f = table_field(t, p->key);
        node_add(a, out, p->key, p->place, document_field(a, f, p->value));
    }
    return may_shorten(t, out) ? out->pairs[0].value : out;
}

static struct node *document_rows(struct arena *a, const struct field *part,
                                  const struct node *node)
{
    struct node *out =
        node->type == NODE_MAP ? node_map(a, node->place) : node_list(a, node->place);
    for (size_t i = 0; i < node->n; i++) {
        if (node->type == NODE_MAP)
            node_add(a, out, node->pairs[i].key, node->pairs[i].place,
                     document_field(a, part, node->pairs[i].value));
        else
            node_push(a, out, document_field(a, part, node->items[i]));
    }
    return out;
}

static struct node *document_change(struct arena *a, const struct node *change)
{
    struct node *out = node_map(a, change->place);
    for (size_t s = 0; s < change->n; s++) {
        const struct pair *section = &change->pairs[s];
        const struct table *t = kinds[kind_of_section(section->key)].table;
        struct node *objects = node_map(a, section->place);
        for (size_t i = 0; i < section->value->n; i++) {
            const struct pair *p = &section->value->pairs[i];
            struct node *value =
                p->value->type == NODE_MAP ? document_map(a, t, p->value) : p->value;
            node_add(a, objects, p->key, p->place, value);
        }
        node_add(a, out, section->key, section->place, objects);
    }
    return out;
}

static struct node *document_field(struct arena *a, const struct field *f, const struct node *node)
{
    if (node->type == NODE_SCALAR)
        return (struct node *)node;
    switch (f->type) {
    case FIELD_STRUCT: return document_map(a, f->table, node);
    case FIELD_ROWS:
    case FIELD_LIST: return document_rows(a, f->part, node);
    case FIELD_STRUCTURE: return structure_map(a, node);
    case FIELD_CHANGE: return document_change(a, node);
    default: return (struct node *)node;
    }
}

struct node *bind_document(struct arena *a, const struct table *t, const struct node *canonical)
{
    return document_map(a, t, canonical);
}
