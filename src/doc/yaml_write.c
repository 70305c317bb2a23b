/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Trees into YAML, by hand, so that the look is ours: block maps, and short maps
 * and lists in brackets.
 *
 * Owns nothing. Invariant: what is written here, yaml_read reads as the same
 * tree. A scalar is written plain only when it is made of characters that mean
 * nothing to YAML in any context; otherwise it stands in double quotes. */
#include <string.h>

#include "base/utf8.h"
#include "doc/yaml.h"

enum { LINE_COLUMNS = 100, INDENT = 2 };

/* ---- scalars ---- */

/* Characters that mean nothing to YAML anywhere in a plain scalar, not even in
 * brackets. (`#`, `:` and `,` do, so texts that hold them are quoted.) */
static bool always_plain(unsigned char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
           strchr("+-./;()^$_=~\\<>", c) != NULL || c >= 0x80;
}

static bool plain_inside(unsigned char c)
{
    return always_plain(c) || strchr(" %*&!@|?'\"`", c) != NULL;
}

/* Does the plain form begin like something else: `- x`, `---`, `~`, `.5`? Only
 * letters, digits, and a sign before a digit are taken on trust. */
static bool plain_start(const char *s)
{
    unsigned char c = (unsigned char)s[0], next = (unsigned char)s[1];
    if (c == '-' || c == '+' || c == '(')
        return next != 0 && (next >= 0x80 || strchr("0123456789(", next) != NULL);
    return c >= 0x80 || (always_plain(c) && !strchr("./;)^$_=~\\<>", c));
}

/* The bytes of the character at s, which is valid UTF-8, and its code point. */
static size_t next_point(const char *s, unsigned *point)
{
    unsigned char c = (unsigned char)s[0];
    size_t n = c < 0x80 ? 1 : c < 0xE0 ? 2 : c < 0xF0 ? 3 : 4;
    *point = n == 1 ? c : c & (0x7Fu >> n);
    for (size_t i = 1; i < n; i++)
        *point = *point << 6 | ((unsigned char)s[i] & 0x3F);
    return n;
}

/* Characters that the reader refuses in a line, or that an editor does not show:
 * controls, no-break space, soft hyphen, zero width, directions, separators. */
static const struct {
    unsigned from, to;
} hidden[] = {{0, 0x1F},        {0x7F, 0xA0},     {0xAD, 0xAD},
              {0x61C, 0x61C},   {0x200B, 0x200F}, {0x2028, 0x202E},
              {0x2060, 0x206F}, {0xFEFF, 0xFEFF}, {0xFFFE, 0xFFFF}};

static bool is_hidden(unsigned point)
{
    for (size_t i = 0; i < sizeof hidden / sizeof hidden[0]; i++)
        if (point >= hidden[i].from && point <= hidden[i].to)
            return true;
    return false;
}

static bool may_be_plain(const char *s)
{
    if (!*s || !plain_start(s))
        return false;
    int open = 0; /* the reader takes parentheses that do not match for a slip */
    for (const char *p = s; *p;) {
        unsigned point;
        open += (*p == '(') - (*p == ')');
        if (!plain_inside((unsigned char)*p))
            return false;
        p += next_point(p, &point);
        if (is_hidden(point))
            return false;
    }
    return open == 0 && s[strlen(s) - 1] != ' ';
}

static void write_hidden(struct text *out, unsigned point)
{
    if (point == '\n')
        text_add(out, "\\n");
    else if (point == '\t')
        text_add(out, "\\t");
    else if (point == '\r')
        text_add(out, "\\r");
    else
        text_printf(out, "\\u%04x", point);
}

static void write_quoted(struct text *out, const char *s)
{
    text_byte(out, '"');
    while (*s) {
        unsigned point;
        size_t n = next_point(s, &point);
        if (is_hidden(point)) {
            write_hidden(out, point);
        } else {
            if (*s == '"' || *s == '\\')
                text_byte(out, '\\');
            text_addn(out, s, n);
        }
        s += n;
    }
    text_byte(out, '"');
}

static void write_text(struct text *out, const char *s)
{
    if (may_be_plain(s))
        text_add(out, s);
    else
        write_quoted(out, s);
}

/* The text "no" stays quoted: where it is plain, a change takes it for a removal. */
static void write_scalar(struct text *out, const struct node *n)
{
    if (n->quoted && n->form == FORM_TEXT && strcmp(n->text, "no") == 0)
        write_quoted(out, n->text);
    else
        write_text(out, n->text);
}

/* ---- brackets ---- */

/* Is it a scalar, or a map or list of which nothing is nested deeper than
 * `levels` further ones? */
static bool is_shallow(const struct node *n, int levels)
{
    if (n->type == NODE_SCALAR)
        return true;
    for (size_t i = 0; i < n->n; i++) {
        const struct node *child = n->type == NODE_MAP ? n->pairs[i].value : n->items[i];
        if (child->type != NODE_SCALAR && (levels == 0 || !is_shallow(child, levels - 1)))
            return false;
    }
    return true;
}

static void write_flow(struct text *out, const struct node *n)
{
    if (n->type == NODE_SCALAR) {
        write_scalar(out, n);
        return;
    }
    text_byte(out, n->type == NODE_MAP ? '{' : '[');
    for (size_t i = 0; i < n->n; i++) {
        if (i > 0)
            text_add(out, ", ");
        if (n->type == NODE_MAP) {
            write_text(out, n->pairs[i].key);
            text_add(out, ": ");
        }
        write_flow(out, n->type == NODE_MAP ? n->pairs[i].value : n->items[i]);
    }
    text_byte(out, n->type == NODE_MAP ? '}' : ']');
}

/* More pairs or items than this never fit: at least three columns each. */
enum { MOST_FLOW = LINE_COLUMNS / 3 };

/* Takes back what was added since `mark`. */
static void cut_to(struct text *out, size_t mark)
{
    out->n = mark;
    if (out->at)
        out->at[mark] = 0;
}

/* Writes n in brackets where nothing is nested deeper than `levels` and all fits
 * behind `line`, the start of the line in hand; else writes nothing, returns false. */
static bool try_flow(struct text *out, size_t line, const struct node *n, int levels)
{
    size_t mark = out->n;
    if (n->n > MOST_FLOW || !is_shallow(n, levels))
        return false;
    write_flow(out, n);
    if (utf8_count(out->at + line, out->n - line) <= LINE_COLUMNS)
        return true;
    cut_to(out, mark);
    return false;
}

/* ---- blocks ---- */

static void write_block(struct text *out, const struct node *n, size_t indent, bool behind_dash);

/* What follows `key:` or `-`; the line in hand begins at `line`. The values of the
 * root are put in brackets only where they hold nothing but scalars, so that the
 * objects of a register begin lines of their own. */
static void write_child(struct text *out, const struct node *n, size_t line, size_t indent,
                        bool behind_dash)
{
    size_t mark = out->n;
    text_byte(out, ' ');
    if (n->type == NODE_SCALAR || n->n == 0) {
        write_flow(out, n);
        text_byte(out, '\n');
    } else if (try_flow(out, line, n, indent > INDENT ? 1 : 0)) {
        text_byte(out, '\n');
    } else if (behind_dash) {
        write_block(out, n, indent, true);
    } else {
        cut_to(out, mark);
        text_byte(out, '\n');
        write_block(out, n, indent, false);
    }
}

/* The first line of a block behind a dash needs no indentation. */
static size_t begin_line(struct text *out, size_t indent, bool first_behind_dash)
{
    if (first_behind_dash)
        return out->n - indent;
    size_t line = out->n;
    text_repeat(out, " ", indent);
    return line;
}

static void write_block(struct text *out, const struct node *n, size_t indent, bool behind_dash)
{
    for (size_t i = 0; i < n->n; i++) {
        size_t line = begin_line(out, indent, behind_dash && i == 0);
        if (n->type == NODE_MAP) {
            write_text(out, n->pairs[i].key);
            text_byte(out, ':');
            write_child(out, n->pairs[i].value, line, indent + INDENT, false);
        } else {
            text_byte(out, '-');
            write_child(out, n->items[i], line, indent + INDENT, true);
        }
    }
}

void yaml_write(struct text *out, const struct node *n)
{
    if (n->type == NODE_SCALAR || n->n == 0) {
        write_flow(out, n);
        text_byte(out, '\n');
    } else {
        write_block(out, n, 0, false);
    }
}
