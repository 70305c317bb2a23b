/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantities in fields: expressions and distributions, canonical forms, ranges by the
 * flags of the field, and what a change may say of them. Parsing itself is tested in
 * quantity_test.c. */
#include "model_test.h"

#include <math.h>
#include <string.h>

struct holder {
    struct quantity *any, *probability, *positive, *zero, *certain, *constant, *interest, *rest;
};

#define QUANTITY(key_, dim_, flags_)                                                               \
    {                                                                                              \
        .key = #key_, .type = FIELD_QUANTITY, .dim = dim_, .flags = flags_,                        \
        .offset = offsetof(struct holder, key_), .help = "A quantity"                              \
    }
static const struct field fields[] = {
    QUANTITY(any, ANY, 0),
    QUANTITY(probability, PROBABILITY, 0),
    QUANTITY(positive, ANY, POSITIVE),
    QUANTITY(zero, ANY, NOT_NEGATIVE),
    QUANTITY(certain, ANY, CERTAIN),
    QUANTITY(constant, ANY, CERTAIN | CONSTANT),
    QUANTITY(interest, INTEREST, CERTAIN | CONSTANT),
    QUANTITY(rest, PROBABILITY, REST),
};
static const struct table holder = {.name = "holder",
                                    .size = sizeof(struct holder),
                                    .fields = fields,
                                    .n_fields = sizeof fields / sizeof *fields};
static const struct units units = {.currency = "EUR", .counts = {"section"}, .n_counts = 1};

static bool bind_yaml(struct sheet *s, const char *yaml, struct node **canonical,
                      struct holder **out)
{
    const struct node *root = sheet_yaml(s, yaml);
    sheet_fine(s);
    struct binding b = {.arena = s->arena, .units = &units, .diags = &s->diags};
    void *data;
    if (!bind_object(&b, &holder, root, canonical, &data))
        return false;
    *out = data;
    return true;
}

static const struct holder *good(struct sheet *s, const char *yaml, const char *json)
{
    struct node *canonical = NULL, *again = NULL;
    struct holder *h = NULL, *unused;
    bool bound = bind_yaml(s, yaml, &canonical, &h);
    sheet_fine(s);
    ck_assert(bound);
    if (json)
        ck_assert_str_eq(sheet_json(s, canonical), json);
    struct binding b = {.arena = s->arena, .units = &units, .diags = &s->diags};
    ck_assert(bind_object(&b, &holder, canonical, &again, (void **)&unused));
    ck_assert(node_equal(canonical, again));
    return h;
}

static void wrong(const char *yaml, uint32_t column, const char *word)
{
    struct sheet s = sheet_new();
    struct node *canonical = NULL;
    struct holder *h = NULL;
    ck_assert_msg(!bind_yaml(&s, yaml, &canonical, &h) && !h, "%s", yaml);
    sheet_expect(&s, 1, column, word, NULL);
}

START_TEST(scalars)
{
    struct sheet s = sheet_new();
    const struct holder *h = good(&s, "any: 2.50  *  (3 h)", "{\"any\":\"2.5 * 3 h\"}");
    ck_assert_int_eq(h->any->shape, SHAPE_EXPRESSION);
    ck_assert_double_eq_tol(expr_constant(h->any->expr), 7.5 / 8760, 1e-18);
    h = good(&s, "any: 90% within 14 MW .. 22 MW", "{\"any\":\"90 % within 14 MW .. 22 MW\"}");
    ck_assert_int_eq(h->any->shape, SHAPE_LOGNORMAL);
    ck_assert_double_eq_tol(h->any->p[0], sqrt(14e3 * 22e3), 1e-9); /* median */
    good(&s, "any: load * 3 h", "{\"any\":\"load * 3 h\"}");
    wrong("any: [3 h]", 6, "expected a quantity such as 180 kEUR");
    wrong("any: 3 hh", 8, "hh");
    wrong("any: 3 h * was", 6, "\"was\" has a meaning only inside the change of an option");
    wrong("any: 1 / (2 - 2)", 6, "finite");
    wrong("any: ''", 6, "");
}
END_TEST

START_TEST(distributions)
{
    struct sheet s = sheet_new();
    const struct holder *h = good(&s, "any: {error-factor: 3, median: 0.010 per a}",
                                  "{\"any\":{\"error-factor\":\"3\",\"median\":\"0.01 per a\"}}");
    ck_assert_int_eq(h->any->shape, SHAPE_LOGNORMAL);
    ck_assert(h->any->p[0] == 0.01 && h->any->p[1] == 3 && h->any->times == 1);
    h = good(&s, "any: {median: 2 h, error-factor: 3, times: 0.5 * 0.6}",
             "{\"any\":{\"error-factor\":\"3\",\"median\":\"2 h\",\"times\":\"0.5 * 0.6\"}}");
    ck_assert_double_eq_tol(h->any->times, 0.3, 1e-16);
    h = good(&s, "any: {range: 90 % within 1 h .. 3 h, times: 2}", NULL);
    ck_assert(h->any->shape == SHAPE_LOGNORMAL && h->any->times == 2);
    h = good(&s, "any: {shape: pert, from: 1 h, most-likely: 2 h, to: 9 h}", NULL);
    ck_assert_int_eq(h->any->shape, SHAPE_PERT);
    wrong("any: {median: 2 h, error-factr: 3}", 20,
          "a distribution has no key \"error-factr\" (did you mean \"error-factor\"?)");
    wrong("any: {median: 2 h, b: 3}", 6, "do not make one distribution");
    wrong("any: {median: load, error-factor: 3}", 15, "plain number with its unit, without names");
    wrong("any: {median: [2], error-factor: 3}", 15,
          "expected a number with its unit, found a list");
    wrong("any: {median: 2 h, error-factor: 3, times: -1}", 44, "a factor greater than 0");
    wrong("any: {range: 90 % within 1 h .. 3 h, median: 2 h}", 6, "\"range\" stands alone");
    wrong("any: {shape: normal, values: {x: {is: 1, p: 1}}}", 6, "only \"values\"");
    wrong("any: {shape: [normal]}", 14, "expected a single value");
}
END_TEST

START_TEST(discrete_distributions)
{
    struct sheet s = sheet_new();
    const struct holder *h =
        good(&s, "any: {values: {low: {is: 2 h, p: 30 %}, high: {is: 9 h, p: rest}}}",
             "{\"any\":{\"values\":{\"high\":{\"is\":\"9 h\",\"p\":\"rest\"},"
             "\"low\":{\"is\":\"2 h\",\"p\":\"30 %\"}}}}");
    ck_assert_int_eq(h->any->shape, SHAPE_DISCRETE);
    ck_assert_double_eq_tol(quantity_mean(h->any), (0.3 * 2 + 0.7 * 9) / 8760, 1e-17);
    wrong("any: {values: {x: {is: 2 h, p: rest}, y: {is: 3 h, p: rest}}}", 39, "the rest");
    wrong("any: {values: {x: {is: 2 h}}}", 19, "lacks \"p\"");
    wrong("any: {values: {x: {is: 2 h, p: 0.4}, y: {is: 3 h, p: 0.4}}}", 15, "0.8");
    wrong("any: {values: [1, 2]}", 15, "a map of names");
}
END_TEST

START_TEST(ranges_of_fields)
{
    struct sheet s = sheet_new();
    good(&s, "{probability: 0, zero: 0 EUR, positive: 1e-9 s}", NULL);
    good(&s, "{probability: 100 %, interest: -3 % per a}", NULL);
    good(&s, "{probability: {a: 1, b: 9}, zero: {mean: 1 h, shape-parameter: 2}}", NULL);
    wrong("probability: 1.01", 14, "a probability lies between 0 and 1");
    wrong("probability: -1 %", 14, "between 0 and 1");
    wrong("probability: {median: 0.4, error-factor: 9}", 14, "values that are out of range");
    wrong("positive: 0 s", 11, "greater than 0");
    wrong("zero: -2 EUR", 7, "negative");
    wrong("zero: {mean: 1 EUR, standard-deviation: 1 EUR}", 7, "out of range");
    wrong("interest: -100 % per a", 11, "interest lies above -100 %");
    good(&s, "probability: {median: 0.4, error-factor: 9, at-most: 1}", NULL);
    good(&s, "zero: {mean: 10 EUR, standard-deviation: 2 EUR}", NULL); /* 5 deviations away */
}
END_TEST

START_TEST(certain_and_constant)
{
    struct sheet s = sheet_new();
    good(&s, "{certain: 2 * load, constant: 2 * 3 h}", NULL);
    wrong("certain: 90 % within 1 s .. 2 s", 10, "a certain number is needed here");
    wrong("certain: {median: 1 s, error-factor: 2}", 10, "a certain number is needed here");
    wrong("constant: load", 11, "a plain number with its unit is needed here, without names");
}
END_TEST

START_TEST(the_rest)
{
    struct sheet s = sheet_new();
    const struct holder *h = good(&s, "rest: rest", "{\"rest\":\"rest\"}");
    ck_assert(h->rest->shape == SHAPE_EXPRESSION && !h->rest->expr);
    wrong("any: rest", 6, "rest");
}
END_TEST

/* --- in changes --- */

static struct node *change(struct sheet *s, const char *quantity)
{
    const char *yaml = arena_printf(s->arena, "values: {v: {is: %s}}", quantity);
    const struct node *root = sheet_yaml(s, yaml);
    sheet_fine(s);
    struct binding b = {.arena = s->arena, .units = &units, .diags = &s->diags};
    return bind_change(&b, root);
}

static void good_change(const char *quantity, const char *json)
{
    struct sheet s = sheet_new();
    struct node *canonical = change(&s, quantity);
    sheet_fine(&s);
    const struct node *is = node_get(node_get(node_get(canonical, "values"), "v"), "is");
    ck_assert_str_eq(sheet_json(&s, is), json);
}

static void wrong_change(const char *quantity, uint32_t column, const char *word)
{
    struct sheet s = sheet_new();
    ck_assert_ptr_null(change(&s, quantity));
    sheet_expect(&s, 1, column, word, NULL);
}

START_TEST(quantities_in_changes)
{
    good_change("0.60 * was", "\"0.6 * was\"");
    good_change("was / 2", "\"was / 2\"");
    good_change("no", "false");
    good_change("3 h", "\"3 h\"");
    good_change("{median: 2 * was}", "{\"median\":\"2 * was\"}");
    good_change("{error-factor: no, median: 2 h}", "{\"error-factor\":false,\"median\":\"2 h\"}");
    good_change("90 % within 1 h .. 2 h", "\"90 % within 1 h .. 2 h\"");
    wrong_change("was + 1 h", 18, "\"was\" may only be multiplied or divided");
    wrong_change("was * was", 18, "\"was\" may only be multiplied or divided");
    wrong_change("2 / was", 18, "\"was\" may only be multiplied or divided");
    wrong_change("{median: was + 1}", 27, "\"was\" may only be multiplied");
    wrong_change("{medain: 2 * was}", 19, "(did you mean \"median\"?)");
    wrong_change("3 hh", 20, "hh");
}
END_TEST

Suite *suite_quantities(void)
{
    Suite *s = suite_create("quantities in fields");
    TCase *t = tcase_create("quantities");
    tcase_add_test(t, scalars);
    tcase_add_test(t, distributions);
    tcase_add_test(t, discrete_distributions);
    tcase_add_test(t, ranges_of_fields);
    tcase_add_test(t, certain_and_constant);
    tcase_add_test(t, the_rest);
    tcase_add_test(t, quantities_in_changes);
    suite_add_tcase(s, t);
    return s;
}
