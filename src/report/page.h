/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The page that the text writers share: lines that never exceed the width, never
 * end in blanks, and are the same text with and without colour.
 *
 * All texts given to a line are clean (page_clean) and all widths are columns of
 * a terminal, not bytes. */
#ifndef REPORT_PAGE_H
#define REPORT_PAGE_H

#include "report/block.h"

struct page {
    struct text *out;
    struct arena *arena; /* scratch, freed when the report is written */
    size_t width;
    bool ascii, colour;
};

enum ink { INK_PLAIN, INK_HEAD, INK_ALARM, INK_FAINT };

struct line {
    struct page *page;
    size_t column;  /* where the next text goes */
    size_t pending; /* blanks that are due before the next text */
};

struct lines ARRAY_BODY(const char *);

const char *page_clean(const struct page *p, const char *s);

struct line line_begin(struct page *p);
/* Moves on to a column; at or left of the present one it does nothing. */
void line_to(struct line *l, size_t column);
/* Adds text, which must fit: column + its columns <= width. */
void line_add(struct line *l, const char *s, enum ink ink);
void line_add_n(struct line *l, const char *s, size_t n, enum ink ink);
/* The same, its last column being the one before `end`. */
void line_add_right(struct line *l, const char *s, size_t end, enum ink ink);
void line_end(struct line *l);

/* s in lines of at most `width` (>= 2) columns, broken at blanks; a word is
 * broken only when it is wider than a line. At least one line. */
struct lines page_wrap(const struct page *p, const char *s, size_t width);
/* Columns of the widest word. */
size_t page_widest_word(const struct page *p, const char *s);

void page_blank(struct page *p);
/* A rule of n columns. */
void page_rule(struct page *p, size_t indent, size_t n, bool strong);
/* Wrapped text, each line behind `indent` columns. */
void page_paragraph(struct page *p, const char *s, size_t indent, enum ink ink);

/* Named values, a line each: names to the left, values wrapped beside them. */
struct pair {
    const char *name, *value, *mark; /* clean; mark "" when there is none */
};
void page_pairs(struct page *p, const struct pair *pairs, size_t n);
/* A cell with its unit as one text: "12.3 kEUR/a", "2.94e-3 /a, 1 in 340 a". */
const char *cell_words(const struct page *p, const struct cell *c, enum number_style style,
                       const char *unit);

/* The blocks that have a file of their own. */
void page_table(struct page *p, const struct block *b);
void page_grid(struct page *p, const struct grid *g);
void page_curve(struct page *p, const struct curve *c);
void page_swings(struct page *p, const struct swings *s);
void page_map(struct page *p, const struct map *m);
void page_spreads(struct page *p, const struct spreads *s);
void page_tree(struct page *p, const struct tree *t);
void page_policy(struct page *p, const struct policy *o);

#endif
