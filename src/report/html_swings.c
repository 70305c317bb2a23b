/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Swings as a picture. Each row has two bars that begin at the line of today: above, hollow,
 * to the result with the input at its low end; below, filled, to that at its high end. So
 * they tell themselves apart by place and fill, on whichever sides they are. Owns nothing.
 * Invariant: a bar of any change has a width that is seen. */
#include <math.h>

#include "base/utf8.h"
#include "report/html_svg.h"
#include "report/swings.h"

enum {
    LABEL_COLUMNS = 26,
    UNIT_OF_TICKS = 8, /* a column of the text's ticks, in the picture's unit */
    TOP = 24,
    RIGHT = 30, /* for the half of the last tick's label, and a mark */
    LEFT = 16,  /* between labels and bars: for a mark */
    BAR = 8,
    ROW_GAP = 10,
    WORDS_COLUMNS = 88
};

static const double LEAST_WIDTH = 2.5; /* of the bar of a very small change */

struct picture {
    struct html *html;
    struct swings_plane plane;
    double left, width, height;
    struct lines *labels; /* one a row */
};

static double x_at(const struct picture *f, double value)
{
    const struct curve_scale *s = &f->plane.scale;
    return f->left + curve_place(s, value) / s->cells * f->width;
}

static double row_height(const struct picture *f, size_t i)
{
    return fmax((double)f->labels[i].n * SVG_LINE, 2 * BAR) + ROW_GAP;
}

static void measure(struct picture *f, const struct swings *s)
{
    const struct page *p = &f->html->page;
    f->labels = NEW_ARRAY(p->arena, s->rows.n, struct lines);
    for (size_t i = 0; i < s->rows.n; i++) {
        f->labels[i] = page_wrap(p, page_clean(p, s->rows.at[i].label), LABEL_COLUMNS);
        for (size_t k = 0; k < f->labels[i].n; k++)
            f->left = fmax(f->left, svg_text_width(f->labels[i].at[k]));
        f->height += row_height(f, i);
    }
    f->left += LEFT;
    f->width = SVG_WIDTH - RIGHT - f->left;
    swings_open(&f->plane, p, s, (int)(f->width / UNIT_OF_TICKS));
}

static void put_axis(struct picture *f)
{
    double bottom = TOP + f->height;
    for (size_t i = 0; i < f->plane.scale.ticks.n; i++) {
        const struct curve_tick *t = &f->plane.scale.ticks.at[i];
        double x = x_at(f, t->value);
        svg_line(f->html, "faint", x, TOP, x, bottom);
        svg_line(f->html, "rule", x, bottom, x, bottom + 5);
        svg_text(f->html, "tick", x, bottom + 20, "middle", t->label);
    }
    svg_line(f->html, "rule", f->left, bottom, f->left + f->width, bottom);
}

/* The mark of an end stands beyond it. */
static void put_bar(struct picture *f, const char *class, double end, double y, bool turns)
{
    double today = f->plane.swings->today;
    double from = x_at(f, today), to = x_at(f, end);
    bool right = end > today;
    if (end != today) {
        double width = fmax(fabs(to - from), LEAST_WIDTH);
        svg_box(f->html, class, right ? from : from - width, y, width, BAR);
    }
    if (turns)
        svg_text(f->html, "turn", right ? to + 4 : to - 4, y + BAR, right ? "start" : "end",
                 SWINGS_TURNS);
}

static void put_row(struct picture *f, size_t i, double y)
{
    const struct swing *s = &f->plane.swings->rows.at[i];
    double middle = y + row_height(f, i) / 2;
    double base = middle - ((double)f->labels[i].n - 1) * SVG_LINE / 2 + 0.36 * SVG_FONT;
    for (size_t k = 0; k < f->labels[i].n; k++)
        svg_text(f->html, "tick", f->left - LEFT, base + (double)k * SVG_LINE, "end",
                 f->labels[i].at[k]);
    put_bar(f, "hollow", s->low, middle - BAR, s->low_turns);
    put_bar(f, "solid", s->high, middle, s->high_turns);
}

static void put_today(struct picture *f)
{
    const char *words = swings_today(&f->plane);
    double x = x_at(f, f->plane.swings->today), half = svg_text_width(words) / 2;
    double at = fmin(fmax(x, half), SVG_WIDTH - half);
    svg_line(f->html, "today", x, TOP - 6, x, TOP + f->height);
    svg_text(f->html, "label", at, TOP - 10, "middle", words);
}

static const char *words_of(const struct picture *f)
{
    return arena_printf(f->html->page.arena,
                        "Bars from a line at the result of today, two for each of %zu inputs: "
                        "above, hollow, %s; below, filled, %s. The table below has the numbers.",
                        f->plane.swings->rows.n, SWINGS_LOW_WORDS, SWINGS_HIGH_WORDS);
}

static void put_picture(struct picture *f, const struct swings *s, const char *title)
{
    struct html *h = f->html;
    measure(f, s);
    struct lines below =
        page_wrap(&h->page, curve_x_words(&h->page, &f->plane.scale), WORDS_COLUMNS);
    double bottom = TOP + f->height;
    html_open_scroll(h, "picture", title, true);
    svg_open(h, (int)(bottom + 28 + (double)below.n * SVG_LINE), title, words_of(f));
    put_axis(f);
    double y = TOP;
    for (size_t i = 0; i < s->rows.n; i++) {
        put_row(f, i, y);
        y += row_height(f, i);
    }
    put_today(f);
    for (size_t i = 0; i < below.n; i++)
        svg_text(h, "axis", f->left + f->width / 2, bottom + 38 + (double)i * SVG_LINE, "middle",
                 below.at[i]);
    html_raw(h, "</svg>\n</div>\n");
}

static void put_sign(struct html *h, const char *sample, const char *words)
{
    text_printf(h->out, "<li>%s ", sample);
    html_text(h, words);
    html_raw(h, "</li>\n");
}

static void put_key(struct picture *f)
{
    struct html *h = f->html;
    html_raw(h, "<ul class=\"key\">\n");
    put_sign(h, svg_box_sample(h, "hollow", ""), SWINGS_LOW_WORDS);
    put_sign(h, svg_box_sample(h, "solid", ""), SWINGS_HIGH_WORDS);
    if (swings_turn(f->plane.swings))
        put_sign(h, "<b>" SWINGS_TURNS "</b>", f->plane.swings->turns);
    html_raw(h, "</ul>\n");
}

void html_swings(struct html *h, const struct block *b, const char *id)
{
    struct picture f = {.html = h};
    const struct swings *s = b->swings;
    html_open_figure(h, b, id);
    if (s->rows.n) {
        put_picture(&f, s, html_picture_title(h, b));
        put_key(&f);
    } else {
        swings_open(&f.plane, &h->page, s, 1);
    }
    html_remark(h, swings_today(&f.plane), s->today_figure);
    if (s->rows.n)
        html_table(h, swings_table(&f.plane, false, false), NULL, NULL, NULL);
    else
        html_raw(h, "<p>(no inputs)</p>\n");
    html_raw(h, "</figure>\n");
}
