/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Lines, wrapping and rules of a page. Owns nothing but the order of things on a
 * line: blanks are written only when text follows, colour only around text.
 * Invariant: no line is wider than the page (asserted). */
#include "report/page.h"

#include <assert.h>
#include <string.h>

#include "base/utf8.h"
#include "report/clean.h"

const char *page_clean(const struct page *p, const char *s)
{
    return clean_text(p->arena, s, p->ascii);
}

struct line line_begin(struct page *p)
{
    return (struct line){.page = p};
}

void line_to(struct line *l, size_t column)
{
    if (column <= l->column)
        return;
    l->pending += column - l->column;
    l->column = column;
}

static void put_inked(struct page *p, const char *s, size_t n, enum ink ink)
{
    static const char *const on[] = {"", "\033[1m", "\033[1;31m", "\033[2m"};
    bool coloured = p->colour && ink != INK_PLAIN;
    if (coloured)
        text_add(p->out, on[ink]);
    text_addn(p->out, s, n);
    if (coloured)
        text_add(p->out, "\033[0m");
}

void line_add_n(struct line *l, const char *s, size_t n, enum ink ink)
{
    size_t end = n;
    while (end > 0 && s[end - 1] == ' ')
        end--;
    if (end > 0) {
        text_repeat(l->page->out, " ", l->pending);
        l->pending = 0;
        put_inked(l->page, s, end, ink);
        l->column += utf8_columns(s[end] ? arena_strn(l->page->arena, s, end) : s);
    }
    assert(l->column <= l->page->width);
    line_to(l, l->column + (n - end));
}

void line_add(struct line *l, const char *s, enum ink ink)
{
    line_add_n(l, s, strlen(s), ink);
}

void line_add_right(struct line *l, const char *s, size_t end, enum ink ink)
{
    size_t columns = utf8_columns(s);
    line_to(l, end > columns ? end - columns : 0);
    line_add(l, s, ink);
}

void line_end(struct line *l)
{
    text_byte(l->page->out, '\n');
    *l = line_begin(l->page);
}

/* Bytes of a part of a word that is wider than the line: up to a stroke, point or plus in
 * its last half, so that paths and names of figures break between their steps, or up to the
 * beginning of an escape such as \u{200d}, which stays whole. */
static size_t part_of_word(const char *s, size_t n)
{
    for (size_t i = n; i > n / 2; i--)
        if (strchr("/.+", s[i - 1]) || s[i] == '\\')
            return i;
    return n;
}

/* Bytes of the longest run of whole words that fits; of a part of the first word
 * when that is wider than the line. */
static size_t fitting(const char *s, size_t width)
{
    size_t n = utf8_prefix(s, width), i = n;
    if (s[n] == 0 || s[n] == ' ')
        return n;
    while (i > 0 && s[i - 1] != ' ')
        i--;
    if (i > 0)
        return i;
    return n > 0 ? part_of_word(s, n) : strlen(s);
}

struct lines page_wrap(const struct page *p, const char *s, size_t width)
{
    assert(width >= 2);
    struct lines lines = {0};
    do {
        s += strspn(s, " ");
        size_t n = fitting(s, width), end = n;
        while (end > 0 && s[end - 1] == ' ')
            end--;
        *array_push(p->arena, &lines) = arena_strn(p->arena, s, end);
        s += n;
        s += strspn(s, " ");
    } while (*s);
    return lines;
}

size_t page_widest_word(const struct page *p, const char *s)
{
    size_t widest = 0;
    while (*s) {
        size_t n = strcspn(s, " ");
        size_t columns = utf8_columns(arena_strn(p->arena, s, n));
        if (columns > widest)
            widest = columns;
        s += n;
        s += strspn(s, " ");
    }
    return widest;
}

void page_blank(struct page *p)
{
    text_byte(p->out, '\n');
}

void page_rule(struct page *p, size_t indent, size_t n, bool strong)
{
    const char *stroke = p->ascii ? strong ? "=" : "-" : strong ? "━" : "─";
    struct line l = line_begin(p);
    line_to(&l, indent);
    for (size_t i = 0; i < n; i++)
        line_add(&l, stroke, INK_PLAIN);
    line_end(&l);
}

void page_paragraph(struct page *p, const char *s, size_t indent, enum ink ink)
{
    struct lines lines = page_wrap(p, s, p->width - indent);
    for (size_t i = 0; i < lines.n; i++) {
        struct line l = line_begin(p);
        line_to(&l, indent);
        line_add(&l, lines.at[i], ink);
        line_end(&l);
    }
}
