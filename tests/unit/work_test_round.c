/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Out and in again: what is exported from one register gives a new one the same content,
 * and is exported from that one as the same text. */
#include <string.h>

#include "base/text.h"
#include "doc/yaml.h"
#include "registers.h"
#include "work_test.h"

#define SEEDS 100

/* Exports `reg`, imports that into a new register, and compares. */
static void expect_round(struct arena *a, const char *reg)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *objects = test_export(a, reg, OHMEN_EXPORT_OBJECTS);
    const char *rows = test_export(a, reg, OHMEN_EXPORT_OBSERVATIONS);
    const char *other = test_new(a);
    const char *const files[] = {test_file(a, other, "objects.yaml", objects),
                                 test_file(a, other, "rows.csv", rows), NULL};
    must(test_import(other, files, NULL, &e), &e);
    ck_assert_str_eq(test_state(other).hash, test_state(reg).hash);
    ck_assert_str_eq(test_export(a, other, OHMEN_EXPORT_OBJECTS), objects);
    ck_assert_str_eq(test_export(a, other, OHMEN_EXPORT_OBSERVATIONS), rows);
}

START_TEST(the_sample_goes_round)
{
    struct arena *a = test_arena();
    const char *reg = test_skerry(a);
    ck_assert_uint_eq(test_count(test_export(a, reg, OHMEN_EXPORT_OBSERVATIONS), "\n"), 21);
    expect_round(a, reg);
    arena_free(a);
}
END_TEST

/* The past as well: an export as of an entry gives the content of that entry. */
START_TEST(an_export_of_the_past)
{
    struct arena *a = test_arena();
    const char *reg = test_skerry(a), *before = test_export(a, reg, OHMEN_EXPORT_OBJECTS);
    test_import_text(a, reg, "removed: [D-GU]\n");
    ck_assert_str_ne(test_export(a, reg, OHMEN_EXPORT_OBJECTS), before);
    ohmen_report *out = NULL;
    const char *text = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_query q = {.as_of = "1"};
    ohmen_register *r = test_open(reg, OHMEN_READ);
    must(ohmen_export(r, &q, OHMEN_EXPORT_OBJECTS, &out, &text, &e), &e);
    ck_assert_str_eq(text, before);
    ohmen_report_free(out);
    ohmen_close(r);
    arena_free(a);
}
END_TEST

/* Some observations of the register's own rates, with and without keys. */
static const char *some_rows(struct arena *a, const struct node *root, uint64_t seed)
{
    struct text t;
    const struct node *rates = node_get(root, "rates");
    text_init(&t, a);
    text_add(&t, "date,kind,object,count,note,key\n");
    for (size_t i = 0; rates && i < rates->n; i++)
        text_printf(&t, "2024-03-%02u,fault,%s,%u,\"note, %u\",%s\n", (unsigned)(i % 28 + 1),
                    rates->pairs[i].key, (unsigned)(seed % 7 + 1), (unsigned)i,
                    i % 2 ? arena_printf(a, "K-%u", (unsigned)i) : "");
    return text_str(&t);
}

START_TEST(random_registers_go_round)
{
    for (uint64_t seed = 0; seed < SEEDS; seed++) {
        struct arena *a = test_arena();
        struct text t;
        ohmen_error e = OHMEN_ERROR_INIT;
        const char *reg = test_new(a);
        const struct node *root = random_register(a, seed, &register_small);
        text_init(&t, a);
        yaml_write(&t, root);
        const char *const files[] = {test_file(a, reg, "random.yaml", text_str(&t)),
                                     test_file(a, reg, "random.csv", some_rows(a, root, seed)),
                                     NULL};
        ohmen_report *r = NULL;
        if (test_import(reg, files, &r, &e) != OHMEN_OK)
            ck_abort_msg("seed %u: %s; %s", (unsigned)seed, e.text,
                         r ? ohmen_report_diagnostic(r, 0) : "");
        ohmen_report_free(r);
        expect_round(a, reg);
        arena_free(a);
    }
}
END_TEST

void work_round_tests(Suite *suite)
{
    TCase *t = tcase_create("round");
    tcase_set_timeout(t, 900);
    tcase_add_test(t, the_sample_goes_round);
    tcase_add_test(t, an_export_of_the_past);
    tcase_add_test(t, random_registers_go_round);
    suite_add_tcase(suite, t);
}
