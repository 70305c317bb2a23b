/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree as a picture, from left to right. A choice is a square, a chance a circle and an end a
 * triangle (common practice, no source); the path is thick. All ends stand at the right, where
 * their values are in a column. A long picture is cut between branches into pieces, so that none is
 * longer than a sheet of paper. Owns nothing.
 * Invariant: the places of an item's words overlap those of no other item. */
#include "report/html_tree.h"

#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "report/table_shape.h"

enum {
    TOP = 24, /* for the heads of the numbers */
    EDGE = 6,
    FORK = 26,         /* from a node to where its branches are level */
    NODE_ROOM = 16,    /* between words and a node */
    VALUE_ROOM = 12,   /* between the words of a branch and its value */
    TALL = 360,        /* branches that reach so far have their node beside the first of them */
    STEEP = 120,       /* a branch that goes so far up or down goes upright first ... */
    LAST_RISE = 50,    /* ... but for its last bit */
    BETWEEN = 10,      /* between branches */
    STROKE_ROOM = 7,   /* between words and the line of their branch */
    NUMBER_ROOM = 22,  /* between columns of numbers */
    ARROW = 10,        /* its length */
    LEAST_BAND = 640,  /* a picture is cut when it is longer than this ... */
    BAND = 560,        /* ... into pieces of about this length */
    BROAD = 900,       /* a picture up to this is as wide as the page, others scroll */
    PAPER_WIDTH = 1300 /* a wider one cannot be read on paper */
};

/* Where an item is, and its words. */
struct spot {
    double x, y;
    double above, below;        /* what its words take of the page */
    struct lines label, detail; /* above the branch and below it */
};

struct picture {
    struct html *html;
    const struct tree_list *list;
    const struct table_shape *shape; /* of the list, which has the numbers as they are shown */
    struct spot *spots;              /* one an item */
    double *levels;                  /* x of the nodes of each level */
    size_t deepest;
    size_t words;        /* columns of the words of a branch */
    double right;        /* where the ends stand */
    double point, reach; /* of values, and where reaches begin; 0: none */
    double width, height;
    double from, until; /* the piece that is drawn */
};

/* --- numbers --- */

static const struct shown *shown_at(const struct picture *f, size_t item, const char *key)
{
    const struct table_shape *t = f->shape;
    for (size_t j = 0; j < t->n_columns; j++)
        if (text_equal(t->block->columns.at[j].key, key))
            return &t->cells[item * t->n_columns + j];
    return NULL;
}

static const char *number_at(const struct picture *f, size_t item, const char *key)
{
    const struct shown *s = shown_at(f, item, key);
    if (!s || !s->number)
        return "";
    return arena_printf(f->html->page.arena, "%s%s", s->left, s->right);
}

static const struct table_column *value_column(const struct picture *f)
{
    return &f->shape->columns[f->shape->n_columns - 1];
}

/* "Worth, kEUR". */
static const char *value_words(const struct picture *f)
{
    const struct table_column *c = value_column(f);
    return arena_printf(f->html->page.arena, "%s%s%s", c->head, *c->unit ? ", " : "", c->unit);
}

/* --- measuring --- */

static double widest_of(const struct lines *lines)
{
    double widest = 0;
    for (size_t i = 0; i < lines->n; i++)
        widest = fmax(widest, svg_text_width(lines->at[i]));
    return widest;
}

static double tall(const struct lines *lines)
{
    return lines->n ? (double)lines->n * SVG_LINE + STROKE_ROOM : 0;
}

static bool is_leaf(const struct tree_item *item)
{
    return item->next == item->from;
}

static void add_lines(const struct picture *f, struct lines *lines, const char *s)
{
    const struct page *p = &f->html->page;
    if (!s[strspn(s, " ")])
        return;
    struct lines more = page_wrap(p, s, f->words);
    for (size_t i = 0; i < more.n; i++)
        *array_push(p->arena, lines) = more.at[i];
}

static void find_words(struct picture *f, size_t i)
{
    const struct page *p = &f->html->page;
    const struct tree_node *n = f->list->at[i].node;
    struct spot *s = &f->spots[i];
    *s = (struct spot){0};
    add_lines(f, &s->label, page_clean(p, n->label));
    add_lines(f, &s->label, page_clean(p, tree_remark(p->arena, n)));
    add_lines(f, &s->detail, number_at(f, i, "chance"));
    add_lines(f, &s->detail, page_clean(p, n->steps));
    if (i == 0) /* the root has no branch: all its words are beside it */
        add_lines(f, &s->label, number_at(f, i, "value"));
    double half = i ? 0 : (tall(&s->label) + tall(&s->detail)) / 2;
    s->above = fmax(i ? tall(&s->label) : half, SVG_NODE + 2);
    s->below = fmax(i ? tall(&s->detail) : half, SVG_NODE + 2);
}

/* From the nodes of the level before to those of this one. */
static double level_width(const struct picture *f, size_t depth)
{
    double widest = 0;
    for (size_t i = 0; i < f->list->n; i++) {
        const struct tree_item *item = &f->list->at[i];
        if (item->depth != depth)
            continue;
        const char *value = i && !is_leaf(item) ? number_at(f, i, "value") : "";
        double room = *value ? svg_text_width(value) + VALUE_ROOM : 0;
        widest = fmax(widest, widest_of(&f->spots[i].label) + room);
        widest = fmax(widest, widest_of(&f->spots[i].detail));
    }
    return widest + NODE_ROOM + (depth ? FORK : 0);
}

static double widest_part(const struct picture *f, const char *key, bool left)
{
    double widest = 0;
    for (size_t i = 0; i < f->list->n; i++) {
        const struct shown *s = shown_at(f, i, key);
        if (s && s->number)
            widest = fmax(widest, svg_text_width(left ? s->left : s->right));
    }
    return widest;
}

static void find_columns(struct picture *f)
{
    double x = EDGE;
    f->levels = NEW_ARRAY(f->html->page.arena, f->deepest + 1, double);
    for (size_t d = 0; d <= f->deepest; d++)
        f->levels[d] = x += level_width(f, d);
    f->right = x;
    f->point = x + SVG_NODE + NODE_ROOM + widest_part(f, "value", true);
    f->width = f->point + widest_part(f, "value", false);
    f->reach = 0;
    if (shown_at(f, 0, "reach")) {
        f->reach = f->width + NUMBER_ROOM;
        double head = svg_text_width(TREE_REACH_HEAD);
        f->width =
            f->reach + fmax(head, widest_part(f, "reach", true) + widest_part(f, "reach", false));
    }
    f->width = fmax(f->width, svg_text_width(value_words(f))) + EDGE;
}

static void shift(struct picture *f, size_t from, size_t until, double by)
{
    for (size_t i = from; i < until; i++)
        f->spots[i].y += by;
}

/* Puts an item and all below it at `top` and below; returns where they end. A node stands in the
 * middle of its branches, or beside the first of many. */
static double settle(struct picture *f, size_t i, double top)
{
    const struct tree_item *item = &f->list->at[i];
    struct spot *s = &f->spots[i];
    s->x = is_leaf(item) && i ? f->right : f->levels[item->depth];
    s->y = top + s->above;
    double bottom = top, last = 0;
    for (size_t k = item->from; k < item->next; k = f->list->at[k].next) {
        bottom = settle(f, k, bottom);
        last = f->spots[k].y;
    }
    if (!is_leaf(item)) {
        double first = f->spots[item->from].y;
        s->y = last - first > TALL ? first : (first + last) / 2;
    }
    double lack = top + s->above - s->y;
    if (lack > 0) {
        shift(f, i, item->next, lack);
        bottom += lack;
    }
    return fmax(bottom, s->y + s->below + BETWEEN);
}

static void measure(struct picture *f, size_t words)
{
    f->words = words;
    for (size_t i = 0; i < f->list->n; i++)
        find_words(f, i);
    find_columns(f);
}

/* The widest words with which the picture is no wider than most, or than a page, or else such as
 * are not too narrow. */
static void lay_out(struct picture *f)
{
    static const struct {
        double width;
        size_t columns;
    } tries[] = {{SVG_WIDTH, 28}, {SVG_WIDTH, 24}, {SVG_WIDTH, 20}, {BROAD, 24},
                 {BROAD, 20},     {BROAD, 16},     {INFINITY, 16}};
    for (size_t i = 0; i < f->list->n; i++)
        f->deepest = f->list->at[i].depth > f->deepest ? f->list->at[i].depth : f->deepest;
    size_t k = 0;
    do
        measure(f, tries[k].columns);
    while (f->width > tries[k++].width);
    f->height = settle(f, 0, TOP);
}

/* --- drawing --- */

/* Whether the piece that is drawn shows anything between these heights. */
static bool is_seen(const struct picture *f, double from, double until)
{
    return until >= f->from && from <= f->until;
}

static void put_text(struct picture *f, const char *class, double x, double y, const char *anchor,
                     const char *s)
{
    if (*s && is_seen(f, y - SVG_LINE, y + SVG_LINE))
        svg_text(f->html, class, x, y, anchor, s);
}

static void put_branch(struct picture *f, size_t i)
{
    const struct tree_item *item = &f->list->at[i];
    const struct spot *p = &f->spots[item->parent - f->list->at], *s = &f->spots[i];
    if (!is_seen(f, fmin(p->y, s->y) - SVG_NODE, fmax(p->y, s->y) + SVG_NODE))
        return;
    double end = s->x - SVG_NODE, far = s->y - p->y, rise = far > 0 ? LAST_RISE : -LAST_RISE;
    double bend = fabs(far) > STEEP ? s->y - rise : p->y;
    svg_branch(f->html, item->on_path ? "branch main" : "branch",
               (struct svg_bend){p->x, p->y, bend}, p->x + FORK, s->y,
               item->taken ? end - ARROW / 2.0 : end);
    if (item->taken)
        svg_arrow_head(f->html, end, s->y, ARROW);
}

static enum svg_shape shape_of(const struct tree_item *item)
{
    switch (item->node->kind) {
    case TREE_CHOOSE: return SVG_SQUARE;
    case TREE_CHANCE: return SVG_CIRCLE;
    case TREE_END: return SVG_TRIANGLE;
    }
    return SVG_TRIANGLE;
}

static void put_node(struct picture *f, size_t i)
{
    const struct spot *s = &f->spots[i];
    const struct tree_item *item = &f->list->at[i];
    if (is_seen(f, s->y - SVG_NODE, s->y + SVG_NODE))
        svg_mark(f->html, shape_of(item), s->x, s->y,
                 page_clean(&f->html->page, *item->path ? item->path : item->node->label));
}

static const char *class_of(const struct tree_item *item)
{
    return item->on_path ? "label" : "tick";
}

/* The root's words are all beside it. */
static void put_root_words(struct picture *f)
{
    const struct spot *s = &f->spots[0];
    double x = s->x - NODE_ROOM, y = s->y - s->above + SVG_FONT;
    for (size_t k = 0; k < s->label.n; k++, y += SVG_LINE)
        put_text(f, "label", x, y, "end", s->label.at[k]);
    for (size_t k = 0; k < s->detail.n; k++, y += SVG_LINE)
        put_text(f, "detail", x, y, "end", s->detail.at[k]);
}

static void put_words(struct picture *f, size_t i)
{
    const struct tree_item *item = &f->list->at[i];
    const struct spot *s = &f->spots[i];
    double x = f->levels[item->depth - 1] + FORK + 2;
    double y = s->y - STROKE_ROOM - ((double)s->label.n - 1) * SVG_LINE;
    for (size_t k = 0; k < s->label.n; k++)
        put_text(f, class_of(item), x, y + (double)k * SVG_LINE, "start", s->label.at[k]);
    for (size_t k = 0; k < s->detail.n; k++)
        put_text(f, "detail", x, s->y + STROKE_ROOM - 1 + SVG_FONT + (double)k * SVG_LINE, "start",
                 s->detail.at[k]);
    if (!is_leaf(item))
        put_text(f, class_of(item), s->x - NODE_ROOM + 2, s->y - STROKE_ROOM, "end",
                 number_at(f, i, "value"));
}

/* Of an end: its value on the point, and its reach. */
static void put_numbers(struct picture *f, size_t i)
{
    const struct shown *value = shown_at(f, i, "value");
    const char *class = class_of(&f->list->at[i]);
    double y = f->spots[i].y + 0.36 * SVG_FONT;
    if (!value->number) {
        put_text(f, class, f->right + SVG_NODE + NODE_ROOM, y, "start", value->text);
    } else {
        put_text(f, class, f->point, y, "end", value->left);
        put_text(f, class, f->point, y, "start", value->right);
    }
    if (f->reach > 0)
        put_text(f, "tick", f->reach, y, "start", number_at(f, i, "reach"));
}

static void put_heads(struct picture *f)
{
    const char *words = value_words(f);
    double end = f->point + widest_part(f, "value", false);
    end = fmax(end, svg_text_width(words));
    put_text(f, "axis", end, SVG_FONT, "end", words);
    if (f->reach > 0)
        put_text(f, "axis", f->reach, SVG_FONT, "start", TREE_REACH_HEAD);
}

static void put_all(struct picture *f)
{
    size_t n = f->list->n;
    put_heads(f);
    for (int main = 0; main <= 1; main++)
        for (size_t i = 1; i < n; i++)
            if (f->list->at[i].on_path == (main == 1))
                put_branch(f, i);
    for (size_t i = 0; i < n; i++)
        put_node(f, i);
    put_root_words(f);
    for (size_t i = 1; i < n; i++) {
        put_words(f, i);
        if (is_leaf(&f->list->at[i]))
            put_numbers(f, i);
    }
}

/* --- pieces --- */

/* Whether a cut at this height goes through no words and no node. */
static bool may_cut(const struct picture *f, double y)
{
    for (size_t i = 0; i < f->list->n; i++)
        if (f->spots[i].y - f->spots[i].above < y && y < f->spots[i].y + f->spots[i].below)
            return false;
    return true;
}

/* The last place to cut within a piece's length, or the first one beyond it. */
static double cut_after(const struct picture *f, double from)
{
    double best = f->height;
    if (f->height - from <= LEAST_BAND)
        return best;
    for (size_t i = 1; i < f->list->n; i++) {
        double y = f->spots[i].y + f->spots[i].below + BETWEEN / 2.0;
        if (!is_leaf(&f->list->at[i]) || y <= from || y >= f->height || !may_cut(f, y))
            continue;
        bool within = y - from <= BAND, better = within ? best - from > BAND || y > best : y < best;
        best = better ? y : best;
    }
    return best;
}

static const char *words_of(const struct picture *f)
{
    return arena_printf(f->html->page.arena,
                        "From left to right: choices are squares, chances circles and ends "
                        "triangles, %zu nodes in all; thick lines are %s. The table below has them "
                        "all.",
                        f->list->n, TREE_PATH_WORDS);
}

static const char *kind_of(const struct picture *f)
{
    return f->width <= SVG_WIDTH     ? "picture pieces"
           : f->width <= BROAD       ? "picture pieces broad"
           : f->width <= PAPER_WIDTH ? "picture pieces wide"
                                     : "picture pieces wide screen";
}

static void put_pieces(struct picture *f, const char *title)
{
    struct html *h = f->html;
    double width = fmax(f->width, SVG_WIDTH);
    const char *words = words_of(f), *name = title;
    html_open_scroll(h, kind_of(f), title, true);
    for (f->from = 0; f->from < f->height; f->from = f->until) {
        f->until = cut_after(f, f->from);
        svg_open_piece(h, width, f->from, f->until, f->width > BROAD);
        svg_words(h, name, words);
        put_all(f);
        html_raw(h, "</svg>\n");
        name = arena_printf(h->page.arena, "%s, continued", title);
    }
    html_raw(h, "</div>\n");
    if (f->width > PAPER_WIDTH)
        html_raw(h, "<p class=\"remark paper\">The picture is wider than a sheet of paper; the "
                    "list below says the same.</p>\n");
}

void html_tree_picture(struct html *h, const struct tree_list *l, const struct block *list,
                       const char *title)
{
    struct table_shape shape = table_shape_of(&h->page, list);
    struct picture f = {.html = h, .list = l, .shape = &shape};
    f.spots = NEW_ARRAY(h->page.arena, l->n, struct spot);
    lay_out(&f);
    put_pieces(&f, title);
}
