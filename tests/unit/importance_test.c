/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Importances and minimal cut sets of registers: the pressure tank of the handbooks, and hazards
 * whose elements are made to fail for sure, or never, in documents of their own. */
#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "figure/importance.h"
#include "loaded.h"

#define REGISTER                                                                                   \
    "register: {title: I, currency: EUR, prices: 2026, horizon: 12 a, discount: 4 % per a}\n"

/* The tank ruptures when T or K2 fails, or S and one of S1, K1, R do. NUREG-0492, pressure tank,
 * with K1 = 3e-5 (from memory). */
static const char tank[] =
    REGISTER "elements:\n"
             "  T: {per-demand: 5e-6}\n"
             "  K2: {per-demand: 3e-5}\n"
             "  S: {per-demand: 1e-4}\n"
             "  S1: {per-demand: 3e-5}\n"
             "  K1: {per-demand: 3e-5}\n"
             "  R: {per-demand: 1e-4}\n"
             "schemes: {TANK: {all: [T, K2, {any: [S, {all: [S1, K1, R]}]}]}}\n";

static const struct effect *effect_of(const struct effects *all, const char *name)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i].event.name, name))
            return &all->at[i];
    ck_abort_msg("no effect of %s", name);
    return NULL;
}

/* Values: computed with an independent library to these digits (tests/published/fault_trees.txt
 * has the same of bare diagrams). */
START_TEST(the_pressure_tank)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct effects e;
    loaded_text(&l, a, tank, NULL);
    const struct compiled *u = loaded_compile(&l, loaded_variant(&l, 0, NULL), "TANK");
    loaded_evaluate(&l);
    importance_in_scheme(l.figures, a, u, &e);
    ck_assert(fabs(e.whole - 3.5015848750035548e-05) <= 1e-15 * e.whole);
    const struct effect *k2 = effect_of(&e, "K2"), *s = effect_of(&e, "S"), *t = effect_of(&e, "T");
    ck_assert(fabs(k2->gain - 0.999994984001) <= 5e-13);
    ck_assert(fabs(s->gain - 1.59987500e-4) <= 5e-13);
    ck_assert(fabs(effect_achievement(&e, s) - 5.56854560) <= 5e-9);
    ck_assert(fabs(effect_reduction(&e, k2) - 6.98083216) <= 5e-9);
    ck_assert(fabs(effect_reduction(&e, t) - 1.16657283) <= 5e-9);
    ck_assert(fabs(effect_fussell_vesely(&e, k2) - 0.856750603) <= 5e-10);
    ck_assert(fabs(effect_fussell_vesely(&e, effect_of(&e, "R")) - 2.8555783704912888e-4) <= 1e-15);
    arena_free(a);
}
END_TEST

START_TEST(cut_sets_of_the_tank)
{
    static const char *const sets[] = {"K2", "T", "S+R", "S+S1", "S+K1"};
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct cut_sets c;
    loaded_text(&l, a, tank, NULL);
    const struct compiled *u = loaded_compile(&l, loaded_variant(&l, 0, NULL), "TANK");
    loaded_evaluate(&l);
    cut_sets_of_scheme(l.figures, a, u, 10, &c);
    ck_assert(!c.too_many && c.n_all == 5 && c.n == 5);
    for (size_t i = 0; i < c.n; i++) {
        const char *text = c.at[i].events[0]->name;
        if (c.at[i].n == 2)
            text = arena_printf(a, "%s+%s", text, c.at[i].events[1]->name);
        ck_assert_str_eq(text, sets[i]);
    }
    ck_assert_double_eq_tol(c.at[2].probability, 1e-8, 1e-23);
    arena_free(a);
}
END_TEST

/* --- against registers in which an element is made sure or impossible --- */

/* Two rows that share the supply, tested at intervals of their own; what they may fail of by
 * themselves can be replaced. */
static const char *hazard_text(struct arena *a, const char *replaced, const char *by)
{
    static const char *const names[] = {"RELAY", "BACKUP", "SUPPLY", "BREAKER"};
    static const char *const data[] = {
        "undetected: 0.03 per a, test: {every: 4 a, finds: 90 %}, since: 2019-05-01",
        "undetected: 0.05 per a, test: {every: 2 a, last: 2024-06-01}, exercised: 1 per a",
        "undetected: 0.02 per a, detected: 0.1 per a, repair: 31 h, test: {every: 1 a, takes: 5 h}",
        "per-demand: 2.55e-3"};
    struct text t;
    text_init(&t, a);
    text_add(&t, REGISTER "elements:\n");
    for (int i = 0; i < 4; i++)
        text_printf(&t, "  %s: {%s}\n", names[i],
                    replaced && strcmp(replaced, names[i]) == 0 ? by : data[i]);
    text_add(&t, "schemes:\n"
                 "  MAIN: {all: [RELAY, SUPPLY, BREAKER]}\n"
                 "  SECOND: {all: [BACKUP, SUPPLY]}\n"
                 "hazards:\n"
                 "  H:\n"
                 "    name: H\n"
                 "    frequency: 0.2385 per a\n"
                 "    response:\n"
                 "      main: {cleared-by: MAIN, in: 0.1 s, sees: 93 %, outcome: small}\n"
                 "      second: {cleared-by: SECOND, in: 1 s, outcome: large}\n"
                 "      never: {outcome: ruin}\n"
                 "    outcomes:\n"
                 "      small: {name: S, damage: {x: {category: c, is: 3 kEUR}}}\n"
                 "      large: {name: L, damage: {x: {category: c, is: 70 kEUR}}}\n"
                 "      ruin: {name: R, damage: {x: {category: c, is: 2.385 MEUR}}}\n");
    return text_str(&t);
}

static double risk_with(const char *element, const char *by)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a, hazard_text(a, element, by), NULL);
    double risk = loaded_value(&l, "H.risk");
    arena_free(a);
    return risk;
}

START_TEST(elements_made_sure_and_impossible)
{
    static const char *const names[] = {"RELAY", "BACKUP", "SUPPLY", "BREAKER"};
    const char *name = names[_i];
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct effects e, all;
    loaded_text(&l, a, hazard_text(a, NULL, NULL), NULL);
    const struct compiled *h = loaded_compile(&l, loaded_variant(&l, 0, NULL), "H");
    loaded_evaluate(&l);
    importance_in_hazard(l.figures, a, h, &e);
    double risk = loaded_value(&l, "H.risk");
    double sure = risk_with(name, "per-demand: 1"), never = risk_with(name, "per-demand: 0");
    const struct effect *x = effect_of(&e, name);
    ck_assert(fabs(x->gain - (sure - never)) <= 1e-10 * sure);
    ck_assert(fabs(x->share - (risk - never)) <= 1e-10 * risk);
    ck_assert(fabs(effect_achievement(&e, x) - sure / risk) <= 1e-10 * sure / risk);
    ck_assert(fabs(effect_reduction(&e, x) - risk / never) <= 1e-10 * risk / never);
    ck_assert(fabs(effect_fussell_vesely(&e, x) - (risk - never) / risk) <= 1e-10);
    ck_assert_int_eq(importance_in_all(l.figures, a, 1, &h, &all, NULL), OHMEN_OK);
    ck_assert(fabs(effect_of(&all, name)->gain - x->gain) <= 1e-13 * x->gain);
    ck_assert(fabs(loaded_value(&l, "register.risk") - risk) <= 1e-14 * risk);
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *suite = suite_create("importance");
    TCase *t = tcase_create("importance");
    tcase_add_test(t, the_pressure_tank);
    tcase_add_test(t, cut_sets_of_the_tank);
    tcase_add_loop_test(t, elements_made_sure_and_impossible, 0, 4);
    suite_add_tcase(suite, t);
    SRunner *r = srunner_create(suite);
    srunner_run_all(r, CK_NORMAL);
    int failed = srunner_ntests_failed(r);
    srunner_free(r);
    return failed ? EXIT_FAILURE : EXIT_SUCCESS;
}
