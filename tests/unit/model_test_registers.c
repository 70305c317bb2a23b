/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random registers: every one loads, canonical forms are stable, and every field of every
 * table occurs in them. */
#include "model_test.h"

#include <stdio.h>
#include <string.h>

#include "model/tables_all.h"
#include "registers.h"

#define SEEDS 300

static struct model_sources sources_of(struct sheet *s, const struct node *root)
{
    struct model_sources sources = {0};
    bool merged = sheet_merge(s, 1, &root, &sources);
    sheet_fine(s);
    ck_assert(merged);
    return sources;
}

/* Binding what was bound gives it again, and so does binding what is written for people. */
static void expect_stable(struct sheet *s, const struct units *u, const struct object *o)
{
    const struct table *t = kinds[o->kind].table;
    struct binding b = {.arena = s->arena, .units = u, .diags = &s->diags};
    struct node *again = NULL, *round = NULL;
    void *data;
    bool bound = bind_object(&b, t, o->node, &again, &data);
    sheet_fine(s);
    ck_assert(bound);
    ck_assert_msg(node_equal(o->node, again), "%s: %s\nbound again: %s", o->id,
                  sheet_json(s, o->node), sheet_json(s, again));
    struct node *document = bind_document(s->arena, t, o->node);
    bound = bind_object(&b, t, document, &round, &data);
    sheet_fine(s);
    ck_assert(bound);
    ck_assert_msg(node_equal(o->node, round), "%s: %s\nthrough its document: %s", o->id,
                  sheet_json(s, o->node), sheet_json(s, round));
}

static void expect_all_stable(struct sheet *s, const struct model *m)
{
    struct units standard = {.currency = m->units.currency};
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < m->of[k].n; i++)
            expect_stable(s, k == KIND_REGISTER ? &standard : &m->units, m->of[k].at[i]);
}

/* The documents of a model, all sections. */
static struct node *document_of(struct sheet *s, const struct model *m)
{
    struct node *root = node_map(s->arena, (struct place){0});
    for (int k = 0; k < KIND_COUNT; k++) {
        struct node *section = node_map(s->arena, (struct place){0});
        for (size_t i = 0; i < m->of[k].n; i++) {
            const struct object *o = m->of[k].at[i];
            struct node *node = bind_document(s->arena, kinds[k].table, o->node);
            node_add(s->arena, k == KIND_REGISTER ? root : section, o->id, o->node->place, node);
        }
        if (section->n)
            node_add(s->arena, root, kinds[k].section, (struct place){0}, section);
    }
    return root;
}

/* Written as YAML, read and loaded again: the same objects. */
static void expect_round_trip(struct sheet *s, const struct model *m)
{
    struct text yaml;
    text_init(&yaml, s->arena);
    yaml_write(&yaml, document_of(s, m));
    const struct model *again = sheet_load(s, text_str(&yaml));
    sheet_fine(s);
    ck_assert_uint_eq(again->by_id.n, m->by_id.n);
    for (size_t i = 0; i < m->by_id.n; i++) {
        const struct object *o = m->by_id.at[i].value, *p = model_find(again, o->id);
        ck_assert_msg(p && node_equal(o->node, p->node), "%s: %s\nread again: %s", o->id,
                      sheet_json(s, o->node), p ? sheet_json(s, p->node) : "not there");
    }
}

START_TEST(random_registers_are_stable)
{
    for (uint64_t seed = 0; seed < SEEDS; seed++) {
        struct sheet s = sheet_new();
        struct model_sources sources =
            sources_of(&s, random_register(s.arena, seed, &register_small));
        struct model *m = model_load(s.arena, sources.at, sources.n, &s.diags);
        if (!m)
            fprintf(stderr, "seed %u\n", (unsigned)seed);
        sheet_fine(&s);
        expect_all_stable(&s, m);
        if (seed % 10 == 0)
            expect_round_trip(&s, m);
    }
}
END_TEST

START_TEST(same_seed_same_register)
{
    struct sheet s = sheet_new();
    const char *first = sheet_json(&s, random_register(s.arena, 77, &register_small));
    ck_assert_str_eq(first, sheet_json(&s, random_register(s.arena, 77, &register_small)));
    ck_assert_str_ne(first, sheet_json(&s, random_register(s.arena, 78, &register_small)));
}
END_TEST

/* --- every field --- */

static enum walk tick(void *ctx, const struct visit *v)
{
    struct strmap *seen = ctx;
    if (v->field->key && !v->in) {
        struct arena *a = seen->at ? seen->at[0].value : NULL;
        strmap_set(a, seen, arena_printf(a, "%p", (const void *)v->field), (void *)v->field);
    }
    return WALK_INTO;
}

static bool all_seen(struct sheet *s, const struct strmap *seen)
{
    struct tables tables = {0};
    bool all = true;
    tables_all(s->arena, &tables);
    for (size_t i = 0; i < tables.n; i++)
        for (size_t k = 0; k < tables.at[i]->n_fields; k++) {
            const struct field *f = &tables.at[i]->fields[k];
            if (strmap_has(seen, arena_printf(s->arena, "%p", (const void *)f)))
                continue;
            fprintf(stderr, "never given: %s.%s\n", tables.at[i]->name, f->key);
            all = false;
        }
    return all;
}

START_TEST(every_field_occurs)
{
    struct sheet s = sheet_new();
    struct strmap seen = {0};
    strmap_set(s.arena, &seen, "", s.arena); /* the arena, for tick */
    for (uint64_t seed = 0; seed < SEEDS; seed++) {
        struct sheet one = sheet_new();
        struct model_sources all =
            sources_of(&one, random_register(one.arena, seed, &register_small));
        struct model *m = model_load(one.arena, all.at, all.n, &one.diags);
        sheet_fine(&one);
        struct walker w = {.ctx = &seen, .enter = tick};
        for (size_t i = 0; i < m->by_id.n; i++) {
            const struct object *o = m->by_id.at[i].value;
            walk_table(one.arena, kinds[o->kind].table, o->node, NULL, &w);
        }
    }
    ck_assert(all_seen(&s, &seen));
}
END_TEST

/* --- large ones, and samples --- */

START_TEST(large_register_loads)
{
    struct sheet s = sheet_new();
    struct register_shape shape = register_small;
    shape.hazards = 2000;
    shape.schemes = 1000;
    shape.elements = 1000;
    shape.values = 200;
    shape.options = 10;
    struct model_sources sources = sources_of(&s, random_register(s.arena, 5, &shape));
    const struct model *m = model_load(s.arena, sources.at, sources.n, &s.diags);
    sheet_fine(&s);
    ck_assert_uint_eq(m->of[KIND_HAZARD].n, 2001);
    ck_assert_uint_eq(m->of[KIND_ELEMENT].n, 1002);
}
END_TEST

START_TEST(sample_is_stable)
{
    static const char *const files[] = {"register", "network", "hazards",
                                        "states",   "options", "decisions"};
    const struct node *roots[5];
    struct sheet s = sheet_new();
    struct model_sources sources = {0};
    for (int i = 0; i < 5; i++) {
        const char *path = arena_printf(s.arena, "samples/skerry/%s.yaml", files[i]);
        const char *text = sheet_file(&s, path);
        roots[i] = yaml_read(s.arena, path, text, strlen(text), &s.diags);
    }
    sheet_fine(&s);
    bool merged = sheet_merge(&s, 5, roots, &sources);
    sheet_fine(&s);
    ck_assert(merged);
    const struct model *m = model_load(s.arena, sources.at, sources.n, &s.diags);
    sheet_fine(&s);
    ck_assert_uint_gt(m->of[KIND_HAZARD].n, 10);
    expect_all_stable(&s, m);
    expect_round_trip(&s, m);
}
END_TEST

Suite *suite_registers(void)
{
    Suite *s = suite_create("registers");
    TCase *t = tcase_create("registers");
    tcase_set_timeout(t, 600);
    tcase_add_test(t, random_registers_are_stable);
    tcase_add_test(t, same_seed_same_register);
    tcase_add_test(t, every_field_occurs);
    tcase_add_test(t, large_register_loads);
    tcase_add_test(t, sample_is_stable);
    suite_add_tcase(s, t);
    return s;
}
