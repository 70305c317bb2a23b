/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What knowing an unknown state is worth before a decision in several stages: against the same
 * register written with the state as certain, weighed anew; and readings, deaths and bad ends of
 * such a decision against what it takes to work them out by hand. */
#include <check.h>
#include <math.h>
#include <string.h>

#include "decide/branching.h"
#include "decide/information.h"
#include "decide/loss.h"
#include "decide/sure.h"
#include "loaded.h"

/* %s: probabilities of the state; then what else it says. */
#define TREE                                                                                       \
    "register: {title: T, currency: EUR, prices: 2026, horizon: 25 a, discount: 4 %% per a}\n"     \
    "groups: {CREW: {name: Crew, persons: 3}}\n"                                                   \
    "rates: {fault: {per: a, is: 1 %% per a}}\n"                                                   \
    "hazards:\n"                                                                                   \
    "  H: {name: Fault, frequency: fault, response: {r: {outcome: burnt}}, outcomes: {burnt: "     \
    "{name: Burnt, damage: {repair: {category: equipment, is: 900 kEUR}}, harm: {CREW: {present: " \
    "10 %%, "                                                                                      \
    "death: 2 %%, injury: 10 %%}}}}}\n"                                                            \
    "states:\n"                                                                                    \
    "  S: {is: {%s}, when: {aged: {rates: {fault: {is: 6 * was}}}}, renewed-by: {NEW: sound}, "    \
    "tests: {OIL: {reads: [good, poor], given: {sound: [90 %%, 10 %%], aged: [20 %%, 80 %%]}, "    \
    "costs: 5 kEUR}}%s}\n"                                                                         \
    "options: {NEW: {name: New, invest: %s, change: {}}}\n"                                        \
    "decisions:\n"                                                                                 \
    "  D:\n"                                                                                       \
    "    question: Now, or look first?\n"                                                          \
    "    choose:\n"                                                                                \
    "      nothing-now: []\n"                                                                      \
    "      now: [apply: NEW]\n"                                                                    \
    "      look:\n"                                                                                \
    "        - inspect: S.OIL\n"                                                                   \
    "          reads:\n"                                                                           \
    "            good: [choose: {keep: [], renew: [apply: NEW]}]\n"                                \
    "            poor: [choose: {keep: [], renew: [apply: NEW]}]\n"

#define CHANGES ", becomes: {sound: {aged: 3 % per a}}, failures: {H: {burnt: sound}}"

static struct weighing *weigh(struct loaded *l, struct arena *a, const char *is, const char *more)
{
    const char *invest = *more ? "150 kEUR" : "400 kEUR"; /* what changes is worth less */
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(l, a, arena_printf(a, TREE, is, more, invest), NULL);
    ck_assert_msg(weigh_ranked(l->figures, "D", &w, &e) == OHMEN_OK, "%s", e.text);
    return w;
}

/* The best alternative's worth. */
static double best(struct arena *a, const char *is, const char *more)
{
    struct loaded l;
    struct weighing *w = weigh(&l, a, is, more);
    const struct alternative *x = &w->alternatives.at[w->order[0]];
    return x->net == FIGURE_NONE ? 0 : figure_value(l.figures, x->net);
}

static void knowing(const char *more)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct sampling_plan plan = sampling_defaults();
    struct information_value v, all;
    ohmen_error e = OHMEN_ERROR_INIT;
    double now = best(a, "sound: 70 %, aged: 30 %", more);
    double known = 0.7 * best(a, "sound: 100 %, aged: 0 %", more) +
                   0.3 * best(a, "sound: 0 %, aged: 100 %", more);
    weigh(&l, a, "sound: 70 %, aged: 30 %", more);
    ck_assert_msg(information_value_find(l.figures, "D.worth-knowing[S]", &plan, &v, &e) ==
                      OHMEN_OK,
                  "%s", e.text);
    ck_assert_msg(information_value_find(l.figures, "D.worth-knowing", &plan, &all, &e) == OHMEN_OK,
                  "%s", e.text);
    ck_assert_double_gt(known - now, 1000); /* EUR */
    ck_assert_double_eq_tol(v.input->worth, known - now, 1e-9 * (known + now));
    /* Nothing else is unknown. */
    ck_assert_double_gt(all.everything.error, 0);
    ck_assert_double_le(fabs(all.everything.value - (known - now)), 4 * all.everything.error);
    arena_free(a);
}

START_TEST(a_state_that_stays)
{
    knowing("");
}
END_TEST

START_TEST(a_state_that_changes)
{
    knowing(CHANGES);
}
END_TEST

/* The reading is worth what the best plan with it has over the best without it, and its price. */
START_TEST(a_reading)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct weighing *w = weigh(&l, a, "sound: 70 %, aged: 30 %", "");
    double years = 0;
    for (int y = 0; y < 25; y++)
        years += pow(1.04, -(y + 0.5));
    double sound = 9e3 * years, aged = 54e3 * years, renewed = 400e3 + sound;
    double poor = 0.7 * 0.1 + 0.3 * 0.8, good = 1 - poor;
    double aged_poor = 0.3 * 0.8 / poor, aged_good = 0.3 * 0.2 / good;
    double look = good * (sound + aged_good * (aged - sound)) +
                  poor * fmin(renewed, sound + aged_poor * (aged - sound));
    double without = fmin(0.7 * sound + 0.3 * aged, renewed);
    ck_assert_uint_eq(w->branching->surveys.n, 1);
    const struct survey_worth *s = &w->branching->surveys.at[0];
    ck_assert_double_eq_tol(figure_value(l.figures, s->price), 5e3, 1e-9);
    ck_assert_double_eq_tol(figure_value(l.figures, s->worth), without - look, 1e-6);
    /* Deaths avoided by "now", discounted: of 3 persons, by 5 % per a less in the aged state. */
    double deaths = 0.3 * 0.05 * 0.1 * 0.02 * 3 * years;
    ck_assert_double_eq_tol(loaded_value(&l, "D.present-fatalities.now"), deaths, 1e-12);
    arena_free(a);
}
END_TEST

/* Bad ends: paths and hidden states are told apart, so that there is none with probability
 * sum of p exp(-n); not discounted. */
START_TEST(no_damage_on_paths)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct weighing *w = weigh(&l, a, "sound: 70 %, aged: 30 %", "");
    const struct loss_case *cases;
    struct loss_world *world;
    struct loss_result r;
    struct sampling_plan plan = sampling_defaults();
    ck_assert_int_eq(loss_of_weighing(l.figures, w, &cases, NULL), OHMEN_OK);
    loaded_evaluate(&l);
    ck_assert_int_eq(loss_world_new(l.figures, a, w->alternatives.n, cases, &plan, &world, NULL),
                     OHMEN_OK);
    for (size_t i = 0; i < w->alternatives.n; i++) {
        bool looks = w->alternatives.at[i].n && strcmp(w->alternatives.at[i].name, "look") == 0;
        double left = w->alternatives.at[i].n == 0 ? 1 : looks ? 0.2 : 0; /* of the aged ones */
        double none = 0.7 * exp(-0.25) + 0.3 * (left * exp(-1.5) + (1 - left) * exp(-0.25));
        double mean = 900e3 * (0.7 * 0.25 + 0.3 * (left * 1.5 + (1 - left) * 0.25));
        loss_find_case(world, a, &cases[i], &r);
        ck_assert_double_eq_tol(loss_middle(&r.at[LOSS_NONE]), none, 1e-9);
        ck_assert_double_eq_tol(figure_value(l.figures, cases[i].expected), mean, 1e-6);
    }
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("information in stages");
    TCase *t = tcase_create("information in stages");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, a_state_that_stays);
    tcase_add_test(t, a_state_that_changes);
    tcase_add_test(t, a_reading);
    tcase_add_test(t, no_damage_on_paths);
    suite_add_tcase(s, t);
    SRunner *r = srunner_create(s);
    srunner_run_all(r, CK_NORMAL);
    int failed = srunner_ntests_failed(r);
    srunner_free(r);
    return failed != 0;
}
