/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Two-way maps: points worked out by hand, and registers that state both inputs of a point. */
#include "decide/map.h"

#include <check.h>
#include <math.h>
#include <string.h>

#include "loaded.h"
#include "restated.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

#define EXACT 1e-9

static void find(struct loaded *l, const struct restated *r, const char *x, const char *y,
                 struct weighing **w, struct choice_map *m)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    *w = restated_weigh(l, arena, restated_text(arena, r, NULL));
    ck_assert_msg(map_find(l->figures, *w, x, y, MAP_COLUMNS, MAP_ROWS, m, &e) == OHMEN_OK, "%s",
                  e.text);
}

/* --- by hand --- */

static const struct restated_input simple_inputs[] = {
    {"r.rate", "{shape: uniform, from: 0.1 per a, to: 0.5 per a}", "per a"},
    {"A.invest", "900 EUR", "EUR"},
};
static const struct restated simple = {
    SETTINGS "rates: {r: {name: R, per: a, is: $0}}\n"
             "hazards: {H: {name: H, frequency: r, " LOST(
                 "1000 EUR") "}}\n"
                             "options: {A: {name: A, invest: $1, change: {hazards: {H: {frequency: "
                             "0.2 * was}}}}}\n"
                             "decisions: {D: {question: What?, options: [A]}}\n",
    2, simple_inputs};

/* net = 800 r A - C, r from 0.104 to 0.496, C from half to double. */
START_TEST(points_and_lines)
{
    struct loaded l;
    struct weighing *w;
    struct choice_map m;
    double a = restated_annuity();
    find(&l, &simple, "r.rate", "A.invest", &w, &m);
    ck_assert_str_eq(m.name, "D.map[r.rate][A.invest]");
    ck_assert(m.x.n == MAP_COLUMNS && m.y.n == MAP_ROWS && m.is_exact);
    ck_assert(m.x.is_uncertain && !m.y.is_uncertain && !m.x.in_logs && !m.y.in_logs);
    for (size_t i = 0; i < m.x.n * m.y.n; i++) {
        double r = 0.104 + 0.392 * (double)(i % m.x.n) / 24;
        double c = 450 + 1350 * (double)(i / m.x.n) / 12, net = 800 * r * a - c;
        restated_check("x", m.x.at[i % m.x.n], r, 0, 1e-14);
        restated_check("y", m.y.at[i / m.x.n], c, 0, 1e-14);
        restated_check("worth", m.points[i].worth[1], net, 100, EXACT);
        restated_check("margin", m.points[i].margin, fabs(net), 100, EXACT);
        ck_assert_uint_eq(m.points[i].best, net > 0);
        ck_assert(m.points[i].worth[0] == 0);
    }
    restated_check("today", m.today.worth[1], 240 * a - 900, 0, EXACT);
    restated_check("today", m.x.now, 0.3, 0, 1e-14);
    ck_assert_uint_eq(m.today.best, 1);
}
END_TEST

/* On a line 800 r A = C, since the difference is a straight line along x and along y. */
START_TEST(lines_are_where_they_draw_level)
{
    struct loaded l;
    struct weighing *w;
    struct choice_map m;
    double a = restated_annuity();
    size_t expected = 0;
    find(&l, &simple, "r.rate", "A.invest", &w, &m);
    for (size_t i = 0; i < m.x.n * m.y.n; i++) {
        size_t right = i + 1, above = i + m.x.n;
        if (right % m.x.n)
            expected += m.points[i].best != m.points[right].best;
        if (above < m.x.n * m.y.n)
            expected += m.points[i].best != m.points[above].best;
    }
    ck_assert_uint_gt(expected, MAP_ROWS);
    ck_assert_uint_eq(m.lines.n, expected);
    for (size_t i = 0; i < m.lines.n; i++) {
        const struct map_line *t = &m.lines.at[i];
        ck_assert(t->to == t->from + 1 || t->to == t->from + m.x.n);
        ck_assert(t->along >= 0 && t->along <= 1);
        double x0 = m.x.at[t->from % m.x.n], x1 = m.x.at[t->to % m.x.n];
        double y0 = m.y.at[t->from / m.x.n], y1 = m.y.at[t->to / m.x.n];
        restated_check("level", 800 * (x0 + (x1 - x0) * t->along) * a, y0 + (y1 - y0) * t->along, 0,
                       EXACT);
        ck_assert(i == 0 || t->from > m.lines.at[i - 1].from || t->to > m.lines.at[i - 1].to);
    }
}
END_TEST

/* --- axes --- */

static const struct restated_input axis_inputs[] = {
    {"r.rate", "{median: 0.2 per a, error-factor: 10}", "per a"},
    {"v.value", "0.8", ""},
    {"k.value", "{values: {low: {is: 1, p: 0.5 %}, high: {is: 2, p: rest}}}", ""},
    {"R.fails", "0.7", ""},
};
static const struct restated axes = {
    SETTINGS "values: {v: {name: V, is: $1}, k: {name: K, is: $2}}\n"
             "rates: {r: {name: R, per: a, is: $0}}\n"
             "elements: {R: {kind: relay, per-demand: $3}}\n"
             "hazards: {H: {name: H, frequency: r, response: {p: {cleared-by: R, in: 0.1 s, "
             "outcome: none}, never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: "
             "{loss: {category: c, is: 500 EUR * v * k + 100 EUR}}}}}}\n"
             "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: {frequency: 0.2 * "
             "was}}}}}\n"
             "decisions: {D: {question: What?, options: [A]}}\n",
    4, axis_inputs};

/* A ratio of 10 or more is spaced in logs: 1 and 99 % of a lognormal quantity, of which
 * log(x / median) is log(10) x 2.3263478740408408 / 1.6448536269514722. Both points of a discrete
 * quantity may be one, and a probability ends at 1. */
START_TEST(axes_of_all_sorts)
{
    struct loaded l;
    struct weighing *w;
    struct choice_map m;
    double far = pow(10, 2.3263478740408408 / 1.6448536269514722);
    find(&l, &axes, "r.rate", "v.value", &w, &m);
    ck_assert(m.x.in_logs && !m.y.in_logs && m.x.is_uncertain && !m.y.is_uncertain);
    for (size_t i = 0; i < m.x.n; i++)
        restated_check("log", m.x.at[i], 0.2 / far * pow(far, (double)i / 12), 0, 1e-9);
    restated_check("half", m.y.at[0], 0.4, 0, 1e-15);
    restated_check("double", m.y.at[12], 1.6, 0, 1e-15);
    find(&l, &axes, "k.value", "R.fails", &w, &m);
    ck_assert(m.x.is_uncertain);
    restated_check("half", m.x.at[0], 1.995 / 2, 0, 1e-15);
    restated_check("double", m.x.at[24], 1.995 * 2, 0, 1e-15);
    restated_check("half", m.y.at[0], 0.35, 0, 1e-15);
    ck_assert(m.y.at[12] == 1);
}
END_TEST

/* Those with the widest swings; then those on which it leans. */
START_TEST(inputs_by_default)
{
    struct loaded l;
    struct weighing *w;
    struct choice_map m;
    find(&l, &axes, NULL, NULL, &w, &m);
    ck_assert_str_eq(m.x.name, "r.rate");
    ck_assert_str_eq(m.y.name, "R.fails"); /* k does not swing from 5 to 95 % */
    find(&l, &axes, NULL, "r.rate", &w, &m);
    ck_assert_str_eq(m.name, "D.map[R.fails][r.rate]");
    find(&l, &simple, NULL, NULL, &w, &m);
    ck_assert_str_eq(m.x.name, "r.rate");
}
END_TEST

START_TEST(names_that_are_wrong)
{
    static const struct {
        const char *x, *y, *says;
    } cases[] = {
        {"r.rte", "v.value", "r.rate"},
        {"r.rate", "B.invest", "A.invest"},
        {"r.rate", "r.rate", "stands twice"},
    };
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        struct loaded l;
        struct choice_map m;
        ohmen_error e = OHMEN_ERROR_INIT;
        struct weighing *w = restated_weigh(&l, arena, restated_text(arena, &axes, NULL));
        ohmen_status status = map_find(l.figures, w, cases[i].x, cases[i].y, 5, 5, &m, &e);
        ck_assert_int_eq(status, OHMEN_UNKNOWN);
        ck_assert_msg(strstr(e.text, cases[i].says), "%s", e.text);
    }
}
END_TEST

/* --- ties, and what is not possible --- */

/* A and B are worth the same everywhere. */
START_TEST(ties_go_by_name)
{
    static const struct restated_input inputs[] = {
        {"r.rate", "{shape: uniform, from: 0.1 per a, to: 0.5 per a}", "per a"},
        {"H.damage.lost.loss", "1000 EUR", "EUR"},
    };
    static const struct restated r = {
        SETTINGS "rates: {r: {name: R, per: a, is: $0}}\n"
                 "hazards: {H: {name: H, frequency: r, " LOST(
                     "$1") "}}\n"
                           "options: {B: {name: B, invest: 900 EUR, excludes: [A], change: "
                           "{hazards: {H: {frequency: 0.2 * was}}}}, A: {name: A, invest: 900 EUR, "
                           "change: {hazards: {H: {frequency: 0.2 * was}}}}}\n"
                           "decisions: {D: {question: What?, options: [A, B]}}\n",
        2, inputs};
    struct loaded l;
    struct weighing *w;
    struct choice_map m;
    size_t a = 0;
    find(&l, &r, "r.rate", "H.damage.lost.loss", &w, &m);
    for (size_t i = 0; i < m.x.n * m.y.n; i++) {
        const char *best = w->alternatives.at[m.points[i].best].name;
        ck_assert_str_ne(best, "B");
        if (text_equal(best, "A")) {
            ck_assert(m.points[i].margin == 0);
            a++;
        }
    }
    ck_assert(a > 0 && a < m.x.n * m.y.n);
}
END_TEST

/* Two shares leave none of the third where they are more than 1 together. */
START_TEST(points_that_are_not_possible)
{
    static const struct restated_input inputs[] = {
        {"H.share.never.bad", "{shape: uniform, from: 0.1, to: 0.7}", ""},
        {"H.share.never.good", "{shape: uniform, from: 0.1, to: 0.6}", ""},
    };
    static const struct restated r = {
        SETTINGS "hazards: {H: {name: H, frequency: 0.5 per a, response: {never: {split: {bad: "
                 "{share: $0, outcome: lost}, good: {share: $1, outcome: some}, other: {share: "
                 "rest, outcome: none}}}}, outcomes: {lost: {name: Lost, damage: {loss: {category: "
                 "c, is: 1000 EUR}}}, some: {name: Some, damage: {loss: {category: c, is: 500 "
                 "EUR}}}}}}\n"
                 "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: {frequency: 0.2 * "
                 "was}}}}}\n"
                 "decisions: {D: {question: What?, options: [A]}}\n",
        2, inputs};
    struct loaded l;
    struct weighing *w;
    struct choice_map m;
    size_t none = 0;
    find(&l, &r, "H.share.never.bad", "H.share.never.good", &w, &m);
    for (size_t i = 0; i < m.x.n * m.y.n; i++) {
        bool possible = m.x.at[i % m.x.n] + m.y.at[i / m.x.n] <= 1;
        ck_assert((m.points[i].best != MAP_NONE) == possible);
        none += !possible;
    }
    ck_assert_uint_gt(none, 10);
    for (size_t i = 0; i < m.lines.n; i++)
        ck_assert(m.points[m.lines.at[i].from].best != MAP_NONE &&
                  m.points[m.lines.at[i].to].best != MAP_NONE);
}
END_TEST

/* --- weighed anew --- */

/* v is curved, so that the map of u and v goes by columns, and that of v and R by points. */
static const struct restated_input several_inputs[] = {
    {"v.value", "{shape: uniform, from: 0.5, to: 3.5}", ""},
    {"u.value", "90 % within 100 EUR .. 3000 EUR", "EUR"},
    {"R.undetected", "{median: 0.01 per a, error-factor: 3}", "per a"},
    {"A.invest", "2 kEUR", "EUR"},
};
static const struct restated several = {
    SETTINGS
    "values: {v: {name: V, is: $0}, u: {name: U, is: $1}}\n"
    "elements: {R: {kind: relay, undetected: $2, test: {every: 3 a, last: 2025-06-01}}}\n"
    "hazards:\n"
    "  H: {name: H, frequency: 0.4 per a, response: {p: {cleared-by: R, in: 0.1 s, outcome: none}, "
    "never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: 30 * "
    "u * v ^ 2}}}}}\n"
    "options:\n"
    "  A: {name: A, invest: $3, change: {hazards: {H: {frequency: 0.2 * was}}}}\n"
    "  B: {name: B, invest: 600 EUR, change: {elements: {R: {undetected: 0.5 * was}}}}\n"
    "decisions: {D: {question: What?, options: [A, B]}}\n",
    4, several_inputs};

static void check_point(const struct choice_map *m, const struct weighing *w, size_t i)
{
    struct loaded l;
    double x[] = {NAN, NAN, NAN, NAN};
    x[restated_place(&several, m->x.name)] = m->x.at[i % m->x.n];
    x[restated_place(&several, m->y.name)] = m->y.at[i / m->x.n];
    struct weighing *anew = restated_weigh(&l, arena, restated_text(arena, &several, x));
    for (size_t k = 0; k < w->alternatives.n; k++)
        restated_check(w->alternatives.at[k].name, m->points[i].worth[k],
                       restated_worth(&l, anew, w->alternatives.at[k].name), 10, EXACT);
    size_t first = anew->order[0], next = anew->order[1];
    ck_assert_uint_eq(m->points[i].best, first);
    restated_check("margin", m->points[i].margin,
                   restated_worth(&l, anew, anew->alternatives.at[first].name) -
                       restated_worth(&l, anew, anew->alternatives.at[next].name),
                   100, EXACT);
}

START_TEST(registers_that_state_a_point)
{
    static const char *const pairs[][2] = {{"v.value", "u.value"},
                                           {"u.value", "v.value"},
                                           {"v.value", "R.undetected"},
                                           {"R.undetected", "A.invest"},
                                           {"A.invest", "u.value"}};
    bool seen[4] = {false};
    for (size_t i = 0; i < sizeof pairs / sizeof *pairs; i++) {
        struct loaded l;
        struct weighing *w;
        struct choice_map m;
        find(&l, &several, pairs[i][0], pairs[i][1], &w, &m);
        ck_assert(m.is_exact);
        for (size_t k = i; k < m.x.n * m.y.n; k += 17) {
            check_point(&m, w, k);
            seen[m.points[k].best] = true;
        }
    }
    ck_assert(seen[0] + seen[1] + seen[2] + seen[3] >= 3);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("map");
    TCase *t = tcase_create("map");
    tcase_set_timeout(t, 60);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, points_and_lines);
    tcase_add_test(t, lines_are_where_they_draw_level);
    tcase_add_test(t, axes_of_all_sorts);
    tcase_add_test(t, inputs_by_default);
    tcase_add_test(t, names_that_are_wrong);
    tcase_add_test(t, ties_go_by_name);
    tcase_add_test(t, points_that_are_not_possible);
    tcase_add_test(t, registers_that_state_a_point);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
