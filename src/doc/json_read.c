/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Canonical JSON, read: only what json_write writes is accepted.
 *
 * Owns nothing: the tree is the arena's. Invariant: a text that is read is
 * written back byte for byte. Nesting is bounded, so that descent may recurse;
 * after the first fault every function returns NULL at once. */
#include <string.h>

#include "base/utf8.h"
#include "doc/json.h"

#define LARGEST_COUNT "9007199254740991" /* 2^53 - 1 */

struct reader {
    struct arena *a;
    const char *text;
    size_t n, at;
    unsigned depth;
    const char *path; /* of the whole, for messages */
    ohmen_error *e;
};

static void *damaged(struct reader *r, size_t offset, const char *what)
{
    error_set(r->e, OHMEN_REGISTER,
              "%s: the stored text is damaged at byte %zu: %s; it was not written by ohmen",
              r->path, offset, what);
    return NULL;
}

static char peek(const struct reader *r)
{
    return r->at < r->n ? r->text[r->at] : 0;
}

static bool take(struct reader *r, char c)
{
    if (peek(r) != c)
        return false;
    r->at++;
    return true;
}

static bool take_word(struct reader *r, const char *word)
{
    size_t n = strlen(word);
    if (r->n - r->at < n || memcmp(r->text + r->at, word, n) != 0)
        return false;
    r->at += n;
    return true;
}

static struct place place_of(const char *path)
{
    return (struct place){.file = "register", .path = path};
}

static int hex_digit(char c)
{
    if (c >= '0' && c <= '9')
        return c - '0';
    return c >= 'a' && c <= 'f' ? c - 'a' + 10 : -1;
}

/* The byte of \u00XX, whose \u is read; 0 when it is none or has a short form. */
static char long_escape(struct reader *r)
{
    if (r->n - r->at < 4 || r->text[r->at] != '0' || r->text[r->at + 1] != '0')
        return 0;
    int high = hex_digit(r->text[r->at + 2]), low = hex_digit(r->text[r->at + 3]);
    if (high < 0 || high > 1 || low < 0)
        return 0;
    int c = high * 16 + low;
    r->at += 4;
    return strchr("\b\t\n\f\r", c) ? 0 : (char)c; /* strchr finds the 0 too */
}

/* The character of an escape whose backslash is read; 0 when it is not canonical. */
static char read_escape(struct reader *r)
{
    char c = peek(r);
    if (c == 0)
        return 0;
    r->at++;
    switch (c) {
    case '"':
    case '\\':
        return c;
    case 'b':
        return '\b';
    case 't':
        return '\t';
    case 'n':
        return '\n';
    case 'f':
        return '\f';
    case 'r':
        return '\r';
    case 'u':
        return long_escape(r);
    default:
        return 0;
    }
}

/* Bytes of a string up to its closing quote, escapes included; the text's end is
 * no string's end. */
static size_t string_length(const struct reader *r)
{
    size_t i = r->at;
    while (i < r->n && r->text[i] != '"')
        i += r->text[i] == '\\' ? 2 : 1;
    return (i < r->n ? i : r->n) - r->at;
}

static const char *read_string(struct reader *r)
{
    size_t start = r->at;
    if (!take(r, '"'))
        return damaged(r, start, "a quote was expected");
    char *s = arena_alloc(r->a, string_length(r) + 1), *to = s;
    while (r->at < r->n && peek(r) != '"') {
        char c = r->text[r->at];
        size_t at = r->at++;
        if ((unsigned char)c < 0x20)
            return damaged(r, at, "a control character stands unescaped");
        if (c == '\\' && (c = read_escape(r)) == 0)
            return damaged(r, at, "this escape is not the canonical one");
        *to++ = c;
    }
    if (!take(r, '"'))
        return damaged(r, start, "the string that begins here is not closed");
    if (!text_equal(utf8_nfc(r->a, s), s))
        return damaged(r, start, "the string that begins here is not in normal form C");
    return s;
}

static struct node *read_value(struct reader *r, const char *path);

/* One more pair; keys must rise. */
static bool read_pair(struct reader *r, struct node *map)
{
    size_t start = r->at;
    const char *key = read_string(r);
    if (!key)
        return false;
    if (map->n > 0 && text_compare(map->pairs[map->n - 1].key, key) >= 0)
        return damaged(r, start, "keys are repeated or not in order");
    if (!take(r, ':'))
        return damaged(r, r->at, "a colon was expected");
    const char *path = arena_printf(r->a, "%s%s%s", map->place.path,
                                    map->place.path[0] ? "/" : "", key);
    struct node *value = read_value(r, path);
    if (value)
        node_add(r->a, map, key, place_of(path), value);
    return value != NULL;
}

static struct node *read_map(struct reader *r, const char *path)
{
    struct node *map = node_map(r->a, place_of(path));
    if (take(r, '}'))
        return map;
    do {
        if (!read_pair(r, map))
            return NULL;
    } while (take(r, ','));
    return take(r, '}') ? map : damaged(r, r->at, "a comma or } was expected");
}

static struct node *read_list(struct reader *r, const char *path)
{
    struct node *list = node_list(r->a, place_of(path));
    if (take(r, ']'))
        return list;
    do {
        const char *of_item = arena_printf(r->a, "%s%s%zu", path, path[0] ? "/" : "", list->n + 1);
        struct node *item = read_value(r, of_item);
        if (!item)
            return NULL;
        node_push(r->a, list, item);
    } while (take(r, ','));
    return take(r, ']') ? list : damaged(r, r->at, "a comma or ] was expected");
}

static struct node *read_count(struct reader *r, const char *path)
{
    size_t start = r->at;
    while (peek(r) >= '0' && peek(r) <= '9')
        r->at++;
    size_t n = r->at - start, most = strlen(LARGEST_COUNT);
    const char *digits = arena_strn(r->a, r->text + start, n);
    if (digits[0] == '0' && n > 1)
        return damaged(r, start, "a number begins with a needless zero");
    if (n > most || (n == most && text_compare(digits, LARGEST_COUNT) > 0))
        return damaged(r, start, "a number is larger than " LARGEST_COUNT);
    if (peek(r) == '.' || peek(r) == 'e' || peek(r) == 'E')
        return damaged(r, start, "a number is not whole");
    return node_scalar(r->a, FORM_COUNT, digits, place_of(path));
}

static struct node *read_scalar(struct reader *r, const char *path)
{
    if (peek(r) == '"') {
        const char *s = read_string(r);
        struct node *n = s ? node_scalar(r->a, FORM_TEXT, s, place_of(path)) : NULL;
        if (n)
            n->quoted = true; /* a text "no" is not the removal `no` */
        return n;
    }
    if (peek(r) >= '0' && peek(r) <= '9')
        return read_count(r, path);
    if (take_word(r, "true"))
        return node_scalar(r->a, FORM_YES, "yes", place_of(path));
    if (take_word(r, "false"))
        return node_scalar(r->a, FORM_NO, "no", place_of(path));
    return damaged(r, r->at, "a string, a whole number, true, false, { or [ was expected");
}

static struct node *read_value(struct reader *r, const char *path)
{
    char c = peek(r);
    if (c != '{' && c != '[')
        return read_scalar(r, path);
    if (r->depth == JSON_DEPTH)
        return damaged(r, r->at, "it is nested too deep");
    r->at++;
    r->depth++;
    struct node *n = c == '{' ? read_map(r, path) : read_list(r, path);
    r->depth--;
    return n;
}

ohmen_status json_read(struct arena *a, const char *bytes, size_t n, const char *path,
                       struct node **out, ohmen_error *e)
{
    struct reader r = {.a = a, .text = bytes, .n = n, .path = path, .e = e};
    size_t bad = utf8_check(bytes, n);
    if (bad < n) {
        damaged(&r, bad, "it is no valid UTF-8");
        return OHMEN_REGISTER;
    }
    struct node *root = read_value(&r, arena_str(a, path));
    if (!root)
        return OHMEN_REGISTER;
    if (r.at < n) {
        damaged(&r, r.at, "something follows the end");
        return OHMEN_REGISTER;
    }
    *out = root;
    return OHMEN_OK;
}
