/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing in SVG. Colours, strokes and dashes are the style's (html_style.c): a picture
 * names classes. Owns nothing. */
#include "report/html_svg.h"

#include <math.h>
#include <stdio.h>

#include "base/utf8.h"

const char *svg_length(char *buf, double x)
{
    double tenths = floor(fabs(x) * 10 + 0.5);
    unsigned long n = (unsigned long)fmin(tenths, 1e9);
    const char *sign = x < 0 && n ? "-" : "";
    if (n % 10)
        snprintf(buf, 32, "%s%lu.%lu", sign, n / 10, n % 10);
    else
        snprintf(buf, 32, "%s%lu", sign, n / 10);
    return buf;
}

/* Ends the tag that opens a picture. */
void svg_words(struct html *h, const char *title, const char *words)
{
    const char *head = html_id(h, "picture"), *body = html_id(h, "picture-words");
    text_printf(h->out,
                " role=\"img\" aria-labelledby=\"%s\" aria-describedby=\"%s\">\n"
                "<title id=\"%s\">",
                head, body, head);
    html_bare_text(h, title);
    text_printf(h->out, "</title>\n<desc id=\"%s\">", body);
    html_bare_text(h, words);
    html_raw(h, "</desc>\n");
}

void svg_open(struct html *h, int height, const char *title, const char *words)
{
    text_printf(h->out, "<svg viewBox=\"0 0 %d %d\"", SVG_WIDTH, height);
    svg_words(h, title, words);
}

void svg_open_piece(struct html *h, double width, double from, double until, bool natural)
{
    char a[32], b[32], c[32];
    text_printf(h->out, "<svg viewBox=\"0 %s %s %s\"", svg_length(a, from), svg_length(b, width),
                svg_length(c, until - from));
    if (natural)
        text_printf(h->out, " width=\"%s\"", svg_length(a, width));
}

void svg_line(struct html *h, const char *class, double x1, double y1, double x2, double y2)
{
    char a[32], b[32], c[32], d[32];
    text_printf(h->out, "<line class=\"%s\" x1=\"%s\" y1=\"%s\" x2=\"%s\" y2=\"%s\"/>\n", class,
                svg_length(a, x1), svg_length(b, y1), svg_length(c, x2), svg_length(d, y2));
}

void svg_box(struct html *h, const char *class, double x, double y, double width, double height)
{
    char a[32], b[32], c[32], d[32];
    svg_length(a, x);
    svg_length(b, y);
    svg_length(c, x + width);
    svg_length(d, y + height);
    text_printf(h->out, "<path class=\"%s\" d=\"M%s %sH%sV%sH%sZ\"/>\n", class, a, b, c, d, a);
}

void svg_branch(struct html *h, const char *class, struct svg_bend from, double fork_x, double y,
                double end_x)
{
    char a[32], b[32], c[32], d[32], e[32], f[32];
    text_printf(h->out, "<path class=\"%s\" d=\"M%s %sV%sL%s %sH%s\"/>\n", class,
                svg_length(a, from.x), svg_length(b, from.y), svg_length(c, from.upright),
                svg_length(d, fork_x), svg_length(e, y), svg_length(f, end_x));
}

void svg_arrow_head(struct html *h, double x, double y, int length)
{
    char a[32], b[32], c[32], d[32], e[32];
    svg_length(a, x - length);
    svg_length(b, y - length / 2.0);
    svg_length(c, x);
    svg_length(d, y);
    svg_length(e, y + length / 2.0);
    text_printf(h->out, "<path class=\"head\" d=\"M%s %sL%s %sL%s %sZ\"/>\n", a, b, c, d, a, e);
}

void svg_text(struct html *h, const char *class, double x, double y, const char *anchor,
              const char *s)
{
    char a[32], b[32];
    text_printf(h->out, "<text class=\"%s\" x=\"%s\" y=\"%s\" text-anchor=\"%s\">", class,
                svg_length(a, x), svg_length(b, y), anchor);
    html_bare_text(h, s);
    html_raw(h, "</text>\n");
}

void svg_text_aslant(struct html *h, const char *class, double x, double y, int degrees,
                     const char *s)
{
    char a[32], b[32];
    text_printf(h->out,
                "<text class=\"%s\" transform=\"translate(%s %s) rotate(%d)\" "
                "text-anchor=\"middle\">",
                class, svg_length(a, x), svg_length(b, y), -degrees);
    html_bare_text(h, s);
    html_raw(h, "</text>\n");
}

const char *svg_line_class(struct html *h, size_t i)
{
    return arena_printf(h->page.arena, "l%zu", i % 6);
}

const char *svg_shade_class(struct html *h, size_t i)
{
    return arena_printf(h->page.arena, "fill c%zu", i % 6);
}

/* Markup that is kept for later is written beside the page. */
static struct html beside(const struct html *h, struct text *out)
{
    struct html other = *h;
    text_init(out, h->page.arena);
    other.out = out;
    return other;
}

static const char sample_opening[] =
    "<svg class=\"sample\" viewBox=\"0 0 %d 16\" width=\"%d\" height=\"16\" aria-hidden=\"true\">";

const char *svg_sample(struct html *h, const char *class, const char *symbol)
{
    struct text out;
    struct html o = beside(h, &out);
    text_printf(&out, sample_opening, 56, 56);
    svg_line(&o, class, 0, 8, 56, 8);
    if (*symbol)
        svg_text(&o, "symbol", 28, 12, "middle", symbol);
    html_raw(&o, "</svg>");
    return text_str(&out);
}

const char *svg_arrow_sample(struct html *h)
{
    enum { ARROW = 12 };
    struct text out;
    struct html o = beside(h, &out);
    text_printf(&out, sample_opening, 16, 16);
    svg_arrow_head(&o, 14, 8, ARROW);
    html_raw(&o, "</svg>");
    return text_str(&out);
}

const char *svg_box_sample(struct html *h, const char *class, const char *sign)
{
    struct text out;
    struct html o = beside(h, &out);
    text_printf(&out, sample_opening, 28, 28);
    svg_box(&o, class, 1, 1, 26, 14);
    if (*sign)
        svg_text(&o, "letter", 14, 12, "middle", sign);
    html_raw(&o, "</svg>");
    return text_str(&out);
}

/* Capitals are wider than the rest; a wide character is as wide as its two columns. */
double svg_text_width(const char *s)
{
    double width = 0.62 * (double)utf8_columns(s);
    for (const char *c = s; *c; c++)
        width += *c == 'M' || *c == 'W' || *c == 'm' || *c == 'w' ? 0.3
                 : *c >= 'A' && *c <= 'Z'                         ? 0.1
                                                                  : 0;
    return width * SVG_FONT;
}

/* --- marks --- */

static void put_diamond(struct html *h, const char *class, double x, double y, double r)
{
    char a[32], b[32], c[32], d[32], e[32], f[32];
    svg_length(a, x);
    svg_length(b, y - r);
    svg_length(c, x + r);
    svg_length(d, y);
    svg_length(e, y + r);
    svg_length(f, x - r);
    text_printf(h->out, "<path class=\"%s\" d=\"M%s %sL%s %sL%s %sL%s %sZ\"/>", class, a, b, c, d,
                a, e, f, d);
}

static void put_circle(struct html *h, const char *class, double x, double y, int r)
{
    char a[32], b[32];
    text_printf(h->out, "<circle class=\"%s\" cx=\"%s\" cy=\"%s\" r=\"%d\"/>", class,
                svg_length(a, x), svg_length(b, y), r);
}

/* Its tip to the left. */
static void put_triangle(struct html *h, double x, double y, double r)
{
    char a[32], b[32], c[32], d[32], e[32];
    svg_length(a, x - r);
    svg_length(b, y);
    svg_length(c, x + r);
    svg_length(d, y - r);
    svg_length(e, y + r);
    text_printf(h->out, "<path class=\"part\" d=\"M%s %sL%s %sV%sZ\"/>", a, b, c, d, e);
}

static void put_shape(struct html *h, enum svg_shape shape, double x, double y)
{
    switch (shape) {
    case SVG_DISC: put_circle(h, "disc", x, y, SVG_MARK); break;
    case SVG_RING: put_circle(h, "ring", x, y, SVG_MARK); break;
    case SVG_DIAMOND: put_diamond(h, "disc", x, y, SVG_MARK + 1.5); break;
    case SVG_PART: put_circle(h, "part", x, y, SVG_PART_MARK); break;
    case SVG_PARTS: put_diamond(h, "part", x, y, SVG_PART_MARK + 1.5); break;
    case SVG_SQUARE:
        svg_box(h, "part", x - SVG_NODE, y - SVG_NODE, 2 * SVG_NODE, 2 * SVG_NODE);
        break;
    case SVG_CIRCLE: put_circle(h, "part", x, y, SVG_NODE); break;
    case SVG_TRIANGLE: put_triangle(h, x, y, SVG_NODE); break;
    }
}

void svg_mark(struct html *h, enum svg_shape shape, double x, double y, const char *words)
{
    html_raw(h, "<g><title>");
    html_bare_text(h, words);
    html_raw(h, "</title>");
    put_shape(h, shape, x, y);
    html_raw(h, "</g>\n");
}

const char *svg_mark_sample(struct html *h, enum svg_shape shape)
{
    struct text out;
    struct html o = beside(h, &out);
    text_printf(&out, sample_opening, 16, 16);
    put_shape(&o, shape, 8, 8);
    html_raw(&o, "</svg>");
    return text_str(&out);
}

static double nearest(double x, double low, double high)
{
    return fmin(fmax(x, low), high);
}

void svg_label(struct html *h, const char *s, const struct place_box *b, double x, double y)
{
    double to_x = nearest(x, b->x, b->x + b->width), to_y = nearest(y, b->y, b->y + b->height);
    double way = sqrt((to_x - x) * (to_x - x) + (to_y - y) * (to_y - y));
    if (way > 2.5 * SVG_MARK)
        svg_line(h, "leader", x + (to_x - x) * SVG_MARK / way, y + (to_y - y) * SVG_MARK / way,
                 to_x, to_y);
    double base = b->y + b->height / 2 + 0.36 * SVG_FONT;
    if (b->x >= x)
        svg_text(h, "label", b->x + 2, base, "start", s);
    else if (b->x + b->width <= x)
        svg_text(h, "label", b->x + b->width - 2, base, "end", s);
    else
        svg_text(h, "label", b->x + b->width / 2, base, "middle", s);
}
