/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What was thought of: alternatives that make customers worse off, that avoid nothing, that pay
 * for themselves; groups that only an option puts at risk; hazards that cannot be computed;
 * registers without perspectives, customers or groups. All worked out by hand: a horizon of 2 a at
 * 25 % per a, so that 1 a year from the start is worth
 * A = 1.25^-0.5 + 1.25^-1.5 = 1.8 / sqrt(1.25). */
#include <math.h>
#include <string.h>

#include "loaded.h"
#include "worth_test.h"

#define A (1.8L / sqrtl(1.25L))
#define HOURS 8760.0L

static const char settings[] =
    "register: {title: Edges, currency: EUR, prices: 2026, horizon: 2 a, discount: 25 % per a,\n"
    "  perspectives: {company: [penalty], society: [loss]}, perspective: society}\n";
static const char settings_alone[] =
    "register: {title: Edges, currency: EUR, prices: 2026, horizon: 2 a, discount: 25 % per a}\n";

/* A quarter of the cases of H ends in lost, since its relay fails with that. */
static const char network[] =
    "groups: {G: {name: People, persons: 8}}\n"
    "elements: {R: {kind: relay, per-demand: 0.25}, IDLE: {kind: relay, per-demand: 0.5}}\n"
    "hazards:\n"
    "  H: {name: H, frequency: 2 per a, response: {fast: {cleared-by: R, in: 1 s, outcome: none},\n"
    "    never: {outcome: lost}}, outcomes: {lost: {name: Lost,\n"
    "    damage: {loss: {category: loss, is: 1000 EUR}, fine: {category: penalty, is: 300 EUR}},\n"
    "    interruptions: {town: {customers: 40, for: 3 h}},\n"
    "    harm: {G: {present: 0.5, death: 0.125}}}}}\n";

static struct weighing *weigh(struct loaded *l, struct arena *a, const char *first,
                              const char *second, const char *third)
{
    const char *texts[] = {first, second, third};
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_texts(l, a, 3, texts, NULL);
    ohmen_status status = weigh_compile(l->figures, "D", &w, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    loaded_evaluate(l);
    return w;
}

static void is_near(const struct loaded *l, figure_id id, long double expected)
{
    ck_assert_uint_ne(id, FIGURE_NONE);
    double got = figure_value(l->figures, id);
    ck_assert_msg(fabsl(got - expected) <= 1e-14L * fabsl(expected), "%s: %.17g, not %.17Lg",
                  figure_name(l->figures, l->arena, id), got, expected);
}

static void has_no_price(const struct alternative *x)
{
    ck_assert_uint_eq(x->per_hour, FIGURE_NONE);
    ck_assert_uint_eq(x->per_fatality, FIGURE_NONE);
    ck_assert_uint_eq(x->disproportion, FIGURE_NONE);
}

/* The relay halves its failures: 1/4 case a year less, each of 1000 EUR, 120 customer hours and
 * 8 x 1/16 deaths. */
START_TEST(better_for_all)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a, settings, network,
              "options: {O: {name: O, invest: {is: 900 EUR}, change: {elements: {R: {per-demand: "
              "0.125}}}}}\n"
              "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    is_near(&l, x->net, 250 * A - 900);
    is_near(&l, x->of[0].net, 75 * A - 900);
    is_near(&l, x->of[1].net, 250 * A - 900);
    is_near(&l, x->of[0].avoids, 75);
    is_near(&l, x->avoids_time, 30 / HOURS);
    is_near(&l, x->present_time, 30 / HOURS * A);
    is_near(&l, x->per_hour, 900 / (30 / HOURS * A));
    is_near(&l, w->groups.at[0].now, 0.5L / 16);
    is_near(&l, x->individual[0], 0.25L / 16);
    is_near(&l, x->avoids_fatalities, 0.125L);
    is_near(&l, x->per_fatality, (900 - 250 * A) / (0.125L * A));
    ck_assert_uint_eq(x->disproportion, FIGURE_NONE); /* the register says nothing of it */
    ck_assert_uint_eq(w->alternatives.at[0].individual[0], w->groups.at[0].now);
    arena_free(a);
}
END_TEST

/* Damage is spared, but the repair takes 8 h where it took 3. */
START_TEST(worse_for_customers)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a, settings, network,
              "options: {O: {name: O, invest: {is: 10 EUR}, change: {hazards: {H: {outcomes: "
              "{lost: {damage: {loss: {is: 0.25 * was}}, interruptions: {town: {for: 8 h}}}}}}}}}\n"
              "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    is_near(&l, x->net, 375 * A - 10);
    is_near(&l, x->avoids_time, -100 / HOURS);
    is_near(&l, x->present_time, -100 / HOURS * A);
    is_near(&l, x->avoids_fatalities, 0);
    has_no_price(x);
    arena_free(a);
}
END_TEST

START_TEST(avoids_nothing)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a, settings, network,
              "options: {O: {name: O, invest: {is: 10 EUR}, change: {elements: {IDLE: "
              "{per-demand: 0.25}}}}}\n"
              "decisions: {D: {question: What?, options: [O], focus: [H]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    is_near(&l, x->net, -10);
    is_near(&l, x->ratio, 0);
    is_near(&l, x->avoids_time, 0);
    is_near(&l, x->avoids_fatalities, 0);
    is_near(&l, x->individual[0], 0.5L / 16);
    has_no_price(x);
    arena_free(a);
}
END_TEST

/* Costs 10 EUR and spares 250 EUR a year: deaths avoided have no price, customer hours do. */
START_TEST(pays_for_itself)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a, settings, network,
              "options: {O: {name: O, invest: {is: 10 EUR}, change: {elements: {R: {per-demand: "
              "0.125}}}}}\n"
              "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    ck_assert_double_gt(figure_value(l.figures, x->present_fatalities), 0);
    ck_assert_uint_eq(x->per_fatality, FIGURE_NONE);
    ck_assert_uint_eq(x->disproportion, FIGURE_NONE);
    is_near(&l, x->per_hour, 10 / (30 / HOURS * A));
    arena_free(a);
}
END_TEST

/* Nothing to pay, but each case costs 3000 EUR more and nobody is near any more. */
START_TEST(costs_damage_only)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a, settings, network,
              "options: {O: {name: O, change: {hazards: {H: {outcomes: {lost: {damage: {loss: {is: "
              "4000 EUR}}, harm: {G: no}}}}}}}}\n"
              "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    is_near(&l, x->benefit, -1500 * A);
    ck_assert_uint_eq(x->ratio, FIGURE_NONE);
    is_near(&l, x->avoids_fatalities, 0.25L);
    is_near(&l, x->individual[0], 0);
    is_near(&l, x->per_fatality, 6000);
    ck_assert_uint_eq(x->per_hour, FIGURE_NONE);
    arena_free(a);
}
END_TEST

/* The register loses its hazard, and with it all that it did. */
START_TEST(takes_the_hazard_away)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w = weigh(&l, a, settings, network,
                                     "options: {O: {name: O, invest: {is: 4 kEUR}, change: "
                                     "{hazards: {H: no}}}}\n"
                                     "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    is_near(&l, x->benefit, 500 * A);
    is_near(&l, x->of[0].benefit, 150 * A);
    is_near(&l, x->present_time, 60 / HOURS * A);
    is_near(&l, x->individual[0], 0);
    is_near(&l, x->per_fatality, (4000 - 500 * A) / (0.25L * A));
    arena_free(a);
}
END_TEST

/* Fewer people: each bears what he bore, 8 x 1/32 deaths a year become 3 x 1/32. */
START_TEST(fewer_people)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a, settings, network,
              "options: {O: {name: O, invest: {is: 10 EUR}, change: {groups: {G: {persons: 3}}}}}\n"
              "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    is_near(&l, x->benefit, 0);
    is_near(&l, x->individual[0], 0.5L / 16);
    is_near(&l, x->avoids_fatalities, 5 * 0.5L / 16);
    is_near(&l, x->per_fatality, 10 / (5 * 0.5L / 16 * A));
    arena_free(a);
}
END_TEST

/* --- hazards of options, hazards that cannot be computed --- */

static const char harmless[] =
    "groups: {G: {name: People, persons: 8}, IDLERS: {name: Others, persons: 3}}\n"
    "hazards:\n"
    "  H: {name: H, frequency: 2 per a, response: {never: {outcome: lost}}, outcomes: {lost: "
    "{name: "
    "Lost, damage: {loss: {category: loss, is: 1000 EUR}}}}}\n";

START_TEST(option_brings_harm)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w = weigh(
        &l, a, settings, harmless,
        "options: {O: {name: O, invest: {is: 10 EUR}, change: {hazards: {H: {frequency: 0.5 "
        "* was}, N: {name: N, frequency: 0.25 per a, response: {never: {outcome: hurt}}, "
        "outcomes: {hurt: {name: Hurt, interruptions: {town: {customers: 7, for: 2 h}}, harm: "
        "{G: {present: 0.5, death: 0.5}}}}}}}}}\n"
        "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    ck_assert_uint_eq(w->groups.n, 1);
    ck_assert_str_eq(w->groups.at[0].id, "G");
    is_near(&l, w->groups.at[0].now, 0);
    is_near(&l, x->individual[0], 0.0625L);
    is_near(&l, x->avoids_fatalities, -0.5L);
    is_near(&l, x->present_fatalities, -0.5L * A);
    is_near(&l, x->avoids_time, -3.5L / HOURS);
    is_near(&l, x->benefit, 1000 * A);
    has_no_price(x);
    arena_free(a);
}
END_TEST

/* Its element says nothing of failures, so that what it does to people is not known. */
static const char unknown_hazard[] =
    "elements: {BLANK: {kind: relay}}\n"
    "hazards:\n"
    "  BAD: {name: BAD, frequency: 9 per a, response: {fast: {cleared-by: BLANK, in: 1 s, outcome: "
    "none}, never: {outcome: hurt}}, outcomes: {hurt: {name: Hurt, harm: {G: {present: 1, death: "
    "1}}}}}\n";

START_TEST(left_out_of_risks)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct weighing *w;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *texts[] = {settings, network, unknown_hazard,
                           "options: {O: {name: O, change: {elements: {R: {per-demand: 0.125}}}}}\n"
                           "decisions: {D: {question: What?, options: [O]},\n"
                           "  F: {question: What?, options: [O], focus: [BAD]}}\n"};
    loaded_texts(&l, a, 4, texts, NULL);
    ck_assert_int_eq(weigh_compile(l.figures, "D", &w, &e), OHMEN_OK);
    loaded_evaluate(&l);
    ck_assert_uint_eq(w->not_counted.n, 1);
    ck_assert_str_eq(w->not_counted.at[0].options, "BAD");
    ck_assert_ptr_nonnull(strstr(w->not_counted.at[0].why, "BLANK"));
    is_near(&l, w->groups.at[0].now, 0.5L / 16);
    is_near(&l, w->alternatives.at[1].individual[0], 0.25L / 16);
    ck_assert_int_eq(weigh_compile(l.figures, "F", &w, &e), OHMEN_COMPUTE);
    ck_assert_ptr_nonnull(strstr(e.text, "BLANK"));
    arena_free(a);
}
END_TEST

/* --- registers without --- */

START_TEST(without_perspectives)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    figure_id id;
    ohmen_error e = OHMEN_ERROR_INIT;
    const struct weighing *w =
        weigh(&l, a, settings_alone, network,
              "options: {O: {name: O, change: {elements: {R: {per-demand: 0.125}}}}}\n"
              "decisions: {D: {question: What?, options: [O]}}\n");
    is_near(&l, w->alternatives.at[1].net, 325 * A); /* every category */
    is_near(&l, w->alternatives.at[1].avoids, 325);
    ck_assert_int_eq(weigh_find(l.figures, "D.benefit.O.company", &id, &e), OHMEN_UNKNOWN);
    ck_assert_int_eq(weigh_find(l.figures, "D.benefit.O", &id, &e), OHMEN_OK);
    arena_free(a);
}
END_TEST

START_TEST(without_customers_and_groups)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w =
        weigh(&l, a, settings,
              "hazards:\n"
              "  H: {name: H, frequency: 2 per a, response: {never: {outcome: lost}}, outcomes: "
              "{lost: {name: Lost, damage: {loss: {category: loss, is: 1000 EUR}}}}}\n",
              "options: {O: {name: O, invest: {is: 10 EUR}, change: {hazards: {H: {frequency: 0.5 "
              "* was}}}}}\n"
              "decisions: {D: {question: What?, options: [O]}}\n");
    const struct alternative *x = &w->alternatives.at[1];
    ck_assert_uint_eq(w->groups.n, 0);
    ck_assert_uint_eq(w->not_counted.n, 0);
    is_near(&l, x->net, 1000 * A - 10);
    is_near(&l, x->avoids_time, 0);
    is_near(&l, x->present_time, 0);
    ck_assert_uint_eq(x->avoids_fatalities, FIGURE_NONE);
    ck_assert_uint_eq(x->present_fatalities, FIGURE_NONE);
    has_no_price(x);
    arena_free(a);
}
END_TEST

/* --- names --- */

static void is_unknown(struct loaded *l, const char *name, const char *sentence)
{
    figure_id id;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(weigh_find(l->figures, name, &id, &e), OHMEN_UNKNOWN);
    ck_assert_str_eq(e.text, sentence);
}

/* What a hazard does is a part with exports of its own: asking for what is not there is refused in
 * a sentence about that hazard, and does not take the part for a mean over operating states. */
START_TEST(figures_that_are_not_there)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    weigh(&l, a, settings, network,
          "options: {O: {name: O, change: {elements: {R: {per-demand: 0.125}}}}}\n"
          "decisions: {D: {question: What?, options: [O]}}\n");
    is_unknown(&l, "H.individual-risk.K",
               "\"H\" has no figure \"individual-risk.K\" (did you mean \"individual-risk.G\"?)");
    is_unknown(&l, "H.borne.companx",
               "\"H\" has no figure \"borne.companx\" (did you mean \"borne.company\"?)");
    is_unknown(&l, "D.avoids.O.companx",
               "\"D\" has no figure \"avoids.O.companx\" (did you mean \"avoids.O.company\"?)");
    arena_free(a);
}
END_TEST

TCase *worth_edge_case(void)
{
    TCase *t = tcase_create("edges");
    tcase_add_test(t, better_for_all);
    tcase_add_test(t, worse_for_customers);
    tcase_add_test(t, avoids_nothing);
    tcase_add_test(t, pays_for_itself);
    tcase_add_test(t, costs_damage_only);
    tcase_add_test(t, takes_the_hazard_away);
    tcase_add_test(t, fewer_people);
    tcase_add_test(t, option_brings_harm);
    tcase_add_test(t, left_out_of_risks);
    tcase_add_test(t, without_perspectives);
    tcase_add_test(t, without_customers_and_groups);
    tcase_add_test(t, figures_that_are_not_there);
    return t;
}
