/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The text of a document: places in it, and whether its characters are harmless.
 *
 * Owns nothing. Invariant: after source_open the text holds only characters that
 * a parser and an editor count alike; `last_offset` is the offset of `last`. */
#include "doc/source.h"

#include <string.h>

#include "base/utf8.h"

enum { QUOTED_CHARACTERS = 40 };

static bool is_line_end(char c)
{
    return c == '\n' || c == '\r';
}

/* Where the next line begins; SIZE_MAX when this one is the last. */
static size_t next_line(const struct source *s, size_t offset)
{
    while (offset < s->n && !is_line_end(s->text[offset]))
        offset++;
    if (offset + 1 < s->n && s->text[offset] == '\r' && s->text[offset + 1] == '\n')
        offset++;
    return offset < s->n ? offset + 1 : SIZE_MAX;
}

struct place source_place(const struct source *s, struct spot at)
{
    return (struct place){s->name, (uint32_t)at.line + 1, (uint32_t)at.column + 1, NULL};
}

/* Where a walk through the text stands. */
struct walk {
    size_t line, start; /* number and offset of the line in hand */
    size_t next;        /* offset of the next line */
};

/* The place of an offset that is not before the last one. */
static struct place place_of_offset(const struct source *s, struct walk *w, size_t offset)
{
    if (w->next == 0)
        w->next = next_line(s, 0);
    while (w->next <= offset) {
        w->start = w->next;
        w->next = next_line(s, w->start);
        w->line++;
    }
    size_t column = utf8_count(s->text + w->start, offset - w->start);
    return source_place(s, (struct spot){w->line, column});
}

size_t source_control(const char *s, size_t n)
{
    unsigned char c = (unsigned char)s[0];
    if (c < 0x20)
        return c == '\t' || c == '\n' || c == '\r' ? 0 : 1;
    if (c < 0x7F)
        return 0;
    unsigned char next = n > 1 ? (unsigned char)s[1] : 0, third = n > 2 ? (unsigned char)s[2] : 0;
    if (c == 0x7F)
        return 1;
    if (c == 0xC2 && next <= 0x9F)
        return 2; /* U+0080 .. U+009F */
    if (c == 0xE2 && next == 0x80 && (third == 0xA8 || third == 0xA9))
        return 3; /* U+2028, U+2029 */
    if (c == 0xEF && next == 0xBB && third == 0xBF)
        return 3; /* U+FEFF */
    if (c == 0xEF && next == 0xBF && third >= 0xBE)
        return 3; /* U+FFFE, U+FFFF */
    return 0;
}

static bool controls_found(const struct source *s, struct diags *d)
{
    bool found = false;
    struct walk w = {0};
    for (size_t i = 0; i < s->n; i++) {
        if (source_control(s->text + i, s->n - i) == 0)
            continue;
        found = true;
        diag_add(d, place_of_offset(s, &w, i),
                 "an invisible control character stands here: delete it");
        if (d->count >= DIAG_KEPT)
            break;
    }
    return found;
}

static bool encoding_found(const struct source *s, struct diags *d)
{
    struct walk w = {0};
    size_t bad = utf8_check(s->text, s->n);
    if (bad == s->n)
        return true;
    if (s->text[bad] == 0)
        diag_add(d, place_of_offset(s, &w, bad), "a zero byte stands here: this is no text file");
    else
        diag_add(d, place_of_offset(s, &w, bad),
                 "this byte (0x%02x) is not UTF-8: save the file with the encoding UTF-8",
                 (unsigned)(unsigned char)s->text[bad]);
    return false;
}

bool source_open(struct source *s, const char *name, const char *text, size_t n, size_t limit,
                 struct diags *d)
{
    *s = (struct source){.name = name, .text = text, .n = n};
    diags_file(d, name);
    if (n > limit) {
        diag_add(d, source_place(s, (struct spot){0, 0}),
                 "the file has %zu bytes, more than the %zu that are read: split it", n,
                 limit);
        return false;
    }
    if (n >= 3 && memcmp(text, "\xEF\xBB\xBF", 3) == 0) {
        s->text += 3;
        s->n -= 3;
    }
    return encoding_found(s, d) && !controls_found(s, d);
}

/* Moves `last` from the start of a line to the line of `at`; false when the text
 * ends before. */
static bool go_to_line(struct source *s, struct spot at)
{
    while (s->last.line < at.line) {
        size_t next = next_line(s, s->last_offset);
        if (next == SIZE_MAX)
            return false;
        s->last = (struct spot){s->last.line + 1, 0};
        s->last_offset = next;
    }
    return true;
}

size_t source_offset(struct source *s, struct spot at)
{
    struct spot *last = &s->last;
    if (at.line < last->line || (at.line == last->line && at.column < last->column)) {
        *last = (struct spot){0, 0};
        s->last_offset = 0;
    }
    if (!go_to_line(s, at))
        at.column = SIZE_MAX;
    size_t i = s->last_offset;
    for (; last->column < at.column && i < s->n && !is_line_end(s->text[i]); last->column++) {
        i++;
        while (i < s->n && ((unsigned char)s->text[i] & 0xC0) == 0x80)
            i++;
    }
    return s->last_offset = i;
}

struct spot source_clamp(struct source *s, struct spot at)
{
    source_offset(s, at);
    return s->last;
}

const char *source_line(struct arena *a, struct source *s, size_t line)
{
    size_t start = source_offset(s, (struct spot){line, 0}), end = start;
    while (end < s->n && !is_line_end(s->text[end]))
        end++;
    return arena_strn(a, s->text + start, end - start);
}

size_t source_line_above(const struct source *s, size_t line)
{
    size_t above = SIZE_MAX, offset = 0;
    for (size_t i = 0; i < line; i++) {
        size_t next = next_line(s, offset), end = next == SIZE_MAX ? s->n : next;
        while (offset < end && strchr(" \t\r\n", s->text[offset]))
            offset++;
        if (offset < end && s->text[offset] != '#')
            above = i;
        if (next == SIZE_MAX)
            break;
        offset = next;
    }
    return above;
}

const char *source_quote(struct arena *a, const char *text)
{
    size_t n = 0, characters = 0;
    for (; text[n] && characters < QUOTED_CHARACTERS; characters++) {
        n++;
        while (((unsigned char)text[n] & 0xC0) == 0x80)
            n++;
    }
    return arena_printf(a, "'%.*s%s'", (int)n, text, text[n] ? "..." : "");
}
