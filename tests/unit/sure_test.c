/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How sure a choice is: published and closed cases, through documents, figures and samples. */
#include "decide/sure.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>

#include "loaded.h"
#include "math/dist.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

#define SETTINGS                                                                                   \
    "register: {title: T, currency: EUR, prices: 2026, horizon: 1 a, discount: 0 % per a}\n"

static void find(struct loaded *l, const char *text, const struct sampling_plan *p, struct sure *x)
{
    struct weighing *w;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(l, arena, text, NULL);
    ck_assert_msg(weigh_compile(l->figures, "D", &w, &e) == OHMEN_OK, "%s", e.text);
    loaded_evaluate(l);
    weigh_rank(l->figures, w);
    ck_assert_msg(sure_find(l->figures, arena, w, p, x, &e) == OHMEN_OK, "%s", e.text);
}

static const struct sure_alternative *of(const struct sure *x, const char *name)
{
    const struct weighing *w = x->weighing;
    size_t k = 0;
    while (!text_equal(w->alternatives.at[k].name, name))
        k++;
    return &x->of[k];
}

/* Within 4 standard errors, which are not great; exact where there is no error. */
static void check_near(const char *what, struct sampled got, double want, double most)
{
    ck_assert_msg(fabs(got.value - want) <= 4 * got.error + 1e-12 * fabs(want) && got.error <= most,
                  "%s: %.9g +- %.3g, not %.9g", what, got.value, got.error, want);
}

/* Howard (1996): three alternatives pay 100/0, 90/20 and 40/50 as an event of probability .4 occurs
 * or does not: expected 40, 48, 46; clairvoyance is worth 22. Here against the third one. */
START_TEST(clairvoyance_in_a_published_case)
{
    static const char *const text =
        SETTINGS "values: {X: {is: {values: {spared: {is: 0 EUR, p: 60 %}, struck: {is: 110 EUR, "
                 "p: rest}}}}}\n"
                 "hazards: {H: {name: H, frequency: 1 per a, response: {never: {outcome: lost}}, "
                 "outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: X}}}}}}\n"
                 "options:\n"
                 "  A: {name: A, invest: 50 EUR, excludes: [B], change: {hazards: {H: {frequency: "
                 "0 * was}}}}\n"
                 "  B: {name: B, invest: 30 EUR, change: {hazards: {H: {frequency: 3 / 11 * "
                 "was}}}}\n"
                 "decisions: {D: {question: What?, options: [A, B]}}\n";
    struct loaded l;
    struct sure x;
    struct sampling_plan p = sampling_defaults();
    find(&l, text, &p, &x);
    ck_assert_str_eq(x.best->name, "B");
    ck_assert_str_eq(x.next->name, "do-nothing");
    ck_assert(fabs(figure_value(l.figures, x.best->net) - 2) < 1e-12);
    check_near("regret of B", of(&x, "B")->regret, 22, 0.2);
    check_near("regret of A", of(&x, "A")->regret, 30, 0.4);
    check_near("regret of nothing", of(&x, "do-nothing")->regret, 24, 0.2);
    check_near("A is best", of(&x, "A")->best, 0.4, 0.005);
    check_near("B is best", of(&x, "B")->best, 0, 0);
    check_near("nothing is best", of(&x, "do-nothing")->best, 0.6, 0.005);
    check_near("B is worth it", of(&x, "B")->worth_it, 0.4, 0.005);
    ck_assert(of(&x, "A")->net.at[SPREAD_P5].value == -50);
    ck_assert(fabs(of(&x, "A")->net.at[SPREAD_P95].value - 60) < 1e-12);
    ck_assert(of(&x, "do-nothing")->net.is_certain && of(&x, "do-nothing")->net.at[0].value == 0);
    ck_assert_uint_eq(x.moves.n, 1);
    ck_assert_str_eq(x.moves.at[0].name, "X.value");
    ck_assert(fabs(x.moves.at[0].correlation - 1) < 1e-12);
}
END_TEST

/* A rate f with median 1 per a and error factor 4. A is worth 800 f - 900, B 500 f - 400; so
 * nothing is best below .8, B up to 5/3, A beyond. With z = ln(f)/s the mean of f above c is
 * exp(s^2/2) Phi(s - ln(c)/s). */
START_TEST(thresholds_of_a_lognormal)
{
    static const char *const text =
        SETTINGS "hazards: {H: {name: H, frequency: {median: 1 per a, error-factor: 4}, response: "
                 "{never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: "
                 "{category: c, is: 1000 EUR}}}}}}\n"
                 "options:\n"
                 "  A: {name: A, invest: 900 EUR, excludes: [B], change: {hazards: {H: {frequency: "
                 "0.2 * was}}}}\n"
                 "  B: {name: B, invest: 400 EUR, change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
                 "decisions: {D: {question: What?, options: [A, B]}}\n";
    struct loaded l;
    struct sure x;
    struct sampling_plan p = sampling_defaults();
    p.log2_points = 9;
    find(&l, text, &p, &x);
    double s = log(4) / DIST_Z95, mean = exp(s * s / 2), low = log(0.8) / s,
           high = log(5 / 3.0) / s;
    double above_low = mean * dist_normal_probability(s - low);
    double above_high = mean * dist_normal_probability(s - high);
    double p_high = dist_normal_probability(-high), p_low = dist_normal_probability(-low);
    double best =
        500 * (above_low - above_high) - 400 * (p_low - p_high) + 800 * above_high - 900 * p_high;
    check_near("A is best", of(&x, "A")->best, p_high, 0.002);
    check_near("B is best", of(&x, "B")->best, p_low - p_high, 0.002);
    check_near("nothing is best", of(&x, "do-nothing")->best, 1 - p_low, 0.002);
    check_near("A is worth it", of(&x, "A")->worth_it, dist_normal_probability(-log(1.125) / s),
               0.002);
    check_near("regret of A", of(&x, "A")->regret, best - (800 * mean - 900), 2);
    check_near("regret of B", of(&x, "B")->regret, best - (500 * mean - 400), 5);
    check_near("regret of nothing", of(&x, "do-nothing")->regret, best, 10);
    check_near("A at 5 %", of(&x, "A")->net.at[SPREAD_P5], 800 * exp(-DIST_Z95 * s) - 900, 3);
    check_near("A at 50 %", of(&x, "A")->net.at[SPREAD_P50], 800 - 900, 3);
    check_near("A at 95 %", of(&x, "A")->net.at[SPREAD_P95], 800 * exp(DIST_Z95 * s) - 900, 30);
}
END_TEST

/* Of two alternatives that are always worth the same the first in the ranking is best. */
START_TEST(equals)
{
    static const char *const text =
        SETTINGS "hazards: {H: {name: H, frequency: 2 per a, response: {never: {outcome: lost}}, "
                 "outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: {median: 500 EUR, "
                 "error-factor: 2}}}}}}}\n"
                 "options:\n"
                 "  B: {name: B, excludes: [A], change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
                 "  A: {name: A, change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
                 "decisions: {D: {question: What?, options: [A, B]}}\n";
    struct loaded l;
    struct sure x;
    struct sampling_plan p = sampling_defaults();
    find(&l, text, &p, &x);
    check_near("A", of(&x, "A")->best, 1, 0);
    check_near("B", of(&x, "B")->best, 0, 0);
    check_near("regret of A", of(&x, "A")->regret, 0, 0);
    check_near("regret of B", of(&x, "B")->regret, 0, 0);
    ck_assert_uint_eq(x.moves.n, 0);
}
END_TEST

enum { OTHERS = 40 };

/* What stands in the difference alone ranks with it as it does by itself, whatever else was sampled
 * with it: the third alternative has many inputs that weigh more there than Z does in the second.
 * The difference of A and B is 100 Z - 20 EUR, which rises with Z throughout. */
START_TEST(ranks_among_others)
{
    struct loaded l;
    struct sure x;
    struct arena *a = arena_new(NULL);
    struct text t;
    struct sampling_plan p = sampling_defaults();
    text_init(&t, a);
    text_add(&t,
             SETTINGS "values:\n  Z: {name: Z, is: {shape: uniform, from: 1 EUR, to: 3 EUR}}\n"
                      "  LOSS: {name: Loss, is: {shape: uniform, from: 8 kEUR, to: 10 kEUR}}\n");
    for (int i = 0; i < OTHERS; i++)
        text_printf(&t, "  V%02d: {name: V, is: {shape: uniform, from: 1 EUR, to: 900 EUR}}\n", i);
    text_add(&t, "hazards: {H: {name: H, frequency: 1 per a, response: {never: {outcome: lost}}, "
                 "outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: LOSS}}}}}}\n"
                 "options:\n"
                 "  A: {name: A, invest: 20 EUR, excludes: [B, C], change: {hazards: {H: "
                 "{frequency: 0 * was}}}}\n"
                 "  B: {name: B, invest: 100 * Z, excludes: [C], change: {hazards: {H: {frequency: "
                 "0 * was}}}}\n"
                 "  C: {name: C, invest: 5000 EUR");
    for (int i = 0; i < OTHERS; i++)
        text_printf(&t, " + V%02d", i);
    text_add(&t, ", change: {hazards: {H: {frequency: 0 * was}}}}\ndecisions: {D: {question: "
                 "What?, options: [A, B, C]}}\n");
    find(&l, text_str(&t), &p, &x);
    ck_assert_str_eq(x.best->name, "A");
    ck_assert_str_eq(x.next->name, "B");
    ck_assert_uint_eq(x.moves.n, 1);
    ck_assert_str_eq(x.moves.at[0].name, "Z.value");
    ck_assert(fabs(x.moves.at[0].correlation - 1) < 1e-12);
    arena_free(a);
}
END_TEST

/* Names lead back to the same values; others are told with the nearest one. */
START_TEST(names)
{
    static const char *const text =
        SETTINGS "hazards: {H: {name: H, frequency: {median: 1 per a, error-factor: 4}, response: "
                 "{never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: "
                 "{category: c, is: 1000 EUR}}}}}}\n"
                 "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: {frequency: 0.2 * "
                 "was}}}}}\n"
                 "decisions: {D: {question: What?, options: [A]}}\n";
    struct loaded l;
    struct sure x;
    struct sure_value v;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct sampling_plan p = sampling_defaults();
    find(&l, text, &p, &x);
    ck_assert(sure_is_named("D.best[A]") && sure_is_named("D.moves-with[H.frequency]"));
    ck_assert(!sure_is_named("D.best.A") && !sure_is_named("D.bests[A]") && !sure_is_named("D"));
    ck_assert_int_eq(sure_value_find(l.figures, "D.regret[A]", &p, &v, &e), OHMEN_OK);
    ck_assert(v.value.value == of(&x, "A")->regret.value && v.kind == SURE_REGRET);
    ck_assert_int_eq(sure_value_find(l.figures, "D.best[do-nothing]", &p, &v, &e), OHMEN_OK);
    ck_assert(v.value.value == of(&x, "do-nothing")->best.value);
    ck_assert_int_eq(sure_value_find(l.figures, "D.moves-with[H.frequency]", &p, &v, &e), OHMEN_OK);
    ck_assert(v.value.value == x.moves.at[0].correlation && v.figure == x.moves.at[0].figure);
    ck_assert_int_eq(sure_value_find(l.figures, "D.worth-it[AA]", &p, &v, &e), OHMEN_UNKNOWN);
    ck_assert_str_eq(e.text, "the decision \"D\" has no figure \"worth-it[AA]\" (did you mean "
                             "\"D.worth-it[A]\"?)");
}
END_TEST

int main(void)
{
    Suite *s = suite_create("how sure");
    TCase *t = tcase_create("how sure");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, clairvoyance_in_a_published_case);
    tcase_add_test(t, thresholds_of_a_lognormal);
    tcase_add_test(t, equals);
    tcase_add_test(t, ranks_among_others);
    tcase_add_test(t, names);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
