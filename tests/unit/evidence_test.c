/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What rates learn from events: exposure over dated stretches, the day of evaluation, how
 * the result reads, and what is refused, with its place. Figures by hand; published ones
 * are in tests/published/evidence.txt. */
#include "evidence_test.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "doc/yaml.h"

struct sheet sheet_of(const char *rate)
{
    struct sheet s = {.arena = arena_new(NULL)};
    loaded_text(&s.l, s.arena, arena_printf(s.arena, HEAD PER "%s}}\n", rate), NULL);
    return s;
}

const struct rate *rate_of(const struct sheet *s)
{
    return model_get(s->l.model, KIND_RATE, "r");
}

/* --- exposure --- */

static const struct exposure_case {
    const char *stretches;
    int year, month, dom;
    double expected; /* section a; days by the calendar */
} exposures[] = {
    {"x: {from: 2026-12-01, amount: 1 section}", 2026, 12, 1, 1.0 / 365},
    {"x: {from: 2026-12-01, to: 2026-12-01, amount: 1 section}", 2027, 6, 30, 1.0 / 365},
    {"x: {from: 2025-01-01, to: 2025-12-31, amount: 8 section}", 2026, 1, 1, 8},
    {"x: {from: 2024-01-01, to: 2024-12-31, amount: 365 section}", 2026, 1, 1, 366},
    {"x: {from: 2025-01-01, amount: 2 section}", 2026, 12, 31, 4},
    /* one after the other, and both at once: they add up */
    {"x: {from: 2025-01-01, to: 2025-12-31, amount: 3 section}, "
     "y: {from: 2026-01-01, to: 2026-12-31, amount: 4 section}",
     2026, 12, 31, 7},
    {"x: {from: 2025-01-01, to: 2025-12-31, amount: 3 section}, "
     "y: {from: 2025-01-01, to: 2025-12-31, amount: 3 section}",
     2026, 12, 31, 6},
};
#define EXPOSURES ((int)(sizeof exposures / sizeof exposures[0]))

START_TEST(exposure_accrues)
{
    const struct exposure_case *c = &exposures[_i];
    struct sheet s = sheet_of("prior: {form: jeffreys}, events: 3, exposure: {x: {from: "
                              "2020-01-01, amount: 1 section}}");
    const char *text = arena_printf(
        s.arena, HEAD PER "prior: {form: jeffreys}, events: 3, exposure: {%s}}}\n", c->stretches);
    double got = NAN;
    struct trend flat = {0};
    const struct quantity *q = NULL;
    day date = date_of(c->year, c->month, c->dom);
    loaded_text(&s.l, s.arena, text, NULL);
    ck_assert_int_eq(posterior_exposure(rate_of(&s), "r", date, &flat, &got, NULL), OHMEN_OK);
    ck_assert_double_eq_tol(got, c->expected, 1e-14 * c->expected);
    ck_assert_int_eq(posterior_rate(s.arena, rate_of(&s), "r", date, &q, NULL), OHMEN_OK);
    ck_assert_double_eq_tol(quantity_mean(q) * c->expected, 3.5, 1e-13);
    arena_free(s.arena);
}
END_TEST

static void refused(const char *stretch, const char *words)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const struct quantity *q = NULL;
    struct arena *scratch = arena_new(NULL);
    struct sheet s = sheet_of(arena_printf(
        scratch, "prior: {mean: 0.1 per section a, weight: 2}, events: 0, exposure: {x: {%s}}",
        stretch));
    ck_assert_int_eq(posterior_rate(s.arena, rate_of(&s), "r", LOADED_DATE, &q, &e), OHMEN_COMPUTE);
    ck_assert_str_eq(e.text, words);
    ck_assert_ptr_null(q);
    figure_id id;
    ck_assert_int_eq(weigh_find(s.l.figures, "r.rate", &id, &e), OHMEN_COMPUTE);
    ck_assert_str_eq(e.text, words);
    arena_free(s.arena);
    arena_free(scratch);
}

START_TEST(exposure_behind_the_day_of_evaluation)
{
    refused("from: 2026-12-02, amount: 1 section",
            "rates/r/exposure/x begins on 2026-12-02, after the day of evaluation, 2026-12-01");
    refused("from: 2020-01-01, to: 2026-12-02, amount: 1 section",
            "rates/r/exposure/x ends on 2026-12-02, after the day of evaluation, 2026-12-01");
}
END_TEST

/* --- texts --- */

#define SEEN                                                                                       \
    "events: 3, exposure: {x: {from: 2024-01-01, to: 2024-12-31, amount: 8 section}, "             \
    "y: {from: 2026-11-30, amount: 2 section}}"

static const struct text_case {
    const char *rate, *text;
    double mean; /* by hand; NAN: not checked here */
} texts[] = {
    {"prior: {mean: 2.5e-3 per section a, weight: 0.5}, " SEEN,
     "gamma prior with mean 2.5e-3 per section a, weight 0.5; 3 events in 8 section for 366 d and "
     "2 section for 2 d",
     3.5 / (200 + (8.0 * 366 + 4) / 365)},
    {"prior: {mean: 2.5e-3 per section a, weight: 0.5}",
     "gamma prior with mean 2.5e-3 per section a, weight 0.5", 2.5e-3},
    {"prior: {form: constrained, mean: 4e-3 per section a}, events: 1, exposure: {x: {from: "
     "2026-01-01, amount: 365 section}}",
     "constrained non-informative prior with mean 4e-3 per section a; 1 event in 365 section for "
     "335 d",
     1.5 / (125 + 335)},
    {"prior: {form: jeffreys}, events: 0, exposure: {x: {from: 2026-01-01, amount: 365 section}}",
     "jeffreys prior; 0 events in 365 section for 335 d", 0.5 / 335},
    {"prior: {form: lognormal, p5: 1e-3 per section a, p95: 9e-3 per section a}",
     "lognormal prior with p5 1e-3 per section a, p95 9e-3 per section a",
     3e-3 * 1.2498844582331567},
    {"prior: {mean: 1e-3 per section a, p99: 1e-2 per section a, solution: upper}",
     "gamma prior with mean 1e-3 per section a, p99 1e-2 per section a, upper solution", 1e-3},
    {"prior: {form: fixed, mean: 4e-3 per section a}", "4e-3 per section a", NAN},
    {"is: 4e-3 per section a", "4e-3 per section a", NAN},
};
#define TEXTS ((int)(sizeof texts / sizeof texts[0]))

START_TEST(how_it_reads)
{
    const struct text_case *c = &texts[_i];
    struct sheet s = sheet_of(c->rate);
    const struct quantity *q = NULL;
    ck_assert_int_eq(posterior_rate(s.arena, rate_of(&s), "r", LOADED_DATE, &q, NULL), OHMEN_OK);
    ck_assert_str_eq(q->text, c->text);
    figure_id id = loaded_find(&s.l, "r.rate");
    loaded_evaluate(&s.l);
    ck_assert_str_eq(figure_at(s.l.figures, id)->text, c->text);
    if (!isnan(c->mean))
        ck_assert_double_eq_tol(figure_value(s.l.figures, id), c->mean, 1e-13 * c->mean);
    else
        ck_assert_double_eq(figure_value(s.l.figures, id), 4e-3);
    arena_free(s.arena);
}
END_TEST

/* --- what is refused --- */

static const struct bad_case {
    const char *rate; /* line 2, behind the 28 columns of PER */
    unsigned column;
    const char *words;
    unsigned line; /* 0: 2 */
} bad[] = {
    {"prior: {form: jeffreys}, events: 3", 62, "events need \"exposure\""},
    {"prior: {form: jeffreys}, exposure: {x: {from: 2020-01-01, amount: 1 section}}", 64,
     "exposure needs \"events\""},
    {"prior: {mean: 1 per section a, weight: 1}, exposure: {x: {from: 2020-01-01, amount: 1 "
     "section}}",
     82, "exposure needs \"events\""},
    {"is: 1 per section a, events: 3", 58, "events and exposure go with a prior"},
    {"prior: {form: jeffreys}", 36, "a Jeffreys prior says nothing by itself"},
    {"prior: {form: fixed, mean: 1 per section a}, events: 0, exposure: {x: {from: 2020-01-01, "
     "amount: 1 section}}",
     82, "a fixed rate learns nothing"},
    {"prior: {mean: 1 per section a, error-factor: 1.01}", 74, "too small for a gamma"},
    {"prior: {mean: 1 per section a, error-factor: 1}", 74, "greater than 1"},
    {"prior: {mean: 1 per section a, p95: 2 per section a}", 65,
     "of the shapes 0.0185 and 3.56: say \"solution: lower\""},
    {"prior: {mean: 1 per section a, p95: 9 per section a}", 65, "no gamma distribution has this"},
    {"prior: {mean: 1 per section a, p50: 2 per section a}", 65, "no gamma distribution has this"},
    {"prior: {mean: 1 per section a, p50: 0.5 per section a, solution: upper}", 94,
     "leave out \"solution\""},
    {"prior: {mean: 1 per section a, weight: 1, solution: upper}", 81,
     "goes with a mean and one percentile"},
    {"prior: {p5: 2 per section a, p95: 2 per section a}", 63, "\"p95\" must lie above \"p5\""},
    {"prior: {p5: 2 per section a, p95: 2.001 per section a}", 63, "so near each other"},
    {"prior: {mean: 1 per section a}", 36, "found mean"},
    {"prior: {weight: 1}", 36, "found weight"},
    {"prior: {source: S}", 36, "found nothing"},
    {"prior: {mean: 1 per section a, weight: 1, error-factor: 3}", 36,
     "found mean, weight, error-factor"},
    {"prior: {mean: 1 per section a, median: 1 per section a, weight: 1}", 36,
     "found mean, weight, median"},
    {"prior: {p5: 1 per section a, p50: 2 per section a, p95: 4 per section a}", 36,
     "found p5, p50, p95"},
    {"prior: {form: jeffreys, mean: 1 per section a}, events: 1, exposure: {x: {from: "
     "2020-01-01, amount: 1 section}}",
     36, "of the form jeffreys takes no other keys; found mean"},
    {"prior: {form: lognormal, mean: 1 per section a, weight: 1}", 36,
     "of the form lognormal takes median and error-factor"},
    {"prior: {form: constrained, mean: 1 per section a, weight: 1}", 36, "takes mean alone"},
    {"is: 1 per section a, ageing: 2", 58, "ageing needs \"since\""},
    {"is: 1 per section a, ageing: 101, since: 2001-01-01", 58, "is at most 100"},
    {"is: 1 per section a, growth: -91 % per a", 58, "growth lies between"},
    {"is: 1 per section a, growth: 9.1 per a", 58, "growth lies between"},
    {"prior: {form: jeffreys}, ageing: 2, since: 2020-01-02, events: 1, exposure: {x: {from: "
     "2020-01-01, amount: 1 section}}",
     116, "begins before what ages was there (\"since\" is 2020-01-02)"},
    {"is: 1 per section a, kinds: {earth: 3}", 57, "two kinds of fault or more, found 1"},
    {"is: 1 per section a, kinds: {}", 57, "two kinds of fault or more, found 0"},
    {"is: 1 per section a, kinds-prior: uniform", 63, "goes with counts of \"kinds\""},
    {"is: 1 per section a * share(r; earth), kinds: {earth: 3, other: 4}", 51,
     "\"r\" is defined by itself: r -> r"},
    {"is: 1 per section a * share(q; earth)", 51, "there is no \"q\"; expected a rate"},
    {"is: 1 per section a}, q: {per: a, is: share(r; earth) * 1 per a", 67,
     "the rate \"r\" counts no kind of fault \"earth\""},
    {"is: 1 per section a, kinds: {earth: 3, other: 4}}, q: {per: a, is: share(r; erth) * 1 per a",
     96, "the rate \"r\" counts no kind of fault \"erth\" (did you mean \"earth\"?)"},
    {"is: 1 per section a, kinds: {earth: 3, other: 4}}, q: {per: a, is: share(r; earth) * 1 a", 96,
     "expected 1 / time, found time"},
    {"is: 1 per section a, kinds: {earth: 3, other: 4, x: 0}}}\noptions: {O: {name: O, change: "
     "{rates: {r: {kinds: {earth: no}}}}",
     57, "a change cannot take the kind \"earth\""},
    {"is: 1 per section a, kinds: {earth: 3, other: 4}}}\nstates: {Z: {is: {sound: share(r; "
     "earth), aged: rest}",
     26, "a name in it is uncertain", 3},
};
#define BAD ((int)(sizeof bad / sizeof bad[0]))

START_TEST(refused_with_its_place)
{
    const struct bad_case *c = &bad[_i];
    struct arena *a = arena_new(NULL);
    struct diags d;
    struct model_sources none = {0}, all = {0};
    const char *text = arena_printf(a, HEAD PER "%s}}\nsources: {S: {title: S}}\n", c->rate);
    diags_init(&d, a);
    const struct node *root = yaml_read(a, "x.yaml", text, strlen(text), &d);
    ck_assert(root && documents_merge(a, &none, 1, &root, &all, &d));
    ck_assert_ptr_null(model_load(a, all.at, all.n, &d));
    diags_sort(&d);
    const char *line = diag_line(a, &d.list.at[0]);
    ck_assert_msg(d.count == 1, "%s and %zu more", line, d.count - 1);
    ck_assert_msg(strstr(line, c->words) != NULL, "%s", line);
    const struct place *at = &d.list.at[0].place;
    ck_assert_msg(at->line == (c->line ? c->line : 2) && at->column == c->column, "%s: %s", line,
                  c->rate);
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("evidence");
    TCase *t = tcase_create("evidence");
    tcase_add_loop_test(t, exposure_accrues, 0, EXPOSURES);
    tcase_add_test(t, exposure_behind_the_day_of_evaluation);
    tcase_add_loop_test(t, how_it_reads, 0, TEXTS);
    tcase_add_loop_test(t, refused_with_its_place, 0, BAD);
    suite_add_tcase(s, t);
    suite_add_tcase(s, case_trend());
    suite_add_tcase(s, case_share());
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    int failed = srunner_ntests_failed(sr) != 0 || srunner_ntests_run(sr) == 0;
    srunner_free(sr);
    return failed ? EXIT_FAILURE : EXIT_SUCCESS;
}
