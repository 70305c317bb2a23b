/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decisions in several stages against an oracle of another kind (branching_world.h): the value of
 * the root, of each alternative and of doing nothing. */
#include <check.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "branching_world.h"
#include "decide/branching.h"
#include "loaded.h"

enum { WORLDS = 250 };

static const double PART = 1e-9;

/* Magnitude of what is summed, so that a sum near 0 is told from a wrong one. */
static double size_of(const struct tree_world *w)
{
    double size = 1;
    for (size_t h = 0; h < TREE_HAZARDS; h++)
        size += w->frequency[h] * w->damage[h] * w->horizon;
    return size;
}

static void expect(const struct tree_world *w, double got, double want, const char *what,
                   const char *text)
{
    ck_assert_msg(fabs(got - want) <= PART * (fabs(want) + size_of(w)), "%s: %.17g, not %.17g\n%s",
                  what, got, want, text);
}

static void expect_sum(double got, double want)
{
    ck_assert_msg(fabs(got - want) <= 1e-12 * fabs(want), "%.17g, not %.17g", got, want);
}

static struct weighing *weigh(struct loaded *l, struct arena *a, const char *text)
{
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(l, a, text, NULL);
    ohmen_status status = weigh_compile(l->figures, "D", &w, &e);
    ck_assert_msg(status == OHMEN_OK, "%s\n%s", e.text, text);
    return w;
}

static double total_of(struct loaded *l, const struct weighing *w, const char *name)
{
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (text_equal(w->alternatives.at[i].name, name))
            return figure_value(l->figures, w->alternatives.at[i].total);
    return NAN;
}

static void check_alternatives(struct loaded *l, struct weighing *g, struct tree_world *w,
                               const char *text)
{
    for (size_t k = 0; k < w->n; k++) {
        const char *name = arena_printf(w->a, w->repeats ? "%s-first" : "%s", tree_branch(k));
        double total = total_of(l, g, name);
        if (!isnan(total) && !w->repeats)
            expect(w, total, tree_world_value(w, k), name, text);
    }
    expect(w, total_of(l, g, "do-nothing"), tree_world_nothing(w), "do-nothing", text);
    if (w->repeats)
        expect(w, total_of(l, g, "policy"), tree_world_value(w, SIZE_MAX), "policy", text);
}

/* False where it has too many policies. */
static bool try_world(uint64_t seed, enum tree_sort sort)
{
    bool too_many = false;
    struct arena *a = arena_new(NULL);
    struct random r = random_seed(seed);
    struct tree_world w = {.a = a, .r = &r, .too_many = &too_many};
    struct loaded l;
    const char *text = tree_world_draw(&w, sort);
    struct weighing *g =
        weigh(&l, a, arena_printf(a, "# %llu\n%s", (unsigned long long)seed, text));
    loaded_evaluate(&l);
    double best = tree_world_value(&w, SIZE_MAX);
    if (!too_many) {
        expect(&w, g->branching->points.at[0].value, best, "root", text);
        check_alternatives(&l, g, &w, text);
    }
    arena_free(a);
    return !too_many;
}

START_TEST(worth_as_the_best_of_all_policies)
{
    size_t tried = 0;
    for (uint64_t seed = 1; seed <= WORLDS; seed++)
        tried += try_world(seed, (enum tree_sort)_i);
    ck_assert_uint_ge(tried, WORLDS * 4 / 5);
}
END_TEST

/* --- limits and sentences --- */

#define WITHOUT_STATES                                                                             \
    "register: {title: T, currency: EUR, prices: 2026, start: 2026-01-01, horizon: 4 a, "          \
    "discount: 5 % per a}\n"                                                                       \
    "hazards: {H: {name: F, frequency: 0.5 per a, response: {only: {outcome: hit}},\n"             \
    "  outcomes: {hit: {name: Hit, damage: {x: {category: c, is: 900 EUR}}}}}}\n"
#define REGISTER                                                                                   \
    WITHOUT_STATES                                                                                 \
    "states: {S: {name: S, is: {x: 0.3, y: 0.7}, when: {y: {hazards: {H: {frequency: 2 * "         \
    "was}}}},\n"                                                                                   \
    "  tests: {T: {reads: [fair, bad], given: {x: [0.6, 0.4], y: [0.3, 0.7]}}}}}\n"
#define OPTIONS(more)                                                                              \
    "options:\n"                                                                                   \
    "  O-A: {name: A, invest: {is: 10 EUR}, " more                                                 \
    "change: {hazards: {H: {frequency: 0.5 * was}}}}\n"                                            \
    "  O-B: {name: B, invest: {is: 10 EUR}, change: {hazards: {H: {frequency: 0.4 * was}}}}\n"
#define TREE(choose) "decisions: {D: {question: Q, " choose "}}\n"
/* A reading each year: behind three of them there are four beliefs, by how many were fair. */
#define READ_YEARLY(most)                                                                          \
    TREE("every: 1 a, beliefs: " most                                                              \
         ", choose: {look: [{inspect: S.T, reads: {fair: [], bad: []}}]}")

static const struct told {
    const char *text, *error; /* NULL: there is none */
} told[] = {
    {REGISTER OPTIONS("excludes: [O-B], ")
         TREE("choose: {both: [{apply: O-A}, {wait: 1 a}, {apply: O-B}]}"),
     "\"D\", at \"both\": the options \"O-A\" and \"O-B\" exclude each other, and both are "
     "applied"},
    {REGISTER OPTIONS("requires: [O-B], ") TREE("choose: {alone: [{apply: O-A}]}"),
     "\"D\", at \"alone\": the option \"O-A\" requires \"O-B\", which is not applied before it"},
    {REGISTER OPTIONS("requires: [O-B], ") TREE("choose: {both: [{apply: O-B}, {apply: O-A}]}"),
     NULL},
    {REGISTER READ_YEARLY("4"), NULL},
    {REGISTER READ_YEARLY("3"),
     "\"D\", at the choice of 2029: there are more than 3 beliefs, which do not merge; allow more "
     "with \"beliefs\", or choose or inspect less often"},
    {REGISTER TREE("every: 0.004 a, choose: {wait: []}"), NULL}, /* STAGES_MOST */
};

START_TEST(tells_what_is_wrong)
{
    const struct told *x = &told[_i];
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(&l, a, x->text, NULL);
    ohmen_status status = weigh_compile(l.figures, "D", &w, &e);
    ck_assert_msg((status == OHMEN_OK) == !x->error, "%s", e.text);
    if (x->error) {
        ck_assert_int_eq(status, OHMEN_COMPUTE);
        ck_assert_str_eq(e.text, x->error);
    }
    arena_free(a);
}
END_TEST

/* Three states of four values are 64 hidden states with nine transitions each. */
START_TEST(transitions_are_counted)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct text t;
    text_init(&t, a);
    text_add(&t, WITHOUT_STATES TREE("sees: [S-A], every: 1 a, choose: {wait: []}"));
    text_add(&t, "states:\n");
    for (char state = 'A'; state <= 'A' + _i; state++) {
        text_printf(&t, "  S-%c:\n    name: N\n    is: {v0: rest, v1: 0.1, v2: 0.1, v3: 0.1}\n",
                    state);
        text_add(&t, "    when: {v1: {hazards: {H: {frequency: 2 * was}}}}\n    becomes:\n");
        for (int from = 0; from < 4; from++) {
            text_printf(&t, "      v%d: {", from);
            for (int to = 0, n = 0; to < 4; to++)
                if (to != from)
                    text_printf(&t, "%sv%d: 0.1 per a", n++ ? ", " : "", to);
            text_add(&t, "}\n");
        }
    }
    loaded_text(&l, a, text_str(&t), NULL);
    ohmen_status status = weigh_compile(l.figures, "D", &w, &e);
    if (_i < 2) {
        ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    } else {
        ck_assert_int_eq(status, OHMEN_COMPUTE);
        ck_assert_str_eq(e.text, "the unknown states that \"D\" follows have 576 transitions "
                                 "together, at most 256 are possible");
    }
    arena_free(a);
}
END_TEST

/* A branch that costs nothing has no ratio, and nothing is paid at the end of the horizon. */
START_TEST(costs_nothing)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const struct weighing *w = weigh(
        &l, a,
        REGISTER TREE("every: 3 a, choose: {late: [{wait: 1 a}, {pay: -100 EUR}], wait: []}"));
    loaded_evaluate(&l);
    const double late = 100 / 1.05; /* once: that of the second choice would be paid at the end */
    expect_sum(figure_value(l.figures, w->alternatives.at[1].present_cost), -late);
    ck_assert_uint_eq(w->alternatives.at[1].ratio, FIGURE_NONE);
    arena_free(a);
}
END_TEST

/* "branching_test SORT SEED" prints the document of a random world. */
static int print_world(const char *sort, const char *seed)
{
    struct arena *a = arena_new(NULL);
    struct random r = random_seed(strtoull(seed, NULL, 10));
    struct tree_world w = {.a = a, .r = &r};
    printf("%s", tree_world_draw(&w, (enum tree_sort)atoi(sort)));
    arena_free(a);
    return 0;
}

int main(int argc, char **argv)
{
    if (argc == 3)
        return print_world(argv[1], argv[2]);
    Suite *s = suite_create("branching");
    TCase *t = tcase_create("random");
    tcase_set_timeout(t, 300);
    tcase_add_loop_test(t, worth_as_the_best_of_all_policies, 0, TREE_SORTS);
    tcase_add_loop_test(t, tells_what_is_wrong, 0, sizeof told / sizeof *told);
    tcase_add_loop_test(t, transitions_are_counted, 0, 3);
    tcase_add_test(t, costs_nothing);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
