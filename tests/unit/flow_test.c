/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tests of src/decide/flow.h and lean.h: an alternative year by year against arithmetic by hand,
 * and what a decision leans on against closed forms. */
#include <check.h>
#include <math.h>
#include <string.h>

#include "decide/flow.h"
#include "decide/lean.h"
#include "loaded.h"

/* A risk of 0.5 per a x 1000 EUR = 500 EUR/a. A halves it from 2029 on: 250 EUR/a less. */
static const char settings[] =
    "register: {title: Flow, currency: EUR, prices: 2026, start: 2028, horizon: 4 a, discount: "
    "5 %% per a%s}\n"
    "hazards:\n"
    "  H: {name: H, frequency: 0.5 per a, response: {never: {outcome: lost}}, outcomes: {lost: "
    "{name: Lost, damage: {loss: {category: c, is: 1000 EUR}}}}}\n"
    "options:\n"
    "  A: {name: A, invest: {is: 600 EUR, on: 2028}, in-service: 2029, running: 10 EUR per a, "
    "change: {hazards: {H: {frequency: 0.5 * was}}}}\n"
    "  B: {name: B, invest: {is: 900 EUR, on: 2028}, in-service: 2029, residual: 100 EUR, change: "
    "{hazards: {H: {frequency: 0.5 * was}}}}\n"
    "  C: {name: C, invest: {is: 120 EUR, on: 2028}, in-service: 2028, life: 1 a, renewed: yes, "
    "change: {hazards: {H: {frequency: 0.9 * was}}}}\n"
    "decisions:\n"
    "  D: {question: What?, options: [A]}\n"
    "  E: {question: What?, options: [B]}\n"
    "  F: {question: What?, options: [C]}\n";

struct world {
    struct arena *arena;
    struct loaded l;
    struct weighing *w;
    const struct flow *flow;
};

static void load(struct world *x, const char *decision, const char *more)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    x->arena = arena_new(NULL);
    loaded_text(&x->l, x->arena, arena_printf(x->arena, settings, more), NULL);
    ck_assert_int_eq(weigh_compile(x->l.figures, decision, &x->w, &e), OHMEN_OK);
    loaded_evaluate(&x->l);
    weigh_rank(x->l.figures, x->w);
    ck_assert_int_eq(flow_compile(x->l.figures, x->w, &x->w->alternatives.at[1], &x->flow, &e),
                     OHMEN_OK);
    loaded_evaluate(&x->l);
    ck_assert_uint_eq(x->flow->n, 4);
}

static double value(const struct world *x, figure_id id)
{
    return figure_value(x->l.figures, id);
}

static void expect_year(const struct world *x, size_t year, double avoided, double invested,
                        double running, double cumulated)
{
    const struct flow_year *y = &x->flow->years[year];
    ck_assert_double_eq_tol(value(x, y->avoided), avoided, 1e-10);
    ck_assert_double_eq_tol(value(x, y->invested), invested, 1e-10);
    ck_assert_double_eq_tol(value(x, y->running), running, 1e-10);
    ck_assert_double_eq_tol(value(x, y->cumulated), cumulated, 1e-10);
}

/* 600 in 2028 at once; then 250 - 10 = 240 a year in the middle of each year:
 * -600 + 240 (1.05^-1.5 + 1.05^-2.5 + 1.05^-3.5) = 37.83 at the end of 2031, the first that is not
 * negative. */
START_TEST(it_pays_in_the_last_year)
{
    struct world x;
    load(&x, "D", "");
    double sum = -600;
    expect_year(&x, 0, 0, 600, 0, sum);
    for (size_t y = 1; y < 4; y++) {
        sum += 240 * pow(1.05, -((double)y + 0.5));
        expect_year(&x, y, 250, 0, 10, sum);
    }
    ck_assert_double_eq_tol(sum, 37.83, 0.005);
    ck_assert_double_eq_tol(value(&x, x.w->alternatives.at[1].net), sum, 1e-10);
    ck_assert_uint_eq(flow_payback(x.l.figures, x.flow), 3);
    ck_assert_str_eq(x.flow->years[3].label, "2031");
    ck_assert_double_eq(loaded_value(&x.l, "D.cumulated.A.2030"),
                        value(&x, x.flow->years[2].cumulated));
    arena_free(x.arena);
}
END_TEST

/* The same with amounts at the end of each year: exponents 2, 3, 4. */
START_TEST(amounts_at_the_end_of_the_year)
{
    struct world x;
    load(&x, "D", ", yearly-amounts: end-of-year");
    double sum = -600;
    for (size_t y = 1; y < 4; y++) {
        sum += 240 * pow(1.05, -((double)y + 1));
        expect_year(&x, y, 250, 0, 10, sum);
    }
    arena_free(x.arena);
}
END_TEST

/* 900 in 2028, 250 a year from 2029 on, 100 at the end of the horizon: 1.05^-4, told in its last
 * year. -900 + 250 x 2.658 + 82.3 is negative: it never pays. */
START_TEST(it_never_pays)
{
    struct world x;
    load(&x, "E", "");
    double sum = -900;
    for (size_t y = 1; y < 4; y++) {
        sum += 250 * pow(1.05, -((double)y + 0.5));
        if (y == 3)
            sum += 100 * pow(1.05, -4);
        expect_year(&x, y, 250, y == 3 ? -100 : 0, 0, sum);
    }
    ck_assert_double_lt(sum, 0);
    ck_assert_double_eq_tol(value(&x, x.w->alternatives.at[1].net), sum, 1e-10);
    ck_assert_uint_eq(flow_payback(x.l.figures, x.flow), 4);
    arena_free(x.arena);
}
END_TEST

/* 120 at the start of each year, since it lasts one year and is renewed; 50 a year avoided. */
START_TEST(renewals_are_told_in_their_years)
{
    struct world x;
    load(&x, "F", "");
    double sum = 0;
    for (size_t y = 0; y < 4; y++) {
        sum += 50 * pow(1.05, -((double)y + 0.5)) - 120 * pow(1.05, -(double)y);
        expect_year(&x, y, 50, 120, 0, sum);
    }
    ck_assert_double_eq_tol(value(&x, x.w->alternatives.at[1].net), sum, 1e-10);
    arena_free(x.arena);
}
END_TEST

START_TEST(names_that_are_no_years)
{
    struct world x;
    load(&x, "D", "");
    ck_assert_ptr_null(flow_alternative(x.l.figures, x.w, "cumulated.B.2030"));
    ck_assert_ptr_null(flow_alternative(x.l.figures, x.w, "cumulated.A"));
    ck_assert_ptr_null(flow_alternative(x.l.figures, x.w, "benefit.A.2030"));
    ck_assert_ptr_eq(flow_alternative(x.l.figures, x.w, "avoided.A.2030"),
                     &x.w->alternatives.at[1]);
    arena_free(x.arena);
}
END_TEST

/* --- leaning --- */

static const struct lean *lean_on(const struct leans *all, const char *name)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i].name, name))
            return &all->at[i];
    ck_abort_msg("it does not lean on %s", name);
    return NULL;
}

/* net(r) = -600 + 240 (v^1.5 + v^2.5 + v^3.5), v = 1 / (1 + r) */
static double net_of_rate(double r)
{
    return -600 + 240 * (pow(1 + r, -1.5) + pow(1 + r, -2.5) + pow(1 + r, -3.5));
}

START_TEST(what_it_leans_on)
{
    struct world x;
    struct leans all = {0};
    struct lean one;
    ohmen_error e = OHMEN_ERROR_INIT;
    load(&x, "D", "");
    leans_find(x.l.figures, x.w, &all);
    double years = pow(1.05, -1.5) + pow(1.05, -2.5) + pow(1.05, -3.5), h = 1e-5;
    double slope = (net_of_rate(0.05 + h) - net_of_rate(0.05 - h)) / (2 * h);
    ck_assert_double_eq_tol(lean_on(&all, "D.leans-on[A.invest].A")->one_percent, -6, 1e-12);
    ck_assert_double_eq_tol(lean_on(&all, "D.leans-on[A.running].A")->one_percent, -0.1 * years,
                            1e-12);
    ck_assert_double_eq_tol(lean_on(&all, "D.leans-on[H.damage.lost.loss].A")->one_percent,
                            2.5 * years, 1e-12);
    ck_assert_double_eq_tol(lean_on(&all, "D.leans-on[register.discount].A")->one_percent,
                            0.01 * 0.05 * slope, 1e-7);
    for (size_t i = 1; i < all.n; i++)
        ck_assert_double_ge(fabs(all.at[i - 1].one_percent), fabs(all.at[i].one_percent));
    ck_assert_int_eq(lean_find(x.l.figures, "D.leans-on[A.invest].A", &one, &e), OHMEN_OK);
    ck_assert_double_eq(one.one_percent, -6);
    ck_assert_int_eq(lean_find(x.l.figures, "D.leans-on[A.inwest].A", &one, &e), OHMEN_UNKNOWN);
    ck_assert_ptr_nonnull(strstr(e.text, "did you mean \"D.leans-on[A.invest].A\"?"));
    ck_assert(lean_is_named("D.leans-on[A.invest].A"));
    ck_assert(!lean_is_named("D.turns-at[A.invest].A.do-nothing.below"));
    arena_free(x.arena);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("flow");
    TCase *t = tcase_create("flow");
    tcase_add_test(t, it_pays_in_the_last_year);
    tcase_add_test(t, amounts_at_the_end_of_the_year);
    tcase_add_test(t, it_never_pays);
    tcase_add_test(t, renewals_are_told_in_their_years);
    tcase_add_test(t, names_that_are_no_years);
    tcase_add_test(t, what_it_leans_on);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
