/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Binding of scheme structures.
 *
 * Written as maps ({all: [A, {any: [B, C]}]}); canonical as lists, so that a change
 * replaces a structure whole: ["all","A",["any","B","C"]], ["at-least","2","A","B"]. */
#include "model/binder.h"

#include <stdlib.h>
#include <string.h>

static struct node *bind_part(struct binding *b, const struct node *node, unsigned depth,
                              struct structure **out);

static struct node *word(struct binding *b, const char *text, struct place at)
{
    return node_scalar(b->arena, FORM_TEXT, text, at);
}

static struct node *bind_leaf(struct binding *b, const struct node *node, unsigned depth,
                              struct structure *s)
{
    if (text_equal(node->text, "absent")) {
        if (depth > 0) {
            diag_add(b->diags, node->place,
                     "\"absent\" stands alone: it is a scheme that never operates");
            return NULL;
        }
        s->op = STRUCTURE_ABSENT;
        return word(b, "absent", node->place);
    }
    if (!name_is_valid(b->units, node->text)) {
        diag_add(b->diags, node->place, "expected the name of an element or a scheme, found \"%s\"",
                 node->text);
        return NULL;
    }
    s->op = STRUCTURE_NAME;
    s->name = node->text;
    return word(b, node->text, node->place);
}

/* The k of `at-least`, 1 .. n; 0 with a diagnostic. */
static uint32_t read_k(struct binding *b, const struct node *node, size_t n)
{
    bool digits = node->type == NODE_SCALAR && *node->text && strlen(node->text) <= 6 &&
                  strspn(node->text, "0123456789") == strlen(node->text);
    long k = digits ? strtol(node->text, NULL, 10) : 0;
    if (k >= 1 && (size_t)k <= n)
        return (uint32_t)k;
    diag_add(b->diags, node->place,
             "\"at-least\" is a whole number from 1 to %zu, the length of \"of\"", n);
    return 0;
}

/* Binds items[from ...] as the parts of s and appends them to the canonical list. */
static bool bind_parts(struct binding *b, const struct node *list, size_t from, unsigned depth,
                       struct structure *s, struct node *canonical)
{
    bool fine = true;
    s->n = list->n - from;
    s->of = NEW_ARRAY(b->arena, s->n, struct structure *);
    for (size_t i = 0; i < s->n; i++) {
        struct node *part = bind_part(b, list->items[from + i], depth + 1, &s->of[i]);
        fine = fine && part;
        if (part)
            node_push(b->arena, canonical, part);
    }
    return fine;
}

/* op with its parts in list[from ...]; k_node for at-least. */
static struct node *bind_op(struct binding *b, const char *op, struct place at,
                            const struct node *k_node, const struct node *list, size_t from,
                            unsigned depth, struct structure *s)
{
    if (list->type != NODE_LIST || list->n == from) {
        diag_add(b->diags, list->place, "\"%s\" is followed by a list of elements and schemes", op);
        return NULL;
    }
    struct node *canonical = node_list(b->arena, at);
    node_push(b->arena, canonical, word(b, op, at));
    s->op = STRUCTURE_AT_LEAST;
    if (k_node) {
        s->k = read_k(b, k_node, list->n - from);
        if (s->k == 0)
            return NULL;
        node_push(b->arena, canonical, word(b, arena_printf(b->arena, "%u", s->k), k_node->place));
    }
    if (!bind_parts(b, list, from, depth, s, canonical))
        return NULL;
    if (!k_node)
        s->k = text_equal(op, "all") ? (uint32_t)s->n : 1;
    return canonical;
}

static struct node *bind_map_form(struct binding *b, const struct node *map, unsigned depth,
                                  struct structure *s)
{
    const struct node *k = node_get(map, "at-least"), *of = node_get(map, "of");
    if (map->n == 2 && k && of)
        return bind_op(b, "at-least", map->place, k, of, 0, depth, s);
    if (map->n == 1) {
        const struct pair *p = &map->pairs[0];
        if (text_equal(p->key, "all") || text_equal(p->key, "any"))
            return bind_op(b, p->key, map->place, NULL, p->value, 0, depth, s);
    }
    diag_add(b->diags, map->place,
             "a structure is {all: [...]}, {any: [...]} or {at-least: 2, of: [...]}");
    return NULL;
}

static struct node *bind_list_form(struct binding *b, const struct node *list, unsigned depth,
                                   struct structure *s)
{
    const char *op = list->n > 0 && list->items[0]->type == NODE_SCALAR ? list->items[0]->text : "";
    if (text_equal(op, "all") || text_equal(op, "any"))
        return bind_op(b, op, list->place, NULL, list, 1, depth, s);
    if (text_equal(op, "at-least") && list->n > 2)
        return bind_op(b, op, list->place, list->items[1], list, 2, depth, s);
    diag_add(b->diags, list->place,
             "a structure is {all: [...]}, {any: [...]} or {at-least: 2, of: [...]}");
    return NULL;
}

static struct node *bind_part(struct binding *b, const struct node *node, unsigned depth,
                              struct structure **out)
{
    struct structure *s = NEW(b->arena, struct structure);
    if (depth > STRUCTURE_DEPTH) {
        diag_add(b->diags, node->place, "structures may nest %d deep; give the inner ones names",
                 STRUCTURE_DEPTH);
        return NULL;
    }
    struct node *canonical = node->type == NODE_SCALAR ? bind_leaf(b, node, depth, s)
                             : node->type == NODE_MAP  ? bind_map_form(b, node, depth, s)
                                                       : bind_list_form(b, node, depth, s);
    if (canonical)
        *out = s;
    return canonical;
}

struct node *bind_structure(struct binding *b, const struct node *node, void *member)
{
    struct structure *s = NULL;
    struct node *canonical = bind_part(b, node, 0, &s);
    if (canonical && member)
        *(struct structure **)member = s;
    return canonical;
}
