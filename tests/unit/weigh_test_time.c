/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Options over time, by hand: when yearly amounts are paid, renewals, commissioning periods, worth
 * at the end, what two options settle, and what is new when. */
#include <math.h>

#include "loaded.h"
#include "weigh_test.h"

static const double TIGHT = 1e-12;

/* Reads a register whose settings are given, with a decision D over the options named. */
static struct weighing *weigh(struct loaded *l, struct arena *a, const char *settings,
                              const char *rest)
{
    const char *texts[] = {
        arena_printf(a, "register: {title: Time, currency: EUR, prices: 2028, %s}\n", settings),
        rest};
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_texts(l, a, 2, texts, NULL);
    ohmen_status status = weigh_compile(l->figures, "D", &w, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    loaded_evaluate(l);
    weigh_rank(l->figures, w);
    return w;
}

static void expect(struct loaded *l, const char *figure, double expected, double tolerance)
{
    double got = loaded_value(l, figure);
    ck_assert_msg(fabs(got - expected) <= tolerance * fmax(fabs(expected), 1),
                  "%s: %.17g, not %.17g", figure, got, expected);
}

/* A hazard of `risk` EUR per a; options as given. */
static const char *one_hazard(struct arena *a, const char *options, const char *names)
{
    return arena_printf(
        a,
        "hazards:\n"
        "  H: {name: H, frequency: 1 per a, response: {never: {outcome: lost}}, outcomes: {lost: "
        "{name: Lost, damage: {loss: {category: c, is: 1000 EUR}}}}}\n"
        "options:\n%s"
        "decisions: {D: {question: What?, options: [%s]}}\n",
        options, names);
}

/* --- when amounts are paid --- */

/* Published: an annuity of 1000, 5 %, 5 years is worth 4329.47667063 (test value of OpenFormula,
 * ODF 1.2 part 2), paid at the end of each year. */
START_TEST(annuity_at_the_end_of_years)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = one_hazard(a, "  A: {name: A, running: 1000 EUR per a, change: {}}\n", "A");
    weigh(&l, a, "horizon: 5 a, discount: 5 % per a, yearly-amounts: end-of-year", text);
    expect(&l, "D.present-cost.A", 4329.47667063, 1e-11);
    expect(&l, "A.present-cost", 4329.47667063, 1e-11);
    arena_free(a);
}
END_TEST

/* The same in the middle of each year: times 1.05^(1/2). */
START_TEST(annuity_in_the_middle_of_years)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = one_hazard(a, "  A: {name: A, running: 1000 EUR per a, change: {}}\n", "A");
    weigh(&l, a, "horizon: 5 a, discount: 5 % per a", text);
    expect(&l, "D.present-cost.A", 4329.47667063 * sqrt(1.05), 1e-11);
    arena_free(a);
}
END_TEST

/* Published (OpenFormula): PMT(5 %; 12; 1000) = -112.8254100208: 1000 at once is that much each
 * year for twelve years. Factor table of engineering economy: (A/P, 8 %, 5) = .2505. */
START_TEST(equal_cost_each_year)
{
    struct arena *a = arena_new(NULL);
    struct loaded l, m;
    const char *text = one_hazard(a, "  A: {name: A, invest: 1000 EUR, change: {}}\n", "A");
    const struct weighing *w =
        weigh(&l, a, "horizon: 12 a, discount: 5 % per a, yearly-amounts: end-of-year", text);
    expect(&l, "D.equivalent-annual-cost.A", 112.8254100208, 1e-12);
    ck_assert_double_eq(figure_value(l.figures, w->alternatives.at[1].annual_cost),
                        loaded_value(&l, "D.equivalent-annual-cost.A"));
    ck_assert_double_eq(loaded_value(&l, "D.equivalent-annual-cost.do-nothing"), 0);
    weigh(&m, a, "horizon: 5 a, discount: 8 % per a, yearly-amounts: end-of-year", text);
    expect(&m, "D.equivalent-annual-cost.A", 250.5, 0.05 / 250.5);
    arena_free(a);
}
END_TEST

/* Factor table: (P/A, 12 %, 6) = 4.1114, (P/F, 12 %, 6) = .5066; the last by a worth of 1000 at
 * the end of six years. */
START_TEST(factor_table)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = one_hazard(a,
                                  "  A: {name: A, running: 1000 EUR per a, change: {}}\n"
                                  "  B: {name: B, residual: 1000 EUR, change: {}}\n",
                                  "A, B");
    const struct weighing *w =
        weigh(&l, a, "horizon: 6 a, discount: 12 % per a, yearly-amounts: end-of-year", text);
    expect(&l, "D.present-cost.A", 4111.4, 0.05 / 4111.4);
    expect(&l, "D.present-cost.B", -506.6, 0.05 / 506.6);
    expect(&l, "B.residual", 1000, 0);
    ck_assert_uint_eq(w->alternatives.at[2].ratio, FIGURE_NONE); /* it costs less than nothing */
    arena_free(a);
}
END_TEST

/* Published (OpenFormula): NPV(10 %; 100; 200) = 256.198347107438: 100 a year from the start and
 * 100 a year from the second year on. */
START_TEST(unequal_years)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text =
        one_hazard(a,
                   "  A: {name: A, running: 100 EUR per a, change: {}}\n"
                   "  B: {name: B, running: 100 EUR per a, in-service: 2029, change: {}}\n",
                   "A, B");
    weigh(&l, a, "horizon: 2 a, discount: 10 % per a, yearly-amounts: end-of-year", text);
    expect(&l, "D.present-cost.A+B", 256.198347107438, 1e-14);
    arena_free(a);
}
END_TEST

/* Damage is paid then too: 1000 EUR per a over 5 years at 5 %, as above. */
START_TEST(damage_at_the_end_of_years)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text =
        one_hazard(a, "  A: {name: A, change: {hazards: {H: {frequency: 0.5 * was}}}}\n", "A");
    weigh(&l, a, "horizon: 5 a, discount: 5 % per a, yearly-amounts: end-of-year", text);
    expect(&l, "D.present-damage.do-nothing", 4329.47667063, 1e-11);
    expect(&l, "D.benefit.A", 4329.47667063 / 2, 1e-11);
    arena_free(a);
}
END_TEST

/* --- worth at the end --- */

/* 600 at the end of 10 years at 5 %: 600 / 1.05^10 = 368.3479521445 off the cost, only where the
 * option is in service until then. */
START_TEST(worth_at_the_end)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text =
        one_hazard(a,
                   "  A: {name: A, invest: 1000 EUR, residual: 600 EUR, change: {}}\n"
                   "  B: {name: B, invest: 1000 EUR, residual: 600 EUR, life: 9 a, change: {}}\n"
                   "  C: {name: C, invest: 1000 EUR, residual: 600 EUR, life: 10 a, change: {}}\n"
                   "  E: {name: E, invest: 1000 EUR, residual: 600 EUR, in-service: 2038, change: "
                   "{}}\n",
                   "A, B, C, E");
    weigh(&l, a, "horizon: 10 a, discount: 5 % per a", text);
    double end = 600 / pow(1.05, 10);
    expect(&l, "D.present-cost.A", 1000 - end, TIGHT);
    expect(&l, "D.present-cost.B", 1000, 0);
    expect(&l, "D.present-cost.C", 1000 - end, TIGHT);
    expect(&l, "D.present-cost.E", 1000, 0);
    expect(&l, "D.present-cost.A+B", 2000 - end, TIGHT);
    arena_free(a);
}
END_TEST

/* --- renewals --- */

/* Paid in 2029 (year 1), in service from 2030 (t = 2) with a life of 4 a and a horizon of 13 a:
 * renewed at t = 6 and 10, paid in the years 5 and 9. Half of 1000 EUR per a is avoided from t = 2
 * to 13 without gap. */
START_TEST(renewed_to_the_end)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = one_hazard(
        a,
        "  A: {name: A, invest: {is: 100 EUR, on: 2029}, in-service: 2030, life: 4 a, renewed: "
        "yes, "
        "running: 10 EUR per a, residual: 30 EUR, change: {hazards: {H: {frequency: 0.5 * "
        "was}}}}\n",
        "A");
    weigh(&l, a, "horizon: 13 a, discount: 5 % per a", text);
    double years = 0;
    for (int year = 2; year < 13; year++)
        years += pow(1.05, -year - 0.5);
    double cost =
        100 * (pow(1.05, -1) + pow(1.05, -5) + pow(1.05, -9)) + 10 * years - 30 * pow(1.05, -13);
    expect(&l, "D.present-cost.A", cost, TIGHT);
    expect(&l, "D.benefit.A", 500 * years, TIGHT);
    arena_free(a);
}
END_TEST

/* A life of 2.5 a from mid-2029 (t = 1.5 and some): paid at t = 1.496 (year 1), 3.996 (3) and
 * 6.496 (6); the renewal at 8.996 lies behind the horizon of 8 a. Before the horizon: in service 6
 * years before it with a life of 4 a, renewed 2 before (past) and at t = 2 and 6. */
START_TEST(renewed_in_broken_years)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text =
        one_hazard(a,
                   "  A: {name: A, invest: {is: 100 EUR, on: 2029-07-01}, in-service: "
                   "2029-07-01, life: 2.5 a, renewed: yes, change: {}}\n"
                   "  B: {name: B, invest: {is: 100 EUR, on: 2022}, in-service: 2022, "
                   "life: 4 a, renewed: yes, change: {}}\n",
                   "A, B");
    weigh(&l, a, "horizon: 8 a, discount: 5 % per a", text);
    expect(&l, "D.present-cost.A", 100 * (pow(1.05, -1) + pow(1.05, -3) + pow(1.05, -6)), TIGHT);
    expect(&l, "D.present-cost.B", 100 * (1 + pow(1.05, -2) + pow(1.05, -6)), TIGHT);
    arena_free(a);
}
END_TEST

/* --- what is new --- */

/* A relay with undetected failures, 0.1 per a, that no test finds, fitted at t = 2 + p and renewed
 * at 6 + p, p = 182/365, over a horizon of 8 a. The hazard (1 per a, 1000 EUR) does damage when the
 * relay has failed, with the probability 1 - exp(-0.1 u) at the age u; without the relay each fault
 * does. At no interest what is avoided is 1000 EUR times the integral of exp(-0.1 u) over
 *     ages 0 to 4 - p, until the year of the renewal,
 *     p times its mean over that year, ages 4 - p to 5 - p, as for every year that is broken,
 *     ages 0 to 2 - p of the new one. */
START_TEST(new_again)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    weigh(&l, a, "horizon: 8 a, discount: 0 per a",
          "schemes: {S: absent}\n"
          "hazards:\n"
          "  H: {name: H, frequency: 1 per a, response: {main: {cleared-by: S, in: 0.1 s, outcome: "
          "none}, never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: "
          "c, is: 1000 EUR}}}}}\n"
          "options:\n"
          "  A: {name: A, invest: 10 EUR, in-service: 2030-07-02, life: 4 a, renewed: yes, change: "
          "{elements: {R: {undetected: 0.1 per a}}, schemes: {S: {works: {all: [R]}}}}}\n"
          "decisions: {D: {question: What?, options: [A]}}\n");
    double p = 182 / 365.0; /* 2 July of 2030 */
    double first = 1 - exp(-0.1 * (4 - p)), second = 1 - exp(-0.1 * (2 - p));
    double broken = p * (exp(-0.1 * (4 - p)) - exp(-0.1 * (5 - p)));
    double avoided = 1000 * (first + broken + second) / 0.1;
    expect(&l, "D.benefit.A", avoided, 1e-11);
    double x = 1 - p; /* from the renewal until the end of 2034 */
    expect(&l, "R.fails.2034@A+A:2034", 1 - (1 - exp(-0.1 * x)) / (0.1 * x), 1e-11);
    arena_free(a);
}
END_TEST

/* --- commissioning --- */

/* 1000 EUR per a; from t = 1 on half of it, but in the first 1.5 years, and again after the renewal
 * at t = 5, three times what is left: 1500. Horizon 6 a, no interest: do nothing 6000, with A
 * 1000 + 1.5 x 1500 + 2.5 x 500 + 1 x 1500 = 6000. B takes a fifth off all, C is
 * commissioned for longer than it lasts. */
START_TEST(commissioned)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = one_hazard(
        a,
        "  A: {name: A, invest: 1 EUR, in-service: 2029, life: 4 a, renewed: yes, early: {for: 1.5 "
        "a, "
        "change: {hazards: {H: {frequency: 3 * was}}}}, change: {hazards: {H: {frequency: 0.5 * "
        "was}}}}\n"
        "  B: {name: B, change: {hazards: {H: {frequency: 0.8 * was}}}}\n"
        "  C: {name: C, in-service: 2027, life: 2 a, early: {for: 9 a, change: {hazards: {H: "
        "{frequency: 0.25 per a}}}}, change: {hazards: {H: {frequency: 0.125 * was}}}}\n",
        "A, B, C");
    weigh(&l, a, "horizon: 6 a, discount: 0 per a", text);
    expect(&l, "D.benefit.A", 0, TIGHT);
    expect(&l, "D.present-damage.A+B", 4800, TIGHT);
    expect(&l, "H.risk@A+A:early", 1500, TIGHT);
    expect(&l, "H.risk@A+B+A:early", 1200, TIGHT);
    expect(&l, "D.present-damage.C", 250 + 5000, TIGHT);
    arena_free(a);
}
END_TEST

/* Commissioning periods that set one value differently: refused only together. */
START_TEST(commissioned_together)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = one_hazard(
        a,
        "  A: {name: A, early: {for: 1 a, change: {hazards: {H: {frequency: 2 per a}}}}, "
        "change: {}}\n"
        "  B: {name: B, early: {for: 1 a, change: {hazards: {H: {frequency: 3 per a}}}}, "
        "change: {}}\n"
        "  C: {name: C, in-service: 2029, early: {for: 1 a, change: {hazards: {H: "
        "{frequency: 4 per a}}}}, change: {}}\n",
        "A, B, C");
    const struct weighing *w = weigh(&l, a, "horizon: 6 a, discount: 0 per a", text);
    ck_assert_uint_eq(w->alternatives.n, 6);
    ck_assert_uint_eq(w->left_out.n, 1);
    ck_assert_str_eq(w->left_out.at[0].options, "A+B");
    ck_assert_str_eq(w->left_out.at[0].why,
                     "together they leave the register wrong: the commissioning periods "
                     "\"A:early\" and \"B:early\" contradict each other at hazards/H/frequency");
    expect(&l, "D.present-damage.A+C", 2000 + 4000 + 4000, TIGHT);
    arena_free(a);
}
END_TEST

static void refused(struct loaded *l, const char *name, const char *text)
{
    figure_id id;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(weigh_find(l->figures, name, &id, &e), OHMEN_UNKNOWN);
    ck_assert_str_eq(e.text, text);
}

START_TEST(names_of_periods)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text =
        one_hazard(a,
                   "  A: {name: A, invest: 1 EUR, life: 2 a, renewed: yes, early: {for: 1 a, "
                   "change: {hazards: "
                   "{H: {frequency: 2 * was}}}}, change: {elements: {E: {per-demand: 0.5}}}}\n"
                   "  B: {name: B, change: {}}\n",
                   "A, B");
    weigh(&l, a, "horizon: 6 a, discount: 0 per a", text);
    refused(&l, "H.risk@A:early", "\"A:early\" goes with its option: \"A+A:early\"");
    refused(&l, "H.risk@A+A:2031", "the option \"A\" is not renewed in \"2031\"");
    refused(&l, "H.risk@A+A:2034", "the option \"A\" is not renewed in \"2034\"");
    refused(&l, "H.risk@B+B:early", "the option \"B\" has no commissioning period");
    refused(&l, "H.risk@A+A:2030+A:2032", "\"A:2030\" and \"A:2032\" are renewals of one option");
    refused(&l, "H.risk@X:early", "there is no option \"X\"");
    expect(&l, "H.risk@A+A:2030+A:early", 2000, 0);
    expect(&l, "E.fails@A+A:2030", 0.5, 0);
    arena_free(a);
}
END_TEST

/* --- combinations --- */

/* A sets 0.5 per a, B 0.25 per a, and together they make 0.2 per a and a second hazard of 70 EUR
 * per a. C scales: it goes with A or B by themselves not at all, for they set what it scales. */
START_TEST(settled)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = one_hazard(
        a,
        "  A: {name: A, combine: {B: {hazards: {H: {frequency: 0.2 per a}, N: {name: N, frequency: "
        "1 "
        "per a, response: {never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: "
        "{category: c, is: 70 EUR}}}}}}}}, change: {hazards: {H: {frequency: 0.5 per a}}}}\n"
        "  B: {name: B, change: {hazards: {H: {frequency: 0.25 per a}}}}\n"
        "  C: {name: C, change: {hazards: {H: {frequency: 0.1 * was}}}}\n",
        "A, B, C");
    const struct weighing *w = weigh(&l, a, "horizon: 1 a, discount: 0 per a", text);
    ck_assert_uint_eq(w->alternatives.n, 5);
    expect(&l, "H.risk@A", 500, TIGHT);
    expect(&l, "H.risk@B", 250, TIGHT);
    expect(&l, "H.risk@A+B", 200, TIGHT);
    expect(&l, "H.risk@B+A", 200, TIGHT);
    expect(&l, "D.present-damage.A+B", 270, TIGHT);
    ck_assert_uint_eq(w->left_out.n, 2);
    ck_assert_str_eq(w->left_out.at[0].why, "A and C contradict each other at hazards/H/frequency");
    arena_free(a);
}
END_TEST

/* What A and B settle contradicts what a third option says. */
START_TEST(settled_against_a_third)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text =
        one_hazard(a,
                   "  A: {name: A, combine: {B: {hazards: {H: {name: Both}}}}, change: {}}\n"
                   "  B: {name: B, change: {hazards: {H: {frequency: 0.25 per a}}}}\n"
                   "  C: {name: C, combine: {A: {hazards: {H: {name: Other}}}}, change: {}}\n"
                   "  E: {name: E, change: {hazards: {H: {name: Third}}}}\n",
                   "A, B, C, E");
    const struct weighing *w = weigh(&l, a, "horizon: 1 a, discount: 0 per a", text);
    ck_assert_str_eq(w->left_out.at[0].options, "A+B+C");
    ck_assert_str_eq(w->left_out.at[0].why,
                     "together they leave the register wrong: the combinations \"A+B\" and "
                     "\"A+C\" contradict each other at hazards/H/name");
    ck_assert_str_eq(w->left_out.at[1].options, "A+B+E");
    ck_assert_str_eq(w->left_out.at[1].why,
                     "together they leave the register wrong: the option \"E\" and the combination "
                     "\"A+B\" contradict each other at hazards/H/name");
    arena_free(a);
}
END_TEST

/* Busbar differential and breaker failure protection each add a row; each scales one rate: they go
 * together. 1 per a; differential fails 0.5, breaker failure 0.25, rate 0.5 x 0.8. */
START_TEST(rows_and_factors_combine)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    weigh(
        &l, a, "horizon: 1 a, discount: 0 per a",
        "rates: {fault: {per: a, is: 1 per a}}\n"
        "hazards:\n"
        "  H: {name: H, frequency: fault, response: {never: {outcome: lost}}, outcomes: {lost: "
        "{name: Lost, damage: {loss: {category: c, is: 1000 EUR}}}}}\n"
        "options:\n"
        "  BUSBAR: {name: Busbar differential, change: {rates: {fault: {is: 0.5 * was}}, elements: "
        "{D-87B: {per-demand: 0.5}}, hazards: {H: {response: {diff: {cleared-by: D-87B, in: 0.1 "
        "s, outcome: none}}}}}}\n"
        "  FAILURE: {name: Breaker failure, change: {rates: {fault: {is: 0.8 * was}}, elements: "
        "{D-50BF: {per-demand: 0.25}}, hazards: {H: {response: {bf: {cleared-by: D-50BF, in: 0.3 "
        "s, outcome: none}}}}}}\n"
        "decisions: {D: {question: What?, options: [BUSBAR, FAILURE]}}\n");
    expect(&l, "H.risk@BUSBAR+FAILURE", 1000 * 0.5 * 0.8 * 0.5 * 0.25, TIGHT);
    arena_free(a);
}
END_TEST

TCase *weigh_time_case(void)
{
    TCase *t = tcase_create("options over time");
    tcase_add_test(t, annuity_at_the_end_of_years);
    tcase_add_test(t, annuity_in_the_middle_of_years);
    tcase_add_test(t, equal_cost_each_year);
    tcase_add_test(t, factor_table);
    tcase_add_test(t, unequal_years);
    tcase_add_test(t, damage_at_the_end_of_years);
    tcase_add_test(t, worth_at_the_end);
    tcase_add_test(t, renewed_to_the_end);
    tcase_add_test(t, renewed_in_broken_years);
    tcase_add_test(t, new_again);
    tcase_add_test(t, commissioned);
    tcase_add_test(t, commissioned_together);
    tcase_add_test(t, names_of_periods);
    tcase_add_test(t, settled);
    tcase_add_test(t, settled_against_a_third);
    tcase_add_test(t, rows_and_factors_combine);
    return t;
}
