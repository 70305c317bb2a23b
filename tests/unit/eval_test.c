/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Evaluation and derivatives, on single operations and on whole graphs drawn at
 * random. A drawn graph is a recipe (steps that are sure to be tame and smooth near
 * the means), so that it can be built again with moved inputs, for differences. */
#include "eval/eval.h"
#include "failmem.h"
#include "graph/course.h"
#include "graph/diagram.h"
#include "random.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static struct arena *arena;
static struct graph *g;
static struct eval *v;

static const struct dim number = {{0}};

static void setup(void)
{
    arena = arena_new(NULL);
    g = graph_new(arena);
    v = eval_new(arena, g);
    graph_section_begin(g, 0);
}

static void teardown(void)
{
    arena_free(arena);
}

static node_id con(double x)
{
    return graph_const(g, x, number);
}

static node_id in(uint32_t i, double mean)
{
    return graph_input(g, i, mean, number);
}

static double value(node_id n)
{
    ck_assert_int_eq(eval_point(v, NULL, NULL), OHMEN_OK);
    return eval_value(v, n);
}

static const struct diagram *two_of_three(struct arena *a)
{
    struct diagram_builder *b = diagram_builder_new(a);
    bfun f[3];
    for (uint32_t i = 0; i < 3; i++)
        f[i] = diagram_variable(b, i);
    bfun two = diagram_at_least(b, 2, 3, f);
    return diagram_freeze(a, b, 3, (bfun[]){two, diagram_not(b, two), f[2]});
}

/* ---- values ---- */

START_TEST(values_come_as_nodes_are_appended)
{
    node_id x = in(1, 2.385), y = in(2, 0.04), sum = graph_op2(g, OP_ADD, x, y);
    ck_assert(value(sum) == 2.385 + 0.04);
    node_id product = graph_op2(g, OP_MULTIPLY, sum, y);
    ck_assert(value(product) == (2.385 + 0.04) * 0.04);
    graph_section_end(g);
    graph_section_begin(g, 1);
    node_id ratio = graph_op2(g, OP_DIVIDE, product, in(1, 2.385));
    ck_assert(value(ratio) == (2.385 + 0.04) * 0.04 / 2.385);
    ck_assert(value(x) == 2.385);
}
END_TEST

/* By hand: 2 of 3 with .1, .2, .3: pq + pr + qr - 2 pqr = .02 + .03 + .06 - .012. */
START_TEST(picks_take_the_results_of_a_diagram)
{
    node_id p[] = {in(1, 0.1), in(2, 0.2), in(3, 0.3)};
    node_id one = graph_diagram(g, two_of_three(arena), 3, p);
    node_id other = graph_diagram(g, two_of_three(arena), 3, (node_id[]){p[0], p[0], p[0]});
    node_id two = graph_pick(g, one, 0), fewer = graph_pick(g, one, 1);
    node_id same = graph_pick(g, other, 0), last = graph_pick(g, one, 2);
    ck_assert(fabs(value(two) - 0.098) <= 1e-16);
    ck_assert(fabs(value(fewer) - 0.902) <= 3e-16);
    ck_assert(fabs(value(same) - 0.028) <= 1e-17);
    ck_assert(value(last) == 0.3);
}
END_TEST

START_TEST(complements_of_tiny_probabilities_are_kept)
{
    node_id x = in(1, 1e-20), works = graph_op1(g, OP_COMPLEMENT, x);
    ck_assert(value(works) == 1);
    node_id d = graph_diagram(g, two_of_three(arena), 3, (node_id[]){works, works, works});
    node_id fails = graph_pick(g, d, 1);
    double y = value(fails); /* 3 x^2 - 2 x^3 */
    ck_assert(fabs(y - 3e-40) <= 1e-55);
    double derivative[16];
    eval_backward(v, fails, derivative);
    ck_assert(fabs(derivative[x] - 6e-20) <= 1e-34);
    struct graph *to = graph_new(arena);
    graph_section_begin(to, 0);
    node_id lowered = graph_lower(to, g, fails);
    struct eval *w = eval_new(arena, to);
    ck_assert_int_eq(eval_point(w, NULL, NULL), OHMEN_OK);
    ck_assert(fabs(eval_value(w, lowered) - y) <= 1e-13 * y);
}
END_TEST

START_TEST(the_culprit_is_named)
{
    node_id zero = graph_op2(g, OP_SUBTRACT, in(1, 2), in(2, 2)), one = in(3, 1);
    node_id bad = graph_op2(g, OP_DIVIDE, one, zero), culprit = NODE_NONE;
    graph_op1(g, OP_EXP, bad);
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(eval_point(v, &culprit, &e), OHMEN_COMPUTE);
    ck_assert_uint_eq(culprit, bad);
    ck_assert_str_eq(e.text, "node 4 (divide) of the calculation has no finite value");
    ck_assert(eval_value(v, one) == 1);
    culprit = NODE_NONE;
    ck_assert_int_eq(eval_point(v, &culprit, NULL), OHMEN_COMPUTE);
    ck_assert_uint_eq(culprit, bad);
}
END_TEST

static bool fails_at(node_id n)
{
    node_id culprit = NODE_NONE;
    return eval_point(v, &culprit, NULL) == OHMEN_COMPUTE && culprit == n;
}

START_TEST(what_is_no_number_is_an_error)
{
    static const enum graph_op ops[] = {OP_LOG, OP_SQRT};
    for (size_t i = 0; i < 2; i++) {
        teardown();
        setup();
        ck_assert(fails_at(graph_op1(g, ops[i], con(-1))));
    }
    teardown(), setup();
    ck_assert(fails_at(con(NAN)));
    teardown(), setup();
    ck_assert(fails_at(graph_input(g, 1, INFINITY, number)));
    teardown(), setup();
    ck_assert(fails_at(graph_op1(g, OP_EXP, in(1, 710))));
    teardown(), setup();
    ck_assert(fails_at(graph_annuity(g, in(1, -1), con(0), con(2))));
    teardown(), setup();
    node_id p[] = {in(1, 1e300), in(1, 1e300), con(0.5)};
    ck_assert(fails_at(graph_diagram(g, two_of_three(arena), 3, p)));
}
END_TEST

/* ---- recipes ---- */

enum { N_INPUTS = 5, MOST_STEPS = 60, MOST_ARGS = 8, PER_DIAGRAM = 4, MOST_TOUCHED = 9 };

struct step {
    enum graph_op op; /* PICK: a diagram over the arguments, and one of its roots */
    uint32_t n, root;
    uint32_t arg[MOST_ARGS]; /* places: inputs, then steps */
    double constant[MOST_ARGS];
    bool is_constant[MOST_ARGS];
    const struct diagram *diagram;
    struct years years;
    uint32_t of_year[MOST_TOUCHED];
    struct course course;
    struct chain chain;
    uint32_t from[MOST_ARGS], to[MOST_ARGS]; /* of `chain` */
};

struct recipe {
    size_t n;
    struct step at[MOST_STEPS];
    double mean[N_INPUTS];
};

struct built {
    struct graph *g;
    struct eval *v;
    node_id place[N_INPUTS + MOST_STEPS];
};

static node_id build_step(struct built *b, const struct step *s)
{
    node_id args[MOST_ARGS];
    for (uint32_t i = 0; i < s->n; i++)
        args[i] =
            s->is_constant[i] ? graph_const(b->g, s->constant[i], number) : b->place[s->arg[i]];
    if (s->op == OP_PICK)
        return graph_pick(b->g, graph_diagram(b->g, s->diagram, s->n, args), s->root);
    if (s->op == OP_COURSE)
        return graph_course(b->g, &s->course, args);
    if (s->op == OP_CHAIN) {
        struct chain chain = s->chain;
        chain.from = s->from;
        chain.to = s->to;
        return graph_chain(b->g, &chain, args);
    }
    if (s->op == OP_YEARS) {
        struct years years = s->years;
        years.of_year = s->of_year;
        return graph_years(b->g, args[0], s->n - 1, args + 1, &years);
    }
    return graph_op(b->g, s->op, s->n, args);
}

static struct built begin_build(struct arena *a, const double *mean)
{
    struct built b = {.g = graph_new(a)};
    b.v = eval_new(a, b.g);
    graph_section_begin(b.g, 0);
    for (uint32_t i = 0; i < N_INPUTS; i++)
        b.place[i] = graph_input(b.g, 100 + i, mean[i], number);
    return b;
}

static double place_value(struct built *b, size_t place)
{
    ck_assert_int_eq(eval_point(b->v, NULL, NULL), OHMEN_OK);
    return eval_value(b->v, b->place[place]);
}

static struct built build(struct arena *a, const struct recipe *r, const double *mean)
{
    struct built b = begin_build(a, mean);
    for (size_t i = 0; i < r->n; i++)
        b.place[N_INPUTS + i] = build_step(&b, &r->at[i]);
    return b;
}

/* ---- drawing ---- */

/* A function of PER_DIAGRAM variables and its complement. */
static const struct diagram *draw_diagram(struct random *r)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun f[PER_DIAGRAM + 4];
    for (uint32_t i = 0; i < PER_DIAGRAM; i++)
        f[i] = diagram_variable(b, i);
    for (size_t i = PER_DIAGRAM; i < PER_DIAGRAM + 4; i++)
        f[i] = diagram_ite(b, f[random_index(r, i)], f[random_index(r, i)],
                           diagram_not(b, f[random_index(r, i)]));
    bfun last = f[PER_DIAGRAM + 3];
    return diagram_freeze(arena, b, 2, (bfun[]){last, diagram_not(b, last)});
}

static void constant(struct step *s, uint32_t i, double x)
{
    s->is_constant[i] = true;
    s->constant[i] = x;
}

static void draw_years(struct random *r, struct step *s)
{
    double from = random_uniform(r, 0, 3), to = random_uniform(r, from, 8);
    s->years = (struct years){from, to, (size_t)(ceil(to) - floor(from)), NULL};
    for (size_t i = 0; i < s->years.n_years; i++)
        s->of_year[i] = (uint32_t)random_index(r, s->n - 1);
}

/* At time 0 half a unit behind a reset at least, where the expansion keeps its digits. */
static void draw_course(struct random *r, struct step *s)
{
    double from = -random_uniform(r, 3, 5);
    s->course = (struct course){.from = from,
                                .first = random_index(r, 3) ? from + 1 : INFINITY,
                                .every = -from - random_uniform(r, 1.5, 1.9),
                                .born = -random_uniform(r, 0.5, 9),
                                .fresh = random_index(r, 2)};
}

/* The first flows lead from `start` to `end` through all states. */
static void draw_chain(struct random *r, struct step *s)
{
    uint32_t n = (uint32_t)random_range(r, 2, s->n < 3 ? 2 : 3);
    s->chain = (struct chain){.n_states = n, .n_flows = s->n, .mean = random_index(r, 2)};
    s->chain.years = random_uniform(r, 0.2, 1.5);
    s->chain.end = n - 1;
    for (uint32_t f = 0; f < s->n; f++) {
        s->from[f] = f + 1 < n ? f : (uint32_t)random_index(r, n);
        s->to[f] = f + 1 < n ? f + 1 : (s->from[f] + 1 + (uint32_t)random_index(r, n - 1)) % n;
    }
}

/* How many arguments, and which of them are constants. */
static void draw_arguments(struct random *r, struct step *s)
{
    static const double exponents[] = {2, 0.5, -1, 1.7, 1};
    const struct graph_op_info *info = graph_op_info(s->op);
    s->n = info->most == 255 ? (uint32_t)random_range(r, info->least, 6) : info->most;
    if (s->op == OP_POWER)
        constant(s, 1, random_pick(r, exponents));
    if (s->op == OP_LOOKUP) {
        s->n = random_index(r, 3) ? 7 : 3;
        for (uint32_t i = 1; i < s->n; i += 2)
            constant(s, i, 0.4 * i);
    }
    if (s->op == OP_ANNUITY && random_index(r, 3)) {
        constant(s, 1, random_index(r, 2) ? 0 : random_uniform(r, 0, 3));
        constant(s, 2, random_uniform(r, 3, 30));
    }
    if (s->op == OP_YEARS)
        draw_years(r, s);
    if (s->op == OP_COURSE)
        draw_course(r, s);
    if (s->op == OP_CHAIN)
        draw_chain(r, s);
    if (s->op == OP_PICK) {
        s->n = PER_DIAGRAM;
        s->diagram = draw_diagram(r);
        s->root = (uint32_t)random_index(r, 2);
    }
}

/* Two of the compared values within 3 % of each other: a kink is too near. */
static bool near(double a, double b)
{
    return fabs(a - b) < 0.03 * (fabs(a) + fabs(b));
}

static bool has_kink(const struct step *s, const double *x)
{
    if (s->op == OP_MIN || s->op == OP_MAX)
        for (uint32_t i = 0; i < s->n; i++)
            for (uint32_t k = 0; k < i; k++)
                if (near(x[i], x[k]) && s->arg[i] != s->arg[k])
                    return true;
    if (s->op == OP_LOOKUP)
        for (uint32_t i = 3; i < s->n; i += 2)
            if (near(x[0], x[i]))
                return true;
    if (s->op == OP_ANNUITY)
        for (uint32_t i = 1; i < 3; i++)
            if (!s->is_constant[i] && near(x[i], floor(x[i] + 0.5)))
                return true;
    return false;
}

/* Whether the operation may be had there: well inside its domain, no cancellation. */
static bool is_tame(const struct step *s, const double *x)
{
    bool probabilities = s->op == OP_PICK || s->op == OP_COMPLEMENT || s->op == OP_EITHER;
    for (uint32_t i = 0; probabilities && i < s->n; i++)
        if (x[i] > 0.9)
            return false;
    double sum = 0;
    for (uint32_t i = 0; i < s->n; i++)
        sum += x[i];
    switch (s->op) {
    case OP_CHAIN: return sum * s->chain.years < 12;
    case OP_SUBTRACT: return x[0] > 1.5 * x[1];
    case OP_EXP: return x[0] < 2.5;
    case OP_LOG: return x[0] > 1.3;
    case OP_ANNUITY: return x[0] < 0.5 && x[1] < x[2];
    case OP_YEARS: return x[0] < 0.5;
    case OP_COURSE: return x[COURSE_STANDING] < 0.9 && x[COURSE_LEFT] < 0.9;
    default: return true;
    }
}

static bool is_fine(struct built *b, const struct step *s)
{
    double x[MOST_ARGS];
    for (uint32_t i = 0; i < s->n; i++)
        x[i] = s->is_constant[i] ? s->constant[i] : place_value(b, s->arg[i]);
    return is_tame(s, x) && !has_kink(s, x);
}

/* NEGATE makes what no other step takes, so it comes in a pair: x - (-y). */
static const enum graph_op drawn[] = {
    OP_ADD,        OP_SUBTRACT, OP_MULTIPLY, OP_DIVIDE, OP_RATIO,  OP_NEGATE, OP_POWER,
    OP_COMPLEMENT, OP_SUM,      OP_MIN,      OP_MAX,    OP_EXP,    OP_LOG,    OP_SQRT,
    OP_LOOKUP,     OP_ANNUITY,  OP_PICK,     OP_PICK,   OP_EITHER, OP_YEARS,  OP_COURSE,
    OP_COURSE,     OP_HELD,     OP_CHAIN,    OP_CHAIN,
};

static void draw_step(struct random *r, struct recipe *recipe, struct built *b)
{
    struct step s = {.op = random_pick(r, drawn)};
    draw_arguments(r, &s);
    for (uint32_t i = 0; i < s.n; i++)
        s.arg[i] = (uint32_t)random_index(r, N_INPUTS + recipe->n);
    if (s.op == OP_NEGATE)
        s.arg[0] = (uint32_t)random_index(r, N_INPUTS);
    if (recipe->n && recipe->at[recipe->n - 1].op == OP_NEGATE) {
        s = (struct step){.op = OP_SUBTRACT, .n = 2};
        s.arg[0] = (uint32_t)random_index(r, N_INPUTS);
        s.arg[1] = (uint32_t)(N_INPUTS + recipe->n - 1);
    }
    for (uint32_t i = 0; i < s.n; i++) /* others never take a negated value */
        if (s.op != OP_SUBTRACT && !s.is_constant[i] && place_value(b, s.arg[i]) < 0)
            s.arg[i] = 0;
    if (!is_fine(b, &s))
        return;
    b->place[N_INPUTS + recipe->n] = build_step(b, &s);
    double y = place_value(b, N_INPUTS + recipe->n);
    if ((y > 0.02 && y < 40) || s.op == OP_NEGATE)
        recipe->at[recipe->n++] = s;
}

static struct recipe draw(struct random *r, size_t n)
{
    struct recipe recipe = {0};
    for (int i = 0; i < N_INPUTS; i++)
        recipe.mean[i] = random_log_uniform(r, 0.05, 4);
    struct arena *a = arena_child(arena);
    struct built b = begin_build(a, recipe.mean);
    while (recipe.n < n)
        draw_step(r, &recipe, &b);
    arena_free(a);
    return recipe;
}

/* ---- whole graphs ---- */

static double moved(const struct recipe *r, size_t place, size_t input, double by)
{
    double mean[N_INPUTS];
    memcpy(mean, r->mean, sizeof mean);
    mean[input] += by;
    struct arena *a = arena_child(arena);
    struct built b = build(a, r, mean);
    double y = place_value(&b, place);
    arena_free(a);
    return y;
}

/* Fourth-order central difference. */
static double slope(const struct recipe *r, size_t place, size_t input)
{
    double h = 2e-4 * r->mean[input];
    return (moved(r, place, input, -2 * h) - 8 * moved(r, place, input, -h) +
            8 * moved(r, place, input, h) - moved(r, place, input, 2 * h)) /
           (12 * h);
}

/* By the nodes below a root alone derivatives are the same, to the bit, and others are left. */
static void check_those_below(const struct built *b, node_id root, const double *want)
{
    size_t size = graph_size(b->g), n = 0;
    bool *is_below = NEW_ARRAY(arena, size, bool);
    node_id *nodes = NEW_ARRAY(arena, size, node_id);
    double *got = NEW_ARRAY(arena, size, double);
    for (size_t i = 0; i < size; i++)
        got[i] = -2385;
    is_below[root] = true;
    for (node_id i = root + 1; i-- > 0;) {
        if (!is_below[i])
            continue;
        nodes[n++] = i;
        for (uint32_t k = 0; k < graph_at(b->g, i)->n; k++)
            is_below[graph_args(b->g, i)[k]] = true;
    }
    eval_backward_over(b->v, n, nodes, got);
    for (node_id i = 0; i < size; i++)
        ck_assert(is_below[i] ? got[i] == want[i] : got[i] == -2385);
}

START_TEST(derivatives_of_graphs_match_differences)
{
    struct random r = random_seed(2385);
    int moving = 0;
    for (int n = 0; n < 150; n++) {
        teardown(), setup();
        struct recipe recipe = draw(&r, (size_t)random_range(&r, 3, 24));
        struct built b = build(arena, &recipe, recipe.mean);
        size_t place = N_INPUTS + recipe.n - 1;
        double y = place_value(&b, place);
        double *derivative = NEW_ARRAY(arena, graph_size(b.g), double);
        memset(derivative, 0x55, graph_size(b.g) * sizeof *derivative); /* is overwritten */
        eval_backward(b.v, b.place[place], derivative);
        ck_assert(derivative[b.place[place]] == 1);
        check_those_below(&b, b.place[place], derivative);
        for (size_t i = 0; i < N_INPUTS; i++) {
            double want = slope(&recipe, place, i), scale = fabs(y) / recipe.mean[i];
            double got = derivative[b.place[i]];
            ck_assert_msg(fabs(got - want) <= 2e-8 * (fabs(want) + scale),
                          "graph %d, input %zu: %.12g, not %.12g", n, i, got, want);
            moving += fabs(want) > 0.01 * scale;
        }
    }
    ck_assert_int_gt(moving, 200);
}
END_TEST

/* Every macro operation is gone, but for an annuity between uncertain years. */
static void count_ops(const struct graph *x, bool is_lowered, int *count)
{
    for (node_id i = 0; i < graph_size(x); i++) {
        const struct graph_node *n = graph_at(x, i);
        const node_id *args = graph_args(x, i);
        count[n->op] += n->op != OP_ANNUITY || (graph_at(x, args[1])->op == OP_CONST &&
                                                graph_at(x, args[2])->op == OP_CONST);
        if (is_lowered && (n->op == OP_MIN || n->op == OP_MAX))
            ck_assert_uint_eq(n->n, 2);
    }
}

START_TEST(lowered_graphs_are_equal)
{
    struct random r = random_seed(54);
    int before[OP_COUNT] = {0}, after[OP_COUNT] = {0};
    for (int n = 0; n < 400; n++) {
        teardown(), setup();
        struct recipe recipe = draw(&r, (size_t)random_range(&r, 3, 30));
        struct built b = build(arena, &recipe, recipe.mean);
        for (size_t place = N_INPUTS; place < N_INPUTS + recipe.n; place++) {
            graph_section_end(g);
            graph_section_begin(g, (uint32_t)place);
            node_id lowered = graph_lower(g, b.g, b.place[place]);
            double want = place_value(&b, place), got = value(lowered);
            ck_assert_msg(fabs(got - want) <= 1e-13 * fabs(want),
                          "graph %d, %zu (%s): %.17g, not %.17g", n, place,
                          graph_op_info(recipe.at[place - N_INPUTS].op)->name, got, want);
        }
        count_ops(b.g, false, before);
        count_ops(g, true, after);
    }
    static const enum graph_op macros[] = {OP_SUM,     OP_LOOKUP, OP_COMPLEMENT, OP_ANNUITY,
                                           OP_DIAGRAM, OP_PICK,   OP_EITHER,     OP_YEARS,
                                           OP_COURSE,  OP_CHAIN};
    for (size_t i = 0; i < sizeof macros / sizeof *macros; i++) {
        ck_assert_msg(before[macros[i]] > 50, "%s: too few", graph_op_info(macros[i])->name);
        ck_assert_msg(after[macros[i]] == 0, "%s: left", graph_op_info(macros[i])->name);
    }
    for (size_t i = 0; i < sizeof drawn / sizeof *drawn; i++)
        ck_assert_msg(before[drawn[i]] > 50, "%s: too few", graph_op_info(drawn[i])->name);
}
END_TEST

/* The loop above covers the op table: whoever adds a row adds it to `drawn`. */
START_TEST(every_row_is_drawn)
{
    bool seen[OP_COUNT] = {[OP_CONST] = true, [OP_INPUT] = true, [OP_DIAGRAM] = true};
    for (size_t i = 0; i < sizeof drawn / sizeof *drawn; i++)
        seen[drawn[i]] = true;
    for (int op = 0; op < OP_COUNT; op++)
        ck_assert_msg(seen[op], "%s is not drawn", graph_op_info(op)->name);
}
END_TEST

START_TEST(lowered_inputs_keep_their_numbers)
{
    node_id x = in(17, 2.385), root = graph_op(g, OP_SUM, 2, (node_id[]){x, x});
    struct graph *to = graph_new(arena);
    graph_section_begin(to, 0);
    node_id lowered = graph_lower(to, g, root);
    ck_assert_int_eq(graph_at(to, lowered)->op, OP_ADD);
    ck_assert_uint_eq(graph_at(to, graph_args(to, lowered)[1])->extra, 17);
    ck_assert_uint_eq(graph_size(to), 2);
    node_id same = graph_lower(g, g, root);
    ck_assert(value(same) == value(root));
}
END_TEST

/* The expansion of a lookup is exact, next to its bounds and with bounds of 0. */
START_TEST(lowered_lookups_are_exact)
{
    static const double bounds[] = {-2.385, 0, 1e-310, 0.1, 1e300};
    node_id args[11];
    for (uint32_t i = 0; i < 5; i++) {
        args[1 + 2 * i] = con(bounds[i]);
        args[2 + 2 * i] = in(i, 10 * i + 0.3);
    }
    for (uint32_t i = 0; i < 5; i++)
        for (int side = -1; side <= 1; side++) {
            double x = side ? nextafter(bounds[i], side * INFINITY) : bounds[i];
            args[0] = in(20 + 3 * i + (uint32_t)(side + 1), x);
            node_id looked = graph_op(g, OP_LOOKUP, 11, args), lowered = graph_lower(g, g, looked);
            double want = 10 * (side < 0 && i > 0 ? i - 1 : i) + 0.3;
            ck_assert(value(looked) == want);
            ck_assert(value(lowered) == want);
        }
}
END_TEST

START_TEST(a_shared_root_has_all_its_paths)
{
    node_id x = in(1, 3), square = graph_op2(g, OP_MULTIPLY, x, x);
    node_id root = graph_op2(g, OP_ADD, square, graph_op2(g, OP_MULTIPLY, square, x));
    graph_op2(g, OP_MULTIPLY, root, x); /* behind the root: no part of it */
    ck_assert(value(root) == 9 + 27);
    double derivative[8] = {7, 7, 7, 7, 7, 7, 7, 7};
    eval_backward(v, root, derivative);
    ck_assert(derivative[x] == 6 + 27);
    ck_assert(derivative[square] == 4);
    ck_assert(derivative[root + 1] == 0);
}
END_TEST

/* Twice the same question, and another root between: nothing is left behind. */
START_TEST(derivatives_leave_nothing_behind)
{
    node_id p[] = {in(1, 0.1), in(2, 0.2), in(3, 0.3)};
    node_id d = graph_diagram(g, two_of_three(arena), 3, p);
    node_id two = graph_pick(g, d, 0), fewer = graph_pick(g, d, 1);
    double first[8], between[8], again[8];
    ck_assert(value(two) > 0);
    eval_backward(v, two, first);
    eval_backward(v, fewer, between);
    eval_backward(v, two, again);
    ck_assert(memcmp(first, again, graph_size(g) * sizeof *first) == 0);
    for (int i = 0; i < 3; i++)
        ck_assert(fabs(first[p[i]] + between[p[i]]) <= 3e-16);
    ck_assert(fabs(first[p[0]] - (0.2 + 0.3 - 2 * 0.06)) <= 1e-16);
}
END_TEST

/* Everything once, in an arena of the given seam; false when memory ran out. */
static bool whole_job(const struct mem *mem, double *result)
{
    struct arena *volatile a = arena_new(mem);
    jmp_buf out_of_memory;
    if (!a)
        return false;
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &out_of_memory);
    struct recipe recipe = {.n = 1, .mean = {0.1, 0.2, 0.3, 0.4, 2.385}};
    recipe.at[0] = (struct step){.op = OP_PICK, .n = 3, .arg = {0, 1, 2}};
    recipe.at[0].diagram = two_of_three(a);
    struct built b = build(a, &recipe, recipe.mean);
    for (uint32_t i = 0; i < 400; i++)
        graph_op2(b.g, OP_ADD, b.place[4], graph_const(b.g, i + 0.5, number));
    node_id root = graph_lower(b.g, b.g, b.place[N_INPUTS]);
    double *derivative = NEW_ARRAY(a, graph_size(b.g), double);
    int status = eval_point(b.v, NULL, NULL);
    if (status == OHMEN_OK)
        eval_backward(b.v, root, derivative);
    *result = eval_value(b.v, root) + derivative[b.place[0]] + graph_degree(b.g, root);
    arena_free(a);
    return true;
}

START_TEST(memory_may_run_out_anywhere)
{
    bool done = false;
    size_t k = 0;
    for (; !done; k++) {
        struct failmem f;
        double result = -1;
        failmem_init(&f, k);
        done = whole_job(&f.mem, &result);
        failmem_check(&f);
        ck_assert(done == (f.failed == 0));
        ck_assert(!done || fabs(result - (0.098 + 0.38 + 1)) <= 1e-15);
    }
    ck_assert_uint_gt(k, 8);
}
END_TEST

static Suite *eval_suite(void)
{
    Suite *s = suite_create("eval");
    TCase *t = tcase_create("eval");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, values_come_as_nodes_are_appended);
    tcase_add_test(t, picks_take_the_results_of_a_diagram);
    tcase_add_test(t, complements_of_tiny_probabilities_are_kept);
    tcase_add_test(t, the_culprit_is_named);
    tcase_add_test(t, what_is_no_number_is_an_error);
    tcase_add_test(t, derivatives_of_graphs_match_differences);
    tcase_add_test(t, lowered_graphs_are_equal);
    tcase_add_test(t, every_row_is_drawn);
    tcase_add_test(t, lowered_inputs_keep_their_numbers);
    tcase_add_test(t, lowered_lookups_are_exact);
    tcase_add_test(t, a_shared_root_has_all_its_paths);
    tcase_add_test(t, derivatives_leave_nothing_behind);
    tcase_add_test(t, memory_may_run_out_anywhere);
    suite_add_tcase(s, t);
    return s;
}

int main(void)
{
    SRunner *runner = srunner_create(eval_suite());
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
