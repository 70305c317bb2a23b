/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Minimal cut sets: their family is made (cuts_family.c), counted here, and its best
 * sets are taken out of it (cuts_best.c). Owns scratch arenas, which end with each call. */
#include "graph/cuts_parts.h"

#include <assert.h>

static uint64_t add_saturating(uint64_t x, uint64_t y)
{
    return x > UINT64_MAX - y ? UINT64_MAX : x + y;
}

static uint64_t count_sets(struct arena *scratch, const struct family *f)
{
    uint64_t *count = NEW_ARRAY(scratch, f->n_nodes + 2, uint64_t);
    count[FAMILY_UNIT] = 1;
    for (size_t i = 0; i < f->n_nodes; i++)
        count[i + 2] = add_saturating(count[f->nodes[i].high], count[f->nodes[i].low]);
    return count[f->root];
}

/* A set of one member is a high arm to 1 on the way of all low ones. */
static uint32_t count_singles(const struct family *f)
{
    uint32_t n = 0;
    for (uint32_t at = f->root; at >= 2; at = f->nodes[at - 2].low)
        n += f->nodes[at - 2].high == FAMILY_UNIT;
    return n;
}

struct cuts cuts_find(struct arena *a, const struct diagram *d, size_t root, const double *p,
                      size_t limit)
{
    assert(root < d->n_roots);
    struct arena *scratch = arena_child(a);
    struct family family;
    struct cuts found = {.too_many = !family_of(scratch, d, d->roots[root], &family)};
    if (!found.too_many) {
        found.n_all = count_sets(scratch, &family);
        found.n_singles = count_singles(&family);
        found.n = family_best(a, &family, d->n_variables, p, limit, &found.sets);
    }
    arena_free(scratch);
    return found;
}

uint32_t cuts_order(struct arena *a, const struct diagram *d, size_t root)
{
    assert(root < d->n_roots);
    struct arena *scratch = arena_child(a);
    uint32_t *least = NEW_ARRAY(scratch, d->n_nodes + 2, uint32_t);
    least[0] = CUTS_NEVER;
    for (size_t i = 0; i < d->n_nodes; i++) {
        uint32_t high = least[d->nodes[i].high], low = least[d->nodes[i].low];
        high += high != CUTS_NEVER;
        least[i + 2] = high < low ? high : low;
    }
    uint32_t order = least[d->roots[root]];
    arena_free(scratch);
    return order;
}
