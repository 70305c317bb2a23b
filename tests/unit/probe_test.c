/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Probes against a fresh evaluation of a graph that is built with the values: random graphs of
 * every operation, diagrams and courses among them, random registers, and a register in time. Bit
 * for bit; and the evaluation is the same before and after. */
#include "eval/probe.h"

#include "decide/weigh.h"
#include "graph/diagram.h"
#include "loaded.h"
#include "random.h"
#include "registers.h"
#include "timed_world.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* ---- the oracle: the graph once more, with constants for what is replaced ---- */

struct copied {
    struct graph *g;
    node_id *map;
    struct eval *v;
};

static node_id copy_node(struct copied *to, const struct graph *g, node_id n)
{
    const struct graph_node *node = graph_at(g, n);
    node_id *args = NEW_ARRAY(arena, node->n, node_id);
    for (uint32_t i = 0; i < node->n; i++)
        args[i] = to->map[graph_args(g, n)[i]];
    struct windows windows;
    uint32_t window, root;
    switch (node->op) {
    case OP_CONST: return graph_const(to->g, node->constant, graph_dim(g, n));
    case OP_INPUT: return graph_input(to->g, node->extra, node->constant, graph_dim(g, n));
    case OP_YEARS: return graph_years(to->g, args[0], node->n - 1, args + 1, graph_years_of(g, n));
    case OP_COURSE: return graph_course(to->g, graph_course_of(g, n), args);
    case OP_CHAIN: return graph_chain(to->g, graph_chain_of(g, n), args);
    case OP_DIAGRAM:
        windows = graph_windows_of(g, n);
        return graph_diagram_over(to->g, graph_diagram_of(g, n), node->n, args, &windows);
    case OP_PICK:
        graph_pick_of(g, n, &window, &root);
        return graph_pick_in(to->g, args[0], window, root);
    default: return graph_op(to->g, node->op, node->n, args);
    }
}

static struct copied copy(const struct graph *g, size_t n, const node_id *nodes, const double *x)
{
    struct copied to = {graph_new(arena), NEW_ARRAY(arena, graph_size(g), node_id), NULL};
    graph_section_begin(to.g, 0);
    for (node_id i = 0; i < graph_size(g); i++) {
        size_t k = 0;
        while (k < n && nodes[k] != i)
            k++;
        to.map[i] = k < n ? graph_const(to.g, x[k], graph_dim(g, i)) : copy_node(&to, g, i);
    }
    graph_section_end(to.g);
    to.v = eval_new(arena, to.g);
    return to;
}

static uint64_t bits(double x)
{
    uint64_t b;
    memcpy(&b, &x, sizeof b);
    return b;
}

static size_t compared, not_finite, linear, curved;

/* At x: the same as the copy, for each target; where the copy is not finite the probe says so,
 * unless what is not finite leads to no target. */
static void compare(const struct graph *g, struct prober *p, size_t n_targets,
                    const node_id *targets, size_t n, const node_id *nodes, const double *x)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    struct copied c = copy(g, n, nodes, x);
    node_id culprit = NODE_NONE;
    bool fine = eval_point(c.v, &culprit, &e) == OHMEN_OK;
    if (!prober_at(p, x)) {
        ck_assert(!fine);
        not_finite++;
        return;
    }
    for (size_t i = 0; i < n_targets; i++) {
        node_id at = c.map[targets[i]];
        if (!fine && at >= culprit)
            continue;
        compared++;
        ck_assert_msg(bits(prober_value(p, targets[i])) == bits(eval_value(c.v, at)),
                      "target %u: %.17g, built anew %.17g", (unsigned)targets[i],
                      prober_value(p, targets[i]), eval_value(c.v, at));
    }
}

/* ---- random graphs ---- */

enum { INPUTS = 6, STEPS = 40, SCALARS = 3 * STEPS + 32 };

struct drawn {
    struct random r;
    struct graph *g;
    size_t n;
    node_id node[SCALARS]; /* scalar, between 0 and 1 or so */
    const struct diagram *diagram;
};

static const struct dim number = {{0}};

static node_id any(struct drawn *d)
{
    return d->node[random_index(&d->r, d->n)];
}

static void push(struct drawn *d, node_id n)
{
    ck_assert_uint_lt(d->n, SCALARS);
    d->node[d->n++] = n;
}

/* Two of three, and the first but not the third. */
static const struct diagram *two_of_three(void)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun f[3], roots[2];
    for (uint32_t i = 0; i < 3; i++)
        f[i] = diagram_variable(b, i);
    roots[0] = diagram_at_least(b, 2, 3, f);
    roots[1] = diagram_and(b, f[0], diagram_not(b, f[2]));
    return diagram_freeze(arena, b, 2, roots);
}

/* A number in 0 .. 1 made of any other. */
static node_id probability(struct drawn *d)
{
    node_id one = graph_const(d->g, 1, number), low = graph_const(d->g, 0, number);
    node_id n = graph_op2(d->g, OP_MAX, low, graph_op2(d->g, OP_MIN, one, any(d)));
    return random_index(&d->r, 2) ? n : graph_op1(d->g, OP_COMPLEMENT, n);
}

static node_id rate(struct drawn *d)
{
    return graph_op2(d->g, OP_MAX, graph_const(d->g, 0, number), any(d));
}

static node_id draw_course(struct drawn *d)
{
    struct course c = {-1, random_uniform(&d->r, 0, 2), random_uniform(&d->r, 0.5, 3), -2, false};
    node_id args[] = {probability(d), rate(d), rate(d), probability(d), rate(d)};
    return graph_course(d->g, &c, args);
}

static void draw_diagram(struct drawn *d)
{
    struct window at[] = {{0, 1}, {1, 3}};
    struct windows w = {random_index(&d->r, 2) ? 2 : 0, at};
    node_id args[3];
    for (size_t i = 0; i < 3; i++)
        args[i] = w.n && random_index(&d->r, 2) ? draw_course(d) : probability(d);
    node_id n = graph_diagram_over(d->g, d->diagram, 3, args, &w);
    push(d, graph_pick_in(d->g, n, w.n ? 1 : 0, 0));
    push(d, graph_pick(d->g, n, 1));
}

static void draw_years(struct drawn *d)
{
    static const uint32_t of_year[] = {0, 1, 0};
    struct years y = {0.5, 2.25, 3, of_year};
    node_id values[] = {any(d), any(d)};
    push(d, graph_years(d->g, rate(d), 2, values, &y));
}

static void draw_chain(struct drawn *d)
{
    static const uint32_t from[] = {0, 1, 1}, to[] = {1, 0, 2};
    struct chain c = {3, 3, from, to, 1.25, 0, 0, random_index(&d->r, 2)};
    node_id args[] = {rate(d), rate(d), rate(d)};
    c.end = (uint32_t)random_index(&d->r, 3);
    push(d, graph_chain(d->g, &c, args));
}

static void draw_step(struct drawn *d)
{
    static const enum graph_op ops[] = {
        OP_ADD,    OP_SUBTRACT,   OP_MULTIPLY, OP_MULTIPLY, OP_DIVIDE,  OP_NEGATE,
        OP_POWER,  OP_COMPLEMENT, OP_SUM,      OP_RATIO,    OP_MIN,     OP_MAX,
        OP_EXP,    OP_HELD,       OP_EITHER,   OP_DIAGRAM,  OP_DIAGRAM, OP_YEARS,
        OP_LOOKUP, OP_COURSE,     OP_SQRT,     OP_LOG,      OP_ANNUITY, OP_CHAIN};
    enum graph_op op = random_pick(&d->r, ops);
    const struct graph_op_info *info = graph_op_info(op);
    node_id args[5];
    for (size_t i = 0; i < 5; i++)
        args[i] = any(d);
    switch (op) {
    case OP_DIAGRAM: draw_diagram(d); return;
    case OP_YEARS: draw_years(d); return;
    case OP_COURSE: push(d, draw_course(d)); return;
    case OP_CHAIN: draw_chain(d); return;
    case OP_POWER: args[1] = graph_const(d->g, random_index(&d->r, 2) ? 2 : 0.5, number); break;
    case OP_LOOKUP:
        args[1] = graph_const(d->g, 0.2, number), args[3] = graph_const(d->g, 0.6, number);
        push(d, graph_op(d->g, op, 5, args));
        return;
    case OP_ANNUITY:
        push(d, graph_annuity(d->g, rate(d), graph_const(d->g, 0.5, number),
                              graph_const(d->g, 7, number)));
        return;
    default: break;
    }
    push(d, graph_op(d->g, op, info->most == 255 ? 3 : info->most, args));
}

static void draw(struct drawn *d, uint64_t seed)
{
    *d = (struct drawn){.r = random_seed(seed), .g = graph_new(arena), .diagram = two_of_three()};
    graph_section_begin(d->g, 0);
    for (uint32_t i = 0; i < INPUTS; i++) {
        double x = random_uniform(&d->r, 0.05, 0.95);
        push(d, i % 2 ? graph_const(d->g, x, number) : graph_input(d->g, i, x, number));
    }
    for (size_t i = 0; i < STEPS; i++)
        draw_step(d);
    graph_section_end(d->g);
}

/* Scalar nodes that a prober takes: no courses. */
static node_id any_scalar(struct drawn *d)
{
    node_id n = any(d);
    while (graph_at(d->g, n)->op == OP_COURSE)
        n = any(d);
    return n;
}

/* Where the prober says that a target is linear, three points lie on a line. */
static void check_line(struct prober *p, node_id target, size_t n, const double *times)
{
    double x[3], y[3];
    if (!prober_is_linear(p)) {
        curved++;
        return;
    }
    for (size_t i = 0; i < 3; i++) {
        for (size_t k = 0; k < n; k++)
            x[k] = times[k] * (0.2 + 0.3 * (double)i);
        if (!prober_at(p, x))
            return;
        y[i] = prober_value(p, target);
    }
    double size = fmax(fabs(y[0]), fabs(y[2]));
    linear++;
    ck_assert_msg(fabs(y[0] - 2 * y[1] + y[2]) <= 1e-9 * size, "%.17g %.17g %.17g", y[0], y[1],
                  y[2]);
}

static void check_probes(struct drawn *d, const struct eval *v, struct prober *p,
                         const node_id *targets)
{
    for (int i = 0; i < 12; i++) {
        size_t n = 0, want = 1 + random_index(&d->r, 3);
        node_id nodes[3];
        double x[3];
        for (size_t k = 0; k < want; k++) {
            nodes[n] = any_scalar(d);
            bool known = false;
            for (size_t j = 0; j < n; j++)
                known = known || nodes[j] == nodes[n];
            n += !known;
        }
        prober_open(p, n, nodes);
        for (int point = 0; point < 3; point++) {
            for (size_t k = 0; k < n; k++)
                x[k] = random_uniform(&d->r, -0.4, 1);
            compare(d->g, p, 2, targets, n, nodes, x);
        }
        for (size_t t = 0; t < 2; t++)
            check_line(p, targets[t], n, x);
    }
    prober_open(p, 0, NULL);
    for (size_t i = 0; i < d->n; i++)
        if (graph_at(d->g, d->node[i])->op != OP_DIAGRAM)
            ck_assert(bits(prober_value(p, d->node[i])) == bits(eval_value(v, d->node[i])));
}

START_TEST(random_graphs)
{
    size_t graphs = 0;
    for (uint64_t seed = 1; seed <= 200; seed++) {
        struct drawn d;
        ohmen_error e = OHMEN_ERROR_INIT;
        draw(&d, seed);
        struct eval *v = eval_new(arena, d.g);
        if (eval_point(v, NULL, &e) == OHMEN_OK) {
            node_id targets[] = {any_scalar(&d), d.node[d.n - 1]};
            check_probes(&d, v, prober_new(arena, v, 2, targets), targets);
            graphs++;
        }
        teardown();
        setup();
    }
    ck_assert_uint_gt(graphs, 100);
    ck_assert_uint_gt(compared, 5000);
    ck_assert_uint_gt(not_finite, 10);
    ck_assert_uint_gt(linear, 100);
    ck_assert_uint_gt(curved, 1000);
}
END_TEST

/* ---- operations whose linearity is known ---- */

static bool is_linear(const struct eval *v, node_id target, node_id moved)
{
    struct prober *p = prober_new(arena, v, 1, &target);
    prober_open(p, 1, &moved);
    return prober_is_linear(p);
}

START_TEST(lines_are_told)
{
    struct graph *g = graph_new(arena);
    struct course c = {-1, 1, 2, -1, false};
    struct window w = {0, 3};
    struct windows windows = {1, &w};
    ohmen_error e = OHMEN_ERROR_INIT;
    graph_section_begin(g, 0);
    node_id x = graph_const(g, 0.3, number), y = graph_const(g, 0.7, number);
    node_id xy = graph_op2(g, OP_MULTIPLY, x, y), xx = graph_op2(g, OP_MULTIPLY, x, x);
    node_id part = graph_op2(g, OP_DIVIDE, x, y), inverse = graph_op2(g, OP_DIVIDE, y, x);
    node_id least = graph_op2(g, OP_MIN, x, y);
    node_id standing = graph_course(g, &c, (node_id[]){x, y, y, y, y});
    node_id ageing = graph_course(g, &c, (node_id[]){y, x, y, y, y});
    node_id both = graph_course(g, &c, (node_id[]){x, y, y, x, y});
    const struct diagram *d = two_of_three();
    node_id once = graph_diagram_over(g, d, 3, (node_id[]){standing, y, y}, &windows);
    node_id aged = graph_diagram_over(g, d, 3, (node_id[]){ageing, y, y}, &windows);
    node_id twice = graph_diagram_over(g, d, 3, (node_id[]){x, x, y}, &windows);
    node_id part_left = graph_diagram_over(g, d, 3, (node_id[]){both, y, y}, &windows);
    struct {
        node_id node;
        bool linear;
    } cases[] = {
        {xy, true},
        {xx, false},
        {part, true},
        {inverse, false},
        {least, false},
        {graph_op1(g, OP_COMPLEMENT, xy), true},
        {graph_op2(g, OP_SUBTRACT, xy, xx), false},
        {graph_op2(g, OP_SUBTRACT, xy, part), true},
        {graph_pick(g, once, 0), true},
        {graph_pick(g, aged, 0), false},
        {graph_pick(g, twice, 0), false},
        {graph_pick(g, part_left, 0), false},
        {graph_op1(g, OP_HELD, xy), true},
        {graph_op2(g, OP_EITHER, x, y), true},
        {graph_op2(g, OP_EITHER, x, xy), false},
    };
    graph_section_end(g);
    struct eval *v = eval_new(arena, g);
    ck_assert_int_eq(eval_point(v, NULL, &e), OHMEN_OK);
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++)
        ck_assert_msg(is_linear(v, cases[i].node, x) == cases[i].linear, "case %zu", i);
    node_id target = part;
    struct prober *p = prober_new(arena, v, 1, &target);
    ck_assert(prober_leads(p, x) && prober_leads(p, part) && !prober_leads(p, xx));
    prober_open(p, 1, &x);
    ck_assert(prober_moves(p, x) && prober_moves(p, part) && !prober_moves(p, xy));
}
END_TEST

/* A probability of true so near 1 that only its complement tells how near; and that complement
 * replaced by a number, whose argument does not count any more. */
START_TEST(complements)
{
    struct graph *g = graph_new(arena);
    ohmen_error e = OHMEN_ERROR_INIT;
    graph_section_begin(g, 0);
    node_id x = graph_const(g, 1e-20, number), not_x = graph_op1(g, OP_COMPLEMENT, x);
    node_id d =
        graph_diagram(g, two_of_three(), 3,
                      (node_id[]){graph_const(g, 1, number), graph_const(g, 0, number), not_x});
    node_id target = graph_pick(g, d, 1);
    graph_section_end(g);
    struct eval *v = eval_new(arena, g);
    ck_assert_int_eq(eval_point(v, NULL, &e), OHMEN_OK);
    ck_assert(eval_value(v, target) == 1e-20);
    struct prober *p = prober_new(arena, v, 1, &target);
    prober_open(p, 1, &x);
    ck_assert(prober_at(p, (double[]){3e-21}) && prober_value(p, target) == 3e-21);
    prober_open(p, 1, &not_x);
    ck_assert(prober_at(p, (double[]){0.75}) && prober_value(p, target) == 0.25);
    ck_assert(eval_value(v, target) == 1e-20);
}
END_TEST

/* ---- registers ---- */

/* A constant that an operation keeps to: an exponent, a bound, a time. */
static bool is_kept_to(const struct graph *g, node_id n)
{
    for (node_id k = n; k < graph_size(g); k++) {
        enum graph_op by = graph_at(g, k)->op;
        for (uint32_t i = 0; i < graph_at(g, k)->n; i++)
            if (graph_args(g, k)[i] == n && (by == OP_POWER || by == OP_LOOKUP || by == OP_ANNUITY))
                return true;
    }
    return false;
}

static node_id any_leading(struct random *r, const struct graph *g, const struct prober *p)
{
    for (;;) {
        node_id n = (node_id)random_index(r, graph_size(g));
        enum graph_op op = graph_at(g, n)->op;
        if (prober_leads(p, n) && op != OP_DIAGRAM && op != OP_COURSE && !is_kept_to(g, n))
            return n;
    }
}

/* Moves some nodes that lead to the targets; all values of the evaluation stay. */
static void check_figures(struct figures *f, size_t n_targets, const node_id *targets,
                          uint64_t seed, size_t probes)
{
    struct random r = random_seed(seed);
    struct prober *p = prober_new(arena, f->eval, n_targets, targets);
    for (size_t i = 0; i < probes; i++) {
        node_id n = any_leading(&r, f->graph, p);
        prober_open(p, 1, &n);
        for (int k = 0; k < 2; k++) {
            double x = eval_value(f->eval, n) * random_uniform(&r, 0.1, 1);
            compare(f->graph, p, n_targets, targets, 1, &n, &x);
        }
    }
    struct copied plain = copy(f->graph, 0, NULL, NULL);
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(eval_point(plain.v, NULL, &e), OHMEN_OK);
    for (node_id n = 0; n < graph_size(f->graph); n++)
        if (graph_at(f->graph, n)->op != OP_DIAGRAM)
            ck_assert_msg(bits(eval_value(plain.v, plain.map[n])) == bits(eval_value(f->eval, n)),
                          "node %u (%s): %.17g, built anew %.17g", (unsigned)n,
                          graph_op_info(graph_at(f->graph, n)->op)->name, eval_value(f->eval, n),
                          eval_value(plain.v, plain.map[n]));
}

static size_t net_nodes(struct figures *f, const struct weighing *w, node_id *targets, size_t most)
{
    size_t n = 0;
    for (size_t i = 0; i < w->alternatives.n && n < most; i++)
        if (w->alternatives.at[i].net != FIGURE_NONE)
            targets[n++] = figure_at(f, w->alternatives.at[i].net)->node;
    return n;
}

START_TEST(random_registers)
{
    size_t weighed = 0;
    compared = 0;
    for (uint64_t seed = 1; seed <= 12; seed++) {
        struct loaded l;
        struct model_sources all = {0}, none = {0};
        struct diags diags;
        const struct node *root = random_register(arena, seed, &register_small);
        diags_init(&diags, arena);
        ck_assert(documents_merge(arena, &none, 1, &root, &all, &diags));
        loaded_objects(&l, arena, &all, NULL);
        l.figures->points_only = true; /* means take long here */
        const struct objects *decisions = &l.model->of[KIND_DECISION];
        for (size_t i = 0; i < decisions->n && i < 2; i++) {
            struct weighing *w;
            ohmen_error e = OHMEN_ERROR_INIT;
            node_id targets[3];
            if (weigh_compile(l.figures, decisions->at[i]->id, &w, &e) != OHMEN_OK)
                continue;
            loaded_evaluate(&l);
            size_t n = net_nodes(l.figures, w, targets, 3);
            if (n == 0)
                continue;
            check_figures(l.figures, n, targets, seed, 12);
            weighed++;
        }
        teardown();
        setup();
    }
    ck_assert_uint_gt(weighed, 8);
    ck_assert_uint_gt(compared, 150);
}
END_TEST

/* Courses, diagrams over years, and demands that reveal. */
START_TEST(registers_in_time)
{
    compared = 0;
    for (uint64_t seed = 1; seed <= 12; seed++) {
        struct loaded l;
        loaded_text(&l, arena, timed_world_text(timed_world_random(arena, seed)), NULL);
        const struct object *h = l.model->of[KIND_HAZARD].at[0];
        figure_id id = loaded_find(&l, arena_printf(arena, "%s.risk", h->id));
        loaded_evaluate(&l);
        node_id target = figure_at(l.figures, id)->node;
        check_figures(l.figures, 1, &target, seed, 20);
        teardown();
        setup();
    }
    ck_assert_uint_gt(compared, 200);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("probe");
    TCase *t = tcase_create("probe");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, random_graphs);
    tcase_add_test(t, lines_are_told);
    tcase_add_test(t, complements);
    tcase_add_test(t, random_registers);
    tcase_add_test(t, registers_in_time);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
