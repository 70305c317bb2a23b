/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing: the few elements of SVG 1.1 that the pictures are made of. Places are written
 * in tenths of the picture's unit, without the locale's say. */
#ifndef REPORT_HTML_SVG_H
#define REPORT_HTML_SVG_H

#include "report/html.h"
#include "report/html_place.h"

enum { SVG_WIDTH = 660, SVG_FONT = 12, SVG_LINE = 15 /* from line to line of text */ };

/* x in tenths, as text: 12, 12.5, -0.3. buf: 32 bytes. */
const char *svg_length(char *buf, double x);

/* The element, its title and what it shows in words; closed by html_raw(h, "</svg>\n"). */
void svg_open(struct html *h, int height, const char *title, const char *words);
/* The same from `from` to `until` of a picture that is drawn in pieces, its title and words to be
 * written by svg_words. natural: as many pixels wide, instead of as wide as the page lets it. */
void svg_open_piece(struct html *h, double width, double from, double until, bool natural);
void svg_words(struct html *h, const char *title, const char *words);
void svg_line(struct html *h, const char *class, double x1, double y1, double x2, double y2);
/* A rectangle; x, y: its upper left corner. */
void svg_box(struct html *h, const char *class, double x, double y, double width, double height);
/* Where a branch begins, and the height up to which it is upright from there. */
struct svg_bend {
    double x, y, upright;
};
/* From there aslant to fork_x, y, and level to end_x. */
void svg_branch(struct html *h, const char *class, struct svg_bend from, double fork_x, double y,
                double end_x);
/* The head of an arrow to the right, its tip at x, y; and one in a key. */
void svg_arrow_head(struct html *h, double x, double y, int length);
const char *svg_arrow_sample(struct html *h);
/* anchor: "start", "middle" or "end", of the text's base line. */
void svg_text(struct html *h, const char *class, double x, double y, const char *anchor,
              const char *s);
/* Text that rises (below 0: falls) by so many degrees around its anchor, the middle. */
void svg_text_aslant(struct html *h, const char *class, double x, double y, int degrees,
                     const char *s);
/* A class of a line that looks like no other of the first six: "l0". */
const char *svg_line_class(struct html *h, size_t i);
/* A class of an area that looks like no other of the first six: "fill c0". */
const char *svg_shade_class(struct html *h, size_t i);
/* A short piece of such a line with its symbol, for a key. */
const char *svg_sample(struct html *h, const char *class, const char *symbol);
/* A rectangle with a sign in it, for a key. */
const char *svg_box_sample(struct html *h, const char *class, const char *sign);
/* At least the width of s in SVG_FONT on the usual fonts without serifs. s is clean. */
double svg_text_width(const char *s);

/* Parts are hollow and smaller: a part of a mark, and several. The last three are nodes of a tree,
 * and hollow too. */
enum svg_shape {
    SVG_DISC,
    SVG_RING,
    SVG_DIAMOND,
    SVG_PART,
    SVG_PARTS,
    SVG_SQUARE,
    SVG_CIRCLE,
    SVG_TRIANGLE
};
/* Half the width of a mark, of a part of one, and of a node. */
enum { SVG_MARK = 5, SVG_PART_MARK = 4, SVG_NODE = 7 };
/* A mark with what it is, shown where a pointer rests on it. */
void svg_mark(struct html *h, enum svg_shape shape, double x, double y, const char *words);
/* A mark alone, for a key. */
const char *svg_mark_sample(struct html *h, enum svg_shape shape);
/* The label in its place, drawn from the end that is nearer to its mark, and a thin line to
 * the mark where it is not beside it. */
void svg_label(struct html *h, const char *s, const struct place_box *b, double x, double y);

#endif
