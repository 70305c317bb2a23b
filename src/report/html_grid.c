/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The iso-risk grid as a picture: decades are squares, so that lines of equal risk fall at
 * 45 degrees. Decades, words and the key are those of the text grid; places are exact
 * here, so marks stand at their very point. Owns nothing.
 * Invariant: every mark is in the picture or named below it, and no label covers a mark
 * or another label. Parts of marks cover no whole one and no label. */
#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "math/elementary.h"
#include "report/grid_key.h"
#include "report/grid_words.h"
#include "report/html_svg.h"

enum {
    TOP = 26,            /* above the plane: the head of the axis */
    BELOW = 44,          /* below: amounts of damage and of risk */
    WIDEST_DECADE = 180, /* of the plane, in the picture's unit */
    HIGHEST_PLANE = 450,
    WIDEST_CURRENCY = 5, /* columns; a longer name is left to the key */
    ONE_PLACE = 7,       /* marks as near as this share a sign */
    USUAL_COLUMNS = 60   /* of a text grid, by which the decades are chosen */
};

struct picture {
    struct html *html;
    struct grid_plane plane;
    const char *currency; /* clean; "" when too long for the axes */
    double left, size;    /* of the plane's left edge; of a decade */
    double width, height; /* of the plane */
    struct place_box *at; /* of each mark: its centre */
    struct places places;
};

static const struct page *page_of(const struct picture *f)
{
    return &f->html->page;
}

/* --- measures --- */

static const char *risk_unit(const struct picture *f)
{
    return *f->currency ? arena_printf(page_of(f)->arena, "%s/a", f->currency) : "";
}

static const char *risk_words(const struct picture *f, int k)
{
    return grid_amount_of_power(page_of(f), k, risk_unit(f));
}

static double widest_frequency(const struct picture *f)
{
    double widest = 0;
    for (int k = f->plane.frequency_low; k <= f->plane.frequency_high; k++)
        widest = fmax(widest, svg_text_width(grid_period_of_power(page_of(f), k)) +
                                  svg_text_width(grid_power_text(page_of(f), k)));
    return widest + 26;
}

/* Of the lines of risk from 10^from to 10^to. */
static double widest_risk(const struct picture *f, int from, int to)
{
    double widest = 0;
    for (int k = from; k <= to; k++)
        widest = fmax(widest, svg_text_width(risk_words(f, k)));
    return widest;
}

static void choose_decades(struct picture *f)
{
    struct grid_plane *g = &f->plane;
    grid_plane_range(g);
    if (g->n_placed == 0)
        return;
    do
        grid_plane_size(g, USUAL_COLUMNS);
    while (grid_plane_widen(g));
}

static void measure(struct picture *f)
{
    const struct grid_plane *g = &f->plane;
    int across = g->damage_high - g->damage_low, up = g->frequency_high - g->frequency_low;
    f->currency = page_clean(page_of(f), g->grid->currency);
    if (utf8_columns(f->currency) > WIDEST_CURRENCY)
        f->currency = "";
    f->left = fmax(widest_frequency(f),
                   svg_text_width(arena_printf(page_of(f)->arena, "damage, %s", f->currency)) + 22);
    int low = g->frequency_low + g->damage_high, high = g->frequency_high + g->damage_high;
    double room = SVG_WIDTH - f->left - widest_risk(f, low, high) - 14;
    f->size = floor(fmin(fmin(room / across, HIGHEST_PLANE / up), WIDEST_DECADE));
    f->width = f->size * across;
    f->height = f->size * up;
    f->places = (struct places){.arena = page_of(f)->arena,
                                .bounds = {f->left + 2, TOP + 2, f->width - 4, f->height - 4}};
}

static double clamp(double x, double least, double most)
{
    return x < least ? least : x > most ? most : x;
}

static void find_places(struct picture *f)
{
    struct grid_plane *g = &f->plane;
    f->at = NEW_ARRAY(page_of(f)->arena, g->grid->marks.n, struct place_box);
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        const struct grid_mark *m = &g->grid->marks.at[i];
        struct grid_spot *s = &g->spots[i];
        if (!s->placed)
            continue;
        double x = (math_log10(m->damage) - g->damage_low) * f->size;
        double y = (g->frequency_high - math_log10(m->frequency)) * f->size;
        f->at[i].x = f->left + clamp(x, 0, f->width);
        f->at[i].y = TOP + clamp(y, 0, f->height);
        s->clamped = x < -0.5 || x > f->width + 0.5 || y < -0.5 || y > f->height + 0.5;
    }
}

/* Marks that would cover each other join the first of them. */
static void find_company(struct picture *f)
{
    struct grid_plane *g = &f->plane;
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        struct grid_spot *s = &g->spots[i];
        s->first = i;
        for (size_t k = i; s->placed && k-- > 0;) {
            bool near = fabs(f->at[k].x - f->at[i].x) < ONE_PLACE &&
                        fabs(f->at[k].y - f->at[i].y) < ONE_PLACE;
            bool alike = grid_is_part(g->grid, k) == grid_is_part(g->grid, i);
            if (g->spots[k].placed && g->spots[k].first == k && near && alike)
                s->first = k;
        }
        if (s->placed)
            g->spots[s->first].company++;
    }
}

/* --- axes --- */

static void put_frequencies(struct picture *f)
{
    const struct grid_plane *g = &f->plane;
    svg_text(f->html, "axis", 0, SVG_FONT, "start", "frequency, per year");
    for (int k = g->frequency_low; k <= g->frequency_high; k++) {
        double y = TOP + (g->frequency_high - k) * f->size, base = y + 0.36 * SVG_FONT;
        const char *power = grid_power_text(page_of(f), k);
        svg_line(f->html, "rule", f->left - 5, y, f->left, y);
        svg_text(f->html, "tick", f->left - 9, base, "end", power);
        svg_text(f->html, "tick", f->left - 19 - svg_text_width(power), base, "end",
                 grid_period_of_power(page_of(f), k));
    }
}

static int steps_between(const struct picture *f, double widest)
{
    return 1 + (int)((widest + 8) / f->size);
}

static void put_damages(struct picture *f)
{
    const struct grid_plane *g = &f->plane;
    double widest = 0, y = TOP + f->height;
    for (int k = g->damage_low; k <= g->damage_high; k++)
        widest = fmax(widest, svg_text_width(grid_amount_of_power(page_of(f), k, "")));
    int step = steps_between(f, widest), across = g->damage_high - g->damage_low;
    svg_text(
        f->html, "axis", 0, y + 20, "start",
        arena_printf(page_of(f)->arena, *f->currency ? "damage, %s" : "damage%s", f->currency));
    for (int k = 0; k <= across; k++) {
        double x = f->left + k * f->size;
        svg_line(f->html, "rule", x, y, x, y + 5);
        if (k % step == 0)
            svg_text(f->html, "tick", x, y + 20, "middle",
                     grid_amount_of_power(page_of(f), g->damage_low + k, ""));
    }
}

/* Lines of equal risk end at the right edge or below, and are labelled there. */
static void put_decade_of_risk(struct picture *f, int k, int step)
{
    const struct grid_plane *g = &f->plane;
    int start = k - g->frequency_high - g->damage_low;
    double c = start * f->size, from = fmax(0, -c), to = fmin(f->height, f->width - c);
    svg_line(f->html, "risk", f->left + c + from, TOP + from, f->left + c + to, TOP + to);
    if (c + f->height >= f->width)
        svg_text(f->html, "tick", f->left + f->width + 7, TOP + to + 0.36 * SVG_FONT, "start",
                 risk_words(f, k));
    else if ((k - g->frequency_low - g->damage_low) % step == 0)
        svg_text(f->html, "tick", f->left + c + to, TOP + f->height + 38, "middle",
                 risk_words(f, k));
}

static void put_risks(struct picture *f)
{
    const struct grid_plane *g = &f->plane;
    int low = g->frequency_low + g->damage_low, high = g->frequency_high + g->damage_high;
    int step = steps_between(f, widest_risk(f, low + 1, g->frequency_low + g->damage_high - 1));
    svg_text(f->html, "axis", 0, TOP + f->height + 38, "start", "equal risk");
    for (int k = low + 1; k < high; k++)
        put_decade_of_risk(f, k, step);
}

static void put_axes(struct picture *f)
{
    put_risks(f);
    put_frequencies(f);
    put_damages(f);
    svg_line(f->html, "rule", f->left, TOP, f->left, TOP + f->height);
    svg_line(f->html, "rule", f->left, TOP + f->height, f->left + f->width, TOP + f->height);
}

/* --- criteria --- */

/* The part of a falling line within the plane, by its distance below the top. */
struct fall {
    double c, from, to;
};

/* Boxes along a text aslant whose middle is `down` below the top. */
static bool is_free_along(const struct picture *f, const struct fall *l, double down, double width)
{
    for (double t = -width / 2; t <= width / 2; t += SVG_FONT) {
        double y = TOP + down + t * 0.7071 - 7, x = f->left + l->c + down + t * 0.7071 + 7;
        if (!place_is_free(&f->places, (struct place_box){x - 8, y - 8, 16, 16}))
            return false;
    }
    return true;
}

static void keep_along(struct picture *f, const struct fall *l, double down, double width)
{
    for (double t = -width / 2; t <= width / 2; t += SVG_FONT) {
        double y = TOP + down + t * 0.7071 - 7, x = f->left + l->c + down + t * 0.7071 + 7;
        place_add_box(&f->places, x - 8, y - 8, 16, 16);
    }
}

static bool put_line_name(struct picture *f, const struct fall *l, const char *name)
{
    double width = svg_text_width(name), half = width / 2 * 0.7071 + 6;
    for (double down = l->from + half; down <= l->to - half; down += 12) {
        if (!is_free_along(f, l, down, width))
            continue;
        svg_text_aslant(f->html, "label", f->left + l->c + down + 4, TOP + down - 4, -45, name);
        keep_along(f, l, down, width);
        return true;
    }
    return false;
}

static void put_line(struct picture *f, size_t i)
{
    const struct grid_plane *g = &f->plane;
    double k = math_log10(g->grid->lines.at[i].risk);
    struct fall l = {.c = (k - g->frequency_high - g->damage_low) * f->size};
    l.from = fmax(0, -l.c);
    l.to = fmin(f->height, f->width - l.c);
    if (l.from >= l.to)
        return;
    svg_line(f->html, svg_line_class(f->html, i), f->left + l.c + l.from, TOP + l.from,
             f->left + l.c + l.to, TOP + l.to);
    if (!put_line_name(f, &l, grid_key_line(g, i)))
        put_line_name(f, &l, g->symbols[i]);
    place_add_stroke(&f->places, f->left + l.c + l.from, TOP + l.from, f->left + l.c + l.to,
                     TOP + l.to);
}

/* --- arrows --- */

static void put_arrow(struct picture *f, struct place_box a, struct place_box b)
{
    double x = b.x - a.x, y = b.y - a.y, way = sqrt(x * x + y * y);
    if (way < 4 * SVG_MARK)
        return; /* no room between the marks; the list of arrows tells */
    double dx = x / way, dy = y / way, head = SVG_MARK + 2, neck = head + 9;
    char p[6][32];
    svg_line(f->html, "arrow", a.x + dx * SVG_MARK, a.y + dy * SVG_MARK, b.x - dx * neck,
             b.y - dy * neck);
    text_printf(
        f->html->out, "<path class=\"head\" d=\"M%s %sL%s %sL%s %sZ\"/>\n",
        svg_length(p[0], b.x - dx * head), svg_length(p[1], b.y - dy * head),
        svg_length(p[2], b.x - dx * neck - dy * 4), svg_length(p[3], b.y - dy * neck + dx * 4),
        svg_length(p[4], b.x - dx * neck + dy * 4), svg_length(p[5], b.y - dy * neck - dx * 4));
    place_add_stroke(&f->places, a.x, a.y, b.x, b.y);
}

/* Whether an arrow before number i joins the same places. */
static bool is_drawn(const struct grid_plane *g, size_t i)
{
    const struct grid_mark *marks = g->grid->marks.at;
    const struct grid_spot *s = g->spots;
    for (size_t k = 0; k < i; k++) {
        int from = marks[k].arrow_from;
        if (from >= 0 && s[k].placed && s[from].placed && s[k].first == s[i].first &&
            s[from].first == s[marks[i].arrow_from].first)
            return true;
    }
    return false;
}

static void put_arrows(struct picture *f)
{
    const struct grid_plane *g = &f->plane;
    for (size_t i = 0; i < g->grid->marks.n; i++) {
        int from = g->grid->marks.at[i].arrow_from;
        if (from >= 0 && g->spots[i].placed && g->spots[from].placed && !is_drawn(g, i))
            put_arrow(f, f->at[g->spots[from].first], f->at[g->spots[i].first]);
    }
}

/* --- marks --- */

static enum svg_shape shape_of(const struct grid_plane *g, size_t i)
{
    if (grid_is_part(g->grid, i))
        return g->spots[i].company > 1 ? SVG_PARTS : SVG_PART;
    if (g->spots[i].company > 1)
        return SVG_DIAMOND;
    return g->grid->marks.at[i].arrow_from >= 0 ? SVG_RING : SVG_DISC;
}

static bool is_first(const struct grid_plane *g, size_t i)
{
    return g->spots[i].placed && g->spots[i].first == i;
}

static bool is_first_whole(const struct grid_plane *g, size_t i)
{
    return is_first(g, i) && !grid_is_part(g->grid, i);
}

/* The first n labels of a place, and a sign that there are more: "6, 7 ..". */
static const char *joined(const struct picture *f, size_t first, size_t n)
{
    const struct grid_plane *g = &f->plane;
    struct text t;
    text_init(&t, page_of(f)->arena);
    size_t left = n;
    for (size_t i = first; left > 0 && i < g->grid->marks.n; i++) {
        if (!g->spots[i].placed || g->spots[i].first != first)
            continue;
        text_printf(&t, "%s%s", t.n ? ", " : "",
                    page_clean(page_of(f), g->grid->marks.at[i].label));
        left--;
    }
    if (n < g->spots[first].company)
        text_add(&t, " ..");
    return text_str(&t);
}

static void put_mark_label(struct picture *f, size_t i)
{
    struct grid_spot *s = &f->plane.spots[i];
    for (size_t n = s->company; n > 0 && !s->labelled; n--) {
        const char *label = joined(f, i, n);
        struct place_box at;
        double width = svg_text_width(label) + 4;
        if (*label && width < f->width / 2 &&
            place_label(&f->places, f->at[i].x, f->at[i].y, SVG_MARK + 2, width, SVG_FONT + 2,
                        &at)) {
            svg_label(f->html, label, &at, f->at[i].x, f->at[i].y);
            s->labelled = true;
        }
    }
}

static void keep_marks(struct picture *f)
{
    double r = SVG_MARK + 1;
    for (size_t i = 0; i < f->plane.grid->marks.n; i++)
        if (is_first_whole(&f->plane, i))
            place_add_box(&f->places, f->at[i].x - r, f->at[i].y - r, 2 * r, 2 * r);
}

static void put_mark(struct picture *f, size_t i)
{
    const struct grid_plane *g = &f->plane;
    const char *all = joined(f, i, g->spots[i].company);
    const char *name = page_clean(page_of(f), g->grid->marks.at[i].name);
    bool alone = g->spots[i].company == 1;
    svg_mark(f->html, shape_of(g, i), f->at[i].x, f->at[i].y,
             alone ? arena_printf(page_of(f)->arena, "%s: %s", all, name) : all);
}

/* A part has its own place free of whole marks and labels, and a label, or it is left out. */
static void put_part(struct picture *f, size_t i)
{
    double r = SVG_PART_MARK + 1;
    struct place_box own = {f->at[i].x - r, f->at[i].y - r, 2 * r, 2 * r};
    size_t n = f->places.boxes.n;
    if (!place_is_free(&f->places, own))
        return;
    place_add_box(&f->places, own.x, own.y, own.width, own.height);
    put_mark_label(f, i);
    if (f->plane.spots[i].labelled)
        put_mark(f, i);
    else
        f->places.boxes.n = n;
}

static void put_marks(struct picture *f)
{
    const struct grid_plane *g = &f->plane;
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (is_first_whole(g, i))
            put_mark(f, i);
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (is_first_whole(g, i))
            put_mark_label(f, i);
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (is_first(g, i) && grid_is_part(g->grid, i))
            put_part(f, i);
}

/* --- the picture and what is below --- */

static const char *words_of(const struct picture *f)
{
    const struct grid_plane *g = &f->plane;
    const struct page *p = page_of(f);
    return arena_printf(
        p->arena,
        "Both axes are logarithmic. Damage to the right, %s to %s; frequency upwards, %s to %s; "
        "lines of equal risk fall from left to right. Marks: %zu. The table below has their "
        "numbers.",
        grid_amount_of_power(p, g->damage_low, f->currency),
        grid_amount_of_power(p, g->damage_high, f->currency),
        grid_period_of_power(p, g->frequency_low), grid_period_of_power(p, g->frequency_high),
        g->n_placed);
}

static void put_picture(struct picture *f, const char *title)
{
    measure(f);
    find_places(f);
    find_company(f);
    grid_choose_symbols(&f->plane);
    html_open_scroll(f->html, "picture", title, true);
    svg_open(f->html, (int)f->height + TOP + BELOW, title, words_of(f));
    put_axes(f);
    keep_marks(f);
    for (size_t i = 0; i < f->plane.grid->lines.n; i++)
        put_line(f, i);
    put_arrows(f);
    put_marks(f);
    html_raw(f->html, "</svg>\n</div>\n");
}

static void put_sign(struct html *h, const char *sample, const char *words)
{
    text_printf(h->out, "<li>%s ", sample);
    html_text(h, words);
    html_raw(h, "</li>\n");
}

static void put_shapes(struct html *h, const struct grid_plane *g)
{
    const char *const words[] = {
        grid_key_wholes(g), "a mark that an arrow leads to", "marks at one place",
        grid_key_parts(g),
        arena_printf(h->page.arena, "several at one place: %s", grid_key_parts(g))};
    bool seen[sizeof words / sizeof *words] = {0};
    for (size_t i = 0; i < g->grid->marks.n; i++)
        if (is_first(g, i) && (!grid_is_part(g->grid, i) || g->spots[i].labelled))
            seen[shape_of(g, i)] = true;
    for (int k = SVG_DISC; k <= SVG_PARTS; k++)
        if (seen[k])
            put_sign(h, svg_mark_sample(h, (enum svg_shape)k), words[k]);
}

static void put_signs(struct html *h, const struct grid_plane *g)
{
    html_raw(h, "<ul class=\"key\">\n");
    for (size_t i = 0; i < g->grid->lines.n; i++)
        put_sign(h, svg_sample(h, svg_line_class(h, i), g->symbols[i]), grid_key_line(g, i));
    put_sign(h, svg_sample(h, "risk", ""), GRID_KEY_DECADES);
    put_shapes(h, g);
    html_raw(h, "</ul>\n");
}

static void put_key(struct html *h, const struct grid_plane *g)
{
    if (g->grid->marks.n == 0) {
        html_raw(h, "<p>(no marks)</p>\n");
        return;
    }
    if (g->n_placed)
        put_signs(h, g);
    html_table(h, grid_key_marks(&h->page, g->grid), NULL, NULL, NULL);
    struct lines remarks = grid_key_remarks(g);
    for (size_t i = 0; i < remarks.n; i++)
        html_remark(h, remarks.at[i], NULL);
}

void html_grid(struct html *h, const struct block *b, const char *id)
{
    const char *title = html_picture_title(h, b);
    struct picture f = {.html = h, .plane = {.page = &h->page, .grid = b->grid}};
    html_open_figure(h, b, id);
    choose_decades(&f);
    if (f.plane.n_placed)
        put_picture(&f, title);
    put_key(h, &f.plane);
    html_raw(h, "</figure>\n");
}
