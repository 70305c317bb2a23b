/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Unwanted operation is stored and not evaluated: whatever figure uses it is refused with a
 * sentence that names the place, wherever it stands, and an object that only stores it is
 * computed. */
#include <check.h>
#include <stdlib.h>
#include <string.h>

#include "loaded.h"

#define UNWANTED "unwanted(MAIN; inrush 3 per a) * 1 a"

/* A register with a hole for each place; fill() fills them. */
static const char document[] =
    "register: {title: Refuse, currency: EUR, prices: 2026, horizon: 20 a, discount: 4 % per a}\n"
    "values: {v: {is: <value>}}\n"
    "rates: {r: {per: a, is: <rate>}}\n"
    "elements: {E: {kind: relay, per-demand: <per-demand>, undetected: <undetected>}}\n"
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
    "  O: {name: Option, invest: <invest>, running: <running>, change: {elements: {F: {per-demand: "
    "0.2}}}}\n"
    "decisions: {D: {question: Which?, options: [O], focus: [H]}}\n";

/* F stands apart: what `unwanted` names must exist and is in nobody's way. */
static const char apart[] = "elements: {F: {kind: relay, per-demand: 0.1}}\n";

static const struct place_case {
    const char *hole, *plain, *factor; /* factor: what gives `unwanted` the dimension */
    const char *figure, *named;        /* named NULL: only stored */
} cases[] = {
    {"<value>", "0.5", "", "H.risk", "v.is"},
    {"<rate>", "0.25 per a", " / 1 a", "H.risk", "r.is"},
    {"<per-demand>", "0.01", "", "H.risk", "E.per-demand/is"},
    {"<undetected>", "0.02 per a", " / 1 a", "H.risk", NULL},
    {"<frequency>", "0.3 per a", " / 1 a", "H.risk", "H.frequency"},
    {"<sees>", "0.8", "", "H.risk", "H.response/main/sees/is"},
    {"<share>", "0.4", "", "H.risk", "H.response/never/split/p/share"},
    {"<damage>", "7 EUR", " * 5 EUR", "H.risk", "H.outcomes/short/damage/x/is"},
    {"<invest>", "9 EUR", " * 5 EUR", "D.total.O", "O.invest/is"},
    {"<running>", "2 EUR per a", " * 5 EUR per a", "D.total.O", "O.running/is"},
};
#define CASES ((int)(sizeof cases / sizeof cases[0]))

/* The document with every hole filled plainly, that of case `special` by `unwanted`. */
static const char *fill(struct arena *a, int special)
{
    const char *text = document;
    for (int i = 0; i < CASES; i++) {
        const char *hole = strstr(text, cases[i].hole);
        ck_assert_ptr_nonnull(hole);
        text = arena_printf(a, "%.*s%s%s%s", (int)(hole - text), text,
                            i == special ? UNWANTED : cases[i].plain,
                            i == special ? cases[i].factor : "", hole + strlen(cases[i].hole));
    }
    return text;
}

static ohmen_status evaluate(struct arena *a, int special, const char *figure, ohmen_error *e)
{
    struct loaded l;
    figure_id id;
    const char *texts[] = {fill(a, special), apart};
    loaded_texts(&l, a, 2, texts, NULL);
    ohmen_status status = weigh_find(l.figures, figure, &id, e);
    return status == OHMEN_OK ? figures_evaluate(l.figures, e) : status;
}

START_TEST(unwanted_is_refused_where_it_counts)
{
    const struct place_case *c = &cases[_i];
    struct arena *a = arena_new(NULL);
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = evaluate(a, _i, c->figure, &e);
    if (!c->named) {
        ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    } else {
        ck_assert_int_eq(status, OHMEN_COMPUTE);
        ck_assert_str_eq(e.text, arena_printf(a,
                                              "%s uses unwanted(MAIN), which this version stores "
                                              "but does not evaluate",
                                              c->named));
    }
    arena_free(a);
}
END_TEST

START_TEST(without_it_all_is_computed)
{
    struct arena *a = arena_new(NULL);
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_msg(evaluate(a, -1, "D.total.O", &e) == OHMEN_OK, "%s", e.text);
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("refuse");
    TCase *t = tcase_create("unwanted");
    tcase_add_loop_test(t, unwanted_is_refused_where_it_counts, 0, CASES);
    tcase_add_test(t, without_it_all_is_computed);
    suite_add_tcase(s, t);
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    int bad = srunner_ntests_failed(sr) != 0 || srunner_ntests_run(sr) == 0;
    srunner_free(sr);
    return bad ? EXIT_FAILURE : EXIT_SUCCESS;
}
