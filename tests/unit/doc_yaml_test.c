/* SPDX-License-Identifier: GPL-3.0-or-later */
/* YAML: what is read, with which places; and the sentence for each slip. */
#include <string.h>

#include "doc/yaml.h"
#include "doc_test.h"

static struct node *read_text(struct trial *t, const char *text)
{
    return yaml_read(t->a, "f", text, strlen(text), &t->d);
}

struct reading {
    const char *text, *json;
};

static const struct reading readings[] = {
    {"", "{}"},
    {"# only a remark\n", "{}"},
    {"---\n", "{}"},
    {"--- {a: 1}\n...\n", "{\"a\":\"1\"}"},
    {"\xEF\xBB\xBF" "a: 1", "{\"a\":\"1\"}"},
    {"a: 1\r\nb: 2\r\n", "{\"a\":\"1\",\"b\":\"2\"}"},
    {"a: no\nb: 1:30\nc: 1e3\nd: ~\ne:\nf: 0x10\ng: true\n",
     "{\"a\":\"no\",\"b\":\"1:30\",\"c\":\"1e3\",\"d\":\"~\",\"e\":\"\","
     "\"f\":\"0x10\",\"g\":\"true\"}"},
    {"a: 'it''s'\nb: \"x\\ty\\u20ac\"\nc: |\n  one\n  two\nd: >-\n  one\n  two\n",
     "{\"a\":\"it's\",\"b\":\"x\\ty\xE2\x82\xAC\",\"c\":\"one\\ntwo\\n\",\"d\":\"one two\"}"},
    {"a:\n- b\n- {c: d, e: }\n- [apply: X]\n",
     "{\"a\":[\"b\",{\"c\":\"d\",\"e\":\"\"},[{\"apply\":\"X\"}]]}"},
    {"a: e\xCC\x81\n", "{\"a\":\"\xC3\xA9\"}"},
    {"a: http://x.y/z\nb: c:d\nc: [1:30, \"k:v\"]\n",
     "{\"a\":\"http://x.y/z\",\"b\":\"c:d\",\"c\":[\"1:30\",\"k:v\"]}"},
    {"a: max(1, 2)\nb: \"x # y\" # remark\n", "{\"a\":\"max(1, 2)\",\"b\":\"x # y\"}"},
    {"'<<': 1\n\"\": 2\n", "{\"\":\"2\",\"<<\":\"1\"}"},
    {"a: |\n  x\n  \ty\n", "{\"a\":\"x\\n\\ty\\n\"}"},
    {"a: [lookup(x; 1 -> 2), f(y)]\n", "{\"a\":[\"lookup(x; 1 -> 2)\",\"f(y)\"]}"},
};

START_TEST(is_read)
{
    struct trial t;
    trial_open(&t);
    const struct node *n = read_text(&t, readings[_i].text);
    ck_assert_str_eq(trial_lines(&t), "");
    ck_assert_str_eq(tree_json(t.a, n), readings[_i].json);
    trial_close(&t);
}
END_TEST

static void check_place(const struct place *p, uint32_t line, uint32_t column)
{
    ck_assert_str_eq(p->file, "f");
    ck_assert_uint_eq(p->line, line);
    ck_assert_uint_eq(p->column, column);
}

/* Lines and columns from 1; columns count characters, not bytes. */
START_TEST(places)
{
    struct trial t;
    trial_open(&t);
    const struct node *n = read_text(&t, "# \xC3\xA9\n\xC3\xA9\xC3\xA9: {b: 'c', d: [e]}\r\nx:\n"
                                         "  y: |\n    text\n  z:\n  - \"q\"\n");
    check_place(&n->place, 2, 1);
    check_place(&n->pairs[0].place, 2, 1);
    const struct node *map = n->pairs[0].value;
    check_place(&map->place, 2, 5);
    check_place(&map->pairs[0].place, 2, 6);
    check_place(&map->pairs[0].value->place, 2, 9);
    check_place(&map->pairs[1].value->items[0]->place, 2, 18);
    const struct node *x = node_get(n, "x");
    check_place(&x->place, 4, 3);
    check_place(&node_get(x, "y")->place, 4, 6);
    check_place(&node_get(x, "z")->items[0]->place, 7, 5);
    ck_assert(map->pairs[0].value->quoted);
    ck_assert(!map->pairs[1].value->items[0]->quoted);
    ck_assert(node_get(x, "y")->quoted);
    trial_close(&t);
}
END_TEST

START_TEST(keeps_the_order)
{
    struct trial t;
    trial_open(&t);
    const struct node *n = read_text(&t, "c: 1\na: 2\nb: 3\n");
    ck_assert_str_eq(n->pairs[0].key, "c");
    ck_assert_str_eq(n->pairs[1].key, "a");
    ck_assert_str_eq(n->pairs[2].key, "b");
    trial_close(&t);
}
END_TEST

struct refusal {
    const char *text, *lines;
};

#define COMMA(key, value)                                                                     \
    "'" key "' has no value: inside { } a comma ends the value '" value "' before it; part " \
    "arguments with ';', write numbers without thousands commas, or quote the value"
#define BLANK(text, word)                                                                       \
    "a blank is missing behind the colon of '" text "': write '" word ": ...', or quote the " \
    "text if it is meant as one value"
#define TAB "a tab stands in the indentation: indent with blanks, two for each level"
#define MIX "'key: value' was expected here: a map and a list do not mix"
#define COLON(key)                                                                          \
    "a value must not hold a colon followed by a blank: put the whole value behind '" key \
    ":' in quotes"
#define FLOW_COLON(brackets)                                                                    \
    "a colon stands inside a value, or a comma is missing before its key: in " brackets " write " \
    "'key: value, key: value', and quote a value that holds a colon"
#define DEEPER                                                                                \
    "this line is indented deeper than the line above, which already has a value: begin it in " \
    "the column of the keys it belongs to"
#define NO_ALIAS                                                                           \
    "aliases (words that begin with *) are not used here: use 'like:' to start from another " \
    "object, or quote a value that begins with *"
#define NO_ANCHOR                                                                           \
    "anchors (words that begin with &) are not used here: use 'like:' to start from another " \
    "object, or quote a value that begins with &"
#define NO_TAG                                                                             \
    "tags (words that begin with !) are not used here: leave it out, or quote a value that " \
    "begins with !"

static const struct refusal refusals[] = {
    /* a comma inside brackets */
    {"a: 1\nb: {is: max(1, 2)}", "f:2:16: " COMMA("2)", "max(1")},
    {"a: {damage: 1,000 EUR, x: 2}", "f:1:15: " COMMA("000 EUR", "1")},
    {"a: {b: lookup(v; 1 -> 2, 3), c: 4,5}",
     "f:1:26: " COMMA("3)", "lookup(v; 1 -> 2") "\nf:1:35: " COMMA("5", "4")},
    {"a: {b}", "f:1:5: 'b' has no value: inside { } write 'key: value'"},
    {"a: [max(1, 2)]",
     "f:1:12: inside [ ] a comma ends the item 'max(1': part arguments with ';', or quote it"},
    {"a: {b: 1,, c: 2}",
     "f:1:10: a value was expected, but , stands here: quote a value that begins with it"},
    /* no blank behind a colon */
    {"a:\n  name:Foo\n  site: NK", "f:2:3: " BLANK("name:Foo", "name")},
    {"a:\n  site: NK\n  name:Foo\n  x: 1", "f:3:3: " BLANK("name:Foo", "name")},
    {"a:\n  name:Foo bar", "f:2:3: " BLANK("name:Foo", "name")},
    {"a: {name:Foo, site: NK}", "f:1:5: " BLANK("name:Foo", "name")},
    {"a: [apply:NEW]", "f:1:5: " BLANK("apply:NEW", "apply")},
    {"a:\n- b\n- c:d", "f:3:3: " BLANK("c:d", "c")},
    {"name:Foo", "f:1:1: " BLANK("name:Foo", "name")},
    /* a colon inside a value */
    {"q: Should we: go", "f:1:13: " COLON("q")},
    {"a:\n  - b: c: d", "f:2:9: " COLON("b")},
    {"a: {q: Should we: go}", "f:1:17: " FLOW_COLON("{ }")},
    {"a: [b: c: 1]", "f:1:9: " FLOW_COLON("[ ]")},
    /* tabs and indentation */
    {"a:\n\tb: 1", "f:2:1: " TAB},
    {"a: 1\n\tb: 2", "f:2:1: " TAB},
    {"a:\n  b: 1\n  \tc: 2", "f:3:3: " TAB},
    {"a:\n  b: 1\n   c: 2", "f:3:4: " DEEPER},
    {"a:\n    b: 1\n   c: 2", "f:3:4: this line fits no line above: begin it in column 1, where "
                               "line 1 begins, or in column 5, as line 2"},
    {"a:\n  b: 1\n  - c", "f:3:3: " MIX},
    {"a:\n  - b\n  c: 1", "f:3:3: a list item, which begins with '- ', was expected here"},
    {"a: - b", "f:1:4: a list item cannot begin here: put '- ' on a line of its own below the "
               "key, or write the list as [a, b]"},
    {"foo\nbar: 1", "f:1:1: 'key: value' was expected, but 'foo' has no colon"},
    {"a: 1\nfoo\nb: 2", "f:2:1: 'key: value' was expected, but 'foo' has no colon"},
    {": 3", "f:1:1: a key is missing before the colon"},
    {"a: {b: 1, : 3}",
     "f:1:11: a value was expected, but : stands here: quote a value that begins with it"},
    {"x: {a: b}\n}", "f:2:1: this } closes nothing that is open"},
    /* brackets and quotes that are not closed */
    {"a: {b: 1\nc: 2\nd: 3",
     "f:1:4: the { opened here is not closed, or a comma is missing before line 2"},
    {"a: [1, 2\nc: 2\n",
     "f:1:4: the [ opened here is not closed, or a comma is missing before line 2"},
    {"x: {a: b\n", "f:1:4: the { opened here is not closed, or a comma is missing before line 2"},
    {"a: {b: 1, c: [1, 2}", "f:1:19: a comma or ] was expected here, behind the [ of column 14"},
    {"a: \"bc\nd: 2\n", "f:1:4: the quote opened here is never closed: expected another \""},
    {"a: {b: 'x}", "f:1:8: the quote opened here is never closed: expected another '"},
    {"a: 'It's fine'", "f:1:8: text follows the closing ' on the same line: quote the whole "
                       "value (a single quote inside single quotes is written twice)"},
    {"a: {b: 1}}", "f:1:10: text follows the closing } on the same line: end the line there, or "
                   "quote the whole value"},
    /* what is not used */
    {"a: &x 1\nb: *x", "f:1:4: " NO_ANCHOR "\nf:2:4: " NO_ALIAS},
    {"a: *2", "f:1:4: " NO_ALIAS},
    {"a: !t 3\nb: !!int 4\nc: !u [1]\nd: !v {e: 1}",
     "f:1:4: " NO_TAG "\nf:2:4: " NO_TAG "\nf:3:4: " NO_TAG "\nf:4:4: " NO_TAG},
    {"*x : 1", "f:1:1: " NO_ALIAS},
    {"a: !t *x", "f:1:4: " NO_TAG "\nf:1:7: this does not go with what stands before it in the "
                 "line: put the whole value in quotes"},
    {"<<: 3", "f:1:1: '<<' is not used here: use 'like:' to start from another object"},
    {"a: 1\n---\nb: 2", "f:2:1: a second document begins here: a file holds one, remove the '---'"},
    {"a: 1\n...\nb: 2", "f:3:1: text follows the end of the document: a file holds one document "
                        "without '---' or '...'"},
    {"%TAG ! x\n---\na: 1", "f:1:1: %TAG lines are not used here: leave it out"},
    {"? [a, b]\n: 1\nc: 2\nc: 3",
     "f:1:3: a key must be a single text, not a list: quote a text that begins with [\n"
     "f:4:1: the key 'c' stands twice: first in line 3, column 1"},
    {"{{a: b}: c}",
     "f:1:2: a key must be a single text, not a map: quote a text that begins with {"},
    {"a: 1\na: 2\nc: {d: 3, d: 4}", "f:2:1: the key 'a' stands twice: first in line 1, column 1\n"
                                    "f:3:11: the key 'd' stands twice: first in line 3, column 5"},
    {"e\xCC\x81: 1\n\xC3\xA9: 2",
     "f:2:1: the key '\xC3\xA9' stands twice: first in line 1, column 1"},
    {"- 1\n- 2",
     "f:1:1: the document must be a map, lines of 'key: value', but this is a list"},
    {"text",
     "f:1:1: the document must be a map, lines of 'key: value', but this is a single text"},
    {"''",
     "f:1:1: the document must be a map, lines of 'key: value', but this is a single text"},
    /* characters */
    {"a: @b", "f:1:4: a value cannot begin with @: put '@b' in quotes"},
    {"a: % 20", "f:1:4: a value cannot begin with %: put '% 20' in quotes"},
    {"a: \"\\q\"", "f:1:5: this backslash escape is unknown: inside double quotes write \\\\ for a "
                   "backslash, or use single quotes"},
    {"a: \"\\u12\"", "f:1:7: hexadecimal digits are missing in this backslash escape"},
    {"a: \"\\x07\"", "f:1:4: a value must not hold control characters, not even by an escape"},
    {"a: \"\\0\"", "f:1:4: a value must not hold control characters, not even by an escape"},
    {"\"\\x1f\": b", "f:1:1: a key must not hold control characters, not even by an escape"},
    {"a: \x01 b\nc: \x7f", "f:1:4: an invisible control character stands here: delete it\n"
                           "f:2:4: an invisible control character stands here: delete it"},
    {"\xC3\xA9: \xC2\x80", "f:1:4: an invisible control character stands here: delete it"},
    {"a: \xEF\xBB\xBF", "f:1:4: an invisible control character stands here: delete it"},
    {"a: b\xE2\x80\xA8", "f:1:5: an invisible control character stands here: delete it"},
    {"a: 1\nb: \xE9t\xE9",
     "f:2:4: this byte (0xe9) is not UTF-8: save the file with the encoding UTF-8"},
    {"a: |x\n b", "f:1:5: after | or > the text must begin on the next line, indented deeper than "
                  "the key"},
};

START_TEST(is_refused)
{
    struct trial t;
    trial_open(&t);
    ck_assert_ptr_null(read_text(&t, refusals[_i].text));
    ck_assert_msg(text_equal(trial_lines(&t), refusals[_i].lines), "%s\ngave:\n%s\nnot:\n%s",
                  refusals[_i].text, trial_lines(&t), refusals[_i].lines);
    trial_close(&t);
}
END_TEST

START_TEST(a_zero_byte_is_refused)
{
    struct trial t;
    trial_open(&t);
    ck_assert_ptr_null(yaml_read(t.a, "f", "a: 1\nb\0: 2", 10, &t.d));
    ck_assert_str_eq(trial_lines(&t), "f:2:2: a zero byte stands here: this is no text file");
    trial_close(&t);
}
END_TEST

/* A second reading of the same wrong text is refused although its diagnostics are
 * doubles, which the list drops. */
START_TEST(refused_twice)
{
    struct trial t;
    trial_open(&t);
    ck_assert_ptr_null(read_text(&t, "a: 1\na: 2"));
    ck_assert_ptr_null(read_text(&t, "a: 1\na: 2"));
    ck_assert_uint_eq(t.d.list.n, 1);
    trial_close(&t);
}
END_TEST

Suite *suite_yaml(void)
{
    Suite *s = suite_create("yaml");
    TCase *t = tcase_create("read");
    tcase_add_loop_test(t, is_read, 0, sizeof readings / sizeof readings[0]);
    tcase_add_test(t, places);
    tcase_add_test(t, keeps_the_order);
    tcase_add_loop_test(t, is_refused, 0, sizeof refusals / sizeof refusals[0]);
    tcase_add_test(t, a_zero_byte_is_refused);
    tcase_add_test(t, refused_twice);
    suite_add_tcase(s, t);
    return s;
}
