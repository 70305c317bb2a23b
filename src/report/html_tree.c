/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree as the indented list of its branches in a table. Owns nothing. */
#include "report/html_svg.h"
#include "report/tree_list.h"

enum { DEEPEST_CLASS = 24 /* of indentation */ };

/* --- the list --- */

static const char *branch_of(const struct html *h, const struct tree_item *item)
{
    struct text out;
    struct html o = *h;
    text_init(&out, h->page.arena);
    o.out = &out;
    size_t depth = item->depth < DEEPEST_CLASS ? item->depth : DEEPEST_CLASS;
    text_printf(&out, "<span class=\"d%zu%s\">", depth, item->on_path ? " path" : "");
    html_text(&o, item->node->label);
    html_raw(&o, "</span>");
    return text_str(&out);
}

static void put_list(struct html *h, const struct tree *t, const struct tree_list *l)
{
    struct report r;
    report_init(&r, h->page.arena);
    struct block *b = report_table(&r, NULL, NULL);
    const char **branches = NEW_ARRAY(h->page.arena, l->n, const char *);
    block_column(&r, b, "branch", "Branch", "", STYLE_PLAIN)->drawn = true;
    block_column(&r, b, "steps", "What happens", "", STYLE_PLAIN);
    tree_add_columns(&r, b, t, l, true);
    for (size_t i = 0; i < l->n; i++) {
        struct row *row = block_row(&r, b);
        branches[i] = branch_of(h, &l->at[i]);
        row_text(&r, row, "");
        row_text(&r, row, l->at[i].node->steps ? l->at[i].node->steps : "");
        tree_add_numbers(&r, b, row, l->at[i].node);
    }
    html_table_drawn(h, b, NULL, NULL, branches);
}

void html_tree(struct html *h, const struct block *b, const char *id)
{
    html_open_figure(h, b, id);
    struct tree_list l = tree_list_of(h->page.arena, b->tree, true);
    if (l.n)
        put_list(h, b->tree, &l);
    else
        html_raw(h, "<p>(no branches)</p>\n");
    html_raw(h, "</figure>\n");
}
