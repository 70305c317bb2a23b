/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The one traversal of canonical nodes along field tables, and the references that
 * it finds. Owns nothing; the path of a visit lives in one growing buffer that is cut
 * back on the way up. */
#include "model/walk.h"

struct walking {
    const struct walker *walker;
    struct text path;
};

static void walk_field(struct walking *w, struct visit v);

const struct field *table_field(const struct table *t, const char *key)
{
    for (size_t i = 0; i < t->n_fields; i++)
        if (text_equal(t->fields[i].key, key))
            return &t->fields[i];
    return NULL;
}

size_t field_size(const struct field *f)
{
    switch (f->type) {
    case FIELD_WORD: return sizeof(int);
    case FIELD_YES: return sizeof(bool);
    case FIELD_COUNT: return sizeof(int64_t);
    case FIELD_DATE:
    case FIELD_WHEN: return sizeof(day);
    case FIELD_REFS:
    case FIELD_NAMES:
    case FIELD_ORDERED: return sizeof(struct names);
    case FIELD_ROWS: return sizeof(struct rows);
    case FIELD_LIST: return sizeof(struct list);
    default: return sizeof(void *);
    }
}

/* Appends "/key" and returns the length to cut back to. */
static size_t path_push(struct walking *w, const char *key)
{
    size_t before = w->path.n;
    if (before)
        text_byte(&w->path, '/');
    text_add(&w->path, key);
    return before;
}

static void path_pop(struct walking *w, size_t to)
{
    w->path.n = to;
    w->path.at[to] = 0;
}

static void walk_map(struct walking *w, const struct table *t, const struct node *map,
                     const void *data)
{
    for (size_t i = 0; i < map->n; i++) {
        const struct pair *p = &map->pairs[i];
        const struct field *f = table_field(t, p->key);
        if (!f)
            continue;
        size_t cut = path_push(w, p->key);
        const void *member = data ? (const char *)data + f->offset : NULL;
        walk_field(w,
                   (struct visit){.field = f, .node = p->value, .member = member, .key = p->key});
        path_pop(w, cut);
    }
}

/* Index of a key in bound rows, which are in the order of the canonical map. */
static const void *row_member(const struct rows *rows, size_t i, const struct field *part)
{
    return rows ? (const char *)rows->at + i * field_size(part) : NULL;
}

static void walk_rows(struct walking *w, const struct visit *v)
{
    for (size_t i = 0; i < v->node->n; i++) {
        const struct pair *p = &v->node->pairs[i];
        size_t cut = path_push(w, p->key);
        walk_field(w, (struct visit){.field = v->field->part,
                                     .node = p->value,
                                     .member = row_member(v->member, i, v->field->part),
                                     .in = v->field,
                                     .key = p->key,
                                     .index = i});
        path_pop(w, cut);
    }
}

static void walk_list(struct walking *w, const struct visit *v)
{
    const struct list *list = v->member;
    for (size_t i = 0; i < v->node->n; i++) {
        char index[24];
        text_double(index, (double)i);
        size_t cut = path_push(w, index);
        const void *member = list ? (const char *)list->at + i * field_size(v->field->part) : NULL;
        walk_field(w, (struct visit){.field = v->field->part,
                                     .node = v->node->items[i],
                                     .member = member,
                                     .in = v->field,
                                     .index = i});
        path_pop(w, cut);
    }
}

static void walk_field(struct walking *w, struct visit v)
{
    v.path = text_str(&w->path);
    if (w->walker->enter(w->walker->ctx, &v) == WALK_PAST)
        return;
    if (v.field->type == FIELD_STRUCT && v.node->type == NODE_MAP)
        walk_map(w, v.field->table, v.node, v.member ? *(void *const *)v.member : NULL);
    else if (v.field->type == FIELD_ROWS && v.node->type == NODE_MAP)
        walk_rows(w, &v);
    else if (v.field->type == FIELD_LIST && v.node->type == NODE_LIST)
        walk_list(w, &v);
    if (w->walker->leave) {
        v.path = text_str(&w->path);
        w->walker->leave(w->walker->ctx, &v);
    }
}

void walk_table(struct arena *a, const struct table *t, const struct node *node, const void *data,
                const struct walker *walker)
{
    struct walking w = {.walker = walker};
    text_init(&w.path, a);
    walk_map(&w, t, node, data);
}

/* --- references --- */

struct collecting {
    struct arena *arena;
    struct references *out;
    const struct visit *visit; /* the one being looked at */
    const char *path;
    unsigned later; /* fields around this one that are not evaluated */
    bool frequency; /* in frequency(...) */
    bool unwanted;  /* in unwanted(...) */
};

static void add_reference(struct collecting *c, const char *id, unsigned allowed, struct place at)
{
    if (!c->path)
        c->path = arena_str(c->arena, c->visit->path);
    at.path = at.line ? at.path : c->path;
    *array_push(c->arena, c->out) = (struct reference){
        .id = id,
        .kinds = allowed,
        .trace = (c->visit->field->flags & TRACE) != 0,
        .later = c->later > 0,
        .frequency = c->frequency || (c->visit->field->flags & FREQUENCY_ONLY) != 0,
        .unwanted = c->unwanted,
        .place = at,
        .path = c->path};
}

static void references_of_expr(void *ctx, const struct expr *e)
{
    struct collecting *c = ctx;
    struct place at = place_inside(c->visit->node->place, e->column);
    if (c->visit->node->type != NODE_SCALAR || c->visit->node->quoted)
        at = c->visit->node->place;
    switch (e->op) {
    case EXPR_NAME:
        add_reference(c, e->name, KIND_BIT(KIND_VALUE) | KIND_BIT(KIND_RATE), at);
        break;
    case EXPR_UNWANTED:
        c->unwanted = true;
        add_reference(c, e->name, KIND_BIT(KIND_SCHEME), at);
        c->unwanted = false;
        break;
    case EXPR_FAILS: add_reference(c, e->name, KIND_BIT(KIND_ELEMENT), at); break;
    case EXPR_SHARE: add_reference(c, e->name, KIND_BIT(KIND_RATE), at); break;
    case EXPR_FREQUENCY:
        c->frequency = true;
        add_reference(c, e->name, KIND_BIT(KIND_HAZARD), at);
        c->frequency = false;
        break;
    default: break;
    }
}

static void references_of_structure(struct collecting *c, const struct structure *s,
                                    const struct node *node)
{
    if (s->op == STRUCTURE_NAME)
        add_reference(c, s->name, c->visit->field->kinds, node->place);
    size_t skip = node->type == NODE_LIST ? node->n - s->n : 0;
    for (size_t i = 0; i < s->n; i++)
        references_of_structure(c, s->of[i], node->items[skip + i]);
}

static void references_of_set(struct collecting *c, const struct node *list)
{
    for (size_t i = 0; i < list->n; i++)
        add_reference(c, list->items[i]->text, c->visit->field->kinds, list->items[i]->place);
}

static void references_of_keys(struct collecting *c, const struct node *map)
{
    for (size_t i = 0; i < map->n; i++)
        add_reference(c, map->pairs[i].key, c->visit->field->kinds, map->pairs[i].place);
}

static enum walk collect(void *ctx, const struct visit *v)
{
    struct collecting *c = ctx;
    c->visit = v;
    c->path = NULL;
    c->later += (v->field->flags & LATER) != 0;
    switch (v->field->type) {
    case FIELD_REF: add_reference(c, v->node->text, v->field->kinds, v->node->place); break;
    case FIELD_REFS: references_of_set(c, v->node); break;
    case FIELD_STRUCTURE:
        references_of_structure(c, *(struct structure *const *)v->member, v->node);
        break;
    case FIELD_QUANTITY: {
        const struct quantity *q = *(struct quantity *const *)v->member;
        if (q->shape == SHAPE_EXPRESSION && q->expr)
            expr_walk(q->expr, references_of_expr, c);
        break;
    }
    case FIELD_ROWS:
        if (v->field->kinds)
            references_of_keys(c, v->node);
        break;
    default: break;
    }
    return WALK_INTO;
}

static void collected(void *ctx, const struct visit *v)
{
    struct collecting *c = ctx;
    c->later -= (v->field->flags & LATER) != 0;
}

void walk_references(struct arena *a, const struct table *t, const struct node *node,
                     const void *data, struct references *out)
{
    struct collecting c = {.arena = a, .out = out};
    struct walker w = {.ctx = &c, .enter = collect, .leave = collected};
    walk_table(a, t, node, data, &w);
}
