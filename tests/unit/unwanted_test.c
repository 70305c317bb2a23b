/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Unwanted operation by hand: voting, the battery that carries and the breaker that opens, what
 * types state, tests that trip, what `trips-on` replaces, common causes and time; where unwanted()
 * may stand, and what is refused. */
#include "unwanted_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "formula.h"

static const char settings[] = "register: {title: Unwanted, currency: EUR, prices: 2026, "
                               "horizon: 20 a, discount: 4 % per a}\n";

void unwanted_load(struct loaded *l, struct arena *a, const char *text)
{
    const char *texts[] = {settings, text};
    loaded_texts(l, a, 2, texts, NULL);
}

void unwanted_expect(struct loaded *l, const char *name, double expected, double relative)
{
    double x = loaded_value(l, name);
    ck_assert_msg(fabs(x - expected) <= relative * fabs(expected), "%s is %.17g, expected %.17g",
                  name, x, expected);
}

void unwanted_reads(struct loaded *l, const char *name, const char *formula)
{
    figure_id id = loaded_find(l, name);
    ck_assert_str_eq(figure_formula(l->figures, l->arena, id), formula);
}

/* --- formulas --- */

struct naming {
    struct loaded *l;
    const struct figure_ids *inputs;
};

/* "asserts.E.fails": that it does not assert itself; "up.E.fails": that it is in repair. */
static bool find_event(const struct naming *n, const char *wanted, long double *out)
{
    bool asserts = text_starts(wanted, "asserts.");
    const char *id = wanted + (asserts ? strlen("asserts.") : strlen("up."));
    id = arena_strn(n->l->arena, id, strlen(id) - strlen(".fails"));
    const char *tail = arena_printf(n->l->arena, ".%s", id);
    for (size_t i = 0; i < n->inputs->n; i++) {
        const char *name = figure_name(n->l->figures, n->l->arena, n->inputs->at[i]);
        const char *end = strlen(name) > strlen(tail) ? name + strlen(name) - strlen(tail) : "";
        long double x = figure_value(n->l->figures, n->inputs->at[i]);
        if (asserts && strstr(name, ".asserts.") && text_equal(end, tail)) {
            *out = 1 - x;
            return true;
        }
        if (!asserts && text_equal(name, arena_printf(n->l->arena, "%s.in-repair", id))) {
            *out = x;
            return true;
        }
    }
    return false;
}

static bool find_figure(void *ctx, const char *wanted, long double *out)
{
    const struct naming *n = ctx;
    if (text_starts(wanted, "asserts.") || text_starts(wanted, "up."))
        return find_event(n, wanted, out);
    for (size_t i = 0; i < n->inputs->n; i++)
        if (text_equal(figure_name(n->l->figures, n->l->arena, n->inputs->at[i]), wanted)) {
            *out = figure_value(n->l->figures, n->inputs->at[i]);
            return true;
        }
    return false;
}

void unwanted_explains(struct loaded *l, const char *name)
{
    figure_id id = loaded_find(l, name);
    double value = loaded_value(l, name);
    struct figure_ids inputs = {0};
    figure_inputs(l->figures, l->arena, id, &inputs);
    struct naming n = {l, &inputs};
    struct formula_world world = {.currency = "EUR", .ctx = &n, .find = find_figure};
    const char *formula = figure_formula(l->figures, l->arena, id);
    char error[FORMULA_ERROR] = "";
    long double x = NAN;
    if (strchr(formula, '"')) /* a long condition is told in words, which nobody can evaluate */
        return;
    bool fine = formula_evaluate(formula, &world, &x, error);
    ck_assert_msg(fine, "%s = %s: %s", name, formula, error);
    ck_assert_msg(fabsl(x - value) <= 1e-11L * fabsl(value), "%s = %s: %.17Lg, expected %.17g",
                  name, formula, x, value);
}

/* --- voting --- */

#define CHANNEL "{kind: relay, per-demand: 0.02, unwanted: {per-event: {surge: 0.04}}}"

/* Voting of channels that trip spuriously with .04 each, as in tests/published/protection.txt
 * (printed .08, .0016, .0048). */
START_TEST(votes)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  "elements: {A: " CHANNEL ", B: " CHANNEL ", C: " CHANNEL "}\n"
                  "schemes: {V-1OO2: {any: [A, B]}, V-2OO2: {all: [A, B]},\n"
                  "          V-2OO3: {at-least: 2, of: [A, B, C]}}\n");
    unwanted_expect(&l, "V-1OO2.unwanted-per-event.surge", .0784, 1e-14);
    unwanted_expect(&l, "V-2OO2.unwanted-per-event.surge", .0016, 1e-14);
    unwanted_expect(&l, "V-2OO3.unwanted-per-event.surge", .004672, 1e-14);
    ck_assert(loaded_value(&l, "V-2OO3.unwanted") == 0);
    unwanted_reads(&l, "V-2OO3.unwanted-per-event.surge",
                   "probability(at-least(2; asserts.A; asserts.B; asserts.C))");
    unwanted_explains(&l, "V-2OO3.unwanted-per-event.surge");
    arena_free(a);
}
END_TEST

/* --- carriers and breakers --- */

static const char feeder[] =
    "elements:\n"
    "  R: {kind: relay, per-demand: 0.021, unwanted: {by-itself: 0.01 per a,\n"
    "      per-event: {inrush: 0.0125}}}\n"
    "  BAT: {kind: dc-supply, per-demand: 6e-4}\n"
    "  CT: {kind: ct, per-demand: 1.5e-4, unwanted: {by-itself: 2e-4 per a,\n"
    "       per-event: {inrush: 0.003}}}\n"
    "  Q: {kind: breaker, per-demand: 2.55e-3, unwanted: {by-itself: 0.0015 per a,\n"
    "      per-event: {inrush: 4e-4}}}\n"
    "schemes:\n"
    "  S: {all: [R, BAT, Q]}\n"
    "  T: {all: [CT, R, BAT, Q]}\n";

START_TEST(a_breaker_opens_whatever_the_rest_does)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a, feeder);
    double bat = 1 - 6e-4, q = 1 - 2.55e-3, ct = 1 - 1.5e-4;
    unwanted_expect(&l, "S.unwanted", .01 * bat * q + .0015, 1e-14); /* about .0115 per a */
    unwanted_expect(&l, "S.unwanted.by-itself.Q", .0015, 0);
    unwanted_expect(&l, "S.unwanted.by-itself.R", .01 * bat * q, 1e-14);
    unwanted_expect(&l, "T.unwanted", .01 * ct * bat * q + 2e-4 * bat * q + .0015, 1e-14);
    /* The breaker opens (4e-4), or does not and is sound, and current transformer or relay, where
     * it is sound, asserts itself. */
    double asserts = .003 + (1 - 1.5e-4 - .003) * .0125;
    double rest = (1 - 4e-4 - 2.55e-3) * bat * asserts;
    unwanted_expect(&l, "T.unwanted-per-event.inrush", 4e-4 + rest, 1e-13);
    unwanted_reads(&l, "S.unwanted", "S.unwanted.by-itself.R + Q.unwanted");
    unwanted_reads(&l, "S.unwanted.by-itself.R", "R.unwanted * probability(BAT and Q)");
    unwanted_reads(&l, "R.unwanted", "0.01 per a");
    unwanted_reads(&l, "T.asserts.inrush.CT", "ratio(CT.unwanted-per-event.inrush; 1 - CT.fails)");
    unwanted_explains(&l, "S.unwanted");
    unwanted_explains(&l, "T.unwanted.by-itself.CT");
    unwanted_explains(&l, "T.unwanted-per-event.inrush");
    unwanted_explains(&l, "T.asserts.inrush.Q");
    arena_free(a);
}
END_TEST

START_TEST(expressions_weigh_the_stress_classes)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = "values:\n"
                       "  plain: {is: unwanted(S)}\n"
                       "  under: {is: unwanted(T; inrush 3 per a; other 7 per a) * 1 a}\n"
                       "types: {K: {unwanted: {per-event: {other: 0.5}}}}\n";
    unwanted_load(&l, a, arena_printf(a, "%s%s", feeder, text));
    unwanted_expect(&l, "plain.value", loaded_value(&l, "S.unwanted"), 0);
    double inrush = loaded_value(&l, "T.unwanted-per-event.inrush");
    unwanted_expect(&l, "under.value", loaded_value(&l, "T.unwanted") + 3 * inrush, 1e-15);
    unwanted_explains(&l, "under.value");
    arena_free(a);
}
END_TEST

/* --- what schemes and elements state --- */

START_TEST(another_structure_may_trip)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  arena_printf(a, "%s%s", feeder,
                               "  ONE: {works: {all: [CT, R, BAT, Q]}, trips-on: R}\n"
                               "  TWO: {works: {all: [ONE, BAT]}, trips-on: {all: [ONE, "
                               "Q]}}\n"
                               "  NOT-THERE: absent\n"));
    unwanted_expect(&l, "ONE.unwanted", .01, 0);
    unwanted_expect(&l, "ONE.unwanted-per-event.inrush", .0125, 0);
    unwanted_expect(&l, "TWO.unwanted", .01 * (1 - 2.55e-3) + .0015, 1e-14);
    ck_assert(loaded_value(&l, "NOT-THERE.unwanted") == 0);
    arena_free(a);
}
END_TEST

START_TEST(a_type_speaks_for_its_elements)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(
        &l, a,
        "types: {MAKE: {kind: receiver, per-demand: 0.01, unwanted: {by-itself: 0.02 per a,\n"
        "        per-event: {surge: 0.25}}}}\n"
        "elements:\n"
        "  A: {type: MAKE}\n"
        "  B: {type: MAKE, unwanted: {by-itself: 0.125 per a}}\n"
        "  C: {per-demand: 0.1, unwanted: {by-itself: 0.5 per a}}\n" /* no kind, but it decides */
        "  D: {per-demand: 0.1}\n"                                   /* it carries */
        "schemes: {S: {any: [A, B]}, T: {all: [C, D]}, U: {all: [D]}}\n");
    unwanted_expect(&l, "S.unwanted", .145, 1e-15);
    unwanted_expect(&l, "S.unwanted-per-event.surge", .25, 0);
    unwanted_reads(&l, "S.unwanted.by-itself.A", "MAKE.unwanted");
    unwanted_expect(&l, "T.unwanted", .5 * .9, 1e-15);
    ck_assert(loaded_value(&l, "U.unwanted") == 0);
    arena_free(a);
}
END_TEST

START_TEST(tests_trip_the_plant)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  "elements:\n"
                  "  A: {kind: relay, per-demand: 0.01, test: {every: 4 a, trips: 3 %}}\n"
                  "  B: {kind: breaker, per-demand: 0.02, test: {every: 5 a, trips: 0.001},\n"
                  "      unwanted: {by-itself: 0.002 per a}}\n"
                  "schemes: {S: {all: [A, B, A]}}\n");
    unwanted_expect(&l, "A.unwanted.tests", .0075, 1e-15);
    unwanted_expect(&l, "S.unwanted.tests", .0077, 1e-15);
    unwanted_expect(&l, "S.unwanted", .0097, 1e-15);
    unwanted_reads(&l, "S.unwanted.tests", "A.unwanted.tests + B.unwanted.tests");
    unwanted_reads(&l, "A.unwanted.tests", "3 % / 4 a");
    arena_free(a);
}
END_TEST

/* --- common causes and time --- */

/* Both batteries fail together with .03 x .1 = .003, each alone with .027. */
START_TEST(common_causes_stay_common)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  "elements:\n"
                  "  R: {kind: relay, per-demand: 0.1, unwanted: {by-itself: 0.01 per a}}\n"
                  "  B1: {kind: dc-supply, per-demand: 0.03, unwanted: {per-event: {surge: 0.2}}}\n"
                  "  B2: {kind: dc-supply, per-demand: 0.03}\n"
                  "common-cause: {CC: {of: [B1, B2], beta: 0.1}}\n"
                  "schemes: {S: {all: [R, {any: [B1, B2]}]}, T: {all: [R, B1]}}\n");
    double both = .003 + (1 - .003) * .027 * .027;
    unwanted_expect(&l, "S.unwanted", .01 * (1 - both), 1e-14);
    unwanted_expect(&l, "T.unwanted-per-event.surge", .2, 1e-14);
    unwanted_reads(&l, "S.unwanted.by-itself.R",
                   "R.unwanted * probability((B1.alone and CC.B1.B2) or (B2.alone and CC.B1.B2))");
    unwanted_reads(&l, "T.asserts.surge.B1",
                   "ratio(B1.unwanted-per-event.surge; 1 - probability(not (B1.alone and "
                   "CC.B1.B2)))");
    arena_free(a);
}
END_TEST

/* Undetected failures at x per a of a battery that is tested each T: 1 - (1 - exp(-xT))/(xT) in
 * the mean; of two tested together the mean of the square. */
START_TEST(what_is_tested_is_averaged)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  "elements:\n"
                  "  R: {kind: relay, undetected: 0.1 per a, test: {every: 4 a},\n"
                  "      unwanted: {by-itself: 0.01 per a}}\n"
                  "  B1: {kind: dc-supply, undetected: 0.05 per a, test: {every: 3 a},\n"
                  "       unwanted: {per-event: {surge: 0.2}}}\n"
                  "  B2: {kind: dc-supply, undetected: 0.05 per a, test: {every: 3 a}}\n"
                  "schemes: {S: {all: [R, {any: [B1, B2]}]}, T: {all: [R, B1]}}\n");
    double z = .15, one = -expm1(-z) / z, two = -expm1(-2 * z) / (2 * z);
    unwanted_expect(&l, "S.unwanted", .01 * (2 * one - two), 1e-11);
    unwanted_expect(&l, "T.unwanted", .01 * one, 1e-11);
    unwanted_expect(&l, "T.unwanted-per-event.surge", .2, 1e-11);
    arena_free(a);
}
END_TEST

/* --- where it may stand --- */

/* A register with a hole for each place; fill() fills them. */
static const char document[] =
    "values: {v: {is: <value>}}\n"
    "rates: {r: {per: a, is: <rate>}}\n"
    "elements:\n"
    "  E: {kind: relay, per-demand: <per-demand>, undetected: <undetected>}\n"
    "  F: {kind: relay, per-demand: 0.1, unwanted: {by-itself: 0.125 per a, per-event: {inrush: "
    "0.0625}}}\n"
    "schemes: {MAIN: {all: [F]}, USED: {all: [E]}}\n"
    "hazards:\n"
    "  H:\n"
    "    name: Hazard\n"
    "    frequency: <frequency>\n"
    "    response:\n"
    "      main: {cleared-by: USED, in: 0.1 s, sees: <sees>, outcome: short}\n"
    "      never: {split: {p: {share: <share>, outcome: long}, q: {share: rest, outcome: short}}}\n"
    "    outcomes:\n"
    "      short: {name: Short, damage: {x: {category: c, is: <damage>}}}\n"
    "      long: {name: Long, damage: {x: {category: c, varies: v * r * 1 a * 2 EUR}}}\n"
    "options:\n"
    "  O: {name: Option, invest: <invest>, running: <running>, change: {elements: {E: {per-demand: "
    "0.2}}}}\n"
    "decisions: {D: {question: Which?, options: [O], focus: [H]}}\n";

/* .125 + 3 x .0625 = .3125 per a */
#define UNWANTED "unwanted(MAIN; inrush 3 per a)"
static const struct place_case {
    const char *hole, *plain, *unwanted;
} cases[] = {
    {"<value>", "0.3125", UNWANTED " * 1 a"},
    {"<rate>", "0.3125 per a", UNWANTED},
    {"<per-demand>", "0.3125", UNWANTED " * 1 a"},
    {"<undetected>", "0.3125 per a", UNWANTED},
    {"<frequency>", "0.3125 per a", UNWANTED},
    {"<sees>", "0.3125", UNWANTED " * 1 a"},
    {"<share>", "0.3125", UNWANTED " * 1 a"},
    {"<damage>", "0.3125 EUR", UNWANTED " * 1 a * 1 EUR"},
    {"<invest>", "0.3125 EUR", UNWANTED " * 1 a * 1 EUR"},
    {"<running>", "0.3125 EUR per a", UNWANTED " * 1 EUR"},
};
#define CASES ((int)(sizeof cases / sizeof cases[0]))

/* The document with every hole filled plainly, that of case `special` by `unwanted`. */
static const char *fill(struct arena *a, int special)
{
    const char *text = document;
    for (int i = 0; i < CASES; i++) {
        const char *hole = strstr(text, cases[i].hole);
        ck_assert_ptr_nonnull(hole);
        text = arena_printf(a, "%.*s%s%s", (int)(hole - text), text,
                            i == special ? cases[i].unwanted : cases[i].plain,
                            hole + strlen(cases[i].hole));
    }
    return text;
}

START_TEST(it_may_stand_wherever_a_number_may)
{
    static const char *const figures[] = {"H.risk", "H.risk@O", "D.total.O", "D.total.do-nothing"};
    struct arena *a = arena_new(NULL);
    struct loaded plain, special;
    unwanted_load(&plain, a, fill(a, -1));
    unwanted_load(&special, a, fill(a, _i));
    for (size_t i = 0; i < sizeof figures / sizeof *figures; i++) {
        double expected = loaded_value(&plain, figures[i]);
        ck_assert(expected > 0);
        unwanted_expect(&special, figures[i], expected, 1e-14);
    }
    arena_free(a);
}
END_TEST

/* An option that changes the relay changes what asks how often it trips, and nothing else. */
START_TEST(options_reach_it)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(
        &l, a,
        "elements: {R: {kind: relay, per-demand: 0.1, unwanted: {by-itself: 0.125 per a}}}\n"
        "schemes: {S: {all: [R]}, T: {all: [R]}}\n"
        "hazards: {H: {name: Trip, frequency: unwanted(S), response: {n: {outcome: out}},\n"
        "  outcomes: {out: {name: Out, damage: {x: {category: c, is: 10 EUR}}}}}}\n"
        "options: {O: {name: New relay, change: {elements: {R: {unwanted: {by-itself: 0.5 * "
        "was}}}}}}\n");
    unwanted_expect(&l, "H.risk", 1.25, 1e-15);
    unwanted_expect(&l, "H.risk@O", .625, 1e-15);
    unwanted_expect(&l, "S.unwanted@O", .0625, 1e-15);
    arena_free(a);
}
END_TEST

/* --- what is refused --- */

static void refused(struct loaded *l, const char *name, ohmen_status expected, const char *text)
{
    figure_id id;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = weigh_find(l->figures, name, &id, &e);
    if (status == OHMEN_OK)
        status = figures_evaluate(l->figures, &e);
    ck_assert_int_eq(status, expected);
    ck_assert_str_eq(e.text, text);
}

START_TEST(what_cannot_be_is_refused)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  "elements: {B: {kind: dc-supply, per-demand: 0.6, unwanted: {per-event: {surge: "
                  "0.5}}}}\n"
                  "schemes: {S: {all: [B]}}\n");
    refused(&l, "S.unwanted-per-event.surgee", OHMEN_UNKNOWN,
            "\"S\" has no figure \"unwanted-per-event.surgee\" (did you mean "
            "\"unwanted-per-event.surge\"?)");
    refused(&l, "B.unwanted", OHMEN_UNKNOWN, "\"B\" has no figure \"unwanted\"");
    refused(&l, "S.availability", OHMEN_UNKNOWN,
            "no element of the scheme \"S\" has detected failures and a time to repair them: "
            "nothing tells how available it is");
    refused(&l, "S.unwanted-per-event.surge", OHMEN_COMPUTE,
            "S.asserts.surge.B is 1.25, which is no probability");
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("unwanted");
    TCase *t = tcase_create("by hand");
    tcase_add_test(t, votes);
    tcase_add_test(t, a_breaker_opens_whatever_the_rest_does);
    tcase_add_test(t, expressions_weigh_the_stress_classes);
    tcase_add_test(t, another_structure_may_trip);
    tcase_add_test(t, a_type_speaks_for_its_elements);
    tcase_add_test(t, tests_trip_the_plant);
    tcase_add_test(t, common_causes_stay_common);
    tcase_add_test(t, what_is_tested_is_averaged);
    tcase_add_loop_test(t, it_may_stand_wherever_a_number_may, 0, CASES);
    tcase_add_test(t, options_reach_it);
    tcase_add_test(t, what_cannot_be_is_refused);
    suite_add_tcase(s, t);
    suite_add_tcase(s, unwanted_random_case());
    suite_add_tcase(s, repairs_case());
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    int bad = srunner_ntests_failed(sr) != 0 || srunner_ntests_run(sr) == 0;
    srunner_free(sr);
    return bad ? EXIT_FAILURE : EXIT_SUCCESS;
}
