/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The degree pass: how each uncertain input enters a node.
 *
 * For each node it knows two sets of inputs: those in which the node is linear for all values
 * of the others, and the rest, curved ones. Equal sets are one set, since most nodes of a
 * section share theirs. Nodes are worked through once, in the order of their numbers, and what
 * was found is kept with the graph: the first question costs a pass, the others nothing.
 * Therefore not to be asked from several threads at once.
 *
 * All rules are one: an operation takes each argument plainly (what is linear in the argument
 * is linear in the result) or bent (everything that is uncertain in it is curved), or not at
 * all; and an operation that multiplies makes curved what two arguments share.
 *
 * Invariant: the two sets of a node have no input in common. */
#include "graph/diagram.h"
#include "graph/ops.h"
#include "graph/sets.h"

#include <string.h>

/* How inputs enter a node: numbers of sets. */
struct entry {
    uint32_t linear;
    uint32_t curved : 31;
    uint32_t bends : 1; /* see graph_bends */
};

enum manner { IGNORED, PLAIN, BENT };

/* An uncertain argument, and how it is taken. */
struct part {
    struct entry entry;
    enum manner manner;
};

/* What two parts gave: a place for each pair that the newest takes. */
struct memory {
    bool known, disjoint;
    struct part two[2];
    struct entry result;
};

enum { MEMORIES = 1 << 12 };

struct degrees {
    struct sets sets;
    ARRAY(struct entry) entry_of;   /* by node */
    ARRAY(uint64_t) gathered;       /* scratch: 2 input + 1 where it is curved */
    ARRAY(uint32_t) linear, curved; /* scratch */
    struct memory *memory;          /* MEMORIES of them */
    ARRAY(bool) occurs;             /* scratch: by variable of a diagram */
};

/* ---- lists ---- */

static void sift(uint64_t *at, size_t root, size_t n)
{
    for (size_t child; (child = 2 * root + 1) < n; root = child) {
        if (child + 1 < n && at[child] < at[child + 1])
            child++;
        if (at[root] >= at[child])
            return;
        uint64_t t = at[root];
        at[root] = at[child];
        at[child] = t;
    }
}

static bool is_rising(const uint64_t *at, size_t n)
{
    for (size_t i = 1; i < n; i++)
        if (at[i - 1] > at[i])
            return false;
    return true;
}

/* Heap sort, where there is something to sort. */
static void sort(uint64_t *at, size_t n)
{
    if (is_rising(at, n))
        return;
    for (size_t i = n / 2; i-- > 0;)
        sift(at, i, n);
    for (size_t end = n; end-- > 1;) {
        uint64_t t = at[0];
        at[0] = at[end];
        at[end] = t;
        sift(at, 0, end);
    }
}

static void gather_set(struct degrees *d, uint32_t set, bool curved)
{
    size_t n;
    const uint32_t *at = sets_members(&d->sets, set, &n);
    array_reserve(d->sets.arena, &d->gathered, n);
    for (size_t i = 0; i < n; i++)
        d->gathered.at[d->gathered.n++] = 2 * (uint64_t)at[i] + curved;
}

/* The sets of what was gathered: an input is curved where it is so once, or, when `disjoint`
 * is asked for, where it comes from two arguments. True when one is curved for that. */
static bool settle(struct degrees *d, bool disjoint, struct entry *e)
{
    sort(d->gathered.at, d->gathered.n);
    d->linear.n = d->curved.n = 0;
    bool shared = false;
    for (size_t i = 0, end; i < d->gathered.n; i = end) {
        uint32_t input = (uint32_t)(d->gathered.at[i] >> 1);
        for (end = i; end < d->gathered.n && d->gathered.at[end] >> 1 == input;)
            end++;
        bool twice = disjoint && end - i > 1;
        if (twice || d->gathered.at[end - 1] & 1)
            *array_push(d->sets.arena, &d->curved) = input;
        else
            *array_push(d->sets.arena, &d->linear) = input;
        shared = shared || twice;
    }
    e->linear = sets_number(&d->sets, d->linear.at, d->linear.n);
    e->curved = sets_number(&d->sets, d->curved.at, d->curved.n) & INT32_MAX;
    return shared;
}

/* ---- rules ---- */

static bool is_certain(struct entry e)
{
    return e.linear == 0 && e.curved == 0;
}

/* Which variables occur in the diagram of node n, in d->occurs. */
static void find_occurring(struct degrees *d, const struct graph *g, node_id n)
{
    size_t count = graph_at(g, n)->n;
    const struct diagram *diagram = graph_diagram_of(g, n);
    d->occurs.n = 0;
    array_reserve(d->sets.arena, &d->occurs, count);
    if (count)
        memset(d->occurs.at, 0, count * sizeof *d->occurs.at);
    for (size_t i = 0; i < diagram->n_nodes; i++)
        d->occurs.at[diagram->nodes[i].variable] = true;
}

/* How the rule takes argument i. The order of COURSE: standing, rate, ending, left, unreset. */
static enum manner manner_of(const struct degrees *d, const struct graph *g, node_id n, size_t i)
{
    const struct graph_node *node = graph_at(g, n);
    switch (op_rule(node->op)->degree) {
    case DEGREE_LEAF:
    case DEGREE_UNION: return PLAIN;
    case DEGREE_PRODUCT: return node->op != OP_DIAGRAM || d->occurs.at[i] ? PLAIN : IGNORED;
    case DEGREE_QUOTIENT: return i == 0 ? PLAIN : BENT;
    case DEGREE_POWER: return graph_at(g, graph_args(g, n)[1])->constant == 1 ? PLAIN : BENT;
    case DEGREE_CHOICE: return i == 0 ? BENT : PLAIN;
    case DEGREE_COURSE: return i == 0 || i == 3 ? PLAIN : BENT;
    case DEGREE_HELD: return IGNORED;
    case DEGREE_CURVED:
    case DEGREE_MISSING: break;
    }
    return BENT;
}

static bool multiplies(enum degree_rule rule)
{
    return rule == DEGREE_PRODUCT || rule == DEGREE_COURSE;
}

/* Whether the argument alone makes the node bend. For a diagram a course is more than its value:
 * averages of it over time are curved in what it is curved in. */
static bool bends_by(const struct graph *g, node_id n, node_id arg, enum manner manner,
                     struct entry e)
{
    if (manner == BENT)
        return true;
    return graph_at(g, n)->op == OP_DIAGRAM && graph_at(g, arg)->op == OP_COURSE && e.curved;
}

/* Those of a node that matter, in order; what repeats the one before it in a sum, as most do, is
 * left out. The first two are kept and gathered only when there is a third. */
struct parts {
    size_t n;
    struct part first[2], last;
};

static void gather(struct degrees *d, struct part p)
{
    gather_set(d, p.entry.linear, p.manner == BENT);
    gather_set(d, p.entry.curved, true);
}

static void gather_first(struct degrees *d, const struct parts *p)
{
    gather(d, p->first[0]);
    gather(d, p->first[1]);
}

static void add_part(struct degrees *d, struct parts *p, struct part part)
{
    if (p->n == 2)
        gather_first(d, p);
    if (p->n < 2)
        p->first[p->n] = part;
    else
        gather(d, part);
    p->n++;
    p->last = part;
}

static bool equal_sets(struct entry a, struct entry b)
{
    return a.linear == b.linear && a.curved == b.curved;
}

static bool repeats(const struct parts *p, struct part part)
{
    return p->n && (p->last.manner == BENT || part.manner == PLAIN) &&
           equal_sets(part.entry, p->last.entry);
}

/* Both sets of an entry as one. */
static uint32_t whole_of(struct degrees *d, struct entry e)
{
    if (e.linear == 0 || e.curved == 0)
        return e.linear + e.curved;
    d->gathered.n = 0;
    gather(d, (struct part){e, BENT});
    settle(d, false, &e);
    return e.curved;
}

/* The result of one part. */
static struct entry entry_of_one(struct degrees *d, struct part p)
{
    if (p.manner == PLAIN)
        return (struct entry){.linear = p.entry.linear, .curved = p.entry.curved};
    return (struct entry){.curved = whole_of(d, p.entry) & INT32_MAX};
}

/* The result of two parts, out of the memory where it is there: few pairs occur often. */
static struct entry entry_of_two(struct degrees *d, const struct part *two, bool disjoint)
{
    const struct part *a = &two[0], *b = &two[1];
    uint64_t h = a->entry.linear | (uint64_t)b->entry.linear << 32;
    h = (h ^ a->entry.curved) * UINT64_C(0x9E3779B97F4A7C15) ^ b->entry.curved;
    h = h * UINT64_C(0x9E3779B97F4A7C15) >> 32;
    struct memory *m = &d->memory[h % MEMORIES];
    bool known = m->known && m->disjoint == disjoint && m->two[0].manner == a->manner &&
                 m->two[1].manner == b->manner && equal_sets(m->two[0].entry, a->entry) &&
                 equal_sets(m->two[1].entry, b->entry);
    if (known)
        return m->result;
    gather(d, *a);
    gather(d, *b);
    struct entry result = {0};
    result.bends = settle(d, disjoint, &result);
    *m = (struct memory){.known = true, .disjoint = disjoint, .two = {*a, *b}, .result = result};
    return result;
}

static struct entry entry_of_parts(struct degrees *d, const struct parts *p, bool disjoint)
{
    struct entry result = {0};
    if (p->n == 0)
        return result;
    if (p->n == 1)
        return entry_of_one(d, p->first[0]);
    if (p->n == 2)
        return entry_of_two(d, p->first, disjoint);
    result.bends = settle(d, disjoint, &result);
    return result;
}

static struct entry entry_of_op(struct degrees *d, const struct graph *g, node_id n)
{
    const node_id *args = graph_args(g, n);
    bool disjoint = multiplies(op_rule(graph_at(g, n)->op)->degree), bends = false;
    struct parts p = {0};
    d->gathered.n = 0;
    for (size_t i = 0; i < graph_at(g, n)->n; i++) {
        struct entry e = d->entry_of.at[args[i]];
        enum manner manner = is_certain(e) ? IGNORED : manner_of(d, g, n, i);
        struct part part = {e, manner};
        if (manner == IGNORED)
            continue;
        bends = bends_by(g, n, args[i], manner, e) || bends;
        if (disjoint || !repeats(&p, part))
            add_part(d, &p, part);
    }
    struct entry result = entry_of_parts(d, &p, disjoint);
    result.bends = result.bends || bends;
    return result;
}

static struct entry entry_of_node(struct degrees *d, const struct graph *g, node_id n)
{
    const struct graph_node *node = graph_at(g, n);
    if (node->op == OP_INPUT)
        return (struct entry){.linear = sets_number(&d->sets, &node->extra, 1)};
    if (node->op == OP_DIAGRAM)
        find_occurring(d, g, n);
    return entry_of_op(d, g, n);
}

/* ---- questions ---- */

static struct degrees *degrees_of(const struct graph *g)
{
    struct degrees **kept = graph_degrees(g);
    if (*kept)
        return *kept;
    struct degrees *d = NEW(graph_arena(g), struct degrees);
    sets_init(&d->sets, graph_arena(g));
    d->memory = NEW_ARRAY(graph_arena(g), MEMORIES, struct memory);
    return *kept = d;
}

static struct entry entry_at(const struct graph *g, node_id root)
{
    struct degrees *d = degrees_of(g);
    while (d->entry_of.n <= root) {
        struct entry e = entry_of_node(d, g, (node_id)d->entry_of.n);
        *array_push(d->sets.arena, &d->entry_of) = e;
    }
    return d->entry_of.at[root];
}

int graph_degree(const struct graph *g, node_id root)
{
    struct entry e = entry_at(g, root);
    return e.curved ? 2 : e.linear > 0;
}

const uint32_t *graph_curved(const struct graph *g, node_id root, size_t *n)
{
    struct entry e = entry_at(g, root);
    return sets_members(&degrees_of(g)->sets, e.curved, n);
}

const uint32_t *graph_uncertain(const struct graph *g, node_id root, size_t *n)
{
    struct entry e = entry_at(g, root);
    struct degrees *d = degrees_of(g);
    return sets_members(&d->sets, whole_of(d, e), n);
}

bool graph_bends(const struct graph *g, node_id root)
{
    return entry_at(g, root).bends;
}
