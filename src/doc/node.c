/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The document tree: building, looking up, sorting, comparing, copying.
 *
 * Owns nothing: all memory is the arena's. Invariant: `sorted` is set only while
 * the keys of a map rise strictly; node_add keeps it as long as keys come in
 * order, so that what is built in order needs no sorting. */
#include "doc/node.h"

#include "base/text.h"

/* Below this many keys a walk is as quick as a search. */
enum { FEW_KEYS = 12 };

static struct node *node_make(struct arena *a, enum node_type type, struct place at)
{
    struct node *n = NEW(a, struct node);
    n->type = type;
    n->place = at;
    return n;
}

struct node *node_scalar(struct arena *a, enum node_form form, const char *text, struct place at)
{
    struct node *n = node_make(a, NODE_SCALAR, at);
    n->form = form;
    n->text = text;
    return n;
}

struct node *node_map(struct arena *a, struct place at)
{
    struct node *n = node_make(a, NODE_MAP, at);
    n->sorted = true;
    return n;
}

struct node *node_list(struct arena *a, struct place at)
{
    return node_make(a, NODE_LIST, at);
}

static struct pair *search(const struct node *map, const char *key)
{
    size_t low = 0, high = map->n;
    while (low < high) {
        size_t middle = low + (high - low) / 2;
        int order = text_compare(map->pairs[middle].key, key);
        if (order == 0)
            return &map->pairs[middle];
        if (order < 0)
            low = middle + 1;
        else
            high = middle;
    }
    return NULL;
}

static struct pair *find_pair(const struct node *map, const char *key)
{
    if (map->sorted && map->n > FEW_KEYS)
        return search(map, key);
    for (size_t i = 0; i < map->n; i++)
        if (text_equal(map->pairs[i].key, key))
            return &map->pairs[i];
    return NULL;
}

struct node *node_get(const struct node *map, const char *key)
{
    if (!map || map->type != NODE_MAP)
        return NULL;
    const struct pair *p = find_pair(map, key);
    return p ? p->value : NULL;
}

void node_add(struct arena *a, struct node *map, const char *key, struct place at,
              struct node *value)
{
    map->pairs = array_room(a, map->pairs, map->n, &map->cap, 1, sizeof *map->pairs);
    if (map->n > 0)
        map->sorted = map->sorted && text_compare(map->pairs[map->n - 1].key, key) < 0;
    map->pairs[map->n++] = (struct pair){key, at, value};
}

void node_set(struct arena *a, struct node *map, const char *key, struct node *value)
{
    struct pair *p = find_pair(map, key);
    if (p)
        p->value = value;
    else
        node_add(a, map, key, value->place, value);
}

void node_push(struct arena *a, struct node *list, struct node *item)
{
    list->items = array_room(a, list->items, list->n, &list->cap, 1, sizeof *list->items);
    list->items[list->n++] = item;
}

static bool rises(const struct node *map)
{
    for (size_t i = 1; i < map->n; i++)
        if (text_compare(map->pairs[i - 1].key, map->pairs[i].key) >= 0)
            return false;
    return true;
}

static void sift_down(struct pair *heap, size_t root, size_t n)
{
    struct pair moved = heap[root];
    for (size_t child; (child = 2 * root + 1) < n; root = child) {
        if (child + 1 < n && text_compare(heap[child].key, heap[child + 1].key) < 0)
            child++;
        if (text_compare(moved.key, heap[child].key) >= 0)
            break;
        heap[root] = heap[child];
    }
    heap[root] = moved;
}

/* A heap sort: no memory beside the map, never quadratic. */
void node_sort(struct node *map)
{
    if (!map->sorted && !rises(map)) {
        for (size_t i = map->n / 2; i-- > 0;)
            sift_down(map->pairs, i, map->n);
        for (size_t last = map->n - 1; last > 0; last--) {
            struct pair greatest = map->pairs[0];
            map->pairs[0] = map->pairs[last];
            map->pairs[last] = greatest;
            sift_down(map->pairs, 0, last);
        }
    }
    map->sorted = true;
}

static bool maps_equal(const struct node *a, const struct node *b)
{
    for (size_t i = 0; i < a->n; i++) {
        const struct pair *p = &a->pairs[i], *q = &b->pairs[i];
        if (!text_equal(p->key, q->key))
            q = find_pair(b, p->key);
        if (!q || !node_equal(p->value, q->value))
            return false;
    }
    return true;
}

static bool lists_equal(const struct node *a, const struct node *b)
{
    for (size_t i = 0; i < a->n; i++)
        if (!node_equal(a->items[i], b->items[i]))
            return false;
    return true;
}

bool node_equal(const struct node *a, const struct node *b)
{
    if (a == b)
        return true;
    if (a->type != b->type)
        return false;
    if (a->type == NODE_SCALAR)
        return a->form == b->form && text_equal(a->text, b->text);
    if (a->n != b->n)
        return false;
    return a->type == NODE_MAP ? maps_equal(a, b) : lists_equal(a, b);
}

struct node *node_copy(struct arena *a, const struct node *n)
{
    struct node *copy = node_make(a, n->type, n->place);
    copy->form = n->form;
    copy->text = n->text;
    copy->quoted = n->quoted;
    copy->sorted = n->type == NODE_MAP;
    for (size_t i = 0; i < n->n; i++) {
        if (n->type == NODE_MAP)
            node_add(a, copy, n->pairs[i].key, n->pairs[i].place, node_copy(a, n->pairs[i].value));
        else
            node_push(a, copy, node_copy(a, n->items[i]));
    }
    return copy;
}
