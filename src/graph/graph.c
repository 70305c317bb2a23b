/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The graph's storage and its building: nodes and arguments in two growing arrays,
 * sections as ranges of nodes, one table to find equal nodes of the open section.
 *
 * Owns the arrays in the caller's arena; diagrams are borrowed. Invariants: an
 * argument has a smaller number than its node; nodes and arguments never change, so
 * a pointer that was handed out before the arrays grew still reads the same; the
 * table's active part is a power of two, at least twice the nodes of the section,
 * and is cleared when a section begins, so a small section costs little. */
#include "graph/diagram.h"
#include "graph/ops.h"

#include <assert.h>
#include <math.h>
#include <string.h>

enum { FIRST_SLOTS = 64 };

struct section {
    node_id first;
    uint32_t count, tag;
};

/* A table of open addressing: index + 1, or 0; `active` is a power of two. */
struct slots {
    uint32_t *at;
    size_t cap, active;
};

struct graph {
    struct arena *arena;
    ARRAY(struct graph_node) nodes;
    ARRAY(node_id) args;
    ARRAY(struct dim) dims; /* distinct */
    ARRAY(const struct diagram *) diagrams; /* distinct */
    ARRAY(struct section) sections;
    bool open;
    struct slots equal;    /* nodes of the open section */
    struct slots diagram;  /* all diagrams */
    struct degrees *degrees;
};

/* ---- tables ---- */

static void slots_clear(struct arena *a, struct slots *s, size_t active)
{
    if (active > s->cap) {
        s->at = NEW_ARRAY(a, active, uint32_t);
        s->cap = active;
    } else {
        memset(s->at, 0, active * sizeof *s->at);
    }
    s->active = active;
}

/* The first free slot for a hash. */
static uint32_t *slots_free(struct slots *s, uint64_t hash)
{
    size_t i = hash & (s->active - 1);
    while (s->at[i])
        i = (i + 1) & (s->active - 1);
    return &s->at[i];
}

static uint64_t mix(uint64_t h, uint64_t x)
{
    h = (h ^ x) * UINT64_C(0x9E3779B97F4A7C15);
    return h ^ h >> 32;
}

static uint64_t bits(double x)
{
    uint64_t b;
    memcpy(&b, &x, sizeof b);
    return b;
}

static uint64_t node_hash(const struct graph_node *n, const node_id *args)
{
    uint64_t h = mix(n->op | (uint64_t)n->dim << 16 | (uint64_t)n->n << 32, n->extra);
    if (n->op == OP_CONST || n->op == OP_INPUT)
        h = mix(h, bits(n->constant));
    for (uint32_t i = 0; i < n->n; i++)
        h = mix(h, args[i]);
    return h ^ h >> 29;
}

static bool node_equal(const struct graph *g, const struct graph_node *m,
                       const struct graph_node *n, const node_id *args)
{
    return m->op == n->op && m->dim == n->dim && m->n == n->n && m->extra == n->extra &&
           bits(m->constant) == bits(n->constant) &&
           (n->n == 0 || memcmp(g->args.at + m->first, args, n->n * sizeof *args) == 0);
}

/* ---- graph and sections ---- */

struct graph *graph_new(struct arena *a)
{
    struct graph *g = NEW(a, struct graph);
    g->arena = a;
    array_reserve(a, &g->args, 1); /* never NULL, so that offsets into it are defined */
    slots_clear(a, &g->diagram, FIRST_SLOTS);
    return g;
}

struct arena *graph_arena(const struct graph *g)
{
    return g->arena;
}

struct degrees **graph_degrees(const struct graph *g)
{
    /* What is found out about an immutable node does not change the graph. */
    return (struct degrees **)&g->degrees;
}

section_id graph_section_begin(struct graph *g, uint32_t tag)
{
    assert(!g->open);
    g->open = true;
    *array_push(g->arena, &g->sections) =
        (struct section){.first = (node_id)g->nodes.n, .tag = tag};
    slots_clear(g->arena, &g->equal, FIRST_SLOTS);
    return (section_id)(g->sections.n - 1);
}

void graph_section_end(struct graph *g)
{
    assert(g->open);
    g->open = false;
}

size_t graph_sections(const struct graph *g)
{
    return g->sections.n;
}

void graph_section(const struct graph *g, section_id s, node_id *first, size_t *count,
                   uint32_t *tag)
{
    assert(s < g->sections.n);
    *first = g->sections.at[s].first;
    *count = g->sections.at[s].count;
    *tag = g->sections.at[s].tag;
}

/* The last section that begins at or before the node (empty ones have no node). */
section_id graph_section_of(const struct graph *g, node_id n)
{
    assert(n < g->nodes.n);
    size_t low = 0, high = g->sections.n;
    while (high - low > 1) {
        size_t middle = low + (high - low) / 2;
        if (g->sections.at[middle].first <= n)
            low = middle;
        else
            high = middle;
    }
    return (section_id)low;
}

/* ---- building ---- */

static uint16_t dim_index(struct graph *g, struct dim d)
{
    for (size_t i = 0; i < g->dims.n; i++)
        if (memcmp(&g->dims.at[i], &d, sizeof d) == 0)
            return (uint16_t)i;
    assert(g->dims.n <= UINT16_MAX);
    *array_push(g->arena, &g->dims) = d;
    return (uint16_t)(g->dims.n - 1);
}

static void grow_table(struct graph *g)
{
    const struct section *s = array_last(&g->sections);
    slots_clear(g->arena, &g->equal, 2 * g->equal.active);
    for (node_id i = s->first; i < g->nodes.n; i++) {
        const struct graph_node *n = &g->nodes.at[i];
        *slots_free(&g->equal, node_hash(n, g->args.at + n->first)) = i + 1;
    }
}

static node_id append(struct graph *g, struct graph_node n, const node_id *args)
{
    assert(g->nodes.n < NODE_NONE - 1 && g->args.n <= UINT32_MAX - n.n);
    array_reserve(g->arena, &g->args, n.n);
    n.first = (uint32_t)g->args.n;
    if (n.n)
        memcpy(g->args.at + g->args.n, args, n.n * sizeof *args);
    g->args.n += n.n;
    *array_push(g->arena, &g->nodes) = n;
    array_last(&g->sections)->count++;
    return (node_id)(g->nodes.n - 1);
}

/* The node of the open section that equals n, made when there is none. */
static node_id intern(struct graph *g, struct graph_node n, const node_id *args)
{
    assert(g->open);
    if (2 * (size_t)(array_last(&g->sections)->count + 1) > g->equal.active)
        grow_table(g);
    size_t mask = g->equal.active - 1, i = node_hash(&n, args) & mask;
    for (; g->equal.at[i]; i = (i + 1) & mask) {
        node_id m = g->equal.at[i] - 1;
        if (node_equal(g, &g->nodes.at[m], &n, args))
            return m;
    }
    node_id made = append(g, n, args);
    g->equal.at[i] = made + 1;
    return made;
}

node_id graph_const(struct graph *g, double value, struct dim dim)
{
    return intern(g, (struct graph_node){.op = OP_CONST, .dim = dim_index(g, dim),
                                         .constant = value}, NULL);
}

node_id graph_input(struct graph *g, uint32_t input, double mean, struct dim dim)
{
    return intern(g, (struct graph_node){.op = OP_INPUT, .dim = dim_index(g, dim),
                                         .extra = input, .constant = mean}, NULL);
}

/* The dimension that the unit rule gives, everything the caller must keep asserted. */
static struct dim checked_dim(const struct graph *g, enum graph_op op, size_t n,
                              const node_id *args)
{
    const struct graph_op_info *info = graph_op_info(op);
    assert(g->open && n >= info->least && (info->most == 255 || n <= info->most));
    for (size_t i = 0; i < n; i++)
        assert(args[i] < g->nodes.n &&
               (op == OP_PICK || g->nodes.at[args[i]].op != OP_DIAGRAM));
    struct dim dim = {{0}};
    bool fits = op_rule(op)->unit(g, n, args, &dim);
    assert(fits);
    (void)info, (void)fits;
    return dim;
}

node_id graph_op(struct graph *g, enum graph_op op, size_t n, const node_id *args)
{
    assert(op < OP_COUNT && op_rule(op)->point);
    struct dim dim = checked_dim(g, op, n, args);
    return intern(g, (struct graph_node){.op = (uint16_t)op, .dim = dim_index(g, dim),
                                         .n = (uint32_t)n}, args);
}

node_id graph_apart(struct graph *g, node_id n, uint32_t number)
{
    struct graph_node copy = *graph_at(g, n);
    assert(g->open && number > 0);
    bool is_plain = copy.op != OP_INPUT && copy.op != OP_DIAGRAM && copy.op != OP_PICK;
    if (!is_plain || n < array_last(&g->sections)->first)
        return n;
    copy.extra = number;
    return intern(g, copy, g->args.at + copy.first);
}

node_id graph_op1(struct graph *g, enum graph_op op, node_id x)
{
    return graph_op(g, op, 1, &x);
}

node_id graph_op2(struct graph *g, enum graph_op op, node_id x, node_id y)
{
    return graph_op(g, op, 2, (node_id[]){x, y});
}

node_id graph_annuity(struct graph *g, node_id rate, node_id from, node_id to)
{
    return graph_op(g, OP_ANNUITY, 3, (node_id[]){rate, from, to});
}

/* ---- diagrams ---- */

static void grow_diagrams(struct graph *g)
{
    slots_clear(g->arena, &g->diagram, 2 * g->diagram.active);
    for (size_t i = 0; i < g->diagrams.n; i++)
        *slots_free(&g->diagram, g->diagrams.at[i]->hash) = (uint32_t)i + 1;
}

/* The number of a diagram; equal ones have one number. */
static uint32_t diagram_index(struct graph *g, const struct diagram *d)
{
    if (2 * (g->diagrams.n + 1) > g->diagram.active)
        grow_diagrams(g);
    size_t mask = g->diagram.active - 1, i = d->hash & mask;
    for (; g->diagram.at[i]; i = (i + 1) & mask)
        if (diagram_equal(g->diagrams.at[g->diagram.at[i] - 1], d))
            return g->diagram.at[i] - 1;
    *array_push(g->arena, &g->diagrams) = d;
    g->diagram.at[i] = (uint32_t)g->diagrams.n;
    return (uint32_t)g->diagrams.n - 1;
}

node_id graph_diagram(struct graph *g, const struct diagram *d, size_t n, const node_id *args)
{
    assert(n >= d->n_variables);
    struct dim dim = checked_dim(g, OP_DIAGRAM, n, args);
    return intern(g, (struct graph_node){.op = OP_DIAGRAM, .dim = dim_index(g, dim),
                                         .n = (uint32_t)n, .extra = diagram_index(g, d)}, args);
}

node_id graph_pick(struct graph *g, node_id diagram, uint32_t root)
{
    struct dim dim = checked_dim(g, OP_PICK, 1, &diagram);
    assert(root < graph_diagram_of(g, diagram)->n_roots);
    return intern(g, (struct graph_node){.op = OP_PICK, .dim = dim_index(g, dim), .n = 1,
                                         .extra = root}, &diagram);
}

/* ---- reading ---- */

size_t graph_size(const struct graph *g)
{
    return g->nodes.n;
}

const struct graph_node *graph_at(const struct graph *g, node_id n)
{
    assert(n < g->nodes.n);
    return &g->nodes.at[n];
}

const node_id *graph_args(const struct graph *g, node_id n)
{
    return g->args.at + graph_at(g, n)->first;
}

struct dim graph_dim(const struct graph *g, node_id n)
{
    return g->dims.at[graph_at(g, n)->dim];
}

const struct diagram *graph_diagram_of(const struct graph *g, node_id n)
{
    assert(graph_at(g, n)->op == OP_DIAGRAM);
    return g->diagrams.at[graph_at(g, n)->extra];
}
