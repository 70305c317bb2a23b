/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Canonical JSON, written: the bytes that are hashed and stored.
 *
 * Owns nothing. Invariant: equal trees give equal bytes, whatever the order in
 * which their keys were added. */
#include "doc/json.h"

static const char *short_escape(unsigned char c)
{
    switch (c) {
    case '"':
        return "\\\"";
    case '\\':
        return "\\\\";
    case '\b':
        return "\\b";
    case '\t':
        return "\\t";
    case '\n':
        return "\\n";
    case '\f':
        return "\\f";
    case '\r':
        return "\\r";
    default:
        return NULL;
    }
}

static bool needs_escape(unsigned char c)
{
    return c < 0x20 || c == '"' || c == '\\';
}

void json_string(struct text *out, const char *s)
{
    text_byte(out, '"');
    for (;;) {
        const char *plain = s;
        while (*s && !needs_escape((unsigned char)*s))
            s++;
        text_addn(out, plain, (size_t)(s - plain));
        if (!*s)
            break;
        const char *escape = short_escape((unsigned char)*s);
        if (escape)
            text_add(out, escape);
        else
            text_printf(out, "\\u%04x", (unsigned)(unsigned char)*s);
        s++;
    }
    text_byte(out, '"');
}

static void write_scalar(struct text *out, const struct node *n)
{
    switch (n->form) {
    case FORM_TEXT:
        json_string(out, n->text);
        break;
    case FORM_COUNT:
        text_add(out, n->text);
        break;
    case FORM_YES:
        text_add(out, "true");
        break;
    case FORM_NO:
        text_add(out, "false");
        break;
    }
}

static void write_map(struct text *out, const struct node *n)
{
    struct node map = *n;
    if (!map.sorted) {
        map.pairs = arena_copy(out->arena, n->pairs, n->n * sizeof *n->pairs);
        node_sort(&map);
    }
    text_byte(out, '{');
    for (size_t i = 0; i < map.n; i++) {
        if (i > 0)
            text_byte(out, ',');
        json_string(out, map.pairs[i].key);
        text_byte(out, ':');
        json_write(out, map.pairs[i].value);
    }
    text_byte(out, '}');
}

static void write_list(struct text *out, const struct node *n)
{
    text_byte(out, '[');
    for (size_t i = 0; i < n->n; i++) {
        if (i > 0)
            text_byte(out, ',');
        json_write(out, n->items[i]);
    }
    text_byte(out, ']');
}

void json_write(struct text *out, const struct node *n)
{
    if (n->type == NODE_SCALAR)
        write_scalar(out, n);
    else if (n->type == NODE_MAP)
        write_map(out, n);
    else
        write_list(out, n);
}
