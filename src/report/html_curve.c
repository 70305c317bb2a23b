/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A curve as a picture. Ranges, ticks, words and the key are those of the text curve;
 * lines are drawn through their very points. Several lines differ by their dashes and
 * carry their symbols. Owns nothing.
 * Invariant: a line is broken at points that have no place on a log axis, and nowhere
 * else; no label covers a mark, a symbol or another label. */
#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "report/curve_plane.h"
#include "report/html_svg.h"

enum {
    PLANE_HEIGHT = 240,
    UNIT_OF_TICKS = 8, /* a column of the text's ticks, in the picture's unit */
    RIGHT = 26,        /* for the half of the last tick's label */
    WORDS_COLUMNS = 88,
    SYMBOLS = 3 /* along each line */
};

struct picture {
    struct html *html;
    struct curve_plane plane;
    double left, top, width;
    struct places places;
};

static double x_at(const struct picture *f, double value)
{
    return f->left + curve_place(&f->plane.x, value) / f->plane.x.cells * f->width;
}

static double y_at(const struct picture *f, double value)
{
    double up = curve_place(&f->plane.y, value) / f->plane.y.cells;
    return f->top + (1 - up) * PLANE_HEIGHT;
}

static bool has_place(const struct curve *c, double x, double y)
{
    return curve_has_place(&c->x, x) && curve_has_place(&c->y, y);
}

/* --- axes --- */

static void measure(struct picture *f, size_t words)
{
    struct curve_plane *g = &f->plane;
    struct arena *a = f->html->page.arena;
    for (size_t i = 0; i < g->y.ticks.n; i++)
        f->left = fmax(f->left, svg_text_width(g->y.ticks.at[i].label));
    f->left += 12;
    f->top = (double)words * SVG_LINE + 12;
    f->width = SVG_WIDTH - RIGHT - f->left;
    f->places = (struct places){
        .arena = a, .bounds = {f->left + 2, f->top - 6, f->width + 20, PLANE_HEIGHT + 4}};
    g->x.cells = (int)(f->width / UNIT_OF_TICKS);
    curve_tick_x(&g->x, a);
    g->symbols = NEW_ARRAY(a, g->curve->lines.n, const char *);
    g->labelled = NEW_ARRAY(a, g->curve->marks.n, bool);
    if (g->manner == CURVE_SYMBOLS)
        curve_choose_symbols(g);
}

static void put_words(struct picture *f, const struct lines *words, double x, double y,
                      const char *anchor)
{
    for (size_t i = 0; i < words->n; i++)
        svg_text(f->html, "axis", x, y + (double)i * SVG_LINE, anchor, words->at[i]);
}

static void put_axes(struct picture *f)
{
    const struct curve_plane *g = &f->plane;
    double bottom = f->top + PLANE_HEIGHT;
    for (size_t i = 0; i < g->y.ticks.n; i++) {
        const struct curve_tick *t = &g->y.ticks.at[i];
        double y = y_at(f, t->value);
        if (t->at)
            svg_line(f->html, "faint", f->left, y, f->left + f->width, y);
        svg_text(f->html, "tick", f->left - 8, y + 0.36 * SVG_FONT, "end", t->label);
    }
    for (size_t i = 0; i < g->x.ticks.n; i++) {
        double x = x_at(f, g->x.ticks.at[i].value);
        svg_line(f->html, "rule", x, bottom, x, bottom + 5);
        svg_text(f->html, "tick", x, bottom + 20, "middle", g->x.ticks.at[i].label);
    }
    svg_line(f->html, "rule", f->left, f->top, f->left, bottom);
    svg_line(f->html, "rule", f->left, bottom, f->left + f->width, bottom);
}

/* --- lines --- */

static void put_point(struct picture *f, char step, double x, double y)
{
    char a[32], b[32];
    text_printf(f->html->out, "%c%s %s", step, svg_length(a, x), svg_length(b, y));
}

/* Points from `from` on that have a place; returns the number of the first that has none. */
static size_t run_from(const struct picture *f, const struct curve_points *l, size_t from)
{
    while (from < l->n && has_place(f->plane.curve, l->at[from].x, l->at[from].y))
        from++;
    return from;
}

static void put_run(struct picture *f, const struct curve_points *l, size_t from, size_t end)
{
    for (size_t i = from; i < end; i++)
        put_point(f, i == from ? 'M' : 'L', x_at(f, l->at[i].x), y_at(f, l->at[i].y));
    if (end == from + 1) /* a dot: a stroke without length, round at its ends */
        put_point(f, 'L', x_at(f, l->at[from].x), y_at(f, l->at[from].y));
}

static void put_area(struct picture *f, const struct curve_points *l, size_t from, size_t end)
{
    double bottom = f->top + PLANE_HEIGHT;
    html_raw(f->html, "<path class=\"area\" d=\"");
    put_point(f, 'M', x_at(f, l->at[from].x), bottom);
    for (size_t i = from; i < end; i++)
        put_point(f, 'L', x_at(f, l->at[i].x), y_at(f, l->at[i].y));
    put_point(f, 'L', x_at(f, l->at[end - 1].x), bottom);
    html_raw(f->html, "Z\"/>\n");
}

static void keep_run(struct picture *f, const struct curve_points *l, size_t from, size_t end)
{
    for (size_t i = from + 1; i < end; i++)
        place_add_stroke(&f->places, x_at(f, l->at[i - 1].x), y_at(f, l->at[i - 1].y),
                         x_at(f, l->at[i].x), y_at(f, l->at[i].y));
}

static void put_line(struct picture *f, size_t i)
{
    const struct curve_points *l = &f->plane.drawn[i];
    for (size_t from = 0; from < l->n;) {
        size_t end = run_from(f, l, from);
        if (end > from) {
            if (f->plane.manner == CURVE_AREA)
                put_area(f, l, from, end);
            text_printf(f->html->out, "<path class=\"line %s\" d=\"", svg_line_class(f->html, i));
            put_run(f, l, from, end);
            html_raw(f->html, "\"/>\n");
            keep_run(f, l, from, end);
        }
        from = end + (end < l->n);
    }
}

/* --- symbols --- */

/* The height of a line at x, straight between the points on both sides of it. */
static bool height_at(const struct picture *f, const struct curve_points *l, double x, double *y)
{
    for (size_t i = 1; i < l->n; i++) {
        const struct curve_point *p = &l->at[i - 1], *q = &l->at[i];
        if (!has_place(f->plane.curve, p->x, p->y) || !has_place(f->plane.curve, q->x, q->y))
            continue;
        double px = x_at(f, p->x), qx = x_at(f, q->x);
        if (x < px || x > qx || qx <= px)
            continue;
        *y = y_at(f, p->y) + (y_at(f, q->y) - y_at(f, p->y)) * ((x - px) / (qx - px));
        return true;
    }
    return false;
}

/* Every line has its symbols at places of its own, so that lines that coincide show all. */
static void put_symbols(struct picture *f)
{
    const struct curve_plane *g = &f->plane;
    size_t n = g->curve->lines.n;
    for (size_t i = 0; i < n * SYMBOLS; i++) {
        double x = f->left + f->width * ((double)i + 0.5) / (double)(n * SYMBOLS), y;
        if (!height_at(f, &g->drawn[i % n], x, &y))
            continue;
        struct place_box b = {x - 6, y - 7, 12, 14};
        for (size_t k = 0; k < f->places.boxes.n; k++)
            if (fabs(f->places.boxes.at[k].x - b.x) < 12 &&
                fabs(f->places.boxes.at[k].y - b.y) < 14)
                b.width = 0;
        if (b.width == 0)
            continue;
        place_add_box(&f->places, b.x, b.y, b.width, b.height);
        svg_text(f->html, "symbol", x, y + 0.36 * SVG_FONT, "middle", g->symbols[i % n]);
    }
}

/* --- marks --- */

static void keep_mark(struct picture *f, const struct curve_mark *m)
{
    double r = SVG_MARK + 1;
    place_add_box(&f->places, x_at(f, m->x) - r, y_at(f, m->y) - r, 2 * r, 2 * r);
}

static void put_mark_label(struct picture *f, size_t i)
{
    const struct curve_mark *m = &f->plane.curve->marks.at[i];
    const char *label = page_clean(&f->html->page, m->label);
    struct place_box at;
    double x = x_at(f, m->x), y = y_at(f, m->y);
    f->plane.labelled[i] = !*label || place_label(&f->places, x, y, SVG_MARK + 2,
                                                  svg_text_width(label) + 4, SVG_FONT + 2, &at);
    if (*label && f->plane.labelled[i])
        svg_label(f->html, label, &at, x, y);
}

static void put_marks(struct picture *f)
{
    const struct curve *c = f->plane.curve;
    for (size_t i = 0; i < c->marks.n; i++) {
        const struct curve_mark *m = &c->marks.at[i];
        if (has_place(c, m->x, m->y))
            svg_mark(f->html, SVG_DISC, x_at(f, m->x), y_at(f, m->y),
                     page_clean(&f->html->page, m->label));
    }
    for (size_t i = 0; i < c->marks.n; i++)
        if (has_place(c, c->marks.at[i].x, c->marks.at[i].y))
            put_mark_label(f, i);
}

/* --- the picture and its key --- */

static const char *range_words(const struct page *p, const struct curve_scale *s, const char *words)
{
    if (s->ticks.n == 0)
        return words;
    return arena_printf(p->arena, "%s%s%s to %s", words, *words ? ": ticks from " : "ticks from ",
                        s->ticks.at[0].label, s->ticks.at[s->ticks.n - 1].label);
}

static const char *words_of(const struct picture *f, const char *x, const char *y)
{
    const struct page *p = &f->html->page;
    return arena_printf(p->arena,
                        "To the right: %s. Upwards: %s. Lines: %zu, marks: %zu. The tables below "
                        "have their numbers.",
                        range_words(p, &f->plane.x, x), range_words(p, &f->plane.y, y),
                        f->plane.curve->lines.n, f->plane.curve->marks.n);
}

static void put_picture(struct picture *f, const char *title)
{
    struct html *h = f->html;
    const char *x = curve_x_words(&h->page, &f->plane.x);
    const char *y = curve_y_words(&h->page, &f->plane.y);
    struct lines above = page_wrap(&h->page, y, WORDS_COLUMNS);
    measure(f, *y ? above.n : 0);
    x = curve_x_words(&h->page, &f->plane.x); /* the ticks have chosen its unit */
    struct lines below = page_wrap(&h->page, x, WORDS_COLUMNS);
    double bottom = f->top + PLANE_HEIGHT, words = *x ? (double)below.n * SVG_LINE : 0;
    html_open_scroll(h, "picture", title, true);
    svg_open(h, (int)(bottom + 28 + words), title, words_of(f, x, y));
    put_words(f, &above, 0, SVG_FONT, "start");
    put_axes(f);
    const struct curve *c = f->plane.curve;
    for (size_t i = 0; i < c->marks.n; i++)
        if (has_place(c, c->marks.at[i].x, c->marks.at[i].y))
            keep_mark(f, &c->marks.at[i]);
    for (size_t i = 0; i < c->lines.n; i++)
        put_line(f, i);
    if (f->plane.manner == CURVE_SYMBOLS)
        put_symbols(f);
    put_marks(f);
    put_words(f, &below, f->left + f->width / 2, bottom + 20 + SVG_LINE + 3, "middle");
    html_raw(h, "</svg>\n</div>\n");
}

static const char *sign_of(struct html *h, const struct curve_plane *g, size_t i)
{
    if (g->empty)
        return "";
    return svg_sample(h, arena_printf(h->page.arena, "line %s", svg_line_class(h, i)),
                      g->manner == CURVE_SYMBOLS ? g->symbols[i] : "");
}

static void put_key(struct html *h, const struct curve_plane *g)
{
    const struct curve *c = g->curve;
    struct arena *a = h->page.arena;
    const char **lines = NEW_ARRAY(a, c->lines.n, const char *);
    const char **marks = NEW_ARRAY(a, c->marks.n, const char *);
    for (size_t i = 0; i < c->lines.n; i++)
        lines[i] = sign_of(h, g, i);
    for (size_t i = 0; i < c->marks.n; i++)
        marks[i] = svg_mark_sample(h, SVG_DISC);
    if (c->lines.n)
        html_table(h, curve_key_lines(&h->page, g), NULL, NULL, lines);
    if (c->marks.n)
        html_table(h, curve_key_marks(&h->page, g), NULL, NULL, marks);
    struct lines remarks = curve_key_remarks(&h->page, g);
    for (size_t i = 0; i < remarks.n; i++)
        html_remark(h, remarks.at[i], NULL);
}

static void put_content(struct html *h, const struct block *b)
{
    struct picture f = {.html = h, .plane = {.page = &h->page, .curve = b->curve}};
    if (b->curve->lines.n == 0 && b->curve->marks.n == 0) {
        html_raw(h, "<p>(no points)</p>\n");
        return;
    }
    curve_plane_range(&f.plane);
    if (!f.plane.empty)
        put_picture(&f, html_picture_title(h, b));
    put_key(h, &f.plane);
}

void html_curve(struct html *h, const struct block *b, const char *id)
{
    html_open_figure(h, b, id);
    put_content(h, b);
    html_raw(h, "</figure>\n");
}
