/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Making a tape (tape.h): a search from the roots down to what moves finds the nodes, which become
 * steps in the order of their numbers; everything else is a constant. Owns nothing but the tape. */
#include "eval/tape_kernels.h"

#include "eval/knot.h"

#include <assert.h>

enum { BITS = 64 };

/* ---- what the roots reach ---- */

bool tape_is_given(const struct tape_maker *m, node_id n)
{
    return knot_place(m->in->given, m->in->n_given, n) != UINT32_MAX;
}

static bool is_met(const struct tape_maker *m, node_id n)
{
    return m->met[n / BITS] >> n % BITS & 1;
}

static void meet(struct tape_maker *m, node_id n)
{
    if (is_met(m, n))
        return;
    m->met[n / BITS] |= (uint64_t)1 << n % BITS;
    if (graph_at(m->v->g, n)->op != OP_HELD && !tape_is_given(m, n))
        *array_push(m->arena, &m->open) = n;
}

static void reach(struct tape_maker *m, size_t n_roots, const node_id *roots)
{
    const struct graph *g = m->v->g;
    m->met = NEW_ARRAY(m->arena, m->v->done / BITS + 1, uint64_t);
    for (size_t i = 0; i < n_roots; i++)
        meet(m, roots[i]);
    while (m->open.n) {
        node_id n = m->open.at[--m->open.n];
        for (uint32_t i = 0; i < graph_at(g, n)->n; i++)
            meet(m, graph_args(g, n)[i]);
    }
    for (node_id n = 0; n < m->v->done; n++)
        if (m->met[n / BITS] == 0)
            n |= BITS - 1;
        else if (is_met(m, n))
            *array_push(m->arena, &m->reached) =
                (struct tape_reached){.node = n, .operand = TAPE_NONE, .step = TAPE_NONE};
}

struct tape_reached *tape_find(const struct tape_maker *m, node_id n)
{
    size_t low = 0, high = m->reached.n;
    while (high - low > 1) {
        size_t middle = low + (high - low) / 2;
        if (m->reached.at[middle].node <= n)
            low = middle;
        else
            high = middle;
    }
    assert(m->reached.at[low].node == n);
    return &m->reached.at[low];
}

/* ---- what moves, and what of that is needed ---- */

static uint32_t input_of(const struct tape_maker *m, node_id n)
{
    const struct graph_node *node = graph_at(m->v->g, n);
    uint32_t given = knot_place(m->in->given, m->in->n_given, n);
    if (given != UINT32_MAX)
        return (uint32_t)m->in->n + given;
    return node->op == OP_INPUT ? knot_place(m->in->inputs, m->in->n, node->extra) : TAPE_NONE;
}

static bool some_arg_moves(const struct tape_maker *m, node_id n)
{
    const struct graph_node *node = graph_at(m->v->g, n);
    if (node->op == OP_HELD)
        return false;
    for (uint32_t i = 0; i < node->n; i++)
        if (tape_find(m, graph_args(m->v->g, n)[i])->moves)
            return true;
    return false;
}

static void find_moving(struct tape_maker *m)
{
    for (size_t i = 0; i < m->reached.n; i++) {
        struct tape_reached *r = &m->reached.at[i];
        r->operand = input_of(m, r->node);
        r->moves = r->operand != TAPE_NONE || some_arg_moves(m, r->node);
    }
}

static void need(struct tape_maker *m, node_id n)
{
    tape_find(m, n)->is_needed = true;
}

/* A COURSE over windows is not computed itself. */
static void need_of_diagram(struct tape_maker *m, node_id n)
{
    const struct graph *g = m->v->g;
    const node_id *args = graph_args(g, n);
    bool has_windows = graph_windows_of(g, n).n > 0;
    for (uint32_t i = 0; i < graph_diagram_of(g, n)->n_variables; i++) {
        const struct graph_node *arg = graph_at(g, args[i]);
        if (!has_windows || arg->op != OP_COURSE)
            need(m, args[i]);
        else
            for (uint32_t k = 0; k < arg->n; k++)
                need(m, graph_args(g, args[i])[k]);
        if (arg->op == OP_COMPLEMENT && !tape_is_given(m, args[i]))
            need(m, *graph_args(g, args[i]));
    }
}

static void find_needed(struct tape_maker *m, size_t n_roots, const node_id *roots)
{
    const struct graph *g = m->v->g;
    for (size_t i = 0; i < n_roots; i++)
        need(m, roots[i]);
    for (size_t i = m->reached.n; i-- > 0;) {
        struct tape_reached *r = &m->reached.at[i];
        if (!r->is_needed || !r->moves || r->operand != TAPE_NONE)
            continue;
        if (graph_at(g, r->node)->op == OP_DIAGRAM)
            need_of_diagram(m, r->node);
        else
            for (uint32_t k = 0; k < graph_at(g, r->node)->n; k++)
                need(m, graph_args(g, r->node)[k]);
    }
}

/* ---- steps ---- */

uint32_t tape_constant(struct tape_maker *m, double x)
{
    *array_push(m->tape->arena, &m->tape->constants) = x;
    return (uint32_t)(m->tape->constants.n - 1) | TAPE_CONSTANT;
}

uint32_t tape_operand(struct tape_maker *m, node_id n)
{
    struct tape_reached *r = tape_find(m, n);
    if (r->operand == TAPE_NONE && !r->moves)
        r->operand = tape_constant(m, m->v->value.at[n]);
    assert(r->operand != TAPE_NONE);
    return r->operand;
}

static struct tape_step *new_step(struct tape_maker *m, node_id n)
{
    struct tape_step *s = array_push(m->tape->arena, &m->tape->steps);
    *s = (struct tape_step){.run = tape_by_point, .node = n, .operations = 1, .room = TAPE_NONE};
    return s;
}

static void read_node(struct tape_maker *m, struct tape_step *s, node_id n)
{
    *array_push(m->tape->arena, &s->args) = tape_operand(m, n);
}

/* 1 - p where the argument was not made as a complement. */
static void read_complement(struct tape_maker *m, struct tape_step *s, node_id n)
{
    if (graph_at(m->v->g, n)->op == OP_COMPLEMENT && !tape_is_given(m, n))
        read_node(m, s, *graph_args(m->v->g, n));
    else
        *array_push(m->tape->arena, &s->args) = TAPE_NONE;
}

static void add_diagram(struct tape_maker *m, struct tape_reached *r)
{
    const struct diagram *d = graph_diagram_of(m->v->g, r->node);
    const node_id *args = graph_args(m->v->g, r->node);
    r->step = (uint32_t)m->tape->steps.n;
    struct tape_step *s = new_step(m, r->node);
    if (graph_windows_of(m->v->g, r->node).n) {
        tape_average_begin(m, s, r->node);
        return;
    }
    s->run = tape_diagram_by_point;
    for (uint32_t i = 0; i < d->n_variables; i++)
        read_node(m, s, args[i]);
    for (uint32_t i = 0; i < d->n_variables; i++)
        read_complement(m, s, args[i]);
    s->more = d;
}

/* The result of its DIAGRAM, which may have been picked already. */
static void add_pick(struct tape_maker *m, struct tape_reached *r)
{
    const struct graph_node *node = graph_at(m->v->g, r->node);
    struct tape_reached *diagram = tape_find(m, *graph_args(m->v->g, r->node));
    struct tape_step *s = &m->tape->steps.at[diagram->step];
    for (size_t k = 0; k < s->picks.n; k++)
        if (s->picks.at[k] == node->extra) {
            r->operand = s->to.at[k];
            return;
        }
    *array_push(m->tape->arena, &s->picks) = node->extra;
    *array_push(m->tape->arena, &s->to) = r->operand = m->n_values++;
}

static void add_operation(struct tape_maker *m, struct tape_reached *r)
{
    const struct graph_node *node = graph_at(m->v->g, r->node);
    struct tape_step *s = new_step(m, r->node);
    for (uint32_t i = 0; i < node->n; i++)
        read_node(m, s, graph_args(m->v->g, r->node)[i]);
    *array_push(m->tape->arena, &s->to) = r->operand = m->n_values++;
    if (m->how.by_point)
        return;
    tape_kernel *function = tape_function(m, s);
    s->run = function ? function : s->run;
    tape_begin_program(m, s);
}

static void add_steps(struct tape_maker *m)
{
    for (size_t i = 0; i < m->reached.n; i++) {
        struct tape_reached *r = &m->reached.at[i];
        if (!r->is_needed || !r->moves || r->operand != TAPE_NONE)
            continue;
        switch (graph_at(m->v->g, r->node)->op) {
        case OP_DIAGRAM: add_diagram(m, r); break;
        case OP_PICK: add_pick(m, r); break;
        default: add_operation(m, r);
        }
    }
}

static size_t greater(size_t a, size_t b)
{
    return a > b ? a : b;
}

/* What a work space needs. */
static void measure(struct tape *t)
{
    for (size_t i = 0; i < t->steps.n; i++) {
        struct tape_step *s = &t->steps.at[i];
        t->most_args = greater(t->most_args, s->args.n);
        if (s->run == tape_average_run)
            s->room = (uint32_t)t->n_rooms++;
        if (s->run != tape_diagram_by_point)
            continue;
        const struct diagram *d = s->more;
        t->most_at = greater(t->most_at, 4 * (size_t)d->n_variables);
        t->most_room = greater(t->most_room, tape_tile_rows(d) * tape_tile(d) + d->n_roots);
    }
}

struct tape *tape_new_as(struct arena *a, struct eval *v, enum isa isa,
                         const struct tape_inputs *in, size_t n_roots, const node_id *roots,
                         struct tape_how how)
{
    struct tape *t = NEW(a, struct tape);
    struct tape_maker m = {.arena = arena_child(a), .tape = t, .v = v, .in = in, .how = how};
    *t = (struct tape){.arena = a, .g = v->g, .isa = isa, .n_roots = n_roots};
    t->n_in = in->n + in->n_given;
    m.n_values = (uint32_t)t->n_in;
    reach(&m, n_roots, roots);
    find_moving(&m);
    find_needed(&m, n_roots, roots);
    add_steps(&m);
    for (size_t i = 0; i < n_roots; i++)
        *array_push(m.arena, &m.roots) = tape_operand(&m, roots[i]);
    tape_fuse(&m);
    tape_split(&m);
    tape_order(&m);
    tape_place(&m);
    tape_lower(&m);
    measure(t);
    arena_free(m.arena);
    return t;
}

struct tape *tape_new(struct arena *a, struct eval *v, enum isa isa, const struct tape_inputs *in,
                      size_t n_roots, const node_id *roots)
{
    struct tape_how how = {.fusing = TAPE_FUSED};
    return tape_new_as(a, v, isa, in, n_roots, roots, how);
}

struct tape_size tape_size(const struct tape *t)
{
    struct tape_size size = {t->steps.n, t->n_slots, 0};
    for (size_t i = 0; i < t->steps.n; i++)
        size.operations += t->steps.at[i].operations;
    return size;
}
