/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Limits, test intervals and voting against published values, entered as registers
 * (protection_registers.txt, which explains its rows, and the folder of the documents on the
 * command line). */
#include <check.h>
#include <math.h>
#include <stdio.h>

#include "figure/importance.h"
#include "loaded.h"
#include "named.h"
#include "rows.h"

static const char *data_file, *documents;

static double figure(char *inputs)
{
    return named_figure(documents, inputs);
}

START_TEST(published_registers)
{
    ck_assert_int_eq(rows_check(data_file, figure), 33);
}
END_TEST

static void load(struct loaded *l, struct arena *a, const char *file)
{
    named_load(l, a, documents, 1, &file, NULL);
}

/* At the textbook's interval the relay fails less than with tests a quarter more often or more
 * seldom; and as the textbook's U(T*) = sqrt(2 t u) up to terms of the second order. */
static void expect_least(const char *file, double undetected, double outage)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load(&l, a, file);
    double best = loaded_value(&l, "RELAY.fails"), textbook = sqrt(2 * outage * undetected);
    ck_assert_double_lt(best, loaded_value(&l, "RELAY.fails@OFTEN"));
    ck_assert_double_lt(best, loaded_value(&l, "RELAY.fails@SELDOM"));
    ck_assert_double_le(fabs(best - textbook), textbook * textbook);
    arena_free(a);
}

START_TEST(least_at_the_best_interval)
{
    const double outage = 4.0 / 8760; /* in a */
    expect_least("interval-0", 0.01, outage);
    expect_least("interval-80", 0.002, outage);
    expect_least("interval-95", 0.0005, outage);
}
END_TEST

/* Voting as it is printed: the leading term, which is the sum over minimal cut sets. */
static void expect_leading(struct loaded *l, const char *scheme, size_t sets, double printed)
{
    struct cut_sets cuts;
    double sum = 0;
    const struct compiled *u = loaded_compile(l, loaded_variant(l, 0, NULL), scheme);
    loaded_evaluate(l);
    cut_sets_of_scheme(l->figures, l->arena, u, SIZE_MAX, &cuts);
    ck_assert_uint_eq(cuts.n, sets);
    for (size_t i = 0; i < cuts.n; i++)
        sum += cuts.at[i].probability;
    ck_assert_double_eq_tol(sum, printed, 1e-13 * printed);
}

START_TEST(leading_terms_of_voting)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    load(&l, a, "voting");
    expect_leading(&l, "ONE-OF-TWO", 1, .0004);
    expect_leading(&l, "TWO-OF-TWO", 2, .04);
    expect_leading(&l, "TWO-OF-THREE", 3, .0012);
    expect_leading(&l, "QUIET-ONE-OF-TWO", 2, .08);
    expect_leading(&l, "QUIET-TWO-OF-TWO", 1, .0016);
    expect_leading(&l, "QUIET-TWO-OF-THREE", 3, .0048);
    arena_free(a);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 3) {
        fprintf(stderr, "usage: %s protection_registers.txt protection\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    documents = argv[2];
    Suite *s = suite_create("published protection by registers");
    TCase *t = tcase_create("protection by registers");
    tcase_add_test(t, published_registers);
    tcase_add_test(t, least_at_the_best_interval);
    tcase_add_test(t, leading_terms_of_voting);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
