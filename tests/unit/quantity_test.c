/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the suites of the quantity layer. A run without a test is a failure. */
#include "quantity_test.h"

#include <stdbool.h>
#include <stdlib.h>

const struct units test_units = {"EUR", {"section", "bay", "feeder-bay"}, 3};
const struct place test_place = {"t.yaml", 1, 1, NULL};

static bool named(const char *name, struct dim *out)
{
    if (text_equal(name, "bus-load"))
        *out = dim_power;
    else if (text_equal(name, "rate"))
        *out = dim_frequency;
    else if (text_equal(name, "money"))
        *out = dim_money;
    else if (text_equal(name, "x") || text_equal(name, "y"))
        *out = dim_number;
    else
        return false;
    return true;
}

bool test_dim(void *ctx, const struct expr *e, struct place at, struct dim *out)
{
    struct diags *d = ctx;
    switch (e->op) {
    case EXPR_NAME:
        if (named(e->name, out))
            return true;
        diag_add(d, at, "nothing is called '%s'", e->name);
        return false;
    case EXPR_CLEARANCE:
        *out = dim_time;
        return true;
    case EXPR_UNWANTED:
    case EXPR_FREQUENCY:
        *out = dim_frequency;
        return true;
    default:
        *out = dim_number;
        return true;
    }
}

void one_diagnostic(const struct diags *d, unsigned column, const char *text, const char *about)
{
    ck_assert_msg(d->count == 1, "%zu diagnostics instead of one about: %s (%s)", d->count, about,
                  d->count ? d->list.at[0].text : "none");
    ck_assert_msg(text_equal(d->list.at[0].text, text), "about: %s\n  got: %s\n  expected: %s",
                  about, d->list.at[0].text, text);
    ck_assert_msg(d->list.at[0].place.column == column, "about: %s: column %u instead of %u",
                  about, d->list.at[0].place.column, column);
}

const char *written(struct arena *a, const struct expr *e)
{
    struct text t;
    text_init(&t, a);
    expr_write(&t, e);
    return text_str(&t);
}

int main(void)
{
    SRunner *sr = srunner_create(suite_units());
    srunner_add_suite(sr, suite_parse());
    srunner_add_suite(sr, suite_slips());
    srunner_add_suite(sr, suite_trees());
    srunner_add_suite(sr, suite_random());
    srunner_add_suite(sr, suite_quantity());
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
