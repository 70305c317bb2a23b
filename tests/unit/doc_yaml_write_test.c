/* SPDX-License-Identifier: GPL-3.0-or-later */
/* YAML written: how it looks, and that it is read back as it was. */
#include <string.h>

#include "doc/yaml.h"
#include "doc_test.h"
#include "random.h"
#include "tree.h"

static const char *written(struct arena *a, const struct node *n)
{
    struct text t;
    text_init(&t, a);
    yaml_write(&t, n);
    return text_str(&t);
}

/* How a register looks: sections in blocks, short objects in brackets. */
static const char look[] =
    "register: {title: Quayside network, currency: EUR, prices: 2026, horizon: 25 a}\n"
    "sites:\n"
    "  QS: {name: Quayside 10 kV station, customers: 4100, load: 11 MW}\n"
    "elements:\n"
    "  QS-BAT:\n"
    "    name: 110 V DC supply of the switchgear and of the telecontrol\n"
    "    kind: dc-supply\n"
    "    site: QS\n"
    "    test: {every: 1 a, last: 2026-02-11, takes: 2 h, costs: 1.2 kEUR, finds: 95 %}\n"
    "  QS-Q1: {name: Incomer breaker, per-demand: {prior: jeffreys, failures: 1, demands: 212}}\n"
    "decisions:\n"
    "  D-1:\n"
    "    question: \"Clear faults how: faster, or not at all?\"\n"
    "    steps:\n"
    "      - pay: 15 kEUR\n"
    "        name: Survey of the transformer by the workshop that also made the last one "
    "in spring\n"
    "      - {wait: 3 month}\n"
    "      - - one text that is long enough to fill half of a line of this document or more\n"
    "        - another text that is long enough to fill the other half\n"
    "    none: []\n"
    "    nothing: {}\n"
    "    empty: \"\"\n";

START_TEST(looks_like_a_study)
{
    struct trial t;
    trial_open(&t);
    const struct node *n = yaml_read(t.a, "f", look, strlen(look), &t.d);
    ck_assert_str_eq(trial_lines(&t), "");
    ck_assert_str_eq(written(t.a, n), look);
    trial_close(&t);
}
END_TEST

/* Does {a: {b: TEXT}}, where TEXT has n characters, take one line? */
static bool fits(struct arena *a, size_t n)
{
    struct text json;
    text_init(&json, a);
    text_add(&json, "{\"a\":{\"b\":\"\xC3\xA9");
    text_repeat(&json, "x", n - 1);
    text_add(&json, "\"}}");
    return strstr(written(a, json_tree(a, text_str(&json))), "a: {b: ") != NULL;
}

/* `a: {b: ` and `}` take 8 columns of 100; a character of two bytes takes one. */
START_TEST(a_line_holds_100_columns)
{
    struct arena *a = arena_new(NULL);
    ck_assert(fits(a, 92));
    ck_assert(!fits(a, 93));
    arena_free(a);
}
END_TEST

START_TEST(quotes_only_where_needed)
{
    static const char *const pairs[][2] = {
        {"90 % within 14 MW .. 22 MW", "90 % within 14 MW .. 22 MW"},
        {"lookup(x; 1 -> 2; 3 -> 4)", "lookup(x; 1 -> 2; 3 -> 4)"},
        {"0.6 * was", "0.6 * was"}, {"-2 .. 3", "-2 .. 3"}, {"2026-04-14", "2026-04-14"},
        {"no", "no"}, {"it's", "it's"}, {"\xC3\x84rger", "\xC3\x84rger"},
        {"1:30", "\"1:30\""}, {"a, b", "\"a, b\""}, {"- x", "\"- x\""}, {"a #b", "\"a #b\""},
        {"", "\"\""}, {" a", "\" a\""}, {"a ", "\"a \""}, {"~", "\"~\""}, {"a\nb", "\"a\\nb\""},
        {"say \"x\"", "say \"x\""}, {"\"x\"", "\"\\\"x\\\"\""}, {"a\\b", "a\\b"},
        {"\\", "\"\\\\\""},
        {"(", "\"(\""}, {"max(1", "\"max(1\""}, {"\xC2\xA0", "\"\\u00a0\""},
        {"a\xE2\x80\xAE", "\"a\\u202e\""}, {"@a", "\"@a\""}, {"a@b", "a@b"}};
    for (size_t i = 0; i < sizeof pairs / sizeof pairs[0]; i++) {
        struct arena *a = arena_new(NULL);
        struct node *map = node_map(a, (struct place){0});
        node_set(a, map, "k", node_scalar(a, FORM_TEXT, pairs[i][0], map->place));
        ck_assert_str_eq(written(a, map), arena_printf(a, "k: %s\n", pairs[i][1]));
        arena_free(a);
    }
}
END_TEST

START_TEST(round_trip)
{
    struct random r = random_seed(5);
    for (int i = 0; i < 3000; i++) {
        struct trial t;
        trial_open(&t);
        struct node *n = tree_random(t.a, &r, (struct tree_wish){.depth = 1 + i % 6});
        const char *yaml = written(t.a, n);
        const struct node *again = yaml_read(t.a, "f", yaml, strlen(yaml), &t.d);
        ck_assert_msg(again != NULL, "%s\nof:\n%s", trial_lines(&t), yaml);
        ck_assert_msg(node_equal(n, again), "%s", yaml);
        ck_assert_str_eq(written(t.a, again), yaml);
        trial_close(&t);
    }
}
END_TEST

/* As deep as is read. */
START_TEST(deepest)
{
    for (int kind = 0; kind < 2; kind++) {
        struct trial t;
        trial_open(&t);
        struct place at = {0};
        struct node *n = node_scalar(t.a, FORM_TEXT, "- x", at);
        for (int i = 0; i < YAML_DEPTH; i++) {
            bool map = kind == 0 || i == YAML_DEPTH - 1;
            struct node *outer = map ? node_map(t.a, at) : node_list(t.a, at);
            if (map)
                node_add(t.a, outer, "a", at, n);
            else
                node_push(t.a, outer, n);
            n = outer;
        }
        const char *yaml = written(t.a, n);
        const struct node *again = yaml_read(t.a, "f", yaml, strlen(yaml), &t.d);
        ck_assert_str_eq(trial_lines(&t), "");
        ck_assert(node_equal(n, again));
        trial_close(&t);
    }
}
END_TEST

Suite *suite_yaml_write(void)
{
    Suite *s = suite_create("yaml write");
    TCase *t = tcase_create("write");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, looks_like_a_study);
    tcase_add_test(t, a_line_holds_100_columns);
    tcase_add_test(t, quotes_only_where_needed);
    tcase_add_test(t, round_trip);
    tcase_add_test(t, deepest);
    suite_add_tcase(s, t);
    return s;
}
