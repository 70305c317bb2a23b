/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Growth, ageing and shares of kinds of fault: published values, entered as documents
 * (evidence_trends.txt, which explains its rows, named on the command line). */
#include <check.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "evidence/posterior.h"
#include "loaded.h"
#include "rows.h"

static const char *data_file;

enum { HOURS = 8760, DAYS = 365 /* of a year */ };

static const struct rate *load(struct loaded *l, struct arena *a, const char *keys)
{
    loaded_text(l, a,
                arena_printf(a,
                             "register: {title: Published, currency: EUR, prices: 2026, horizon: "
                             "1 a, discount: 0 per a}\nrates: {r: {per: h, %s}}\n",
                             keys),
                NULL);
    return model_get(l->model, KIND_RATE, "r");
}

static double mean_of_rate(struct arena *a, const struct rate *r)
{
    const struct quantity *q = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_msg(posterior_rate(a, r, "r", LOADED_DATE, &q, &e) == OHMEN_OK, "%s", e.text);
    return quantity_mean(q) / HOURS;
}

static double mean_over(const struct rate *r, double from, double to)
{
    struct trend t;
    ck_assert_int_eq(trend_of(r, "r", LOADED_DATE, &t, NULL), OHMEN_OK);
    return trend_mean(&t, from / DAYS, to / DAYS);
}

static size_t kind_named_so(const struct rate *r, const char *name)
{
    for (size_t i = 0; i < r->kinds_of_fault.n; i++)
        if (strcmp(r->kinds_of_fault.keys[i], name) == 0)
            return i;
    ck_abort_msg("no kind %s", name);
    return 0;
}

/* "one mean", "one 0.95" */
static double share(struct arena *a, const struct rate *r, const char *what)
{
    char kind[20], which[20];
    double p, x = NAN;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(sscanf(what, "%19s %19s", kind, which), 2);
    const struct quantity *q = posterior_share(a, r, kind_named_so(r, kind));
    if (strcmp(which, "mean") == 0)
        return quantity_mean(q);
    ck_assert_int_eq(sscanf(which, "%lf", &p), 1);
    ck_assert_msg(quantity_quantile(q, p, &x, &e) == OHMEN_OK, "%s", e.text);
    return x;
}

static double figure(char *inputs)
{
    char *what = strrchr(inputs, ';');
    struct arena *a = arena_new(NULL);
    struct loaded l;
    double from, to, x;
    ck_assert_ptr_nonnull(what);
    *what++ = 0;
    what += strspn(what, " ");
    const struct rate *r = load(&l, a, inputs);
    if (sscanf(what, "mean over %lf .. %lf", &from, &to) == 2)
        x = mean_over(r, from, to);
    else if (strncmp(what, "mean", 4) == 0)
        x = mean_of_rate(a, r);
    else if (strncmp(what, "1 - ", 4) == 0)
        x = 1 - share(a, r, what + 4);
    else
        x = share(a, r, what);
    arena_free(a);
    return x;
}

START_TEST(published_values)
{
    ck_assert_int_eq(rows_check(data_file, figure), 8);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2)
        return 1;
    data_file = argv[1];
    Suite *s = suite_create("evidence trends");
    TCase *t = tcase_create("evidence trends");
    tcase_add_test(t, published_values);
    suite_add_tcase(s, t);
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    int failed = srunner_ntests_failed(sr) != 0 || srunner_ntests_run(sr) == 0;
    srunner_free(sr);
    return failed;
}
