/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Variants: what options make of a register. */
#include "model_test.h"

#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "model/tables_all.h"
#include "registers.h"

static const char base[] =
    "elements:\n"
    "  A: {per-demand: 0.01, note: Numerical}\n"
    "  B: {per-demand: 0.02}\n"
    "  Q: {per-demand: {prior: jeffreys, failures: 1, demands: 90}}\n"
    "values:\n"
    "  plain: 2 h\n"
    "  sum: 2 h + 3 h\n"
    "  named: 0.5 * plain\n"
    "  ranged: 90 % within 1 h .. 3 h\n"
    "  shaped: {median: 2 h, error-factor: 3}\n"
    "  timed: {is: {median: 2 h, error-factor: 3, times: 4}}\n"
    "  varied: {varies: {shape: uniform, from: 1 h, to: 3 h}}\n"
    "schemes:\n"
    "  S: {all: [A, B]}\n"
    "  LATER: absent\n"
    "common-cause:\n"
    "  CC: {beta: 0.1, of: [A, B], settings: yes}\n"
    "hazards:\n"
    "  H:\n"
    "    name: X\n"
    "    frequency: 1 per a\n"
    "    response: {main: {cleared-by: S, in: 1 s, outcome: burnt}, last: {outcome: burnt}}\n"
    "    outcomes: {burnt: {name: Y, damage: {it: {category: c, is: 3 EUR}}}}\n";

/* A register with options P, Q1, ... whose changes are given (NULL-terminated). */
static const struct model *with_options(struct sheet *s, const char *const *changes)
{
    struct text yaml;
    *s = sheet_new();
    text_init(&yaml, s->arena);
    text_printf(&yaml, "%soptions:\n", base);
    for (int i = 0; changes[i]; i++)
        text_printf(&yaml, "  OPT-%d: {name: N, change: {%s}}\n", i, changes[i]);
    const struct model *m = sheet_register(s, text_str(&yaml));
    sheet_fine(s);
    return m;
}

static const struct model *variant(struct sheet *s, const struct model *m, unsigned n)
{
    static const char *const all[] = {"OPT-0", "OPT-1", "OPT-2", "OPT-3"};
    const struct model *v = model_variant(s->arena, m, n, all, &s->diags);
    sheet_fine(s);
    return v;
}

/* An object under one change. */
static const char *under(struct sheet *s, const char *change, const char *id)
{
    const char *const changes[] = {change, NULL};
    const struct model *v = variant(s, with_options(s, changes), 1);
    return sheet_json(s, model_find(v, id)->node);
}

static void expect(const char *change, const char *id, const char *json)
{
    struct sheet s;
    ck_assert_str_eq(under(&s, change, id), json);
}

/* --- was --- */

START_TEST(was_on_expressions)
{
    expect("values: {plain: 0.6 * was}", "plain", "{\"is\":\"0.6 * 2 h\"}");
    expect("values: {plain: was / 2}", "plain", "{\"is\":\"2 h / 2\"}");
    expect("values: {sum: {is: 0.6 * was}}", "sum", "{\"is\":\"0.6 * (2 h + 3 h)\"}");
    expect("values: {named: 3 * was}", "named", "{\"is\":\"3 * (0.5 * plain)\"}");
    expect("elements: {A: {per-demand: 0.5 * was}}", "A",
           "{\"note\":\"Numerical\",\"per-demand\":{\"is\":\"0.5 * 0.01\"}}");
    expect("hazards: {H: {frequency: 0.1 * was}}", "H",
           "{\"frequency\":\"0.1 * 1 per a\",\"name\":\"X\",\"outcomes\":{\"burnt\":{\"damage\":"
           "{\"it\":{\"category\":\"c\",\"is\":\"3 EUR\"}},\"name\":\"Y\"}},\"response\":"
           "{\"last\":{\"outcome\":\"burnt\"},\"main\":{\"cleared-by\":\"S\",\"in\":\"1 s\","
           "\"outcome\":\"burnt\"}}}");
}
END_TEST

START_TEST(was_on_distributions)
{
    expect("values: {ranged: 0.6 * was}", "ranged",
           "{\"is\":{\"range\":\"90 % within 1 h .. 3 h\",\"times\":\"0.6\"}}");
    expect("values: {shaped: 0.6 * was}", "shaped",
           "{\"is\":{\"error-factor\":\"3\",\"median\":\"2 h\",\"times\":\"0.6\"}}");
    expect("values: {shaped: was / 2}", "shaped",
           "{\"is\":{\"error-factor\":\"3\",\"median\":\"2 h\",\"times\":\"1 / 2\"}}");
    expect("values: {timed: 0.6 * was}", "timed",
           "{\"is\":{\"error-factor\":\"3\",\"median\":\"2 h\",\"times\":\"0.6 * 4\"}}");
    expect("values: {varied: {varies: 0.5 * was}}", "varied",
           "{\"varies\":{\"from\":\"1 h\",\"shape\":\"uniform\",\"times\":\"0.5\","
           "\"to\":\"3 h\"}}");
    expect("values: {shaped: {is: {median: 0.5 * was}}}", "shaped",
           "{\"is\":{\"error-factor\":\"3\",\"median\":\"0.5 * 2 h\"}}");
}
END_TEST

/* Scaling scales the mean, however the quantity is written. */
START_TEST(was_scales_the_mean)
{
    static const char *const ids[] = {"ranged", "shaped", "timed"};
    struct sheet texts = sheet_new();
    for (size_t i = 0; i < 3; i++) {
        struct sheet s;
        const char *const changes[] = {arena_printf(texts.arena, "values: {%s: 0.6 * was}", ids[i]),
                                       arena_printf(texts.arena, "values: {%s: was / 4}", ids[i]),
                                       NULL};
        const struct model *m = with_options(&s, changes), *v = variant(&s, m, 2);
        const struct value *before = model_get(m, KIND_VALUE, ids[i]);
        const struct value *after = model_get(v, KIND_VALUE, ids[i]);
        double ratio = quantity_mean(after->is) / quantity_mean(before->is);
        ck_assert_double_eq_tol(ratio, 0.15, 1e-15);
    }
}
END_TEST

/* --- sets, removal, structures --- */

START_TEST(sets)
{
    expect("common-cause: {CC: {of: {Q: yes, B: no}}}", "CC",
           "{\"beta\":\"0.1\",\"of\":[\"A\",\"Q\"],\"settings\":true}");
    expect("common-cause: {CC: {of: [Q]}}", "CC",
           "{\"beta\":\"0.1\",\"of\":[\"Q\"],\"settings\":true}");
    expect("common-cause: {CC: {settings: no}}", "CC",
           "{\"beta\":\"0.1\",\"of\":[\"A\",\"B\"],\"settings\":false}");
}
END_TEST

START_TEST(two_options_on_one_set)
{
    static const char *const changes[] = {"common-cause: {CC: {of: {Q: yes}}}",
                                          "common-cause: {CC: {of: {A: no}}}", NULL};
    struct sheet s;
    const struct model *v = variant(&s, with_options(&s, changes), 2);
    ck_assert_str_eq(sheet_json(&s, model_find(v, "CC")->node),
                     "{\"beta\":\"0.1\",\"of\":[\"B\",\"Q\"],\"settings\":true}");
}
END_TEST

START_TEST(removal)
{
    struct sheet s;
    expect("elements: {A: {note: no}}", "A", "{\"per-demand\":{\"is\":\"0.01\"}}");
    expect("elements: {A: {note: 'no'}}", "A",
           "{\"note\":\"no\",\"per-demand\":{\"is\":\"0.01\"}}");
    expect("elements: {Q: {per-demand: {prior: no, failures: no, demands: no, is: 0.1}}}", "Q",
           "{\"per-demand\":{\"is\":\"0.1\"}}");
    ck_assert_ptr_nonnull(strstr(under(&s, "hazards: {H: {response: {main: no}}}", "H"),
                                 "\"response\":{\"last\":{\"outcome\":\"burnt\"}}"));
    static const char *const changes[] = {"elements: {Q: no}", NULL};
    const struct model *m = with_options(&s, changes), *v = variant(&s, m, 1);
    ck_assert_ptr_null(model_find(v, "Q"));
    ck_assert_ptr_nonnull(model_find(m, "Q"));
}
END_TEST

START_TEST(new_objects_and_structures)
{
    struct sheet s;
    static const char *const changes[] = {
        "elements: {NEW: {kind: relay, per-demand: 0.001}}, "
        "schemes: {LATER: {any: [NEW, A]}, T: {works: NEW}}, "
        "hazards: {H: {response: {fast: {cleared-by: T, in: 90 ms, outcome: none}}}}",
        NULL};
    const struct model *m = with_options(&s, changes), *v = variant(&s, m, 1);
    ck_assert_str_eq(sheet_json(&s, model_find(v, "LATER")->node),
                     "{\"works\":[\"any\",\"NEW\",\"A\"]}");
    const struct element *e = model_get(v, KIND_ELEMENT, "NEW");
    ck_assert_str_eq(element_kinds[e->kind], "relay");
    const struct hazard *h = model_get(v, KIND_HAZARD, "H");
    ck_assert_uint_eq(h->response.n, 3);
    ck_assert_ptr_null(model_find(m, "NEW"));
    ck_assert(model_find(v, "NEW")->changed && model_find(v, "H")->changed);
    ck_assert(!model_find(v, "A")->changed);
    ck_assert_ptr_eq(model_find(v, "A"), model_find(m, "A")); /* untouched: found below */
    ck_assert_ptr_eq(v->below, m);
    ck_assert_ptr_eq(v->settings, m->settings);
    ck_assert_ptr_eq(variant(&s, m, 0), m);
}
END_TEST

/* --- contradictions --- */

/* Where two changes contradict; "" where they do not. In both orders. */
static const char *contradiction(struct sheet *s, const char *p, const char *q)
{
    const char *const changes[] = {p, q, NULL};
    const struct model *m = with_options(s, changes);
    const char *path = model_contradiction(s->arena, m, "OPT-0", "OPT-1");
    const char *back = model_contradiction(s->arena, m, "OPT-1", "OPT-0");
    ck_assert((path == NULL) == (back == NULL) && (!path || text_equal(path, back)));
    static const char *const both[] = {"OPT-0", "OPT-1"};
    const struct model *v = model_variant(s->arena, m, 2, both, &s->diags);
    ck_assert((v == NULL) == (path != NULL));
    return path ? path : "";
}

START_TEST(contradictions)
{
    struct sheet s;
    ck_assert_str_eq(
        contradiction(&s, "elements: {A: {per-demand: 0.1}}", "elements: {A: {per-demand: 0.2}}"),
        "elements/A/per-demand/is");
    ck_assert_uint_eq(s.diags.count, 1);
    ck_assert_ptr_nonnull(strstr(s.diags.list.at[0].text, "\"OPT-0\" and \"OPT-1\" contradict"));
    ck_assert_str_eq(contradiction(&s, "elements: {A: {per-demand: 0.1}}",
                                   "elements: {A: {per-demand: 0.5 * was}}"),
                     "elements/A/per-demand/is");
    ck_assert_str_eq(contradiction(&s, "hazards: {H: {response: {main: no}}}",
                                   "hazards: {H: {response: {main: {in: 2 s}}}}"),
                     "hazards/H/response/main");
    ck_assert_str_eq(contradiction(&s, "schemes: {LATER: A}", "schemes: {LATER: B}"),
                     "schemes/LATER/works");
    ck_assert_str_eq(
        contradiction(&s, "common-cause: {CC: {of: {Q: yes}}}", "common-cause: {CC: {of: [Q]}}"),
        "common-cause/CC/of");
    ck_assert_str_eq(contradiction(&s, "common-cause: {CC: {of: {Q: yes}}}",
                                   "common-cause: {CC: {of: {Q: no}}}"),
                     "common-cause/CC/of/Q");
}
END_TEST

START_TEST(what_is_no_contradiction)
{
    struct sheet s;
    ck_assert_str_eq(
        contradiction(&s, "elements: {A: {per-demand: 0.1}}", "elements: {A: {per-demand: 0.1}}"),
        "");
    ck_assert_str_eq(contradiction(&s, "values: {plain: 0.5 * was}", "values: {plain: was / 2}"),
                     "");
    ck_assert_str_eq(
        contradiction(&s, "elements: {A: {per-demand: 0.1}}", "elements: {A: {note: other}}"), "");
    ck_assert_str_eq(
        contradiction(&s, "hazards: {H: {response: {p: {cleared-by: A, in: 2 s, outcome: none}}}}",
                      "hazards: {H: {response: {q: {cleared-by: B, in: 3 s, outcome: none}}}}"),
        "");
}
END_TEST

/* Each is right alone, together they are not: rows that act at one time. */
START_TEST(results_are_checked)
{
    static const char *const changes[] = {
        "hazards: {H: {response: {p: {cleared-by: A, in: 2 s, outcome: none}}}}",
        "hazards: {H: {response: {q: {cleared-by: B, in: 2000 ms, outcome: none}}}}", NULL};
    static const char *const both[] = {"OPT-0", "OPT-1"};
    struct sheet s;
    const struct model *m = with_options(&s, changes);
    ck_assert_ptr_null(model_variant(s.arena, m, 2, both, &s.diags));
    ck_assert_uint_eq(s.diags.count, 1);
    ck_assert_ptr_nonnull(strstr(s.diags.list.at[0].text, "the same clearance time"));
}
END_TEST

/* --- order --- */

static bool equal_objects(const struct model *p, const struct model *q)
{
    bool equal = p->by_id.n == q->by_id.n;
    for (size_t i = 0; equal && i < p->by_id.n; i++) {
        const struct object *o = p->by_id.at[i].value;
        const struct object *r = strmap_get(&q->by_id, p->by_id.at[i].key);
        equal = (o == NULL) == (r == NULL) && (!o || node_equal(o->node, r->node));
    }
    return equal;
}

START_TEST(order_does_not_matter)
{
    static const char *const changes[] = {
        "hazards: {H: {response: {p: {cleared-by: A, in: 2 s, outcome: none}}}}",
        "elements: {A: {note: no}, N: {per-demand: 0.1}}, common-cause: {CC: {of: {A: no}}}",
        "common-cause: {CC: {of: {Q: yes}}}, hazards: {H: {outcomes: {burnt: {name: Z}}}}", NULL};
    static const char *const forward[] = {"OPT-0", "OPT-1", "OPT-2"};
    static const char *const backward[] = {"OPT-2", "OPT-1", "OPT-0"};
    struct sheet s;
    const struct model *m = with_options(&s, changes);
    const struct model *p = model_variant(s.arena, m, 3, forward, &s.diags);
    const struct model *q = model_variant(s.arena, m, 3, backward, &s.diags);
    sheet_fine(&s);
    ck_assert(equal_objects(p, q));
    ck_assert_uint_eq(p->by_id.n, 4); /* H, A, N, CC */
}
END_TEST

/* Factors come in the order of the options, but their product is the same. */
START_TEST(order_of_factors)
{
    static const char *const changes[] = {"values: {plain: 0.25 * was, shaped: 0.25 * was}",
                                          "values: {plain: was / 5, shaped: was * 0.5}", NULL};
    static const char *const forward[] = {"OPT-0", "OPT-1"}, *const backward[] = {"OPT-1", "OPT-0"};
    struct sheet s;
    const struct model *m = with_options(&s, changes);
    const struct model *p = model_variant(s.arena, m, 2, forward, &s.diags);
    const struct model *q = model_variant(s.arena, m, 2, backward, &s.diags);
    sheet_fine(&s);
    const struct value *v = model_get(p, KIND_VALUE, "plain"),
                       *w = model_get(q, KIND_VALUE, "plain");
    ck_assert_double_eq_tol(expr_constant(v->is->expr), 0.1 / 8760, 1e-20);
    ck_assert_double_eq_tol(expr_constant(w->is->expr), 0.1 / 8760, 1e-20);
    v = model_get(p, KIND_VALUE, "shaped");
    w = model_get(q, KIND_VALUE, "shaped");
    ck_assert(v->is->times == 0.125 && w->is->times == 0.125);
}
END_TEST

/* --- random registers --- */

/* Each pair of options contradicts, or makes a register in either order that differs from
 * the base in the same objects. */
static void expect_pairs(struct sheet *s, const struct model *m, size_t *together, size_t *apart)
{
    const struct objects *options = &m->of[KIND_OPTION];
    for (size_t i = 0; i < options->n; i++)
        for (size_t k = 0; k < i; k++) {
            const char *pair[] = {options->at[k]->id, options->at[i]->id};
            const char *back[] = {pair[1], pair[0]};
            bool contradict = model_contradiction(s->arena, m, pair[0], pair[1]) != NULL;
            struct diags d;
            diags_init(&d, s->arena);
            const struct model *p = model_variant(s->arena, m, 2, pair, &d);
            const struct model *q = model_variant(s->arena, m, 2, back, &d);
            ck_assert_msg((p == NULL) == contradict && (q == NULL) == contradict, "%s %s: %s",
                          pair[0], pair[1],
                          d.count ? diag_line(s->arena, &d.list.at[0]) : "no diagnostic");
            *(contradict ? apart : together) += 1;
            ck_assert(contradict || p->by_id.n == q->by_id.n);
        }
}

START_TEST(options_of_random_registers)
{
    size_t together = 0, apart = 0;
    for (uint64_t seed = 1000; seed < 1100; seed++) {
        struct sheet s = sheet_new();
        const struct node *root = random_register(s.arena, seed, &register_small);
        struct model_sources sources = {0};
        ck_assert(sheet_merge(&s, 1, &root, &sources));
        const struct model *m = model_load(s.arena, sources.at, sources.n, &s.diags);
        sheet_fine(&s);
        expect_pairs(&s, m, &together, &apart);
    }
    ck_assert_uint_gt(together, 500);
    ck_assert_uint_gt(apart, 20);
}
END_TEST

Suite *suite_variant(void)
{
    Suite *s = suite_create("variants");
    TCase *t = tcase_create("variants");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, was_on_expressions);
    tcase_add_test(t, was_on_distributions);
    tcase_add_test(t, was_scales_the_mean);
    tcase_add_test(t, sets);
    tcase_add_test(t, two_options_on_one_set);
    tcase_add_test(t, removal);
    tcase_add_test(t, new_objects_and_structures);
    tcase_add_test(t, contradictions);
    tcase_add_test(t, what_is_no_contradiction);
    tcase_add_test(t, results_are_checked);
    tcase_add_test(t, order_does_not_matter);
    tcase_add_test(t, order_of_factors);
    tcase_add_test(t, options_of_random_registers);
    suite_add_tcase(s, t);
    return s;
}
