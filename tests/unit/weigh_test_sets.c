/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decisions that were thought of: which sets are alternatives and why others are not, ties,
 * hazards that come and go, dates at the ends of years, trees. */
#include "loaded.h"
#include "weigh_test.h"

static const char settings[] =
    "register: {title: Sets, currency: EUR, prices: 2026, start: 2028, horizon: 10 a, discount: "
    "5 % per a}\n"
    "hazards:\n"
    "  H: {name: H, frequency: 0.5 per a, response: {never: {outcome: lost}}, outcomes: {lost: "
    "{name: Lost, damage: {loss: {category: c, is: 1000 EUR}}}}}\n"
    "  G: {name: G, frequency: 0.25 per a, response: {never: {outcome: lost}}, outcomes: {lost: "
    "{name: Lost, damage: {loss: {category: c, is: 800 EUR}}}}}\n";

static struct weighing *weigh(struct loaded *l, struct arena *a, const char *text)
{
    const char *texts[] = {settings, text};
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_texts(l, a, 2, texts, NULL);
    ohmen_status status = weigh_compile(l->figures, "D", &w, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    loaded_evaluate(l);
    weigh_rank(l->figures, w);
    return w;
}

static const char *names_in_order(struct arena *a, const struct weighing *w)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < w->alternatives.n; i++)
        text_printf(&t, "%s%s", i ? " " : "", w->alternatives.at[i].name);
    return text_str(&t);
}

static const char *names_by_rank(struct arena *a, const struct weighing *w)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < w->alternatives.n; i++)
        text_printf(&t, "%s%s", i ? " " : "", w->alternatives.at[w->order[i]].name);
    return text_str(&t);
}

START_TEST(sets_and_reasons)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a,
              "options:\n"
              "  A: {name: A, change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
              "  B: {name: B, excludes: [A], change: {hazards: {H: {frequency: 0.25 * was}}}}\n"
              "  C: {name: C, requires: [A], change: {hazards: {G: {frequency: 0.5 * was}}}}\n"
              "  E: {name: E, change: {hazards: {G: {frequency: 0.1 per a}}}}\n"
              "  F: {name: F, requires: [OUT], change: {hazards: {H: {frequency: 0.1 * was}}}}\n"
              "  OUT: {name: Out, change: {hazards: {H: {frequency: 0.9 * was}}}}\n"
              "decisions: {D: {question: What?, options: [A, B, C, E, F]}}\n");
    ck_assert_str_eq(names_in_order(a, w), "do-nothing A B E A+C A+E B+E");
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < w->left_out.n; i++)
        text_printf(&t, "%s: %s\n", w->left_out.at[i].options, w->left_out.at[i].why);
    ck_assert_str_eq(text_str(&t), "C: C requires A\n"
                                   "F: F requires OUT\n"
                                   "A+B: A and B exclude each other\n"
                                   "C+E: C and E contradict each other at hazards/G/frequency\n");
    ck_assert(!w->only_pairs);
    arena_free(a);
}
END_TEST

/* Two options that are right alone and wrong together do not take the decision with them. */
START_TEST(wrong_together)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a,
              "elements: {E: {kind: relay, per-demand: 0.25}}\n"
              "options:\n"
              "  A: {name: A, change: {hazards: {H: {response: {p: {cleared-by: E, in: 0.1 s, "
              "outcome: none}}}}}}\n"
              "  B: {name: B, change: {hazards: {H: {response: {q: {cleared-by: E, in: 0.1 s, "
              "outcome: none}}}}}}\n"
              "  C: {name: C, change: {hazards: {G: {frequency: 0.5 * was}}}}\n"
              "decisions: {D: {question: What?, options: [A, B, C]}}\n");
    ck_assert_str_eq(names_in_order(a, w), "do-nothing A B C A+C B+C");
    ck_assert_uint_eq(w->left_out.n, 1);
    ck_assert_str_eq(w->left_out.at[0].options, "A+B");
    ck_assert_str_eq(w->left_out.at[0].why,
                     "together they leave the register wrong: the rows \"p\" and \"q\" have the "
                     "same clearance time; which acts first?");
    arena_free(a);
}
END_TEST

/* Nine options that go together: singles and pairs; eight: every set. */
START_TEST(more_than_eight)
{
    for (size_t n = WEIGH_ALL; n <= WEIGH_ALL + 1; n++) {
        struct arena *a = arena_new(NULL);
        struct loaded l;
        struct text t, list;
        text_init(&t, a);
        text_init(&list, a);
        text_add(&t, "options:\n");
        for (size_t i = 0; i < n; i++) {
            text_printf(&t, "  O%zu: {name: O, change: {hazards: {H: {frequency: 0.9 * was}}}}\n",
                        i);
            text_printf(&list, "%sO%zu", i ? ", " : "", i);
        }
        text_printf(&t, "decisions: {D: {question: What?, options: [%s]}}\n", text_str(&list));
        const struct weighing *w = weigh(&l, a, text_str(&t));
        ck_assert_int_eq(w->only_pairs, n > WEIGH_ALL);
        ck_assert_uint_eq(w->alternatives.n, n > WEIGH_ALL ? 1 + 9 + 36 : 256);
        ck_assert_uint_eq(w->left_out.n, 0);
        arena_free(a);
    }
}
END_TEST

/* Equal worth goes by name; nothing at all is worth 0, better than what costs and does
 * nothing, and equal to what costs nothing and does nothing. */
START_TEST(ties_by_name)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a,
              "options:\n"
              "  Z: {name: Z, excludes: [Y, V], change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
              "  Y: {name: Y, excludes: [V], change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
              "  V: {name: V, change: {elements: {X: {kind: relay, per-demand: "
              "0.5}}}}\n"
              "decisions: {D: {question: What?, options: [Z, Y, V]}}\n");
    ck_assert_str_eq(names_by_rank(a, w), "Y Z V do-nothing");
    arena_free(a);
}
END_TEST

/* A hazard that is removed has no risk, one that is added has it while the option lasts. */
START_TEST(hazards_come_and_go)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a,
              "options:\n"
              "  GONE: {name: Gone, in-service: 2030, change: {hazards: {H: no}}}\n"
              "  NEW: {name: New, in-service: 2029, life: 3 a, change: {hazards: {N: {name: N, "
              "frequency: 2 per a, response: {never: {outcome: lost}}, outcomes: {lost: {name: "
              "Lost, damage: {loss: {category: c, is: 70 EUR}}}}}}}}\n"
              "decisions: {D: {question: What?, options: [GONE, NEW]}}\n");
    double v = 1 / 1.05, middle = 1 / 1.0246950765959599; /* 1.05^-1/2 */
    double gone = 0, new = 0, all = 0;
    for (int year = 0; year < 10; year++, middle *= v) {
        all += 500 * middle;
        gone += year >= 2 ? 500 * middle : 0;
        new += year >= 1 && year < 4 ? 140 * middle : 0;
    }
    ck_assert_uint_eq(w->hazards.n, 2);
    ck_assert_str_eq(w->hazards.at[1].id, "N");
    ck_assert_ptr_null(w->hazards.at[1].now);
    ck_assert_double_eq_tol(loaded_value(&l, "D.present-damage.do-nothing"), all, 1e-12 * all);
    ck_assert_double_eq_tol(loaded_value(&l, "D.benefit.GONE"), gone, 1e-12 * gone);
    ck_assert_double_eq_tol(loaded_value(&l, "D.benefit.NEW"), -new, 1e-12 * new);
    ck_assert_double_eq_tol(loaded_value(&l, "D.net-present-value.GONE+NEW"), gone - new,
                            1e-12 * gone);
    ck_assert_str_eq(names_by_rank(a, w), "GONE GONE+NEW do-nothing NEW");
    arena_free(a);
}
END_TEST

/* What an option does not touch is worth nothing to it, whatever its dates; options on
 * different hazards are worth together what they are worth alone. */
START_TEST(nothing_comes_of_dates)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    weigh(&l, a,
          "options:\n"
          "  A: {name: A, in-service: 2029-04-15, change: {hazards: {H: {frequency: 0.5 * "
          "was}}}}\n"
          "  B: {name: B, in-service: 2029-09-20, change: {hazards: {G: {frequency: 0.5 * "
          "was}}}}\n"
          "  X: {name: X, in-service: 2029-07-02, change: {elements: {X1: {kind: relay, "
          "per-demand: 0.5}}}}\n"
          "decisions: {D: {question: What?, focus: [H, G], options: [A, B, X]}}\n");
    double p = loaded_value(&l, "D.benefit.A"), q = loaded_value(&l, "D.benefit.B");
    ck_assert_double_gt(p, 0);
    ck_assert_double_eq(loaded_value(&l, "D.benefit.X"), 0);
    ck_assert_double_eq(loaded_value(&l, "D.benefit.A+X"), p);
    ck_assert_double_eq(loaded_value(&l, "D.benefit.A+B"), p + q);
    ck_assert_double_eq(loaded_value(&l, "D.benefit.A+B+X"), p + q);
    arena_free(a);
}
END_TEST

/* An investment is paid in its calendar year, on the last day of a leap year too. */
START_TEST(last_day_of_a_leap_year)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    weigh(&l, a,
          "options:\n"
          "  A: {name: A, invest: {is: 100 EUR, on: 2028-12-31}, change: {hazards: {H: "
          "{frequency: 0.5 * was}}}}\n"
          "  B: {name: B, invest: {is: 100 EUR, on: 2029-01-01}, change: {hazards: {H: "
          "{frequency: 0.5 * was}}}}\n"
          "  C: {name: C, invest: {is: 100 EUR, on: 2020}, change: {hazards: {H: {frequency: 0.5 "
          "* was}}}}\n"
          "decisions: {D: {question: What?, options: [A, B, C]}}\n");
    ck_assert_double_eq(loaded_value(&l, "D.present-cost.A"), 100);
    ck_assert_double_eq_tol(loaded_value(&l, "D.present-cost.B"), 100 / 1.05, 1e-12);
    ck_assert_double_eq(loaded_value(&l, "D.present-cost.C"), 100);
    arena_free(a);
}
END_TEST

/* What is paid behind the horizon only is no cost, and a ratio to nothing is no figure. */
START_TEST(cost_behind_the_horizon)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a,
              "values: {nothing: 0 EUR}\n"
              "options:\n"
              "  A: {name: A, invest: {is: nothing}, change: {hazards: {H: {frequency: 0.5 * "
              "was}}}}\n"
              "  B: {name: B, in-service: 2060, running: 10 EUR per a, invest: {is: 5 EUR, on: "
              "2060}, change: {hazards: {G: {frequency: 0.5 * was}}}}\n"
              "decisions: {D: {question: What?, options: [A, B]}}\n");
    ck_assert_uint_eq(w->alternatives.n, 4);
    for (size_t i = 0; i < 4; i++)
        ck_assert_uint_eq(w->alternatives.at[i].ratio, FIGURE_NONE);
    ck_assert_double_eq(loaded_value(&l, "D.present-cost.A+B"), 0);
    ck_assert_double_eq(loaded_value(&l, "D.benefit.A+B"), loaded_value(&l, "D.benefit.A"));
    arena_free(a);
}
END_TEST

static void refused(struct loaded *l, const char *decision, ohmen_status expected, const char *text)
{
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(weigh_compile(l->figures, decision, &w, &e), expected);
    ck_assert_str_eq(e.text, text);
    ck_assert_ptr_null(w);
}

START_TEST(trees_are_weighed)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *texts[] = {
        settings, "decisions: {TREE: {question: What?, choose: {wait: [{wait: 2 a}], pay: [{pay: 3 "
                  "EUR}]}}}\n"};
    struct weighing *w, *again;
    loaded_texts(&l, a, 2, texts, NULL);
    ck_assert_int_eq(weigh_compile(l.figures, "TREE", &w, NULL), OHMEN_OK);
    ck_assert_int_eq(weigh_compile(l.figures, "TREE", &again, NULL), OHMEN_OK);
    ck_assert_ptr_eq(w, again);
    ck_assert_uint_eq(w->alternatives.n, 3);
    ck_assert_str_eq(w->alternatives.at[1].name, "pay");
    ck_assert_double_eq(loaded_value(&l, "TREE.net-present-value.pay"), -3);
    ck_assert_double_eq(loaded_value(&l, "TREE.net-present-value.wait"), 0);
    refused(&l, "TREES", OHMEN_UNKNOWN, "there is no decision \"TREES\" (did you mean \"TREE\"?)");
    arena_free(a);
}
END_TEST

TCase *weigh_set_case(void)
{
    TCase *t = tcase_create("sets");
    tcase_add_test(t, sets_and_reasons);
    tcase_add_test(t, wrong_together);
    tcase_add_test(t, more_than_eight);
    tcase_add_test(t, ties_by_name);
    tcase_add_test(t, hazards_come_and_go);
    tcase_add_test(t, nothing_comes_of_dates);
    tcase_add_test(t, last_day_of_a_leap_year);
    tcase_add_test(t, cost_behind_the_horizon);
    tcase_add_test(t, trees_are_weighed);
    return t;
}
