/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Figures at the edges: what cannot be, what is absent, what is refused, and how. */
#include <string.h>

#include "doc/yaml.h"
#include "figure_test.h"
#include "loaded.h"

static const char settings[] =
    "register: {title: Edge, currency: EUR, prices: 2026, horizon: 20 a, discount: 4 % per a, "
    "perspectives: {owner: [equipment], town: [supply]}}\n";

static void edge_register(struct loaded *l, struct arena *a, const char *text)
{
    const char *texts[] = {settings, text};
    loaded_texts(l, a, 2, texts, NULL);
}

static void refused(struct loaded *l, const char *name, ohmen_status expected, const char *text)
{
    figure_id id = 7;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = weigh_find(l->figures, name, &id, &e);
    if (status == OHMEN_OK)
        status = figures_evaluate(l->figures, &e);
    else
        ck_assert_uint_eq(id, 7);
    ck_assert_int_eq(status, expected);
    ck_assert_str_eq(e.text, text);
}

static const char absent_text[] =
    "elements: {E: {kind: relay, per-demand: 0.25}}\n"
    "schemes: {NOT-THERE: absent, BOTH: {all: [E, NOT-THERE]}, EITHER: {any: [E, NOT-THERE]}}\n"
    "hazards:\n"
    "  H:\n"
    "    name: Hazard\n"
    "    frequency: 2 per a\n"
    "    response:\n"
    "      first: {cleared-by: NOT-THERE, in: 0.1 s, outcome: impossible}\n"
    "      second: {cleared-by: BOTH, in: 0.2 s, outcome: impossible}\n"
    "      third: {cleared-by: EITHER, in: 0.5 s, outcome: slow}\n"
    "      never: {outcome: burnt}\n"
    "    outcomes:\n"
    "      impossible: {name: Impossible, damage: {fire: {category: equipment, is: 5 EUR/s * "
    "clearance-time}}}\n"
    "      slow: {name: Slow, damage: {fire: {category: equipment, is: 8 EUR/s * "
    "clearance-time}}}\n"
    "      burnt: {name: Burnt, damage: {lost: {category: supply, is: 100 EUR}}}\n";

START_TEST(absent_is_exactly_never)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    edge_register(&l, a, absent_text);
    ck_assert_double_eq(loaded_value(&l, "H.end.first"), 0);
    ck_assert_double_eq(loaded_value(&l, "H.end.second"), 0);
    ck_assert_double_eq(loaded_value(&l, "H.frequency.impossible"), 0);
    ck_assert_double_eq(loaded_value(&l, "H.damage.impossible"), 0); /* a mean over nothing */
    ck_assert_double_eq(loaded_value(&l, "H.risk.impossible"), 0);
    ck_assert_double_eq(loaded_value(&l, "H.end.third"), 0.75);
    ck_assert_double_eq(loaded_value(&l, "H.end.never"), 0.25);
    ck_assert_double_eq(loaded_value(&l, "NOT-THERE.fails"), 1);
    ck_assert_double_eq(loaded_value(&l, "EITHER.fails"), 0.25);
    ck_assert_double_eq_tol(loaded_value(&l, "H.risk.slow"), 2 * 0.75 * 4, 1e-14);
    ck_assert_double_eq(loaded_value(&l, "H.risk.burnt"), 50);
    arena_free(a);
}
END_TEST

/* Damage that nobody in the perspective bears is no damage: no damaging outcome, a mean of
 * nothing. */
START_TEST(perspectives)
{
    struct arena *a = arena_new(NULL);
    const char *texts[] = {settings, absent_text};
    struct loaded owner, town;
    loaded_texts(&owner, a, 2, texts, "owner");
    loaded_texts(&town, a, 2, texts, "town");
    ck_assert_double_eq(loaded_value(&owner, "H.damaging"), 1.5);
    ck_assert_double_eq(loaded_value(&owner, "H.damage.burnt"), 0);
    ck_assert_double_eq(loaded_value(&town, "H.damaging"), 0.5);
    ck_assert_double_eq(loaded_value(&town, "H.damage"), 100);
    ck_assert_double_eq(loaded_value(&town, "H.damage.slow"), 0);
    ohmen_error e = OHMEN_ERROR_INIT;
    struct figures *f = NULL;
    ck_assert_int_eq(figures_new(a, owner.model, "owners", LOADED_DATE, &f, &e), OHMEN_UNKNOWN);
    ck_assert_str_eq(e.text, "there is no perspective \"owners\" (did you mean \"owner\"?)");
    ck_assert_ptr_null(f);
    arena_free(a);
}
END_TEST

/* A row that sees nothing, and one that sees all. */
START_TEST(sees_none_and_all)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    edge_register(&l, a,
                  "elements: {E: {kind: relay, per-demand: 0.25}, F: {kind: relay, per-demand: "
                  "0.5}}\n"
                  "hazards: {H: {name: Hazard, frequency: 1 per a, response: {blind: {cleared-by: "
                  "E, in: 0.1 s, sees: 0, outcome: none}, whole: {cleared-by: F, in: 0.2 s, sees: "
                  "100 %, outcome: none}, never: {outcome: none}}, outcomes: {x: {name: X}}}}\n");
    ck_assert_double_eq(loaded_value(&l, "H.end.blind"), 0);
    ck_assert_double_eq(loaded_value(&l, "H.end.whole"), 0.5);
    ck_assert_double_eq(loaded_value(&l, "H.end.never"), 0.5);
    ck_assert_double_eq(loaded_value(&l, "H.damage"), 0);
    arena_free(a);
}
END_TEST

START_TEST(names_that_are_not_there)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    edge_register(&l, a, absent_text);
    refused(&l, "H.risk.slo", OHMEN_UNKNOWN,
            "\"H\" has no figure \"risk.slo\" (did you mean \"risk.slow\"?)");
    refused(&l, "G.risk", OHMEN_UNKNOWN, "there is no \"G\" in the register");
    refused(&l, "H.risk@X", OHMEN_UNKNOWN, "there is no option \"X\"");
    refused(&l, "H", OHMEN_UNKNOWN, "\"H\" is an object; its main figure is H.risk");
    arena_free(a);
}
END_TEST

/* A variant is a set: the order of its options has no meaning, and none counts twice. */
START_TEST(options_in_names)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    edge_register(&l, a, absent_text);
    refused(&l, "H.risk@", OHMEN_UNKNOWN, "there is no option \"\"");
    const char *texts[] = {settings, absent_text,
                           "options: {P: {name: P, change: {hazards: {H: {frequency: 0.5 * "
                           "was}}}}, Q: {name: Q, change: {elements: {E: {per-demand: {is: 0.1 * "
                           "was}}}}}}\n"};
    loaded_texts(&l, a, 3, texts, NULL);
    refused(&l, "H.risk@P+Q+P", OHMEN_UNKNOWN, "the option \"P\" is named twice");
    refused(&l, "H.risk@P+R", OHMEN_UNKNOWN, "there is no option \"R\"");
    figure_id id = loaded_find(&l, "H.end.never@Q+P");
    ck_assert_str_eq(figure_name(l.figures, a, id), "H.end.never@P+Q");
    ck_assert_uint_eq(loaded_find(&l, "H.end.never@P+Q"), id);
    ck_assert_double_eq_tol(loaded_value(&l, "H.frequency.burnt@Q+P"), 2 * 0.5 * 0.025, 1e-16);
    ck_assert_str_eq(figure_name(l.figures, a, loaded_find(&l, "E.fails@P+Q")), "E.fails@Q");
    arena_free(a);
}
END_TEST

/* What names give can be seen only when it is computed; the message says which figure. */
START_TEST(numbers_out_of_range)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    edge_register(&l, a, "values: {x: 1.5, y: 2 EUR, z: 0}\n"
                         "elements: {E: {kind: relay, per-demand: x}}\n");
    refused(&l, "E.fails", OHMEN_COMPUTE, "E.fails is 1.5, which is no probability");
    edge_register(&l, a, "values: {z: 0, w: 1 / z}\n");
    refused(&l, "w.value", OHMEN_COMPUTE,
            "w.value does not give a finite number: look for a division by zero or a number that "
            "is far too large");
    arena_free(a);
}
END_TEST

/* A chain of schemes that is deeper than can be compiled is refused each time it is asked
 * for, by the same words. */
START_TEST(too_deep_twice)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct text t;
    text_init(&t, a);
    text_add(&t, "elements: {E: {kind: relay, per-demand: 0.1}}\nschemes:\n  S-0: {all: [E]}\n");
    for (int i = 1; i <= 250; i++)
        text_printf(&t, "  S-%d: {all: [S-%d]}\n", i, i - 1);
    text_add(&t, "hazards: {H: {name: Hazard, frequency: 1 per a, response: {main: {cleared-by: "
                 "S-250, in: 0.1 s, outcome: none}, never: {outcome: none}}, outcomes: {x: {name: "
                 "X}}}}\n");
    edge_register(&l, a, text_str(&t));
    const char *words = "the response of \"H\" is too intertwined: its schemes need more than "
                        "4194304 diagram nodes, or nest too deep";
    refused(&l, "H.risk", OHMEN_COMPUTE, words);
    refused(&l, "H.risk", OHMEN_COMPUTE, words);
    ck_assert_double_eq(loaded_value(&l, "S-150.fails"), 0.1);
    arena_free(a);
}
END_TEST

/* The words that part the names of figures are no names. */
START_TEST(names_are_unique)
{
    struct units u = {.currency = "EUR"};
    ck_assert(!name_is_valid(&u, "sees")); /* H.share.row.sees: the faults it sees, or a branch */
    ck_assert(!name_is_valid(&u, "at"));   /* H.damage.outcome.at.row: the outcome, or an item */
    ck_assert(name_is_valid(&u, "sea"));
}
END_TEST

static const char *formula(struct loaded *l, const char *name)
{
    return figure_formula(l->figures, l->arena, loaded_find(l, name));
}

static const char *source(struct loaded *l, const char *name)
{
    return figure_at(l->figures, loaded_find(l, name))->source;
}

/* Numbers that are equal by chance keep their own formulas and sources. */
START_TEST(equal_numbers)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    edge_register(&l, a,
                  "sources: {SA: {title: A, kind: price-list}, SB: {title: B, kind: price-list}}\n"
                  "values: {hour: 100 EUR}\n"
                  "hazards: {H: {name: Hazard, frequency: 0.5 per a, response: {never: {in: 0.5 s, "
                  "split: {p: {share: 50 %, outcome: one}, q: {share: 50 %, outcome: two}}}}, "
                  "outcomes: {one: {name: One, damage: {b: {category: equipment, is: 5 kEUR, "
                  "source: SA}, c: {category: equipment, is: 2 * hour, source: SA}}}, two: {name: "
                  "Two, damage: {b: {category: equipment, is: 5 kEUR, source: SB}, c: {category: "
                  "equipment, is: 2 * hour, source: SB}, e: {category: equipment, is: \"5 kEUR + "
                  "lookup(clearance-time; 0.1 s -> 1 EUR; 0.5 s -> 2 EUR)\"}, f: {category: "
                  "equipment, is: 5 kEUR}}}, free: {name: Free}, idle: {name: Idle}}}}\n");
    ck_assert_str_eq(formula(&l, "H.damage.one.b"), "5 kEUR");
    ck_assert_str_eq(formula(&l, "H.damage.two.b"), "5 kEUR");
    ck_assert_str_eq(source(&l, "H.damage.one.b"), "SA");
    ck_assert_str_eq(source(&l, "H.damage.two.b"), "SB");
    ck_assert_str_eq(formula(&l, "H.damage.two.c"), "2 * hour.value");
    ck_assert_str_eq(formula(&l, "H.damage.one"), "H.damage.one.b + H.damage.one.c");
    ck_assert_str_eq(formula(&l, "H.damage.two.at.never.q"),
                     "H.damage.two.b + H.damage.two.c + H.damage.two.f + "
                     "H.damage.two.e.at.never.q");
    ck_assert_str_eq(formula(&l, "H.damage.two.e.at.never.q"),
                     "5 kEUR + lookup(H.clearance-time.never; 0.1 s -> 1 EUR; 0.5 s -> 2 EUR)");
    ck_assert_str_eq(formula(&l, "H.share.never.q"), "50 %");
    ck_assert_str_eq(formula(&l, "H.damage.free"), "0 EUR");
    ck_assert_str_eq(formula(&l, "H.damage.idle"), "0 EUR");
    ck_assert_double_eq(loaded_value(&l, "H.damage.two"), 15202);
    arena_free(a);
}
END_TEST

/* Shares beyond 1, by however little, leave no rest; those that make 1 leave 0. */
START_TEST(rest_of_nothing)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *text = "hazards: {H: {name: Hazard, frequency: 1 per a, response: {never: {split: "
                       "{a1: {share: %s, outcome: none}, a2: {share: 0.2, outcome: none}, a3: "
                       "{share: 0.1, outcome: none}, a4: {share: 0.4, outcome: none}, a5: {share: "
                       "rest, outcome: none}}}}, outcomes: {x: {name: X}}}}\n";
    edge_register(&l, a, arena_printf(a, text, "0.3"));
    ck_assert_double_eq(loaded_value(&l, "H.end.never.a5"), 0);
    struct diags d;
    struct model_sources none = {0}, all = {0};
    const struct node *roots[2];
    diags_init(&d, a);
    const char *texts[] = {settings, arena_printf(a, text, "0.3000000005")};
    for (size_t i = 0; i < 2; i++)
        roots[i] = yaml_read(a, "rest.yaml", texts[i], strlen(texts[i]), &d);
    ck_assert(documents_merge(a, &none, 2, roots, &all, &d));
    ck_assert_ptr_null(model_load(a, all.at, all.n, &d));
    ck_assert_uint_eq(d.count, 1);
    ck_assert_str_eq(d.list.at[0].text, "the shares of this split sum to 100.00000005 % already, "
                                        "which leaves nothing for the rest");
    arena_free(a);
}
END_TEST

TCase *figure_edge_case(void)
{
    TCase *t = tcase_create("edges");
    tcase_add_test(t, absent_is_exactly_never);
    tcase_add_test(t, perspectives);
    tcase_add_test(t, sees_none_and_all);
    tcase_add_test(t, names_that_are_not_there);
    tcase_add_test(t, options_in_names);
    tcase_add_test(t, numbers_out_of_range);
    tcase_add_test(t, too_deep_twice);
    tcase_add_test(t, names_are_unique);
    tcase_add_test(t, equal_numbers);
    tcase_add_test(t, rest_of_nothing);
    return t;
}
