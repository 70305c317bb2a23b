/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Test intervals by cost: the forms of the textbooks with their least, numerical integration,
 * and registers in which each interval is written out. */
#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "decide/interval.h"
#include "loaded.h"
#include "random.h"

#define SETTINGS(more)                                                                             \
    "register: {title: Tests, currency: EUR, prices: 2026, horizon: 20 a, discount: 4 % per "      \
    "a" more "}\n"

/* One element; its failure on demand costs `damage`, all else nothing. */
#define ONE(frequency, damage)                                                                     \
    SETTINGS("")                                                                                   \
    "schemes: {MAIN: {all: [R]}}\n"                                                                \
    "hazards:\n"                                                                                   \
    "  H:\n"                                                                                       \
    "    name: Fault\n"                                                                            \
    "    frequency: " frequency "\n"                                                               \
    "    response:\n"                                                                              \
    "      main: {cleared-by: MAIN, in: 1 s, outcome: none}\n"                                     \
    "      never: {outcome: burnt}\n"                                                              \
    "    outcomes: {burnt: {name: Burnt, damage: {loss: {category: c, is: " damage "}}}}\n"

static void expect_near(double x, double expected)
{
    ck_assert_msg(fabs(x - expected) <= 1e-10 * fabs(expected), "%.17g, expected %.17g", x,
                  expected);
}

static struct interval_search *search(struct loaded *l, const char *element)
{
    struct interval_search *s = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = interval_compile(l->figures, element, &s, &e);
    ck_assert_msg(status == OHMEN_OK, "%s: %s", element, e.text);
    status = figures_evaluate(s->figures, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    interval_rank(s);
    return s;
}

/* The least lies beside the best of the intervals that were tried. */
static void expect_bracket(const struct interval_search *s, double least)
{
    ck_assert(s->best > 0 && s->best + 1 < s->tried.n);
    ck_assert_msg(s->tried.at[s->best - 1].years < least && least < s->tried.at[s->best + 1].years,
                  "best %s, expected %g a", s->tried.at[s->best].every, least);
    for (size_t i = 1; i < s->tried.n; i++)
        ck_assert_msg((s->tried.at[i].total < s->tried.at[i - 1].total) == (i <= s->best),
                      "the curve bends back at %s", s->tried.at[i].every);
}

/* --- the textbook --- */

/* A test that takes t; failures that it finds at the rate u. */
struct model_of_one {
    double u, t, T;
};

static double fails_at(const struct model_of_one *m, double x)
{
    return 1 - (1 - m->t / m->T) * exp(-m->u * x);
}

/* Simpson's rule over one interval between tests. */
static double integrated(const struct model_of_one *m)
{
    enum { CELLS = 2000 };
    double sum = 0, h = m->T / CELLS;
    for (int i = 0; i <= CELLS; i++)
        sum += (i == 0 || i == CELLS ? 1 : i % 2 ? 4 : 2) * fails_at(m, i * h);
    return sum / (3 * CELLS);
}

/* U(T) = u T/2 + t/T to leading order, with its least at sqrt(2 t/u); self-supervision s leaves
 * u = l (1 - s). From memory, with l = 0.01 per a and t = 4 h. */
static const struct {
    const char *undetected;
    double u, least;
} supervised[] = {
    {"0.01 per a", 0.01, 0.302}, {"0.002 per a", 0.002, 0.676}, {"5e-4 per a", 5e-4, 1.351}};

START_TEST(outage_by_tests_against_undetected_failures)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const double t = 4 / 8760.;
    double u = supervised[_i].u, least = sqrt(2 * t / u);
    const char *element = arena_printf(
        a, "elements: {R: {kind: relay, undetected: %s, test: {every: 1 a, takes: 4 h}}}\n",
        supervised[_i].undetected);
    ck_assert_double_eq_tol(least, supervised[_i].least, 5e-4);
    loaded_texts(&l, a, 2, (const char *[]){ONE("1 per a", "1 MEUR"), element}, NULL);
    const struct interval_search *s = search(&l, "R");
    expect_bracket(s, least);
    ck_assert_uint_eq(s->tried.n, 18);
    for (size_t i = 0; i < s->tried.n; i++) {
        struct model_of_one m = {u, t, s->tried.at[i].years};
        double U = s->tried.at[i].total / 1e6, leading = m.u * m.T / 2 + m.t / m.T;
        expect_near(U, integrated(&m));
        ck_assert_double_lt(U, leading); /* each part left out is negative, and this small */
        ck_assert_double_gt(U, leading - m.u * m.T * m.u * m.T / 6 - m.u * m.t / 2);
    }
    arena_free(a);
}
END_TEST

/* Tests that cost c: the least near sqrt(2 c / (f D u)). */
START_TEST(cost_against_undetected_failures)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const double u = 0.0043, f = 0.0385, D = 2.385e6, c = (600 + 850) / 2.;
    loaded_texts(&l, a, 2,
                 (const char *[]){ONE("0.0385 per a", "2.385 MEUR"),
                                  "values: {wage: {from: 600 EUR, to: 850 EUR, shape: uniform}}\n"
                                  "elements: {R: {undetected: 0.0043 per a,\n"
                                  "  test: {every: 30 month, costs: wage}}}\n"},
                 NULL);
    const struct interval_search *s = search(&l, "R");
    expect_bracket(s, sqrt(2 * c / (f * D * u)));
    for (size_t i = 0; i < s->tried.n; i++) {
        double T = s->tried.at[i].years;
        expect_near(s->tried.at[i].costs, c / T);
        expect_near(s->tried.at[i].faults, f * D * (1 + expm1(-u * T) / (u * T)));
        expect_near(s->tried.at[i].total, s->tried.at[i].costs + s->tried.at[i].faults);
        ck_assert_double_eq(s->tried.at[i].trips, 0);
    }
    ck_assert_str_eq(s->tried.at[s->today].every, "30 month");
    ck_assert(s->tried.at[s->today].today && s->tried.at[s->today].years == 2.5);
    arena_free(a);
}
END_TEST

/* A test leaves the element failed with p: from then on 1 - (1 - p) exp(-u x), so that the mean
 * is p + (1 - p) (1 - (1 - exp(-u T))/(u T)). What the test does not find, u (1 - c), has at
 * time y of the horizon failed with 1 - exp(-u (1 - c) y), on average over 20 a. */
START_TEST(what_tests_leave_and_do_not_find)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const double p = 0.0023, u = 0.0143, c = 0.885;
    loaded_texts(&l, a, 2,
                 (const char *[]){ONE("0.2 per a", "1 MEUR"),
                                  "elements: {R: {undetected: 0.0143 per a, test: {every: 2 a,\n"
                                  "  leaves-failed: 0.0023, finds: 88.5 %}}}\n"},
                 NULL);
    const struct interval_search *s = search(&l, "R");
    double never = u * (1 - c), m = 1 + expm1(-never * 20) / (never * 20);
    for (size_t i = 0; i < s->tried.n; i++) {
        double T = s->tried.at[i].years, k = u * c;
        double mean = p + (1 - p) * (1 + expm1(-k * T) / (k * T));
        expect_near(s->tried.at[i].total, 0.2 * 1e6 * (m + (1 - m) * mean));
    }
    ck_assert_double_gt(s->tried.at[0].total, 0.2 * 1e6 * (p + m - p * m));
    arena_free(a);
}
END_TEST

/* With demands that show what the test does not find, its share failed follows
 * dm/dy = n (1 - m) - r m: m = n/(n + r) (1 - exp(-(n + r) y)), on average over the horizon, and
 * older by 11 years and 184/365 where the element came into service that much before it. */
START_TEST(age_and_demands_of_what_is_not_found)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const double n = 0.0143 * 0.25, r = 0.11, k = 0.0143 * 0.75 + r, age = 11 + 184 / 365.;
    loaded_texts(
        &l, a, 2,
        (const char *[]){ONE("0.2 per a", "1 MEUR"),
                         "elements: {R: {undetected: 0.0143 per a, exercised: 0.11 per a,\n"
                         "  since: 2014-07-01, test: {every: 2 a, last: 2024-07-01,\n"
                         "  finds: 75 %}}}\n"},
        NULL);
    const struct interval_search *s = search(&l, "R");
    double z = n + r;
    double m = n / z * (1 + exp(-z * age) * expm1(-z * 20) / (z * 20));
    for (size_t i = 0; i < s->tried.n; i++) {
        double T = s->tried.at[i].years;
        double mean = (k - r) / k * (1 + expm1(-k * T) / (k * T));
        expect_near(s->tried.at[i].total, 0.2 * 1e6 * (m + (1 - m) * mean));
    }
    arena_free(a);
}
END_TEST

/* --- registers written out --- */

/* Three elements, two of which have a common cause; each in a hazard or two. */
static const char *written_out(struct arena *a, uint64_t seed, const char *every)
{
    static const char *const others[] = {"1 a", "2 a", "3 a", "4 a", "18 month", "6 a"};
    static const char *const days[] = {"", ", last: 2025-03-14", ", last: 2023-11-02",
                                       ", next: 2028-06-30"};
    struct random r = random_seed(seed);
    struct text t;
    text_init(&t, a);
    text_add(&t, SETTINGS(", steady: yes") "elements:\n");
    for (int i = 0; i < 3; i++) {
        const char *other = random_pick(&r, others), *dated = random_pick(&r, days);
        double u = random_log_uniform(&r, 1e-3, 5e-2), takes = random_uniform(&r, 1, 40);
        double left = random_uniform(&r, 0, 0.01), costs = random_uniform(&r, 100, 3000);
        text_printf(&t,
                    "  E%d: {kind: relay, undetected: %.17g per a, test: {every: %s%s, takes: "
                    "%.17g h, leaves-failed: %.17g, costs: %.17g EUR}}\n",
                    i, u, i == 1 ? every : other, dated, takes, left, costs);
    }
    text_add(&t, "common-cause: {CC: {of: [E0, E1], beta: 0.085}}\n"
                 "schemes: {MAIN: {all: [E0, E2]}, SECOND: {any: [E1, E2]}}\n"
                 "hazards:\n");
    static const char *const rows[][2] = {{"MAIN", "SECOND"}, {"SECOND", "MAIN"}, {"MAIN", NULL}};
    for (int i = 0; i < 3; i++) {
        text_printf(&t, "  H%d:\n    name: H\n    frequency: %.17g per a\n    response:\n", i,
                    random_log_uniform(&r, 1e-3, 1));
        for (int k = 0; k < 2 && rows[i][k]; k++)
            text_printf(&t, "      r%d: {cleared-by: %s, in: %d s, outcome: o%d}\n", k, rows[i][k],
                        k + 1, k);
        text_add(&t, "      never: {outcome: burnt}\n    outcomes:\n");
        static const char *const outcomes[] = {"o0", "o1", "burnt"};
        for (int k = 0; k < 3; k++)
            if (k != 1 || rows[i][1])
                text_printf(&t,
                            "      %s: {name: O, damage: {loss: {category: c, is: %.17g EUR}}}\n",
                            outcomes[k], random_log_uniform(&r, 1e3, 1e7));
    }
    return text_str(&t);
}

/* The register with this interval in its documents, read as any other. */
static void expect_as_written(struct arena *a, uint64_t seed, const struct interval_search *s,
                              const struct tried_interval *t)
{
    struct loaded l;
    double sum = 0;
    loaded_text(&l, a, written_out(a, seed, t->every), NULL);
    for (size_t i = 0; i < s->hazards.n; i++) {
        const struct hazard_exports *x = t->hazards[i]->exports;
        double risk = loaded_value(&l, arena_printf(a, "%s.risk", s->hazards.at[i].id));
        expect_near(figure_value(s->figures, x->risk), risk);
        sum += risk;
    }
    expect_near(t->faults, sum);
    const struct element *e = model_get(l.model, KIND_ELEMENT, "E1");
    expect_near(t->costs, expr_constant(e->test->costs->expr) / t->years);
}

START_TEST(each_interval_as_if_written_in_the_register)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    uint64_t seed = 7100 + (uint64_t)_i;
    loaded_text(&l, a, written_out(a, seed, "3 a"), NULL);
    const struct interval_search *s = search(&l, "E1");
    ck_assert_uint_eq(s->hazards.n, 3); /* the third by the common cause alone */
    ck_assert_uint_ge(s->tried.n, 10);
    size_t best = 0;
    for (size_t i = 0; i < s->tried.n; i++) {
        expect_as_written(a, seed, s, &s->tried.at[i]);
        best = s->tried.at[i].total < s->tried.at[best].total ? i : best;
    }
    ck_assert_uint_eq(s->best, best);
    for (size_t i = s->near_from; i <= s->near_to; i++)
        ck_assert_double_le(s->tried.at[i].total, 1.05 * s->tried.at[best].total);
    ck_assert(s->near_from == 0 ||
              s->tried.at[s->near_from - 1].total > 1.05 * s->tried.at[best].total);
    ck_assert(s->near_to + 1 == s->tried.n ||
              s->tried.at[s->near_to + 1].total > 1.05 * s->tried.at[best].total);
    arena_free(a);
}
END_TEST

/* --- names --- */

START_TEST(figures_are_found_by_their_names)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a, written_out(a, 7200, "3 a"), NULL);
    const struct interval_search *s = search(&l, "E1");
    for (size_t i = 0; i < s->tried.n; i++) {
        const struct hazard_exports *x = s->tried.at[i].hazards[1]->exports;
        const char *name = figure_name(s->figures, a, x->risk);
        struct figures *f = NULL;
        figure_id id = FIGURE_NONE;
        ohmen_error e = OHMEN_ERROR_INIT;
        ck_assert_str_eq(name, arena_printf(a, "H1.risk@[E1.test.every=%s, whole cycles]",
                                            s->tried.at[i].every));
        ck_assert(interval_is_named(name));
        ck_assert_int_eq(interval_find(l.figures, name, &f, &id, &e), OHMEN_OK);
        ck_assert_int_eq(figures_evaluate(f, &e), OHMEN_OK);
        ck_assert_str_eq(figure_name(f, a, id), name);
        ck_assert(figure_value(f, id) == figure_value(s->figures, x->risk));
    }
    arena_free(a);
}
END_TEST

static const struct {
    const char *name;
    bool is;
    const char *why; /* not to be found; NULL: it is */
} names[] = {
    {"H.risk@[R.test.every=2 a, whole cycles]", true, NULL},
    {"H.risk@[R.test.every=1.25 a, whole cycles]", true, NULL},
    {"R.test-costs@[R.test.every=2 a, whole cycles]", true, NULL},
    {"H.risk@[X.test.every=2 a, whole cycles]", true, "there is no element \"X\""},
    {"H.risk@[R.test.every=soon, whole cycles]", true, "a plain number"},
    {"H.none@[R.test.every=2 a, whole cycles]", true, "none"},
    {"H.risk@[R.test.every=2 a]", false, NULL},
    {"H.risk@[R.test.every=2 a, whole cycles", false, NULL},
    {"H.risk@[R.test.every=, whole cycles, or]", false, NULL},
    {"H.risk@[R], whole cycles]", false, NULL},
    {"H.risk", false, NULL},
    {"", false, NULL},
};

START_TEST(what_is_a_name)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct figures *f = NULL;
    figure_id id = FIGURE_NONE;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_texts(
        &l, a, 2,
        (const char *[]){ONE("1 per a", "1 MEUR"),
                         "elements: {R: {undetected: 0.01 per a, test: {every: 1 a, costs: "
                         "1 EUR}}}\n"},
        NULL);
    ck_assert_msg(interval_is_named(names[_i].name) == names[_i].is, "%s", names[_i].name);
    if (!names[_i].is) {
        arena_free(a);
        return;
    }
    ohmen_status status = interval_find(l.figures, names[_i].name, &f, &id, &e);
    ck_assert_msg((status == OHMEN_OK) == !names[_i].why, "%s: %s", names[_i].name, e.text);
    ck_assert(status != OHMEN_OK || strcmp(figure_name(f, a, id), names[_i].name) == 0);
    ck_assert(status == OHMEN_OK || (id == FIGURE_NONE && strstr(e.text, names[_i].why)));
    arena_free(a);
}
END_TEST

/* --- what cannot be found --- */

static const struct {
    const char *elements, *element, *why;
} refused[] = {
    {"{R: {undetected: 0.01 per a}}", "R", "the element \"R\" has no \"test\""},
    {"{R: {undetected: 0.01 per a, test: {every: 1 a}}}", "RR",
     "there is no element \"RR\" (did you mean \"R\"?)"},
    {"{R: {undetected: 0.01 per a}, S: {undetected: 0.01 per a, test: {every: 1 a}}}", "S",
     "no hazard depends on how often \"S\" is tested"},
};

START_TEST(refusals)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    struct interval_search *s = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_texts(&l, a, 2,
                 (const char *[]){ONE("1 per a", "1 MEUR"),
                                  arena_printf(a, "elements: %s\n", refused[_i].elements)},
                 NULL);
    ck_assert_int_ne(interval_compile(l.figures, refused[_i].element, &s, &e), OHMEN_OK);
    ck_assert_str_eq(e.text, refused[_i].why);
    ck_assert_ptr_null(s);
    arena_free(a);
}
END_TEST

static bool tries(const struct interval_search *s, const char *every)
{
    for (size_t i = 0; i < s->tried.n; i++)
        if (strcmp(s->tried.at[i].every, every) == 0)
            return true;
    return false;
}

/* 37 a and 12 a meet after 444 a, which is too long; 37 a and 10 a after 370 a. */
START_TEST(intervals_that_are_left_out)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    static const char both[] =
        SETTINGS("") "schemes: {MAIN: {any: [R, S]}}\n"
                     "hazards:\n"
                     "  H:\n"
                     "    name: Fault\n"
                     "    frequency: 1 per a\n"
                     "    response:\n"
                     "      main: {cleared-by: MAIN, in: 1 s, outcome: none}\n"
                     "      never: {outcome: burnt}\n"
                     "    outcomes: {burnt: {name: Burnt, damage: {loss: {category: c, is: 1 "
                     "MEUR}}}}\n";
    loaded_texts(&l, a, 2,
                 (const char *[]){both, "elements:\n"
                                        "  R: {undetected: 0.01 per a, test: {every: 37 a}}\n"
                                        "  S: {undetected: 0.01 per a, test: {every: 5 a, takes: "
                                        "250 d}}\n"},
                 NULL);
    const struct interval_search *s = search(&l, "S");
    ck_assert(tries(s, "10 a") && !tries(s, "12 a") && !tries(s, "15 a"));
    ck_assert(tries(s, "9 month") && !tries(s, "6 month")); /* the test takes 250 d */
    ck_assert_str_eq(s->tried.at[s->today].every, "5 a");
    loaded_texts(&l, a, 2,
                 (const char *[]){both, "elements:\n"
                                        "  R: {undetected: 0.01 per a, test: {every: 37 a}}\n"
                                        "  S: {undetected: 0.01 per a, test: {every: 11 a}}\n"},
                 NULL);
    struct interval_search *none = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(interval_compile(l.figures, "S", &none, &e), OHMEN_COMPUTE);
    ck_assert_msg(strstr(e.text, "no common cycle") != NULL, "%s", e.text);
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("interval");
    TCase *t = tcase_create("interval");
    tcase_set_timeout(t, 120);
    tcase_add_loop_test(t, outage_by_tests_against_undetected_failures, 0, 3);
    tcase_add_test(t, cost_against_undetected_failures);
    tcase_add_test(t, what_tests_leave_and_do_not_find);
    tcase_add_test(t, age_and_demands_of_what_is_not_found);
    tcase_add_loop_test(t, each_interval_as_if_written_in_the_register, 0, 12);
    tcase_add_test(t, figures_are_found_by_their_names);
    tcase_add_loop_test(t, what_is_a_name, 0, sizeof names / sizeof *names);
    tcase_add_loop_test(t, refusals, 0, sizeof refused / sizeof *refused);
    tcase_add_test(t, intervals_that_are_left_out);
    suite_add_tcase(s, t);
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
