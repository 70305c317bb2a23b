/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Growth and ageing: means against an integration of another kind (double exponential rule
 * in long double), closed cases by hand, renewal, and exposure that is weighted by them. */
#include <float.h>
#include <math.h>
#include <string.h>

#include "evidence_test.h"

/* --- integration --- */

/* exp(k t) (u/r)^(b - 1) over ages u from u0 on, t counted from age 0 less `age`. */
struct power_law {
    long double k, power, age, reference, u0;
};

static long double power_law_at(const struct power_law *c, long double beyond)
{
    long double u = c->u0 + beyond;
    long double aged = c->power == 0 ? 1 : powl(u / c->reference, c->power);
    return expl(c->k * (u - c->age)) * aged;
}

/* Over u0 .. u0 + h. Takahasi and Mori's rule: points and weights fall off so fast towards
 * both ends that a singular end does not matter; distances from the left end keep digits. */
static long double integral(const struct power_law *c, long double h)
{
    const long double half_pi = 1.57079632679489661923132169163975L, step = 1 / 64.0L;
    long double sum = 0;
    for (int i = -448; i <= 448; i++) {
        long double s = step * i, q = expl(-2 * half_pi * sinhl(s));
        long double part = 1 / (1 + q), weight = half_pi * coshl(s) * 2 * q / (1 + q) / (1 + q);
        sum += weight * power_law_at(c, h * part);
    }
    return sum * step * h;
}

static long double expected_mean(const struct trend *t, double from, double to)
{
    long double age = t->ages ? t->age : 0;
    struct power_law c = {.k = log1pl(t->growth),
                          .power = t->ages ? (long double)t->exponent - 1 : 0,
                          .age = age,
                          .reference = t->ages ? t->reference : 1,
                          .u0 = (long double)from + age};
    long double h = (long double)to - (long double)from;
    return integral(&c, h) / h;
}

static void check_mean(const struct trend *t, double from, double to)
{
    double got = trend_mean(t, from, to);
    long double expected = expected_mean(t, from, to);
    if (expected > DBL_MAX || expected < 1e-290L) { /* what has no double with all its digits */
        ck_assert(expected > 1 ? isinf(got) : got >= 0 && got < 1.1e-290);
        return;
    }
    ck_assert_msg(fabsl(got / expected - 1) < 1e-12L,
                  "growth %g, exponent %g, age %g, %.17g .. %.17g: expected %.17Lg, got %.17g, "
                  "relative %.3Lg",
                  t->growth, t->ages ? t->exponent : NAN, t->age, from, to, expected, got,
                  got / expected - 1);
}

/* --- means --- */

static const double growths[] = {-0.9, -0.31, -0.02385, -1e-9, 0, 1e-15, 3e-7, 0.02385, 0.82, 9};
static const double exponents[] = {0.05,      0.5, 0.999999, 0.9999999999, 1, 1.001,
                                   1.0000001, 1.8, 2.385,    7.3,          40};
static const double lengths[] = {1.0 / 365, 0.31, 12.4, 203.7};
#define COUNT(list) (sizeof(list) / sizeof(list)[0])

START_TEST(growth_alone)
{
    for (size_t g = 0; g < COUNT(growths); g++)
        for (size_t i = 0; i < COUNT(lengths); i++) {
            struct trend t = {.growth = growths[g]};
            check_mean(&t, 0, lengths[i]);
            check_mean(&t, -lengths[i], 0);
            check_mean(&t, -40.3, -40.3 + lengths[i]);
            check_mean(&t, -1e-9, 1e-9);
        }
}
END_TEST

/* From the first day on, from shortly after it, and over the day of evaluation. */
static void check_ages(const struct trend *t)
{
    for (size_t i = 0; i < COUNT(lengths); i++) {
        check_mean(t, -t->age, -t->age + lengths[i]);
        check_mean(t, -t->age + 1.0 / 365, -t->age + 1.0 / 365 + lengths[i]);
        check_mean(t, -t->age * 0.75, -t->age * 0.75 + lengths[i]);
        check_mean(t, -t->age / 8, lengths[i]);
        check_mean(t, 1.7, 1.7 + lengths[i]);
    }
}

START_TEST(ageing_with_and_without_growth)
{
    static const double ages[] = {1.0 / 365, 3.72, 52.31};
    for (size_t g = 0; g < COUNT(growths); g++)
        for (size_t b = 0; b < COUNT(exponents); b++)
            for (size_t i = 0; i < COUNT(ages); i++) {
                struct trend t = {growths[g], true, exponents[b], ages[i], ages[i]};
                check_ages(&t);
            }
}
END_TEST

START_TEST(steepest_ageing)
{
    for (size_t g = 0; g < COUNT(growths); g++) {
        struct trend t = {growths[g], true, 100, 52.31, 52.31};
        check_ages(&t);
    }
}
END_TEST

/* What leaves the range of a double. */
START_TEST(beyond_numbers)
{
    struct trend t = {-0.9, true, 100, 1.0 / 365, 1.0 / 365};
    ck_assert(isinf(trend_mean(&t, 0, 12.4)));
    struct trend aged = {0, true, 100, 1.0 / 365, 1.0 / 365};
    ck_assert(isinf(trend_mean(&aged, 0, 12.4)));
    struct trend grown = {.growth = 9};
    ck_assert(isinf(trend_mean(&grown, 0, 400)) && trend_mean(&grown, -400, -399) == 0);
}
END_TEST

START_TEST(means_by_hand)
{
    struct trend flat = {0}, aged_1 = {0, true, 1, 3.7, 3.7};
    struct trend linear = {0, true, 2, 8, 8}, square = {0, true, 3, 2, 2};
    struct trend root = {0, true, 0.5, 4, 4}, doubling = {.growth = 1};
    ck_assert(trend_is_flat(&flat) && trend_is_flat(&aged_1) && !trend_is_flat(&linear));
    ck_assert(!trend_is_flat(&doubling));
    ck_assert(trend_mean(&flat, -3.1, 2.7) == 1 && trend_mean(&aged_1, -3.7, 2.7) == 1);
    /* age from 2 to 5, mean 3.5, beside 8 */
    ck_assert_double_eq_tol(trend_mean(&linear, -6, -3), 3.5 / 8, 1e-15);
    /* (u/2)^2 over 0 .. 6: 36/3/4 */
    ck_assert_double_eq_tol(trend_mean(&square, -2, 4), 3, 1e-14);
    /* (u/4)^(-1/2) over 0 .. 9: 2 x 2 x 3 / 9 */
    ck_assert_double_eq_tol(trend_mean(&root, -4, 5), 4.0 / 3, 1e-14);
    /* 2^t over 0 .. 1: 1/ln 2; over -1 .. 2: 3.5 / (3 ln 2) */
    ck_assert_double_eq_tol(trend_mean(&doubling, 0, 1), 1 / M_LN2, 1e-15);
    ck_assert_double_eq_tol(trend_mean(&doubling, -1, 2), 3.5 / 3 / M_LN2, 1e-15);
    /* 2^t (u/1), u = t + 1, over t = -1 .. 0: integral of u 2^u / 2 over 0 .. 1,
     * [u 2^u/l - 2^u/l^2] / 2 with l = ln 2 */
    struct trend both = {1, true, 2, 1, 1};
    ck_assert_double_eq_tol(trend_mean(&both, -1, 0), (2 / M_LN2 - 1 / (M_LN2 * M_LN2)) / 2, 1e-14);
}
END_TEST

/* --- renewal --- */

START_TEST(renewal_by_hand)
{
    struct trend old = {0, true, 2, 20, 20}, fresh = trend_renewed(&old, 5);
    ck_assert_double_eq_tol(trend_mean(&old, 0, 5), 22.5 / 20, 1e-14);
    ck_assert_double_eq_tol(trend_mean(&fresh, 5, 15), 5.0 / 20, 1e-14);
    ck_assert_double_eq_tol(trend_mean(&fresh, 25, 25.5), 20.25 / 20, 1e-14);
    /* at once: by now it ages as the old one did from its own begin */
    struct trend now = trend_renewed(&old, 0);
    ck_assert_double_eq_tol(trend_mean(&now, 0, 7), trend_mean(&old, -20, -13), 1e-15);
    /* growth goes on, from the day of evaluation */
    struct trend growing = trend_renewed(&(struct trend){1, true, 1, 20, 20}, 3);
    ck_assert_double_eq_tol(trend_mean(&growing, 3, 4), 8 / M_LN2, 1e-13);
    struct trend ageless = trend_renewed(&(struct trend){.growth = 1}, 3);
    ck_assert_double_eq_tol(trend_mean(&ageless, 3, 4), 8 / M_LN2, 1e-13);
    ck_assert(!trend_is_before(&ageless, -1e9));
}
END_TEST

START_TEST(renewal_against_integration)
{
    for (size_t g = 0; g < COUNT(growths); g++)
        for (size_t b = 0; b < COUNT(exponents); b++)
            for (size_t i = 0; i < COUNT(lengths); i++) {
                struct trend old = {growths[g], true, exponents[b], 31.7, 31.7};
                struct trend t = trend_renewed(&old, 2.5);
                check_mean(&t, 2.5, 2.5 + lengths[i]);
                check_mean(&t, 2.5 + lengths[i], 2.5 + 2 * lengths[i]);
            }
}
END_TEST

/* A sum that rounds to a little below 0 is age 0. */
START_TEST(age_0_survives_rounding)
{
    struct trend old = {0.02, true, 0.05, 12, 12}, t = trend_renewed(&old, 0.1 + 0.2);
    ck_assert(0.3 + t.age < 0);
    ck_assert(!trend_is_before(&t, 0.3) && trend_is_before(&t, 0.2999));
    double exact = trend_mean(&t, 0.1 + 0.2, 4.5);
    ck_assert_double_eq_tol(trend_mean(&t, 0.3, 4.5), exact, 1e-12 * exact);
}
END_TEST

/* --- trends of rates --- */

#define SEEN                                                                                       \
    "prior: {mean: 2.5e-3 per section a, weight: 0.5}, events: 3, exposure: {x: {from: "           \
    "2024-01-01, to: 2024-12-31, amount: 8 section}, y: {from: 2026-11-30, amount: 2 section}}"

START_TEST(trend_of_a_rate)
{
    struct sheet s = sheet_of("is: 0.1 per section a, growth: -2 % per a, ageing: 1.8, since: "
                              "2016-12-03");
    struct trend t = {0};
    ck_assert_int_eq(trend_of(rate_of(&s), "r", LOADED_DATE, &t, NULL), OHMEN_OK);
    ck_assert(t.growth == -0.02 && t.ages && t.exponent == 1.8);
    ck_assert(t.age == 3650.0 / 365 && t.reference == t.age); /* two leap days between */
    arena_free(s.arena);
}
END_TEST

START_TEST(trend_of_a_rate_without)
{
    struct sheet s = sheet_of("is: 0.1 per section a, since: 2040-12-03");
    struct trend t = {.growth = 7};
    ck_assert_int_eq(trend_of(rate_of(&s), "r", LOADED_DATE, &t, NULL), OHMEN_OK);
    ck_assert(trend_is_flat(&t) && !t.ages);
    arena_free(s.arena);
}
END_TEST

static void no_age(const char *since, const char *words)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *scratch = arena_new(NULL);
    struct sheet s =
        sheet_of(arena_printf(scratch,
                              "prior: {form: jeffreys}, events: 3, ageing: 2, since: %s, exposure: "
                              "{x: {from: 2026-12-24, amount: 1 section}}",
                              since));
    struct trend t = {.growth = 7};
    const struct quantity *q = NULL;
    ck_assert_int_eq(trend_of(rate_of(&s), "r", LOADED_DATE, &t, &e), OHMEN_COMPUTE);
    ck_assert_str_eq(e.text, words);
    ck_assert(t.growth == 7);
    ck_assert_int_eq(posterior_rate(s.arena, rate_of(&s), "r", LOADED_DATE, &q, &e), OHMEN_COMPUTE);
    ck_assert_ptr_null(q);
    arena_free(s.arena);
    arena_free(scratch);
}

START_TEST(nothing_that_has_an_age)
{
    no_age("2026-12-01",
           "rates/r ages since 2026-12-01, which is not before the day of evaluation, 2026-12-01");
    no_age("2026-12-24",
           "rates/r ages since 2026-12-24, which is not before the day of evaluation, 2026-12-01");
}
END_TEST

/* --- exposure --- */

static const struct weighted_case {
    const char *keys, *text; /* text: what follows the stretches */
    double growth, exponent; /* exponent 0: no ageing */
} weighted_cases[] = {
    {"growth: 2.385 % per a, ", "growth 2.385 % per a", 0.02385, 0},
    {"ageing: 1.8, since: 2001-05-01, ", "ageing 1.8 since 2001-05-01", 0, 1.8},
    {"ageing: 0.37, growth: -9 % per a, since: 2001-05-01, ",
     "growth -9 % per a and ageing 0.37 since 2001-05-01", -0.09, 0.37},
    {"ageing: 1, growth: 0.5 per a, since: 2001-05-01, ", "growth 0.5 per a", 0.5, 0},
};

static long double expected_exposure(const struct weighted_case *c)
{
    const day date = LOADED_DATE;
    const long double age = (date - date_of(2001, 5, 1)) / 365.0L;
    const struct {
        long double amount;
        day from, to;
    } x[] = {{8, date_of(2024, 1, 1), date_of(2025, 1, 1)}, {2, date_of(2026, 11, 30), date + 1}};
    long double sum = 0;
    for (int i = 0; i < 2; i++) {
        struct power_law at = {.k = log1pl(c->growth),
                               .power = c->exponent > 0 ? c->exponent - 1 : 0,
                               .age = age,
                               .reference = age,
                               .u0 = (x[i].from - date) / 365.0L + age};
        sum += x[i].amount * integral(&at, (x[i].to - x[i].from) / 365.0L);
    }
    return sum;
}

START_TEST(exposure_is_weighted)
{
    const struct weighted_case *c = &weighted_cases[_i];
    struct arena *scratch = arena_new(NULL);
    struct sheet s = sheet_of(arena_printf(scratch, "%s%s", c->keys, SEEN));
    const struct quantity *q = NULL;
    struct trend t;
    double got = NAN;
    long double expected = expected_exposure(c);
    ck_assert_int_eq(trend_of(rate_of(&s), "r", LOADED_DATE, &t, NULL), OHMEN_OK);
    ck_assert_int_eq(posterior_exposure(rate_of(&s), "r", LOADED_DATE, &t, &got, NULL), OHMEN_OK);
    ck_assert_msg(fabsl(got / expected - 1) < 1e-12L, "%.17g, %.17Lg", got, expected);
    ck_assert_int_eq(posterior_rate(s.arena, rate_of(&s), "r", LOADED_DATE, &q, NULL), OHMEN_OK);
    ck_assert_double_eq_tol(quantity_mean(q) * (double)(200 + expected), 3.5, 1e-12);
    ck_assert_str_eq(q->text,
                     arena_printf(scratch,
                                  "gamma prior with mean 2.5e-3 per section a, weight 0.5; 3 "
                                  "events in 8 section for 366 d from 2024-01-01 and 2 section for "
                                  "2 d from 2026-11-30, weighted by %s for 2026-12-01",
                                  c->text));
    arena_free(s.arena);
    arena_free(scratch);
}
END_TEST

/* Without events, or stated as it is, a rate is what it is on the day of evaluation. */
START_TEST(nothing_to_weigh)
{
    static const char *const rates[] = {"is: 2.5e-3 per section a",
                                        "prior: {mean: 2.5e-3 per section a, weight: 0.5}"};
    for (int i = 0; i < 2; i++) {
        struct arena *scratch = arena_new(NULL);
        struct sheet plain = sheet_of(rates[i]);
        struct sheet s = sheet_of(arena_printf(
            scratch, "growth: 3 %% per a, ageing: 2, since: 2040-01-01, %s", rates[i]));
        const struct quantity *p = NULL, *q = NULL;
        ck_assert_int_eq(posterior_rate(s.arena, rate_of(&plain), "r", LOADED_DATE, &p, NULL),
                         OHMEN_OK);
        ck_assert_int_eq(posterior_rate(s.arena, rate_of(&s), "r", LOADED_DATE, &q, NULL),
                         OHMEN_OK);
        ck_assert_str_eq(p->text, q->text);
        arena_free(s.arena);
        arena_free(plain.arena);
        arena_free(scratch);
    }
}
END_TEST

/* An option renews what ages: the evidence is of the old one. */
START_TEST(evidence_of_a_renewed_rate)
{
    struct sheet old = sheet_of("ageing: 1.8, since: 2001-05-01, " SEEN);
    struct sheet s = {.arena = arena_new(NULL)};
    loaded_text(&s.l, s.arena,
                HEAD PER "ageing: 1.8, since: 2001-05-01, " SEEN "}}\n"
                         "options: {O: {name: O, change: {rates: {r: {since: 2029-01-01}}}}}\n",
                NULL);
    const char *option = "O";
    const struct variant *v = loaded_variant(&s.l, 1, &option);
    const struct rate *renewed = model_get(v->model, KIND_RATE, "r");
    const struct quantity *p = NULL, *q = NULL;
    ohmen_error e = OHMEN_ERROR_INIT, later = OHMEN_ERROR_INIT;
    ck_assert_int_eq(posterior_rate(s.arena, rate_of(&old), "r", LOADED_DATE, &p, NULL), OHMEN_OK);
    ck_assert_int_eq(
        posterior_rate_trended(s.arena, renewed, rate_of(&s), "r", LOADED_DATE, &q, NULL),
        OHMEN_OK);
    ck_assert_str_eq(p->text, q->text);
    ck_assert_double_eq(quantity_mean(p), quantity_mean(q));
    loaded_compile(&s.l, v, "r");
    ck_assert_double_eq(loaded_value(&s.l, "r.rate@O"), quantity_mean(p));
    /* by its own trend it has no age yet; renewed before the day, its exposure came before */
    ck_assert_int_eq(posterior_rate(s.arena, renewed, "r", LOADED_DATE, &q, &e), OHMEN_COMPUTE);
    ck_assert_int_eq(posterior_rate(s.arena, renewed, "r", date_of(2030, 1, 1), &q, &later),
                     OHMEN_COMPUTE);
    ck_assert_str_eq(later.text,
                     "rates/r/exposure/x begins on 2024-01-01, before what ages was there");
    arena_free(s.arena);
    arena_free(old.arena);
}
END_TEST

START_TEST(exposure_that_is_no_number)
{
    struct sheet s = sheet_of("growth: -90 % per a, prior: {form: jeffreys}, events: 3, exposure: "
                              "{x: {from: 1600-01-01, amount: 1 section}}");
    const struct quantity *q = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(posterior_rate(s.arena, rate_of(&s), "r", LOADED_DATE, &q, &e), OHMEN_COMPUTE);
    ck_assert_str_eq(e.text, "rates/r: growth and ageing make its exposure too large for a number: "
                             "look at \"growth\", \"ageing\" and the days of the stretches");
    arena_free(s.arena);
}
END_TEST

TCase *case_trend(void)
{
    TCase *t = tcase_create("trend");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, growth_alone);
    tcase_add_test(t, ageing_with_and_without_growth);
    tcase_add_test(t, steepest_ageing);
    tcase_add_test(t, beyond_numbers);
    tcase_add_test(t, means_by_hand);
    tcase_add_test(t, renewal_by_hand);
    tcase_add_test(t, renewal_against_integration);
    tcase_add_test(t, age_0_survives_rounding);
    tcase_add_test(t, trend_of_a_rate);
    tcase_add_test(t, trend_of_a_rate_without);
    tcase_add_test(t, nothing_that_has_an_age);
    tcase_add_loop_test(t, exposure_is_weighted, 0, (int)COUNT(weighted_cases));
    tcase_add_test(t, nothing_to_weigh);
    tcase_add_test(t, evidence_of_a_renewed_rate);
    tcase_add_test(t, exposure_that_is_no_number);
    return t;
}
