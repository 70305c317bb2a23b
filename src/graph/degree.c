/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The degree pass: how often each uncertain input enters a node.
 *
 * For each node of degree 0 or 1 it knows the set of inputs that enter; equal sets
 * are one set, since most nodes of a section share theirs. Nodes of degree 2 need
 * no set: whatever uses them has degree 2 too. Nodes are worked through once, in
 * the order of their numbers, and what was found is kept with the graph: the first
 * question costs a pass, the others nothing. Therefore not to be asked from several
 * threads at once.
 *
 * Invariant: sets are ascending lists without repetition; set 0 is empty. */
#include "graph/diagram.h"
#include "graph/ops.h"

#include <string.h>

#define CURVED UINT32_MAX /* in place of a set: degree 2 */

struct set {
    uint32_t first, n;
};

struct degrees {
    struct arena *arena;
    ARRAY(uint32_t) set_of; /* by node */
    ARRAY(struct set) sets;
    ARRAY(uint32_t) members;
    ARRAY(uint32_t) gathered; /* scratch */
    uint32_t *slots;          /* set + 1, or 0 */
    size_t n_slots;
};

/* ---- sets ---- */

static uint64_t set_hash(const uint32_t *at, size_t n)
{
    uint64_t h = n;
    for (size_t i = 0; i < n; i++) {
        h = (h ^ at[i]) * UINT64_C(0x9E3779B97F4A7C15);
        h ^= h >> 32;
    }
    return h;
}

static size_t find_slot(const struct degrees *d, const uint32_t *at, size_t n)
{
    size_t i = set_hash(at, n) & (d->n_slots - 1);
    for (; d->slots[i]; i = (i + 1) & (d->n_slots - 1)) {
        struct set s = d->sets.at[d->slots[i] - 1];
        if (s.n == n && (n == 0 || memcmp(d->members.at + s.first, at, n * sizeof *at) == 0))
            break;
    }
    return i;
}

static void grow_slots(struct degrees *d)
{
    d->n_slots = d->n_slots ? 2 * d->n_slots : 64;
    d->slots = NEW_ARRAY(d->arena, d->n_slots, uint32_t);
    for (size_t k = 0; k < d->sets.n; k++) {
        struct set s = d->sets.at[k];
        d->slots[find_slot(d, d->members.at + s.first, s.n)] = (uint32_t)k + 1;
    }
}

/* The number of the set with these members. */
static uint32_t set_number(struct degrees *d, const uint32_t *at, size_t n)
{
    if (2 * (d->sets.n + 1) > d->n_slots)
        grow_slots(d);
    size_t i = find_slot(d, at, n);
    if (d->slots[i])
        return d->slots[i] - 1;
    *array_push(d->arena, &d->sets) =
        (struct set){(uint32_t)d->members.n, (uint32_t)n};
    array_reserve(d->arena, &d->members, n);
    if (n)
        memcpy(d->members.at + d->members.n, at, n * sizeof *at);
    d->members.n += n;
    d->slots[i] = (uint32_t)d->sets.n;
    return d->slots[i] - 1;
}

static void sift(uint32_t *at, size_t root, size_t n)
{
    for (size_t child; (child = 2 * root + 1) < n; root = child) {
        if (child + 1 < n && at[child] < at[child + 1])
            child++;
        if (at[root] >= at[child])
            return;
        uint32_t t = at[root];
        at[root] = at[child];
        at[child] = t;
    }
}

/* Heap sort, then one of each. Returns how many remain. */
static size_t sort_unique(uint32_t *at, size_t n)
{
    for (size_t i = n / 2; i-- > 0;)
        sift(at, i, n);
    for (size_t end = n; end-- > 1;) {
        uint32_t t = at[0];
        at[0] = at[end];
        at[end] = t;
        sift(at, 0, end);
    }
    size_t kept = 0;
    for (size_t i = 0; i < n; i++)
        if (kept == 0 || at[kept - 1] != at[i])
            at[kept++] = at[i];
    return kept;
}

/* ---- rules ---- */

/* Which variables occur in the diagram of node n. */
static const bool *occurring(struct arena *scratch, const struct graph *g, node_id n)
{
    const struct diagram *d = graph_diagram_of(g, n);
    bool *occurs = NEW_ARRAY(scratch, graph_at(g, n)->n, bool);
    for (size_t i = 0; i < d->n_nodes; i++)
        occurs[d->nodes[i].variable] = true;
    return occurs;
}

/* The members of the sets of the arguments from `from` on, one after another, in
 * d->gathered; `counts` (may be NULL) says which arguments to look at. False when
 * one of them is curved. */
static bool gather(struct degrees *d, const struct graph *g, node_id n, size_t from,
                   const bool *counts)
{
    const node_id *args = graph_args(g, n);
    d->gathered.n = 0;
    for (size_t i = from; i < graph_at(g, n)->n; i++) {
        uint32_t set = d->set_of.at[args[i]];
        if (counts && !counts[i])
            continue;
        if (set == CURVED)
            return false;
        struct set s = d->sets.at[set];
        array_reserve(d->arena, &d->gathered, s.n);
        if (s.n)
            memcpy(d->gathered.at + d->gathered.n, d->members.at + s.first,
                   s.n * sizeof *d->gathered.at);
        d->gathered.n += s.n;
    }
    return true;
}

/* All inputs of the arguments from `from` on together; CURVED when one of them is,
 * or when `disjoint` is asked for and two arguments share an input. */
static uint32_t together(struct degrees *d, const struct graph *g, node_id n, size_t from,
                         bool disjoint)
{
    bool is_diagram = graph_at(g, n)->op == OP_DIAGRAM;
    struct arena *scratch = is_diagram ? arena_child(d->arena) : NULL;
    bool straight = gather(d, g, n, from, is_diagram ? occurring(scratch, g, n) : NULL);
    arena_free(scratch);
    size_t kept = sort_unique(d->gathered.at, d->gathered.n);
    if (!straight || (disjoint && kept < d->gathered.n))
        return CURVED;
    return set_number(d, d->gathered.at, kept);
}

static bool is_certain(const struct degrees *d, const struct graph *g, node_id n, size_t k)
{
    return d->set_of.at[graph_args(g, n)[k]] == 0;
}

static uint32_t curved_unless_certain(struct degrees *d, const struct graph *g, node_id n)
{
    for (size_t k = 0; k < graph_at(g, n)->n; k++)
        if (!is_certain(d, g, n, k))
            return CURVED;
    return 0;
}

static uint32_t power_set(const struct degrees *d, const struct graph *g, node_id n)
{
    const node_id *args = graph_args(g, n);
    const struct graph_node *exponent = graph_at(g, args[1]);
    bool keeps = is_certain(d, g, n, 0) || exponent->constant == 1;
    return keeps ? d->set_of.at[args[0]] : CURVED;
}

static uint32_t set_of_node(struct degrees *d, const struct graph *g, node_id n)
{
    const struct graph_node *node = graph_at(g, n);
    switch (op_rule(node->op)->degree) {
    case DEGREE_LEAF:
        return node->op == OP_INPUT ? set_number(d, &node->extra, 1) : 0;
    case DEGREE_UNION:
        return together(d, g, n, 0, false);
    case DEGREE_PRODUCT:
        return together(d, g, n, 0, true);
    case DEGREE_QUOTIENT:
        return is_certain(d, g, n, 1) ? d->set_of.at[graph_args(g, n)[0]] : CURVED;
    case DEGREE_POWER:
        return power_set(d, g, n);
    case DEGREE_CHOICE:
        return is_certain(d, g, n, 0) ? together(d, g, n, 1, false) : CURVED;
    case DEGREE_COURSE:
    case DEGREE_CURVED:
    case DEGREE_MISSING:
        break;
    }
    return curved_unless_certain(d, g, n);
}

static struct degrees *degrees_of(const struct graph *g)
{
    struct degrees **kept = graph_degrees(g);
    if (*kept)
        return *kept;
    struct degrees *d = NEW(graph_arena(g), struct degrees);
    d->arena = graph_arena(g);
    set_number(d, NULL, 0);
    return *kept = d;
}

int graph_degree(const struct graph *g, node_id root)
{
    struct degrees *d = degrees_of(g);
    while (d->set_of.n <= root) {
        uint32_t set = set_of_node(d, g, (node_id)d->set_of.n);
        *array_push(d->arena, &d->set_of) = set;
    }
    uint32_t set = d->set_of.at[root];
    return set == CURVED ? 2 : d->sets.at[set].n > 0;
}
