/* SPDX-License-Identifier: GPL-3.0-or-later */
/* UTF-8 by utf8proc: nothing here depends on the locale. */
#include "base/utf8.h"

#include <string.h>
#include <utf8proc.h>

#include "base/text.h"

size_t utf8_check(const char *s, size_t n)
{
    size_t i = 0;
    while (i < n) {
        utf8proc_int32_t c;
        utf8proc_ssize_t len =
            utf8proc_iterate((const utf8proc_uint8_t *)s + i, (utf8proc_ssize_t)(n - i), &c);
        if (len <= 0 || c == 0)
            return i;
        i += (size_t)len;
    }
    return n;
}

/* Decomposes, with `also` folds, orders and composes in memory of the arena. */
static const char *compose(struct arena *a, const char *s, size_t n, utf8proc_option_t also)
{
    const utf8proc_uint8_t *from = (const utf8proc_uint8_t *)s;
    utf8proc_ssize_t len = (utf8proc_ssize_t)n;
    utf8proc_option_t how = UTF8PROC_STABLE | UTF8PROC_COMPOSE | also;
    utf8proc_ssize_t points = utf8proc_decompose(from, len, NULL, 0, how);
    if (points < 0)
        arena_exhausted(a); /* beyond what utf8proc counts: s is valid */
    /* One element more than points: utf8proc_reencode adds a zero byte. */
    utf8proc_int32_t *buffer = NEW_ARRAY(a, (size_t)points + 1, utf8proc_int32_t);
    utf8proc_decompose(from, len, buffer, points, how);
    if (utf8proc_reencode(buffer, points, how) < 0)
        arena_exhausted(a);
    return (const char *)buffer;
}

const char *utf8_nfc(struct arena *a, const char *s)
{
    size_t n = strlen(s);
    bool ascii = true;
    for (size_t i = 0; i < n; i++)
        ascii = ascii && (unsigned char)s[i] < 0x80;
    if (ascii)
        return s;
    return compose(a, s, n, 0);
}

const char *utf8_fold(struct arena *a, const char *s)
{
    bool plain = true;
    for (const char *p = s; *p; p++)
        plain = plain && (unsigned char)*p < 0x80 && !(*p >= 'A' && *p <= 'Z');
    if (plain)
        return s;
    return compose(a, s, strlen(s), UTF8PROC_CASEFOLD);
}

/* What next_point gives for a byte that begins no valid sequence. */
enum { INVALID_BYTE = -1 };

/* The code point at s, or INVALID_BYTE; returns its bytes. */
static size_t next_point(const char *s, utf8proc_int32_t *c)
{
    size_t left = strnlen(s, 4);
    utf8proc_ssize_t len = utf8proc_iterate((const utf8proc_uint8_t *)s, (utf8proc_ssize_t)left, c);
    if (len <= 0) {
        *c = INVALID_BYTE;
        return 1;
    }
    return (size_t)len;
}

/* Invalid bytes, unassigned, control, format, private and line separator
 * characters, and the default-ignorable ones outside Cf, are shown, never sent. */
static bool must_show(utf8proc_int32_t c)
{
    if (c == INVALID_BYTE)
        return true;
    if (c == ' ')
        return false;
    switch (utf8proc_category(c)) {
    case UTF8PROC_CATEGORY_CC:
    case UTF8PROC_CATEGORY_CF:
    case UTF8PROC_CATEGORY_CS:
    case UTF8PROC_CATEGORY_CO:
    case UTF8PROC_CATEGORY_CN:
    case UTF8PROC_CATEGORY_ZL:
    case UTF8PROC_CATEGORY_ZP: return true;
    default: break;
    }
    return utf8proc_get_property(c)->ignorable;
}

static void show_point(struct text *t, const char *s, utf8proc_int32_t c)
{
    if (c < 0x80)
        text_printf(t, "\\x%02x", (unsigned)(unsigned char)*s);
    else
        text_printf(t, "\\u{%04x}", (unsigned)c);
}

static size_t shown_columns(utf8proc_int32_t c)
{
    if (!must_show(c))
        return (size_t)utf8proc_charwidth(c);
    if (c < 0x80)
        return 4;
    return c <= 0xFFFF ? 8 : c <= 0xFFFFF ? 9 : 10;
}

size_t utf8_columns(const char *s)
{
    size_t columns = 0;
    while (*s) {
        utf8proc_int32_t c;
        s += next_point(s, &c);
        columns += shown_columns(c);
    }
    return columns;
}

size_t utf8_prefix(const char *s, size_t columns)
{
    const char *p = s;
    while (*p) {
        utf8proc_int32_t c;
        size_t len = next_point(p, &c), width = shown_columns(c);
        if (width > columns)
            break;
        columns -= width;
        p += len;
    }
    return (size_t)(p - s);
}

size_t utf8_count(const char *s, size_t n)
{
    size_t count = 0;
    for (size_t i = 0; i < n; i++)
        count += ((unsigned char)s[i] & 0xC0) != 0x80;
    return count;
}

/* What ohmen's own texts use beyond ASCII. */
static const char *stand_in(utf8proc_int32_t c)
{
    switch (c) {
    case 0x00A0: return " ";
    case 0x00B7: return "*";
    case 0x00D7: return "x";
    case 0x2013: return "-";
    case 0x2014: return "--";
    case 0x2018:
    case 0x2019: return "'";
    case 0x201C:
    case 0x201D: return "\"";
    case 0x2026: return "...";
    case 0x2192: return "->";
    case 0x2212: return "-";
    case 0x2264: return "<=";
    case 0x2265: return ">=";
    default: return NULL;
    }
}

static void clean_point(struct text *t, const char *s, size_t len, utf8proc_int32_t c, bool ascii)
{
    if (must_show(c))
        show_point(t, s, c);
    else if (ascii && c >= 0x80 && stand_in(c))
        text_add(t, stand_in(c));
    else if (ascii && c >= 0x80)
        show_point(t, s, c);
    else
        text_addn(t, s, len);
}

const char *utf8_clean(struct arena *a, const char *s, bool ascii)
{
    bool plain = true;
    for (const char *p = s; *p; p++)
        plain = plain && *p >= 0x20 && *p < 0x7F;
    if (plain)
        return s;
    struct text t;
    text_init(&t, a);
    while (*s) {
        utf8proc_int32_t c;
        size_t len = next_point(s, &c);
        clean_point(&t, s, len, c, ascii);
        s += len;
    }
    return text_str(&t);
}
