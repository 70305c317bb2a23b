/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree as text: an indented list, a branch on a line, what happens on it below; beside it
 * the numbers, in columns of their own, by the table writer. Owns nothing.
 * Invariant: the lines of the path are heavy, and no other; what lies deeper than the page has room
 * for goes on below, as a part of its own. */
#include <string.h>

#include "base/utf8.h"
#include "report/table_shape.h"
#include "report/tree_list.h"

enum {
    LEAST_ROOM = 30, /* columns of the picture on any page */
    REACH_ROOM = 44, /* what it keeps beside the column of reaches */
    MOST_ROOM = 100, /* on wide pages */
    LEAST_LABEL = 14,
    EASY_LABEL = 28, /* labels get so many before levels stand wider apart */
    LEAST_STEP = 2,  /* columns from level to level */
    MOST_STEP = 4,
    SIGN = 2,         /* of a node, with the blank behind it */
    BETWEEN_ITEMS = 3 /* of the key */
};

enum glyph {
    ON,
    LAST,   /* a branch off the path, others below it or none */
    PASSED, /* the same, with the path below it */
    HEAVY_ON,
    HEAVY_TURN,
    HEAVY_LAST, /* a branch of the path, with the path below it, with
                                             others below it, and with none */
    STROKE,
    HEAVY,
    DOWN,
    HEAVY_DOWN,
    ARROW,
    CHOICE,
    CHANCE,
    END,
    FOLDED,
    GLYPHS
};

static const char *glyph(const struct page *p, enum glyph g)
{
    static const char *const utf8[GLYPHS] = {"├", "└", "┠", "┣", "┡", "┗", "─", "━",
                                             "│", "┃", "►", "□", "○", "◁", "…"};
    static const char *const ascii[GLYPHS] = {"+", "+", "#", "#", "#", "#", "-",  "=",
                                              "|", "#", ">", "?", "o", "<", "..."};
    return p->ascii ? ascii[g] : utf8[g];
}

struct drawing {
    const struct page *page;
    const struct tree *tree;
    struct tree_list list;
    struct report report;
    struct block *table;
    size_t room, step, deepest; /* deepest: levels of a part below its first node */
    ARRAY(size_t) parts;        /* items with which they begin */
    size_t base;                /* level of the present part's first node */
};

/* --- lines --- */

/* Blanks at the end go. */
static void put_line(struct drawing *d, const char *s, const struct tree_node *n)
{
    size_t end = strlen(s);
    while (end > 0 && s[end - 1] == ' ')
        end--;
    struct row *row = block_row(&d->report, d->table);
    row_text(&d->report, row, arena_strn(d->page->arena, s, end));
    tree_add_numbers(&d->report, d->table, row, n);
}

/* What stands left of the lines of a node: of its first, and of those below. */
struct stem {
    const char *first, *rest;
};

/* The connection to a child that stands above so many others, with the path among them. */
static struct stem stem_below(const struct drawing *d, const struct tree_item *child,
                              const char *rest, bool more, bool path_below)
{
    const struct page *p = d->page;
    bool heavy = child->on_path;
    enum glyph joint = heavy        ? path_below ? HEAVY_ON
                                      : more     ? HEAVY_TURN
                                                 : HEAVY_LAST
                       : path_below ? PASSED
                       : more       ? ON
                                    : LAST;
    size_t strokes = d->step > LEAST_STEP ? d->step - 2 : 1;
    struct text first, below;
    text_init(&first, p->arena);
    text_init(&below, p->arena);
    text_printf(&first, "%s%s", rest, glyph(p, joint));
    text_repeat(&first, glyph(p, heavy ? HEAVY : STROKE), strokes - child->taken);
    text_add(&first, child->taken ? glyph(p, ARROW) : "");
    text_add(&first, d->step > LEAST_STEP ? " " : "");
    text_printf(&below, "%s%s", rest,
                path_below ? glyph(p, HEAVY_DOWN)
                : more     ? glyph(p, DOWN)
                           : " ");
    text_repeat(&below, " ", d->step - 1);
    return (struct stem){text_str(&first), text_str(&below)};
}

/* --- nodes --- */

static const char *sign_of(const struct page *p, const struct tree_node *n)
{
    static const enum glyph signs[] = {CHOICE, CHANCE, END};
    return glyph(p, signs[n->kind]);
}

static void add_wrapped(const struct page *p, struct lines *lines, const char *s, size_t width)
{
    struct lines more = page_wrap(p, s, width);
    for (size_t i = 0; i < more.n; i++)
        *array_push(p->arena, lines) = more.at[i];
}

/* Beside the label's last line where there is room, else below it. */
static void add_remark(const struct page *p, struct lines *lines, const char *s, size_t width)
{
    const char **last = array_last(lines);
    if (utf8_columns(*last) + 2 + utf8_columns(s) <= width)
        *last = arena_printf(p->arena, "%s%s%s", *last, **last ? "  " : "", s);
    else
        add_wrapped(p, lines, s, width);
}

/* The label, what is said of the node, what happens on the branch. */
static struct lines lines_of(const struct drawing *d, const struct tree_node *n, size_t width,
                             size_t part)
{
    const struct page *p = d->page;
    struct lines lines = page_wrap(p, page_clean(p, n->label), width);
    const char *remark = page_clean(p, tree_remark(p->arena, n));
    if (*remark)
        add_remark(p, &lines, remark, width);
    if (part)
        add_remark(p, &lines, arena_printf(p->arena, "(goes on below as part %zu)", part), width);
    const char *steps = page_clean(p, n->steps);
    if (steps[strspn(steps, " ")])
        add_wrapped(p, &lines, steps, width);
    return lines;
}

static bool has_path(const struct drawing *d, size_t from, size_t until)
{
    for (size_t i = from; i < until; i = d->list.at[i].next)
        if (d->list.at[i].on_path)
            return true;
    return false;
}

static void put_node(struct drawing *d, size_t at, struct stem stem, bool open, size_t part)
{
    const struct page *p = d->page;
    const struct tree_item *item = &d->list.at[at];
    size_t width = d->room - SIGN - (item->depth - d->base) * d->step;
    struct lines lines = lines_of(d, item->node, width, part);
    bool heavy = has_path(d, item->from, item->next);
    const char *down = !open ? " " : glyph(p, heavy ? HEAVY_DOWN : DOWN);
    for (size_t i = 0; i < lines.n; i++)
        put_line(d,
                 arena_printf(p->arena, "%s%s %s", i ? stem.rest : stem.first,
                              i ? down : sign_of(p, item->node), lines.at[i]),
                 i ? NULL : item->node);
}

static void draw_node(struct drawing *d, size_t at, struct stem stem)
{
    const struct tree_item *item = &d->list.at[at];
    bool open = item->next > item->from, deep = item->depth - d->base >= d->deepest;
    if (open && deep)
        *array_push(d->page->arena, &d->parts) = at;
    put_node(d, at, stem, open && !deep, open && deep ? d->parts.n : 0);
    if (deep)
        return;
    for (size_t i = item->from; i < item->next; i = d->list.at[i].next) {
        const struct tree_item *child = &d->list.at[i];
        bool more = child->next < item->next;
        draw_node(d, i,
                  stem_below(d, child, stem.rest, more, has_path(d, child->next, item->next)));
    }
}

/* The first part is the whole; what it has no room for follows. */
static void draw_parts(struct drawing *d)
{
    const struct page *p = d->page;
    *array_push(p->arena, &d->parts) = 0;
    for (size_t k = 0; k < d->parts.n; k++) {
        const struct tree_item *item = &d->list.at[d->parts.at[k]];
        d->base = item->depth;
        if (k) {
            const char *words = arena_printf(p->arena, "Part %zu: %s", k + 1, item->path);
            struct lines lines = page_wrap(p, page_clean(p, words), d->room);
            put_line(d, "", NULL);
            for (size_t i = 0; i < lines.n; i++)
                put_line(d, lines.at[i], NULL);
        }
        draw_node(d, d->parts.at[k], (struct stem){"", ""});
    }
}

/* --- its room --- */

static void open_table(struct drawing *d, bool reach)
{
    report_init(&d->report, d->page->arena);
    d->table = report_table(&d->report, NULL, NULL);
    block_column(&d->report, d->table, "branch", "Branch", "", STYLE_PLAIN)->drawn = true;
    tree_add_columns(&d->report, d->table, d->tree, &d->list, reach);
}

/* What the columns of numbers leave for the picture. */
static size_t room_beside(struct drawing *d, bool reach)
{
    open_table(d, reach);
    struct text widest;
    text_init(&widest, d->page->arena);
    text_repeat(&widest, "-", LEAST_ROOM);
    for (size_t i = 0; i < d->list.n; i++)
        put_line(d, text_str(&widest), d->list.at[i].node);
    struct table_shape t = table_shape_of(d->page, d->table);
    size_t taken = 0;
    for (size_t j = 1; j < t.n_columns; j++)
        taken += t.columns[j].least + TABLE_GUTTER;
    return taken + LEAST_ROOM < d->page->width ? d->page->width - taken : LEAST_ROOM;
}

static size_t depth_of(const struct tree_list *l)
{
    size_t depth = 0;
    for (size_t i = 0; i < l->n; i++)
        depth = l->at[i].depth > depth ? l->at[i].depth : depth;
    return depth;
}

static void choose_room(struct drawing *d)
{
    size_t room = room_beside(d, true), depth = depth_of(&d->list);
    bool reach = room >= REACH_ROOM;
    room = reach ? room : room_beside(d, false);
    d->room = room < MOST_ROOM ? room : MOST_ROOM;
    for (d->step = MOST_STEP; d->step > LEAST_STEP; d->step--)
        if (depth * d->step + SIGN + EASY_LABEL <= d->room)
            break;
    d->deepest = (d->room - SIGN - LEAST_LABEL) / d->step;
    open_table(d, reach);
}

/* --- the key --- */

struct key {
    struct page *page;
    struct line line;
};

/* On the same line where there is room. */
static void put_key(struct key *k, const char *sign, const char *words)
{
    const char *s = arena_printf(k->page->arena, "%s %s", sign, words);
    size_t from = k->line.column ? k->line.column + BETWEEN_ITEMS : 0;
    if (from && from + utf8_columns(s) > k->page->width) {
        line_end(&k->line);
        from = 0;
    }
    line_to(&k->line, from);
    line_add(&k->line, s, INK_PLAIN);
}

static void write_key(struct page *p, const struct drawing *d)
{
    static const char *const words[] = {TREE_CHOICE_WORDS, TREE_CHANCE_WORDS, TREE_END_WORDS};
    static const enum glyph signs[] = {CHOICE, CHANCE, END};
    struct key k = {p, line_begin(p)};
    bool kinds[] = {false, false, false}, taken = false, folded = false;
    for (size_t i = 0; i < d->list.n; i++) {
        const struct tree_item *item = &d->list.at[i];
        kinds[item->node->kind] = true;
        taken = taken || item->taken;
        folded = folded || (item->node->folded && !item->node->same_as);
    }
    page_blank(p);
    for (size_t i = 0; i < sizeof signs / sizeof *signs; i++)
        if (kinds[i])
            put_key(&k, glyph(p, signs[i]), words[i]);
    if (taken)
        put_key(&k, glyph(p, ARROW), TREE_TAKEN_WORDS);
    if (has_path(d, 1, d->list.n))
        put_key(&k, arena_printf(p->arena, "%s%s", glyph(p, HEAVY), glyph(p, HEAVY)),
                TREE_PATH_WORDS);
    if (folded)
        put_key(&k, glyph(p, FOLDED), TREE_FOLDED_WORDS);
    line_end(&k.line);
}

void page_tree(struct page *p, const struct tree *t)
{
    struct drawing d = {.page = p, .tree = t};
    if (!t->root) {
        page_paragraph(p, "(no branches)", 0, INK_PLAIN);
        return;
    }
    d.list = tree_list_of(p->arena, t, true);
    choose_room(&d);
    draw_parts(&d);
    page_table(p, d.table);
    write_key(p, &d);
}
