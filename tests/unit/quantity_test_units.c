/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Units, dimensions in words, names, reserved words. */
#include <string.h>

#include "quantity_test.h"

/* Expected factors as exact quotients from the definitions: 1 a = 8760 h. */
static const struct {
    const char *name;
    double factor;
    const char *words, *unit;
} rows[] = {
    {"ms", 1.0 / 31536000000.0, "time", "a"},
    {"s", 1.0 / 31536000.0, "time", "a"},
    {"min", 1.0 / 525600, "time", "a"},
    {"h", 1.0 / 8760, "time", "a"},
    {"d", 1.0 / 365, "time", "a"},
    {"week", 7.0 / 365, "time", "a"},
    {"month", 1.0 / 12, "time", "a"},
    {"a", 1, "time", "a"},
    {"m", 1.0 / 1000, "length", "km"},
    {"km", 1, "length", "km"},
    {"W", 1.0 / 1000, "power", "kW"},
    {"kW", 1, "power", "kW"},
    {"MW", 1000, "power", "kW"},
    {"GW", 1000000, "power", "kW"},
    {"Wh", 1.0 / 8760000, "energy", "kW a"},
    {"kWh", 1.0 / 8760, "energy", "kW a"},
    {"MWh", 1000.0 / 8760, "energy", "kW a"},
    {"GWh", 1000000.0 / 8760, "energy", "kW a"},
    {"%", 1.0 / 100, "a pure number", ""},
    {"EUR", 1, "money", "EUR"},
    {"kEUR", 1000, "money", "EUR"},
    {"MEUR", 1000000, "money", "EUR"},
    {"section", 1, "section", "section"},
    {"bay", 1, "bay", "bay"},
    {"feeder-bay", 1, "feeder-bay", "feeder-bay"},
};

enum { N_ROWS = sizeof rows / sizeof rows[0] };

START_TEST(every_unit)
{
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < N_ROWS; i++) {
        struct unit u;
        ck_assert(unit_find(&test_units, rows[i].name, strlen(rows[i].name), &u));
        ck_assert_msg(u.factor == rows[i].factor && u.up / u.down == u.factor, "%s",
                      rows[i].name);
        ck_assert_str_eq(dim_words(a, &test_units, u.dim), rows[i].words);
        ck_assert_str_eq(dim_unit(a, &test_units, u.dim), rows[i].unit);
    }
    arena_free(a);
}
END_TEST

START_TEST(no_unit)
{
    static const char *const none[] = {"", "k", "H", "kw", "USD", "mEUR", "sections", "kWhh"};
    struct unit u;
    for (size_t i = 0; i < sizeof none / sizeof none[0]; i++)
        ck_assert_msg(!unit_find(&test_units, none[i], strlen(none[i]), &u), "%s", none[i]);
    ck_assert(unit_find(&test_units, "kWx", 2, &u)); /* n bytes, not the whole string */
}
END_TEST

static void count_unit(void *ctx, const char *name)
{
    struct unit u;
    size_t *n = ctx;
    ck_assert_msg(unit_find(&test_units, name, strlen(name), &u), "%s", name);
    ++*n;
}

START_TEST(names_of_units)
{
    size_t n = 0;
    unit_names(&test_units, count_unit, &n);
    ck_assert_uint_eq(n, N_ROWS - 2); /* without kEUR and MEUR */
    struct arena *a = arena_new(NULL);
    ck_assert_str_eq(unit_nearest(a, &test_units, "kEURO"), "kEUR");
    ck_assert_str_eq(unit_nearest(a, &test_units, "sektion"), "section");
    ck_assert_ptr_null(unit_nearest(a, &test_units, "incomer-relay"));
    arena_free(a);
}
END_TEST

START_TEST(dimensions_in_words)
{
    static const struct {
        struct dim dim;
        const char *words, *unit;
    } cases[] = {
        {{{0}}, "a pure number", ""},
        {{{[DIM_TIME] = -1}}, "1 / time", "1/a"},
        {{{[DIM_TIME] = -1, [DIM_MONEY] = 1}}, "money per time", "EUR/a"},
        {{{[DIM_TIME] = -1, [DIM_COUNTS] = -1}}, "1 / (section time)", "1/section a"},
        {{{[DIM_TIME] = -1, [DIM_POWER] = -1, [DIM_MONEY] = 1}}, "money per energy",
         "EUR/kW a"},
        {{{[DIM_TIME] = -1, [DIM_POWER] = 1}}, "power per time", "kW/a"},
        {{{[DIM_LENGTH] = 2}}, "length^2", "km^2"},
        {{{[DIM_TIME] = 2, [DIM_POWER] = 2}}, "power^2 time^2", "kW^2 a^2"},
        {{{[DIM_COUNTS + 11] = 1}}, "count", "count"},
    };
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        ck_assert_str_eq(dim_words(a, &test_units, cases[i].dim), cases[i].words);
        ck_assert_str_eq(dim_unit(a, &test_units, cases[i].dim), cases[i].unit);
    }
    arena_free(a);
}
END_TEST

static void reserved_is_no_name(void *ctx, const char *word)
{
    size_t *n = ctx;
    ck_assert_msg(!name_is_valid(&test_units, word), "%s", word);
    ++*n;
}

START_TEST(names)
{
    static const char *const good[] = {"a1", "H-BUS1", "x", "NH-51A", "in2", "kWx"};
    static const char *const bad[] = {"", "1a", "-a", "a-", "a b", "a.b", "kW", "section", "kEUR",
                                      "per", "\u00e4", "a->b"};
    size_t n = 0;
    char longest[66];
    memset(longest, 'x', 65);
    longest[65] = 0;
    ck_assert(!name_is_valid(&test_units, longest)); /* 65 */
    longest[64] = 0;
    ck_assert(name_is_valid(&test_units, longest)); /* 64 */
    for (size_t i = 0; i < sizeof good / sizeof good[0]; i++)
        ck_assert_msg(name_is_valid(&test_units, good[i]), "%s",
                      good[i]);
    for (size_t i = 0; i < sizeof bad / sizeof bad[0]; i++)
        ck_assert_msg(!name_is_valid(&test_units, bad[i]), "%s", bad[i]);
    reserved_words(reserved_is_no_name, &n);
    ck_assert_uint_eq(n, 26); /* the list in expr.h */
}
END_TEST

Suite *suite_units(void)
{
    Suite *s = suite_create("units");
    TCase *t = tcase_create("units");
    tcase_add_test(t, every_unit);
    tcase_add_test(t, no_unit);
    tcase_add_test(t, names_of_units);
    tcase_add_test(t, dimensions_in_words);
    tcase_add_test(t, names);
    suite_add_tcase(s, t);
    return s;
}
