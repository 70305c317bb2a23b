/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Means of diagrams whose variables have uncertain inputs of their own beside shared ones: against
 * enumeration of atoms, each with a graph of its own in which they are constants; and against fine
 * quadrature of closed forms. HELD. */
#include "mean_test.h"

#include <math.h>

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

static const struct dim per_year = {{0, 0, -1}};

/* ---- worlds that may be fixed ---- */

/* Atoms of inputs; an input is fixed at one of them, or uncertain. */
enum { ATOMS = 3, FREE = -1 };

struct setting {
    struct mean_world *w;
    int fixed[MEAN_INPUTS];
    const struct dist *dist;
};

static const double weights[ATOMS] = {0.25, 0.55, 0.2};
static double atoms[MEAN_INPUTS][ATOMS];

static struct dist atoms_of(uint32_t i, double low, double middle, double high)
{
    atoms[i][0] = low, atoms[i][1] = middle, atoms[i][2] = high;
    return (struct dist){
        .shape = DIST_DISCRETE, .n = ATOMS, .values = atoms[i], .probabilities = weights};
}

static struct dist lognormal(double median, double error_factor)
{
    return (struct dist){DIST_LOGNORMAL, {median, error_factor, NAN}, 0, NULL, NULL};
}

/* Input i as a number, or fixed. */
static node_id get(const struct setting *s, uint32_t i)
{
    if (s->fixed[i] != FREE)
        return mean_const(s->w, s->dist[i].values[s->fixed[i]]);
    return mean_input(s->w, i);
}

static node_id a_year(const struct setting *s, node_id x)
{
    return graph_op2(s->w->g, OP_MULTIPLY, x, graph_const(s->w->g, 1, per_year));
}

static node_id times(const struct setting *s, node_id x, node_id y)
{
    return graph_op2(s->w->g, OP_MULTIPLY, x, y);
}

static node_id course(const struct setting *s, double every, const node_id args[5])
{
    struct course c = {.from = -1.385, .first = 0.385, .every = every, .born = -7.25};
    return graph_course(s->w->g, &c, args);
}

/* Tested at intervals, with a rate (a number). */
static node_id tested(const struct setting *s, node_id rate, double every)
{
    node_id none = mean_const(s->w, 0), never = graph_const(s->w->g, 0, per_year);
    return course(s, every, (node_id[]){none, a_year(s, rate), never, none, never});
}

/* Two of three, the first and the last, any. */
static const struct diagram *gates(struct arena *a, uint32_t n)
{
    struct diagram_builder *b = diagram_builder_new(a);
    bfun f[8];
    for (uint32_t i = 0; i < n; i++)
        f[i] = diagram_variable(b, i);
    bfun last = diagram_and(b, f[0], f[n - 1]);
    return diagram_freeze(
        a, b, 3, (bfun[]){diagram_at_least(b, 2, n, f), last, diagram_at_least(b, 1, n, f)});
}

/* Picks of all roots in both windows, as one sum: its mean is a sum of theirs. */
static node_id total(const struct setting *s, size_t n, const node_id *args)
{
    static const struct window at[] = {{0, 1}, {2, 4.5}};
    const struct diagram *d = gates(s->w->arena, (uint32_t)n);
    node_id over = graph_diagram_over(s->w->g, d, n, args, &(struct windows){2, at});
    node_id terms[6];
    for (uint32_t k = 0; k < 6; k++)
        terms[k] =
            times(s, mean_const(s->w, 1 + 0.25 * k), graph_pick_in(s->w->g, over, k / 3, k % 3));
    return graph_op(s->w->g, OP_SUM, 6, terms);
}

typedef node_id build_fn(const struct setting *s);

struct found {
    double mean, error;
    enum mean_method method;
};

static struct found found_with(build_fn *build, size_t n, const struct dist *dist, const int *fixed)
{
    struct arena *a = arena_new(NULL);
    struct mean_world other;
    struct setting s = {.w = &other, .dist = dist};
    mean_world_open(&other, a);
    for (uint32_t i = 0; i < n; i++) {
        s.fixed[i] = fixed[i];
        mean_world_set(&other, i, dist[i]);
    }
    node_id root = build(&s);
    struct found f = {.mean = mean_of(&other, root)};
    f.error = means_error(other.m, root);
    f.method = means_method(other.m, root);
    arena_free(a);
    return f;
}

static struct found all_free(build_fn *build, size_t n, const struct dist *dist)
{
    int fixed[MEAN_INPUTS];
    for (size_t i = 0; i < n; i++)
        fixed[i] = FREE;
    return found_with(build, n, dist, fixed);
}

/* The mean over all combinations of atoms of the discrete inputs. */
static double enumerated(build_fn *build, size_t n, const struct dist *dist)
{
    size_t cases = 1;
    double sum = 0;
    for (size_t i = 0; i < n; i++)
        cases *= dist[i].shape == DIST_DISCRETE ? ATOMS : 1;
    for (size_t c = 0; c < cases; c++) {
        int fixed[MEAN_INPUTS];
        double p = 1;
        size_t rest = c;
        for (size_t i = 0; i < n; i++) {
            fixed[i] = FREE;
            if (dist[i].shape != DIST_DISCRETE)
                continue;
            fixed[i] = (int)(rest % ATOMS);
            p *= weights[rest % ATOMS];
            rest /= ATOMS;
        }
        sum += p * found_with(build, n, dist, fixed).mean;
    }
    return sum;
}

static void check_near(double got, double want, double tolerance)
{
    ck_assert_msg(fabs(got - want) <= tolerance * fabs(want), "%.17g, not %.17g (%.2g)", got, want,
                  got / want - 1);
}

/* ---- enumeration ---- */

/* Each with a rate of its own. */
static node_id own_rates(const struct setting *s)
{
    node_id args[] = {tested(s, get(s, 0), 1), tested(s, get(s, 1), 2.5), tested(s, get(s, 2), 4)};
    return total(s, 3, args);
}

START_TEST(own_rates_alone)
{
    struct dist d[] = {atoms_of(0, 0.01, 0.07, 0.6), atoms_of(1, 0, 0.02, 0.3),
                       atoms_of(2, 0.005, 0.2, 2.385)};
    struct found f = all_free(own_rates, 3, d);
    check_near(f.mean, enumerated(own_rates, 3, d), 1e-12);
    ck_assert(f.method == MEAN_QUADRATURE && f.error == 0);
}
END_TEST

/* Own part (1 - beta) u of two, the shock beta u, beta uncertain too; a rate of its own that
 * demands end; a plain curved number; something that leaves failed, linear. */
static node_id common_cause(const struct setting *s)
{
    struct graph *g = s->w->g;
    node_id u = get(s, 0), beta = get(s, 1), none = mean_const(s->w, 0);
    node_id own = times(s, graph_op1(g, OP_COMPLEMENT, beta), u);
    node_id ending = graph_const(g, 0.75, per_year), never = graph_const(g, 0, per_year);
    node_id square = times(s, get(s, 3), get(s, 3));
    node_id args[] = {
        tested(s, own, 1),
        course(s, 2.5, (node_id[]){none, a_year(s, own), never, get(s, 4), never}),
        tested(s, times(s, beta, u), 1),
        course(s, 4, (node_id[]){none, a_year(s, get(s, 2)), ending, none, a_year(s, get(s, 2))}),
        graph_op1(g, OP_COMPLEMENT, square),
        tested(s, mean_const(s->w, 0.0385), 1),
    };
    return total(s, 6, args);
}

START_TEST(common_cause_of_two)
{
    struct dist d[] = {atoms_of(0, 0.01, 0.07, 0.6), atoms_of(1, 0.02, 0.1, 0.3),
                       atoms_of(2, 0.005, 0.2, 2.385), atoms_of(3, 0.1, 0.4, 0.9),
                       atoms_of(4, 0, 0.1, 0.45)};
    struct found f = all_free(common_cause, 5, d);
    check_near(f.mean, enumerated(common_cause, 5, d), 1e-12);
    ck_assert(f.method == MEAN_QUADRATURE && f.error == 0);
}
END_TEST

/* Rates of own that are products with what two others share; two inputs of own in one. */
static node_id own_and_shared(const struct setting *s)
{
    node_id shared = get(s, 0), args[] = {
                                    tested(s, times(s, shared, get(s, 1)), 1),
                                    tested(s, times(s, get(s, 2), get(s, 3)), 2.5),
                                    graph_op2(s->w->g, OP_DIVIDE, shared,
                                              graph_op2(s->w->g, OP_ADD, get(s, 4), shared)),
                                };
    return total(s, 3, args);
}

START_TEST(own_inputs_beside_shared_ones)
{
    struct dist d[] = {atoms_of(0, 0.1, 0.3, 0.9), atoms_of(1, 0.02, 0.1, 1.3),
                       atoms_of(2, 0.05, 0.2, 2.385), atoms_of(3, 0.1, 0.4, 0.9),
                       atoms_of(4, 0.3, 1, 4)};
    struct found f = all_free(own_and_shared, 5, d);
    check_near(f.mean, enumerated(own_and_shared, 5, d), 1e-12);
    ck_assert(f.method == MEAN_QUADRATURE && f.error == 0);
}
END_TEST

/* The values of the evaluation are those at the means again behind the integration, that of a
 * course with an input of its own and a shared one among them. */
START_TEST(values_are_put_back)
{
    struct dist d[] = {atoms_of(0, 0.1, 0.3, 0.9), atoms_of(1, 0.02, 0.1, 1.3),
                       atoms_of(2, 0.05, 0.2, 2.385), atoms_of(3, 0.1, 0.4, 0.9),
                       atoms_of(4, 0.3, 1, 4)};
    struct setting s = {&w, {FREE, FREE, FREE, FREE, FREE}, d};
    for (uint32_t i = 0; i < 5; i++)
        mean_world_set(&w, i, d[i]);
    node_id root = own_and_shared(&s);
    mean_of(&w, root);
    struct eval *anew = eval_new(arena, w.g);
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(eval_point(anew, NULL, &e), OHMEN_OK);
    for (node_id n = 0; n < graph_size(w.g); n++)
        if (graph_at(w.g, n)->op != OP_DIAGRAM)
            ck_assert_msg(eval_value(w.v, n) == eval_value(anew, n), "%s: %.17g, %.17g",
                          graph_op_info(graph_at(w.g, n)->op)->name, eval_value(w.v, n),
                          eval_value(anew, n));
}
END_TEST

/* Of three inputs of one variable, one counts among the shared. */
static node_id three_own(const struct setting *s)
{
    node_id rate = times(s, times(s, get(s, 0), get(s, 1)), get(s, 2));
    node_id args[] = {tested(s, rate, 1), tested(s, get(s, 3), 2.5),
                      tested(s, mean_const(s->w, 0.2), 4)};
    return total(s, 3, args);
}

START_TEST(three_inputs_of_one_variable)
{
    struct dist d[] = {atoms_of(0, 0.1, 0.3, 0.9), atoms_of(1, 0.2, 1, 1.3),
                       atoms_of(2, 0.5, 2, 2.385), atoms_of(3, 0.1, 0.4, 0.9)};
    check_near(all_free(three_own, 4, d).mean, enumerated(three_own, 4, d), 1e-12);
}
END_TEST

/* The same without windows: courses are numbers there. */
static node_id still(const struct setting *s)
{
    node_id args[] = {times(s, get(s, 0), get(s, 1)), tested(s, get(s, 2), 2.5),
                      times(s, get(s, 3), times(s, get(s, 3), get(s, 0)))};
    node_id d = graph_diagram(s->w->g, gates(s->w->arena, 3), 3, args);
    return graph_op2(s->w->g, OP_ADD, graph_pick(s->w->g, d, 0), graph_pick(s->w->g, d, 2));
}

START_TEST(without_windows)
{
    struct dist d[] = {atoms_of(0, 0.1, 0.3, 0.9), atoms_of(1, 0.02, 0.1, 0.7),
                       atoms_of(2, 0.05, 0.2, 2.385), atoms_of(3, 0.1, 0.4, 0.9)};
    check_near(all_free(still, 4, d).mean, enumerated(still, 4, d), 1e-12);
}
END_TEST

/* ---- samples ---- */

/* Three that are shared. */
static node_id many_shared(const struct setting *s)
{
    node_id x = get(s, 0), y = get(s, 1), z = get(s, 2);
    node_id args[] = {
        tested(s, times(s, x, get(s, 3)), 1),
        tested(s, times(s, y, z), 2.5),
        tested(s, times(s, x, y), 4),
        times(s, get(s, 4), get(s, 4)),
        tested(s, z, 1),
    };
    return total(s, 5, args);
}

/* A sample has the same points whatever else is fixed, so that its mean over atoms is exact. */
START_TEST(sampled_and_own)
{
    struct dist d[] = {lognormal(0.1, 3), lognormal(0.3, 4), lognormal(0.2, 2.385),
                       atoms_of(3, 0.05, 0.2, 2.385), atoms_of(4, 0.1, 0.4, 0.9)};
    struct found f = all_free(many_shared, 5, d);
    ck_assert(f.method == MEAN_SAMPLE && f.error > 0 && f.error < 0.01 * f.mean);
    check_near(f.mean, enumerated(many_shared, 5, d), 1e-12);
}
END_TEST

/* ---- continuous inputs ---- */

/* E[f(median exp(s z))], by sums in steps of 1/32. */
static double over_lognormal(double median, double factor, double (*f)(double x))
{
    double sum = 0, weight = 0;
    for (int i = -13 * 32; i <= 13 * 32; i++) {
        double z = i / 32.0, phi = exp(-z * z / 2);
        sum += phi * f(median * exp(mean_sigma(factor) * z));
        weight += phi;
    }
    return sum / weight;
}

/* The average from one yearly test to the next, and its square's part without. */
static double tested_yearly(double rate)
{
    return rate < 1e-5 ? rate / 2 - rate * rate / 6 : 1 + expm1(-rate) / rate;
}

static node_id single(double factor, double median)
{
    mean_world_set(&w, 0, lognormal(median, factor));
    struct setting s = {.w = &w, .fixed = {FREE}};
    node_id c = tested(&s, mean_input(&w, 0), 1);
    const struct window at = {1.385, 3.385};
    struct diagram_builder *b = diagram_builder_new(arena);
    const bfun f = diagram_variable(b, 0);
    const struct diagram *d = diagram_freeze(arena, b, 1, &f);
    return graph_pick_in(w.g, graph_diagram_over(w.g, d, 1, &c, &(struct windows){1, &at}), 0, 0);
}

START_TEST(a_lognormal_rate_of_its_own)
{
    static const double factors[] = {2, 3, 5, 10}, medians[] = {1e-6, 1e-3, 0.0385, 0.3, 2.385};
    for (int i = 0; i < 4; i++)
        for (int k = 0; k < 5; k++) {
            teardown(), setup();
            node_id n = single(factors[i], medians[k]);
            double want = over_lognormal(medians[k], factors[i], tested_yearly);
            check_near(mean_of(&w, n), want, 1e-9);
        }
}
END_TEST

/* Two that have gamma-distributed exponents of their own, one course, and one that both share: with
 * E[exp(-x)] = (1 + mean / shape)^-shape. */
START_TEST(plain_numbers_of_their_own)
{
    mean_world_set(&w, 0, lognormal(0.03, 3));
    for (uint32_t i = 1; i < 3; i++)
        mean_world_set(&w, i, (struct dist){DIST_GAMMA, {0.8 * i, 2.385}, 0, NULL, NULL});
    struct setting s = {.w = &w, .fixed = {FREE, FREE, FREE}};
    node_id args[] = {tested(&s, mean_input(&w, 0), 1),
                      graph_op1(w.g, OP_EXP, graph_op1(w.g, OP_NEGATE, mean_input(&w, 1))),
                      graph_op1(w.g, OP_EXP, graph_op1(w.g, OP_NEGATE, mean_input(&w, 2)))};
    const struct window at = {1.385, 3.385};
    node_id d = graph_diagram_over(w.g, mean_all_of(arena, 3), 3, args, &(struct windows){1, &at});
    double want = over_lognormal(0.03, 3, tested_yearly);
    for (uint32_t i = 1; i < 3; i++)
        want *= pow(1 + 0.8 * i / 2.385, -2.385);
    check_near(mean_of(&w, graph_pick_in(w.g, d, 0, 0)), want, 2e-9);
    check_near(mean_of(&w, graph_pick_in(w.g, d, 0, 1)), 1 - want, 1e-9);
}
END_TEST

/* ---- what holds its mean ---- */

START_TEST(held_at_its_mean)
{
    mean_world_set(&w, 0, lognormal(0.7, 5));
    mean_world_set(&w, 1, lognormal(0.3, 3));
    node_id x = mean_input(&w, 0), y = mean_input(&w, 1),
            square = graph_op2(w.g, OP_MULTIPLY, x, x);
    node_id held = graph_op1(w.g, OP_HELD, square), same = graph_op1(w.g, OP_HELD, x);
    double sx = mean_sigma(5), want = 0.49 * exp(2 * sx * sx);
    check_near(mean_of(&w, held), want, 1e-13);
    ck_assert_int_eq(means_method(w.m, held), MEAN_QUADRATURE);
    ck_assert(eval_value(w.v, held) == eval_value(w.v, square));
    check_near(mean_of(&w, graph_op1(w.g, OP_LOG, held)), log(want), 1e-13);
    node_id product = graph_op2(w.g, OP_MULTIPLY, held, y);
    check_near(mean_of(&w, product), want * mean_of(&w, y), 1e-13);
    node_id twice = graph_op2(w.g, OP_MULTIPLY, same, x);
    check_near(mean_of(&w, twice), mean_of(&w, x) * mean_of(&w, x), 1e-15);
    ck_assert_int_eq(means_method(w.m, twice), MEAN_EXACT);
    node_id knot = graph_op2(w.g, OP_MULTIPLY, graph_op2(w.g, OP_MULTIPLY, product, y), same);
    double sy = mean_sigma(3);
    check_near(mean_of(&w, knot), want * 0.09 * exp(2 * sy * sy) * mean_of(&w, x), 1e-12);
    double at_means = pow(mean_of(&w, x), 3) * pow(mean_of(&w, y), 2);
    check_near(eval_value(w.v, knot), at_means, 1e-14);
}
END_TEST

/* What is held moves diagrams and what they are made of, in the rate at which something ends. */
START_TEST(held_below_a_diagram)
{
    mean_world_set(&w, 0, lognormal(0.9, 4));
    mean_world_set(&w, 1, atoms_of(1, 0.05, 0.2, 2.385));
    struct setting s = {.w = &w, .fixed = {FREE, FREE}, .dist = w.dist};
    node_id x = mean_input(&w, 0), none = mean_const(&w, 0), never = graph_const(w.g, 0, per_year);
    node_id held = graph_op1(w.g, OP_HELD, times(&s, x, x));
    double ending = mean_of(&w, held), sum = 0;
    node_id args[] = {
        course(&s, 1,
               (node_id[]){none, a_year(&s, mean_input(&w, 1)), a_year(&s, held), none, never}),
        course(&s, 4, (node_id[]){none, a_year(&s, held), never, none, never})};
    node_id root = total(&s, 2, args);
    double value = (eval_point(w.v, NULL, NULL), eval_value(w.v, root)), got = mean_of(&w, root);
    for (int k = 0; k < ATOMS; k++) {
        node_id end = graph_const(w.g, ending, per_year);
        node_id rate = graph_const(w.g, atoms[1][k], per_year);
        node_id fixed[] = {course(&s, 1, (node_id[]){none, rate, end, none, never}),
                           course(&s, 4, (node_id[]){none, end, never, none, never})};
        sum += weights[k] * mean_of(&w, total(&s, 2, fixed));
    }
    check_near(got, sum, 1e-12);
    ck_assert(value == eval_value(w.v, root) && fabs(value - got) > 0.01 * got);
    check_near(mean_of(&w, graph_op2(w.g, OP_ADD, root, held)), got + ending, 1e-15);
}
END_TEST

Suite *mean_blend_suite(void)
{
    Suite *s = suite_create("blends");
    TCase *t = tcase_create("blends");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, own_rates_alone);
    tcase_add_test(t, common_cause_of_two);
    tcase_add_test(t, own_inputs_beside_shared_ones);
    tcase_add_test(t, values_are_put_back);
    tcase_add_test(t, three_inputs_of_one_variable);
    tcase_add_test(t, without_windows);
    tcase_add_test(t, sampled_and_own);
    tcase_add_test(t, a_lognormal_rate_of_its_own);
    tcase_add_test(t, plain_numbers_of_their_own);
    tcase_add_test(t, held_at_its_mean);
    tcase_add_test(t, held_below_a_diagram);
    suite_add_tcase(s, t);
    return s;
}
