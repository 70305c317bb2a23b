/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Exponential utility: closed forms, what it comes to for a great risk tolerance, and refusals. */
#include "decide/utility.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "loaded.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

#define SETTINGS(years)                                                                            \
    "register: {title: T, currency: EUR, prices: 2026, horizon: " years " a, discount: 4 % per "   \
    "a}\n"
#define HAZARD(frequency, damage)                                                                  \
    "hazards: {H: {name: H, frequency: " frequency ", response: {never: {outcome: lost}}, "        \
    "outcomes: {lost: {name: Lost, damage: {r: {category: c, " damage "}}}}}}\n"
#define DECISION                                                                                   \
    "options: {O: {name: O, invest: 20 kEUR, change: {hazards: {H: {frequency: 0 per a}}}}}\n"     \
    "decisions: {D: {question: What?, options: [O], risk-tolerance: 50 kEUR}}\n"

struct world {
    struct loaded l;
    struct weighing *w;
    const struct loss_case *cases;
    struct loss_world *world;
};

static void load(struct world *x, const char *text)
{
    struct sampling_plan plan = sampling_defaults();
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(&x->l, arena, text, NULL);
    ck_assert_msg(weigh_compile(x->l.figures, "D", &x->w, &e) == OHMEN_OK, "%s", e.text);
    ck_assert_int_eq(loss_of_weighing(x->l.figures, x->w, &x->cases, &e), OHMEN_OK);
    loaded_evaluate(&x->l);
    ck_assert_msg(loss_world_new(x->l.figures, arena, x->w->alternatives.n, x->cases, &plan,
                                 &x->world, &e) == OHMEN_OK,
                  "%s", e.text);
}

static struct utility of_nothing(const char *text, double tolerance)
{
    static struct world x;
    struct utility u;
    ohmen_error e = OHMEN_ERROR_INIT;
    load(&x, text);
    ck_assert_msg(utility_find(x.world, arena, &x.cases[0], tolerance, &u, &e) == OHMEN_OK, "%s",
                  e.text);
    return u;
}

static void refused(const char *text, double tolerance, const char *words)
{
    struct world x;
    struct utility u;
    ohmen_error e = OHMEN_ERROR_INIT;
    load(&x, text);
    ck_assert_int_eq(utility_find(x.world, arena, &x.cases[0], tolerance, &u, &e), OHMEN_COMPUTE);
    ck_assert_msg(strstr(e.text, words) != NULL, "\"%s\" lacks \"%s\"", e.text, words);
}

static void check_near(double got, double want, double relative)
{
    ck_assert_msg(fabs(got - want) <= relative * fabs(want), "%.12g is not %.12g", got, want);
}

/* R n sum of (M(v_y / R) - 1) over three years, v_y = 1.04^-(y + 1/2). */
static double by_years(double tolerance, double often, double (*transform)(double t))
{
    double sum = 0;
    for (int y = 0; y < 3; y++)
        sum += often * (transform(pow(1.04, -(y + 0.5)) / tolerance) - 1);
    return tolerance * sum;
}

static double of_constant(double t)
{
    return exp(30000 * t);
}

static double of_normal(double t)
{
    return exp(30000 * t + 5000. * 5000. * t * t / 2);
}

/* Mean 30 kEUR and shape 3: scale 10 kEUR. */
static double of_gamma(double t)
{
    return pow(1 - 10000 * t, -3);
}

START_TEST(closed_forms)
{
    struct utility u = of_nothing(SETTINGS("3") HAZARD("0.2 per a", "is: 30 kEUR") DECISION, 50000);
    check_near(u.damage, by_years(50000, 0.2, of_constant), 1e-12);
    ck_assert(u.error == 0);
    u = of_nothing(SETTINGS("3") HAZARD(
                       "0.2 per a", "varies: {shape: normal, mean: 30 kEUR, standard-deviation: 5 "
                                    "kEUR}") DECISION,
                   50000);
    check_near(u.damage, by_years(50000, 0.2, of_normal), 1e-12);
    u = of_nothing(SETTINGS("3") HAZARD("0.2 per a", "varies: {shape: gamma, mean: 30 kEUR, "
                                                     "shape-parameter: 3}") DECISION,
                   50000);
    check_near(u.damage, by_years(50000, 0.2, of_gamma), 1e-12);
}
END_TEST

/* A rate that is gamma with shape 4 and mean .2: E[exp(c g)] = (1 - c scale)^-4. The sample of it
 * has a standard error. */
START_TEST(gamma_rate)
{
    struct utility u = of_nothing(SETTINGS("3") HAZARD("{shape: gamma, mean: 0.2 per a, "
                                                       "shape-parameter: 4}",
                                                       "is: 30 kEUR") DECISION,
                                  50000);
    double c = by_years(50000, 1, of_constant) / 50000;
    double want = -50000 * 4 * log(1 - c * 0.05);
    ck_assert_msg(fabs(u.damage - want) <= 4 * u.error && u.error < 0.01 * want,
                  "%.9g +- %.3g is not %.9g", u.damage, u.error, want);
}
END_TEST

/* Integrated transforms against others: a lognormal that is cut, by its mean for small x; a
 * triangular one by parts: 2 ((b-m) e^(a x) - (b-a) e^(m x) + (m-a) e^(b x)) / (... x^2). */
START_TEST(transforms)
{
    struct dist triangular = {.shape = DIST_TRIANGULAR, .p = {1, 2, 5}};
    struct dist cut = {.shape = DIST_LOGNORMAL, .p = {3, 4, 20}};
    struct dist heavy = {.shape = DIST_LOGNORMAL, .p = {3, 4, NAN}};
    struct dist gamma = {.shape = DIST_GAMMA, .p = {2, 4}};
    double x = 0.7, a = 1, m = 2, b = 5;
    double want = 2 * ((b - m) * exp(a * x) - (b - a) * exp(m * x) + (m - a) * exp(b * x)) /
                  ((b - a) * (m - a) * (b - m) * x * x);
    check_near(utility_transform(&triangular, x), want, 1e-5);
    check_near(utility_transform(&cut, 1e-6), 1 + 1e-6 * dist_mean(&cut), 1e-10);
    ck_assert(utility_transform(&heavy, 0.1) == INFINITY);
    ck_assert(utility_transform(&heavy, -0.1) < 1);
    ck_assert(utility_transform(&gamma, 2) == INFINITY && utility_transform(&gamma, 1.99) > 1e3);
}
END_TEST

/* For a great risk tolerance it is the present damage of the graph; and of an even chance of 0 and
 * 100 with R = 50 it is 50 log((1 + e^2) / 2). */
START_TEST(great_tolerance)
{
    static const char *const text = SETTINGS("20")
        HAZARD("0.2 per a", "varies: {shape: uniform, from: 10 kEUR, to: 50 kEUR}") DECISION;
    struct world x;
    struct utility u;
    load(&x, text);
    double present = figure_value(x.l.figures, x.w->alternatives.at[0].present_damage);
    ck_assert_int_eq(utility_find(x.world, arena, &x.cases[0], 1e10, &u, NULL), OHMEN_OK);
    check_near(u.damage, present, 1e-5);
    ck_assert_int_eq(utility_find(x.world, arena, &x.cases[0], 1e5, &u, NULL), OHMEN_OK);
    ck_assert(u.damage > 1.05 * present);
    ck_assert(utility_tolerance(x.w) == 50000);
    check_near(utility_equivalent(2, (double[]){0, 100}, 50), 50 * log((1 + exp(2)) / 2), 1e-14);
}
END_TEST

START_TEST(refusals)
{
    refused(SETTINGS("3") HAZARD("0.2 per a", "varies: 90 % within 10 kEUR .. 50 kEUR") DECISION,
            50000,
            "the outcome \"lost\" of \"H\" has no certainty equivalent: H.damage.lost.r is "
            "lognormal; state the most that it can be (at-most)");
    refused(SETTINGS("3") HAZARD("0.2 per a", "varies: {shape: gamma, mean: 30 kEUR, "
                                              "shape-parameter: 3}") DECISION,
            9000, "H.damage.lost.r is a gamma whose scale is not below the risk tolerance");
    refused(SETTINGS("3") HAZARD("90 % within 0.1 per a .. 0.3 per a", "is: 30 kEUR") DECISION,
            50000, "H.frequency is unknown as a lognormal");
    refused(SETTINGS("3") HAZARD("0.2 per a", "is: 90 % within 10 kEUR .. 50 kEUR") DECISION, 50000,
            "H.damage.lost.r is unknown and has no upper limit");
    /* c = sum of exp(30 v / 5) - 1 is beyond 1 / scale = 20 */
    refused(SETTINGS("3") HAZARD("{shape: gamma, mean: 0.2 per a, shape-parameter: 4}",
                                 "is: 30 kEUR") DECISION,
            5000, "H.frequency is unknown as a gamma whose tail weighs more");
}
END_TEST

/* Doing nothing costs R .2 sum of (exp(30 v / R) - 1), the option 30 kEUR for good. */
START_TEST(turns)
{
    static const char *const text = SETTINGS("3") HAZARD("0.2 per a", "is: 30 kEUR") DECISION;
    struct world x;
    struct utility_turn t;
    double costs[] = {0, 30000}, low = 1000, high = 50000;
    load(&x, text);
    for (int i = 0; i < 200; i++) {
        double middle = (low + high) / 2;
        if (by_years(middle, 0.2, of_constant) > 30000)
            low = middle;
        else
            high = middle;
    }
    ck_assert_int_eq(utility_turns(x.world, arena, 2, x.cases, costs, 50000, &t, NULL), OHMEN_OK);
    check_near(t.below, low, 1e-6);
    ck_assert(t.below_other == 1 && t.above == 0 && t.least == 0);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("utility");
    TCase *t = tcase_create("utility");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, closed_forms);
    tcase_add_test(t, gamma_rate);
    tcase_add_test(t, transforms);
    tcase_add_test(t, great_tolerance);
    tcase_add_test(t, refusals);
    tcase_add_test(t, turns);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
