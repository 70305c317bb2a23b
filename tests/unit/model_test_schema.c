/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is made from the field tables: the schema, and the tables in docs/documents.md.
 * Both are stored; OHMEN_ACCEPT=1 in the environment writes them anew. */
#include "model_test.h"

#include <string.h>

#include "json_check.h"
#include "model/fields_text.h"
#include "model/schema.h"
#include "model/tables_all.h"

static const char *schema(struct sheet *s)
{
    struct text t;
    text_init(&t, s->arena);
    schema_write(&t);
    return text_str(&t);
}

START_TEST(schema_is_stored)
{
    struct sheet s = sheet_new();
    const char *text = schema(&s);
    size_t bad;
    ck_assert_msg(json_check(text, strlen(text), &bad), "no JSON at %.60s", text + bad);
    ck_assert_str_eq(text, schema(&s));
    sheet_accept(&s, "schema/documents.schema.json", text);
}
END_TEST

static const char *slug(struct sheet *s, const char *name)
{
    char *text = arena_str(s->arena, name);
    for (char *p = text; *p; p++)
        *p = *p == ' ' ? '-' : *p;
    return text;
}

static void expect_described(struct sheet *s, const char *text, const char *def, const char *key)
{
    size_t n;
    const char *path = arena_printf(s->arena, "$defs/%s/properties/%s/description", def, key);
    ck_assert_msg(json_pick(text, path, &n), "the schema lacks %s", path);
}

START_TEST(schema_has_every_field)
{
    struct sheet s = sheet_new();
    struct tables tables = {0};
    const char *text = schema(&s);
    tables_all(s.arena, &tables);
    ck_assert_uint_gt(tables.n, 30);
    for (size_t i = 0; i < tables.n; i++)
        for (size_t k = 0; k < tables.at[i]->n_fields; k++) {
            const char *def = slug(&s, tables.at[i]->name), *key = tables.at[i]->fields[k].key;
            expect_described(&s, text, def, key);
            expect_described(&s, text, arena_printf(s.arena, "keys-of-%s", def), key);
        }
    for (int k = 0; k < KIND_COUNT; k++)
        ck_assert(json_pick(text, arena_printf(s.arena, "properties/%s", kinds[k].section),
                            &(size_t){0}));
}
END_TEST

/* A definition of each name that is referred to. */
START_TEST(schema_references_are_there)
{
    struct sheet s = sheet_new();
    const char *text = schema(&s), head[] = "\"$ref\": \"#/";
    size_t count = 0;
    for (const char *p = text; (p = strstr(p, head)) != NULL; count++) {
        p += strlen(head);
        const char *path = arena_strn(s.arena, p, strcspn(p, "\""));
        ck_assert_msg(json_pick(text, path, &(size_t){0}), "the schema lacks %s", path);
    }
    ck_assert_uint_gt(count, 500);
}
END_TEST

START_TEST(schema_says_what_is_needed)
{
    struct sheet s = sheet_new();
    const char *text = schema(&s);
    ck_assert(json_is(text, "$defs/rate/required", "[\"per\"]"));
    ck_assert(json_is(text, "$defs/rate/allOf",
                      "[{\"oneOf\": [{\"required\": [\"is\"]}, {\"required\": [\"prior\"]}]}]"));
    ck_assert(json_is(text, "$defs/hazard/properties/status/enum",
                      "[\"open\", \"being-treated\", \"accepted\", \"closed\"]"));
    ck_assert(
        json_is(text, "$defs/response-row/properties/in/$ref", "\"#/$defs/certain-quantity\""));
    ck_assert(json_is(text, "$defs/element/additionalProperties", "false"));
    ck_assert(json_is(text, "$defs/register/properties/prices/anyOf/0/minimum", "1900"));
    ck_assert_ptr_null(json_pick(text, "$defs/change/properties/sources", &(size_t){0}));
    ck_assert_ptr_nonnull(json_pick(text, "$defs/change/properties/hazards", &(size_t){0}));
}
END_TEST

/* --- Markdown --- */

static const char *filled(struct sheet *s, const char *document, const char **problem)
{
    struct text t;
    text_init(&t, s->arena);
    *problem = NULL;
    return fields_fill(&t, document, problem) ? text_str(&t) : NULL;
}

START_TEST(documents_page_is_stored)
{
    struct sheet s = sheet_new();
    const char *problem, *page = sheet_file(&s, "docs/documents.md");
    const char *text = filled(&s, page, &problem);
    ck_assert_msg(text, "docs/documents.md:%s", problem);
    sheet_accept(&s, "docs/documents.md", text);
}
END_TEST

/* Every key of every table stands somewhere on the page. */
START_TEST(documents_page_has_every_field)
{
    struct sheet s = sheet_new();
    struct tables tables = {0};
    const char *page = sheet_file(&s, "docs/documents.md");
    tables_all(s.arena, &tables);
    for (size_t i = 0; i < tables.n; i++)
        for (size_t k = 0; k < tables.at[i]->n_fields; k++) {
            const struct field *f = &tables.at[i]->fields[k];
            const char *bare = arena_printf(s.arena, "| `%s` |", f->key);
            const char *dotted = arena_printf(s.arena, ".%s` |", f->key);
            bool there = strstr(page, bare) || strstr(page, dotted);
            ck_assert_msg(there && strstr(page, f->help), "%s.%s is not documented",
                          tables.at[i]->name, f->key);
        }
}
END_TEST

START_TEST(tables_are_spread_out_or_named)
{
    struct sheet s = sheet_new();
    const char *problem;
    const char *text = filled(&s, "A\n<!-- fields: option -->\nold\n<!-- end -->\nB", &problem);
    ck_assert_ptr_nonnull(text);
    ck_assert(
        text_starts(text, "A\n<!-- fields: option -->\n| key | expects | needed | used | |\n"));
    ck_assert_str_eq(strstr(text, "<!-- end -->"), "<!-- end -->\nB");
    ck_assert_ptr_null(strstr(text, "old"));
    ck_assert_ptr_nonnull(strstr(text, "\n| `name` | text | yes | yes | What would be done |\n"));
    ck_assert_ptr_nonnull(
        strstr(text, "\n| `invest.is` | money, not below 0 | yes | yes | What it costs |\n"));
    ck_assert_ptr_nonnull(
        strstr(text, "\n| `early.for` | plain time, above 0 | yes | yes | How long the "));
    ck_assert_ptr_nonnull(strstr(text, "| `excludes` | list of ids, each of an option |"));
    text = filled(&s,
                  "<!-- fields: option -->\n<!-- end -->\n<!-- fields: investment -->\n"
                  "<!-- end -->\n",
                  &problem);
    ck_assert_ptr_nonnull(strstr(text, "| `invest` | *investment* |"));
    ck_assert_ptr_null(strstr(text, "invest.is"));
    ck_assert_str_eq(filled(&s, text, &problem), text);
}
END_TEST

START_TEST(rows_are_spread_out_by_name)
{
    struct sheet s = sheet_new();
    const char *problem;
    const char *text = filled(&s, "<!-- fields: outcome -->\n<!-- end -->\n", &problem);
    ck_assert_ptr_nonnull(
        strstr(text, "| `damage.NAME.category` | name | yes | yes | Category of damage"));
    ck_assert_ptr_nonnull(strstr(text, "| `damage.NAME.is` | money, not below 0 | one of | yes |"));
    ck_assert_ptr_nonnull(strstr(text, "| `harm` | map by id of a group: *harm* |  | yes |"));
    text = filled(&s, "<!-- fields: plan -->\n<!-- end -->\n", &problem);
    ck_assert_ptr_nonnull(strstr(text, "| `budgets` | map by year: plain money, not below 0 |"));
    text = filled(&s, "<!-- fields: branch -->\n<!-- end -->\n", &problem); /* holds itself */
    ck_assert_ptr_nonnull(strstr(text, "| `yes` | *branch* |"));
    ck_assert_ptr_null(strstr(text, "yes.outcome"));
}
END_TEST

START_TEST(marks_that_are_wrong)
{
    struct sheet s = sheet_new();
    const char *problem;
    ck_assert_ptr_null(filled(&s, "\n<!-- fields: optoin -->\n<!-- end -->\n", &problem));
    ck_assert_str_eq(problem, "2: there is no table \"optoin\"");
    ck_assert_ptr_null(filled(&s, "<!-- fields: option -->\n", &problem));
    ck_assert_str_eq(problem, "1: this block has no end");
    ck_assert_ptr_null(
        filled(&s, "<!-- fields: option -->\n<!-- end -->\n<!-- fields: option -->\n", &problem));
    ck_assert_str_eq(problem, "3: there are two blocks of \"option\"");
    ck_assert_ptr_null(
        filled(&s, "<!-- fields: option -->\n<!-- fields: plan -->\n<!-- end -->\n", &problem));
    ck_assert_str_eq(problem, "2: no end before the block of \"plan\"");
}
END_TEST

Suite *suite_schema(void)
{
    Suite *s = suite_create("schema");
    TCase *t = tcase_create("schema");
    tcase_add_test(t, schema_is_stored);
    tcase_add_test(t, schema_has_every_field);
    tcase_add_test(t, schema_references_are_there);
    tcase_add_test(t, schema_says_what_is_needed);
    suite_add_tcase(s, t);
    t = tcase_create("fields");
    tcase_add_test(t, documents_page_is_stored);
    tcase_add_test(t, documents_page_has_every_field);
    tcase_add_test(t, tables_are_spread_out_or_named);
    tcase_add_test(t, rows_are_spread_out_by_name);
    tcase_add_test(t, marks_that_are_wrong);
    suite_add_tcase(s, t);
    return s;
}
