/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Building decision diagrams: a table of unique nodes and a cache of results, both
 * of open addressing on the contents, so that the same calls give the same numbers
 * anywhere. Everything is made by if-then-else (Brace, Rudell, Bryant, DAC 1990).
 *
 * Owns its arrays in the caller's arena. Invariants: no two nodes are equal; no node
 * has equal arms; a node's variable is smaller than those of its arms. The cache may
 * forget; what it forgets is computed again, with the same result. The recursion is
 * at most as deep as there are variables. */
#include "graph/diagram.h"

#include <assert.h>
#include <string.h>

enum { FIRST_SLOTS = 1024, LARGEST_CACHE = 1 << 22 };

struct cached {
    bfun f, g, h, result; /* f = 0: empty, since if-then-else of false needs no cache */
};

struct diagram_builder {
    struct arena *arena;
    ARRAY(struct diagram_node) nodes; /* function 2 + i is node i */
    uint32_t *slots;                  /* function, or 0 */
    size_t n_slots;
    struct cached *cache;
    size_t n_cache;
};

static uint64_t hash3(uint32_t a, uint32_t b, uint32_t c)
{
    uint64_t h = (a | (uint64_t)b << 32) * UINT64_C(0x9E3779B97F4A7C15);
    h ^= h >> 29;
    h = (h ^ c) * UINT64_C(0xBF58476D1CE4E5B9);
    return h ^ h >> 32;
}

struct diagram_builder *diagram_builder_new(struct arena *a)
{
    struct diagram_builder *b = NEW(a, struct diagram_builder);
    b->arena = a;
    b->n_slots = b->n_cache = FIRST_SLOTS;
    b->slots = NEW_ARRAY(a, b->n_slots, uint32_t);
    b->cache = NEW_ARRAY(a, b->n_cache, struct cached);
    return b;
}

static size_t find_slot(const struct diagram_builder *b, struct diagram_node n)
{
    size_t i = hash3(n.variable, n.high, n.low) & (b->n_slots - 1);
    for (; b->slots[i]; i = (i + 1) & (b->n_slots - 1)) {
        const struct diagram_node *m = &b->nodes.at[b->slots[i] - 2];
        if (m->variable == n.variable && m->high == n.high && m->low == n.low)
            break;
    }
    return i;
}

/* For a node that is in none. */
static uint32_t *free_slot(const struct diagram_builder *b, struct diagram_node n)
{
    size_t i = hash3(n.variable, n.high, n.low) & (b->n_slots - 1);
    while (b->slots[i])
        i = (i + 1) & (b->n_slots - 1);
    return &b->slots[i];
}

static struct cached *find_cached(const struct diagram_builder *b, bfun f, bfun g, bfun h)
{
    return &b->cache[hash3(f, g, h) & (b->n_cache - 1)];
}

static void grow_cache(struct diagram_builder *b)
{
    const struct cached *old = b->cache;
    size_t n = b->n_cache;
    b->n_cache *= 2;
    b->cache = NEW_ARRAY(b->arena, b->n_cache, struct cached);
    for (size_t i = 0; i < n; i++)
        if (old[i].f)
            *find_cached(b, old[i].f, old[i].g, old[i].h) = old[i];
}

/* Twice the slots, and as large a cache. */
static void grow(struct diagram_builder *b)
{
    b->n_slots *= 2;
    b->slots = NEW_ARRAY(b->arena, b->n_slots, uint32_t);
    for (size_t i = 0; i < b->nodes.n; i++)
        *free_slot(b, b->nodes.at[i]) = (uint32_t)i + 2;
    if (b->n_cache < LARGEST_CACHE)
        grow_cache(b);
}

/* The function "variable ? high : low". */
static bfun node_of(struct diagram_builder *b, uint32_t variable, bfun high, bfun low)
{
    if (high == low || high == DIAGRAM_FULL)
        return high;
    if (low == DIAGRAM_FULL)
        return low;
    struct diagram_node n = {variable, high, low};
    size_t i = find_slot(b, n);
    if (b->slots[i])
        return b->slots[i];
    if (b->nodes.n == DIAGRAM_NODES)
        return DIAGRAM_FULL;
    *array_push(b->arena, &b->nodes) = n;
    bfun made = (bfun)b->nodes.n + 1;
    b->slots[i] = made;
    if (2 * b->nodes.n >= b->n_slots)
        grow(b);
    return made;
}

bfun diagram_variable(struct diagram_builder *b, uint32_t variable)
{
    assert(variable < UINT32_MAX);
    return node_of(b, variable, BFUN_TRUE, BFUN_FALSE);
}

/* A constant is below all variables. */
static struct diagram_node node_at(const struct diagram_builder *b, bfun f)
{
    return f < 2 ? (struct diagram_node){UINT32_MAX, f, f} : b->nodes.at[f - 2];
}

static uint32_t least(uint32_t x, uint32_t y)
{
    return x < y ? x : y;
}

/* The arms of f by a variable at or above its top. */
static void split(struct diagram_node *n, bfun f, uint32_t variable)
{
    if (n->variable != variable)
        n->high = n->low = f;
}

/* The cases that need no work. */
static bool is_trivial(bfun f, bfun g, bfun h, bfun *out)
{
    if (f == BFUN_TRUE || g == h)
        *out = g;
    else if (f == BFUN_FALSE)
        *out = h;
    else if (g == BFUN_TRUE && h == BFUN_FALSE)
        *out = f;
    else
        return false;
    return true;
}

/* One form for equal triples: AND and OR do not care for the order. */
static void normalise(bfun *f, bfun *g, bfun *h)
{
    if (*f == *g)
        *g = BFUN_TRUE;
    if (*f == *h)
        *h = BFUN_FALSE;
    bfun *other = *h == BFUN_FALSE ? g : *g == BFUN_TRUE ? h : f;
    if (*other > BFUN_TRUE && *other < *f) {
        bfun t = *f;
        *f = *other;
        *other = t;
    }
}

static bfun ite(struct diagram_builder *b, bfun f, bfun g, bfun h)
{
    bfun result;
    if (is_trivial(f, g, h, &result))
        return result;
    normalise(&f, &g, &h);
    if (is_trivial(f, g, h, &result))
        return result;
    const struct cached *c = find_cached(b, f, g, h);
    if (c->f == f && c->g == g && c->h == h)
        return c->result;
    struct diagram_node nf = node_at(b, f), ng = node_at(b, g), nh = node_at(b, h);
    uint32_t v = least(nf.variable, least(ng.variable, nh.variable));
    split(&nf, f, v);
    split(&ng, g, v);
    split(&nh, h, v);
    bfun high = ite(b, nf.high, ng.high, nh.high);
    if (high == DIAGRAM_FULL)
        return high;
    result = node_of(b, v, high, ite(b, nf.low, ng.low, nh.low));
    if (result != DIAGRAM_FULL) /* the cache may have moved meanwhile */
        *find_cached(b, f, g, h) = (struct cached){f, g, h, result};
    return result;
}

bfun diagram_ite(struct diagram_builder *b, bfun f, bfun g, bfun h)
{
    if (f == DIAGRAM_FULL || g == DIAGRAM_FULL || h == DIAGRAM_FULL)
        return DIAGRAM_FULL;
    return ite(b, f, g, h);
}

bfun diagram_not(struct diagram_builder *b, bfun f)
{
    return diagram_ite(b, f, BFUN_FALSE, BFUN_TRUE);
}

bfun diagram_and(struct diagram_builder *b, bfun f, bfun g)
{
    return diagram_ite(b, f, g, BFUN_FALSE);
}

bfun diagram_or(struct diagram_builder *b, bfun f, bfun g)
{
    return diagram_ite(b, f, BFUN_TRUE, g);
}

/* From the last function to the first; enough[j] = at least j of those seen. Only
 * the j that the functions still to come can complete to k are worked out. */
bfun diagram_at_least(struct diagram_builder *b, uint32_t k, size_t n, const bfun *f)
{
    if (k > n)
        return BFUN_FALSE;
    for (size_t i = 0; i < n; i++)
        if (f[i] == DIAGRAM_FULL)
            return DIAGRAM_FULL;
    bfun *enough = NEW_ARRAY(b->arena, (size_t)k + 1, bfun);
    enough[0] = BFUN_TRUE;
    for (size_t i = n; i-- > 0;) {
        uint32_t least = k > i ? k - (uint32_t)i : 1;
        for (uint32_t j = k; j >= least && j > 0; j--)
            enough[j] = diagram_ite(b, f[i], enough[j - 1], enough[j]);
    }
    return enough[k];
}

/* ---- freezing ---- */

/* What the walk over a builder's nodes has numbered so far. */
struct freezing {
    const struct diagram_builder *b;
    struct arena *scratch;
    uint32_t *numbers; /* by function; of a node 0: none so far */
    ARRAY(struct diagram_node) nodes;
};

/* The number of a function: depth first, the high arm before the low one, arms before their
 * node. */
static uint32_t number_of(struct freezing *z, bfun f)
{
    if (f < 2 || z->numbers[f])
        return z->numbers[f];
    struct diagram_node n = z->b->nodes.at[f - 2];
    n.high = number_of(z, n.high);
    n.low = number_of(z, n.low);
    *array_push(z->scratch, &z->nodes) = n;
    return z->numbers[f] = (uint32_t)z->nodes.n + 1;
}

static uint64_t structure_hash(const struct diagram *d)
{
    uint64_t h = hash3(d->n_variables, (uint32_t)d->n_nodes, (uint32_t)d->n_roots);
    for (size_t i = 0; i < d->n_nodes; i++) {
        const struct diagram_node *n = &d->nodes[i];
        h = (h ^ hash3(n->variable, n->high, n->low)) * UINT64_C(0x94D049BB133111EB);
        h ^= h >> 31;
    }
    for (size_t k = 0; k < d->n_roots; k++)
        h = (h ^ d->roots[k]) * UINT64_C(0x94D049BB133111EB);
    return h ^ h >> 32;
}

static uint32_t count_variables(const struct freezing *z)
{
    uint32_t n = 0;
    for (size_t i = 0; i < z->nodes.n; i++)
        if (z->nodes.at[i].variable >= n)
            n = z->nodes.at[i].variable + 1;
    return n;
}

const struct diagram *diagram_freeze(struct arena *a, const struct diagram_builder *b,
                                     size_t n_roots, const bfun *roots)
{
    for (size_t k = 0; k < n_roots; k++)
        if (roots[k] == DIAGRAM_FULL)
            return NULL;
    struct arena *scratch = arena_child(a);
    struct freezing z = {.b = b, .scratch = scratch};
    z.numbers = NEW_ARRAY(scratch, b->nodes.n + 2, uint32_t);
    z.numbers[BFUN_TRUE] = BFUN_TRUE;
    uint32_t *numbers = NEW_ARRAY(a, n_roots, uint32_t);
    for (size_t k = 0; k < n_roots; k++)
        numbers[k] = number_of(&z, roots[k]);
    struct diagram *d = NEW(a, struct diagram);
    *d = (struct diagram){.n_variables = count_variables(&z),
                          .n_nodes = z.nodes.n,
                          .nodes = arena_copy(a, z.nodes.at, z.nodes.n * sizeof *z.nodes.at),
                          .n_roots = n_roots,
                          .roots = numbers};
    d->hash = structure_hash(d);
    arena_free(scratch);
    return d;
}

bool diagram_equal(const struct diagram *a, const struct diagram *b)
{
    if (a == b)
        return true;
    return a->hash == b->hash && a->n_variables == b->n_variables && a->n_nodes == b->n_nodes &&
           a->n_roots == b->n_roots &&
           (!a->n_nodes || memcmp(a->nodes, b->nodes, a->n_nodes * sizeof *a->nodes) == 0) &&
           (!a->n_roots || memcmp(a->roots, b->roots, a->n_roots * sizeof *a->roots) == 0);
}
