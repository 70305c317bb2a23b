/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The binder on a table of its own that has a field of every type: right and wrong input,
 * what becomes of it, and where the messages point. Quantities are in
 * model_test_quantities.c. */
#include "model_test.h"

#include <string.h>

struct thing {
    const char *text, *name, *ref, *unit;
    struct names refs, names, ordered;
    int word;
    bool yes;
    int64_t count;
    day date, when;
    struct quantity *quantity;
    struct thing *below;
    struct rows rows, years;
    struct list list;
    struct structure *structure;
    const struct node *change;
};

static const char *const words[] = {"first", "second", NULL};
static const struct table table_thing;
static const struct field thing_part = {.type = FIELD_STRUCT, .table = &table_thing};
static const struct field count_part = {.type = FIELD_COUNT, .low = 0, .high = 9};

#define FIELD(key_, type_, member, ...)                                                            \
    {                                                                                              \
        .key = key_, .type = FIELD_##type_, .offset = offsetof(struct thing, member),              \
        .help = "Help of " key_, __VA_ARGS__                                                       \
    }
static const struct field thing_fields[] = {
    FIELD("text", TEXT, text, .flags = 0),
    FIELD("name", NAME, name, .flags = 0),
    FIELD("ref", REF, ref, .kinds = KIND_BIT(KIND_SITE)),
    FIELD("unit", UNIT, unit, .flags = 0),
    FIELD("refs", REFS, refs, .kinds = KIND_BIT(KIND_SITE)),
    FIELD("names", NAMES, names, .flags = 0),
    FIELD("ordered", ORDERED, ordered, .flags = 0),
    FIELD("word", WORD, word, .words = words),
    FIELD("yes", YES, yes, .flags = 0),
    FIELD("count", COUNT, count, .low = 2, .high = 40),
    FIELD("date", DATE, date, .flags = 0),
    FIELD("when", WHEN, when, .flags = 0),
    FIELD("quantity", QUANTITY, quantity, .dim = ANY),
    FIELD("below", STRUCT, below, .table = &table_thing),
    FIELD("rows", ROWS, rows, .part = &thing_part),
    FIELD("years", ROWS, years, .part = &count_part, .year_keys = true),
    FIELD("list", LIST, list, .part = &thing_part),
    FIELD("structure", STRUCTURE, structure, .kinds = KIND_BIT(KIND_SITE)),
    FIELD("change", CHANGE, change, .flags = 0),
};
static const struct group either[] = {{false, {"date", "when"}}};
static const struct table table_thing = {.name = "thing",
                                         .size = sizeof(struct thing),
                                         .fields = thing_fields,
                                         .n_fields = sizeof thing_fields / sizeof *thing_fields,
                                         .groups = either,
                                         .n_groups = 1,
                                         .short_key = "quantity"};

static const struct units units = {.currency = "EUR", .counts = {"section"}, .n_counts = 1};

static bool bind_by(struct sheet *s, const struct table *t, const char *yaml,
                    struct node **canonical, void **data)
{
    const struct node *root = sheet_yaml(s, yaml);
    sheet_fine(s);
    struct binding b = {.arena = s->arena, .units = &units, .diags = &s->diags};
    return bind_object(&b, t, root, canonical, data);
}

/* What the document is in canonical JSON; its struct in *out. */
static const char *bound(struct sheet *s, const char *yaml, const struct thing **out)
{
    struct node *canonical = NULL, *again = NULL;
    void *data = NULL;
    bool fine = bind_by(s, &table_thing, yaml, &canonical, &data);
    sheet_fine(s);
    ck_assert(fine);
    struct binding b = {.arena = s->arena, .units = &units, .diags = &s->diags};
    void *unused;
    ck_assert(bind_object(&b, &table_thing, canonical, &again, &unused));
    ck_assert(node_equal(canonical, again));
    if (out)
        *out = data;
    return sheet_json(s, canonical);
}

static void same(const char *yaml, const char *json)
{
    struct sheet s = sheet_new();
    ck_assert_str_eq(bound(&s, yaml, NULL), json);
}

/* Refused with one message at line 1 and this column; outputs are untouched. */
static void wrong(const char *yaml, uint32_t column, const char *word)
{
    struct sheet s = sheet_new();
    struct node *canonical = NULL;
    void *data = NULL;
    bool fine = bind_by(&s, &table_thing, yaml, &canonical, &data);
    ck_assert_msg(!fine && !canonical && !data, "%s", yaml);
    sheet_expect(&s, 1, column, word, NULL);
}

/* --- single values --- */

START_TEST(texts_and_names)
{
    same("text: Relay no. 7", "{\"text\":\"Relay no. 7\"}");
    same("text: no", "{\"text\":\"no\"}"); /* text like any other outside of changes */
    same("text: 1e3", "{\"text\":\"1e3\"}");
    wrong("text: ''", 7, "expected a text, found nothing");
    wrong("text: [a]", 7, "expected a single value for \"text\", found a list");
    wrong("text: {a: b}", 7, "found a map");
    same("name: H-2b", "{\"name\":\"H-2b\"}");
    wrong("name: 2b", 7, "\"2b\" cannot be a name");
    wrong("name: h", 7, "cannot be a name");
    wrong("name: section", 7, "cannot be a name");
    wrong("name: was", 7, "cannot be a name");
    wrong("name: a-", 7, "cannot be a name");
    same("ref: NH", "{\"ref\":\"NH\"}");
    wrong("ref: N H", 6, "\"N H\" cannot be a name");
}
END_TEST

START_TEST(words_and_truth)
{
    struct sheet s = sheet_new();
    const struct thing *t;
    same("word: second", "{\"word\":\"second\"}");
    wrong("word: secnd", 7, "\"secnd\" is none of first, second (did you mean \"second\"?)");
    wrong("word: third-of-all", 7, "is none of first, second");
    same("yes: yes", "{\"yes\":true}");
    same("yes: no", "{\"yes\":false}");
    wrong("yes: true", 6, "expected yes or no, found \"true\"");
    bound(&s, "{word: second, yes: yes}", &t);
    ck_assert(t->word == 1 && t->yes && t->count == -1 && t->date == DAY_NONE);
    bound(&s, "{text: x}", &t);
    ck_assert(t->word == -1 && !t->yes && t->when == DAY_NONE && !t->quantity && !t->below);
}
END_TEST

START_TEST(counts)
{
    struct sheet s = sheet_new();
    const struct thing *t;
    same("count: 40", "{\"count\":40}");
    same("count: 002", "{\"count\":2}");
    wrong("count: 1", 8, "expected a whole number from 2 to 40, found \"1\"");
    wrong("count: 41", 8, "from 2 to 40");
    wrong("count: -3", 8, "from 2 to 40");
    wrong("count: 2.5", 8, "from 2 to 40");
    wrong("count: 99999999999999999999", 8, "from 2 to 40");
    bound(&s, "count: 17", &t);
    ck_assert_int_eq(t->count, 17);
}
END_TEST

START_TEST(dates)
{
    struct sheet s = sheet_new();
    const struct thing *t;
    same("date: 2024-02-29", "{\"date\":\"2024-02-29\"}");
    wrong("date: 2027-02-29", 7, "\"2027-02-29\" is no date");
    wrong("date: 2027", 7, "is no date");
    wrong("date: 27-2-1", 7, "is no date");
    same("when: 2027", "{\"when\":\"2027\"}");
    same("when: 2027-04-01", "{\"when\":\"2027-04-01\"}");
    wrong("when: April", 7, "neither a year such as 2027 nor a date");
    wrong("when: 2027-13-01", 7, "neither");
    bound(&s, "when: 2027", &t);
    ck_assert_int_eq(t->when, date_of(2027, 1, 1));
    bound(&s, "date: 2027-04-03", &t);
    ck_assert_int_eq(t->date, date_of(2027, 4, 3));
}
END_TEST

START_TEST(units_of_rates)
{
    same("unit: section a", "{\"unit\":\"section a\"}");
    same("unit: 'section  a'", "{\"unit\":\"section a\"}");
    struct sheet s = sheet_new();
    struct node *canonical = NULL;
    void *data = NULL;
    ck_assert(!bind_by(&s, &table_thing, "unit: sektion a", &canonical, &data));
    sheet_expect(&s, 1, 7, "sektion", "section", NULL);
    wrong("unit: ''", 7, "expected units such as section a");
    wrong("unit: a + 1", 7, "expected units");
}
END_TEST

/* --- sets --- */

START_TEST(sets_of_names)
{
    struct sheet s = sheet_new();
    const struct thing *t;
    same("refs: [Z, A, B]", "{\"refs\":[\"A\",\"B\",\"Z\"]}");
    same("names: [Z, A]", "{\"names\":[\"A\",\"Z\"]}");
    same("ordered: [Z, A, Z]", "{\"ordered\":[\"Z\",\"A\",\"Z\"]}");
    same("refs: []", "{\"refs\":[]}");
    wrong("refs: [A, B, A]", 14, "\"A\" stands twice in this list");
    wrong("refs: A", 7, "expected a list of names in square brackets, found a single value");
    wrong("refs: {A: yes}", 7, "expected a list of names");
    wrong("refs: [A, [B]]", 11, "expected a name, found a list");
    wrong("names: [A, 3]", 12, "\"3\" cannot be a name");
    bound(&s, "ordered: [Z, A]", &t);
    ck_assert(t->ordered.n == 2 && text_equal(t->ordered.at[0], "Z"));
    bound(&s, "refs: [Z, A]", &t);
    ck_assert(t->refs.n == 2 && text_equal(t->refs.at[0], "A"));
}
END_TEST

/* --- composites --- */

START_TEST(maps_rows_and_lists)
{
    struct sheet s = sheet_new();
    const struct thing *t;
    same("below: {below: {count: 3}, text: x}",
         "{\"below\":{\"below\":{\"count\":3},\"text\":\"x\"}}");
    same("below: 3 s", "{\"below\":{\"quantity\":\"3 s\"}}"); /* the short form */
    same("below: {median: 3 s, error-factor: 2}",
         "{\"below\":{\"quantity\":{\"error-factor\":\"2\",\"median\":\"3 s\"}}}");
    wrong("below: [a]", 8, "expected a map that describes the thing, found a list");
    same("rows: {q: {count: 3}, p: 4 s}",
         "{\"rows\":{\"p\":{\"quantity\":\"4 s\"},\"q\":{\"count\":3}}}");
    wrong("rows: [a]", 7, "\"rows\" is a map of names, found a list");
    wrong("rows: {p: {count: 3}, 2b: {count: 3}}", 23, "\"2b\" cannot be a name");
    wrong("rows: {p: {cuont: 3}}", 12, "a thing has no key \"cuont\" (did you mean \"count\"?)");
    same("years: {2028: 3, 2027: 4}", "{\"years\":{\"2027\":4,\"2028\":3}}");
    wrong("years: {27: 3}", 9, "expected a year such as 2027, found \"27\"");
    wrong("years: {2027: 10}", 15, "from 0 to 9");
    same("list: [{count: 3}, 2 s]", "{\"list\":[{\"count\":3},{\"quantity\":\"2 s\"}]}");
    same("list: {count: 3}", "{\"list\":[{\"count\":3}]}"); /* one alone */
    wrong("list: abc", 7, "expected a list in square brackets, found a single value");
    wrong("list: [{count: 3}, {count: 1}]", 28, "from 2 to 40");
    bound(&s, "{rows: {q: {count: 3}, p: {count: 5}}, list: [{count: 7}, {text: x}]}", &t);
    ck_assert(t->rows.n == 2 && text_equal(t->rows.keys[0], "p"));
    ck_assert_int_eq(ROW(struct thing, t->rows, 0)->count, 5);
    ck_assert_int_eq(ROW(struct thing, t->list, 0)->count, 7);
    bound(&s, "years: {2028: 3, 2027: 4}", &t);
    ck_assert_int_eq(((const int64_t *)t->years.at)[1], 3);
}
END_TEST

START_TEST(keys_of_maps)
{
    struct sheet s = sheet_new();
    struct node *canonical;
    void *data;
    wrong("{count: 3, contu: 4}", 12, "a thing has no key \"contu\"");
    wrong("{date: 2027-01-01, when: 2027}", 20, "has \"date\" or \"when\", not both");
    ck_assert(!bind_by(&s, kinds[KIND_SOURCE].table, "note: x", &canonical, &data));
    sheet_expect(&s, 1, 1, "this source lacks \"title\": Title of the publication", NULL);
    s = sheet_new();
    ck_assert(!bind_by(&s, kinds[KIND_VALUE].table, "note: x", &canonical, &data));
    sheet_expect(&s, 1, 1, "this value needs one of \"is\" or \"varies\"", NULL);
    s = sheet_new();
    ck_assert(!bind_by(&s, kinds[KIND_VALUE].table, "{is: 3, varies: 4}", &canonical, &data));
    sheet_expect(&s, 1, 9, "a value has \"is\" or \"varies\", not both", NULL);
}
END_TEST

/* All that is wrong in one object is told at once. */
START_TEST(errors_are_collected)
{
    struct sheet s = sheet_new();
    struct node *canonical;
    void *data;
    ck_assert(!bind_by(&s, &table_thing, "{count: 1, yes: maybe, rows: {p: {word: x}}, zz: 1}",
                       &canonical, &data));
    ck_assert_uint_eq(s.diags.count, 4);
}
END_TEST

START_TEST(structures)
{
    struct sheet s = sheet_new();
    const struct thing *t;
    same("structure: A", "{\"structure\":\"A\"}");
    same("structure: absent", "{\"structure\":\"absent\"}");
    same("structure: {all: [A, {any: [B, C]}]}",
         "{\"structure\":[\"all\",\"A\",[\"any\",\"B\",\"C\"]]}");
    same("structure: {at-least: 2, of: [A, B, C]}",
         "{\"structure\":[\"at-least\",\"2\",\"A\",\"B\",\"C\"]}");
    wrong("structure: {all: []}", 18, "\"all\" is followed by a list of elements and schemes");
    wrong("structure: {all: A}", 18, "\"all\" is followed by a list");
    wrong("structure: {all: [A, absent]}", 22, "\"absent\" stands alone");
    wrong("structure: {all: [A, 2b]}", 22, "expected the name of an element or a scheme");
    wrong("structure: {at-least: 4, of: [A, B, C]}", 23, "a whole number from 1 to 3");
    wrong("structure: {at-least: 0, of: [A]}", 23, "a whole number from 1 to 1");
    wrong("structure: {at-least: 2}", 12, "a structure is {all: [...]}");
    wrong("structure: {all: [A], any: [B]}", 12, "a structure is {all: [...]}");
    wrong("structure: [A, B]", 12, "a structure is {all: [...]}");
    bound(&s, "structure: {all: [A, {at-least: 2, of: [B, C, D]}, {any: [E, F]}]}", &t);
    ck_assert(t->structure->op == STRUCTURE_AT_LEAST && t->structure->k == 3);
    ck_assert(t->structure->of[1]->k == 2 && t->structure->of[1]->n == 3);
    ck_assert(t->structure->of[2]->k == 1 && t->structure->of[2]->n == 2);
    ck_assert_str_eq(t->structure->of[0]->name, "A");
}
END_TEST

/* 20 levels are bound, 21 are not. */
START_TEST(depth_of_structures)
{
    for (unsigned depth = STRUCTURE_DEPTH; depth <= STRUCTURE_DEPTH + 1; depth++) {
        struct sheet s = sheet_new();
        struct node *inner = node_scalar(s.arena, FORM_TEXT, "A", (struct place){0});
        for (unsigned i = 0; i < depth; i++) {
            struct node *list = node_list(s.arena, (struct place){0});
            struct node *all = node_map(s.arena, (struct place){0});
            node_push(s.arena, list, inner);
            node_add(s.arena, all, "all", (struct place){0}, list);
            inner = all;
        }
        struct node *root = node_map(s.arena, (struct place){0}), *canonical;
        node_add(s.arena, root, "structure", (struct place){0}, inner);
        struct binding b = {.arena = s.arena, .units = &units, .diags = &s.diags};
        void *data;
        ck_assert_int_eq(bind_object(&b, &table_thing, root, &canonical, &data),
                         depth == STRUCTURE_DEPTH);
    }
}
END_TEST

/* --- short forms of schemes --- */

static const char *scheme(struct sheet *s, const char *yaml)
{
    struct node *canonical;
    void *data;
    const struct table *t = kinds[KIND_SCHEME].table;
    ck_assert(bind_by(s, t, yaml, &canonical, &data));
    sheet_fine(s);
    struct binding b = {.arena = s->arena, .units = &units, .diags = &s->diags};
    struct node *document = bind_document(s->arena, t, canonical), *again;
    ck_assert(bind_object(&b, t, document, &again, &data));
    ck_assert(node_equal(canonical, again));
    return arena_printf(s->arena, "%s %s", sheet_json(s, canonical), sheet_json(s, document));
}

START_TEST(short_forms_of_schemes)
{
    struct sheet s = sheet_new();
    ck_assert_str_eq(scheme(&s, "{any: [A, B]}"),
                     "{\"works\":[\"any\",\"A\",\"B\"]} {\"any\":[\"A\",\"B\"]}");
    ck_assert_str_eq(scheme(&s, "{at-least: 1, of: [A, B], name: N}"),
                     "{\"name\":\"N\",\"works\":[\"at-least\",\"1\",\"A\",\"B\"]} "
                     "{\"name\":\"N\",\"works\":{\"at-least\":\"1\",\"of\":[\"A\",\"B\"]}}");
    ck_assert_str_eq(scheme(&s, "{works: absent}"), "{\"works\":\"absent\"} \"absent\"");
    struct node *canonical;
    void *data;
    s = sheet_new();
    ck_assert(!bind_by(&s, kinds[KIND_SCHEME].table, "{works: A, all: [B]}", &canonical, &data));
    sheet_expect(&s, 1, 12, "\"works\" and \"all\" say the same thing twice", NULL);
}
END_TEST

/* --- changes --- */

START_TEST(changes)
{
    same("change: {sites: {A: {name: X}, B: no}}",
         "{\"change\":{\"sites\":{\"A\":{\"name\":\"X\"},\"B\":false}}}");
    same("change: {elements: {A: {per-demand: 0.5 * was, test: no, since: no}}}",
         "{\"change\":{\"elements\":{\"A\":{\"per-demand\":{\"is\":\"0.5 * was\"},"
         "\"since\":false,\"test\":false}}}}");
    same("change: {elements: {A: {note: 'no'}}}",
         "{\"change\":{\"elements\":{\"A\":{\"note\":\"no\"}}}}");
    same("change: {schemes: {S: {all: [A, B]}}}",
         "{\"change\":{\"schemes\":{\"S\":{\"works\":[\"all\",\"A\",\"B\"]}}}}");
    same("change: {common-cause: {C: {of: {A: yes, B: no}, settings: no}}}",
         "{\"change\":{\"common-cause\":{\"C\":{\"of\":{\"A\":true,\"B\":false},"
         "\"settings\":false}}}}");
    same("change: {rates: {r: {is: {median: 2 * was}}}}",
         "{\"change\":{\"rates\":{\"r\":{\"is\":{\"median\":\"2 * was\"}}}}}");
    wrong("change: abc", 9, "a change is a map of sections, found a single value");
    wrong("change: {sources: {A: {title: x}}}", 10, "a change cannot touch \"sources\"");
    wrong("change: {hazard: {A: {}}}", 10, "is no section (did you mean \"hazards\"?)");
    wrong("change: {sites: A}", 17, "expected a map of ids, found a single value");
    wrong("change: {sites: {2b: {name: X}}}", 18, "\"2b\" cannot be the id of an object");
    wrong("change: {sites: {A: {nmae: X}}}", 22, "a site has no key \"nmae\"");
    wrong("change: {common-cause: {C: {of: {A: maybe}}}}", 37, "expected yes or no");
}
END_TEST

Suite *suite_bind(void)
{
    Suite *s = suite_create("bind");
    TCase *t = tcase_create("bind");
    tcase_add_test(t, texts_and_names);
    tcase_add_test(t, words_and_truth);
    tcase_add_test(t, counts);
    tcase_add_test(t, dates);
    tcase_add_test(t, units_of_rates);
    tcase_add_test(t, sets_of_names);
    tcase_add_test(t, maps_rows_and_lists);
    tcase_add_test(t, keys_of_maps);
    tcase_add_test(t, errors_are_collected);
    tcase_add_test(t, structures);
    tcase_add_test(t, depth_of_structures);
    tcase_add_test(t, short_forms_of_schemes);
    tcase_add_test(t, changes);
    suite_add_tcase(s, t);
    return s;
}
