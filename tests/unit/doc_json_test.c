/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Canonical JSON: exact bytes out, and nothing else in. */
#include <string.h>

#include "doc_test.h"
#include "random.h"
#include "tree.h"

START_TEST(exact_bytes)
{
    struct arena *a = arena_new(NULL);
    static const char *const same[] = {
        "{}", "[]", "\"\"", "0", "7", "9007199254740991", "true", "false", "[[],{},[{}]]",
        "{\"a\":\"x\",\"b\":[1,true,\"yes\"]}", "\"\\b\\t\\n\\f\\r\\\"\\\\/\\u0001\\u001f\x7f\"",
        "{\"\":0,\"A\":1,\"a\":2,\"a-b\":3,\"\xC3\xA9\":4}"};
    for (size_t i = 0; i < sizeof same / sizeof same[0]; i++)
        ck_assert_str_eq(tree_json(a, json_tree(a, same[i])), same[i]);
    arena_free(a);
}
END_TEST

/* RFC 8785 section 3.2.2: the member "string" of the example and its canonical
 * form (from memory). */
START_TEST(string_of_rfc_8785)
{
    struct arena *a = arena_new(NULL);
    struct text t;
    text_init(&t, a);
    json_string(&t, "\xE2\x82\xAC$\x0F\nA'B\"\\\\\"/");
    ck_assert_str_eq(text_str(&t), "\"\xE2\x82\xAC$\\u000f\\nA'B\\\"\\\\\\\\\\\"/\"");
    arena_free(a);
}
END_TEST

struct damage {
    const char *bytes;
    size_t offset;
    const char *what; /* a part of the message */
};

static const struct damage damages[] = {
    {"", 0, "was expected"},
    {" {}", 0, "was expected"},
    {"{} ", 2, "something follows"},
    {"{\"a\": 1}", 5, "was expected"},
    {"{\"a\" :1}", 4, "colon"},
    {"{\"b\":1,\"a\":1}", 7, "not in order"},
    {"{\"a\":1,\"a\":1}", 7, "repeated"},
    {"{\"a\":1,}", 7, "quote"},
    {"{a:1}", 1, "quote"},
    {"{\"a\":1", 6, "comma or }"},
    {"[1,2", 4, "comma or ]"},
    {"[1 2]", 2, "comma or ]"},
    {"[1,]", 3, "was expected"},
    {"null", 0, "was expected"},
    {"tru", 0, "was expected"},
    {"True", 0, "was expected"},
    {"-1", 0, "was expected"},
    {"01", 0, "zero"},
    {"1.5", 0, "not whole"},
    {"1e3", 0, "not whole"},
    {"9007199254740992", 0, "larger"},
    {"10000000000000000", 0, "larger"},
    {"\"a", 0, "not closed"},
    {"\"a\\", 2, "escape"},
    {"\"\\/\"", 1, "escape"},
    {"\"\\u0041\"", 1, "escape"},
    {"\"\\u000A\"", 1, "escape"},
    {"\"\\u000a\"", 1, "escape"},
    {"\"\\u001F\"", 1, "escape"},
    {"\"\\u0000\"", 1, "escape"},
    {"\"\\u00\"", 1, "escape"},
    {"\"\\x\"", 1, "escape"},
    {"\"a\nb\"", 2, "control"},
    {"\"\xFF\"", 1, "UTF-8"},
    {"\"a\xC3\"", 2, "UTF-8"},
    {"\"e\xCC\x81\"", 0, "normal form"},
};

START_TEST(damaged_bodies_are_told)
{
    struct arena *a = arena_new(NULL);
    const struct damage *x = &damages[_i];
    struct node *untouched = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = json_read(a, x->bytes, strlen(x->bytes), "sites/NK", &untouched, &e);
    ck_assert_int_eq(status, OHMEN_REGISTER);
    ck_assert_int_eq(e.status, OHMEN_REGISTER);
    ck_assert_ptr_null(untouched);
    const char *start = arena_printf(a, "sites/NK: the stored text is damaged at byte %zu: ",
                                     x->offset);
    ck_assert_msg(text_starts(e.text, start) && strstr(e.text, x->what), "%s gave: %s", x->bytes,
                  e.text);
    arena_free(a);
}
END_TEST

START_TEST(a_zero_byte_is_damage)
{
    struct arena *a = arena_new(NULL);
    struct node *n = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(json_read(a, "\"a\0b\"", 5, "x", &n, &e), OHMEN_REGISTER);
    ck_assert_ptr_nonnull(strstr(e.text, "byte 2"));
    ck_assert_int_eq(json_read(a, "\"a\"", 2, "x", &n, NULL), OHMEN_REGISTER);
    arena_free(a);
}
END_TEST

static ohmen_status read_nested(struct arena *a, size_t depth)
{
    struct text t;
    struct node *n;
    text_init(&t, a);
    text_repeat(&t, "[", depth);
    text_repeat(&t, "]", depth);
    return json_read(a, text_str(&t), t.n, "x", &n, NULL);
}

START_TEST(depth)
{
    struct arena *a = arena_new(NULL);
    ck_assert_int_eq(read_nested(a, JSON_DEPTH), OHMEN_OK);
    ck_assert_int_eq(read_nested(a, JSON_DEPTH + 1), OHMEN_REGISTER);
    ck_assert_int_eq(read_nested(a, 1000000), OHMEN_REGISTER);
    arena_free(a);
}
END_TEST

START_TEST(paths)
{
    struct arena *a = arena_new(NULL);
    const char *json = "{\"response\":{\"incomer\":{\"in\":\"1.1 s\"},\"of\":[\"a\",\"b\"]}}";
    struct node *n = NULL;
    ck_assert_int_eq(json_read(a, json, strlen(json), "hazards/H-1", &n, NULL), OHMEN_OK);
    ck_assert_str_eq(n->place.path, "hazards/H-1");
    const struct node *response = node_get(n, "response");
    const struct node *in = node_get(node_get(response, "incomer"), "in");
    ck_assert_str_eq(in->place.path, "hazards/H-1/response/incomer/in");
    ck_assert_str_eq(in->place.file, "register");
    ck_assert_uint_eq(in->place.line, 0);
    ck_assert_str_eq(node_get(response, "of")->items[1]->place.path, "hazards/H-1/response/of/2");
    arena_free(a);
}
END_TEST

START_TEST(round_trip)
{
    struct random r = random_seed(3);
    for (int i = 0; i < 1000; i++) {
        struct arena *a = arena_new(NULL);
        struct node *n = tree_random(
            a, &r, (struct tree_wish){.depth = 4, .typed = true, .controls = true});
        const char *json = tree_json(a, n);
        struct node *again = json_tree(a, json);
        ck_assert(node_equal(n, again));
        ck_assert_str_eq(tree_json(a, again), json);
        arena_free(a);
    }
}
END_TEST

Suite *suite_json(void)
{
    Suite *s = suite_create("json");
    TCase *t = tcase_create("json");
    tcase_add_test(t, exact_bytes);
    tcase_add_test(t, string_of_rfc_8785);
    tcase_add_loop_test(t, damaged_bodies_are_told, 0, sizeof damages / sizeof damages[0]);
    tcase_add_test(t, a_zero_byte_is_damage);
    tcase_add_test(t, depth);
    tcase_add_test(t, paths);
    tcase_add_test(t, round_trip);
    suite_add_tcase(s, t);
    return s;
}
