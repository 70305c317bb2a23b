/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One pass over the bytes with a stack of open elements. Owns the stack and the list of
 * ids for the length of a check. Every read_ function returns the end of what it read, or
 * NULL once the fault is noted. */
#include "html_check.h"

#include <string.h>

enum { DEEPEST = 40, MOST_IDS = 4000, MOST_REFERENCES = 4000, LONGEST_NAME = 24 };

struct name {
    const char *at;
    size_t n;
};

struct reader {
    const char *start, *end, *bad, *fault;
    struct name open[DEEPEST];
    size_t depth;
    struct name ids[MOST_IDS], references[MOST_REFERENCES];
    size_t n_ids, n_references;
    unsigned seen_main, seen_title, seen_style, seen_body;
};

static const char *fail(struct reader *r, const char *at, const char *what)
{
    if (!r->fault) {
        r->fault = what;
        r->bad = at;
    }
    return NULL;
}

static bool is_name(struct name a, const char *b)
{
    return strlen(b) == a.n && memcmp(a.at, b, a.n) == 0;
}

static bool is_one_of(struct name a, const char *const *list)
{
    for (; *list; list++)
        if (is_name(a, *list))
            return true;
    return false;
}

static bool starts(const struct reader *r, const char *s, const char *with)
{
    size_t n = strlen(with);
    return (size_t)(r->end - s) >= n && memcmp(s, with, n) == 0;
}

static bool contains(struct name a, const char *what)
{
    size_t n = strlen(what);
    for (size_t i = 0; i + n <= a.n; i++)
        if (memcmp(a.at + i, what, n) == 0)
            return true;
    return false;
}

/* --- bytes --- */

/* RFC 3629: length of the character, 0 when it is none; surrogates and overlong forms are
 * found by the second byte. */
static size_t character(const struct reader *r, const char *s)
{
    const unsigned char *u = (const unsigned char *)s;
    size_t n = *u < 0x80 ? 1 : *u >= 0xc2 && *u < 0xe0 ? 2 : *u < 0xe0 ? 0 : *u < 0xf0 ? 3 : 4;
    if (n == 0 || *u > 0xf4 || (size_t)(r->end - s) < n)
        return 0;
    for (size_t i = 1; i < n; i++)
        if (u[i] < 0x80 || u[i] > 0xbf)
            return 0;
    bool wrong = (*u == 0xe0 && u[1] < 0xa0) || (*u == 0xed && u[1] > 0x9f) ||
                 (*u == 0xf0 && u[1] < 0x90) || (*u == 0xf4 && u[1] > 0x8f);
    return wrong ? 0 : n;
}

/* Controls and what changes the direction of text: U+0080..9f, 061c, 200b..200f,
 * 2028..202e, 2060..206f, feff. */
static bool is_hidden(const char *s, size_t n)
{
    const unsigned char *u = (const unsigned char *)s;
    if (n == 1)
        return (*u < 0x20 && *u != '\n') || *u == 0x7f;
    if (n == 2)
        return (*u == 0xc2 && u[1] < 0xa0) || (*u == 0xd8 && u[1] == 0x9c);
    if (n != 3 || (*u != 0xe2 && *u != 0xef))
        return false;
    if (*u == 0xef)
        return u[1] == 0xbb && u[2] == 0xbf;
    return (u[1] == 0x80 && ((u[2] >= 0x8b && u[2] <= 0x8f) || (u[2] >= 0xa8 && u[2] <= 0xae))) ||
           (u[1] == 0x81 && u[2] >= 0xa0 && u[2] <= 0xaf);
}

static const char *read_bytes(struct reader *r, const char *s)
{
    while (s < r->end) {
        size_t n = character(r, s);
        if (n == 0)
            return fail(r, s, "not UTF-8");
        if (is_hidden(s, n))
            return fail(r, s, "a hidden character");
        s += n;
    }
    return s;
}

static const char *const entities[] = {"&lt;", "&gt;", "&amp;", "&quot;", "&#39;", 0};
static const char characters[] = "<>&\"'";

static const char *read_entity(struct reader *r, const char *s)
{
    for (size_t i = 0; entities[i]; i++)
        if (starts(r, s, entities[i]))
            return s + strlen(entities[i]);
    return fail(r, s, "an ampersand that is no known entity");
}

/* --- attributes --- */

static void keep(struct name *list, size_t *n, size_t most, struct name v, struct reader *r)
{
    if (*n == most)
        fail(r, v.at, "too many ids or references");
    else
        list[(*n)++] = v;
}

static void note_value(struct reader *r, struct name name, struct name value)
{
    static const char *const references[] = {"for", "aria-labelledby", "aria-describedby", 0};
    static const char *const forbidden[] = {"style", "src", "srcset", "action", "xmlns", 0};
    if (is_one_of(name, forbidden) || (name.n > 2 && memcmp(name.at, "on", 2) == 0))
        fail(r, name.at, "an attribute that runs, fetches or styles");
    if (is_name(name, "id"))
        keep(r->ids, &r->n_ids, MOST_IDS, value, r);
    if (is_one_of(name, references))
        keep(r->references, &r->n_references, MOST_REFERENCES, value, r);
    if (is_name(name, "href")) {
        if (value.n < 2 || *value.at != '#')
            fail(r, value.at, "a reference to another page");
        else
            keep(r->references, &r->n_references, MOST_REFERENCES,
                 (struct name){value.at + 1, value.n - 1}, r);
    }
    if (is_name(name, "id") && value.n == 0)
        fail(r, value.at, "an empty id");
}

static const char *read_value(struct reader *r, const char *s)
{
    while (s && s < r->end && *s != '"') {
        if (*s == '<' || *s == '>' || *s == '\'' || *s == '\n')
            return fail(r, s, "a character that a value may not hold");
        s = *s == '&' ? read_entity(r, s) : s + 1;
    }
    return s && s < r->end ? s + 1 : fail(r, s ? s : r->end, "a value without an end");
}

static size_t name_length(const struct reader *r, const char *s)
{
    size_t n = 0;
    while (s + n < r->end && n < LONGEST_NAME &&
           strchr("abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ-0123456789", s[n]) && s[n])
        n++;
    return n;
}

static const char *read_attributes(struct reader *r, const char *s)
{
    struct name seen[16];
    size_t n_seen = 0;
    while (s && s < r->end && *s == ' ') {
        struct name name = {s + 1, name_length(r, s + 1)};
        s = name.at + name.n;
        if (name.n == 0 || n_seen == 16)
            return fail(r, s, "no name of an attribute, or too many of them");
        for (size_t i = 0; i < n_seen; i++)
            if (seen[i].n == name.n && memcmp(seen[i].at, name.at, name.n) == 0)
                return fail(r, s, "an attribute twice");
        seen[n_seen++] = name;
        if (!starts(r, s, "=\""))
            return fail(r, s, "an attribute without a quoted value");
        const char *value = s + 2;
        s = read_value(r, value);
        if (s)
            note_value(r, name, (struct name){value, (size_t)(s - 1 - value)});
    }
    return r->fault ? NULL : s;
}

/* --- elements --- */

static const char *const known[] = {
    "html", "head", "meta", "title", "style",  "body",  "a",       "input",      "label",
    "main", "nav",  "ul",   "ol",    "li",     "h1",    "h2",      "h3",         "p",
    "pre",  "bdi",  "div",  "span",  "b",      "table", "caption", "thead",      "tbody",
    "tr",   "th",   "td",   "dl",    "dt",     "dd",    "figure",  "figcaption", "svg",
    "desc", "g",    "line", "path",  "circle", "text",  0};

static void count_once(struct reader *r, struct name name)
{
    r->seen_main += is_name(name, "main");
    r->seen_style += is_name(name, "style");
    r->seen_body += is_name(name, "body");
    r->seen_title += is_name(name, "title") && r->depth && is_name(r->open[r->depth - 1], "head");
}

static const char *read_opening(struct reader *r, const char *s)
{
    static const char *const empty[] = {"meta", "input", 0};
    struct name name = {s + 1, name_length(r, s + 1)};
    if (!is_one_of(name, known))
        return fail(r, s, "an element that reports do not have");
    count_once(r, name);
    s = read_attributes(r, name.at + name.n);
    if (!s)
        return NULL;
    if (starts(r, s, "/>"))
        return s + 2;
    if (s == r->end || *s != '>')
        return fail(r, s, "a tag without an end");
    if (is_one_of(name, empty))
        return s + 1;
    if (r->depth == DEEPEST)
        return fail(r, s, "elements too deep in each other");
    r->open[r->depth++] = name;
    return s + 1;
}

static const char *read_closing(struct reader *r, const char *s)
{
    struct name name = {s + 2, name_length(r, s + 2)};
    const char *e = name.at + name.n;
    if (r->depth == 0 || r->open[r->depth - 1].n != name.n ||
        memcmp(r->open[r->depth - 1].at, name.at, name.n) != 0 || e == r->end || *e != '>')
        return fail(r, s, "a closing tag that closes nothing");
    r->depth--;
    return e + 1;
}

static const char *read_style(struct reader *r, const char *s)
{
    const char *e = s;
    while (e < r->end && *e != '<')
        e++;
    struct name style = {s, (size_t)(e - s)};
    if (contains(style, "url(") || contains(style, "@import") || contains(style, "http"))
        return fail(r, s, "a style that fetches");
    return e;
}

static const char *read_node(struct reader *r, const char *s)
{
    if (r->depth && is_name(r->open[r->depth - 1], "style") && *s != '<')
        return read_style(r, s);
    if (starts(r, s, "</"))
        return read_closing(r, s);
    if (*s == '<')
        return read_opening(r, s);
    if (*s == '&')
        return read_entity(r, s);
    return strchr(">\"'", *s) ? fail(r, s, "a character that must be escaped") : s + 1;
}

/* --- the whole --- */

static bool same(struct name a, struct name b)
{
    return a.n == b.n && memcmp(a.at, b.at, a.n) == 0;
}

static void check_ids(struct reader *r)
{
    for (size_t i = 0; i < r->n_ids; i++)
        for (size_t k = 0; k < i; k++)
            if (same(r->ids[i], r->ids[k]))
                fail(r, r->ids[i].at, "an id twice");
    for (size_t i = 0; i < r->n_references; i++) {
        bool found = false;
        for (size_t k = 0; k < r->n_ids && !found; k++)
            found = same(r->references[i], r->ids[k]);
        if (!found)
            fail(r, r->references[i].at, "a reference to no id of the page");
    }
}

const char *html_check(const char *s, size_t n, size_t *bad)
{
    static struct reader cleared;
    struct reader *r = &cleared;
    static const char doctype[] = "<!DOCTYPE html>\n<html lang=\"en\">\n";
    *r = (struct reader){.start = s, .end = s + n};
    read_bytes(r, s);
    if (!starts(r, s, doctype))
        fail(r, s, "no doctype");
    for (const char *at = s + sizeof "<!DOCTYPE html>" - 1; !r->fault && at && at < r->end;)
        at = read_node(r, at);
    if (r->depth)
        fail(r, r->end, "elements that are not closed");
    if (r->seen_main != 1 || r->seen_title != 1 || r->seen_style != 1 || r->seen_body != 1)
        fail(r, r->end, "not one each of main, title, style and body");
    if (!r->fault)
        check_ids(r);
    if (r->fault && bad)
        *bad = (size_t)(r->bad - s);
    return r->fault;
}

/* --- words --- */

static const char *skip_picture(const char *s)
{
    return strstr(s, "</svg>") + strlen("</svg>");
}

static const char *skip_tag(const char *s, bool *within)
{
    static const char *const joined[] = {"span", "bdi", "b", 0};
    const char *name = s + 1 + (s[1] == '/');
    *within = is_one_of((struct name){name, strcspn(name, " >/")}, joined);
    return strchr(s, '>') + 1;
}

void html_words(const char *s, size_t n, char *out)
{
    (void)n;
    s = strstr(s, "<body");
    while (*s) {
        bool within = false;
        if (*s == '<') {
            bool picture = strncmp(s, "<svg", 4) == 0;
            s = picture ? skip_picture(s) : skip_tag(s, &within);
            if (!within)
                *out++ = ' ';
            continue;
        }
        size_t k = 0;
        while (*s == '&' && strncmp(s, entities[k], strlen(entities[k])) != 0)
            k++;
        *out++ = *s == '&' ? characters[k] : *s;
        s += *s == '&' ? strlen(entities[k]) : 1;
    }
    *out = 0;
}
