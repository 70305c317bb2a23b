/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What would turn a decision, in words. */
#include <string.h>

#include "work/work.h"
#include "work_test.h"

/* The sentence of a decision as the only note of a report. */
static ohmen_status tell(struct job *j, void *ctx, ohmen_error *e)
{
    struct weighing *w = NULL;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = weigh_compile(j->figures, ctx, &w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    weigh_rank(j->figures, w);
    report_note(j->report, "turn", "%s", turn_sentence(j, w));
    return OHMEN_OK;
}

static const char *sentence(struct arena *a, ohmen_register *reg, const char *decision)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    char name[16];
    strcpy(name, decision);
    must(job_do(reg, STORE_READ, NULL, tell, name, &r, &e), &e);
    return test_json(a, r);
}

/* Two hazards of 1000 and 500 EUR and 0.05 per bay a at two bays. At no interest over 10 a option A
 * avoids 0.8 x 0.1 x 1500 x 10 = 1200 EUR and costs 600 + 15 x 10 = 750 EUR: 5/8 of the rate,
 * 0.03125, is 1 in 32, a factor of 1.6; its investment may rise by 1.75, and a hazard alone must
 * fall further. B costs a hundred times what it avoids. C avoids 500 EUR for 600 EUR. */
START_TEST(sentences)
{
    struct arena *a = test_arena();
    const char *path = test_new(a);
    test_import_text(
        a, path,
        "register: {title: T, currency: EUR, prices: 2026, counts: [bay], horizon: 10 a, discount: "
        "0 per a}\n"
        "rates: {bay-fault: {name: Faults of bays, per: bay a, is: 0.05 per bay a}}\n"
        "hazards:\n"
        "  H: {name: H, frequency: 2 bay * bay-fault, response: {never: {outcome: lost}}, "
        "outcomes: "
        "{lost: {name: Lost, damage: {loss: {category: c, is: 1 kEUR}}}}}\n"
        "  G: {name: G, frequency: 2 bay * bay-fault, response: {never: {outcome: lost}}, "
        "outcomes: "
        "{lost: {name: Lost, damage: {loss: {category: c, is: 0.5 kEUR}}}}}\n"
        "options:\n"
        "  A: {name: A, invest: 600 EUR, running: 15 EUR per a, change: {hazards: {H: {frequency: "
        "0.2 * was}, G: {frequency: 0.2 * was}}}}\n"
        "  B: {name: B, invest: 50 kEUR, change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
        "  C: {name: C, invest: 600 EUR, change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
        "decisions:\n"
        "  D: {question: What?, options: [A]}\n"
        "  E: {question: What?, options: [B]}\n"
        "  F: {question: What?, options: [C]}\n");
    ohmen_register *reg = test_open(path, OHMEN_READ);
    const char *said = sentence(a, reg, "D");
    ck_assert_msg(strstr(said, "It would turn to doing nothing if bay-fault.rate (Faults of bays) "
                               "were below 1 in 32 bay a; now 1 in 20 bay a."),
                  "%s", said);
    said = sentence(a, reg, "E");
    ck_assert_msg(strstr(said, "No stated quantity, moved alone, turns it within a factor of ten."),
                  "%s", said);
    said = sentence(a, reg, "F");
    ck_assert_msg(strstr(said, "It would turn to C if "), "%s", said);
    ohmen_close(reg);
    arena_free(a);
}
END_TEST

void work_turn_tests(Suite *suite)
{
    TCase *t = tcase_create("turn");
    tcase_add_test(t, sentences);
    suite_add_tcase(suite, t);
}
