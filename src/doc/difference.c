/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where two trees differ.
 *
 * Owns nothing. Invariant: differences are found key by key in the order of each
 * map, and then sorted by path: "a-b" comes before "a/b" although the key "a"
 * comes before "a-b". */
#include <string.h>

#include "base/text.h"
#include "doc/patch.h"

struct comparison {
    struct arena *a;
    struct differences *out;
    struct text path;
};

static void differ(struct comparison *c, const struct node *before, const struct node *after);

static void add_difference(struct comparison *c, const struct node *before,
                           const struct node *after)
{
    *array_push(c->a, c->out) =
        (struct difference){arena_str(c->a, text_str(&c->path)), before, after};
}

/* Compares what stands under one key. */
static void differ_below(struct comparison *c, const char *key, const struct node *before,
                         const struct node *after)
{
    size_t mark = c->path.n;
    if (mark > 0)
        text_byte(&c->path, '/');
    text_add(&c->path, key);
    differ(c, before, after);
    c->path.n = mark;
    c->path.at[mark] = 0;
}

/* The pairs of a map in byte order of keys. */
static const struct pair *sorted_pairs(struct arena *a, const struct node *map)
{
    struct node copy = *map;
    if (!map->sorted) {
        copy.pairs = arena_copy(a, map->pairs, map->n * sizeof *map->pairs);
        node_sort(&copy);
    }
    return copy.pairs;
}

static void differ_in_maps(struct comparison *c, const struct node *before,
                           const struct node *after)
{
    const struct pair *p = sorted_pairs(c->a, before), *q = sorted_pairs(c->a, after);
    size_t i = 0, j = 0;
    while (i < before->n || j < after->n) {
        int order = i == before->n  ? 1
                    : j == after->n ? -1
                                    : text_compare(p[i].key, q[j].key);
        const char *key = order <= 0 ? p[i].key : q[j].key;
        const struct node *old = order <= 0 ? p[i++].value : NULL;
        const struct node *new = order >= 0 ? q[j++].value : NULL;
        differ_below(c, key, old, new);
    }
}

static void differ(struct comparison *c, const struct node *before, const struct node *after)
{
    if (before == after)
        return; /* a shared subtree */
    if (before && after && before->type == NODE_MAP && after->type == NODE_MAP)
        differ_in_maps(c, before, after);
    else if (!before || !after || !node_equal(before, after))
        add_difference(c, before, after);
}

/* Merges the sorted runs [low, middle) and [middle, high) of from into to. */
static void merge_runs(struct difference *to, const struct difference *from, size_t low,
                       size_t middle, size_t high)
{
    size_t i = low, j = middle;
    for (size_t k = low; k < high; k++) {
        bool left = i < middle && (j == high || text_compare(from[i].path, from[j].path) <= 0);
        to[k] = left ? from[i++] : from[j++];
    }
}

static size_t smaller(size_t a, size_t b)
{
    return a < b ? a : b;
}

/* Stable. */
static void sort_differences(struct arena *a, struct differences *d)
{
    struct difference *from = d->at, *to = NEW_ARRAY(a, d->n, struct difference);
    for (size_t run = 1; run < d->n; run *= 2) {
        for (size_t low = 0; low < d->n; low += 2 * run)
            merge_runs(to, from, low, smaller(low + run, d->n), smaller(low + 2 * run, d->n));
        struct difference *done = to;
        to = from;
        from = done;
    }
    if (d->n > 0 && from != d->at)
        memcpy(d->at, from, d->n * sizeof *from);
}

void patch_differences(struct arena *a, const struct node *before, const struct node *after,
                       struct differences *out)
{
    struct comparison c = {.a = a, .out = out};
    text_init(&c.path, a);
    if (!before && !after)
        return;
    differ(&c, before, after);
    sort_differences(a, out);
}
