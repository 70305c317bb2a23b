/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Elasticities: by hand, and against differences of registers that state a little more or less. */
#include "decide/elasticity.h"

#include <check.h>
#include <math.h>
#include <string.h>

#include "loaded.h"
#include "restated.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

static struct elasticities find(struct loaded *l, const struct weighing *w, const char *of)
{
    struct elasticities all;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_msg(elasticities_find(l->figures, w, of, &all, &e) == OHMEN_OK, "%s", e.text);
    return all;
}

static const struct elasticity *of_input(const struct elasticities *all, const char *name)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i].name, name))
            return &all->at[i];
    ck_abort_msg("there is no %s", name);
    return NULL;
}

static void check_value(const struct elasticities *all, const char *name, double value)
{
    const struct elasticity *x = of_input(all, name);
    restated_check(name, x->value, value, 0, 1e-12);
    ck_assert(!x->is_at_tie);
}

/* net = 0.8 x 0.5 x 1000 A - C: by its size, which is below 0 in the second register. */
START_TEST(by_hand)
{
    static const double costs[] = {900, 9000};
    for (size_t i = 0; i < 2; i++) {
        struct loaded l;
        double a = restated_annuity(), net = 400 * a - costs[i];
        struct weighing *w = restated_weigh(
            &l, arena,
            arena_printf(arena,
                         "%shazards: {H: {name: H, frequency: 0.5 per a, " LOST(
                             "1000 EUR") "}}\n"
                                         "options: {A: {name: A, invest: %.0f EUR, change: "
                                         "{hazards: {H: {frequency: 0.2 * was}}}}}\n"
                                         "decisions: {D: {question: What?, options: [A]}}\n",
                         SETTINGS, costs[i]));
        ck_assert((net < 0) == (i == 1));
        struct elasticities all = find(&l, w, "A");
        check_value(&all, "D.elasticity[H.frequency].A", 400 * a / fabs(net));
        check_value(&all, "D.elasticity[H.damage.lost.loss].A", 400 * a / fabs(net));
        check_value(&all, "D.elasticity[A.invest].A", -costs[i] / fabs(net));
        ck_assert_uint_eq(all.n, 4); /* and interest */
        all = find(&l, w, "do-nothing");
        check_value(&all, "D.elasticity[H.frequency].do-nothing", 1);
        check_value(&all, "D.elasticity[H.damage.lost.loss].do-nothing", 1);
        ck_assert_uint_eq(all.n, 3);
        all = find(&l, w, "H");
        check_value(&all, "D.elasticity[H.frequency].H", 1);
        ck_assert_str_eq(all.at[0].name, "D.elasticity[H.damage.lost.loss].H"); /* tie by name */
        ck_assert_uint_eq(all.n, 2);
    }
}
END_TEST

/* --- differences --- */

static const struct restated_input inputs[] = {
    {"v.value", "{shape: uniform, from: 1, to: 2.5}", ""},
    {"u.value", "700 EUR", "EUR"},
    {"r.rate", "0.235 per bay a", "per bay a"},
    {"R.undetected", "{median: 0.02 per a, error-factor: 3}", "per a"},
    {"S.fails", "0.0185", ""},
    {"A.invest", "845 EUR", "EUR"},
    {"register.discount", "5 % per a", "per a"},
    {"B.running", "35 EUR/a", "EUR/a"},
    {"H.share.p.sees", "0.93", ""},
};
static const struct restated several = {
    "register: {title: T, currency: EUR, prices: 2026, counts: [bay], horizon: 10 a, discount: "
    "$6}\n"
    "values: {v: {name: V, is: $0}, u: {name: U, is: $1}}\n"
    "rates: {r: {name: R, per: bay a, is: $2}}\n"
    "elements:\n"
    "  R: {kind: relay, undetected: $3, test: {every: 3 a, last: 2025-06-01}}\n"
    "  S: {kind: relay, per-demand: $4}\n"
    "hazards:\n"
    "  H: {name: H, frequency: 2 bay * r, response: {p: {cleared-by: R, in: 0.1 s, sees: $8, "
    "outcome: none}, q: {cleared-by: S, in: 0.3 s, outcome: slow}, never: {outcome: lost}}, "
    "outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: 30 * u * v ^ 3}}}, slow: "
    "{name: "
    "Slow, damage: {loss: {category: c, is: 2 * u * sqrt(v)}}}}}\n"
    "options:\n"
    "  A: {name: A, invest: $5, change: {hazards: {H: {frequency: 0.2 * was}}}}\n"
    "  B: {name: B, running: $7, change: {elements: {R: {undetected: 0.3 * was}, S: {per-demand: "
    "0.5 * was}}}}\n"
    "decisions: {D: {question: What?, options: [A, B]}}\n",
    sizeof inputs / sizeof *inputs, inputs};

/* The figure at the means of what is unknown, with input `place` at `x`. */
static double figure_anew(size_t place, double x, const char *of)
{
    struct loaded l;
    double all[sizeof inputs / sizeof *inputs];
    for (size_t i = 0; i < several.n; i++)
        all[i] = i == place ? x : NAN;
    struct weighing *w = restated_weigh(&l, arena, restated_text(arena, &several, all));
    for (size_t i = 0; i < w->alternatives.n; i++) {
        const struct alternative *a = &w->alternatives.at[i];
        if (text_equal(a->name, of))
            return figure_at_means(l.figures, a->net == FIGURE_NONE ? a->present_damage : a->net);
    }
    ck_assert_str_eq(of, "H");
    return figure_at_means(l.figures, w->hazards.at[0].now->main);
}

/* The five-point formula: its error is of the fourth order in the step. */
static double by_differences(size_t place, double now, const char *of)
{
    const double h = 2e-3;
    double f[5];
    for (int i = -2; i <= 2; i++)
        f[i + 2] = figure_anew(place, now * (1 + i * h), of);
    return (8 * (f[3] - f[1]) - (f[4] - f[0])) / (12 * h) / fabs(f[2]);
}

START_TEST(differences_of_registers)
{
    static const char *const subjects[] = {"do-nothing", "A", "B", "A+B", "H"};
    size_t compared = 0;
    for (size_t k = 0; k < sizeof subjects / sizeof *subjects; k++) {
        struct loaded l;
        struct weighing *w = restated_weigh(&l, arena, restated_text(arena, &several, NULL));
        struct elasticities all = find(&l, w, subjects[k]);
        for (size_t i = 0; i < all.n; i++) {
            const struct elasticity *x = &all.at[i];
            const char *input = figure_name(l.figures, arena, x->input);
            size_t place = restated_place(&several, input);
            ck_assert_msg(place != SIZE_MAX, "%s", input);
            restated_check(x->name, x->value, by_differences(place, x->now, subjects[k]), 1, 1e-8);
            ck_assert(i == 0 || fabs(x->value) <= fabs(all.at[i - 1].value));
            compared++;
        }
    }
    /* All inputs reach A+B; interest and costs not H; costs not doing nothing. */
    ck_assert_uint_eq(compared, 7 + 8 + 8 + 9 + 6);
}
END_TEST

/* --- ties --- */

/* The frequency is the greater of two rates that are equal: the first one's derivative holds. */
START_TEST(ties_are_told)
{
    struct loaded l;
    struct weighing *w = restated_weigh(
        &l, arena,
        SETTINGS "rates: {r: {name: R, per: a, is: 0.5 per a}, z: {name: Z, per: a, is: 0.5 per "
                 "a}}\n"
                 "hazards: {H: {name: H, frequency: max(r; z), " LOST(
                     "1000 EUR") "}}\n"
                                 "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: "
                                 "{frequency: 0.2 * was}}}}}\n"
                                 "decisions: {D: {question: What?, options: [A]}}\n");
    struct elasticities all = find(&l, w, "H");
    const struct elasticity *first = of_input(&all, "D.elasticity[r.rate].H");
    const struct elasticity *second = of_input(&all, "D.elasticity[z.rate].H");
    ck_assert(first->is_at_tie && second->is_at_tie);
    restated_check("first", first->value, 1, 0, 1e-12);
    ck_assert(second->value == 0);
    check_value(&all, "D.elasticity[H.damage.lost.loss].H", 1);
}
END_TEST

/* --- names --- */

START_TEST(by_name)
{
    struct loaded l;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct elasticity found;
    struct elasticities none;
    struct weighing *w = restated_weigh(&l, arena, restated_text(arena, &several, NULL));
    struct elasticities all = find(&l, w, "A+B");
    for (size_t i = 0; i < all.n; i++) {
        ck_assert(elasticity_is_named(all.at[i].name));
        ck_assert_msg(elasticity_find(l.figures, all.at[i].name, &found, &e) == OHMEN_OK, "%s",
                      e.text);
        ck_assert(found.value == all.at[i].value && found.input == all.at[i].input);
    }
    ck_assert_int_eq(elasticity_find(l.figures, "D.elasticity[r.rte].A", &found, &e),
                     OHMEN_UNKNOWN);
    ck_assert_msg(strstr(e.text, "D.elasticity[r.rate].A"), "%s", e.text);
    e = (ohmen_error)OHMEN_ERROR_INIT;
    ck_assert_int_eq(elasticities_find(l.figures, w, "A+C", &none, &e), OHMEN_UNKNOWN);
    ck_assert_msg(strstr(e.text, "A+B"), "%s", e.text);
    ck_assert(!elasticity_is_named("D.leans-on[r.rate].A"));
}
END_TEST

int main(void)
{
    Suite *s = suite_create("elasticity");
    TCase *t = tcase_create("elasticity");
    tcase_set_timeout(t, 60);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, by_hand);
    tcase_add_test(t, differences_of_registers);
    tcase_add_test(t, ties_are_told);
    tcase_add_test(t, by_name);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
