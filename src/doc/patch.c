/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Merge patches after RFC 7396 section 2 (MergePatch), with `no` for null, `was`
 * and sets of names; and patches that contradict each other.
 *
 * Owns nothing: results share subtrees with target and patch. Invariant: maps
 * that are made here have their keys in byte order. Two maps are merged by
 * walking both in order, so that nothing is looked up. */
#include "doc/patch.h"

#include "base/text.h"

struct merge {
    struct arena *a;
    const struct patch_rules *rules;
    bool failed; /* a combination could not be made */
};

static const char *join(struct arena *a, const char *path, const char *key)
{
    return arena_printf(a, "%s%s%s", path, *path ? "/" : "", key);
}

/* The map itself when its keys are in order, else a sorted copy of it. */
static const struct node *in_order(struct arena *a, const struct node *map)
{
    if (map->sorted)
        return map;
    struct node *copy = arena_copy(a, map, sizeof *map);
    copy->pairs = arena_copy(a, map->pairs, map->n * sizeof *map->pairs);
    copy->cap = map->n;
    node_sort(copy);
    return copy;
}

/* Two maps in step: the next key in byte order and its pair in each, or NULL. */
struct step {
    const struct node *p, *q;
    size_t i, j;
    const struct pair *of_p, *of_q;
};

static bool next_step(struct step *s)
{
    s->of_p = s->i < s->p->n ? &s->p->pairs[s->i] : NULL;
    s->of_q = s->j < s->q->n ? &s->q->pairs[s->j] : NULL;
    if (!s->of_p && !s->of_q)
        return false;
    int order = !s->of_p ? 1 : !s->of_q ? -1 : text_compare(s->of_p->key, s->of_q->key);
    if (order < 0)
        s->of_q = NULL;
    if (order > 0)
        s->of_p = NULL;
    s->i += s->of_p != NULL;
    s->j += s->of_q != NULL;
    return true;
}

static bool is_no(const struct node *n)
{
    return n->type == NODE_SCALAR && n->form == FORM_NO;
}

static bool no_is_value(const struct patch_rules *rules, const char *path)
{
    return rules->no_is_value && rules->no_is_value(rules->ctx, path);
}

static bool is_set(const struct patch_rules *rules, const char *path)
{
    return rules->is_set && rules->is_set(rules->ctx, path);
}

static bool uses_was(const struct patch_rules *rules, const struct node *n)
{
    return n->type == NODE_SCALAR && n->form == FORM_TEXT && rules->uses_was &&
           rules->uses_was(rules->ctx, n);
}

/* ---- sets of names ---- */

/* A list that can be a set: a wrong one is left as it is for the model to refuse. */
static bool is_names(const struct node *n)
{
    if (!n || n->type != NODE_LIST)
        return false;
    for (size_t i = 0; i < n->n; i++)
        if (n->items[i]->type != NODE_SCALAR)
            return false;
    return true;
}

/* The names as keys of a map, in byte order, without repetition. */
static struct node *map_of_names(struct arena *a, const struct node *list)
{
    struct node *all = node_map(a, list->place), *once = node_map(a, list->place);
    for (size_t i = 0; i < list->n; i++)
        node_add(a, all, list->items[i]->text, list->items[i]->place, list->items[i]);
    node_sort(all);
    for (size_t i = 0; i < all->n; i++)
        if (i == 0 || !text_equal(all->pairs[i - 1].key, all->pairs[i].key))
            node_add(a, once, all->pairs[i].key, all->pairs[i].place, all->pairs[i].value);
    return once;
}

static struct node *plain_set(struct merge *m, const struct node *list)
{
    const struct node *names = map_of_names(m->a, list);
    struct node *set = node_list(m->a, list->place);
    for (size_t i = 0; i < names->n; i++)
        node_push(m->a, set, names->pairs[i].value);
    return set;
}

/* The names of the target, and those with `yes`, but not those with `no`. */
static struct node *changed_set(struct merge *m, const struct node *target,
                                const struct node *patch)
{
    bool over_set = is_names(target);
    struct node *set = node_list(m->a, over_set ? target->place : patch->place);
    struct step s = {.p = over_set ? map_of_names(m->a, target) : node_map(m->a, patch->place),
                     .q = in_order(m->a, patch)};
    while (next_step(&s)) {
        const struct pair *name = s.of_q ? s.of_q : s.of_p;
        if (!is_no(name->value))
            node_push(m->a, set, node_scalar(m->a, FORM_TEXT, name->key, name->place));
    }
    return set;
}

/* ---- merging ---- */

static struct node *merge(struct merge *m, const struct node *target, const struct node *patch,
                          const char *path);

static struct node *merge_maps(struct merge *m, const struct node *target,
                               const struct node *patch, const char *path)
{
    static const struct node nothing = {.type = NODE_MAP, .sorted = true};
    bool over_map = target && target->type == NODE_MAP;
    struct node *result = node_map(m->a, over_map ? target->place : patch->place);
    struct step s = {.p = over_map ? in_order(m->a, target) : &nothing,
                     .q = in_order(m->a, patch)};
    while (next_step(&s)) {
        const struct pair *p = s.of_p ? s.of_p : s.of_q;
        struct node *value = p->value;
        if (s.of_q)
            value = merge(m, s.of_p ? s.of_p->value : NULL, s.of_q->value,
                          join(m->a, path, p->key));
        if (value)
            node_add(m->a, result, p->key, p->place, value);
    }
    return result;
}

/* NULL: nothing is there any more, or m->failed. */
static struct node *merge(struct merge *m, const struct node *target, const struct node *patch,
                          const char *path)
{
    if (is_no(patch) && !no_is_value(m->rules, path))
        return NULL;
    if (uses_was(m->rules, patch)) {
        struct node *combined = m->rules->combine(m->rules->ctx, target, patch);
        m->failed = m->failed || !combined;
        return combined;
    }
    if (patch->type == NODE_MAP)
        return is_set(m->rules, path) ? changed_set(m, target, patch)
                                      : merge_maps(m, target, patch, path);
    if (is_names(patch) && is_set(m->rules, path))
        return plain_set(m, patch);
    return (struct node *)patch; /* trees are immutable: sharing is safe */
}

struct node *patch_apply(struct arena *a, const struct patch_rules *rules,
                         const struct node *target, const struct node *patch, const char *path)
{
    struct merge m = {.a = a, .rules = rules};
    struct node *result = merge(&m, target, patch, path);
    return m.failed ? NULL : result;
}

/* ---- what another patch settles ---- */

const struct node *patch_without(struct arena *a, const struct patch_rules *rules,
                                 const struct node *patch, const struct node *settled)
{
    if (settled->type != NODE_MAP)
        return uses_was(rules, settled) ? patch : NULL;
    if (patch->type != NODE_MAP || patch->n == 0)
        return patch;
    struct node *rest = node_map(a, patch->place);
    struct step s = {.p = in_order(a, patch), .q = in_order(a, settled)};
    while (next_step(&s)) {
        const struct node *left = s.of_p ? s.of_p->value : NULL;
        if (s.of_p && s.of_q)
            left = patch_without(a, rules, left, s.of_q->value);
        if (left)
            node_add(a, rest, s.of_p->key, s.of_p->place, (struct node *)left);
    }
    return rest->n ? rest : NULL;
}

/* ---- contradictions ---- */

static const char *contradiction(struct merge *m, const struct node *p, const struct node *q,
                                 const char *path)
{
    bool both_maps = p->type == NODE_MAP && q->type == NODE_MAP;
    if (uses_was(m->rules, p) && uses_was(m->rules, q))
        return NULL;
    if (!both_maps)
        return uses_was(m->rules, p) || uses_was(m->rules, q) || !node_equal(p, q) ? path : NULL;
    struct step s = {.p = in_order(m->a, p), .q = in_order(m->a, q)};
    while (next_step(&s)) {
        if (!s.of_p || !s.of_q)
            continue;
        const char *found = contradiction(m, s.of_p->value, s.of_q->value,
                                          join(m->a, path, s.of_p->key));
        if (found)
            return found;
    }
    return NULL;
}

const char *patch_contradiction(struct arena *a, const struct patch_rules *rules,
                                const struct node *p, const struct node *q)
{
    struct merge m = {.a = a, .rules = rules};
    return contradiction(&m, p, q, "");
}
