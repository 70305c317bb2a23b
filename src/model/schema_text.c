/* SPDX-License-Identifier: GPL-3.0-or-later */
/* JSON for people: a map or list that fits stands on one line, another one has a line for
 * each of its parts. Owns nothing; the order of keys is that of the tree. */
#include "model/schema_text.h"

#include "doc/json.h"

#define LINE 100

static void write_pretty(struct text *out, const struct node *n, size_t indent, size_t used);

static void write_flat(struct text *out, const struct node *n)
{
    size_t children = n->type == NODE_SCALAR ? 0 : n->n;
    if (n->type == NODE_SCALAR) {
        if (n->form == FORM_TEXT)
            json_string(out, n->text);
        else
            text_add(out, n->form == FORM_COUNT ? n->text : n->form == FORM_YES ? "true" : "false");
        return;
    }
    text_byte(out, n->type == NODE_MAP ? '{' : '[');
    for (size_t i = 0; i < children; i++) {
        text_add(out, i ? ", " : "");
        if (n->type == NODE_MAP) {
            json_string(out, n->pairs[i].key);
            text_add(out, ": ");
        }
        write_flat(out, n->type == NODE_MAP ? n->pairs[i].value : n->items[i]);
    }
    text_byte(out, n->type == NODE_MAP ? '}' : ']');
}

static void write_children(struct text *out, const struct node *n, size_t indent)
{
    for (size_t i = 0; i < n->n; i++) {
        text_add(out, i ? ",\n" : "\n");
        text_repeat(out, " ", indent);
        size_t line = out->n - indent;
        if (n->type == NODE_MAP) {
            json_string(out, n->pairs[i].key);
            text_add(out, ": ");
        }
        write_pretty(out, n->type == NODE_MAP ? n->pairs[i].value : n->items[i], indent,
                     out->n - line);
    }
}

/* On one line where it fits behind the `used` columns. */
static void write_pretty(struct text *out, const struct node *n, size_t indent, size_t used)
{
    size_t before = out->n;
    write_flat(out, n);
    if (n->type == NODE_SCALAR || used + (out->n - before) < LINE)
        return;
    out->n = before;
    text_byte(out, n->type == NODE_MAP ? '{' : '[');
    write_children(out, n, indent + 2);
    text_byte(out, '\n');
    text_repeat(out, " ", indent);
    text_byte(out, n->type == NODE_MAP ? '}' : ']');
}

void schema_text(struct text *out, const struct node *root)
{
    write_pretty(out, root, 0, 0);
    text_byte(out, '\n');
}
