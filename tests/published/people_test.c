/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Harm to people against a published example and calculations by hand, entered as registers
 * (people.txt, which explains its rows, and the folder of the documents on the command line). */
#include <check.h>
#include <stdio.h>

#include "loaded.h"
#include "named.h"
#include "rows.h"

static const char *data_file, *documents;

static double figure(char *inputs)
{
    return named_figure(documents, inputs);
}

START_TEST(published_harm)
{
    ck_assert_int_eq(rows_check(data_file, figure), 34);
}
END_TEST

/* Per year: HSE, Reducing risks, protecting people, 2001 (second hand). */
static const double ACCEPTABLE = 1e-6, INTOLERABLE_WORKERS = 1e-3, INTOLERABLE_PUBLIC = 1e-4;

/* The limits as the register holds them, and where the individual risk lies between them. */
static void expect_between(const char *limits, const char *group, double intolerable,
                           bool acceptable)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *const files[] = {limits, "harm"};
    named_load(&l, a, documents, 2, files, NULL);
    const struct people_criteria *c = l.model->settings->criteria->people;
    double risk = loaded_value(&l, arena_printf(a, "%s.individual-risk", group));
    ck_assert_double_eq(expr_constant(c->acceptable_below->expr), ACCEPTABLE);
    ck_assert_double_eq(expr_constant(c->intolerable_above->expr), intolerable);
    ck_assert_double_lt(risk, intolerable);
    ck_assert_int_eq(risk < ACCEPTABLE, acceptable);
    arena_free(a);
}

START_TEST(limits_of_individual_risk)
{
    expect_between("workers", "CREW", INTOLERABLE_WORKERS, false);
    expect_between("public", "PASSERS-BY", INTOLERABLE_PUBLIC, true);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 3) {
        fprintf(stderr, "usage: %s people.txt people\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    documents = argv[2];
    Suite *s = suite_create("published harm");
    TCase *t = tcase_create("people");
    tcase_add_test(t, published_harm);
    tcase_add_test(t, limits_of_individual_risk);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
