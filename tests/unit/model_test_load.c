/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What needs more than one object: references, circles, dimensions, certainty, and the
 * rules of each kind. Documents that are bad in the ways of the manual are in
 * model_test_bad.c. */
#include "model_test.h"

#include <string.h>

#define LINE(n) (SHEET_SETTINGS_LINES + (n))

/* A register of these objects is fine. */
static const struct model *fine(struct sheet *s, const char *yaml)
{
    *s = sheet_new();
    const struct model *m = sheet_register(s, yaml);
    sheet_fine(s);
    ck_assert_ptr_nonnull(m);
    return m;
}

/* One diagnostic at this line (from 1 behind the settings) and column. */
static void wrong(const char *yaml, uint32_t line, uint32_t column, const char *word)
{
    struct sheet s = sheet_new();
    ck_assert_msg(!sheet_register(&s, yaml), "%s", yaml);
    sheet_expect(&s, LINE(line), column, word, NULL);
}

/* The settings of a whole document. */
static void wrong_settings(const char *rest, uint32_t line, uint32_t column, const char *word)
{
    struct sheet s = sheet_new();
    const char *yaml = arena_printf(s.arena,
                                    "register: {title: T, currency: EUR, prices: 2026, "
                                    "discount: 4 %% per a, horizon: 20 a\n%s}\n",
                                    rest);
    ck_assert_msg(!sheet_load(&s, yaml), "%s", yaml);
    sheet_expect(&s, line, column, word, NULL);
}

#define HAZARD "hazards:\n  H:\n    name: X\n    frequency: 1 per a\n"
#define OUTCOMES "    outcomes: {burnt: {name: B}, dark: {name: D}}\n"
#define R "elements: {R: {per-demand: 0.1}}\n"

/* --- the register --- */

START_TEST(loaded_model)
{
    struct sheet s;
    const struct model *m = fine(&s, "sites: {B: {name: X}, A: {name: Y}}\nvalues: {v: 3 s}\n");
    ck_assert_uint_eq(m->of[KIND_SITE].n, 2);
    ck_assert_str_eq(m->of[KIND_SITE].at[0]->id, "A"); /* byte order */
    ck_assert_ptr_eq(m->settings, model_get(m, KIND_REGISTER, REGISTER_ID));
    ck_assert_int_eq(m->settings->prices, 2026);
    ck_assert_uint_eq(m->units.n_counts, 2);
    ck_assert_ptr_null(model_find(m, "C"));
    ck_assert_ptr_null(model_get(m, KIND_ELEMENT, "A"));
    const struct value *v = model_get(m, KIND_VALUE, "v");
    ck_assert(dim_equal(v->is->dim, dim_time));
    ck_assert_ptr_null(m->below);
}
END_TEST

START_TEST(register_without_settings)
{
    struct sheet s = sheet_new();
    ck_assert(!sheet_load(&s, "sites: {A: {name: X}}"));
    sheet_expect(&s, 0, 0, "has no settings yet", NULL);
}
END_TEST

START_TEST(settings)
{
    wrong_settings(", perspective: all-of-us, perspectives: {us: [equipment]}", 2, 16,
                   "there is no perspective \"all-of-us\"");
    wrong_settings(", criteria: {money: {scope: hazard, acceptable-below: 3 EUR per a,\n"
                   " intolerable-above: 3 EUR per a}}",
                   3, 21, "must lie above \"acceptable-below\"");
    wrong_settings(", criteria: {people: {acceptable-below: 1e-3 per a,\n"
                   " intolerable-above: 1e-6 per a}}",
                   3, 21, "must lie above");
    wrong_settings(", currency-code: EUR", 2, 3, "has no key \"currency-code\"");
    wrong_settings(", start: someday", 2, 10, "neither a year");
    wrong_settings(", criteria: {money: {scope: everything}}", 2, 29, "is none of hazard, site");
    struct sheet s = sheet_new();
    ck_assert(!sheet_load(&s, "register: {title: T, currency: Euro, prices: 2026, "
                              "discount: 4 % per a, horizon: 20 a}"));
    sheet_expect(&s, 1, 32, "ISO 4217", NULL);
}
END_TEST

START_TEST(horizons)
{
    static const struct {
        const char *horizon;
        bool good;
    } cases[] = {{"1 a", true},    {"200 a", true},    {"201 a", false}, {"0.5 a", false},
                 {"2.5 a", false}, {"12 month", true}, {"3 kEUR", false}};
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        struct sheet s = sheet_new();
        const char *yaml = arena_printf(s.arena,
                                        "register: {title: T, currency: EUR, prices: 2026, "
                                        "discount: 4 %% per a, horizon: %s}",
                                        cases[i].horizon);
        ck_assert_msg((sheet_load(&s, yaml) != NULL) == cases[i].good, "%s", cases[i].horizon);
        ck_assert_uint_eq(s.diags.count, cases[i].good ? 0 : 1);
    }
}
END_TEST

/* As many countable things as there are dimensions; one more is refused. */
START_TEST(limit_of_counts)
{
    for (unsigned n = UNIT_COUNTS; n <= UNIT_COUNTS + 1; n++) {
        struct sheet s = sheet_new();
        struct text yaml;
        text_init(&yaml, s.arena);
        text_add(&yaml, "register: {title: T, currency: EUR, prices: 2026, horizon: 20 a, "
                        "discount: 4 % per a, counts: [");
        for (unsigned i = 0; i < n; i++)
            text_printf(&yaml, "%sthing%u", i ? ", " : "", i);
        text_add(&yaml, "]}");
        ck_assert_int_eq(sheet_load(&s, text_str(&yaml)) != NULL, n == UNIT_COUNTS);
    }
}
END_TEST

/* --- references and circles --- */

START_TEST(references_that_are_wrong)
{
    wrong("elements: {E: {type: RELAY}}\ntypes: {RELAYS: {}}", 1, 22,
          "there is no \"RELAY\"; expected a type (did you mean \"RELAYS\"?)");
    wrong("elements: {E: {site: F}, F: {}}", 1, 22, "\"F\" is an element; expected a site");
    wrong("values: {v: 2 * wv}", 1, 17, "there is no \"wv\"");
    wrong("values: {v: 3, w: fails(v)}", 1, 19, "\"v\" is a value; expected an element");
    wrong("schemes: {S: {all: [E, F]}}\nelements: {E: {}}", 1, 24,
          "there is no \"F\"; expected an element or a scheme");
    wrong(R HAZARD "    disables: {Q: 0.1}\n    response: {x: {outcome: none}}\n" OUTCOMES, 6, 16,
          "there is no \"Q\"");
}
END_TEST

START_TEST(circles)
{
    wrong("values: {v: 2 * w, w: 3 * v}", 1, 27, "\"v\" is defined by itself: v -> w -> v");
    wrong("sites: {A: {name: X, in: B}, B: {name: Y, in: A}}", 1, 47, "A -> B -> A");
    wrong("schemes: {S: {all: [T]}, T: {any: [S]}}", 1, 36, "S -> T -> S");
    wrong("hazards:\n"
          "  G: {name: X, frequency: 0.5 * frequency(H), response: {x: {outcome: none}}, "
          "outcomes: {}}\n"
          "  H: {name: Y, frequency: 0.5 * frequency(G), response: {x: {outcome: none}}, "
          "outcomes: {}}\n",
          2, 33, "H -> G -> H");
}
END_TEST

START_TEST(long_chains_are_no_circles)
{
    struct sheet s = sheet_new();
    struct text yaml;
    text_init(&yaml, s.arena);
    text_add(&yaml, "elements: {E: {per-demand: 0.1}}\nschemes:\n  S0: E\n");
    for (unsigned i = 1; i <= 5000; i++)
        text_printf(&yaml, "  S%u: {all: [S%u, E]}\n", i, i - 1);
    ck_assert_ptr_nonnull(sheet_register(&s, text_str(&yaml)));
    sheet_fine(&s);
}
END_TEST

/* --- dimensions and certainty --- */

START_TEST(dimensions)
{
    wrong("sites: {A: {name: X, load: 3 h}}", 1, 28,
          "expected power such as 3 MW for \"load\", found time");
    wrong("values: {v: 2 h, w: v + 3 EUR}", 1, 23, "");
    wrong("values: {v: 2 h}\nsites: {A: {name: X, load: 3 * v}}", 2, 28,
          "expected power such as 3 MW for \"load\", found time");
    wrong("rates: {r: {per: section a, is: 0.1 per a}}", 1, 33,
          "expected 1 / (section time), found 1 / time");
    wrong("rates: {r: {per: section, is: 0.1 per section}}", 1, 18, "a rate is per time too");
    wrong("rates: {r: {per: section a, prior: {mean: 0.1 per a, weight: 1}}}", 1, 43, "expected");
    wrong("rates: {r: {per: section a, prior: {form: jeffreys}, events: 1,\n"
          " exposure: {p: {from: 2020-01-01, amount: 3 bay}}}}",
          2, 43, "expected");
    wrong(R HAZARD "    response: {x: {outcome: none}}\n"
                   "    outcomes: {o: {name: O, damage: {repair: {category: c, is: 3 h}}}}\n",
          7, 64, "expected money such as 40 kEUR for \"is\", found time");
    wrong("values: {v: clearance-time}", 1, 13, "clearance-time has a meaning only in the damage");
    struct sheet s;
    fine(&s, "rates: {r: {per: section a, is: 0.1 per section a}}\n"
             "values: {v: {is: 3 section * r}, w: v * 2 a + fails(E)}\n"
             "elements: {E: {per-demand: 0.1}}\n");
}
END_TEST

START_TEST(certainty_through_names)
{
    const char *yaml = "values: {sure: 0.4, unsure: {median: 0.1, error-factor: 2, at-most: 1}}\n"
                       "states: {S: {varies: {p: %s, q: rest}}}\n";
    struct sheet s = sheet_new();
    fine(&s, arena_printf(s.arena, yaml, "sure / 2"));
    wrong(arena_printf(s.arena, yaml, "unsure"), 2, 26, "a name in it is uncertain");
}
END_TEST

/* --- rates, elements --- */

START_TEST(rates)
{
    wrong("rates: {r: {per: a, prior: {median: 0.1 per a, error-factor: 1}}}", 1, 62,
          "greater than 1");
    wrong("rates: {r: {per: a, prior: {form: jeffreys}, events: 1,\n"
          " exposure: {p: {from: 2020-01-02, to: 2020-01-01, amount: 3}}}}",
          2, 39, "this stretch ends before it begins");
}
END_TEST

START_TEST(records_of_demands)
{
    struct sheet s;
    fine(&s, "elements: {E: {per-demand: {prior: jeffreys, failures: 3, demands: 3}}}");
    wrong("elements: {E: {per-demand: {prior: jeffreys, failures: 4, demands: 3}}}", 1, 56,
          "more failures than demands");
    wrong("elements: {E: {per-demand: {prior: uniform, failures: 4}}}", 1, 28,
          "needs \"failures\" and \"demands\"");
    wrong("types: {T: {per-demand: {is: 0.1, demands: 4}}}", 1, 25, "go with a prior");
}
END_TEST

/* --- hazards --- */

START_TEST(responses)
{
    wrong(R HAZARD
          "    response: {x: {cleared-by: R, outcome: dark}, y: {outcome: none}}\n" OUTCOMES,
          6, 19, "lacks \"in\", the clearance time");
    wrong(R HAZARD "    response: {x: {sees: 0.5, outcome: dark}}\n" OUTCOMES, 6, 26,
          "\"sees\" belongs to \"cleared-by\"");
    wrong(R HAZARD "    response: {x: {outcome: drak}}\n" OUTCOMES, 6, 29,
          "no outcome \"drak\" (did you mean \"dark\"?)");
    wrong(R HAZARD "    response: {x: {cleared-by: R, in: 2 s, outcome: dark},\n"
                   "      y: {in: 2 s, outcome: none}}\n" OUTCOMES,
          7, 15, "the last row ends before the row \"x\" acts");
    wrong(R HAZARD
          "    response: {x: {cleared-by: R, in: 2 s, outcome: dark},\n"
          "      y: {cleared-by: R, in: 2000 ms, outcome: dark}, z: {outcome: none}}\n" OUTCOMES,
          7, 30, "\"x\" and \"y\" have the same clearance time");
}
END_TEST

START_TEST(branches)
{
    wrong(R HAZARD "    response: {x: {if-works: R, yes: {outcome: dark}}}\n" OUTCOMES, 6, 19,
          "\"no\" is missing");
    wrong(R HAZARD "    response: {x: {outcome: dark, yes: {outcome: dark}}}\n" OUTCOMES, 6, 40,
          "\"yes\" belongs to \"if-works\"");
    wrong(R HAZARD "    response: {x: {split: {}}}\n" OUTCOMES, 6, 27,
          "this split has no branches");
    wrong(R HAZARD "    response: {x: {split: {p: {outcome: dark}}}}\n" OUTCOMES, 6, 31,
          "lacks its share");
    wrong(R HAZARD "    response: {x: {split: {p: {share: 0.4, outcome: dark},\n"
                   "      q: {share: 0.5, outcome: dark}}}}\n" OUTCOMES,
          6, 27, "sum to 90 %, expected 100 %");
    wrong(R HAZARD "    response: {x: {split: {p: {share: rest, outcome: dark},\n"
                   "      q: {share: rest, outcome: dark}}}}\n" OUTCOMES,
          6, 27, "only one of the shares of this split can be the rest");
    wrong(R HAZARD "    response: {x: {split: {p: {share: fails(R), outcome: dark},\n"
                   "      q: {share: 0.5, outcome: dark}}}}\n" OUTCOMES,
          6, 27, "must be the rest, since not all are plain numbers");
    wrong(R HAZARD
          "    response: {x: {split: {p: {share: 0.7, outcome: dark},\n"
          "      q: {share: 0.5, outcome: dark}, r: {share: rest, outcome: dark}}}}\n" OUTCOMES,
          6, 27, "sum to 120 % already");
    wrong(R HAZARD "    response: {x: {if-works: R, yes: {share: 0.5, outcome: dark}, "
                   "no: {outcome: dark}}}\n" OUTCOMES,
          6, 46, "only branches of a split have a share");
}
END_TEST

#define TIMED                                                                                      \
    "    outcomes: {o: {name: O, damage: {repair: {category: c, is: 1 EUR/s * "                    \
    "clearance-time}}}}\n"

START_TEST(damage_by_clearance_time)
{
    struct sheet s;
    fine(&s, R HAZARD "    response: {x: {in: 3 s, outcome: o}}\n" TIMED);
    struct sheet t = sheet_new();
    ck_assert(!sheet_register(&t,
                              R HAZARD "    response: {x: {split: {p: {share: 0.5, outcome: o}, "
                                       "q: {share: rest, outcome: none}}}}\n" TIMED));
    ck_assert_uint_eq(t.diags.count, 1);
    ck_assert_ptr_nonnull(strstr(t.diags.list.at[0].text, "\"in\""));
}
END_TEST

START_TEST(categories)
{
    struct sheet s = sheet_new();
    const char *yaml =
        "register: {title: T, currency: EUR, prices: 2026, discount: 4 % per a, "
        "horizon: 20 a,\n perspectives: {us: [equipment, crew]}}\n"
        "hazards: {H: {name: X, frequency: 1 per a, response: {x: {outcome: o}},\n"
        " outcomes: {o: {name: O, damage: {repair: {category: equipmnet, is: 1 EUR}}}}}}";
    ck_assert(!sheet_load(&s, yaml));
    sheet_expect(&s, 4, 54, "\"equipmnet\" (did you mean \"equipment\"?)", NULL);
}
END_TEST

/* --- states, decisions, options --- */

#define STATE                                                                                      \
    "states:\n"                                                                                    \
    "  S:\n"                                                                                       \
    "    is: {sound: 0.7, aged: rest}\n"                                                           \
    "    tests: {OIL: {reads: [good, bad], given: {sound: [0.9, 0.1], aged: [0.2, 0.8]}}}\n"

START_TEST(states)
{
    struct sheet s;
    fine(&s, STATE);
    wrong("states: {S: {is: {p: 0.5, q: 0.4}}}", 1, 18, "sum to 90 %");
    wrong(STATE "    when: {agde: {}}\n", 5, 12, "no state \"agde\" (did you mean \"aged\"?)");
    wrong(STATE "    becomes: {sound: {agde: 1 per a}}\n", 5, 23, "no state \"agde\"");
    wrong("states: {S: {is: {p: 0.5, q: rest}, tests: {T: {reads: [good, bad],\n"
          "  given: {p: [0.5, 0.5], q: [0.5, 0.4]}}}}}",
          2, 29, "sum to 90 %");
    wrong("states: {S: {is: {p: 0.5, q: rest}, tests: {T: {reads: [good, bad],\n"
          "  given: {p: [0.5, 0.5], q: [1]}}}}}",
          2, 29, "expected 2 probabilities, one for each reading, found 1");
    wrong("states: {S: {is: {p: 0.5, q: rest}, tests: {T: {reads: [good, bad],\n"
          "  given: {p: [0.5, 0.5]}}}}}",
          2, 10, "the readings in the state \"q\" are missing");
}
END_TEST

#define TREE(steps) STATE "decisions: {D: {question: Q, choose: {keep: [], act:\n  " steps "}}}\n"

START_TEST(trees)
{
    struct sheet s;
    fine(&s, TREE("[{pay: 2 EUR}, {inspect: S.OIL, reads: {good: [], bad: []}}]"));
    wrong(TREE("[{inspect: S.OIL, reads: {good: []}}]"), 6, 4, "\"bad\" has no branch");
    wrong(TREE("[{inspect: S.OLI, reads: {good: [], bad: []}}]"), 6, 14, "did you mean \"OIL\"?");
    wrong(TREE("[{inspect: T.OIL, reads: {good: [], bad: []}}]"), 6, 14, "no state \"T\"");
    wrong(TREE("[{inspect: OIL, reads: {good: [], bad: []}}]"), 6, 14, "the state and its test");
    wrong(TREE("[{choose: {p: []}}, {pay: 1 EUR}]"), 6, 4, "is the last step of a branch");
    wrong(TREE("[{go: away}]"), 6, 9, "no subtree \"away\"");
    wrong(TREE("[{pay: 1 EUR, reads: {p: []}}]"), 6, 24, "\"reads\" belongs to \"inspect\"");
    wrong(TREE("[{chance: {p: {p: 0.5}, q: {p: 0.4}}}]"), 6, 13, "sum to 90 %");
    wrong("decisions: {D: {question: Q, choose: {p: []},\n"
          "  subtrees: {p: [{go: q}], q: [{choose: {r: [{go: p}]}}]}}}\n",
          2, 14, "the subtree \"p\" contains itself");
}
END_TEST

START_TEST(options)
{
    wrong("options: {P: {name: X, change: {}, excludes: [P]}}", 1, 47, "cannot name itself");
    wrong("options: {P: {name: X, change: {}, excludes: [Q], requires: [Q]}, "
          "Q: {name: Y, change: {}}}",
          1, 47, "\"Q\" is both required and excluded");
    wrong(R "options:\n"
            "  P: {name: X, change: {elements: {R: {per-demand: 0.2}}}}\n"
            "  Q: {name: X, requires: [P], change: {elements: {R: {per-demand: 0.3}}}}\n",
          4, 27, "\"Q\" and \"P\" contradict each other at elements/R/per-demand/is");
}
END_TEST

/* An option alone must leave a register that is right. */
START_TEST(options_are_tried)
{
    wrong(R "options: {P: {name: X, change: {elements: {R: {per-demand: 3 * was}}}},\n"
            "  Q: {name: X, change: {schemes: {S: {all: [Z]}}}}}\n",
          3, 45, "there is no \"Z\"");
    wrong(R "options: {P: {name: X, change: {elements: {R: {per-demand: 20 * was}}}}}\n", 2, 60,
          "a probability lies between 0 and 1");
    wrong(R "options: {P: {name: X, change: {values: {R: 3}}}}\n", 2, 42,
          "\"R\" is an element already");
    wrong(R "options: {P: {name: X, change: {elements: {Q: no}}}}\n", 2, 47,
          "there is no \"Q\" to remove");
    wrong(R "schemes: {S: {all: [R]}}\n"
            "options: {P: {name: X, change: {elements: {R: no}}}}\n",
          3, 44, "\"R\" cannot be removed: \"S\" needs it at works");
    wrong("values: {v: 3 h, w: 2 * v}\n"
          "options: {P: {name: X, change: {values: {v: {is: 3 EUR}}}}}\n",
          2, 42, "cannot turn \"v\" from time into money");
}
END_TEST

/* Errors of all objects are told together. */
START_TEST(all_at_once)
{
    struct sheet s = sheet_new();
    ck_assert(!sheet_register(&s, "sites: {A: {name: X, load: 3 h, in: Q}}\n"
                                  "elements: {E: {type: T}}\n"
                                  "values: {v: 2 h + 3 EUR}\n"));
    ck_assert_uint_eq(s.diags.count, 4);
}
END_TEST

Suite *suite_load(void)
{
    Suite *s = suite_create("load");
    TCase *t = tcase_create("load");
    tcase_add_test(t, loaded_model);
    tcase_add_test(t, register_without_settings);
    tcase_add_test(t, settings);
    tcase_add_test(t, horizons);
    tcase_add_test(t, limit_of_counts);
    tcase_add_test(t, references_that_are_wrong);
    tcase_add_test(t, circles);
    tcase_add_test(t, long_chains_are_no_circles);
    tcase_add_test(t, dimensions);
    tcase_add_test(t, certainty_through_names);
    tcase_add_test(t, rates);
    tcase_add_test(t, records_of_demands);
    tcase_add_test(t, responses);
    tcase_add_test(t, branches);
    tcase_add_test(t, damage_by_clearance_time);
    tcase_add_test(t, categories);
    tcase_add_test(t, states);
    tcase_add_test(t, trees);
    tcase_add_test(t, options);
    tcase_add_test(t, options_are_tried);
    tcase_add_test(t, all_at_once);
    suite_add_tcase(s, t);
    return s;
}
