/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random trees. Invariant: keys of a map differ, texts are in NFC, keys have at
 * most 200 bytes and texts at most 100 000. */
#include "tree.h"

#include <string.h>

#include "base/text.h"
#include "base/utf8.h"

static const char *const whole[] = {
    "", "~", "yes", "no", "null", "true", "1:30", "1e3", "0x1f", "- x", "? x", ": x", "-", "?",
    ":", "---", "...", "--- x", "<<", "=", "# c", "a # c", "a #c", "a#c", "a: b", "a:b", "a:",
    ":a", "{a: b}", "[a, b]", "{", "}", "[", "]", ",", "a, b", "1,000 EUR", "max(1, 2)", "max(1",
    "2)", "&a", "*a", "!a", "!", "%a", "@a", "`a", "|", ">", "'", "\"", "''", "it's", "\"a\" b",
    "\\", "\\n", " a", "a ", "\ta", "a\t", "a\nb", "\n", "\n\n", "a\n", " \n ", "a\r\nb",
    "http://x.y/z", "-2.5", "+3", "2026-04-14", "90 % within 14 MW .. 22 MW",
    "40 kEUR/s * clearance-time", "(a)", ")a(", "\xC3\xA9\xC3\xBC", "\xE2\x82\xAC 5", "\xC2\xA0",
    "\xE2\x80\xAE", "\xF0\x9F\x94\xA7", "\xCC\x81", "\xEF\xBF\xBD", "name: x\nkind: y",
    "How? Why", "a?", "x y  z"};
static const char *const parts[] = {
    "a", "B", "7", " ", "  ", ":", ": ", " #", "#", ",", ", ", "{", "}", "[", "]", "\"", "'",
    "\\", "\n", "\t", "-", "- ", "?", "!", "&", "*", "|", ">", "%", "@", "`", "~", ".", "=", "(",
    ")", "\xC3\xA9", "\xE2\x82\xAC", "word", "\xCC\x88", "\xE4\xB8\xAD"};
static const char *const controls[] = {
    "\x01", "\x1f", "\b", "\f", "\x7f", "\xC2\x85", "\xEF\xBB\xBF", "\xE2\x80\xA8"};

const char *tree_text(struct arena *a, struct random *r, bool with_controls)
{
    if (random_index(r, 3) == 0)
        return random_pick(r, whole);
    struct text t;
    text_init(&t, a);
    size_t n = random_index(r, 50) == 0 ? 3000 : random_index(r, 12);
    for (size_t i = 0; i < n; i++) {
        if (with_controls && random_index(r, 4) == 0)
            text_add(&t, random_pick(r, controls));
        text_add(&t, random_pick(r, parts));
    }
    return utf8_nfc(a, text_str(&t));
}

static const char *key_text(struct arena *a, struct random *r, struct tree_wish wish)
{
    static const char *const names[] = {
    "a", "b", "c", "d", "e", "a-b"};
    if (wish.tame)
        return random_pick(r, names);
    const char *key = tree_text(a, r, wish.controls);
    return strlen(key) <= 200 ? key : "key";
}

static struct node *scalar(struct arena *a, struct random *r, struct tree_wish wish)
{
    struct place at = {0};
    switch (wish.typed ? random_index(r, 5) : 0) {
    case 1:
        return node_scalar(a, FORM_COUNT,
                           arena_printf(a, "%lld", (long long)random_range(r, 0, 9007199254740991)),
                           at);
    case 2:
        return node_scalar(a, FORM_YES, "yes", at);
    case 3:
        return node_scalar(a, FORM_NO, "no", at);
    default:
        return node_scalar(a, FORM_TEXT, tree_text(a, r, wish.controls), at);
    }
}

static struct node *value(struct arena *a, struct random *r, struct tree_wish wish)
{
    size_t kind = wish.depth > 0 ? random_index(r, 5) : 0;
    wish.depth--;
    if (kind <= 2)
        return scalar(a, r, wish);
    if (kind == 3)
        return tree_random(a, r, wish);
    struct node *list = node_list(a, (struct place){0});
    for (size_t n = random_index(r, 5); n > 0; n--)
        node_push(a, list, value(a, r, wish));
    return list;
}

struct node *tree_random(struct arena *a, struct random *r, struct tree_wish wish)
{
    struct node *map = node_map(a, (struct place){0});
    size_t n = random_index(r, 20) == 0 ? 40 : random_index(r, 6);
    for (; n > 0; n--) {
        const char *key = key_text(a, r, wish);
        if (!node_get(map, key))
            node_add(a, map, key, (struct place){0}, value(a, r, wish));
    }
    return map;
}
