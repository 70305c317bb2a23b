/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Families of minimal sets out of a decision diagram: a table of unique nodes and a
 * cache of differences, both of open addressing on the contents, as in diagram.c.
 *
 * Owns its tables in a child of the caller's arena. Invariants: those of a family
 * (cuts_parts.h). The cache may forget; what it forgets is computed again, with the same
 * result; steps are counted, so that forgetting cannot go on for ever. */
#include "graph/cuts_parts.h"

enum { FIRST_SLOTS = 256, LARGEST_CACHE = 1 << 22 };

#define FAMILY_FULL UINT32_MAX /* what every operation returns once a limit is hit */

struct difference {
    uint32_t f, g, result; /* f = 0: empty, since nothing less something needs no cache */
};

struct sizes { /* members of the smallest and of the largest set of a family */
    uint32_t least, most;
};

struct maker {
    struct arena *arena;
    ARRAY(struct diagram_node) nodes; /* family 2 + i is node i */
    ARRAY(struct sizes) sizes;        /* of the sets of family i */
    uint32_t *slots;                  /* family, or 0 */
    size_t n_slots;
    struct difference *cache;
    size_t n_cache;
    uint32_t n_steps;
};

static uint64_t hash_three(uint32_t a, uint32_t b, uint32_t c)
{
    uint64_t h = (a | (uint64_t)b << 32) * UINT64_C(0x9E3779B97F4A7C15);
    h ^= h >> 29;
    h = (h ^ c) * UINT64_C(0xBF58476D1CE4E5B9);
    return h ^ h >> 32;
}

static size_t find_slot(const struct maker *m, struct diagram_node n)
{
    size_t i = hash_three(n.variable, n.high, n.low) & (m->n_slots - 1);
    for (; m->slots[i]; i = (i + 1) & (m->n_slots - 1)) {
        const struct diagram_node *o = &m->nodes.at[m->slots[i] - 2];
        if (o->variable == n.variable && o->high == n.high && o->low == n.low)
            break;
    }
    return i;
}

static void grow_slots(struct maker *m)
{
    m->n_slots *= 2;
    m->slots = NEW_ARRAY(m->arena, m->n_slots, uint32_t);
    for (size_t i = 0; i < m->nodes.n; i++)
        m->slots[find_slot(m, m->nodes.at[i])] = (uint32_t)i + 2;
}

static struct difference *cached(const struct maker *m, uint32_t f, uint32_t g)
{
    return &m->cache[hash_three(f, g, 0) & (m->n_cache - 1)];
}

/* With the steps, not with the nodes: many differences are of few nodes. */
static void grow_cache(struct maker *m)
{
    const struct difference *old = m->cache;
    size_t n = m->n_cache;
    m->n_cache = 2 * n;
    m->cache = NEW_ARRAY(m->arena, m->n_cache, struct difference);
    for (size_t i = 0; i < n; i++)
        if (old[i].f)
            *cached(m, old[i].f, old[i].g) = old[i];
}

static struct maker maker_new(struct arena *a)
{
    struct maker m = {.arena = a, .n_slots = FIRST_SLOTS, .n_cache = FIRST_SLOTS};
    m.slots = NEW_ARRAY(a, m.n_slots, uint32_t);
    m.cache = NEW_ARRAY(a, m.n_cache, struct difference);
    *array_push(a, &m.sizes) = (struct sizes){UINT32_MAX, 0}; /* no set: all are, none is */
    array_push(a, &m.sizes);
    return m;
}

static struct sizes sizes_of(const struct maker *m, struct diagram_node n)
{
    struct sizes high = m->sizes.at[n.high], low = m->sizes.at[n.low];
    return (struct sizes){high.least + 1 < low.least ? high.least + 1 : low.least,
                          high.most + 1 > low.most ? high.most + 1 : low.most};
}

/* The sets of `low`, and those of `high` with the variable added. */
static uint32_t node_of(struct maker *m, uint32_t variable, uint32_t high, uint32_t low)
{
    if (high == FAMILY_FULL || low == FAMILY_FULL)
        return FAMILY_FULL;
    if (high == FAMILY_NONE)
        return low;
    struct diagram_node n = {variable, high, low};
    size_t i = find_slot(m, n);
    if (m->slots[i])
        return m->slots[i];
    if (m->nodes.n == CUTS_NODES)
        return FAMILY_FULL;
    *array_push(m->arena, &m->nodes) = n;
    struct sizes sizes = sizes_of(m, n);
    *array_push(m->arena, &m->sizes) = sizes;
    uint32_t made = (uint32_t)m->nodes.n + 1;
    m->slots[i] = made;
    if (2 * m->nodes.n >= m->n_slots)
        grow_slots(m);
    return made;
}

static uint32_t without(struct maker *m, uint32_t f, uint32_t g);

/* The same for two nodes, f not below g. */
static uint32_t without_by_arms(struct maker *m, struct diagram_node f, uint32_t whole_g)
{
    struct diagram_node g = m->nodes.at[whole_g - 2];
    uint32_t high, low;
    if (f.variable < g.variable) {
        high = without(m, f.high, whole_g);
        low = without(m, f.low, whole_g);
    } else {
        high = without(m, without(m, f.high, g.high), g.low);
        low = without(m, f.low, g.low);
    }
    return node_of(m, f.variable, high, low);
}

/* The sets of f that contain no set of g (themselves included). Each level of the
 * recursion is at a greater variable. */
static uint32_t without(struct maker *m, uint32_t f, uint32_t g)
{
    if (f == FAMILY_FULL)
        return FAMILY_FULL;
    while (f >= 2 && g >= 2 && m->nodes.at[g - 2].variable < m->nodes.at[f - 2].variable)
        g = m->nodes.at[g - 2].low; /* no set of f has that variable */
    if (g == FAMILY_UNIT || f == g)
        return FAMILY_NONE;
    if (m->sizes.at[f].most < m->sizes.at[g].least) /* also when one is without sets */
        return f;
    const struct difference *c = cached(m, f, g);
    if (c->f == f && c->g == g)
        return c->result;
    if (m->n_steps++ == CUTS_STEPS)
        return FAMILY_FULL;
    if (m->n_steps > m->n_cache && m->n_cache < LARGEST_CACHE)
        grow_cache(m);
    uint32_t result = without_by_arms(m, m->nodes.at[f - 2], g);
    if (result != FAMILY_FULL) /* the cache may have moved meanwhile */
        *cached(m, f, g) = (struct difference){f, g, result};
    return result;
}

/* used[i]: node i is below the root, or is the root. Nodes come after their arms. */
static bool *mark_used(struct arena *a, size_t n, const struct diagram_node *nodes, uint32_t root)
{
    bool *used = NEW_ARRAY(a, n, bool);
    if (root >= 2)
        used[root - 2] = true;
    for (size_t i = n; i-- > 0;) {
        if (used[i] && nodes[i].high >= 2)
            used[nodes[i].high - 2] = true;
        if (used[i] && nodes[i].low >= 2)
            used[nodes[i].low - 2] = true;
    }
    return used;
}

/* The minimal true-sets of each function below the root, arms first. */
static uint32_t minimal(struct maker *m, const struct diagram *d, uint32_t root)
{
    const bool *used = mark_used(m->arena, d->n_nodes, d->nodes, root);
    uint32_t *sets = NEW_ARRAY(m->arena, d->n_nodes + 2, uint32_t);
    sets[0] = FAMILY_NONE;
    sets[1] = FAMILY_UNIT;
    for (size_t i = 0; i < d->n_nodes; i++) {
        if (!used[i])
            continue;
        const struct diagram_node *n = &d->nodes[i];
        uint32_t high = without(m, sets[n->high], sets[n->low]);
        sets[i + 2] = node_of(m, n->variable, high, sets[n->low]);
        if (sets[i + 2] == FAMILY_FULL)
            return FAMILY_FULL;
    }
    return sets[root];
}

/* What is below the root, in the order in which it was made, in arena `a`. */
static struct family gather(struct arena *a, const struct maker *m, uint32_t root)
{
    const bool *used = mark_used(m->arena, m->nodes.n, m->nodes.at, root);
    size_t n = 0;
    for (size_t i = 0; i < m->nodes.n; i++)
        n += used[i];
    struct diagram_node *nodes = NEW_ARRAY(a, n, struct diagram_node);
    uint32_t *number = NEW_ARRAY(m->arena, m->nodes.n + 2, uint32_t);
    number[1] = FAMILY_UNIT;
    n = 0;
    for (size_t i = 0; i < m->nodes.n; i++) {
        if (!used[i])
            continue;
        struct diagram_node old = m->nodes.at[i];
        nodes[n++] = (struct diagram_node){old.variable, number[old.high], number[old.low]};
        number[i + 2] = (uint32_t)n + 1;
    }
    return (struct family){.n_nodes = n, .nodes = nodes, .root = number[root]};
}

bool family_of(struct arena *a, const struct diagram *d, uint32_t root, struct family *out)
{
    struct maker m = maker_new(arena_child(a));
    uint32_t sets = minimal(&m, d, root);
    if (sets != FAMILY_FULL)
        *out = gather(a, &m, sets);
    arena_free(m.arena);
    return sets != FAMILY_FULL;
}
