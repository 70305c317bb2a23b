/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree of choices, readings and chances as a picture, and what to do after each reading. Owns
 * nothing.
 *
 * A point to which several branches lead is drawn below one of them, that of the best path if it
 * lies there; the others say where. Pages fold what does not matter: what lies deeper than
 * LEVELS_OFF below a branch that is not taken, or right below it where the picture would be too
 * long otherwise. What can be reached by the best branches is never folded. */
#include "work/branching.h"

enum {
    LEVELS_OFF = 1,  /* shown below a branch that is not taken */
    MOST_LINES = 60, /* of a picture */
    MOST_READINGS = 40,
    MOST_BELIEFS = 4 /* hidden states with a column of their own */
};

#define ENDS_MOST (SIZE_MAX / 4)

struct drawing {
    struct job *j;
    const struct branching *b;
    struct block *block;
    const struct way **owner; /* by point: below which branch it is drawn; NULL: not yet */
    const char **at;          /* by point: the path of labels there */
    size_t *ends;             /* by point; 0: not yet */
};

/* --- where points are drawn --- */

static void own(struct drawing *d, const char *path, size_t point, bool policy_only);

static void own_behind(struct drawing *d, const char *path, const struct way *x, bool policy_only)
{
    const char *here = *path ? arena_printf(d->j->arena, "%s.%s", path, x->label) : x->label;
    if (!d->owner[x->to]) {
        d->owner[x->to] = x;
        d->at[x->to] = here;
    }
    if (d->owner[x->to] == x)
        own(d, here, x->to, policy_only);
}

static void own(struct drawing *d, const char *path, size_t point, bool policy_only)
{
    const struct point *p = &d->b->points.at[point];
    for (size_t k = 0; k < p->n; k++)
        if (!policy_only || p->kind != POINT_CHOOSE || k == p->best)
            own_behind(d, path, &p->branches[k], policy_only);
}

static size_t ends_below(struct drawing *d, size_t point)
{
    const struct point *p = &d->b->points.at[point];
    size_t n = p->kind == POINT_END ? 1 : 0;
    if (d->ends[point])
        return d->ends[point];
    for (size_t k = 0; k < p->n && n < ENDS_MOST; k++)
        n += ends_below(d, p->branches[k].to);
    d->ends[point] = n;
    return n;
}

/* --- nodes --- */

static enum tree_kind kind_of(const struct point *p)
{
    return p->kind == POINT_END ? TREE_END : p->kind == POINT_CHOOSE ? TREE_CHOOSE : TREE_CHANCE;
}

static const char *name_of(const struct drawing *d, figure_id id)
{
    return id == FIGURE_NONE ? NULL : figure_name(d->j->figures, d->j->arena, id);
}

static void add_below(struct drawing *d, struct tree_node *node, size_t point);

static void add_way(struct drawing *d, struct tree_node *parent, const struct point *from, size_t k)
{
    const struct way *x = &from->branches[k];
    const struct point *to = &d->b->points.at[x->to];
    struct tree_node *n = tree_add(d->j->report, d->block, parent, kind_of(to), x->label);
    n->steps = *x->steps ? x->steps : NULL;
    n->has_probability = from->kind != POINT_CHOOSE;
    n->probability = n->has_probability ? x->probability : 0;
    n->probability_figure = name_of(d, x->probability_figure);
    n->value = x->value;
    n->value_figure = name_of(d, x->value_figure);
    n->reach = x->reach;
    n->reach_figure = name_of(d, x->reach_figure);
    n->best = from->kind != POINT_CHOOSE || from->best == k;
    n->ends = ends_below(d, x->to);
    if (to->kind == POINT_END)
        return;
    if (d->owner[x->to] == x)
        add_below(d, n, x->to);
    else
        n->same_as = d->at[x->to];
}

static void add_below(struct drawing *d, struct tree_node *node, size_t point)
{
    const struct point *p = &d->b->points.at[point];
    for (size_t k = 0; k < p->n; k++)
        add_way(d, node, p, k);
}

/* --- folding --- */

/* off: levels below the nearest branch that is not taken, counted from 1; 0 on the best path. */
static void fold(struct tree_node *n, size_t off, size_t levels)
{
    n->folded = n->children.n && off > levels;
    for (size_t i = 0; i < n->children.n; i++) {
        struct tree_node *child = n->children.at[i];
        bool left = off > 0 || (n->kind == TREE_CHOOSE && !child->best);
        fold(child, left ? off + 1 : 0, levels);
    }
}

static size_t lines_of(const struct tree_node *n)
{
    size_t lines = n->steps ? 2 : 1;
    for (size_t i = 0; !n->folded && i < n->children.n; i++)
        lines += lines_of(n->children.at[i]);
    return lines;
}

static void fold_what_does_not_matter(struct tree_node *root)
{
    fold(root, 0, LEVELS_OFF);
    if (lines_of(root) > MOST_LINES)
        fold(root, 0, 0);
}

/* --- the picture --- */

void part_tree(struct job *j, const struct weighing *w)
{
    const struct branching *b = w->branching;
    const struct point *root = &b->points.at[0];
    struct drawing d = {.j = j, .b = b};
    d.owner = NEW_ARRAY(j->arena, b->points.n, const struct way *);
    d.at = NEW_ARRAY(j->arena, b->points.n, const char *);
    d.ends = NEW_ARRAY(j->arena, b->points.n, size_t);
    own(&d, "", 0, true);
    own(&d, "", 0, false);
    d.block = report_tree(j->report, "tree", "The tree", j->model->settings->currency, STYLE_MONEY,
                          "To come");
    struct tree_node *n = tree_add(j->report, d.block, NULL, kind_of(root), w->decision->question);
    n->value = root->value;
    n->value_figure = name_of(&d, root->value_figure);
    n->reach = 1;
    n->reach_figure = name_of(&d, root->reach_figure);
    n->best = true;
    n->ends = ends_below(&d, 0);
    add_below(&d, n, 0);
    fold_what_does_not_matter(n);
    report_note(
        j->report, "tree-words",
        "To come: cost and damage from the beginning of a branch to the end of the "
        "horizon, as a present value, the best branches being taken from there on, as it "
        "is believed there. Reached: the probability of coming there by the best branches.");
}

/* --- what to do after each reading --- */

static void belief_columns(struct job *j, struct block *b, const struct hidden *h)
{
    for (size_t k = 0; h->n > 1 && h->n <= MOST_BELIEFS && k < h->n; k++)
        block_column(j->report, b, arena_printf(j->arena, "belief-%zu", k + 1), h->names[k], "%",
                     STYLE_PERCENT)
            ->keep = 2;
}

static void belief_cells(struct job *j, struct row *row, const struct weighing *w,
                         const struct way *x)
{
    const struct hidden *h = &w->branching->worlds.hidden;
    for (size_t k = 0; h->n > 1 && h->n <= MOST_BELIEFS && k < h->n; k++) {
        figure_id id;
        const char *name = arena_printf(j->arena, "%s.belief.%s.%s", w->id, x->path, h->names[k]);
        if (weigh_find(j->figures, name, &id, NULL) == OHMEN_OK)
            figure_cell(j, row, id);
        else
            row_number(j->report, row, x->belief[k], NULL);
    }
}

static void reading_row(struct job *j, struct block *b, const struct weighing *w,
                        const struct point *p, const struct way *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, p->test);
    row_text(r, row, x->label);
    row_text(r, row, p->path);
    if (x->probability_figure == FIGURE_NONE)
        row_number(r, row, x->probability, NULL);
    else
        figure_cell(j, row, x->probability_figure);
    belief_cells(j, row, w, x);
    row_text(r, row, way_words_long(j, w->branching, x));
    row_number(r, row, x->value, name_of(&(struct drawing){.j = j}, x->value_figure));
}

/* Those that the best branches lead to first; the others with what would be done then. */
static size_t reading_rows(struct job *j, struct block *b, const struct weighing *w, bool reached)
{
    const struct branching *of = w->branching;
    size_t left = 0;
    for (size_t i = 0; i < of->points.n; i++) {
        const struct point *p = &of->points.at[i];
        for (size_t k = 0; p->kind == POINT_READ && k < p->n; k++) {
            if ((p->branches[k].reach > 0) != reached)
                continue;
            if (b->rows.n < MOST_READINGS)
                reading_row(j, b, w, p, &p->branches[k]);
            else
                left++;
        }
    }
    return left;
}

void part_readings(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "readings", "What to do after each reading");
    block_column(r, b, "test", "Reading of", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "reading", "Reads", "", STYLE_PLAIN);
    block_column(r, b, "at", "On branch", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "probability", "Probability", "%", STYLE_PERCENT);
    belief_columns(j, b, &w->branching->worlds.hidden);
    block_column(r, b, "then", "Then", "", STYLE_PLAIN);
    block_column(r, b, "to-come", "To come", j->model->settings->currency, STYLE_MONEY)->keep = 4;
    size_t left = reading_rows(j, b, w, true);
    if (!w->branching->repeats)
        left += reading_rows(j, b, w, false);
    if (b->rows.n == 0) {
        r->blocks.n--;
        return;
    }
    if (left)
        report_note(r, "readings-more", "%zu more readings are not listed here.", left);
}
