/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Building, finding, sorting, comparing and copying trees. */
#include "doc_test.h"
#include "random.h"
#include "tree.h"

static const struct place nowhere = {0};

static struct node *text_node(struct arena *a, const char *s)
{
    return node_scalar(a, FORM_TEXT, s, nowhere);
}

/* n keys k0 .. in a random order. */
static struct node *shuffled(struct arena *a, size_t n, uint64_t seed)
{
    struct random r = random_seed(seed);
    size_t *order = NEW_ARRAY(a, n, size_t);
    for (size_t i = 0; i < n; i++) {
        size_t j = random_index(&r, i + 1);
        order[i] = order[j];
        order[j] = i;
    }
    struct node *map = node_map(a, nowhere);
    for (size_t i = 0; i < n; i++) {
        const char *key = arena_printf(a, "k%zu", order[i]);
        node_add(a, map, key, nowhere, text_node(a, key));
    }
    return map;
}

START_TEST(finds_every_key)
{
    static const size_t sizes[] = {0, 1, 2, 11, 12, 13, 14, 100, 1000};
    for (size_t s = 0; s < sizeof sizes / sizeof sizes[0]; s++) {
        struct arena *a = arena_new(NULL);
        struct node *map = shuffled(a, sizes[s], s);
        for (int sorted = 0; sorted < 2; sorted++) {
            for (size_t i = 0; i < sizes[s]; i++) {
                const char *key = arena_printf(a, "k%zu", i);
                ck_assert_str_eq(node_get(map, key)->text, key);
            }
            ck_assert_ptr_null(node_get(map, "k"));
            ck_assert_ptr_null(node_get(map, "l"));
            node_sort(map);
            for (size_t i = 1; i < map->n; i++)
                ck_assert_int_lt(text_compare(map->pairs[i - 1].key, map->pairs[i].key), 0);
        }
        arena_free(a);
    }
}
END_TEST

START_TEST(nothing_in_what_is_no_map)
{
    struct arena *a = arena_new(NULL);
    ck_assert_ptr_null(node_get(NULL, "a"));
    ck_assert_ptr_null(node_get(text_node(a, "a"), "a"));
    ck_assert_ptr_null(node_get(node_list(a, nowhere), "a"));
    arena_free(a);
}
END_TEST

START_TEST(sorted_holds_only_while_keys_rise)
{
    struct arena *a = arena_new(NULL);
    struct node *map = node_map(a, nowhere);
    node_add(a, map, "a", nowhere, text_node(a, "1"));
    node_add(a, map, "c", nowhere, text_node(a, "2"));
    ck_assert(map->sorted);
    node_set(a, map, "b", text_node(a, "3"));
    ck_assert(!map->sorted);
    node_set(a, map, "a", text_node(a, "4"));
    ck_assert_uint_eq(map->n, 3);
    ck_assert_str_eq(tree_json(a, map), "{\"a\":\"4\",\"b\":\"3\",\"c\":\"2\"}");
    ck_assert_str_eq(map->pairs[2].key, "b"); /* writing did not sort the map itself */
    node_sort(map);
    ck_assert(map->sorted);
    ck_assert_str_eq(map->pairs[1].key, "b");
    arena_free(a);
}
END_TEST

/* Keys are compared as unsigned bytes. */
START_TEST(order_of_bytes)
{
    struct arena *a = arena_new(NULL);
    struct node *map = node_map(a, nowhere);
    static const char *const keys[] = {"\xC3\xA9", "a", "Z", "a-b", "a/b", "~", ""};
    for (size_t i = 0; i < 7; i++)
        node_add(a, map, keys[i], nowhere, text_node(a, ""));
    node_sort(map);
    static const char *const sorted[] = {"", "Z", "a", "a-b", "a/b", "~", "\xC3\xA9"};
    for (size_t i = 0; i < 7; i++)
        ck_assert_str_eq(map->pairs[i].key, sorted[i]);
    arena_free(a);
}
END_TEST

START_TEST(equal_in_any_order)
{
    struct arena *a = arena_new(NULL);
    ck_assert(node_equal(shuffled(a, 50, 1), shuffled(a, 50, 2)));
    ck_assert(!node_equal(shuffled(a, 50, 1), shuffled(a, 51, 1)));
    static const char *const trees[] = {"{}", "[]", "\"\"", "\"1\"", "1", "true", "false",
                                        "\"yes\"",
                                        "{\"a\":\"1\"}", "{\"a\":\"2\"}", "{\"b\":\"1\"}",
                                        "[\"1\"]", "[\"1\",\"2\"]", "[\"2\",\"1\"]",
                                        "{\"a\":{\"b\":[1]}}", "{\"a\":{\"b\":[2]}}"};
    size_t n = sizeof trees / sizeof trees[0];
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            ck_assert_int_eq(node_equal(json_tree(a, trees[i]), json_tree(a, trees[j])), i == j);
    arena_free(a);
}
END_TEST

static bool shares(const struct node *a, const struct node *b)
{
    if (a == b)
        return true;
    for (size_t i = 0; i < a->n; i++)
        if (a->type == NODE_MAP ? shares(a->pairs[i].value, b->pairs[i].value)
                                : shares(a->items[i], b->items[i]))
            return true;
    return false;
}

START_TEST(copies_share_nothing)
{
    struct random r = random_seed(11);
    for (int i = 0; i < 200; i++) {
        struct arena *a = arena_new(NULL);
        struct node *n = tree_random(a, &r, (struct tree_wish){.depth = 4, .typed = true});
        struct node *copy = node_copy(a, n);
        ck_assert(node_equal(n, copy));
        ck_assert(!shares(n, copy));
        for (int k = 0; k < 9; k++)
            node_add(a, copy, arena_printf(a, "new %d", k), nowhere, text_node(a, "x"));
        ck_assert_uint_eq(copy->n, n->n + 9);
        ck_assert(!node_equal(n, copy));
        arena_free(a);
    }
}
END_TEST

Suite *suite_node(void)
{
    Suite *s = suite_create("node");
    TCase *t = tcase_create("node");
    tcase_add_test(t, finds_every_key);
    tcase_add_test(t, nothing_in_what_is_no_map);
    tcase_add_test(t, sorted_holds_only_while_keys_rise);
    tcase_add_test(t, order_of_bytes);
    tcase_add_test(t, equal_in_any_order);
    tcase_add_test(t, copies_share_nothing);
    suite_add_tcase(s, t);
    return s;
}
