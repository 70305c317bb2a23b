/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree: its picture, its key, and the indented list of its branches, which has all of it. Owns
 * nothing. */
#include "report/html_tree.h"

enum { DEEPEST_CLASS = 12 /* of indentation */ };

static const enum svg_shape shapes[] = {SVG_SQUARE, SVG_CIRCLE, SVG_TRIANGLE};

/* Markup that is kept for later is written beside the page. */
static const char *branch_of(const struct html *h, const struct tree_item *item)
{
    struct text out;
    struct html o = *h;
    text_init(&out, h->page.arena);
    o.out = &out;
    size_t depth = item->depth < DEEPEST_CLASS ? item->depth : DEEPEST_CLASS;
    text_printf(&out, "<span class=\"d%zu%s\">%s ", depth, item->on_path ? " main" : "",
                svg_mark_sample(&o, shapes[item->node->kind]));
    html_text(&o, item->node->label);
    const char *remark = tree_remark(h->page.arena, item->node);
    if (*remark) {
        html_raw(&o, " <span class=\"as\">");
        html_text(&o, remark);
        html_raw(&o, "</span>");
    }
    html_raw(&o, "</span>");
    return text_str(&out);
}

static bool has_steps(const struct tree_list *l)
{
    for (size_t i = 0; i < l->n; i++)
        if (l->at[i].node->steps && *l->at[i].node->steps)
            return true;
    return false;
}

/* The branches themselves are markup. */
static const struct block *list_of(const struct html *h, const struct tree *t,
                                   const struct tree_list *l)
{
    struct report r;
    report_init(&r, h->page.arena);
    struct block *b = report_table(&r, NULL, NULL);
    bool steps = has_steps(l);
    block_column(&r, b, "branch", "Branch", "", STYLE_PLAIN)->drawn = true;
    if (steps)
        block_column(&r, b, "steps", "What happens", "", STYLE_PLAIN);
    tree_add_columns(&r, b, t, l, true);
    for (size_t i = 0; i < l->n; i++) {
        struct row *row = block_row(&r, b);
        row_text(&r, row, "");
        if (steps)
            row_text(&r, row, l->at[i].node->steps ? l->at[i].node->steps : "");
        tree_add_numbers(&r, b, row, l->at[i].node);
    }
    return b;
}

static void put_sign(struct html *h, const char *sample, const char *words)
{
    text_printf(h->out, "<li>%s %s</li>\n", sample, words);
}

static void put_key(struct html *h, const struct tree_list *l)
{
    static const char *const words[] = {TREE_CHOICE_WORDS, TREE_CHANCE_WORDS, TREE_END_WORDS};
    bool kinds[] = {false, false, false}, taken = false, path = false;
    for (size_t i = 0; i < l->n; i++) {
        kinds[l->at[i].node->kind] = true;
        taken = taken || l->at[i].taken;
        path = path || (i && l->at[i].on_path);
    }
    html_raw(h, "<ul class=\"key\">\n");
    for (size_t k = 0; k < sizeof shapes / sizeof *shapes; k++)
        if (kinds[k])
            put_sign(h, svg_mark_sample(h, shapes[k]), words[k]);
    if (taken)
        put_sign(h, svg_arrow_sample(h), TREE_TAKEN_WORDS);
    if (path)
        put_sign(h, svg_sample(h, "branch main", ""), TREE_PATH_WORDS);
    html_raw(h, "</ul>\n");
}

void html_tree(struct html *h, const struct block *b, const char *id)
{
    html_open_figure(h, b, id);
    struct tree_list l = tree_list_of(h->page.arena, b->tree, true);
    const char **branches = NEW_ARRAY(h->page.arena, l.n, const char *);
    for (size_t i = 0; i < l.n; i++)
        branches[i] = branch_of(h, &l.at[i]);
    if (l.n) {
        const struct block *list = list_of(h, b->tree, &l);
        html_tree_picture(h, &l, list, html_picture_title(h, b));
        put_key(h, &l);
        html_table_drawn(h, list, NULL, NULL, branches);
    } else {
        html_raw(h, "<p>(no branches)</p>\n");
    }
    html_raw(h, "</figure>\n");
}
