/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The evaluator of formulas that other tests trust. Expected values are written out by
 * hand in other ways than the evaluator goes; where the arithmetic is long, it is beside
 * the check. All are 'computed'. */
#include <check.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "formula.h"

static const char *const names[] = {"H-1.frequency",       "H-1.frequency@A+B-2",
                                    "v-1.value",           "R.fails",
                                    "Q.fails@A+B-2",       "B.fails",
                                    "H-1.share.late.sees", "mean(median 1 h, error factor 3)",
                                    "D-1.benefit.A+B"};
static const double values[] = {2.385, 1.75, 0.35, 0.01, 0.002, 0.15, 0.8, 4.25, 6.5};

static const char *const counts[] = {"section", "bay"};
static struct formula_inputs inputs = {9, names, values};
static const struct formula_world world = {"EUR", counts, 2, &inputs, formula_find_input, NULL};

/* Numbers in a formula are doubles; beyond them the arithmetic is that of long doubles. Two
 * roundings of numbers, one of them scaled by cancellation, stay below this. */
#define ROUNDING 5e-16L

static void expect(const char *formula, long double expected)
{
    char error[FORMULA_ERROR];
    long double x = NAN;
    bool fine = formula_evaluate(formula, &world, &x, error);
    ck_assert_msg(fine, "%s: %s", formula, error);
    ck_assert_msg(fabsl(x - expected) <= ROUNDING * fabsl(expected), "%s: %.20Lg, expected %.20Lg",
                  formula, x, expected);
}

static void refuse(const char *formula, const char *word)
{
    char error[FORMULA_ERROR];
    long double x = 7;
    ck_assert_msg(!formula_evaluate(formula, &world, &x, error), "%s", formula);
    ck_assert_msg(strstr(error, word), "%s: %s", formula, error);
    ck_assert(x == 7);
}

START_TEST(literals)
{
    expect("2.5", 2.5L);
    expect("2.5e-3", 1 / 400.0L);
    expect("1E+2", 100);
    expect("8760 h", 1);
    expect("365 d", 1);
    expect("3 month", 0.25L);
    expect("525600 min", 1);
    expect("31536000 s", 1);
    expect("31536000000 ms", 1);
    expect("365 week", 7);
    expect("350 m", 0.35L);
    expect("2.4 MW", 2400);
    expect("3 W", 0.003L);
    expect("2 GW", 2e6L);
    expect("8760 kWh", 1);
    expect("8.76 MWh", 1);
    expect("8760 Wh", 0.001L);
    expect("0.00876 GWh", 1);
    expect("12 kEUR", 12000);
    expect("1.4 MEUR", 1400000);
    expect("7 EUR", 7);
    expect("14 %", 0.14L);
    expect("14%", 0.14L);
    expect("4 section", 4);
}
END_TEST

START_TEST(compound_literals)
{
    expect("9 EUR/kWh", 9 * 8760.0L);
    expect("40 kEUR/s", 40000 * 31536000.0L);
    expect("3 per 100 km a", 0.03L);
    expect("4 % per a", 0.04L);
    expect("2 kEUR per month", 24000);
    expect("1 in 340 a", 1 / 340.0L);
    expect("1 in 1000", 0.001L);
    expect("2 kW h", 2 / 8760.0L);
    expect("500 m^2", 500e-6L);
    expect("3 km^-1", 3);
    expect("0.25 1/section a", 0.25L);
    expect("0.25 1/h", 2190);
    expect("2.5 EUR/kW h", 21900);
    expect("6 per bay h", 52560);
}
END_TEST

START_TEST(operators)
{
    expect("7 - 2 - 1", 4);
    expect("24 / 4 / 2", 3);
    expect("2 + 3 * 4", 14);
    expect("(2 + 3) * 4", 20);
    expect("1 - 0.25 * 2", 0.5L);
    expect("-3 ^ 2", -9);
    expect("(-3) ^ 2", 9);
    expect("2 ^ 3 ^ 2", 64); /* from left to right */
    expect("2 ^ -1", 0.5L);
    expect("3 km ^ 2", 9); /* a blank: not a unit's power */
    expect("2 * -3", -6);
    expect("3 km / 2 a", 1.5L); /* a blank: a division */
    expect("6 EUR / 3 EUR/h * 8760", 2);
    expect("4 section * (3 per 100 section a)", 0.12L);
}
END_TEST

START_TEST(figure_names)
{
    expect("H-1.frequency", (long double)2.385);
    expect("H-1.frequency@A+B-2", 1.75L);
    expect("H-1.frequency + H-1.frequency@A+B-2", (long double)2.385 + 1.75L);
    expect("2 * v-1.value - 1", 2 * (long double)0.35 - 1);
    expect("mean(median 1 h, error factor 3)", 4.25L);
    expect("2 + mean(median 1 h, error factor 3) * 2", 10.5L);
    expect("B.fails", 0.15);
    expect("D-1.benefit.A+B", 6.5L); /* the name of an alternative */
    expect("D-1.benefit.A+B + B.fails", 6.5L + (long double)0.15);
}
END_TEST

START_TEST(calls_of_functions)
{
    expect("min(3; 2; 5)", 2);
    expect("max(3; 2; 5) + 1", 6);
    expect("min(4)", 4);
    expect("exp(log(7))", 7);
    expect("exp(1)", 2.71828182845904523536L);
    expect("log(10)", 2.30258509299404568402L);
    expect("sqrt(2.25)", 1.5L);
    expect("ratio(3; 4)", 0.75L);
    expect("ratio(0; 0)", 0);
    expect("lookup(0.4 s; 0.1 s -> 5 kEUR; 0.5 s -> 40 kEUR)", 5000);
    expect("lookup(0.05 s; 0.1 s -> 5 kEUR; 0.5 s -> 40 kEUR)", 5000);
    expect("lookup(0.5 s; 0.1 s -> 5 kEUR; 0.5 s -> 40 kEUR)", 40000);
    expect("lookup(3 - 1; 1 -> 10 - 4; 2 -> 7 - 4; 3 -> 9)", 3);
}
END_TEST

/* (1 - 1.05^-5) / 0.05 = 4.32947667063082 (factor tables: (P/A, 5 %, 5)), half a year
 * nearer; broken years by the definition. */
START_TEST(annuities)
{
    long double r = 1.05L;
    expect("annuity(0; 0; 25)", 25);
    expect("annuity(0; 0.25; 7.5)", 7.25L);
    expect("annuity(5 %; 2; 2)", 0);
    expect("annuity(0.25; 0; 1)", 1 / sqrtl(1.25L));
    expect("annuity(0.25; 0.5; 0.7)", 0.2L / powl(1.25L, 0.6L));
    expect("annuity(0.25; 0.5; 2)", 0.5L / powl(1.25L, 0.75L) + 1 / powl(1.25L, 1.5L));
    char error[FORMULA_ERROR];
    long double x;
    ck_assert(formula_evaluate("annuity(5 %; 0; 5)", &world, &x, error));
    ck_assert(fabsl(x - 4.32947667063082L * sqrtl(r)) < 1e-13L);
}
END_TEST

START_TEST(probabilities)
{
    long double r = 0.01, q = 0.002, b = 0.15, s = 0.8;
    expect("probability(certain)", 1);
    expect("probability(absent)", 0);
    expect("probability(not certain)", 0);
    expect("probability(R)", 1 - r);
    expect("probability(not R)", r);
    expect("probability(R and Q)", (1 - r) * (1 - q));
    expect("probability(R or Q)", 1 - r * q);
    expect("probability(R and not R)", 0);
    expect("probability((R and Q) or (R and B))", (1 - r) * (1 - q * b));
    expect("probability(R and Q or B)", 1 - (1 - (1 - r) * (1 - q)) * b);
    expect("probability(not R and Q)", r * (1 - q));
    expect("probability(not (R and Q))", 1 - (1 - r) * (1 - q));
    expect("probability(at-least(2; R; Q; B))", 1 - r * q - r * b - q * b + 2 * r * q * b);
    expect("probability(at-least(3; R; Q; (B or absent)))", (1 - r) * (1 - q) * (1 - b));
    expect("probability(not (sees.late and (R and B)))", 1 - s * (1 - r) * (1 - b));
    expect("2 * probability(R) * 30 %", 0.6L * (1 - r));
}
END_TEST

/* Two states: q / (q + r) (1 - exp(-s)), s = (q + r) t, in the mean less (1 - exp(-s)) / s; and two
 * steps of the same rate, 1 - (1 + x) exp(-x). */
START_TEST(chains)
{
    long double q = 0.02, s = (q + 2) / 2, lost = -expm1l(-s);
    expect("chain(1; from 0; 0.5 a; 0 to 1 at 0.02 1/a; 1 to 0 at 2 1/a)", q / (q + 2) * lost);
    expect("chain(share of 1; from 0; 4380 h; 0 to 1 at 0.02 1/a; 1 to 0 at 2 1/a)",
           q / (q + 2) * (1 - lost / s));
    expect("2 * chain(2; from 0; 1 a; 1 to 2 at (0.25 1/a + 0.5 1/a); 0 to 1 at 0.75 1/a)",
           2 - 2 * 1.75L * expl(-0.75L));
    refuse("chain(1; from 0; 1 a; 0 to 1 in 2 1/a)", "at");
    refuse("chain(40; from 0; 1 a; 0 to 1 at 2 1/a)", "states");
}
END_TEST

static bool find_course(void *ctx, const char *name, struct formula_course *out)
{
    (void)ctx;
    *out = (struct formula_course){
        .rate = 0.1L, .every = 2, .first = 1, .from = -1, .tested = true, .standing = 0.25L};
    return strcmp(name, "R.course") == 0;
}

/* 1 - exp(-0.1 x) behind a test in the middle; Q and a half do not change. */
START_TEST(over_time)
{
    struct formula_world w = world;
    char error[FORMULA_ERROR];
    long double x, part = 1 - (1 - expl(-0.1L)) / 0.1L,
                   late = 1 - (expl(-0.1L) - expl(-0.2L)) / 0.1L;
    w.course = find_course;
    expect("either(0.5; 0.25)", 0.625L);
    expect("course(0.5; 0.1 1/a; 0 1/a; 0; 0 1/a; from -2 a; born 0 a)",
           0.5L + 0.5L * (1 - expl(-(long double)0.1 * 2)));
    expect("course(0; 0 1/a; 0 1/a; 0.125; 0 1/a; from -2 a; first 4 a; every 3 a; born 0 a)",
           0.125L);
    expect("course(0; 0 1/a; 0 1/a; 0.125; 0 1/a; from -2 a; born 0 a; fresh)", 0);
    ck_assert(formula_evaluate("over(0 a; 2 a; R.course)", &w, &x, error));
    ck_assert(fabsl(x - (0.25L + 0.75L * (late + part) / 2)) < 1e-15L);
    ck_assert(formula_evaluate("over(1 a; 2 a; probability(not (R and Q)))", &w, &x, error));
    long double r = 0.25L + 0.75L * part, q = values[4];
    ck_assert(fabsl(x - (r + q - r * q)) < 1e-15L);
    refuse("over(0 a; 1 a; R.course)", "course");
    refuse("over(1 a; 1 a; R.course)", "no time");
}
END_TEST

START_TEST(what_is_refused)
{
    refuse("", "expected");
    refuse("2 +", "expected");
    refuse("(2", "expected )");
    refuse("2 3", "left over");
    refuse("2 furlong", "left over");
    refuse("H-2.risk", "unknown name \"H-2.risk\"");
    refuse("exp(1; 2)", "number of arguments");
    refuse("lookup(1; 2)", "expected -");
    refuse("probability(R and)", "event");
    refuse("probability(Z)", "Z.fails");
    refuse("probability(sees.early)", "sees.early");
    refuse("mean(a", "without an end");
    refuse("1.5 and", "left over");
}
END_TEST

static bool find_all(void *ctx, const char *name, long double *out)
{
    (void)ctx;
    *out = name[0] == 'E' ? 0.5L : 1;
    return true;
}

/* Forty events, half of the combinations each; one more is refused. */
START_TEST(limit_of_events)
{
    const struct formula_world all = {"EUR", counts, 2, NULL, find_all, NULL};
    char formula[1000] = "probability(E1", error[FORMULA_ERROR], next[32];
    long double x;
    for (int i = 2; i <= FORMULA_EVENTS; i++) {
        snprintf(next, sizeof next, " and E%d", i);
        strcat(formula, next);
    }
    size_t n = strlen(formula);
    strcpy(formula + n, ")");
    ck_assert(formula_evaluate(formula, &all, &x, error));
    ck_assert(x == powl(0.5L, FORMULA_EVENTS));
    strcpy(formula + n, " or E41)");
    ck_assert(!formula_evaluate(formula, &all, &x, error));
    ck_assert_ptr_nonnull(strstr(error, "enumerated"));
}
END_TEST

START_TEST(depth_is_bounded)
{
    char formula[4001], error[FORMULA_ERROR];
    long double x;
    memset(formula, '(', 4000);
    formula[4000] = 0;
    ck_assert(!formula_evaluate(formula, &world, &x, error));
    ck_assert_ptr_nonnull(strstr(error, "deep"));
}
END_TEST

int main(void)
{
    Suite *s = suite_create("formula");
    TCase *t = tcase_create("formula");
    tcase_add_test(t, literals);
    tcase_add_test(t, compound_literals);
    tcase_add_test(t, operators);
    tcase_add_test(t, figure_names);
    tcase_add_test(t, calls_of_functions);
    tcase_add_test(t, annuities);
    tcase_add_test(t, probabilities);
    tcase_add_test(t, chains);
    tcase_add_test(t, over_time);
    tcase_add_test(t, what_is_refused);
    tcase_add_test(t, limit_of_events);
    tcase_add_test(t, depth_is_bounded);
    suite_add_tcase(s, t);
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
