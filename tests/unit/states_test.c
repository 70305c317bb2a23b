/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Operating states: means by hand, and means of registers in which the state's change is
 * written out; projection, names, formulas, and what is refused. */
#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "doc/yaml.h"
#include "formula.h"
#include "loaded.h"

#define SETTINGS                                                                                   \
    "register: {title: States, currency: EUR, prices: 2026, horizon: 20 a, discount: 4 % per a, "  \
    "counts: [section]}\n"

static void expect_near(double x, double expected)
{
    ck_assert_msg(fabs(x - expected) <= 1e-12 * fabs(expected), "%.17g, expected %.17g", x,
                  expected);
}

static const struct variant *variant_in(struct loaded *l, const struct variant *v,
                                        const char *state)
{
    const struct variant *out = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = figures_variant_in(l->figures, v, state, &out, &e);
    ck_assert_msg(status == OHMEN_OK, "%s: %s", state, e.text);
    return out;
}

static const struct variant *variant_with(struct loaded *l, const struct variant *v,
                                          const char *name, const char *change)
{
    const struct variant *out = NULL;
    struct diags d;
    ohmen_error e = OHMEN_ERROR_INIT;
    diags_init(&d, l->arena);
    const struct node *n = yaml_read(l->arena, "change", change, strlen(change), &d);
    ohmen_status status = figures_variant_with(l->figures, v, name, n, &out, &e);
    ck_assert_msg(status == OHMEN_OK, "%s: %s", name, e.text);
    return out;
}

/* --- two transformers --- */

/* A customer is dark when neither transformer carries: the fault on the line comes while both
 * work with 1 - 0.03. */
#define TRANSFORMERS                                                                               \
    SETTINGS                                                                                       \
    "elements: {A: {kind: breaker, per-demand: 0}, B: {kind: breaker, per-demand: 0},\n"           \
    "  X: {kind: relay, per-demand: 0.5}}\n"                                                       \
    "schemes: {SUPPLY: {any: [A, B]}}\n"                                                           \
    "hazards:\n"                                                                                   \
    "  H:\n"                                                                                       \
    "    name: Demand\n"                                                                           \
    "    frequency: 2.385 per a\n"                                                                 \
    "    response:\n"                                                                              \
    "      fed: {cleared-by: SUPPLY, in: 1 s, outcome: none}\n"                                    \
    "      dark: {outcome: dark}\n"                                                                \
    "    outcomes: {dark: {name: Dark, damage: {supply: {category: c, is: 1000 EUR}}}}\n"

#define LINES 12 /* of it */

#define OUT(id) "{elements: {" id ": {per-demand: 1}}}"

START_TEST(outages_are_never_simultaneous)
{
    struct arena *a = arena_new(NULL);
    struct loaded together, apart;
    loaded_text(&together, a,
                TRANSFORMERS
                "states: {OUT: {varies: {normal: rest, p: 2 %, q: 2 %}, when: {p: " OUT(
                    "A") ", q: " OUT("B") "}}}\n",
                NULL);
    ck_assert_double_eq(loaded_value(&together, "H.probability.dark"), 0);
    ck_assert_double_eq(loaded_value(&together, "H.risk"), 0);
    ck_assert_double_eq(loaded_value(&together, "H.frequency"), 2.385);
    expect_near(loaded_value(&together, "OUT.share.normal"), 0.96);
    loaded_text(&apart, a,
                TRANSFORMERS "states:\n  P: {varies: {fed: 98 %, out: rest}, when: {out: " OUT(
                    "A") "}}\n  Q: {varies: {fed: 98 %, out: rest}, when: {out: " OUT("B") "}}\n",
                NULL);
    expect_near(loaded_value(&apart, "H.probability.dark"), 0.02 * 0.02);
    expect_near(loaded_value(&apart, "H.risk"), 0.02 * 0.02 * 2.385 * 1000);
    arena_free(a);
}
END_TEST

/* --- the register written out --- */

/* Everything that a state may do: failure, absence, frequency by a rate, damage, share. */
#define HAZARDS                                                                                    \
    "hazards:\n"                                                                                   \
    "  H:\n"                                                                                       \
    "    name: Fault\n"                                                                            \
    "    frequency: 1 section * faults\n"                                                          \
    "    response:\n"                                                                              \
    "      main: {cleared-by: MAIN, in: 0.1 s, sees: 0.93, outcome: short}\n"                      \
    "      back: {cleared-by: BACK, in: 0.7 s, outcome: long}\n"                                   \
    "      never: {in: 2.9 s, split: {p: {share: 0.31, outcome: long}, q: {share: rest, outcome: " \
    "burnt}}}\n"                                                                                   \
    "    outcomes:\n"                                                                              \
    "      short: {name: Short}\n"                                                                 \
    "      long: {name: Long, damage: {x: {category: c, is: load * cost},\n"                       \
    "             y: {category: c, is: 17 kEUR/s * clearance-time}}}\n"                            \
    "      burnt: {name: Burnt, damage: {x: {category: c, is: 977 kEUR}}}\n"                       \
    "  K:\n"                                                                                       \
    "    name: Elsewhere\n"                                                                        \
    "    frequency: 0.2 * frequency(H) / load\n"                                                   \
    "    response: {o: {cleared-by: OTHER, in: 0.2 s, outcome: none}, n: {outcome: x}}\n"          \
    "    outcomes: {x: {name: X, damage: {x: {category: c, is: 7 EUR}}}}\n"                        \
    "  FAR:\n"                                                                                     \
    "    name: Far away\n"                                                                         \
    "    frequency: 0.4 per a\n"                                                                   \
    "    response: {o: {cleared-by: OTHER, in: 0.2 s, outcome: none}, n: {outcome: x}}\n"          \
    "    outcomes: {x: {name: X, damage: {x: {category: c, is: 7 EUR}}}}\n"

/* The register with three things that states change. */
static const char *written(struct arena *a, const char *r1, const char *rate, const char *load)
{
    return arena_printf(
        a,
        "%svalues: {load: {is: %s}, cost: {is: 41 kEUR}}\n"
        "types: {RELAY: {kind: relay, per-demand: 0.013}}\n"
        "rates: {faults: {per: section a, is: %s per section a}}\n"
        "schemes: {MAIN: {all: [CT, R1]}, BACK: {all: [CT, R2]}, OTHER: {all: [R3]}}\n"
        "elements: {CT: {kind: ct, per-demand: 0.0021},\n"
        "  R1: {kind: relay, per-demand: %s}, R2: {kind: relay, type: RELAY},\n"
        "  R3: {kind: relay, per-demand: 0.07}}\n%s",
        SETTINGS, load, rate, r1, HAZARDS);
}

/* Relay 1 is out, or it storms; independently the load is high. */
#define STATES                                                                                     \
    "states:\n"                                                                                    \
    "  LOAD: {varies: {low: 71 %, high: rest}, when: {high: {values: {load: {is: 5.9}}}}}\n"       \
    "  NET: {varies: {normal: rest, r1-out: 3 %, storm: 4 %}, when: {r1-out: {elements: {R1: "     \
    "{per-demand: 1}}}, storm: {rates: {faults: {is: 10 * was}}}}}\n"
#define OPTIONS                                                                                    \
    "options:\n"                                                                                   \
    "  NEW: {name: New CT, invest: 5 kEUR, change: {elements: {CT: {per-demand: 0.0007}}}}\n"      \
    "  LESS: {name: Fewer outages, change: {states: {NET: {varies: {r1-out: 1 %}}}}}\n"            \
    "  FAR-ONLY: {name: Far, change: {hazards: {FAR: {frequency: 0.1 per a}}}}\n"                  \
    "decisions: {D: {question: Which, options: [FAR-ONLY, LESS, NEW]}}\n"

static void load_states(struct loaded *l, struct arena *a)
{
    loaded_text(l, a, arena_printf(a, "%s%s", written(a, "0.011", "0.0213", "3.7"), STATES OPTIONS),
                NULL);
}

/* Sums over the six registers that are written out, weighted by hand. */
static double by_hand(struct arena *a, const char *figure, double r1_out)
{
    static const struct {
        const char *r1, *rate, *load;
        double other;
    } at[] = {{"0.011", "0.0213", "3.7", 0.71}, {"1", "0.0213", "3.7", 0.71},
              {"0.011", "0.213", "3.7", 0.71},  {"0.011", "0.0213", "5.9", 0.29},
              {"1", "0.0213", "5.9", 0.29},     {"0.011", "0.213", "5.9", 0.29}};
    const double net[] = {1 - 0.04 - r1_out, r1_out, 0.04};
    double sum = 0;
    for (size_t i = 0; i < 6; i++) {
        struct loaded l;
        loaded_text(&l, a, written(a, at[i].r1, at[i].rate, at[i].load), NULL);
        sum += net[i % 3] * at[i].other * loaded_value(&l, figure);
    }
    return sum;
}

START_TEST(means_of_registers_written_out)
{
    static const char *const linear[] = {
        "H.risk",           "H.frequency",       "H.damaging", "H.risk.long", "H.risk.burnt",
        "H.frequency.long", "H.frequency.burnt", "K.risk",     "K.frequency", "FAR.risk"};
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load_states(&l, a);
    for (size_t i = 0; i < sizeof linear / sizeof *linear; i++)
        expect_near(loaded_value(&l, linear[i]), by_hand(a, linear[i], 0.03));
    double f = by_hand(a, "H.frequency", 0.03);
    expect_near(loaded_value(&l, "H.probability.long"), by_hand(a, "H.frequency.long", 0.03) / f);
    expect_near(loaded_value(&l, "H.damage.long"),
                by_hand(a, "H.risk.long", 0.03) / by_hand(a, "H.frequency.long", 0.03));
    expect_near(loaded_value(&l, "H.damage"),
                by_hand(a, "H.risk", 0.03) / by_hand(a, "H.damaging", 0.03));
    ck_assert_double_eq(loaded_value(&l, "R1.fails"), 0.011);
    ck_assert_double_eq(loaded_value(&l, "R1.fails@NET=r1-out"), 1);
    arena_free(a);
}
END_TEST

/* A state that is fixed is the register in that state; the others still vary. */
START_TEST(fixed_states)
{
    struct arena *a = arena_new(NULL);
    struct loaded l, low, high;
    load_states(&l, a);
    loaded_text(&low, a, written(a, "1", "0.0213", "3.7"), NULL);
    loaded_text(&high, a, written(a, "1", "0.0213", "5.9"), NULL);
    double p = loaded_value(&low, "H.risk"), q = loaded_value(&high, "H.risk");
    expect_near(loaded_value(&l, "H.risk@LOAD=low+NET=r1-out"), p);
    expect_near(loaded_value(&l, "H.risk@NET=r1-out"), 0.71 * p + 0.29 * q);
    expect_near(loaded_value(&l, "H.end.main@LOAD=high+NET=r1-out"), 0);
    const char *name = figure_name(l.figures, a, loaded_find(&l, "H.risk@NET=normal+NEW"));
    ck_assert_str_eq(name, "H.risk@NEW+NET=normal");
    arena_free(a);
}
END_TEST

/* --- options on top --- */

START_TEST(options_on_top)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load_states(&l, a);
    expect_near(loaded_value(&l, "H.risk@LESS"), by_hand(a, "H.risk", 0.01));
    double with = loaded_value(&l, "H.risk@NEW"), now = loaded_value(&l, "H.risk"), sum = 0;
    static const struct {
        const char *state;
        double share;
    } at[] = {{"LOAD=low+NET=normal", 0.71 * 0.93},  {"LOAD=low+NET=r1-out", 0.71 * 0.03},
              {"LOAD=low+NET=storm", 0.71 * 0.04},   {"LOAD=high+NET=normal", 0.29 * 0.93},
              {"LOAD=high+NET=r1-out", 0.29 * 0.03}, {"LOAD=high+NET=storm", 0.29 * 0.04}};
    for (size_t i = 0; i < 6; i++)
        sum += at[i].share * loaded_value(&l, arena_printf(a, "H.risk@NEW+%s", at[i].state));
    expect_near(with, sum);
    ck_assert_double_lt(with, now);
    double years = loaded_value(&l, "D.present-damage.do-nothing") /
                   (now + loaded_value(&l, "K.risk") + loaded_value(&l, "FAR.risk"));
    expect_near(loaded_value(&l, "D.benefit.NEW"), years * (now - with));
    arena_free(a);
}
END_TEST

/* --- projection --- */

START_TEST(projection)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load_states(&l, a);
    const struct variant *base = loaded_variant(&l, 0, NULL);
    const char *new = "NEW", *less = "LESS";
    const struct variant *option = loaded_variant(&l, 1, &new);
    const struct variant *out = variant_in(&l, option, "NET=r1-out");
    const struct compiled *far = loaded_compile(&l, base, "FAR");
    size_t sections = graph_sections(l.figures->graph);
    ck_assert_ptr_eq(loaded_compile(&l, out, "FAR"), far);
    ck_assert_uint_eq(graph_sections(l.figures->graph), sections);
    ck_assert_uint_eq(((struct hazard_exports *)far->exports)->n_states, 0);
    ck_assert(!variant_reaches(option, "FAR"));
    ck_assert(variant_reaches(loaded_variant(&l, 1, &less), "H"));
    ck_assert_str_eq(figure_name(l.figures, a, loaded_find(&l, "R2.fails@NEW+NET=storm")),
                     "R2.fails");
    /* six of the hazard, and the mean, each with its frequency as a unit of its own; the
     * elements and the rate once for each change */
    struct loaded fresh;
    load_states(&fresh, a);
    const struct compiled *h = loaded_compile(&fresh, loaded_variant(&fresh, 0, NULL), "H");
    ck_assert_uint_eq(((struct hazard_exports *)h->exports)->n_states, 6);
    size_t of_h = 0, of_ct = 0, of_r1 = 0;
    for (size_t i = 0; i < fresh.figures->units.n; i++) {
        of_h += text_equal(fresh.figures->units.at[i]->id, "H");
        of_ct += text_equal(fresh.figures->units.at[i]->id, "CT");
        of_r1 += text_equal(fresh.figures->units.at[i]->id, "R1");
    }
    ck_assert_uint_eq(of_h, 14);
    ck_assert_uint_eq(of_ct, 1);
    ck_assert_uint_eq(of_r1, 2);
    arena_free(a);
}
END_TEST

START_TEST(exported_states)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load_states(&l, a);
    const struct compiled *h = loaded_compile(&l, loaded_variant(&l, 0, NULL), "H");
    const struct hazard_exports *x = h->exports;
    double sum = 0;
    for (size_t i = 0; i < x->n_states; i++)
        sum += x->states[i].share;
    expect_near(sum, 1);
    ck_assert_str_eq(x->states[3].name, "LOAD=low+NET=normal");
    expect_near(x->states[3].share, 0.71 * 0.93);
    ck_assert_ptr_eq(x->ends, ((struct hazard_exports *)x->states[3].unit->exports)->ends);
    ck_assert_uint_eq(x->n_outcomes, 3);
    arena_free(a);
}
END_TEST

/* --- references that only a state makes --- */

/* In state S=p the hazard asks for another relay, which only then an option improves; and
 * T changes a relay that only matters in S=p. */
START_TEST(routes_through_states)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a,
                TRANSFORMERS
                "  J:\n"
                "    name: Follows\n"
                "    frequency: 1 per a * v\n"
                "    response: {dark: {outcome: o}}\n"
                "    outcomes: {o: {name: O, damage: {x: {category: c, is: 10 EUR}}}}\n"
                "values: {v: {is: frequency(H) * 1 a}}\n"
                "states:\n"
                "  S: {varies: {p: 10 %, q: rest}, when: {p: {hazards: {H: {frequency: 3 per a}},"
                " schemes: {SUPPLY: {all: [X]}}}}}\n"
                "  T: {varies: {r: 25 %, t: rest}, when: {r: {elements: {X: {per-demand: 0.8}}}}}\n"
                "options: {O: {name: O, change: {elements: {A: {name: Better}}}},\n"
                "  Q: {name: Q, change: {states: {S: {varies: {p: 20 %}}}}}}\n",
                NULL);
    expect_near(loaded_value(&l, "H.risk"), 0.1 * 3 * (0.25 * 0.8 + 0.75 * 0.5) * 1000);
    expect_near(loaded_value(&l, "v.value"), 0.1 * 3 + 0.9 * 2.385);
    expect_near(loaded_value(&l, "J.risk"), 10 * (0.1 * 3 + 0.9 * 2.385));
    expect_near(loaded_value(&l, "J.risk@Q"), 10 * (0.2 * 3 + 0.8 * 2.385));
    expect_near(loaded_value(&l, "v.value@Q"), 0.2 * 3 + 0.8 * 2.385);
    ck_assert_str_eq(figure_name(l.figures, a, loaded_find(&l, "v.value@Q")), "v.value@Q");
    expect_near(loaded_value(&l, "v.value@S=q"), 2.385);
    const struct compiled *h = loaded_compile(&l, loaded_variant(&l, 0, NULL), "H");
    ck_assert_uint_eq(((struct hazard_exports *)h->exports)->n_states, 3);
    arena_free(a);
}
END_TEST

/* A hazard that a state removes does not occur in it. */
START_TEST(removed_hazards)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a,
                TRANSFORMERS "states: {S: {varies: {gone: 15 %, here: rest}, when: {gone: "
                             "{hazards: {H: no}}}}}\n"
                             "options: {O: {name: O, change: {elements: {A: {per-demand: 0.5}, B: "
                             "{per-demand: 0.5}}}}}\n",
                NULL);
    expect_near(loaded_value(&l, "H.frequency"), 0.85 * 2.385);
    expect_near(loaded_value(&l, "H.risk@O"), 0.85 * 2.385 * 0.25 * 1000);
    expect_near(loaded_value(&l, "H.probability.dark@O"), 0.25);
    arena_free(a);
}
END_TEST

/* --- changes that are made up --- */

START_TEST(made_up_changes)
{
    struct arena *a = arena_new(NULL);
    struct loaded l, better;
    load_states(&l, a);
    const struct variant *base = loaded_variant(&l, 0, NULL);
    const struct variant *v =
        variant_with(&l, base, "twice a + 3", "rates: {faults: {is: 2 * was}}\n");
    const struct compiled *h = loaded_compile(&l, v, "H");
    loaded_evaluate(&l);
    const char *name = figure_name(l.figures, a, h->main);
    ck_assert_str_eq(name, "H.risk@[twice a + 3]");
    ck_assert_uint_eq(loaded_find(&l, name), h->main);
    ck_assert_ptr_eq(loaded_compile(&l, v, "FAR"), loaded_compile(&l, base, "FAR"));
    loaded_text(&better, a,
                arena_printf(a, "%s%s", written(a, "0.011", "0.0426", "3.7"), STATES OPTIONS),
                NULL);
    expect_near(figure_value(l.figures, h->main), loaded_value(&better, "H.risk"));
    expect_near(loaded_value(&l, "H.risk@NEW+[twice a + 3]+NET=storm"),
                loaded_value(&better, "H.risk@NEW+NET=storm"));
    arena_free(a);
}
END_TEST

static void expect_refused(struct loaded *l, const char *name, const char *change,
                           ohmen_status status, const char *words)
{
    const struct variant *v;
    struct diags d;
    ohmen_error e = OHMEN_ERROR_INIT;
    diags_init(&d, l->arena);
    const struct node *n = yaml_read(l->arena, "change", change, strlen(change), &d);
    const struct variant *base = variant_in(l, loaded_variant(l, 0, NULL), "NET=r1-out");
    ck_assert_int_eq(figures_variant_with(l->figures, base, name, n, &v, &e), status);
    ck_assert_msg(strstr(e.text, words), "%s", e.text);
}

START_TEST(made_up_changes_refused)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load_states(&l, a);
    expect_refused(&l, "x]", "elements: {R1: {per-demand: 1}}\n", OHMEN_UNKNOWN, "cannot be");
    expect_refused(&l, "x", "elements: {R1: {pre-demand: 1}}\n", OHMEN_COMPUTE, "pre-demand");
    expect_refused(&l, "x", "elements: {R1: {per-demand: 0.5}}\n", OHMEN_COMPUTE,
                   "NET=r1-out\" and the change \"[x]\" contradict each other at "
                   "elements/R1/per-demand");
    expect_refused(&l, "x", "elements: {R1: {per-demand: 0.6}}\n", OHMEN_UNKNOWN, "already");
    arena_free(a);
}
END_TEST

/* --- names that do not exist --- */

static void expect_unknown(struct loaded *l, const char *name, ohmen_status status,
                           const char *words)
{
    figure_id id;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(figures_find(l->figures, name, &id, &e), status);
    ck_assert_msg(strstr(e.text, words), "%s: %s", name, e.text);
}

START_TEST(unknown_names)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load_states(&l, a);
    expect_unknown(&l, "H.risk@NAT=none", OHMEN_UNKNOWN, "did you mean \"NET\"");
    expect_unknown(&l, "H.risk@NET=normel", OHMEN_UNKNOWN, "did you mean \"normal\"");
    expect_unknown(&l, "H.risk@NET=normal+NET=storm", OHMEN_UNKNOWN, "named twice");
    expect_unknown(&l, "H.risk@[nothing]", OHMEN_UNKNOWN, "nobody made up");
    expect_unknown(&l, "H.end.main", OHMEN_UNKNOWN, "H.risk@LOAD=high+NET=normal");
    arena_free(a);
}
END_TEST

/* 3^4 combinations are more than 64. */
START_TEST(too_many_combinations)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct text t;
    text_init(&t, a);
    text_printf(&t, "%s", TRANSFORMERS "states:\n");
    for (int i = 0; i < 4; i++)
        text_printf(&t,
                    "  S%d: {varies: {p: 30 %%, q: 30 %%, r: rest}, when: {p: {hazards: {H: "
                    "{frequency: 2 * was}}}}}\n",
                    i);
    loaded_text(&l, a, text_str(&t), NULL);
    expect_unknown(&l, "H.risk", OHMEN_COMPUTE, "more than 64 combinations");
    expect_near(loaded_value(&l, "H.frequency@S0=p"), 2.385 * 2 * 1.3 * 1.3 * 1.3);
    arena_free(a);
}
END_TEST

/* --- formulas --- */

static void expect_formula(struct loaded *l, figure_id id)
{
    struct arena *a = arena_child(l->arena);
    struct figure_ids ids = {0};
    char error[FORMULA_ERROR];
    long double x;
    figure_inputs(l->figures, a, id, &ids);
    const char **names = NEW_ARRAY(a, ids.n, const char *);
    double *values = NEW_ARRAY(a, ids.n, double);
    for (size_t i = 0; i < ids.n; i++) {
        names[i] = figure_name(l->figures, a, ids.at[i]);
        values[i] = figure_value(l->figures, ids.at[i]);
    }
    struct formula_inputs inputs = {ids.n, names, values};
    const struct units *u = &l->model->units;
    const struct formula_world world = {u->currency, u->counts, u->n_counts, &inputs,
                                        formula_find_input};
    const char *formula = figure_formula(l->figures, a, id);
    const char *name = figure_name(l->figures, a, id);
    long double lost = 0; /* what rounding may take from a difference that is nothing */
    for (size_t i = 0; figure_at(l->figures, id)->property == PROPERTY_TOGETHER && i < ids.n; i++)
        lost = fmaxl(lost, 1e-15L * fabsl((long double)values[i]));
    ck_assert_msg(formula_evaluate(formula, &world, &x, error), "%s = %s: %s", name, formula,
                  error);
    double y = figure_value(l->figures, id);
    ck_assert_msg(fabsl(x - y) <= 1e-12L * fabsl(x) + lost, "%s = %s: %.17Lg, figure %.17g", name,
                  formula, x, y);
    arena_free(a);
}

START_TEST(formulas)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load_states(&l, a);
    const struct variant *v = variant_with(&l, loaded_variant(&l, 0, NULL), "twice a",
                                           "rates: {faults: {is: 2 * was}}\n");
    loaded_compile(&l, v, "H");
    loaded_value(&l, "K.risk@NEW+LESS");
    loaded_value(&l, "D.total.NEW");
    for (figure_id id = 0; id < l.figures->list.n; id++)
        expect_formula(&l, id);
    ck_assert_uint_gt(l.figures->list.n, 400);
    const char *formula = figure_formula(l.figures, a, loaded_find(&l, "K.frequency"));
    ck_assert_ptr_nonnull(strstr(formula, "NET.share.storm * K.frequency@"));
    arena_free(a);
}
END_TEST

/* --- what is wrong in documents --- */

static void expect_wrong(const char *text, unsigned line, unsigned column, const char *words)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    struct model_sources nothing = {0}, sources = {0};
    diags_init(&d, a);
    text = arena_printf(a, "%s%s", TRANSFORMERS, text);
    const struct node *root = yaml_read(a, "doc", text, strlen(text), &d);
    ck_assert(documents_merge(a, &nothing, 1, &root, &sources, &d));
    ck_assert_ptr_null(model_load(a, sources.at, sources.n, &d));
    diags_sort(&d);
    const struct diag *first = &d.list.at[0];
    ck_assert_msg(strstr(first->text, words), "%s", first->text);
    ck_assert_msg(first->place.line == line + LINES && first->place.column == column, "%u:%u: %s",
                  (unsigned)first->place.line - LINES, (unsigned)first->place.column, first->text);
    arena_free(a);
}

#define STATE(when) "states: {S: {varies: {p: 1 %, q: rest}, when:\n {" when "}}}\n"

START_TEST(wrong_states)
{
    expect_wrong("states: {S: {varies: {p: 1 %, q: 98 %}}}\n", 1, 22, "sum to 99 %");
    expect_wrong(STATE("c: {}"), 2, 3, "no state \"c\"");
    expect_wrong(STATE("p: {states: {S: {note: x}}}"), 2, 7, "cannot change states");
    expect_wrong(STATE("p: {options: {O: {note: x}}}"), 2, 7, "cannot touch \"options\"");
    expect_wrong(STATE("p: {elements: {A: no}}"), 2, 18, "\"SUPPLY\" needs it");
    expect_wrong(STATE("p: {elements: {A: {per-demand: 2}}}"), 2, 34, "out of range");
    expect_wrong(STATE("p: {hazards: {H: {outcomes: {wet: {name: Wet}}}}}"), 2, 6,
                 "cannot add an outcome to a hazard, such as \"wet\" to \"H\"");
    expect_wrong(
        STATE("p: {elements: {A: {per-demand: 1}}}") "options: {O: {name: O, change: "
                                                     "{elements: {A: {per-demand: 0.3}}}}}\n",
        2, 6,
        "the option \"O\" and the state \"S=p\" contradict each other at "
        "elements/A/per-demand");
    expect_wrong(
        "states:\n  S: {varies: {p: 1 %, q: rest}, when: {p: {elements: {A: {per-demand: 1}}}}}\n"
        "  T: {varies: {p: 1 %, q: rest}, when: {p: {elements: {A: {per-demand: 0.7}}}}}\n",
        3, 44, "the states \"S=p\" and \"T=p\" contradict each other at elements/A/per-demand");
}
END_TEST

START_TEST(unknown_states_are_true_or_not)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct unused u = {0};
    loaded_text(&l, a,
                TRANSFORMERS "states:\n"
                             "  S: {is: {p: 1 %, q: rest}, when: {p: " OUT(
                                 "A") "}}\n"
                                      "  T: {varies: {p: 1 %, q: rest}, when: {p: " OUT("B") "}}\n",
                NULL);
    figures_unused(a, l.model, &u);
    ck_assert_uint_eq(u.n, 0);
    double in = loaded_value(&l, "H.risk@S=p"), out = loaded_value(&l, "H.risk@S=q");
    ck_assert_double_eq(loaded_value(&l, "S.share.p"), 0.01);
    ck_assert_double_eq(loaded_value(&l, "S.share.q"), 0.99);
    ck_assert_double_gt(in, out);
    ck_assert_double_eq_tol(loaded_value(&l, "H.risk"), 0.01 * in + 0.99 * out, 1e-12 * in);
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("states");
    TCase *t = tcase_create("states");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, outages_are_never_simultaneous);
    tcase_add_test(t, means_of_registers_written_out);
    tcase_add_test(t, fixed_states);
    tcase_add_test(t, options_on_top);
    tcase_add_test(t, projection);
    tcase_add_test(t, exported_states);
    tcase_add_test(t, routes_through_states);
    tcase_add_test(t, removed_hazards);
    tcase_add_test(t, made_up_changes);
    tcase_add_test(t, made_up_changes_refused);
    tcase_add_test(t, unknown_names);
    tcase_add_test(t, too_many_combinations);
    tcase_add_test(t, formulas);
    tcase_add_test(t, wrong_states);
    tcase_add_test(t, unknown_states_are_true_or_not);
    suite_add_tcase(s, t);
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
