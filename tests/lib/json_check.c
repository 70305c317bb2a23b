/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Recursive descent over the grammar of RFC 8259, section by section. Owns nothing,
 * allocates nothing. Every skip_ function returns the end of what it read, or NULL
 * and leaves the place of the fault in the reader. */
#include "json_check.h"

#include <stdlib.h>
#include <string.h>

enum { DEEPEST = 64 };

struct reader {
    const char *end, *bad;
};

static const char *skip_value(struct reader *r, const char *s, int depth);

static const char *fail(struct reader *r, const char *at)
{
    if (!r->bad)
        r->bad = at;
    return NULL;
}

static int byte_at(const struct reader *r, const char *s)
{
    return s < r->end ? (unsigned char)*s : -1;
}

static bool is_digit(int c)
{
    return c >= '0' && c <= '9';
}

/* Section 2: blank, tab, line feed, carriage return. */
static const char *skip_space(const struct reader *r, const char *s)
{
    while (byte_at(r, s) == ' ' || byte_at(r, s) == '\t' || byte_at(r, s) == '\n'
           || byte_at(r, s) == '\r')
        s++;
    return s;
}

/* Section 3: lower case only. */
static const char *skip_name(struct reader *r, const char *s)
{
    static const char *const names[] = {"false", "null", "true"};
    for (size_t i = 0; i < 3; i++) {
        size_t n = strlen(names[i]);
        if ((size_t)(r->end - s) >= n && memcmp(s, names[i], n) == 0)
            return s + n;
    }
    return fail(r, s);
}

static const char *skip_digits(struct reader *r, const char *s)
{
    if (!is_digit(byte_at(r, s)))
        return fail(r, s);
    while (is_digit(byte_at(r, s)))
        s++;
    return s;
}

/* Section 6: no leading zero, no plus, digits on both sides of the point. */
static const char *skip_number(struct reader *r, const char *s)
{
    if (byte_at(r, s) == '-')
        s++;
    s = byte_at(r, s) == '0' ? s + 1 : skip_digits(r, s);
    if (s && byte_at(r, s) == '.')
        s = skip_digits(r, s + 1);
    if (s && (byte_at(r, s) == 'e' || byte_at(r, s) == 'E')) {
        s++;
        if (byte_at(r, s) == '+' || byte_at(r, s) == '-')
            s++;
        s = skip_digits(r, s);
    }
    return s;
}

static int hex_value(int c)
{
    if (is_digit(c))
        return c - '0';
    if (c >= 'a' && c <= 'f')
        return c - 'a' + 10;
    return c >= 'A' && c <= 'F' ? c - 'A' + 10 : -1;
}

/* Four hex digits behind \u, or -1. */
static int hex4(const struct reader *r, const char *s)
{
    int x = 0;
    for (int i = 0; i < 4; i++) {
        int digit = hex_value(byte_at(r, s + i));
        if (digit < 0)
            return -1;
        x = x * 16 + digit;
    }
    return x;
}

/* Surrogates must come in pairs (section 8.2 leaves lone ones open; here they are wrong). */
static const char *skip_escape(struct reader *r, const char *s)
{
    int c = byte_at(r, s + 1);
    if (c > 0 && strchr("\"\\/bfnrt", c))
        return s + 2;
    int unit = c == 'u' ? hex4(r, s + 2) : -1;
    if (unit < 0 || (unit >= 0xdc00 && unit <= 0xdfff))
        return fail(r, s);
    if (unit < 0xd800 || unit > 0xdbff)
        return s + 6;
    int low = byte_at(r, s + 6) == '\\' && byte_at(r, s + 7) == 'u' ? hex4(r, s + 8) : -1;
    return low >= 0xdc00 && low <= 0xdfff ? s + 12 : fail(r, s);
}

/* RFC 3629, the table of section 4, row by row. */
static const char *skip_utf8(struct reader *r, const char *s)
{
    static const struct { int first, last, low, high, more; } rows[] = {
        {0x20, 0x7f, 0, 0, 0},       {0xc2, 0xdf, 0x80, 0xbf, 1}, {0xe0, 0xe0, 0xa0, 0xbf, 2},
        {0xe1, 0xec, 0x80, 0xbf, 2}, {0xed, 0xed, 0x80, 0x9f, 2}, {0xee, 0xef, 0x80, 0xbf, 2},
        {0xf0, 0xf0, 0x90, 0xbf, 3}, {0xf1, 0xf3, 0x80, 0xbf, 3}, {0xf4, 0xf4, 0x80, 0x8f, 3}};
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        int c = byte_at(r, s), second = byte_at(r, s + 1);
        if (c < rows[i].first || c > rows[i].last)
            continue;
        if (rows[i].more && (second < rows[i].low || second > rows[i].high))
            return fail(r, s);
        for (int k = 2; k <= rows[i].more; k++)
            if (byte_at(r, s + k) < 0x80 || byte_at(r, s + k) > 0xbf)
                return fail(r, s);
        return s + 1 + rows[i].more;
    }
    return fail(r, s);
}

/* Section 7. */
static const char *skip_string(struct reader *r, const char *s)
{
    if (byte_at(r, s) != '"')
        return fail(r, s);
    s++;
    while (s && byte_at(r, s) != '"')
        s = byte_at(r, s) == '\\' ? skip_escape(r, s) : skip_utf8(r, s);
    return s ? s + 1 : NULL;
}

/* Whether the key k (with quotes, `n` bytes) stands among those from `s` on. */
static bool key_before(struct reader *r, const char *s, const char *k, size_t n, int depth)
{
    while (s < k) {
        s = skip_space(r, s);
        const char *e = skip_string(r, s);
        if (s < k && (size_t)(e - s) == n && memcmp(s, k, n) == 0)
            return true;
        e = skip_space(r, skip_value(r, skip_space(r, skip_space(r, e) + 1), depth + 1));
        s = skip_space(r, e + 1);
    }
    return false;
}

/* Section 4. */
static const char *skip_member(struct reader *r, const char *first, const char *s, int depth)
{
    const char *key = s;
    if (!(s = skip_string(r, s)))
        return NULL;
    if (key_before(r, first, key, (size_t)(s - key), depth))
        return fail(r, key);
    s = skip_space(r, s);
    return byte_at(r, s) == ':' ? skip_value(r, skip_space(r, s + 1), depth + 1) : fail(r, s);
}

/* Sections 4 and 5: objects and arrays. */
static const char *skip_list(struct reader *r, const char *s, int depth)
{
    bool object = *s == '{';
    int close = object ? '}' : ']';
    const char *first = s = skip_space(r, s + 1);
    if (byte_at(r, s) == close)
        return s + 1;
    for (;;) {
        s = object ? skip_member(r, first, s, depth) : skip_value(r, s, depth + 1);
        if (!s)
            return NULL;
        s = skip_space(r, s);
        if (byte_at(r, s) == close)
            return s + 1;
        if (byte_at(r, s) != ',')
            return fail(r, s);
        s = skip_space(r, s + 1);
    }
}

static const char *skip_value(struct reader *r, const char *s, int depth)
{
    int c = byte_at(r, s);
    if (depth > DEEPEST)
        return fail(r, s);
    if (c == '{' || c == '[')
        return skip_list(r, s, depth);
    if (c == '"')
        return skip_string(r, s);
    return c == '-' || is_digit(c) ? skip_number(r, s) : skip_name(r, s);
}

bool json_check(const char *s, size_t n, size_t *bad)
{
    struct reader r = {.end = s + n};
    const char *e = skip_value(&r, skip_space(&r, s), 1);
    if (e && skip_space(&r, e) != r.end)
        e = fail(&r, skip_space(&r, e));
    if (!e && bad)
        *bad = (size_t)(r.bad - s);
    return e != NULL;
}

/* The value of a member or an element of the list at s, named by n bytes. */
static const char *pick_one(struct reader *r, const char *s, const char *name, size_t n)
{
    bool object = *s == '{';
    if (!object && *s != '[')
        return NULL;
    s = skip_space(r, s + 1);
    for (unsigned long i = 0; *s != '}' && *s != ']'; i++) {
        bool found = !object && i == strtoul(name, NULL, 10);
        if (object) {
            const char *e = skip_string(r, s);
            found = (size_t)(e - s) == n + 2 && memcmp(s + 1, name, n) == 0;
            s = skip_space(r, skip_space(r, e) + 1);
        }
        if (found)
            return s;
        s = skip_space(r, skip_value(r, s, 1));
        s = *s == ',' ? skip_space(r, s + 1) : s;
    }
    return NULL;
}

const char *json_pick(const char *s, const char *path, size_t *length)
{
    struct reader r = {.end = s + strlen(s)};
    s = skip_space(&r, s);
    while (s && *path) {
        size_t n = strcspn(path, "/");
        s = pick_one(&r, s, path, n);
        path += n + (path[n] == '/');
    }
    if (s)
        *length = (size_t)(skip_value(&r, s, 1) - s);
    return s;
}

bool json_is(const char *s, const char *path, const char *expected)
{
    size_t n;
    const char *found = json_pick(s, path, &n);
    return found && n == strlen(expected) && memcmp(found, expected, n) == 0;
}
