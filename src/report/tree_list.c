/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The nodes of a tree as a list, and tables of it. Owns nothing. */
#include "report/tree_list.h"

/* --- the list --- */

bool tree_is_open(const struct tree_node *n)
{
    return n->children.n > 0 && !n->folded;
}

static const char *path_below(struct arena *a, const struct tree_item *parent, const char *label)
{
    return arena_printf(a, "%s%s%s", parent->path, *parent->path ? "." : "", label);
}

/* Of a child; the parent's place in the list is told by its index, for the list moves. */
static struct tree_item item_below(struct arena *a, const struct tree_item *parent,
                                   const struct tree_node *n)
{
    bool choice = parent->node->kind == TREE_CHOOSE;
    bool follows = !choice || n->best;
    return (struct tree_item){.node = n,
                              .path = path_below(a, parent, n->label),
                              .depth = parent->depth + 1,
                              .on_path = parent->on_path && follows,
                              .taken = choice && n->best};
}

/* Items and the indices of their parents, which become pointers when the list is complete. */
struct growth {
    struct arena *arena;
    struct tree_list list;
    ARRAY(size_t) parents;
    bool shown;
};

static void grow(struct growth *g, struct tree_item item, size_t parent)
{
    size_t at = g->list.n;
    *array_push(g->arena, &g->list) = item;
    *array_push(g->arena, &g->parents) = parent;
    g->list.at[at].from = at + 1;
    bool open = g->shown ? tree_is_open(item.node) : item.node->children.n > 0;
    for (size_t i = 0; open && i < item.node->children.n; i++)
        grow(g, item_below(g->arena, &item, item.node->children.at[i]), at);
    g->list.at[at].next = g->list.n;
}

struct tree_list tree_list_of(struct arena *a, const struct tree *t, bool shown)
{
    struct growth g = {.arena = a, .shown = shown};
    if (!t->root)
        return g.list;
    grow(&g, (struct tree_item){.node = t->root, .path = "", .on_path = true}, 0);
    for (size_t i = 1; i < g.list.n; i++)
        g.list.at[i].parent = &g.list.at[g.parents.at[i]];
    return g.list;
}

/* --- words and columns --- */

const char *tree_remark(struct arena *a, const struct tree_node *n)
{
    if (n->same_as)
        return arena_printf(a, "as %s", n->same_as);
    if (n->folded)
        return arena_printf(a, "… %zu end%s", n->ends, n->ends == 1 ? "" : "s");
    return "";
}

bool tree_has_chances(const struct tree_list *l)
{
    for (size_t i = 0; i < l->n; i++)
        if (l->at[i].node->has_probability)
            return true;
    return false;
}

bool tree_has_reaches(const struct tree_list *l)
{
    for (size_t i = 0; i < l->n; i++)
        if (l->at[i].node->reach != 0)
            return true;
    return false;
}

void tree_add_columns(struct report *r, struct block *b, const struct tree *t,
                      const struct tree_list *l, bool reach)
{
    if (tree_has_chances(l))
        block_column(r, b, "chance", TREE_CHANCE_HEAD, "", STYLE_PROBABILITY);
    if (reach && tree_has_reaches(l))
        block_column(r, b, "reach", TREE_REACH_HEAD, "", STYLE_PROBABILITY)->keep = 1;
    block_column(r, b, "value", *t->value_head ? t->value_head : "Value", t->unit, t->style);
}

static void add_number(struct report *r, const struct column *c, struct row *row,
                       const struct tree_node *n)
{
    if (text_equal(c->key, "chance") && n->has_probability)
        row_number(r, row, n->probability, n->probability_figure);
    else if (text_equal(c->key, "reach"))
        row_number(r, row, n->reach, n->reach_figure);
    else if (text_equal(c->key, "value"))
        row_number(r, row, n->value, n->value_figure);
    else
        row_text(r, row, "");
}

void tree_add_numbers(struct report *r, const struct block *b, struct row *row,
                      const struct tree_node *n)
{
    while (row->n < b->columns.n) {
        if (n)
            add_number(r, &b->columns.at[row->n], row, n);
        else
            row_text(r, row, "");
    }
}

/* --- all of it --- */

static const char *kind_of(const struct tree_node *n)
{
    static const char *const kinds[] = {"choice", "chance", "end"};
    return kinds[n->kind];
}

static void add_data(struct report *r, struct block *b, const struct tree_item *item)
{
    const struct tree_node *n = item->node;
    struct row *row = block_row(r, b);
    row_text(r, row, item->path);
    row_text(r, row, kind_of(n));
    row_text(r, row, n->label);
    row_text(r, row, n->steps);
    if (n->has_probability)
        row_number(r, row, n->probability, n->probability_figure);
    else
        row_empty(r, row);
    row_number(r, row, n->value, n->value_figure);
    row_number(r, row, n->reach, n->reach_figure);
    row_yes(r, row, n->best);
    row_yes(r, row, n->folded);
    row_count(r, row, n->ends);
    row_text(r, row, n->same_as);
}

const struct block *tree_data(struct arena *a, const struct tree *t)
{
    static const char *const before[] = {"path", "kind", "label", "steps", "probability"};
    static const char *const after[] = {"reach", "best", "folded", "ends", "same-as"};
    struct report r;
    report_init(&r, a);
    struct block *b = report_table(&r, NULL, NULL);
    for (size_t i = 0; i < sizeof before / sizeof *before; i++)
        block_column(&r, b, before[i], "", "", STYLE_PLAIN);
    block_column(&r, b, "value", "", t->unit, t->style);
    for (size_t i = 0; i < sizeof after / sizeof *after; i++)
        block_column(&r, b, after[i], "", "", STYLE_PLAIN);
    struct tree_list l = tree_list_of(a, t, false);
    for (size_t i = 0; i < l.n; i++)
        add_data(&r, b, &l.at[i]);
    return b;
}
