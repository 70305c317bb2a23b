/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Text, attributes and ids of a page. Owns nothing; ids live in the scratch arena.
 * Invariant: no byte of a report's text reaches the page but through put_escaped or, of
 * an id, as a letter, digit or hyphen. */
#include <string.h>

#include "report/clean.h"
#include "report/html.h"

void html_raw(struct html *h, const char *markup)
{
    text_add(h->out, markup);
}

static const char *entity_of(char c)
{
    switch (c) {
    case '&': return "&amp;";
    case '<': return "&lt;";
    case '>': return "&gt;";
    case '"': return "&quot;";
    case '\'': return "&#39;";
    default: return NULL;
    }
}

static void put_escaped(struct html *h, const char *s)
{
    for (; *s; s++) {
        const char *entity = entity_of(*s);
        if (entity)
            text_add(h->out, entity);
        else
            text_byte(h->out, *s);
    }
}

/* The blocks of scripts that are written from right to left (Unicode, DerivedBidiClass):
 * U+0590..08FF, FB1D..FDFF, FE70..FEFF, 10800..10FFF, 1E800..1EFFF. By the bytes of valid
 * UTF-8, a little more generously. */
static bool has_right_to_left(const char *s)
{
    for (const unsigned char *u = (const unsigned char *)s; *u; u++) {
        bool two = *u >= 0xd6 && *u <= 0xdf, three = *u == 0xe0 && u[1] < 0xa4;
        bool forms = *u == 0xef && u[1] >= 0xac && u[1] <= 0xbb;
        bool four =
            *u == 0xf0 && ((u[1] == 0x90 && u[2] >= 0xa0) || (u[1] == 0x9e && u[2] >= 0xa0));
        if (two || three || forms || four)
            return true;
    }
    return false;
}

void html_bare_text(struct html *h, const char *s)
{
    put_escaped(h, clean_text(h->page.arena, s, false));
}

void html_text(struct html *h, const char *s)
{
    bool apart = has_right_to_left(s);
    html_raw(h, apart ? "<bdi>" : "");
    html_bare_text(h, s);
    html_raw(h, apart ? "</bdi>" : "");
}

void html_attribute(struct html *h, const char *name, const char *s)
{
    text_printf(h->out, " %s=\"", name);
    html_bare_text(h, s);
    text_byte(h->out, '"');
}

void html_figure(struct html *h, const char *figure)
{
    if (!figure || !*figure)
        return;
    html_attribute(h, "data-figure", figure);
    html_attribute(h, "title", figure);
}

/* --- ids --- */

enum { LONGEST_SLUG = 60 };

/* Letters in lower case and digits; a hyphen for what stands between them. */
static const char *slug_of(struct arena *a, const char *s)
{
    struct text t;
    text_init(&t, a);
    bool gap = false;
    for (; *s && t.n < LONGEST_SLUG; s++) {
        char c = *s >= 'A' && *s <= 'Z' ? (char)(*s - 'A' + 'a') : *s;
        bool plain = (c >= 'a' && c <= 'z') || (c >= '0' && c <= '9');
        if (plain && gap && t.n)
            text_byte(&t, '-');
        gap = !plain;
        if (plain)
            text_byte(&t, c);
    }
    return t.n ? text_str(&t) : "part";
}

const char *html_id(struct html *h, const char *s)
{
    struct arena *a = h->page.arena;
    const char *slug = slug_of(a, s ? s : ""), *id = slug;
    for (unsigned n = 2; strmap_has(&h->ids, id); n++)
        id = arena_printf(a, "%s-%u", slug, n);
    strmap_set(a, &h->ids, id, h);
    return id;
}

void html_open_scroll(struct html *h, const char *kind, const char *name, bool wide)
{
    text_printf(h->out, "<div class=\"scroll %s\"", kind);
    if (wide) {
        html_raw(h, " tabindex=\"0\" role=\"region\"");
        html_attribute(h, "aria-label", name);
    }
    html_raw(h, ">\n");
}

void html_open_figure(struct html *h, const struct block *b, const char *id)
{
    html_raw(h, "<figure");
    if (id)
        html_attribute(h, "id", id);
    html_raw(h, ">\n");
    if (!b->title || !*b->title)
        return;
    html_raw(h, "<figcaption>");
    html_text(h, b->title);
    html_raw(h, "</figcaption>\n");
}

const char *html_picture_title(const struct html *h, const struct block *b)
{
    return b->title && *b->title ? b->title : h->section;
}

void html_remark(struct html *h, const char *words, const char *figure)
{
    html_raw(h, "<p class=\"remark\"");
    html_figure(h, figure);
    html_raw(h, ">");
    html_text(h, words);
    html_raw(h, "</p>\n");
}
