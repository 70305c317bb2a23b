/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The graph's storage and its building: nodes and arguments in two growing arrays,
 * sections as ranges of nodes, one table to find equal nodes of the open section.
 *
 * What does not fit into a node (the years of YEARS, the times of COURSE, the flows of a CHAIN,
 * the windows of a DIAGRAM) is a table beside them, of which equal ones are one, found by a list of
 * numbers that says all about it.
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

/* `key`: its kind and everything in it. */
struct table {
    size_t n;
    const double *key;
    const void *is; /* struct years, course, chain or windows */
};

struct graph {
    struct arena *arena;
    ARRAY(struct graph_node) nodes;
    ARRAY(node_id) args;
    ARRAY(struct dim) dims; /* distinct */
    ARRAY(const struct diagram *) diagrams; /* distinct */
    ARRAY(struct table) tables;             /* distinct */
    ARRAY(double) key;                      /* scratch: of a table */
    ARRAY(struct section) sections;
    bool open;
    struct slots equal;    /* nodes of the open section */
    struct slots diagram;  /* all diagrams */
    struct slots table;    /* all tables */
    struct degrees *degrees;
};

/* ---- finding what is equal ---- */

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
    h = mix(h, n->table);
    for (uint32_t i = 0; i < n->n; i++)
        h = mix(h, args[i]);
    return h ^ h >> 29;
}

static bool node_equal(const struct graph *g, const struct graph_node *m,
                       const struct graph_node *n, const node_id *args)
{
    return m->op == n->op && m->dim == n->dim && m->n == n->n && m->extra == n->extra &&
           m->table == n->table &&
           (n->n == 0 || memcmp(g->args.at + m->first, args, n->n * sizeof *args) == 0);
}

/* ---- graph and sections ---- */

struct graph *graph_new(struct arena *a)
{
    struct graph *g = NEW(a, struct graph);
    g->arena = a;
    array_reserve(a, &g->args, 1); /* never NULL, so that offsets into it are defined */
    slots_clear(a, &g->diagram, FIRST_SLOTS);
    slots_clear(a, &g->table, FIRST_SLOTS);
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

/* ---- tables ---- */

/* Room for a key that is looked up. */
static double *key_room(struct graph *g, size_t n)
{
    g->key.n = 0;
    array_reserve(g->arena, &g->key, n);
    return g->key.at;
}

static uint64_t key_hash(size_t n, const double *key)
{
    uint64_t h = n;
    for (size_t i = 0; i < n; i++)
        h = mix(h, bits(key[i]));
    return h ^ h >> 29;
}

static void grow_tables(struct graph *g)
{
    slots_clear(g->arena, &g->table, 2 * g->table.active);
    for (size_t i = 0; i < g->tables.n; i++)
        *slots_free(&g->table, key_hash(g->tables.at[i].n, g->tables.at[i].key)) = (uint32_t)i + 1;
}

/* The number, from 1, of the table with this key; a new one `is` nothing yet. */
static uint64_t table_number(struct graph *g, size_t n, const double *key)
{
    if (2 * (g->tables.n + 1) > g->table.active)
        grow_tables(g);
    size_t mask = g->table.active - 1, i = key_hash(n, key) & mask;
    for (; g->table.at[i]; i = (i + 1) & mask) {
        const struct table *t = &g->tables.at[g->table.at[i] - 1];
        if (t->n == n && memcmp(t->key, key, n * sizeof *key) == 0)
            return g->table.at[i];
    }
    const double *kept = arena_copy(g->arena, key, n * sizeof *key);
    *array_push(g->arena, &g->tables) = (struct table){.n = n, .key = kept};
    return g->table.at[i] = (uint32_t)g->tables.n;
}

static const void *table_of(const struct graph *g, node_id n, enum graph_op op)
{
    const struct graph_node *node = graph_at(g, n);
    assert(node->op == op && node->table);
    (void)op;
    return g->tables.at[node->table - 1].is;
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

/* Behind all beginnings, and no complement of what changes. */
static bool windows_fit(const struct graph *g, size_t n, const node_id *args,
                        const struct windows *w)
{
    for (size_t k = 0; k < w->n; k++)
        for (size_t i = 0; i < n; i++) {
            const struct graph_node *arg = graph_at(g, args[i]);
            const struct course *c = arg->op == OP_COURSE ? graph_course_of(g, args[i]) : NULL;
            if (c && (w->at[k].from < c->from || w->at[k].from < c->born))
                return false;
            if (arg->op == OP_COMPLEMENT && graph_at(g, *graph_args(g, args[i]))->op == OP_COURSE)
                return false;
        }
    return true;
}

static uint64_t windows_table(struct graph *g, const struct windows *w)
{
    size_t n = 1 + 2 * w->n;
    double *key = key_room(g, n);
    key[0] = OP_DIAGRAM;
    for (size_t k = 0; k < w->n; k++) {
        assert(w->at[k].from < w->at[k].to && isfinite(w->at[k].to - w->at[k].from));
        key[1 + 2 * k] = w->at[k].from;
        key[2 + 2 * k] = w->at[k].to;
    }
    uint64_t number = table_number(g, n, key);
    struct table *t = &g->tables.at[number - 1];
    if (!t->is) {
        struct windows *kept = NEW(g->arena, struct windows);
        *kept = (struct windows){w->n, arena_copy(g->arena, w->at, w->n * sizeof *w->at)};
        t->is = kept;
    }
    return number;
}

node_id graph_diagram_over(struct graph *g, const struct diagram *d, size_t n, const node_id *args,
                           const struct windows *w)
{
    if (!w || w->n == 0)
        return graph_diagram(g, d, n, args);
    assert(n >= d->n_variables);
    struct dim dim = checked_dim(g, OP_DIAGRAM, n, args);
    bool fits = windows_fit(g, n, args, w);
    assert(fits);
    (void)fits;
    return intern(g, (struct graph_node){.op = OP_DIAGRAM, .dim = dim_index(g, dim),
                                         .n = (uint32_t)n, .extra = diagram_index(g, d),
                                         .table = windows_table(g, w)}, args);
}

node_id graph_pick(struct graph *g, node_id diagram, uint32_t root)
{
    return graph_pick_in(g, diagram, 0, root);
}

node_id graph_pick_in(struct graph *g, node_id diagram, uint32_t window, uint32_t root)
{
    struct dim dim = checked_dim(g, OP_PICK, 1, &diagram);
    size_t n_roots = graph_diagram_of(g, diagram)->n_roots;
    size_t n_windows = graph_windows_of(g, diagram).n;
    assert(root < n_roots && window < (n_windows ? n_windows : 1));
    assert((uint64_t)window * n_roots + root < UINT32_MAX);
    (void)n_windows;
    uint32_t place = (uint32_t)(window * n_roots + root);
    return intern(g, (struct graph_node){.op = OP_PICK, .dim = dim_index(g, dim), .n = 1,
                                         .extra = place}, &diagram);
}

/* ---- years, courses and chains ---- */

static bool years_fit(const struct years *y, size_t n)
{
    if (!(y->from <= y->to && fabs(y->from) <= 0x1p53 && fabs(y->to) <= 0x1p53))
        return false;
    double touched = y->from < y->to ? ceil(y->to) - floor(y->from) : 0;
    for (size_t i = 0; i < y->n_years; i++)
        if (y->of_year[i] >= n)
            return false;
    return (double)y->n_years == touched;
}

static uint64_t years_table(struct graph *g, const struct years *y)
{
    size_t n = 3 + y->n_years;
    double *key = key_room(g, n);
    key[0] = OP_YEARS, key[1] = y->from, key[2] = y->to;
    for (size_t i = 0; i < y->n_years; i++)
        key[3 + i] = y->of_year[i];
    uint64_t number = table_number(g, n, key);
    struct table *t = &g->tables.at[number - 1];
    if (!t->is) {
        struct years *kept = NEW(g->arena, struct years);
        *kept = *y;
        kept->of_year = arena_copy(g->arena, y->of_year, y->n_years * sizeof *y->of_year);
        t->is = kept;
    }
    return number;
}

node_id graph_years(struct graph *g, node_id rate, size_t n, const node_id *values,
                    const struct years *y)
{
    bool fits = years_fit(y, n);
    assert(fits);
    (void)fits;
    node_id *args = NEW_ARRAY(g->arena, n + 1, node_id);
    args[0] = rate;
    memcpy(args + 1, values, n * sizeof *values);
    struct dim dim = checked_dim(g, OP_YEARS, n + 1, args);
    return intern(g, (struct graph_node){.op = OP_YEARS, .dim = dim_index(g, dim),
                                         .n = (uint32_t)n + 1, .table = years_table(g, y)}, args);
}

static bool course_fits(const struct course *c)
{
    bool is_reset = c->first < INFINITY;
    return isfinite(c->from) && isfinite(c->born) && c->from <= c->first &&
           (!is_reset || (c->every > 0 && isfinite(c->every)));
}

static uint64_t course_table(struct graph *g, const struct course *c)
{
    double every = c->first < INFINITY ? c->every : INFINITY;
    double key[] = {OP_COURSE, c->from, c->first, every, c->born, c->fresh};
    uint64_t number = table_number(g, sizeof key / sizeof *key, key);
    struct table *t = &g->tables.at[number - 1];
    if (!t->is) {
        struct course *kept = NEW(g->arena, struct course);
        *kept = *c;
        kept->every = every;
        t->is = kept;
    }
    return number;
}

node_id graph_course(struct graph *g, const struct course *c, const node_id args[5])
{
    bool fits = course_fits(c);
    assert(fits);
    (void)fits;
    struct dim dim = checked_dim(g, OP_COURSE, 5, args);
    return intern(g, (struct graph_node){.op = OP_COURSE, .dim = dim_index(g, dim), .n = 5,
                                         .table = course_table(g, c)}, args);
}

static bool chain_fits(const struct chain *c)
{
    bool has_time = c->years >= 0 && isfinite(c->years) && (c->years > 0 || !c->mean);
    if (!has_time || c->n_states > CHAIN_MOST_STATES || c->n_flows > CHAIN_MOST_FLOWS ||
        c->start >= c->n_states || c->end >= c->n_states)
        return false;
    for (uint32_t f = 0; f < c->n_flows; f++)
        if (c->from[f] >= c->n_states || c->to[f] >= c->n_states || c->from[f] == c->to[f])
            return false;
    return true;
}

static uint64_t chain_table(struct graph *g, const struct chain *c)
{
    enum { HEAD = 6 };
    size_t n = HEAD + 2 * (size_t)c->n_flows;
    double *key = key_room(g, n);
    key[0] = OP_CHAIN, key[1] = c->n_states, key[2] = c->start, key[3] = c->end;
    key[4] = c->mean, key[5] = c->years + 0.0; /* -0 is 0 */
    for (uint32_t f = 0; f < c->n_flows; f++)
        key[HEAD + 2 * f] = c->from[f], key[HEAD + 2 * f + 1] = c->to[f];
    uint64_t number = table_number(g, n, key);
    struct table *t = &g->tables.at[number - 1];
    if (!t->is) {
        struct chain *kept = NEW(g->arena, struct chain);
        *kept = *c;
        kept->from = arena_copy(g->arena, c->from, c->n_flows * sizeof *c->from);
        kept->to = arena_copy(g->arena, c->to, c->n_flows * sizeof *c->to);
        t->is = kept;
    }
    return number;
}

node_id graph_chain(struct graph *g, const struct chain *c, const node_id *args)
{
    bool fits = chain_fits(c);
    assert(fits);
    (void)fits;
    struct dim dim = checked_dim(g, OP_CHAIN, c->n_flows, args);
    return intern(g, (struct graph_node){.op = OP_CHAIN, .dim = dim_index(g, dim),
                                         .n = c->n_flows, .table = chain_table(g, c)}, args);
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

struct windows graph_windows_of(const struct graph *g, node_id diagram)
{
    if (graph_at(g, diagram)->table == 0)
        return (struct windows){0, NULL};
    return *(const struct windows *)table_of(g, diagram, OP_DIAGRAM);
}

void graph_pick_of(const struct graph *g, node_id pick, uint32_t *window, uint32_t *root)
{
    assert(graph_at(g, pick)->op == OP_PICK);
    uint32_t n_roots = (uint32_t)graph_diagram_of(g, *graph_args(g, pick))->n_roots;
    *window = graph_at(g, pick)->extra / n_roots;
    *root = graph_at(g, pick)->extra % n_roots;
}

const struct years *graph_years_of(const struct graph *g, node_id n)
{
    return table_of(g, n, OP_YEARS);
}

const struct course *graph_course_of(const struct graph *g, node_id n)
{
    return table_of(g, n, OP_COURSE);
}

const struct chain *graph_chain_of(const struct graph *g, node_id n)
{
    return table_of(g, n, OP_CHAIN);
}
