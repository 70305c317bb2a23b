/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the sample of Skerry Sound is made to show (samples/README.md): how its five questions end,
 * as ranks and signs, so that it keeps its sense when somebody edits it. No figure is held here:
 * the bounds are wide, and say what is clear and what is credible. */
#include <check.h>
#include <stdlib.h>

#include "loaded.h"

#define CLEAR 5000.0 /* EUR: no rounding, and no accident of the last edit */

/* Limits that the register states for people: per person and year, and as a factor. */
#define ACCEPTABLE 1e-6
#define INTOLERABLE 1e-3
#define DISPROPORTION 3.0

static const char *folder;

/* --- reaching the figures --- */

struct question {
    struct loaded l;
    struct weighing *w;
};

static void open_sample(struct loaded *l)
{
    loaded_folder(l, arena_new(NULL), folder, NULL);
}

static struct question ask(const char *decision)
{
    struct question q;
    ohmen_error e = OHMEN_ERROR_INIT;
    open_sample(&q.l);
    ck_assert_msg(weigh_compile(q.l.figures, decision, &q.w, &e) == OHMEN_OK, "%s", e.text);
    loaded_evaluate(&q.l);
    weigh_rank(q.l.figures, q.w);
    return q;
}

static const struct alternative *best(const struct question *q)
{
    return &q->w->alternatives.at[q->w->order[0]];
}

static const struct alternative *named(const struct question *q, const char *name)
{
    for (size_t i = 0; i < q->w->alternatives.n; i++)
        if (text_equal(q->w->alternatives.at[i].name, name))
            return &q->w->alternatives.at[i];
    ck_abort_msg("%s is no alternative of %s", name, q->w->id);
    return NULL;
}

static double value(const struct question *q, figure_id id)
{
    ck_assert(id != FIGURE_NONE);
    return figure_value(q->l.figures, id);
}

static double worth(const struct question *q, const char *name)
{
    return value(q, named(q, name)->net);
}

/* What an alternative is worth to a perspective of the register. */
static double worth_to(const struct question *q, const char *perspective, const char *name)
{
    const struct rows *rows = &q->l.model->settings->perspectives;
    for (size_t i = 0; i < rows->n; i++)
        if (text_equal(rows->keys[i], perspective))
            return value(q, named(q, name)->of[i].net);
    ck_abort_msg("%s is no perspective", perspective);
    return 0;
}

static void done(struct question *q)
{
    arena_free(q->l.arena);
}

/* Risk of death of a person of the group: now, where x is NULL. */
static double risk_of(const struct question *q, const struct alternative *x, const char *group)
{
    for (size_t g = 0; g < q->w->groups.n; g++)
        if (text_equal(q->w->groups.at[g].id, group))
            return value(q, x ? x->individual[g] : q->w->groups.at[g].now);
    ck_abort_msg("nothing harms %s", group);
    return 0;
}

/* --- how the questions end --- */

static void expect_best(const struct question *q, const char *name)
{
    ck_assert_str_eq(best(q)->name, name);
    if (best(q)->n)
        ck_assert_double_gt(value(q, best(q)->net), 0);
}

START_TEST(on_gullan_doing_nothing_is_best)
{
    struct question q = ask("D-GU");
    expect_best(&q, "do-nothing");
    for (size_t i = 1; i < q.w->alternatives.n; i++)
        ck_assert_double_lt(value(&q, q.w->alternatives.at[i].net), -CLEAR);
    done(&q);
}
END_TEST

/* The tests that win also leave relays failed and trip a section. */
START_TEST(tests_beat_new_relays_at_varholm)
{
    struct question q = ask("D-VH-RELAYS");
    expect_best(&q, "TEST-51");
    ck_assert_double_lt(worth(&q, "NEW-51"), -CLEAR);
    ck_assert_double_gt(loaded_value(&q.l, "VH-51A.left-failed"), 0);
    ck_assert_double_gt(loaded_value(&q.l, "VH-51A.unwanted.tests"), 0);
    done(&q);
}
END_TEST

/* A fast trip and new relays both shorten the same busbar faults. */
START_TEST(at_the_busbar_two_options_are_worth_less_together)
{
    struct question q = ask("D-VH-BUS");
    expect_best(&q, "FIT-BLOCK");
    ck_assert_double_gt(worth(&q, "FIT-BLOCK"), CLEAR);
    ck_assert_double_lt(value(&q, named(&q, "FIT-BLOCK+NEW-51")->together), -CLEAR);
    double varholm = risk_of(&q, NULL, "VH-CREW"), quay = risk_of(&q, NULL, "TQ-CREW");
    ck_assert(varholm > ACCEPTABLE && varholm < INTOLERABLE);
    ck_assert(quay > ACCEPTABLE && quay < INTOLERABLE);
    ck_assert_double_lt(risk_of(&q, best(&q), "VH-CREW"), varholm);
    done(&q);
}
END_TEST

START_TEST(against_the_dark_society_and_company_differ)
{
    struct question q = ask("D-VH-DARK");
    expect_best(&q, "NEW-87T");
    ck_assert_double_gt(worth_to(&q, "society", "NEW-87T"), CLEAR);
    ck_assert_double_lt(worth_to(&q, "company", "NEW-87T"), -CLEAR);
    done(&q);
}
END_TEST

/* The fibre is worth little alone; rounds reach the same faults as arc protection. */
static void expect_pair(const struct question *q)
{
    expect_best(q, "TQ-ARC+TQ-LINK");
    ck_assert_double_gt(value(q, best(q)->together), CLEAR);
    ck_assert_double_lt(worth(q, "TQ-LINK"), -CLEAR);
    ck_assert_double_gt(worth(q, "TQ-ROUNDS"), CLEAR);
    ck_assert_double_lt(value(q, named(q, "TQ-ARC+TQ-ROUNDS")->together), -CLEAR);
}

/* What clears arcs fast also spares the crew; rounds do not. What spares only people is in
 * proportion or out of it. */
static void expect_people(const struct question *q)
{
    double now = risk_of(q, NULL, "TQ-CREW");
    ck_assert_double_lt(risk_of(q, best(q), "TQ-CREW"), now / 3);
    ck_assert_double_gt(risk_of(q, named(q, "TQ-ROUNDS"), "TQ-CREW"), now);
    ck_assert_double_lt(value(q, named(q, "TQ-ROUNDS")->avoids_fatalities), 0);
    double remote = value(q, named(q, "TQ-REMOTE")->disproportion);
    ck_assert(remote > 1 && remote < DISPROPORTION);
    ck_assert_double_gt(value(q, named(q, "TQ-DOORS")->disproportion), DISPROPORTION);
}

START_TEST(at_tern_quay_two_options_are_worth_more_together)
{
    struct question q = ask("D-TQ");
    expect_pair(&q);
    expect_people(&q);
    done(&q);
}
END_TEST

/* --- supply --- */

/* A year of 8760 h; what is common in a small network on cables and lines: common practice, no
 * source. */
START_TEST(interruptions_are_credible)
{
    struct loaded l;
    open_sample(&l);
    double saifi = loaded_value(&l, "register.saifi"), minute = 1.0 / 60 / 8760;
    ck_assert(saifi > 0.5 && saifi < 3);
    ck_assert_double_gt(loaded_value(&l, "register.maifi"), 0);
    double off = 1 - loaded_value(&l, "register.asai"); /* share of time without supply */
    ck_assert(off > 30 * minute && off < 300 * minute);
    arena_free(l.arena);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2)
        return EXIT_FAILURE;
    folder = argv[1];
    Suite *s = suite_create("sample");
    TCase *t = tcase_create("sample");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, on_gullan_doing_nothing_is_best);
    tcase_add_test(t, tests_beat_new_relays_at_varholm);
    tcase_add_test(t, at_the_busbar_two_options_are_worth_less_together);
    tcase_add_test(t, against_the_dark_society_and_company_differ);
    tcase_add_test(t, at_tern_quay_two_options_are_worth_more_together);
    tcase_add_test(t, interruptions_are_credible);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    bool good = srunner_ntests_run(runner) > 0 && srunner_ntests_failed(runner) == 0;
    srunner_free(runner);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
