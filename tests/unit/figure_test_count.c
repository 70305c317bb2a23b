/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How much is compiled: fifty options that change one hazard of ten thousand cost fifty
 * sections, not fifty registers. */
#include "figure_test.h"
#include "loaded.h"

enum { HAZARDS = 10000, OPTIONS = 50, CHANGED = 5000 };

/* Each hazard has an element and a scheme of its own. */
static const char *large_register(struct arena *a)
{
    struct text t;
    text_init(&t, a);
    text_add(&t, "register: {title: Large, currency: EUR, prices: 2026, horizon: 20 a, discount: "
                 "4 % per a}\nelements:\n");
    for (int i = 0; i < HAZARDS; i++)
        text_printf(&t, "  E-%d: {kind: relay, per-demand: %de-6}\n", i, i % 900 + 1);
    text_add(&t, "schemes:\n");
    for (int i = 0; i < HAZARDS; i++)
        text_printf(&t, "  S-%d: {all: [E-%d]}\n", i, i);
    text_add(&t, "hazards:\n");
    for (int i = 0; i < HAZARDS; i++)
        text_printf(&t,
                    "  H-%d: {name: Hazard, frequency: 0.02 per a, response: {main: {cleared-by: "
                    "S-%d, in: 0.1 s, outcome: none}, never: {outcome: lost}}, outcomes: {lost: "
                    "{name: Lost, damage: {repair: {category: equipment, is: %d EUR}}}}}\n",
                    i, i, i + 1);
    text_add(&t, "options:\n");
    for (int i = 0; i < OPTIONS; i++)
        text_printf(&t,
                    "  O-%d: {name: Option, change: {hazards: {H-%d: {frequency: 0.9 * was}}}}\n",
                    i, CHANGED);
    return text_str(&t);
}

static void compile_all(struct loaded *l)
{
    const struct variant *base = loaded_variant(l, 0, NULL);
    for (size_t i = 0; i < l->model->of[KIND_HAZARD].n; i++)
        loaded_compile(l, base, l->model->of[KIND_HAZARD].at[i]->id);
}

/* Under one option: two new units, the hazard and its frequency, in two new sections; others are
 * what they were. */
static void compile_changed(struct loaded *l, const char *option, double risk)
{
    struct graph *g = l->figures->graph;
    size_t sections = graph_sections(g), units = l->figures->units.n;
    const char *changed = arena_printf(l->arena, "H-%d", CHANGED);
    const struct variant *v = loaded_variant(l, 1, &option);
    const struct compiled *u = loaded_compile(l, v, changed);
    ck_assert_uint_eq(graph_sections(g), sections + 2);
    ck_assert_uint_eq(l->figures->units.n, units + 2);
    ck_assert_ptr_eq(u, loaded_compile(l, v, changed));
    ck_assert_ptr_eq(loaded_compile(l, v, "H-4999"),
                     loaded_compile(l, loaded_variant(l, 0, NULL), "H-4999"));
    ck_assert_uint_eq(graph_sections(g), sections + 2);
    loaded_evaluate(l);
    ck_assert_double_eq_tol(figure_value(l->figures, u->main), 0.9 * risk, 1e-13 * risk);
}

START_TEST(only_what_changes_is_compiled)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a, large_register(a), NULL);
    compile_all(&l);
    size_t sections = graph_sections(l.figures->graph), units = l.figures->units.n;
    ck_assert_uint_eq(units, 3 * HAZARDS); /* a hazard, its frequency, and its element */
    double risk = loaded_value(&l, "H-5000.risk");
    ck_assert_double_eq_tol(risk, 0.02 * 501e-6 * 5001, 1e-13 * risk);
    for (size_t i = 0; i < l.model->of[KIND_OPTION].n; i++)
        compile_changed(&l, l.model->of[KIND_OPTION].at[i]->id, risk);
    ck_assert_uint_eq(graph_sections(l.figures->graph), sections + 2 * OPTIONS);
    ck_assert_uint_eq(l.figures->units.n, units + 2 * OPTIONS);
    arena_free(a);
}
END_TEST

static node_id response_of(struct loaded *l, const char *option)
{
    const struct variant *v = loaded_variant(l, option ? 1 : 0, &option);
    return ((const struct hazard_exports *)loaded_compile(l, v, "H")->exports)->node;
}

/* COST, OFTEN and SAME (which states what is there already) leave the response alone; SURE, BLIND
 * and MORE do not: another rate, another share of faults that are seen, another row. */
START_TEST(responses_alike_are_one)
{
    static const char text[] =
        "register: {title: Alike, currency: EUR, prices: 2026, start: 2027, horizon: 6 a, "
        "discount: "
        "4 % per a}\n"
        "elements:\n"
        "  E: {kind: relay, undetected: {median: 0.02 per a, error-factor: 3}, test: {every: 2 a, "
        "last: 2026-03-01}}\n"
        "  B: {kind: relay, per-demand: 0.1}\n"
        "schemes: {S: {all: [E]}, T: {all: [B]}}\n"
        "hazards:\n"
        "  H: {name: H, frequency: 0.5 per a, response: {main: {cleared-by: S, in: 0.1 s, sees: "
        "90 %, outcome: none}, never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: "
        "{loss: {category: c, is: 1000 EUR}}}}}\n"
        "options:\n"
        "  COST: {name: A, change: {hazards: {H: {outcomes: {lost: {damage: {loss: {is: 0.5 * "
        "was}}}}}}}}\n"
        "  OFTEN: {name: A, change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
        "  SAME: {name: A, change: {elements: {E: {test: {every: 2 a}}}}}\n"
        "  SURE: {name: A, change: {elements: {E: {undetected: {median: 0.01 per a, error-factor: "
        "3}}}}}\n"
        "  BLIND: {name: A, change: {hazards: {H: {response: {main: {sees: 80 %}}}}}}\n"
        "  MORE: {name: A, change: {hazards: {H: {response: {more: {cleared-by: T, in: 1 s, "
        "outcome: none}}}}}}\n";
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a, text, NULL);
    node_id now = response_of(&l, NULL);
    static const char *const alike[] = {"COST", "OFTEN", "SAME"};
    static const char *const other[] = {"SURE", "BLIND", "MORE"};
    for (size_t i = 0; i < 3; i++)
        ck_assert_uint_eq(response_of(&l, alike[i]), now);
    for (size_t i = 0; i < 3; i++)
        ck_assert_uint_ne(response_of(&l, other[i]), now);
    double risk = loaded_value(&l, "H.risk");
    ck_assert_double_eq_tol(loaded_value(&l, "H.risk@COST"), 0.5 * risk, 1e-12 * risk);
    ck_assert_double_eq_tol(loaded_value(&l, "H.risk@OFTEN"), 0.5 * risk, 1e-12 * risk);
    ck_assert_double_eq(loaded_value(&l, "H.risk@SAME"), risk);
    ck_assert_double_lt(loaded_value(&l, "H.risk@SURE"), risk);
    arena_free(a);
}
END_TEST

TCase *figure_count_case(void)
{
    TCase *t = tcase_create("counts");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, only_what_changes_is_compiled);
    tcase_add_test(t, responses_alike_are_one);
    return t;
}
