/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Merge patches: the cases of RFC 7396, our additions, and three properties:
 * differences applied make the one tree into the other, patches that do not
 * contradict each other commute, and neither tree is changed. */
#include <stdlib.h>
#include <string.h>

#include "doc/patch.h"
#include "doc_test.h"
#include "random.h"
#include "tree.h"

/* ---- rules of the tests ----
 * `7 * was` multiplies a number, modulo a prime so that it stays short. */

enum { PRIME = 1000003 };

struct rules_ctx {
    struct arena *a;
    unsigned failures;
};

static bool uses_was(void *ctx, const struct node *scalar)
{
    (void)ctx;
    return strstr(scalar->text, " * was") != NULL;
}

static struct node *combine(void *ctx, const struct node *before, const struct node *patch)
{
    struct rules_ctx *c = ctx;
    if (!before || before->type != NODE_SCALAR || before->form != FORM_COUNT) {
        c->failures++;
        return NULL;
    }
    unsigned long product =
        strtoul(before->text, NULL, 10) % PRIME * strtoul(patch->text, NULL, 10) % PRIME;
    return node_scalar(c->a, FORM_COUNT, arena_printf(c->a, "%lu", product), patch->place);
}

static bool no_is_value(void *ctx, const char *path)
{
    (void)ctx;
    return text_equal(path, "x/P-1/verified");
}

static bool is_set(void *ctx, const char *path)
{
    (void)ctx;
    return text_equal(path, "x/P-1/of") || text_equal(path, "d");
}

static struct patch_rules rules_for(struct rules_ctx *c)
{
    return (struct patch_rules){c, uses_was, combine, no_is_value, is_set};
}

/* ---- cases ---- */

struct merge_case {
    const char *target, *patch, *result; /* NULL: nothing */
};

static const struct merge_case cases[] = {
    /* RFC 7396 appendix A, in its order, null as false (from memory) */
    {"{\"a\":\"b\"}", "{\"a\":\"c\"}", "{\"a\":\"c\"}"},
    {"{\"a\":\"b\"}", "{\"b\":\"c\"}", "{\"a\":\"b\",\"b\":\"c\"}"},
    {"{\"a\":\"b\"}", "{\"a\":false}", "{}"},
    {"{\"a\":\"b\",\"b\":\"c\"}", "{\"a\":false}", "{\"b\":\"c\"}"},
    {"{\"a\":[\"b\"]}", "{\"a\":\"c\"}", "{\"a\":\"c\"}"},
    {"{\"a\":\"c\"}", "{\"a\":[\"b\"]}", "{\"a\":[\"b\"]}"},
    {"{\"a\":{\"b\":\"c\"}}", "{\"a\":{\"b\":\"d\",\"c\":false}}", "{\"a\":{\"b\":\"d\"}}"},
    {"{\"a\":[{\"b\":\"c\"}]}", "{\"a\":[1]}", "{\"a\":[1]}"},
    {"[\"a\",\"b\"]", "[\"c\",\"d\"]", "[\"c\",\"d\"]"},
    {"{\"a\":\"b\"}", "[\"c\"]", "[\"c\"]"},
    {"{\"a\":\"foo\"}", "false", NULL},
    {"{\"a\":\"foo\"}", "\"bar\"", "\"bar\""},
    {"{\"e\":false}", "{\"a\":1}", "{\"a\":1,\"e\":false}"},
    {"[1,2]", "{\"a\":\"b\",\"c\":false}", "{\"a\":\"b\"}"},
    {"{}", "{\"a\":{\"bb\":{\"ccc\":false}}}", "{\"a\":{\"bb\":{}}}"},
    /* our own: nothing before */
    {NULL, "{\"a\":{\"b\":1,\"c\":false}}", "{\"a\":{\"b\":1}}"},
    {NULL, "false", NULL},
    {"{\"a\":1}", "{}", "{\"a\":1}"},
    {"{\"a\":1}", "{\"b\":false}", "{\"a\":1}"},
    /* was */
    {"{\"a\":6}", "{\"a\":\"7 * was\"}", "{\"a\":42}"},
    {"{\"a\":{\"b\":6}}", "{\"a\":{\"b\":\"7 * was\",\"c\":1}}", "{\"a\":{\"b\":42,\"c\":1}}"},
    {"{\"a\":\"x\"}", "{\"a\":\"7 * was\"}", NULL},
    {"{\"b\":1}", "{\"a\":{\"a\":\"7 * was\"},\"b\":2}", NULL},
    /* a field that is yes or no */
    {"{\"verified\":true,\"x\":true}", "{\"verified\":false,\"x\":false}", "{\"verified\":false}"},
    /* a set of names */
    {"{\"of\":[\"a\",\"c\"]}", "{\"of\":{\"b\":true,\"c\":false,\"z\":false}}",
     "{\"of\":[\"a\",\"b\"]}"},
    {"{\"of\":[\"a\",\"c\"]}", "{\"of\":{\"a\":true}}", "{\"of\":[\"a\",\"c\"]}"},
    {"{\"of\":[\"a\"]}", "{\"of\":{\"a\":false}}", "{\"of\":[]}"},
    {"{}", "{\"of\":{\"a\":true,\"b\":true,\"c\":false}}", "{\"of\":[\"a\",\"b\"]}"},
    {"{\"of\":[\"a\"]}", "{\"of\":[\"d\",\"b\",\"d\"]}", "{\"of\":[\"b\",\"d\"]}"},
    {"{\"of\":[\"a\"]}", "{\"of\":false}", "{}"},
};

START_TEST(is_merged)
{
    struct arena *a = arena_new(NULL);
    const struct merge_case *x = &cases[_i];
    struct rules_ctx ctx = {a, 0};
    struct patch_rules rules = rules_for(&ctx);
    const struct node *target = x->target ? json_tree(a, x->target) : NULL;
    const struct node *patch = json_tree(a, x->patch);
    const struct node *result = patch_apply(a, &rules, target, patch, "x/P-1");
    if (x->result)
        ck_assert_str_eq(tree_json(a, result), x->result);
    else
        ck_assert_ptr_null(result);
    ck_assert_str_eq(tree_json(a, patch), x->patch);
    if (target)
        ck_assert_str_eq(tree_json(a, target), x->target);
    bool fails = !x->result && strstr(x->patch, "was");
    ck_assert_uint_eq(ctx.failures, fails);
    arena_free(a);
}
END_TEST

/* Rules may be left out. */
START_TEST(without_rules)
{
    struct arena *a = arena_new(NULL);
    struct patch_rules none = {0};
    const struct node *n = patch_apply(a, &none, json_tree(a, "{\"verified\":true,\"w\":1}"),
                                       json_tree(a, "{\"verified\":false,\"w\":\"2 * was\"}"),
                                       "x/P-1");
    ck_assert_str_eq(tree_json(a, n), "{\"w\":\"2 * was\"}");
    arena_free(a);
}
END_TEST

/* ---- differences ---- */

static const char *side(struct arena *a, const struct node *n)
{
    return n ? tree_json(a, n) : "-";
}

static const char *listed(struct arena *a, const struct differences *d)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < d->n; i++)
        text_printf(&t, "%s: %s > %s\n", d->at[i].path, side(a, d->at[i].before),
                    side(a, d->at[i].after));
    return text_str(&t);
}

static const struct merge_case differing[] = {
    {"{\"a\":1}", "{\"a\":1}", ""},
    {"{\"a\":1}", "{\"a\":2}", "a: 1 > 2\n"},
    {"{\"a\":{\"b\":1,\"c\":2}}", "{\"a\":{\"c\":3,\"d\":4}}",
     "a/b: 1 > -\na/c: 2 > 3\na/d: - > 4\n"},
    {"{\"a\":{\"x\":1},\"a-b\":1}", "{\"a\":{\"x\":2},\"a-b\":2}", "a-b: 1 > 2\na/x: 1 > 2\n"},
    {"{\"a\":[1,2]}", "{\"a\":[2,1]}", "a: [1,2] > [2,1]\n"},
    {"{\"a\":{}}", "{\"a\":\"x\"}", "a: {} > \"x\"\n"},
    {"{\"a\":{}}", "{}", "a: {} > -\n"},
    {"{}", "{\"a\":{\"b\":1}}", "a: - > {\"b\":1}\n"},
    {"1", "true", ": 1 > true\n"},
    {NULL, "{}", ": - > {}\n"},
    {"[]", NULL, ": [] > -\n"},
    {NULL, NULL, ""},
};

START_TEST(differences_are_listed)
{
    struct arena *a = arena_new(NULL);
    const struct merge_case *x = &differing[_i];
    struct differences d = {0};
    patch_differences(a, x->target ? json_tree(a, x->target) : NULL,
                      x->patch ? json_tree(a, x->patch) : NULL, &d);
    ck_assert_str_eq(listed(a, &d), x->result);
    arena_free(a);
}
END_TEST

/* Sets the value at a path of a patch, making the maps on the way. */
static void set_at(struct arena *a, struct node *patch, const char *path, struct node *value)
{
    const char *slash = strchr(path, '/');
    if (!slash) {
        node_set(a, patch, path, value);
        return;
    }
    const char *key = arena_strn(a, path, (size_t)(slash - path));
    struct node *inner = node_get(patch, key);
    if (!inner)
        node_set(a, patch, key, inner = node_map(a, patch->place));
    set_at(a, inner, slash + 1, value);
}

static struct node *patch_from(struct arena *a, const struct differences *d)
{
    struct node *patch = node_map(a, (struct place){0});
    struct node *no = node_scalar(a, FORM_NO, "no", patch->place);
    for (size_t i = 0; i < d->n; i++)
        set_at(a, patch, d->at[i].path, d->at[i].after ? (struct node *)d->at[i].after : no);
    return patch;
}

static const struct tree_wish tame = {.depth = 4, .tame = true};

START_TEST(differences_make_the_other)
{
    struct random r = random_seed(17);
    struct patch_rules none = {0};
    for (int i = 0; i < 2000; i++) {
        struct arena *a = arena_new(NULL);
        struct node *p = tree_random(a, &r, tame), *q = tree_random(a, &r, tame);
        struct differences d = {0};
        patch_differences(a, p, q, &d);
        for (size_t k = 1; k < d.n; k++)
            ck_assert_int_lt(text_compare(d.at[k - 1].path, d.at[k].path), 0);
        ck_assert_int_eq(d.n == 0, node_equal(p, q));
        ck_assert(node_equal(patch_apply(a, &none, p, patch_from(a, &d), ""), q));
        arena_free(a);
    }
}
END_TEST

/* ---- contradictions ---- */

struct contradiction_case {
    const char *p, *q, *path;
};

static const struct contradiction_case contradicting[] = {
    {"{\"a\":1}", "{\"b\":2}", NULL},
    {"{\"a\":1}", "{\"a\":1}", NULL},
    {"{\"a\":1}", "{\"a\":2}", "a"},
    {"{\"a\":{\"b\":1}}", "{\"a\":{\"c\":2}}", NULL},
    {"{\"a\":{\"b\":1,\"d\":1}}", "{\"a\":{\"c\":2,\"d\":2}}", "a/d"},
    {"{\"a\":false}", "{\"a\":{\"c\":2}}", "a"},
    {"{\"a\":false}", "{\"a\":false}", NULL},
    {"{\"a\":\"2 * was\"}", "{\"a\":\"3 * was\"}", NULL},
    {"{\"a\":\"2 * was\"}", "{\"a\":\"2 * was\"}", NULL},
    {"{\"a\":\"2 * was\"}", "{\"a\":7}", "a"},
    {"{\"a\":\"2 * was\"}", "{\"a\":false}", "a"},
    {"{\"a\":\"2 * was\"}", "{\"a\":{\"b\":1}}", "a"},
    {"{\"a\":[1]}", "{\"a\":[1]}", NULL},
    {"{\"a\":[1]}", "{\"a\":[1,2]}", "a"},
    {"{\"a\":[1]}", "{\"a\":{\"x\":1}}", "a"},
    {"{\"d\":{\"x\":true}}", "{\"d\":{\"y\":true,\"z\":false}}", NULL},
    {"{\"d\":{\"x\":true}}", "{\"d\":{\"x\":false}}", "d/x"},
    {"{\"d\":{\"x\":true}}", "{\"d\":[\"y\"]}", "d"},
    {"{\"b\":1,\"a\":1}", "{\"b\":2,\"a\":2}", "a"},
};

/* Trees whose keys may stand in any order. */
static struct node *unordered(struct arena *a, const char *json)
{
    struct node *map = node_map(a, (struct place){0});
    if (!text_starts(json, "{\"b\":") || !strstr(json, ",\"a\""))
        return json_tree(a, json);
    node_set(a, map, "b", node_scalar(a, FORM_COUNT, arena_strn(a, json + 5, 1), map->place));
    node_set(a, map, "a", node_scalar(a, FORM_COUNT, arena_strn(a, json + 11, 1), map->place));
    return map;
}

START_TEST(contradictions_are_found)
{
    struct arena *a = arena_new(NULL);
    const struct contradiction_case *x = &contradicting[_i];
    struct rules_ctx ctx = {a, 0};
    struct patch_rules rules = rules_for(&ctx);
    const struct node *p = unordered(a, x->p), *q = unordered(a, x->q);
    const char *forth = patch_contradiction(a, &rules, p, q);
    const char *back = patch_contradiction(a, &rules, q, p);
    ck_assert_pstr_eq(forth, x->path);
    ck_assert_pstr_eq(back, x->path);
    arena_free(a);
}
END_TEST

/* A random patch: counts, removals, products, lists, maps, sets under "d". */
static struct node *random_patch(struct arena *a, struct random *r, int depth, bool of_set)
{
    static const char *const keys[] = {"a", "b", "c", "d", "e", "f", "g"};
    struct place at = {0};
    struct node *map = node_map(a, at), *list = node_list(a, at);
    for (size_t n = random_index(r, 4); n > 0; n--) {
        const char *key = random_pick(r, keys);
        size_t kind = of_set ? 4 + random_index(r, 2) : random_index(r, depth > 0 ? 7 : 4);
        bool set = depth == 3 && text_equal(key, "d");
        const char *number = arena_printf(a, "%zu", 2 + random_index(r, 9));
        struct node *value =
            kind == 0   ? node_scalar(a, FORM_COUNT, number, at)
            : kind <= 2 ? node_scalar(a, FORM_TEXT, arena_printf(a, "%s * was", number), at)
            : kind == 3 ? node_scalar(a, FORM_NO, "no", at)
            : of_set    ? (kind == 4 ? node_scalar(a, FORM_YES, "yes", at)
                                     : node_scalar(a, FORM_NO, "no", at))
            : kind == 4 ? list
                        : random_patch(a, r, depth - 1, set);
        node_set(a, map, key, value);
    }
    return map;
}

static bool same(const struct node *a, const struct node *b)
{
    return a && b ? node_equal(a, b) : a == b;
}

START_TEST(agreeing_patches_commute)
{
    struct random r = random_seed(23);
    int agreeing = 0, changing = 0;
    for (int i = 0; i < 20000; i++) {
        struct arena *a = arena_new(NULL);
        struct rules_ctx ctx = {a, 0};
        struct patch_rules rules = rules_for(&ctx);
        struct node *t = random_patch(a, &r, 3, false);
        struct node *p = random_patch(a, &r, 3, false), *q = random_patch(a, &r, 3, false);
        t = patch_apply(a, &rules, NULL, t, ""); /* a tree without removals, or NULL */
        const struct node *tp = t ? patch_apply(a, &rules, t, p, "") : NULL;
        const struct node *tq = t ? patch_apply(a, &rules, t, q, "") : NULL;
        if (tp && tq && !patch_contradiction(a, &rules, p, q)) {
            const struct node *tpq = patch_apply(a, &rules, tp, q, "");
            const struct node *tqp = patch_apply(a, &rules, tq, p, "");
            ck_assert_msg(same(tpq, tqp), "%s under %s and %s gave %s and %s", tree_json(a, t),
                          tree_json(a, p), tree_json(a, q), side(a, tpq), side(a, tqp));
            agreeing++;
            changing += !node_equal(t, tp) && !node_equal(t, tq);
        }
        arena_free(a);
    }
    ck_assert_int_gt(agreeing, 2000);
    ck_assert_int_gt(changing, 500);
}
END_TEST

/* One further key of a large map costs no more than a walk through it. */
/* ---- what another patch settles ---- */

struct settled_case {
    const char *patch, *settled, *left; /* NULL: nothing */
};

static const struct settled_case settled_cases[] = {
    {"{\"a\":1,\"b\":2}", "{\"a\":3}", "{\"b\":2}"},
    {"{\"a\":1}", "{\"a\":1}", NULL},
    {"{\"a\":{\"b\":1}}", "{\"a\":{\"b\":2}}", NULL},
    {"{\"a\":{\"b\":1,\"c\":2}}", "{\"a\":{\"b\":false}}", "{\"a\":{\"c\":2}}"},
    {"{\"a\":{\"b\":1,\"c\":2}}", "{\"a\":false}", NULL},
    {"{\"a\":{\"b\":1},\"z\":1}", "{\"a\":[\"x\"]}", "{\"z\":1}"},
    {"{\"a\":false}", "{\"a\":{\"b\":2}}", "{\"a\":false}"},
    {"{\"a\":7}", "{\"a\":\"2 * was\"}", "{\"a\":7}"},
    {"{\"a\":\"2 * was\"}", "{\"a\":7}", NULL},
    {"{\"a\":{}}", "{\"a\":{\"b\":2}}", "{\"a\":{}}"},
    {"{\"a\":2,\"z\":1}", "{\"c\":3}", "{\"a\":2,\"z\":1}"},
};

START_TEST(settled_paths_say_nothing)
{
    struct arena *a = arena_new(NULL);
    struct rules_ctx ctx = {a, 0};
    const struct settled_case *x = &settled_cases[_i];
    struct patch_rules rules = rules_for(&ctx);
    const struct node *patch = json_tree(a, x->patch), *settled = json_tree(a, x->settled);
    const struct node *left = patch_without(a, &rules, patch, settled);
    if (x->left)
        ck_assert_str_eq(tree_json(a, left), x->left);
    else
        ck_assert_ptr_null(left);
    ck_assert_str_eq(tree_json(a, settled), x->settled);
    arena_free(a);
}
END_TEST

START_TEST(large_maps)
{
    enum { KEYS = 100000 };
    struct arena *a = arena_new(NULL);
    struct patch_rules none = {0};
    struct node *t = node_map(a, (struct place){0}), *p = node_map(a, t->place);
    for (size_t i = 0; i < KEYS; i++) {
        const char *key = arena_printf(a, "k%zu", i * 7919 % KEYS);
        node_add(a, t, key, t->place, node_scalar(a, FORM_COUNT, "1", t->place));
        node_add(a, p, key, t->place, node_scalar(a, i % 2 ? FORM_COUNT : FORM_NO, "2", t->place));
    }
    const struct node *result = patch_apply(a, &none, t, p, "");
    ck_assert_uint_eq(result->n, KEYS / 2);
    ck_assert_str_eq(node_get(result, arena_printf(a, "k%d", 7919))->text, "2");
    struct differences d = {0};
    patch_differences(a, t, result, &d);
    ck_assert_uint_eq(d.n, KEYS);
    ck_assert_ptr_null(patch_contradiction(a, &none, p, p));
    arena_free(a);
}
END_TEST

Suite *suite_patch(void)
{
    Suite *s = suite_create("patch");
    TCase *t = tcase_create("patch");
    tcase_set_timeout(t, 60);
    tcase_add_loop_test(t, is_merged, 0, sizeof cases / sizeof cases[0]);
    tcase_add_test(t, without_rules);
    tcase_add_loop_test(t, differences_are_listed, 0, sizeof differing / sizeof differing[0]);
    tcase_add_test(t, differences_make_the_other);
    tcase_add_loop_test(t, settled_paths_say_nothing, 0,
                        sizeof settled_cases / sizeof settled_cases[0]);
    tcase_add_loop_test(t, contradictions_are_found, 0,
                        sizeof contradicting / sizeof contradicting[0]);
    tcase_add_test(t, agreeing_patches_commute);
    tcase_add_test(t, large_maps);
    suite_add_tcase(s, t);
    return s;
}
