/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means of single nodes against closed forms: quadrature over one and two inputs, atoms, what
 * needs no integration, and what fails. */
#include "mean_test.h"

#include "failmem.h"

#include <math.h>
#include <string.h>

static struct mean_world w;
static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
    mean_world_open(&w, arena);
}

static void teardown(void)
{
    arena_free(arena);
}

static void again(void)
{
    teardown();
    setup();
}

static struct dist lognormal(double median, double error_factor)
{
    return (struct dist){DIST_LOGNORMAL, {median, error_factor, NAN}, 0, NULL, NULL};
}

static struct dist gamma_of(double mean, double shape)
{
    return (struct dist){DIST_GAMMA, {mean, shape}, 0, NULL, NULL};
}

static node_id op2(enum graph_op op, node_id x, node_id y)
{
    return graph_op2(w.g, op, x, y);
}

static void check_near(double got, double want, double tolerance, const char *what)
{
    ck_assert_msg(fabs(got - want) <= tolerance * fabs(want), "%s: %.17g, not %.17g (%.2g)", what,
                  got, want, got / want - 1);
}

/* ---- two variables of a diagram that share an input ---- */

/* The ratio of E[x^2] to E[x]^2 is exp(s^2): 2.6 at an error factor of 5 (Apostolakis, Kaplan,
 * Pitfalls in risk calculations, Reliability Engineering 2 (1981) 135; from memory); the others
 * are computed. */
START_TEST(shared_lognormal)
{
    static const struct {
        double factor, printed, tolerance;
    } rows[] = {{3, 1.56, 5e-3}, {5, 2.60, 5e-3}, {10, 7.09679, 5e-6}};
    for (size_t i = 0; i < 3; i++) {
        again();
        mean_world_set(&w, 0, lognormal(2.385e-3, rows[i].factor));
        node_id x = mean_input(&w, 0);
        node_id d = graph_diagram(w.g, mean_all_of(arena, 2), 2, (node_id[]){x, x});
        node_id both = graph_pick(w.g, d, 0), not_both = graph_pick(w.g, d, 1);
        double s = mean_sigma(rows[i].factor), mean = mean_of(&w, x);
        double ratio = mean_of(&w, both) / (mean * mean);
        check_near(ratio, exp(s * s), 1e-13, "E[x^2] / E[x]^2");
        ck_assert(fabs(ratio - rows[i].printed) <= rows[i].tolerance);
        check_near(mean_of(&w, not_both), 1 - mean_of(&w, both), 1e-15, "1 - E[x^2]");
        ck_assert_int_eq(means_method(w.m, both), MEAN_QUADRATURE);
        ck_assert(means_error(w.m, both) == 0);
        ck_assert(eval_value(w.v, both) == mean * mean);
    }
}
END_TEST

/* E[x^2] / E[x]^2 = 1 + 1 / shape = 3. */
START_TEST(shared_gamma)
{
    mean_world_set(&w, 0, gamma_of(2.385e-3, 0.5));
    node_id x = mean_input(&w, 0), square = op2(OP_MULTIPLY, x, x);
    check_near(mean_of(&w, square), 3 * 2.385e-3 * 2.385e-3, 1e-10, "gamma");
}
END_TEST

/* ---- shapes ---- */

/* E[x^2] and its closed form. */
struct shape_row {
    const char *name;
    struct dist dist;
    double square, tolerance;
};

/* Of a lognormal that is cut off at c, P the normal distribution function:
 * m^2 exp(2 s^2) P(a - 2 s) / P(a), a = log(c / m) / s. */
static double truncated_square(double median, double factor, double most)
{
    double s = mean_sigma(factor), a = log(most / median) / s;
    double upper = erfc(-(a - 2 * s) / sqrt(2)), lower = erfc(-a / sqrt(2));
    return median * median * exp(2 * s * s) * upper / lower;
}

/* Beta: a (a + 1) / ((a + b)(a + b + 1)); triangular (b the mode): (a^2 + b^2 + c^2 + ab + ac +
 * bc) / 6. The triangular quantile has a kink in its second derivative. */
START_TEST(squares_by_shape)
{
    const double s10 = mean_sigma(10);
    const struct shape_row rows[] = {
        {"lognormal 3", lognormal(0.7, 3), 0.49 * exp(2 * pow(mean_sigma(3), 2)), 1e-13},
        {"lognormal 5", lognormal(0.7, 5), 0.49 * exp(2 * pow(mean_sigma(5), 2)), 1e-13},
        {"lognormal 10", lognormal(0.7, 10), 0.49 * exp(2 * s10 * s10), 1e-13},
        {"gamma 0.5", gamma_of(0.7, 0.5), 3 * 0.49, 1e-10},
        {"gamma 3", gamma_of(0.7, 3), 0.49 * 4 / 3, 1e-12},
        {"beta", {DIST_BETA, {0.5, 31.5}, 0, 0, 0}, 0.5 * 1.5 / (32 * 33.0), 1e-10},
        {"uniform", {DIST_UNIFORM, {0.2, 1.3}, 0, 0, 0}, (2.197 - 0.008) / 3.3, 1e-12},
        {"triangular",
         {DIST_TRIANGULAR, {0.2, 0.5, 1.3}, 0, 0, 0},
         (0.04 + 0.25 + 1.69 + 0.1 + 0.26 + 0.65) / 6,
         1e-6},
        {"truncated", {DIST_LOGNORMAL, {0.1, 10, 1}, 0, 0, 0}, truncated_square(0.1, 10, 1), 1e-9},
        {"normal", {DIST_NORMAL, {2.385, 0.3}, 0, 0, 0}, 2.385 * 2.385 + 0.09, 1e-14},
    };
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        again();
        mean_world_set(&w, 0, rows[i].dist);
        node_id x = mean_input(&w, 0);
        check_near(mean_of(&w, graph_op2(w.g, OP_POWER, x, mean_const(&w, 2))), rows[i].square,
                   rows[i].tolerance, rows[i].name);
    }
}
END_TEST

/* E[exp(-x)] of a gamma is (1 + mean / shape)^-shape (its Laplace transform). */
START_TEST(laplace_transform_of_gamma)
{
    static const double shapes[] = {0.3, 0.5, 1, 2.385, 40};
    for (size_t i = 0; i < 5; i++) {
        again();
        mean_world_set(&w, 0, gamma_of(0.8, shapes[i]));
        node_id minus = graph_op1(w.g, OP_NEGATE, mean_input(&w, 0));
        node_id n = graph_op1(w.g, OP_EXP, minus);
        check_near(mean_of(&w, n), pow(1 + 0.8 / shapes[i], -shapes[i]), 1e-9, "exp(-x)");
    }
}
END_TEST

/* E[max(x, c)] = c P(d) + mean P(s - d), d = log(c / m) / s, P the normal distribution function. */
START_TEST(a_kink)
{
    static const double bounds[] = {0.05, 0.5, 0.7, 1.9, 20};
    double s = mean_sigma(5), mean = 0.7 * exp(s * s / 2);
    for (size_t i = 0; i < 5; i++) {
        again();
        mean_world_set(&w, 0, lognormal(0.7, 5));
        double d = log(bounds[i] / 0.7) / s;
        double want = bounds[i] * erfc(-d / sqrt(2)) / 2 + mean * erfc((d - s) / sqrt(2)) / 2;
        node_id n = op2(OP_MAX, mean_input(&w, 0), mean_const(&w, bounds[i]));
        check_near(mean_of(&w, n), want, 2e-6, "max");
    }
}
END_TEST

/* A step of 1 at b: P(x >= b). */
START_TEST(a_jump)
{
    static const double bounds[] = {0.05, 0.5, 0.7, 1.9, 20};
    double s = mean_sigma(5);
    for (size_t i = 0; i < 5; i++) {
        again();
        mean_world_set(&w, 0, lognormal(0.7, 5));
        node_id args[] = {mean_input(&w, 0), mean_const(&w, 0), mean_const(&w, 0),
                          mean_const(&w, bounds[i]), mean_const(&w, 1)};
        double want = erfc(log(bounds[i] / 0.7) / s / sqrt(2)) / 2;
        double got = mean_of(&w, graph_op(w.g, OP_LOOKUP, 5, args));
        ck_assert_msg(fabs(got - want) <= 4e-4, "%g: %.6g, not %.6g", bounds[i], got, want);
    }
}
END_TEST

/* ---- two inputs ---- */

/* (x y)(x y) y = x^2 y^3, E[x^k] = m^k exp(k^2 s^2 / 2). */
START_TEST(two_lognormals)
{
    mean_world_set(&w, 0, lognormal(0.7, 5));
    mean_world_set(&w, 1, lognormal(1.9, 10));
    node_id x = mean_input(&w, 0), y = mean_input(&w, 1), xy = op2(OP_MULTIPLY, x, y);
    node_id n = op2(OP_MULTIPLY, op2(OP_MULTIPLY, xy, xy), y);
    double sx = mean_sigma(5), sy = mean_sigma(10);
    double want = 0.49 * exp(2 * sx * sx) * pow(1.9, 3) * exp(4.5 * sy * sy);
    check_near(mean_of(&w, n), want, 1e-10, "x^2 y^3");
    ck_assert_int_eq(means_method(w.m, n), MEAN_QUADRATURE);
}
END_TEST

/* exp(-x) exp(-x y), y 1 or 3: the mean over y of the transform at 1 + y. */
START_TEST(a_gamma_and_atoms)
{
    static const double at[] = {1, 3}, p[] = {0.3, 0.7};
    mean_world_set(&w, 0, gamma_of(0.8, 0.5));
    mean_world_set(&w, 1,
                   (struct dist){.shape = DIST_DISCRETE, .n = 2, .values = at, .probabilities = p});
    node_id x = graph_op1(w.g, OP_NEGATE, mean_input(&w, 0));
    node_id sum = op2(OP_ADD, x, op2(OP_MULTIPLY, x, mean_input(&w, 1)));
    double want = 0.3 * pow(1 + 2 * 1.6, -0.5) + 0.7 * pow(1 + 4 * 1.6, -0.5);
    check_near(mean_of(&w, graph_op1(w.g, OP_EXP, sum)), want, 1e-9, "exp(-x - x y)");
}
END_TEST

/* x >= y of two alike is 1/2, but a grid has jumps there: it is sampled. */
START_TEST(a_jump_between_two_is_sampled)
{
    mean_world_set(&w, 0, lognormal(0.7, 5));
    mean_world_set(&w, 1, lognormal(0.8, 5));
    node_id x = mean_input(&w, 0), y = mean_input(&w, 1), zero = mean_const(&w, 0);
    node_id ratio = op2(OP_DIVIDE, x, y), one = mean_const(&w, 1);
    node_id n = graph_op(w.g, OP_LOOKUP, 5, (node_id[]){ratio, zero, zero, one, one});
    double want = erfc(log(0.8 / 0.7) / mean_sigma(5) / 2) / 2, got = mean_of(&w, n);
    ck_assert_int_eq(means_method(w.m, n), MEAN_SAMPLE);
    ck_assert(means_error(w.m, n) > 1e-4 && means_error(w.m, n) < 0.02);
    ck_assert(fabs(got - want) <= 4 * means_error(w.m, n));
}
END_TEST

/* ---- what needs no integration ---- */

/* A product of independent things is the product of their means, however curved these are, and
 * a sum is a sum, whatever it shares. */
START_TEST(products_and_sums)
{
    for (uint32_t i = 0; i < 5; i++)
        mean_world_set(&w, i, lognormal(0.7 + i, 3 + i));
    node_id x[5], square[5];
    for (uint32_t i = 0; i < 5; i++) {
        x[i] = mean_input(&w, i);
        square[i] = op2(OP_MULTIPLY, x[i], x[i]);
    }
    node_id product = op2(OP_MULTIPLY, op2(OP_MULTIPLY, square[0], square[1]), x[2]);
    node_id sum = graph_op(w.g, OP_SUM, 4, (node_id[]){product, square[0], x[0], square[3]});
    node_id wide = op2(OP_MULTIPLY, op2(OP_MULTIPLY, product, square[3]), square[4]);
    ck_assert(mean_of(&w, product) ==
              mean_of(&w, square[0]) * mean_of(&w, square[1]) * mean_of(&w, x[2]));
    double parts[] = {mean_of(&w, product), mean_of(&w, square[0]), mean_of(&w, x[0]),
                      mean_of(&w, square[3])};
    ck_assert(mean_of(&w, sum) == graph_point(OP_SUM, 4, parts));
    ck_assert_int_eq(means_method(w.m, wide), MEAN_QUADRATURE);
    double want = 1;
    for (uint32_t i = 0; i < 5; i++) {
        double s = mean_sigma(3 + i), median = 0.7 + i;
        want *= i == 2 ? median * exp(s * s / 2) : median * median * exp(2 * s * s);
    }
    check_near(mean_of(&w, wide), want, 1e-12, "product of squares");
}
END_TEST

/* exp(exp(x)) has no more curved inputs than exp(x), and is yet another knot: for atoms. */
START_TEST(a_curve_in_a_curve)
{
    static const double at[] = {0.1, 0.7, 1.2}, p[] = {0.25, 0.5, 0.25};
    mean_world_set(&w, 0,
                   (struct dist){.shape = DIST_DISCRETE, .n = 3, .values = at, .probabilities = p});
    node_id once = graph_op1(w.g, OP_EXP, mean_input(&w, 0)), n = graph_op1(w.g, OP_EXP, once);
    double want = 0;
    for (int i = 0; i < 3; i++)
        want += p[i] * exp(exp(at[i]));
    check_near(mean_of(&w, n), want, 1e-15, "exp(exp(x))");
}
END_TEST

/* A diagram of independent curved arguments is evaluated at their means, and a complement of a
 * tiny one keeps its digits. */
START_TEST(diagrams_of_curved_arguments)
{
    mean_world_set(&w, 0, lognormal(1e-12, 5));
    mean_world_set(&w, 1, lognormal(1e-10, 3));
    node_id x = mean_input(&w, 0), y = mean_input(&w, 1);
    node_id xx = op2(OP_MULTIPLY, x, x), yy = op2(OP_MULTIPLY, y, y);
    node_id args[] = {graph_op1(w.g, OP_COMPLEMENT, xx), graph_op1(w.g, OP_COMPLEMENT, yy)};
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun none = diagram_and(b, diagram_not(b, diagram_variable(b, 0)),
                            diagram_not(b, diagram_variable(b, 1)));
    const struct diagram *d = diagram_freeze(arena, b, 1, &none);
    node_id n = graph_pick(w.g, graph_diagram(w.g, d, 2, args), 0);
    ck_assert(!graph_bends(w.g, graph_args(w.g, n)[0]));
    check_near(mean_of(&w, n), mean_of(&w, xx) * mean_of(&w, yy), 1e-15, "x^2 y^2");
    ck_assert(eval_value(w.v, n) < 0.9 * mean_of(&w, n));
}
END_TEST

/* The values of the evaluation, results of diagrams among them, are the same bits after it. */
START_TEST(values_are_left_as_they_were)
{
    for (uint32_t i = 0; i < 4; i++)
        mean_world_set(&w, i, lognormal(0.01 * (1 + i), 5));
    node_id x = mean_input(&w, 0), y = mean_input(&w, 1), xy = op2(OP_MULTIPLY, x, y);
    node_id args[] = {x, xy, op2(OP_MULTIPLY, mean_input(&w, 2), mean_input(&w, 3)), y};
    node_id d = graph_diagram(w.g, mean_all_of(arena, 4), 4, args);
    node_id n = graph_op1(w.g, OP_SQRT, op2(OP_MULTIPLY, graph_pick(w.g, d, 0), args[2]));
    ck_assert_int_eq(eval_point(w.v, NULL, NULL), OHMEN_OK);
    double before[32], derivative[32], after[32];
    for (node_id i = 0; i <= n; i++)
        before[i] = graph_at(w.g, i)->op == OP_DIAGRAM ? 0 : eval_value(w.v, i);
    eval_backward(w.v, n, derivative);
    ck_assert(mean_of(&w, n) > 0);
    ck_assert_int_eq(means_method(w.m, n), MEAN_SAMPLE);
    for (node_id i = 0; i <= n; i++)
        ck_assert(graph_at(w.g, i)->op == OP_DIAGRAM || before[i] == eval_value(w.v, i));
    eval_backward(w.v, n, after);
    ck_assert(memcmp(derivative, after, (n + 1) * sizeof *after) == 0);
}
END_TEST

/* Means come as nodes are appended, and those of before stay. */
START_TEST(means_are_incremental)
{
    mean_world_set(&w, 0, lognormal(0.7, 5));
    node_id x = mean_input(&w, 0), square = op2(OP_MULTIPLY, x, x);
    double first = mean_of(&w, square);
    node_id more = op2(OP_ADD, square, x), cube = op2(OP_MULTIPLY, square, x);
    double s = mean_sigma(5);
    ck_assert(mean_of(&w, more) == first + mean_of(&w, x));
    check_near(mean_of(&w, cube), pow(0.7, 3) * exp(4.5 * s * s), 1e-13, "x^3");
    ck_assert(mean_of(&w, square) == first);
}
END_TEST

/* ---- what fails ---- */

START_TEST(what_is_not_finite_somewhere)
{
    static const double at[] = {0, 3}, p[] = {0.5, 0.5};
    mean_world_set(&w, 0,
                   (struct dist){.shape = DIST_DISCRETE, .n = 2, .values = at, .probabilities = p});
    node_id x = mean_input(&w, 0), fine = op2(OP_MULTIPLY, x, x);
    node_id n = op2(OP_DIVIDE, fine, x), culprit = NODE_NONE;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(eval_point(w.v, NULL, NULL), OHMEN_OK);
    ck_assert_int_eq(means_update(w.m, &culprit, &e), OHMEN_COMPUTE);
    ck_assert_uint_eq(culprit, n);
    ck_assert_str_eq(e.text, "node 2 (divide) of the calculation has no finite mean");
    ck_assert(means_value(w.m, fine) == 4.5);
    ck_assert(eval_value(w.v, x) == 1.5 && eval_value(w.v, fine) == 2.25);
    ck_assert_int_eq(means_update(w.m, NULL, NULL), OHMEN_COMPUTE);
}
END_TEST

START_TEST(what_has_no_quantiles)
{
    for (uint32_t i = 0; i < 3; i++)
        mean_world_set(&w, i, lognormal(0.7, 5));
    w.has_quantiles = false;
    node_id x = mean_input(&w, 0), y = mean_input(&w, 1), z = mean_input(&w, 2);
    node_id line = op2(OP_ADD, op2(OP_MULTIPLY, x, y), z), culprit = NODE_NONE;
    node_id n = graph_op1(w.g, OP_EXP, line);
    ck_assert_int_eq(eval_point(w.v, NULL, NULL), OHMEN_OK);
    ck_assert_int_eq(means_update(w.m, &culprit, NULL), OHMEN_COMPUTE);
    ck_assert_uint_eq(culprit, n);
    ck_assert(means_value(w.m, line) == eval_value(w.v, line));
}
END_TEST

/* Everything once, in an arena of the given seam; false when memory ran out. */
static bool whole_job(const struct mem *mem, double *result)
{
    struct arena *volatile a = arena_new(mem);
    static struct mean_world job;
    jmp_buf out_of_memory;
    if (!a)
        return false;
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &out_of_memory);
    mean_world_open(&job, a);
    for (uint32_t i = 0; i < 3; i++)
        mean_world_set(&job, i, lognormal(0.01, 3));
    node_id x[] = {mean_input(&job, 0), mean_input(&job, 1), mean_input(&job, 2)};
    node_id two = graph_op2(job.g, OP_MULTIPLY, x[0], x[1]);
    node_id d = graph_diagram(job.g, mean_all_of(a, 3), 3, (node_id[]){two, x[2], x[0]});
    node_id n = graph_op2(job.g, OP_MULTIPLY, graph_pick(job.g, d, 0), two);
    n = graph_op2(job.g, OP_MULTIPLY, n, x[2]);
    if (eval_point(job.v, NULL, NULL) == OHMEN_OK && means_update(job.m, NULL, NULL) == OHMEN_OK)
        *result = means_value(job.m, n) + means_error(job.m, n);
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
        ck_assert(!done || result > 0);
    }
    ck_assert_uint_gt(k, 4);
}
END_TEST

Suite *mean_knot_suite(void)
{
    Suite *s = suite_create("knots");
    TCase *t = tcase_create("knots");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, shared_lognormal);
    tcase_add_test(t, shared_gamma);
    tcase_add_test(t, squares_by_shape);
    tcase_add_test(t, laplace_transform_of_gamma);
    tcase_add_test(t, a_kink);
    tcase_add_test(t, a_jump);
    tcase_add_test(t, two_lognormals);
    tcase_add_test(t, a_gamma_and_atoms);
    tcase_add_test(t, a_jump_between_two_is_sampled);
    tcase_add_test(t, products_and_sums);
    tcase_add_test(t, a_curve_in_a_curve);
    tcase_add_test(t, diagrams_of_curved_arguments);
    tcase_add_test(t, values_are_left_as_they_were);
    tcase_add_test(t, means_are_incremental);
    tcase_add_test(t, what_is_not_finite_somewhere);
    tcase_add_test(t, what_has_no_quantiles);
    tcase_add_test(t, memory_may_run_out_anywhere);
    suite_add_tcase(s, t);
    return s;
}
