/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The merge of the variant tests. Texts are joined, never parsed. */
#include "figure_merge.h"

#include <string.h>

#include "base/text.h"

static bool is_scalar(const struct node *n)
{
    return n && n->type == NODE_SCALAR;
}

/* Yes-or-no fields: there `no` is a value. */
static bool is_yes_or_no(const char *key)
{
    static const char *const keys[] = {"verified", "settings", "renewed", "out-while-repaired"};
    for (size_t i = 0; i < sizeof keys / sizeof *keys; i++)
        if (text_equal(keys[i], key))
            return true;
    return false;
}

static bool is_word_byte(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') || c == '-';
}

/* Where the word `was` stands by itself, or NULL. */
static const char *find_was(const char *text)
{
    for (const char *p = text; (p = strstr(p, "was")) != NULL; p += 3)
        if ((p == text || !is_word_byte(p[-1])) && !is_word_byte(p[3]))
            return p;
    return NULL;
}

static struct node *scalar(struct arena *a, const char *text)
{
    return node_scalar(a, FORM_TEXT, text, (struct place){.file = "merge", .line = 1});
}

static struct node *in_place_of_was(struct arena *a, const char *text, const char *before)
{
    const char *was = find_was(text);
    return scalar(a, arena_printf(a, "%.*s(%s)%s", (int)(was - text), text, before, was + 3));
}

/* A factor in front of a distribution: `times`, and times what was there already. */
static struct node *scaled(struct arena *a, const struct node *before, const char *text)
{
    struct node *map = node_map(a, before->place);
    const struct node *times = NULL;
    for (size_t i = 0; before->type == NODE_MAP && i < before->n; i++) {
        if (text_equal(before->pairs[i].key, "times"))
            times = before->pairs[i].value;
        else
            node_add(a, map, before->pairs[i].key, before->place, before->pairs[i].value);
    }
    if (before->type == NODE_SCALAR)
        node_add(a, map, "range", before->place, node_copy(a, before));
    node_add(a, map, "times", before->place, in_place_of_was(a, text, times ? times->text : "1"));
    return map;
}

static struct node *set_change(struct arena *a, const struct node *before, const struct node *map)
{
    struct node *list = node_list(a, map->place);
    for (size_t i = 0; before && i < before->n; i++) {
        const struct node *change = node_get(map, before->items[i]->text);
        if (!change || !text_equal(change->text, "no"))
            node_push(a, list, before->items[i]);
    }
    for (size_t i = 0; i < map->n; i++) {
        bool there = false;
        for (size_t k = 0; before && k < before->n; k++)
            there = there || text_equal(before->items[k]->text, map->pairs[i].key);
        if (!there && text_equal(map->pairs[i].value->text, "yes"))
            node_push(a, list, scalar(a, map->pairs[i].key));
    }
    return list;
}

static struct node *merged(struct arena *a, const struct node *before, const struct node *change)
{
    if (is_scalar(change) && find_was(change->text) && before) {
        bool plain = is_scalar(before) && !strstr(before->text, "within");
        return plain ? in_place_of_was(a, change->text, before->text)
                     : scaled(a, before, change->text);
    }
    if (change->type != NODE_MAP)
        return node_copy(a, change);
    if (before && before->type == NODE_LIST)
        return set_change(a, before, change);
    struct node *map = node_map(a, change->place);
    for (size_t i = 0; before && before->type == NODE_MAP && i < before->n; i++)
        if (!node_get(change, before->pairs[i].key))
            node_add(a, map, before->pairs[i].key, before->place, before->pairs[i].value);
    for (size_t i = 0; i < change->n; i++) {
        const struct pair *p = &change->pairs[i];
        bool removal = is_scalar(p->value) && p->value->form == FORM_NO && !is_yes_or_no(p->key);
        bool inside = before && before->type == NODE_MAP;
        const struct node *old = inside ? node_get(before, p->key) : NULL;
        if (!removal)
            node_add(a, map, p->key, p->place, merged(a, old, p->value));
    }
    return map;
}

/* --- the register --- */

static struct model_source *find(struct model_sources *all, const char *id)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i].id, id))
            return &all->at[i];
    return NULL;
}

static void change_object(struct arena *a, struct model_sources *all, enum kind kind,
                          const struct pair *p)
{
    struct model_source *known = find(all, p->key);
    if (is_scalar(p->value)) {
        *known = all->at[--all->n];
    } else if (known) {
        known->node = merged(a, known->node, p->value);
    } else {
        struct node *node = merged(a, NULL, p->value);
        *array_push(a, all) = (struct model_source){kind, p->key, node};
    }
}

static const struct node *change_of(const struct model *base, const char *option)
{
    return ((const struct option *)model_get(base, KIND_OPTION, option))->change;
}

/* What the one option says of holding together with the other, or NULL. */
static const struct node *settled_by(const struct model *base, const char *option,
                                     const char *other)
{
    const struct node *combine = node_get(model_find(base, option)->node, "combine");
    return combine ? node_get(combine, other) : NULL;
}

static void change_objects(struct arena *a, struct model_sources *out, const struct node *change)
{
    for (size_t s = 0; change && s < change->n; s++)
        for (size_t k = 0; k < change->pairs[s].value->n; k++)
            change_object(a, out, kind_of_section(change->pairs[s].key),
                          &change->pairs[s].value->pairs[k]);
}

/* Without the options that renew it, which are not there. */
static struct node *plain_state(struct arena *a, const struct node *state)
{
    struct node *out = node_map(a, state->place);
    for (size_t i = 0; i < state->n; i++)
        if (!text_equal(state->pairs[i].key, "renewed-by"))
            node_add(a, out, state->pairs[i].key, state->pairs[i].place, state->pairs[i].value);
    return out;
}

void merge_options(struct arena *a, const struct model *base, size_t n, const char *const *options,
                   struct model_sources *out)
{
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < base->of[k].n; i++) {
            const struct object *o = base->of[k].at[i];
            if (k == KIND_STATE)
                *array_push(a, out) =
                    (struct model_source){o->kind, o->id, plain_state(a, o->node)};
            else if (k != KIND_OPTION && k != KIND_DECISION && k != KIND_PLAN)
                *array_push(a, out) = (struct model_source){o->kind, o->id, o->node};
        }
    for (size_t i = 0; i < n; i++)
        change_objects(a, out, change_of(base, options[i]));
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            change_objects(a, out, settled_by(base, options[i], options[j]));
}

static bool names(const struct node *change, const char *id)
{
    for (size_t s = 0; change && s < change->n; s++)
        if (node_get(change->pairs[s].value, id))
            return true;
    return false;
}

bool merge_touches(const struct model *base, size_t n, const char *const *options, size_t option,
                   const char *id)
{
    bool touches = names(change_of(base, options[option]), id);
    for (size_t i = 0; i < n; i++)
        touches = touches || names(settled_by(base, options[option], options[i]), id) ||
                  names(settled_by(base, options[i], options[option]), id);
    return touches;
}
