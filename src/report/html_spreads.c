/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Spreads as a table with a small strip in each row: a line from 5 to 95 %, the median a
 * stroke across it, the mean a ring. The strip says in words what it shows. Owns nothing. */
#include "report/html_svg.h"
#include "report/spreads.h"

enum { STRIP_WIDTH = 240, STRIP_HEIGHT = 18, EDGE = 6 /* room at both ends for a mark */ };

/* Half the height of the strokes at the ends, and of the median. */
enum { HALF_END = 4, HALF_MEDIAN = 7 };

static void put_strip(struct html *o, double low, double median, double high, double mean)
{
    double y = STRIP_HEIGHT / 2.0;
    svg_line(o, "rule", low, y, high, y);
    svg_line(o, "rule", low, y - HALF_END, low, y + HALF_END);
    svg_line(o, "rule", high, y - HALF_END, high, y + HALF_END);
    svg_line(o, "median", median, y - HALF_MEDIAN, median, y + HALF_MEDIAN);
    svg_mark(o, SVG_PART, mean, y, SPREADS_MEAN_WORDS);
}

static double x_at(const struct spreads_plane *g, const struct spread *s, enum spread_part part)
{
    return EDGE + spreads_place(g, s, s->parts[part].value) * (STRIP_WIDTH - 2 * EDGE);
}

static const char *strip_of(struct html *h, const struct spreads_plane *g, const struct spread *s)
{
    struct text out;
    struct html o = *h;
    text_init(&out, h->page.arena);
    o.out = &out;
    text_printf(&out, "<svg viewBox=\"0 0 %d %d\" role=\"img\"", STRIP_WIDTH, STRIP_HEIGHT);
    html_attribute(&o, "aria-label", spreads_words(g, s));
    html_raw(&o, ">\n");
    svg_line(&o, "faint", EDGE, STRIP_HEIGHT / 2.0, STRIP_WIDTH - EDGE, STRIP_HEIGHT / 2.0);
    put_strip(&o, x_at(g, s, SPREAD_LOW), x_at(g, s, SPREAD_MEDIAN), x_at(g, s, SPREAD_HIGH),
              x_at(g, s, SPREAD_MEAN));
    html_raw(&o, "</svg>");
    return text_str(&out);
}

static void put_key(struct html *h)
{
    html_raw(h, "<ul class=\"key\">\n<li>");
    html_raw(h, svg_sample(h, "rule", ""));
    html_raw(h, " " SPREADS_RANGE_WORDS "</li>\n<li><svg class=\"sample\" viewBox=\"0 0 16 16\" "
                "width=\"16\" height=\"16\" aria-hidden=\"true\">");
    svg_line(h, "median", 8, 1, 8, 15);
    html_raw(h, "</svg> " SPREADS_MEDIAN_WORDS "</li>\n<li>");
    html_raw(h, svg_mark_sample(h, SVG_PART));
    html_raw(h, " " SPREADS_MEAN_WORDS "</li>\n</ul>\n");
}

void html_spreads(struct html *h, const struct block *b, const char *id)
{
    struct spreads_plane g;
    const struct spreads *s = b->spreads;
    spreads_open(&g, &h->page, s);
    const char **strips = NEW_ARRAY(h->page.arena, s->n, const char *);
    for (size_t i = 0; i < s->n; i++)
        strips[i] = strip_of(h, &g, &s->at[i]);
    html_raw(h, "<figure>\n");
    html_table_drawn(h, spreads_table(&g), id, b->title, strips);
    if (s->n)
        put_key(h);
    if (spreads_have_errors(s))
        html_remark(h, SPREADS_ERROR_WORDS, NULL);
    html_raw(h, "</figure>\n");
}
