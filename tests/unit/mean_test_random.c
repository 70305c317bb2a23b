/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Graphs drawn at random over discrete inputs, against enumeration: a node's value is known for
 * every combination of atoms, hence its mean, and whether it is linear in an input, and whether
 * it depends on it at all. */
#include "graph/ops.h"
#include "mean_test.h"

#include "random.h"

#include <math.h>
#include <string.h>

enum { INPUTS = 5, ATOMS = 3, CASES = 243, STEPS = 24, PLACES = INPUTS + STEPS, ARGS = 5 };

static struct mean_world w;
static struct arena *arena;
static double at[INPUTS][ATOMS], probability[INPUTS][ATOMS];
static node_id node[PLACES];
static double value[PLACES][CASES]; /* case: atom of input i is digit i to the base 3 */
static const size_t stride[INPUTS] = {1, 3, 9, 27, 81};

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

static double case_probability(size_t c)
{
    double p = 1;
    for (size_t i = 0; i < INPUTS; i++)
        p *= probability[i][c / stride[i] % ATOMS];
    return p;
}

static void draw_inputs(struct random *r)
{
    for (uint32_t i = 0; i < INPUTS; i++) {
        double total = 0;
        for (int k = 0; k < ATOMS; k++) {
            at[i][k] = (k ? at[i][k - 1] : 0) + random_uniform(r, 0.05, 0.3);
            total += probability[i][k] = random_uniform(r, 0.1, 1);
        }
        for (int k = 0; k < ATOMS; k++)
            probability[i][k] /= total;
        mean_world_set(&w, i,
                       (struct dist){.shape = DIST_DISCRETE,
                                     .n = ATOMS,
                                     .values = at[i],
                                     .probabilities = probability[i]});
        node[i] = mean_input(&w, i);
        for (size_t c = 0; c < CASES; c++)
            value[i][c] = at[i][c / stride[i] % ATOMS];
    }
}

/* ---- steps ---- */

struct step {
    enum graph_op op; /* PICK: 2 of 3 of a diagram */
    size_t n;
    size_t arg[ARGS];
    double constant[ARGS]; /* where not NAN */
};

static const enum graph_op drawn[] = {
    OP_ADD,    OP_SUBTRACT, OP_MULTIPLY, OP_MULTIPLY, OP_MULTIPLY, OP_DIVIDE, OP_RATIO,
    OP_NEGATE, OP_POWER,    OP_SUM,      OP_MIN,      OP_MAX,      OP_EXP,    OP_COMPLEMENT,
    OP_SQRT,   OP_LOOKUP,   OP_ANNUITY,  OP_PICK,     OP_PICK,     OP_LOG,    OP_CHAIN,
};

static const uint32_t chain_from[] = {0, 1, 1}, chain_to[] = {1, 0, 2};
static const struct chain chain = {3, 3, chain_from, chain_to, 1.5, 0, 2, false};

static struct step draw_step(struct random *r, size_t places)
{
    static const double exponents[] = {1, 2, 0.5, -1};
    struct step s = {.op = random_pick(r, drawn)};
    const struct graph_op_info *info = graph_op_info(s.op);
    s.n = s.op == OP_PICK || info->most == 255 ? 3 : info->most;
    if (s.op == OP_LOOKUP)
        s.n = 5;
    for (size_t i = 0; i < s.n; i++) {
        s.arg[i] = random_index(r, places);
        s.constant[i] = random_index(r, 6) ? NAN : random_uniform(r, 0.1, 0.9);
    }
    if (s.op == OP_POWER)
        s.constant[1] = random_pick(r, exponents);
    if (s.op == OP_LOOKUP)
        s.constant[1] = 0.2, s.constant[3] = 0.45;
    if (s.op == OP_ANNUITY)
        s.constant[1] = 0.25, s.constant[2] = 3;
    return s;
}

static double arg_at(const struct step *s, size_t i, size_t c)
{
    return isnan(s->constant[i]) ? value[s->arg[i]][c] : s->constant[i];
}

static double step_at(const struct step *s, size_t c)
{
    double x[ARGS];
    for (size_t i = 0; i < s->n; i++)
        x[i] = arg_at(s, i, c);
    if (s->op == OP_PICK)
        return x[0] * x[1] + x[0] * x[2] + x[1] * x[2] - 2 * x[0] * x[1] * x[2];
    if (s->op == OP_CHAIN)
        return chain_point(&chain, x);
    return graph_point(s->op, s->n, x);
}

static const struct diagram *two_of_three(void)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun f[3];
    for (uint32_t i = 0; i < 3; i++)
        f[i] = diagram_variable(b, i);
    bfun two = diagram_at_least(b, 2, 3, f);
    return diagram_freeze(arena, b, 2, (bfun[]){diagram_not(b, two), two});
}

static node_id build_step(const struct step *s)
{
    node_id args[ARGS];
    for (size_t i = 0; i < s->n; i++)
        args[i] = isnan(s->constant[i]) ? node[s->arg[i]] : mean_const(&w, s->constant[i]);
    if (s->op == OP_PICK)
        return graph_pick(w.g, graph_diagram(w.g, two_of_three(), 3, args), 1);
    if (s->op == OP_CHAIN)
        return graph_chain(w.g, &chain, args);
    return graph_op(w.g, s->op, s->n, args);
}

/* Whether it is finite and of ordinary size in every case. */
static bool is_tame(const struct step *s)
{
    for (size_t c = 0; c < CASES; c++)
        if (!(fabs(step_at(s, c)) < 50))
            return false;
    return true;
}

static void draw_graph(struct random *r)
{
    mean_world_open(&w, arena);
    draw_inputs(r);
    for (size_t place = INPUTS; place < PLACES;) {
        struct step s = draw_step(r, place);
        if (!is_tame(&s))
            continue;
        for (size_t c = 0; c < CASES; c++)
            value[place][c] = step_at(&s, c);
        node[place++] = build_step(&s);
    }
}

/* ---- what is claimed ---- */

static bool holds(const uint32_t *list, size_t n, uint32_t input)
{
    for (size_t i = 0; i < n; i++)
        if (list[i] == input)
            return true;
    return false;
}

static double size_of(size_t place)
{
    double most = 0;
    for (size_t c = 0; c < CASES; c++)
        most = fmax(most, fabs(value[place][c]));
    return most;
}

/* The greatest departure from a straight line over the atoms of an input, or, when `level` is
 * said, from a constant. */
static double departure(size_t place, size_t input, bool level)
{
    double most = 0;
    for (size_t c = 0; c < CASES; c++) {
        if (c / stride[input] % ATOMS != 0)
            continue;
        const double *x = at[input], *y = value[place];
        double low = y[c], middle = y[c + stride[input]], high = y[c + 2 * stride[input]];
        double t = (x[1] - x[0]) / (x[2] - x[0]);
        double line = level ? low : low + t * (high - low);
        most = fmax(most, fabs(middle - line));
        if (level)
            most = fmax(most, fabs(high - low));
    }
    return most;
}

static void check_lists(size_t place, int *linear)
{
    size_t n_curved, n_all;
    const uint32_t *curved = graph_curved(w.g, node[place], &n_curved);
    const uint32_t *all = graph_uncertain(w.g, node[place], &n_all);
    double tolerance = 1e-12 * size_of(place);
    ck_assert((n_curved > 0) == (graph_degree(w.g, node[place]) == 2));
    ck_assert((n_all > 0) == (graph_degree(w.g, node[place]) > 0));
    for (size_t i = 1; i < n_all; i++)
        ck_assert(all[i - 1] < all[i]);
    for (uint32_t i = 0; i < INPUTS; i++) {
        if (!holds(all, n_all, i))
            ck_assert(departure(place, i, true) <= tolerance);
        if (holds(curved, n_curved, i))
            ck_assert(holds(all, n_all, i));
        else
            ck_assert(departure(place, i, false) <= tolerance);
        *linear += n_curved > 0 && holds(all, n_all, i) && !holds(curved, n_curved, i);
    }
}

/* How far a sampled mean may be off. The variance of a latin hypercube of n points is at most
 * that of n - 1 independent ones (Owen, Annals of Statistics 25 (1997) 1541; from memory), which
 * is known here; six standard deviations of it. Where sampled means are carried on, the printed
 * error counts, and a little for rare cases that no point of the sample met. */
static double sample_tolerance(size_t place, double want)
{
    double variance = 0, se = means_error(w.m, node[place]);
    for (size_t c = 0; c < CASES; c++)
        variance += case_probability(c) * pow(value[place][c] - want, 2);
    return graph_bends(w.g, node[place]) ? 6 * sqrt(variance / (MEAN_SETS * (MEAN_STRATA - 1)))
                                         : 6 * se + 0.01 * (1 + size_of(place));
}

static void check_mean(size_t place, int *by_method)
{
    node_id n = node[place];
    double want = 0, size = size_of(place), got = mean_of(&w, n);
    for (size_t c = 0; c < CASES; c++)
        want += case_probability(c) * value[place][c];
    enum mean_method method = means_method(w.m, n);
    bool is_sampled = method == MEAN_SAMPLE;
    double tolerance = 1e-13 * size + (is_sampled ? sample_tolerance(place, want) : 0);
    ck_assert(is_sampled || means_error(w.m, n) == 0);
    ck_assert_msg(fabs(got - want) <= tolerance, "node %u (%s): %.17g, not %.17g +- %g",
                  (unsigned)n, graph_op_info(graph_at(w.g, n)->op)->name, got, want, tolerance);
    if (graph_degree(w.g, n) < 2)
        ck_assert(method == MEAN_EXACT && got == eval_value(w.v, n));
    by_method[method]++;
}

START_TEST(graphs_match_enumeration)
{
    struct random r = random_seed(31415);
    int by_method[3] = {0}, linear = 0, carried = 0;
    for (int k = 0; k < 300; k++) {
        teardown();
        setup();
        draw_graph(&r);
        for (size_t place = 0; place < PLACES; place++) {
            check_lists(place, &linear);
            check_mean(place, by_method);
            carried += graph_degree(w.g, node[place]) == 2 && !graph_bends(w.g, node[place]) &&
                       graph_at(w.g, node[place])->op != OP_PICK;
        }
    }
    for (int i = 0; i < 3; i++)
        ck_assert_int_gt(by_method[i], 500);
    ck_assert_int_gt(linear, 500);
    ck_assert_int_gt(carried, 500);
}
END_TEST

/* ---- sets of single operations ---- */

static void check_curved(node_id n, const char *want)
{
    size_t count;
    const uint32_t *list = graph_curved(w.g, n, &count);
    char got[64] = "";
    for (size_t i = 0; i < count; i++)
        got[i] = (char)('0' + list[i]), got[i + 1] = 0;
    ck_assert_msg(strcmp(got, want) == 0, "node %u: {%s}, not {%s}", (unsigned)n, got, want);
}

START_TEST(curved_inputs_of_operations)
{
    mean_world_open(&w, arena);
    node_id x[6];
    for (uint32_t i = 0; i < 6; i++)
        x[i] = graph_input(w.g, i, 0.5, mean_number);
    node_id xy = graph_op2(w.g, OP_MULTIPLY, x[1], x[2]), two = mean_const(&w, 2);
    node_id square = graph_op2(w.g, OP_MULTIPLY, xy, x[1]);
    check_curved(xy, "");
    check_curved(square, "1");
    check_curved(graph_op2(w.g, OP_ADD, square, graph_op1(w.g, OP_EXP, x[3])), "13");
    check_curved(graph_op2(w.g, OP_MULTIPLY, square, x[2]), "12");
    check_curved(graph_op2(w.g, OP_MULTIPLY, square, x[0]), "1");
    check_curved(graph_op2(w.g, OP_DIVIDE, xy, x[3]), "3");
    check_curved(graph_op2(w.g, OP_RATIO, xy, graph_op2(w.g, OP_ADD, xy, x[0])), "012");
    check_curved(graph_op2(w.g, OP_DIVIDE, square, two), "1");
    check_curved(graph_op2(w.g, OP_POWER, xy, two), "12");
    check_curved(graph_op2(w.g, OP_POWER, square, mean_const(&w, 1)), "1");
    check_curved(graph_op(w.g, OP_LOOKUP, 5, (node_id[]){x[0], two, square, two, x[4]}), "01");
    check_curved(graph_op2(w.g, OP_MIN, x[5], xy), "125");
    node_id d = graph_diagram(w.g, two_of_three(), 5, (node_id[]){xy, x[2], x[3], x[3], square});
    check_curved(d, "2");
    check_curved(graph_pick(w.g, d, 1), "2");
    ck_assert(graph_bends(w.g, d) && !graph_bends(w.g, graph_pick(w.g, d, 1)));
    node_id e = graph_diagram(w.g, two_of_three(), 3, (node_id[]){square, x[0], x[3]});
    check_curved(e, "1");
    ck_assert(!graph_bends(w.g, e));
    size_t n;
    const uint32_t *all = graph_uncertain(w.g, d, &n);
    ck_assert(n == 3 && all[0] == 1 && all[1] == 2 && all[2] == 3);
}
END_TEST

Suite *mean_random_suite(void)
{
    Suite *s = suite_create("means at random");
    TCase *t = tcase_create("means at random");
    tcase_set_timeout(t, 300);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, graphs_match_enumeration);
    tcase_add_test(t, curved_inputs_of_operations);
    suite_add_tcase(s, t);
    return s;
}
