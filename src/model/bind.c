/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Binding of maps: tables, rows, lists, short forms, groups of keys.
 *
 * The same code serves objects (a struct is filled, everything required must be
 * there) and changes (no struct, parts only). Invariant: binding a canonical node
 * again gives an equal canonical node. */
#include "model/binder.h"

#include <string.h>

const char *bind_node_words(const struct node *node)
{
    static const char *const words[] = {"a single value", "a map", "a list"};
    return words[node->type];
}

bool bind_is_removal(const struct binding *b, const struct node *node)
{
    if (!b->change || node->type != NODE_SCALAR || node->quoted)
        return false;
    return node->form == FORM_NO || (node->form == FORM_TEXT && text_equal(node->text, "no"));
}

/* --- short forms --- */

static bool is_structure_key(const char *key)
{
    return text_equal(key, "all") || text_equal(key, "any") || text_equal(key, "at-least") ||
           text_equal(key, "of");
}

/* A map of a distribution's keys that stands for the whole table. */
static bool is_short_quantity(const struct table *t, const struct node *map)
{
    const struct field *f = table_field(t, t->short_key);
    if (f->type != FIELD_QUANTITY || map->n == 0)
        return false;
    for (size_t i = 0; i < map->n; i++)
        if (table_field(t, map->pairs[i].key) || !bind_is_quantity_key(map->pairs[i].key))
            return false;
    return true;
}

static struct node *wrap(struct binding *b, const struct table *t, const struct node *node)
{
    struct node *map = node_map(b->arena, node->place);
    node_add(b->arena, map, t->short_key, node->place, (struct node *)node);
    return map;
}

/* Moves all, any, at-least and of below the short key; NULL when that is there too. */
static const struct node *gather_structure(struct binding *b, const struct table *t,
                                           const struct node *map)
{
    struct node *structure = NULL, *rest = node_map(b->arena, map->place);
    for (size_t i = 0; i < map->n; i++) {
        const struct pair *p = &map->pairs[i];
        if (!is_structure_key(p->key)) {
            node_add(b->arena, rest, p->key, p->place, p->value);
            continue;
        }
        if (!structure)
            structure = node_map(b->arena, p->place);
        node_add(b->arena, structure, p->key, p->place, p->value);
    }
    if (!structure)
        return map;
    const struct node *other = node_get(rest, t->short_key);
    if (other) {
        diag_add(b->diags, structure->place, "\"%s\" and \"%s\" say the same thing twice",
                 t->short_key, structure->pairs[0].key);
        return NULL;
    }
    node_add(b->arena, rest, t->short_key, structure->place, structure);
    return rest;
}

/* The node as a map by the table's short form; NULL with a diagnostic when it is
 * none. */
static const struct node *expand(struct binding *b, const struct table *t, const struct node *node)
{
    if (node->type == NODE_MAP) {
        if (t->structure_keys)
            return gather_structure(b, t, node);
        return t->short_key && is_short_quantity(t, node) ? wrap(b, t, node) : node;
    }
    if (t->short_key && (node->type == NODE_SCALAR || t->structure_keys))
        return wrap(b, t, node);
    diag_add(b->diags, node->place, "expected a map that describes the %s, found %s", t->name,
             bind_node_words(node));
    return NULL;
}

/* --- tables --- */

/* "an element", "a scheme". */
static const char *with_article(struct binding *b, const char *name)
{
    return arena_printf(b->arena, "%s %s", strchr("aeiou", *name) ? "an" : "a", name);
}

static void unknown_key(struct binding *b, const struct table *t, const struct pair *p)
{
    struct nearest near;
    nearest_init(&near, p->key);
    for (size_t i = 0; i < t->n_fields; i++)
        nearest_offer(&near, t->fields[i].key);
    diag_add(b->diags, p->place, "%s has no key \"%s\"%s", with_article(b, t->name), p->key,
             nearest_hint(b->arena, &near));
}

/* The values that stand for "absent" where zero does not. */
static void set_absent(const struct table *t, void *data)
{
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct field *f = &t->fields[i];
        void *member = (char *)data + f->offset;
        switch (f->type) {
        case FIELD_WORD: *(int *)member = -1; break;
        case FIELD_COUNT: *(int64_t *)member = -1; break;
        case FIELD_DATE:
        case FIELD_WHEN: *(day *)member = DAY_NONE; break;
        default: break;
        }
    }
}

static bool check_required(struct binding *b, const struct table *t, const struct node *map)
{
    bool fine = true;
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct field *f = &t->fields[i];
        if (!(f->flags & REQUIRED) || node_get(map, f->key))
            continue;
        diag_add(b->diags, map->place, "this %s lacks \"%s\": %s", t->name, f->key, f->help);
        fine = false;
    }
    return fine;
}

static const char *group_words(struct arena *a, const struct group *g)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < 8 && g->keys[i]; i++) {
        bool last = i + 1 == 8 || !g->keys[i + 1];
        text_printf(&t, "%s\"%s\"", i == 0 ? "" : last ? " or " : ", ", g->keys[i]);
    }
    return text_str(&t);
}

static bool check_group(struct binding *b, const struct table *t, const struct group *g,
                        const struct node *map)
{
    const struct pair *first = NULL;
    for (size_t i = 0; i < map->n; i++) {
        const struct pair *p = &map->pairs[i];
        bool member = false;
        for (size_t k = 0; k < 8 && g->keys[k]; k++)
            member = member || text_equal(g->keys[k], p->key);
        if (!member)
            continue;
        if (first) {
            diag_add(b->diags, p->place, "%s has \"%s\" or \"%s\", not both",
                     with_article(b, t->name), first->key, p->key);
            return false;
        }
        first = p;
    }
    if (first || !g->needed)
        return true;
    diag_add(b->diags, map->place, "this %s needs one of %s", t->name, group_words(b->arena, g));
    return false;
}

static bool check_groups(struct binding *b, const struct table *t, const struct node *map)
{
    bool fine = true;
    for (size_t i = 0; i < t->n_groups; i++)
        fine = check_group(b, t, &t->groups[i], map) && fine;
    return fine;
}

struct node *bind_table(struct binding *b, const struct table *t, const struct node *node,
                        void *data)
{
    const struct node *map = expand(b, t, node);
    if (!map)
        return NULL;
    bool fine = true;
    struct node *canonical = node_map(b->arena, map->place);
    if (data)
        set_absent(t, data);
    for (size_t i = 0; i < map->n; i++) {
        const struct pair *p = &map->pairs[i];
        const struct field *f = table_field(t, p->key);
        if (!f) {
            unknown_key(b, t, p);
            fine = false;
            continue;
        }
        void *member = data ? (char *)data + f->offset : NULL;
        struct node *value = bind_field(b, f, p->value, member);
        fine = fine && value;
        if (value)
            node_add(b->arena, canonical, f->key, p->place, value);
    }
    if (!b->change) {
        fine = check_required(b, t, map) && fine;
        fine = check_groups(b, t, map) && fine;
    }
    node_sort(canonical);
    return fine ? canonical : NULL;
}

bool bind_object(struct binding *b, const struct table *t, const struct node *node,
                 struct node **canonical, void **data)
{
    void *fresh = arena_alloc(b->arena, t->size);
    struct node *c = bind_table(b, t, node, fresh);
    if (!c)
        return false;
    *canonical = c;
    *data = fresh;
    return true;
}

/* --- rows and lists --- */

static bool check_row_key(struct binding *b, const struct field *f, const struct pair *p)
{
    if (f->year_keys) {
        bool year = strlen(p->key) == 4 && strspn(p->key, "0123456789") == 4;
        if (!year)
            diag_add(b->diags, p->place, "expected a year such as 2027, found \"%s\"", p->key);
        return year;
    }
    if (name_is_valid(b->units, p->key))
        return true;
    diag_add(b->diags, p->place, "\"%s\" cannot be a name: %s", p->key,
             name_objection(b->units, p->key));
    return false;
}

/* Binds each value of the map; canonical rows come in byte order of their keys, and
 * so do the members. */
static struct node *bind_rows(struct binding *b, const struct field *f, const struct node *node,
                              struct rows *rows)
{
    if (node->type != NODE_MAP) {
        diag_add(b->diags, node->place, "\"%s\" is a map of names, found %s",
                 f->key ? f->key : "this", bind_node_words(node));
        return NULL;
    }
    struct node *sorted = node_map(b->arena, node->place);
    for (size_t i = 0; i < node->n; i++)
        node_add(b->arena, sorted, node->pairs[i].key, node->pairs[i].place, node->pairs[i].value);
    node_sort(sorted);
    bool fine = true;
    size_t size = field_size(f->part);
    char *members = rows ? arena_array(b->arena, sorted->n, size) : NULL;
    const char **keys = NEW_ARRAY(b->arena, sorted->n, const char *);
    for (size_t i = 0; i < sorted->n; i++) {
        struct pair *p = &sorted->pairs[i];
        fine = check_row_key(b, f, p) && fine;
        p->value = bind_field(b, f->part, p->value, members ? members + i * size : NULL);
        fine = fine && p->value;
        keys[i] = p->key;
    }
    if (rows)
        *rows = (struct rows){sorted->n, keys, members};
    return fine ? sorted : NULL;
}

static struct node *bind_list(struct binding *b, const struct field *f, const struct node *node,
                              struct list *list)
{
    if (node->type == NODE_MAP && f->part->type == FIELD_STRUCT) {
        struct node *one = node_list(b->arena, node->place);
        node_push(b->arena, one, (struct node *)node);
        node = one;
    }
    if (node->type != NODE_LIST) {
        diag_add(b->diags, node->place, "expected a list in square brackets, found %s",
                 bind_node_words(node));
        return NULL;
    }
    bool fine = true;
    size_t size = field_size(f->part);
    char *members = list ? arena_array(b->arena, node->n, size) : NULL;
    struct node *canonical = node_list(b->arena, node->place);
    for (size_t i = 0; i < node->n; i++) {
        struct node *item =
            bind_field(b, f->part, node->items[i], members ? members + i * size : NULL);
        fine = fine && item;
        if (item)
            node_push(b->arena, canonical, item);
    }
    if (list)
        *list = (struct list){node->n, members};
    return fine ? canonical : NULL;
}

static struct node *bind_struct(struct binding *b, const struct table *t, const struct node *node,
                                void **member)
{
    void *data = member ? arena_alloc(b->arena, t->size) : NULL;
    struct node *canonical = bind_table(b, t, node, data);
    if (canonical && member)
        *member = data;
    return canonical;
}

struct node *bind_field(struct binding *b, const struct field *f, const struct node *node,
                        void *member)
{
    if (f->type != FIELD_YES && bind_is_removal(b, node))
        return node_scalar(b->arena, FORM_NO, "no", node->place);
    switch (f->type) {
    case FIELD_STRUCT: return bind_struct(b, f->table, node, member);
    case FIELD_ROWS: return bind_rows(b, f, node, member);
    case FIELD_LIST: return bind_list(b, f, node, member);
    case FIELD_QUANTITY: return bind_quantity(b, f, node, member);
    case FIELD_STRUCTURE: return bind_structure(b, node, member);
    case FIELD_REFS:
    case FIELD_NAMES:
    case FIELD_ORDERED: return bind_set(b, f, node, member);
    case FIELD_CHANGE: {
        struct node *change = bind_change(b, node);
        if (change && member)
            *(const struct node **)member = change;
        return change;
    }
    default: return bind_scalar(b, f, node, member);
    }
}
