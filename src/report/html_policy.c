/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A policy as a picture: a box for each condition and time, with the letter and the shade of its
 * action, and at its foot a bar as long as it is probable to be there. Boxes that are not reached
 * are dashed and without a shade. Times that find no room are joined or go on below, as in the
 * text. Owns nothing. */
#include <math.h>

#include "base/utf8.h"
#include "report/html_svg.h"
#include "report/policy_plane.h"

enum {
    LABEL_COLUMNS = 26,
    EDGE = 6,
    BETWEEN = 12, /* conditions and boxes; bands */
    LEAST_BOX = 20,
    WIDEST_BOX = 72,
    NUMBER_BOX = 46, /* a box this wide has its probability beside its bar */
    LEAST_ROW = 28,
    NUMBER_ROW = 36,
    GAP = 2, /* between boxes */
    BAR = 3,
    ASLANT = 45 /* degrees of times that are wider than their boxes */
};

struct picture {
    struct html *html;
    struct policy_plane plane;
    struct policy_spans columns;
    struct lines *labels; /* of the conditions */
    double left, box;     /* where boxes begin, how wide they are */
    size_t across;        /* boxes beside each other */
    double head;          /* height of the times above them */
    bool joined, numbers;
};

/* --- measuring --- */

static double row_height(const struct picture *f, size_t i)
{
    double words = (double)f->labels[i].n * SVG_LINE + 2 * GAP;
    return fmax(words, f->numbers ? NUMBER_ROW : LEAST_ROW);
}

static double band_height(const struct picture *f)
{
    double height = f->head;
    for (size_t i = 0; i < f->plane.policy->conditions.n; i++)
        height += row_height(f, i);
    return height + BETWEEN;
}

static void find_labels(struct picture *f)
{
    const struct policy *o = f->plane.policy;
    const struct page *p = &f->html->page;
    f->labels = NEW_ARRAY(p->arena, o->conditions.n, struct lines);
    for (size_t i = 0; i < o->conditions.n; i++) {
        f->labels[i] = page_wrap(p, page_clean(p, o->conditions.at[i]), LABEL_COLUMNS);
        for (size_t k = 0; k < f->labels[i].n; k++)
            f->left = fmax(f->left, svg_text_width(f->labels[i].at[k]));
    }
    f->left += EDGE + BETWEEN;
}

static bool is_aslant(const struct picture *f, const char *time)
{
    return svg_text_width(time) > f->box;
}

static double half_root(void)
{
    return sqrt(0.5);
}

static void measure_head(struct picture *f)
{
    f->head = SVG_LINE + GAP;
    for (size_t j = 0; j < f->columns.n; j++) {
        const char *time = policy_time(&f->plane, &f->columns.at[j]);
        if (is_aslant(f, time))
            f->head = fmax(f->head, (svg_text_width(time) + SVG_FONT) * half_root() + GAP);
    }
}

static void measure(struct picture *f)
{
    find_labels(f);
    double room = SVG_WIDTH - EDGE - f->left;
    f->columns = policy_columns(&f->plane, false);
    if (room / (double)f->columns.n < LEAST_BOX) {
        f->columns = policy_columns(&f->plane, true);
        f->joined = true;
    }
    f->across = f->columns.n;
    if (room / (double)f->across < LEAST_BOX)
        f->across = (size_t)(room / LEAST_BOX);
    f->box = fmin(floor(room / (double)f->across), WIDEST_BOX);
    f->numbers = !f->joined && f->box >= NUMBER_BOX;
    measure_head(f);
}

/* --- drawing --- */

static const char *class_of(const struct picture *f, size_t action)
{
    const struct policy *o = f->plane.policy;
    size_t shade = 0;
    if (o->actions.at[action].nothing)
        return "cell";
    for (size_t i = 0; i < action; i++)
        shade += !o->actions.at[i].nothing;
    return svg_shade_class(f->html, shade);
}

/* What a box tells where a pointer rests on it. */
static const char *words_of(const struct picture *f, size_t condition, const struct policy_span *s,
                            const struct policy_cell *c)
{
    char number[32];
    const struct policy *o = f->plane.policy;
    const char *time = policy_time(&f->plane, s), *action = "no action";
    if (c->action != POLICY_NONE)
        action = o->actions.at[c->action].name;
    const char *words =
        arena_printf(f->html->page.arena, "%s, %s: %s", o->conditions.at[condition], time, action);
    if (s->until - s->from > 1)
        return words;
    return arena_printf(f->html->page.arena, "%s; reached with %s%s%s", words,
                        number_text(number, c->reach, STYLE_PROBABILITY), c->figure ? "; " : "",
                        c->figure ? c->figure : "");
}

/* The sign, and below it the bar of the reach, with its number where there is room. */
static void put_reached(struct picture *f, const struct policy_cell *c, double x, double y,
                        double height)
{
    struct html *h = f->html;
    char number[32];
    double width = f->box - GAP, middle = x + width / 2;
    if (c->action != POLICY_NONE)
        svg_box(h, class_of(f, c->action), x, y, width, height);
    double base = y + (f->numbers ? 1.2 * SVG_FONT : height / 2 + 0.3 * SVG_FONT);
    svg_text(h, "letter", middle, base, "middle", policy_sign(&f->plane, c));
    if (f->numbers)
        svg_text(h, "small", middle, base + SVG_FONT, "middle",
                 number_text(number, c->reach, STYLE_PROBABILITY));
    if (!f->joined)
        svg_box(h, "head", x, y + height - BAR, width * fmin(c->reach, 1), BAR);
}

static void put_box(struct picture *f, size_t condition, size_t column, double x, double y)
{
    struct html *h = f->html;
    const struct policy_span *s = &f->columns.at[column];
    struct policy_cell c = policy_cell_at(f->plane.policy, condition, s->from);
    double height = row_height(f, condition) - GAP;
    const char *sign = policy_sign(&f->plane, &c);
    if (!*sign)
        return;
    html_raw(h, "<g");
    if (c.figure && s->until - s->from == 1)
        html_attribute(h, "data-figure", c.figure);
    html_raw(h, "><title>");
    html_bare_text(h, words_of(f, condition, s, &c));
    html_raw(h, "</title>\n");
    if (c.reach > 0) {
        put_reached(f, &c, x, y, height);
    } else {
        svg_box(h, "unreached", x, y, f->box - GAP, height);
        svg_text(h, "small", x + (f->box - GAP) / 2, y + height / 2 + 0.36 * SVG_FONT, "middle",
                 arena_printf(h->page.arena, "(%s)", sign));
    }
    html_raw(h, "</g>\n");
}

static void put_time(struct picture *f, size_t column, double x, double bottom)
{
    const char *time = policy_time(&f->plane, &f->columns.at[column]);
    double middle = x + (f->box - GAP) / 2, way = svg_text_width(time) / 2 * half_root();
    if (is_aslant(f, time))
        svg_text_aslant(f->html, "tick", middle + way, bottom - way, ASLANT, time);
    else
        svg_text(f->html, "tick", middle, bottom - GAP, "middle", time);
}

static void put_condition(struct picture *f, size_t i, double y)
{
    const struct lines *l = &f->labels[i];
    double middle = y + row_height(f, i) / 2 - ((double)l->n - 1) * SVG_LINE / 2;
    for (size_t k = 0; k < l->n; k++)
        svg_text(f->html, "tick", f->left - BETWEEN,
                 middle + 0.36 * SVG_FONT + (double)k * SVG_LINE, "end", l->at[k]);
}

/* The columns from `first` on, as many as stand beside each other. */
static void put_band(struct picture *f, size_t first, double top)
{
    size_t end = first + f->across < f->columns.n ? first + f->across : f->columns.n;
    for (size_t j = first; j < end; j++)
        put_time(f, j, f->left + (double)(j - first) * f->box, top + f->head);
    double y = top + f->head;
    for (size_t i = 0; i < f->plane.policy->conditions.n; y += row_height(f, i++)) {
        put_condition(f, i, y);
        for (size_t j = first; j < end; j++)
            put_box(f, i, j, f->left + (double)(j - first) * f->box, y);
    }
}

static void put_picture(struct picture *f, const char *title)
{
    struct html *h = f->html;
    const struct policy *o = f->plane.policy;
    measure(f);
    size_t bands = (f->columns.n + f->across - 1) / f->across;
    html_open_scroll(h, "picture", title, true);
    svg_open(
        h, (int)ceil((double)bands * band_height(f)), title,
        arena_printf(h->page.arena,
                     "Downwards %zu conditions, to the right %zu times; in each box the letter "
                     "of an action. The tables below tell them.",
                     o->conditions.n, o->times.n));
    for (size_t k = 0; k < bands; k++)
        put_band(f, k * f->across, (double)k * band_height(f));
    html_raw(h, "</svg>\n</div>\n");
}

/* --- below it --- */

static void put_key(struct picture *f)
{
    struct html *h = f->html;
    const struct policy *o = f->plane.policy;
    struct lines remarks = policy_remarks(&f->plane);
    const char **signs = NEW_ARRAY(h->page.arena, o->actions.n, const char *);
    for (size_t i = 0; i < o->actions.n; i++)
        signs[i] = svg_box_sample(h, class_of(f, i), f->plane.signs[i]);
    if (!f->joined)
        html_remark(h, "Bar at the foot of a box: the probability of being there.", NULL);
    for (size_t i = 0; i < remarks.n; i++)
        html_remark(h, remarks.at[i], NULL);
    if (o->actions.n)
        html_table(h, policy_key(&f->plane), NULL, NULL, signs);
}

void html_policy(struct html *h, const struct block *b, const char *id)
{
    struct picture f = {.html = h};
    html_open_figure(h, b, id);
    if (policy_is_whole(b->policy)) {
        policy_open(&f.plane, &h->page, b->policy);
        put_picture(&f, html_picture_title(h, b));
        put_key(&f);
        html_table(h, policy_runs(&f.plane), NULL, NULL, NULL);
    } else {
        html_raw(h, "<p>(no cells)</p>\n");
    }
    html_raw(h, "</figure>\n");
}
