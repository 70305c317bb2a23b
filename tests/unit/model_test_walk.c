/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The walker: order, paths, members; the references that it finds. */
#include "model_test.h"

#include <string.h>

#include "model/tables_all.h"

/* --- tables --- */

/* What tables promise: keys once, groups of keys that are there, parts where they must be. */
START_TEST(tables_are_sound)
{
    struct sheet s = sheet_new();
    struct tables tables = {0};
    tables_all(s.arena, &tables);
    for (size_t i = 0; i < tables.n; i++) {
        const struct table *t = tables.at[i];
        for (size_t k = 0; k < t->n_fields; k++) {
            const struct field *f = &t->fields[k];
            ck_assert_msg(table_field(t, f->key) == f, "%s.%s stands twice", t->name, f->key);
            ck_assert(f->help && *f->help && f->offset + field_size(f) <= t->size);
            ck_assert((f->part != NULL) == (f->type == FIELD_ROWS || f->type == FIELD_LIST));
            ck_assert((f->table != NULL) == (f->type == FIELD_STRUCT));
            ck_assert((f->words != NULL) == (f->type == FIELD_WORD));
            bool refers =
                f->type == FIELD_REF || f->type == FIELD_REFS || f->type == FIELD_STRUCTURE;
            ck_assert(!refers || f->kinds);
        }
        for (size_t g = 0; g < t->n_groups; g++)
            for (size_t k = 0; k < 8 && t->groups[g].keys[k]; k++)
                ck_assert_ptr_nonnull(table_field(t, t->groups[g].keys[k]));
        ck_assert(!t->short_key || table_field(t, t->short_key));
    }
    ck_assert_ptr_null(table_field(kinds[KIND_HAZARD].table, "respons"));
}
END_TEST

START_TEST(kinds_by_name)
{
    struct sheet s = sheet_new();
    for (int k = 0; k < KIND_COUNT; k++) {
        ck_assert_int_eq(kind_named(kinds[k].name), k);
        ck_assert_int_eq(kind_of_section(kinds[k].section), k);
    }
    ck_assert_int_eq(kind_named("hazards"), KIND_COUNT);
    ck_assert_int_eq(kind_of_section("removed"), KIND_COUNT);
    ck_assert_str_eq(kinds_words(s.arena, KIND_BIT(KIND_ELEMENT)), "an element");
    ck_assert_str_eq(kinds_words(s.arena, KIND_BIT(KIND_ELEMENT) | KIND_BIT(KIND_SCHEME)),
                     "an element or a scheme");
    unsigned three = KIND_BIT(KIND_SITE) | KIND_BIT(KIND_VALUE) | KIND_BIT(KIND_OPTION);
    ck_assert_str_eq(kinds_words(s.arena, three), "a site, a value or an option");
}
END_TEST

/* --- walking --- */

static const char hazard[] =
    "elements:\n"
    "  R: {per-demand: 0.01}\n"
    "values:\n"
    "  loss: 3 kEUR\n"
    "hazards:\n"
    "  H:\n"
    "    name: A fault\n"
    "    frequency: 0.2 per a\n"
    "    response:\n"
    "      main: {cleared-by: R, in: 80 ms, sees: 0.9, outcome: none}\n"
    "      last: {split: {q: {share: rest, outcome: burnt}, p: {share: 0.25, outcome: none}}}\n"
    "    outcomes:\n"
    "      burnt: {name: Burnt, damage: {all-of-it: {category: equipment, is: 2 * loss}}}\n";

struct log {
    struct sheet *sheet;
    struct text text;
};

static enum walk note(void *ctx, const struct visit *v)
{
    struct log *l = ctx;
    text_printf(&l->text, "%s%s%s ", v->in ? "[" : "", v->path, v->in ? "]" : "");
    return v->key && !v->in && text_equal(v->key, "sees") ? WALK_PAST : WALK_INTO;
}

static void note_end(void *ctx, const struct visit *v)
{
    struct log *l = ctx;
    if (v->field->type == FIELD_STRUCT || v->field->type == FIELD_ROWS)
        text_printf(&l->text, "/%s ", v->path);
}

START_TEST(order_of_a_walk)
{
    struct sheet s = sheet_new();
    const struct model *m = sheet_register(&s, hazard);
    sheet_fine(&s);
    const struct object *o = model_find(m, "H");
    struct log l = {.sheet = &s};
    text_init(&l.text, s.arena);
    struct walker w = {.ctx = &l, .enter = note, .leave = note_end};
    walk_table(s.arena, kinds[KIND_HAZARD].table, o->node, o->data, &w);
    ck_assert_str_eq(
        text_str(&l.text),
        "frequency name outcomes [outcomes/burnt] outcomes/burnt/damage "
        "[outcomes/burnt/damage/all-of-it] outcomes/burnt/damage/all-of-it/category "
        "outcomes/burnt/damage/all-of-it/is /outcomes/burnt/damage/all-of-it "
        "/outcomes/burnt/damage outcomes/burnt/name /outcomes/burnt /outcomes response "
        "[response/last] response/last/split [response/last/split/p] "
        "response/last/split/p/outcome response/last/split/p/share /response/last/split/p "
        "[response/last/split/q] response/last/split/q/outcome response/last/split/q/share "
        "/response/last/split/q /response/last/split /response/last [response/main] "
        "response/main/cleared-by response/main/in response/main/outcome response/main/sees "
        "/response/main /response ");
}
END_TEST

/* Members belong to their nodes: texts, words and quantities are the same there. */
static enum walk compare(void *ctx, const struct visit *v)
{
    size_t *count = ctx;
    switch (v->field->type) {
    case FIELD_TEXT:
    case FIELD_NAME:
    case FIELD_REF:
        ck_assert_str_eq(*(const char *const *)v->member, v->node->text);
        (*count)++;
        break;
    case FIELD_WORD:
        ck_assert_str_eq(v->field->words[*(const int *)v->member], v->node->text);
        (*count)++;
        break;
    case FIELD_QUANTITY: {
        const struct quantity *q = *(struct quantity *const *)v->member;
        ck_assert(!q->expr || v->node->type == NODE_SCALAR);
        (*count)++;
        break;
    }
    case FIELD_ROWS: {
        const struct rows *rows = v->member;
        ck_assert_uint_eq(rows->n, v->node->n);
        for (size_t i = 0; i < rows->n; i++)
            ck_assert_str_eq(rows->keys[i], v->node->pairs[i].key);
        break;
    }
    default: break;
    }
    return WALK_INTO;
}

START_TEST(members_go_with_nodes)
{
    struct sheet s = sheet_new();
    const struct model *m = sheet_load(&s, sheet_file(&s, "tests/golden/bad/good.yaml"));
    sheet_fine(&s);
    size_t count = 0;
    struct walker w = {.ctx = &count, .enter = compare};
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < m->of[k].n; i++)
            walk_table(s.arena, kinds[k].table, m->of[k].at[i]->node, m->of[k].at[i]->data, &w);
    ck_assert_uint_ge(count, 20);
}
END_TEST

/* --- references --- */

static const char *references(struct sheet *s, const struct object *o)
{
    struct text t;
    text_init(&t, s->arena);
    for (size_t i = 0; i < o->refs.n; i++) {
        const struct reference *r = &o->refs.at[i];
        text_printf(&t, "%s%s@%s:%u:%u ", r->trace ? "~" : "", r->id, r->path, r->place.line,
                    r->place.column);
    }
    return text_str(&t);
}

START_TEST(references_of_objects)
{
    struct sheet s = sheet_new();
    const struct model *m = sheet_register(&s, "sources:\n"
                                               "  TEST: {title: A test}\n"
                                               "elements:\n"
                                               "  A: {per-demand: {is: 0.01, source: TEST}}\n"
                                               "  B: {per-demand: 2 * fails(A)}\n"
                                               "schemes:\n"
                                               "  S: {all: [A, {any: [B, A]}]}\n"
                                               "values:\n"
                                               "  v: 2 kEUR\n"
                                               "  w: {is: 3 * v + frequency(H) * v * 1 a}\n"
                                               "hazards:\n"
                                               "  H: {name: X, frequency: unwanted(S) / 2, "
                                               "response: {x: {outcome: none}}, outcomes: {}}\n"
                                               "options:\n"
                                               "  O: {name: P, change: {}}\n"
                                               "  Q: {name: Q, excludes: [O], change: "
                                               "{elements: {A: {note: n}}}}\n");
    sheet_fine(&s);
    ck_assert_str_eq(references(&s, model_find(m, "A")), "~TEST@per-demand/source:11:38 ");
    ck_assert_str_eq(references(&s, model_find(m, "B")), "A@per-demand/is:12:23 ");
    ck_assert_str_eq(references(&s, model_find(m, "S")),
                     "A@works:14:13 B@works:14:23 A@works:14:26 ");
    ck_assert_str_eq(references(&s, model_find(m, "w")), "v@is:17:15 H@is:17:19 v@is:17:34 ");
    ck_assert_str_eq(references(&s, model_find(m, "H")), "S@frequency:19:27 ");
    ck_assert_str_eq(references(&s, model_find(m, "Q")), "O@excludes:22:27 ");
}
END_TEST

START_TEST(keys_of_rows_refer)
{
    struct sheet s = sheet_new();
    const struct model *m =
        sheet_register(&s, "groups: {CREW: {name: C, persons: 3}}\n"
                           "elements: {E: {per-demand: 0.1}}\n"
                           "hazards:\n"
                           "  H:\n"
                           "    name: X\n"
                           "    frequency: 1 per a\n"
                           "    disables: {E: 0.5}\n"
                           "    response: {x: {outcome: o}}\n"
                           "    outcomes: {o: {name: O, harm: {CREW: {present: 0.1}}}}\n");
    sheet_fine(&s);
    ck_assert_str_eq(references(&s, model_find(m, "H")),
                     "E@disables:14:16 CREW@outcomes/o/harm:16:36 ");
}
END_TEST

Suite *suite_walk(void)
{
    Suite *s = suite_create("walk");
    TCase *t = tcase_create("walk");
    tcase_add_test(t, tables_are_sound);
    tcase_add_test(t, kinds_by_name);
    tcase_add_test(t, order_of_a_walk);
    tcase_add_test(t, members_go_with_nodes);
    tcase_add_test(t, references_of_objects);
    tcase_add_test(t, keys_of_rows_refer);
    suite_add_tcase(s, t);
    return s;
}
