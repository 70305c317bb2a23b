/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the HTML writer share: text and attributes made harmless, ids, the
 * blocks that have a file of their own.
 *
 * The page is HTML5 that is also balanced as XML would have it but for the void elements
 * meta and input. Numbers and words come from the table shapes, scales and keys of the
 * text writer, on a page so wide that nothing is left out. */
#ifndef REPORT_HTML_H
#define REPORT_HTML_H

#include "report/page.h"

struct html {
    struct text *out;
    struct page page;       /* scratch arena; shapes of tables and words of cells */
    struct strmap ids;      /* those that are taken */
    const char *section;    /* the last heading: names what has no title of its own */
    const char **block_ids; /* one a block; NULL: it has none */
};

/* Markup as it is. */
void html_raw(struct html *h, const char *markup);
/* Text: cleaned, escaped, and kept apart by <bdi> when it is written from right to left. */
void html_text(struct html *h, const char *s);
/* The same without markup around it: for <title> and <text>, which may not have any. */
void html_bare_text(struct html *h, const char *s);
/* A blank and name="s", cleaned and escaped. */
void html_attribute(struct html *h, const char *name, const char *s);
/* The name of a figure as data-figure and title; nothing for NULL. */
void html_figure(struct html *h, const char *figure);
/* An id that no other element has, of a-z, 0-9 and hyphens, made from s. */
const char *html_id(struct html *h, const char *s);

/* A container that scrolls when it is wider than the page, named for those who do not
 * see it, and closed by html_raw(h, "</div>\n"). With `wide` it can have the focus. */
void html_open_scroll(struct html *h, const char *kind, const char *name, bool wide);

/* A figure with the block's title, closed by html_raw(h, "</figure>\n"). */
void html_open_figure(struct html *h, const struct block *b, const char *id);
/* What names its picture: the title, or the section that it is in. */
const char *html_picture_title(const struct html *h, const struct block *b);
/* A remark below a picture; figure: NULL, or the name of that which it tells. */
void html_remark(struct html *h, const char *words, const char *figure);

/* The style of every page. */
extern const char *const html_style[];
extern const size_t html_style_parts;

/* A table: `caption` or NULL; `signs`: markup for the first column's cells, or NULL. */
void html_table(struct html *h, const struct block *b, const char *id, const char *caption,
                const char *const *signs);
/* The same with markup for the cells of its drawn column. */
void html_table_drawn(struct html *h, const struct block *b, const char *id, const char *caption,
                      const char *const *drawn);
void html_pairs(struct html *h, const struct block *b, const char *id);
void html_signatures(struct html *h, const struct block *b, const char *id);
void html_grid(struct html *h, const struct block *b, const char *id);
void html_curve(struct html *h, const struct block *b, const char *id);
void html_swings(struct html *h, const struct block *b, const char *id);
void html_map(struct html *h, const struct block *b, const char *id);
void html_spreads(struct html *h, const struct block *b, const char *id);
void html_tree(struct html *h, const struct block *b, const char *id);
void html_policy(struct html *h, const struct block *b, const char *id);

#endif
