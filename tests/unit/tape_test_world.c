/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random graphs of every operation, and lanes by the point rules (tape_test.h). */
#include "tape_test.h"

#include "graph/ops.h"

#include <math.h>
#include <string.h>

static const struct dim number;

static const uint32_t inputs[TAPE_INPUTS] = {0, 1, 2, 3, 4, 5};
const struct tape_inputs tape_all_inputs = {TAPE_INPUTS, inputs, 0, NULL};

void tape_world_open(struct tape_world *w, struct arena *a, uint64_t seed)
{
    *w = (struct tape_world){.arena = a, .g = graph_new(a), .r = random_seed(seed)};
    graph_section_begin(w->g, 0);
    for (uint32_t i = 0; i < TAPE_INPUTS; i++)
        *array_push(a, &w->pool) = graph_input(w->g, i, 0.1 + 0.15 * i, number);
    w->v = eval_new(a, w->g);
    ck_assert_int_eq(eval_point(w->v, NULL, NULL), OHMEN_OK);
}

/* ---- arguments ---- */

static node_id draw_const(struct tape_world *w)
{
    static const double some[] = {0, -0.0, 1, 2, 0.5, -1, 0.25};
    double x = random_index(&w->r, 2) ? random_pick(&w->r, some) : random_uniform(&w->r, -1, 1);
    return graph_const(w->g, x, number);
}

static node_id draw_arg(struct tape_world *w)
{
    if (random_index(&w->r, 5) == 0)
        return draw_const(w);
    return w->pool.at[random_index(&w->r, w->pool.n)];
}

static double known(struct tape_world *w, node_id n)
{
    ck_assert_int_eq(eval_point(w->v, NULL, NULL), OHMEN_OK);
    return w->v->value.at[n];
}

static node_id draw_probability(struct tape_world *w)
{
    for (;;) {
        node_id n = draw_arg(w);
        double p = known(w, n);
        if (p >= 0 && p <= 1)
            return n;
    }
}

static node_id draw_rate(struct tape_world *w)
{
    if (random_index(&w->r, 3) == 0)
        return graph_const(w->g, random_uniform(&w->r, 0, 1), number);
    return w->pool.at[TAPE_NUMBERS + random_index(&w->r, TAPE_RATES)];
}

/* ---- operations with tables ---- */

enum { MOST_ARGS = 9, TRIES = 1000 };

static const struct diagram *draw_diagram(struct tape_world *w, uint32_t n)
{
    struct diagram_builder *b = diagram_builder_new(w->arena);
    bfun f[MOST_ARGS], roots[4];
    for (uint32_t i = 0; i < n; i++)
        f[i] = diagram_variable(b, i);
    roots[0] = diagram_at_least(b, 1 + (uint32_t)random_index(&w->r, n), n, f);
    roots[1] = diagram_not(b, roots[0]);
    roots[2] = diagram_or(b, f[0], diagram_and(b, f[n - 1], roots[1]));
    roots[3] = random_index(&w->r, 2) ? BFUN_TRUE : f[random_index(&w->r, n)];
    return diagram_freeze(w->arena, b, 4, roots);
}

static node_id draw_course(struct tape_world *w)
{
    struct course c = {
        .from = 0, .first = 1, .every = 0.75, .born = 0.25, .fresh = random_index(&w->r, 2)};
    node_id args[COURSE_ARGS];
    for (int i = 0; i < COURSE_ARGS; i++)
        args[i] = draw_rate(w);
    return graph_course(w->g, &c, args);
}

static node_id add_diagram(struct tape_world *w, bool over)
{
    node_id args[MOST_ARGS];
    uint32_t n = 2 + (uint32_t)random_index(&w->r, 5);
    for (uint32_t i = 0; i < n; i++) {
        args[i] = over && i % 2 == 0 ? draw_course(w) : over ? draw_rate(w) : draw_probability(w);
        if (graph_at(w->g, args[i])->op != OP_COURSE && random_index(&w->r, 2))
            args[i] = graph_op1(w->g, OP_COMPLEMENT, args[i]);
    }
    struct windows windows = {2, (struct window[]){{0.5, 1.5}, {1.5, 4}}};
    const struct diagram *d = draw_diagram(w, n);
    node_id diagram =
        over ? graph_diagram_over(w->g, d, n, args, &windows) : graph_diagram(w->g, d, n, args);
    node_id picks[3];
    for (uint32_t k = 0; k < 3; k++)
        picks[k] = graph_pick_in(w->g, diagram, over ? k % 2 : 0, (uint32_t)random_index(&w->r, 4));
    return graph_op(w->g, OP_SUM, 3, picks);
}

static node_id try_years(struct tape_world *w)
{
    static const uint32_t of_year[] = {0, 1, 1, 0, 2};
    struct years y = {0.25, 4.5, 5, of_year};
    node_id args[4];
    double x[4];
    for (int i = 0; i < 4; i++)
        x[i] = known(w, args[i] = draw_arg(w));
    if (!(fabs(years_point(&y, x)) < 50))
        return NODE_NONE;
    return graph_years(w->g, args[0], 3, args + 1, &y);
}

static node_id add_chain(struct tape_world *w)
{
    static const uint32_t from[] = {0, 1, 1, 0}, to[] = {1, 0, 2, 1};
    struct chain c = {3, 4, from, to, 0.75, 0, 0, random_index(&w->r, 2)};
    node_id args[4];
    for (int i = 0; i < 4; i++)
        args[i] = draw_rate(w);
    c.end = (uint32_t)random_index(&w->r, 3);
    return graph_chain(w->g, &c, args);
}

/* ---- the others ---- */

static size_t how_many(struct tape_world *w, enum graph_op op)
{
    const struct graph_op_info *info = graph_op_info(op);
    if (op == OP_LOOKUP)
        return 3 + 2 * random_index(&w->r, 3);
    return info->most == info->least ? info->most : info->least + random_index(&w->r, 7);
}

static node_id try_plain(struct tape_world *w, enum graph_op op)
{
    static const double exponents[] = {1, 2, 0.5, -1, 1.7};
    node_id args[MOST_ARGS];
    double x[MOST_ARGS];
    size_t n = how_many(w, op);
    for (size_t i = 0; i < n; i++)
        args[i] = draw_arg(w);
    if (op == OP_POWER)
        args[1] = graph_const(w->g, random_pick(&w->r, exponents), number);
    for (size_t i = 1; op == OP_LOOKUP && i < n; i += 2)
        args[i] = graph_const(w->g, 0.25 * (double)i, number);
    for (size_t i = 0; i < n; i++)
        x[i] = known(w, args[i]);
    return fabs(graph_point(op, n, x)) < 50 ? graph_op(w->g, op, n, args) : NODE_NONE;
}

static node_id try_add(struct tape_world *w, enum graph_op op)
{
    switch (op) {
    case OP_CONST: return draw_const(w);
    case OP_INPUT: return w->pool.at[random_index(&w->r, TAPE_INPUTS)];
    case OP_YEARS: return try_years(w);
    case OP_COURSE: return add_diagram(w, true);
    case OP_CHAIN: return add_chain(w);
    case OP_DIAGRAM:
    case OP_PICK: return add_diagram(w, false);
    default: return try_plain(w, op);
    }
}

node_id tape_world_add(struct tape_world *w, enum graph_op op)
{
    for (int i = 0; i < TRIES; i++) {
        node_id n = try_add(w, op);
        if (n == NODE_NONE || !(fabs(known(w, n)) < 50))
            continue;
        *array_push(w->arena, &w->pool) = n;
        return n;
    }
    ck_abort_msg("no tame %s", graph_op_info(op)->name);
}

/* ---- lanes ---- */

static double draw_number(struct random *r)
{
    static const double special[] = {0,    -0.0,     1,         -1,        0.5,        2,     NAN,
                                     -NAN, INFINITY, -INFINITY, 0x1p-1074, -0x1p-1040, 1e308, 0.25};
    return random_index(r, 4) ? random_uniform(r, -0.5, 1.5) : random_pick(r, special);
}

static double draw_lane_rate(struct random *r)
{
    static const double special[] = {0, NAN, -1, INFINITY, 1};
    return random_index(r, 8) ? random_uniform(r, 0, 2) : random_pick(r, special);
}

struct tape_lanes tape_lanes_draw(struct tape_world *w, size_t n, size_t n_in)
{
    struct tape_lanes values = {.n = n, .n_in = n_in, .in = NEW_ARRAY(w->arena, n_in, double *)};
    for (size_t i = 0; i < n_in; i++) {
        bool is_rate = i >= TAPE_NUMBERS && i < TAPE_INPUTS;
        values.in[i] = NEW_ARRAY(w->arena, n + 3, double) + 1 + i % 2;
        for (size_t k = 0; k < n; k++)
            values.in[i][k] = is_rate ? draw_lane_rate(&w->r) : draw_number(&w->r);
    }
    return values;
}

bool tape_same(double x, double y)
{
    return (isnan(x) && isnan(y)) || memcmp(&x, &y, sizeof x) == 0;
}

static uint32_t place_of(const uint32_t *list, size_t n, uint32_t what)
{
    for (uint32_t i = 0; i < n; i++)
        if (list[i] == what)
            return i;
    return UINT32_MAX;
}

/* All nodes at one lane, by their numbers; HELD stays. */
static void point_lane(struct tape_world *w, struct eval *v, const struct tape_inputs *in,
                       const struct tape_lanes *values, size_t lane)
{
    for (node_id n = 0; n < v->done; n++) {
        const struct graph_node *node = graph_at(w->g, n);
        uint32_t given = place_of(in->given, in->n_given, n);
        uint32_t input = node->op == OP_INPUT ? place_of(in->inputs, in->n, node->extra) : given;
        if (node->op == OP_HELD && given == UINT32_MAX)
            continue;
        if (given != UINT32_MAX)
            v->value.at[n] = values->in[in->n + given][lane];
        else if (input != UINT32_MAX)
            v->value.at[n] = values->in[input][lane];
        else
            v->value.at[n] = eval_node(v, n, node->op == OP_DIAGRAM ? (size_t)v->value.at[n] : 0);
    }
}

/* want[k]: a row of each root. */
static double **points(struct tape_world *w, const struct tape_inputs *in, size_t n_roots,
                       const node_id *roots, const struct tape_lanes *values)
{
    struct eval *v = eval_new(w->arena, w->g);
    ck_assert_int_eq(eval_point(v, NULL, NULL), OHMEN_OK);
    v->n_replaced = in->n_given;
    v->replaced = in->given;
    double **want = NEW_ARRAY(w->arena, n_roots, double *);
    for (size_t k = 0; k < n_roots; k++)
        want[k] = NEW_ARRAY(w->arena, values->n, double);
    for (size_t lane = 0; lane < values->n; lane++) {
        point_lane(w, v, in, values, lane);
        for (size_t k = 0; k < n_roots; k++)
            want[k][lane] = v->value.at[roots[k]];
    }
    return want;
}

/* ---- comparing ---- */

#define GUARD 1234.5

struct checked {
    struct tape_world *w;
    struct tape *t;
    struct tape_work *work;
    const struct tape_lanes *values;
    size_t n_roots, block;
    const node_id *roots;
    double **want, **out;
};

static void compare(struct checked *c, size_t begin, size_t n)
{
    for (size_t k = 0; k < c->n_roots; k++) {
        for (size_t i = 0; i < n; i++)
            ck_assert_msg(tape_same(c->out[k][i], c->want[k][begin + i]),
                          "root %zu (node %u, %s) lane %zu: %.17g, not %.17g", k,
                          (unsigned)c->roots[k],
                          graph_op_info(graph_at(c->w->g, c->roots[k])->op)->name, begin + i,
                          c->out[k][i], c->want[k][begin + i]);
        ck_assert(c->out[k][n] == GUARD);
    }
}

/* `n` lanes from the first on, in blocks. */
static void run_and_compare(struct checked *c, size_t n)
{
    const double **in = NEW_ARRAY(c->w->arena, c->values->n_in, const double *);
    for (size_t begin = 0; begin == 0 || begin < n; begin += c->block) {
        size_t count = n - begin < c->block ? n - begin : c->block;
        for (size_t i = 0; i < c->values->n_in; i++)
            in[i] = c->values->in[i] + begin;
        for (size_t k = 0; k < c->n_roots; k++)
            c->out[k][count] = GUARD;
        tape_run(c->t, c->work, count, in, c->out);
        compare(c, begin, count);
    }
}

static void check_tape(struct checked *c, const struct tape_inputs *in, enum isa isa,
                       struct tape_how how)
{
    static const size_t sizes[] = {0, 1, 7, 8, 9, 63, 64, 65, 255, 256, 1000};
    struct tape_world *w = c->w;
    size_t asked = c->block;
    c->t = tape_new_as(w->arena, w->v, isa, in, c->n_roots, c->roots, how);
    ck_assert(tape_block(c->t) % 64 == 0 && tape_block(c->t) > 0);
    c->block = asked ? asked : tape_block(c->t);
    c->work = tape_work_new(w->arena, c->t, c->block);
    for (size_t k = 0; k < c->n_roots; k++)
        c->out[k] = NEW_ARRAY(w->arena, c->block + 2, double) + k % 2;
    for (size_t i = 0; !c->values->at_once && i < sizeof sizes / sizeof *sizes; i++)
        if (sizes[i] <= c->values->n)
            run_and_compare(c, sizes[i]);
    if (c->values->at_once)
        run_and_compare(c, c->values->n);
    c->block = asked;
}

void tape_check(struct tape_world *w, const struct tape_inputs *in, size_t n_roots,
                const node_id *roots, const struct tape_lanes *values, size_t block)
{
    static const struct tape_how hows[] = {
        {.fusing = TAPE_FUSED},  {.fusing = TAPE_PAIRS_ONLY},
        {.fusing = TAPE_SINGLE}, {.fusing = TAPE_FUSED, .keeps_slots = true},
        {.by_point = true},
    };
    struct checked c = {
        .w = w, .values = values, .n_roots = n_roots, .roots = roots, .block = block};
    c.want = points(w, in, n_roots, roots, values);
    c.out = NEW_ARRAY(w->arena, n_roots, double *);
    EACH_ISA(isa)
    for (size_t i = 0; i < sizeof hows / sizeof *hows; i++)
        check_tape(&c, in, isa, hows[i]);
}
