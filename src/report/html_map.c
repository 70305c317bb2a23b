/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A map as a picture: neighbours of one choice in a row are one rectangle, and a line parts
 * different choices. Areas have letters beside their shades. Owns nothing.
 * Invariant: each choice that has a cell has its letter in the picture. */
#include <math.h>

#include "report/html_svg.h"
#include "report/map_plane.h"

enum {
    PLANE_HEIGHT = 300,
    UNIT_OF_TICKS = 8, /* a column of the text's ticks, in the picture's unit */
    UNIT_UPWARDS = 5,  /* the same of the y axis, where a label is as high as a line */
    RIGHT = 26,        /* for the half of the last tick's label */
    WORDS_COLUMNS = 88,
    LETTER_ACROSS = 90, /* letters of one choice are this far apart */
    LETTER_ALONG = 60,
    TODAY_ACROSS = 55,
    TODAY_ALONG = 14,
    LETTER_ROOM = 24 /* a run this wide reads well with a letter in it */
};

struct letter {
    size_t choice;
    double x, y;
};

struct picture {
    struct html *html;
    struct map_plane plane;
    double left, top, width;
    ARRAY(struct letter) letters;
};

static double x_at(const struct picture *f, double place)
{
    return f->left + place * f->width;
}

static double y_at(const struct picture *f, double place)
{
    return f->top + (1 - place) * PLANE_HEIGHT;
}

static void measure(struct picture *f, size_t words)
{
    struct map_plane *g = &f->plane;
    struct arena *a = f->html->page.arena;
    map_tick(&g->y, PLANE_HEIGHT / UNIT_UPWARDS, a);
    for (size_t i = 0; i < g->y.scale.ticks.n; i++)
        f->left = fmax(f->left, svg_text_width(g->y.scale.ticks.at[i].label));
    f->left += 12;
    f->top = (double)words * SVG_LINE + 12;
    f->width = SVG_WIDTH - RIGHT - f->left;
    map_tick(&g->x, (int)(f->width / UNIT_OF_TICKS), a);
}

/* --- axes --- */

static void put_axes(struct picture *f)
{
    const struct map_plane *g = &f->plane;
    double bottom = f->top + PLANE_HEIGHT;
    for (size_t i = 0; i < g->y.scale.ticks.n; i++) {
        const struct curve_tick *t = &g->y.scale.ticks.at[i];
        double y = y_at(f, map_place(&g->y, t->value));
        svg_line(f->html, "rule", f->left - 5, y, f->left, y);
        svg_text(f->html, "tick", f->left - 8, y + 0.36 * SVG_FONT, "end", t->label);
    }
    for (size_t i = 0; i < g->x.scale.ticks.n; i++) {
        const struct curve_tick *t = &g->x.scale.ticks.at[i];
        double x = x_at(f, map_place(&g->x, t->value));
        svg_line(f->html, "rule", x, bottom, x, bottom + 5);
        svg_text(f->html, "tick", x, bottom + 20, "middle", t->label);
    }
    svg_line(f->html, "rule", f->left, f->top, f->left, bottom);
    svg_line(f->html, "rule", f->left, bottom, f->left + f->width, bottom);
}

static void put_words(struct picture *f, const struct lines *words, double x, double y,
                      const char *anchor)
{
    for (size_t i = 0; i < words->n; i++)
        svg_text(f->html, "axis", x, y + (double)i * SVG_LINE, anchor, words->at[i]);
}

/* --- areas --- */

static const char *class_of(struct html *h, const struct map *m, size_t choice)
{
    size_t shade = 0;
    if (m->choices.at[choice].nothing)
        return "bare";
    for (size_t i = 0; i < choice; i++)
        shade += !m->choices.at[i].nothing;
    return svg_shade_class(h, shade);
}

/* The first column of the row, from x on, that has another choice. */
static size_t run_end(const struct map_plane *g, size_t x, size_t y)
{
    size_t end = x + 1;
    while (end < g->x.n && map_choice_at(g, end, y) == map_choice_at(g, x, y))
        end++;
    return end;
}

static void put_runs(struct picture *f, size_t y)
{
    const struct map_plane *g = &f->plane;
    double top = y_at(f, map_edge(&g->y, y + 1)), bottom = y_at(f, map_edge(&g->y, y));
    for (size_t x = 0, end; x < g->x.n; x = end) {
        end = run_end(g, x, y);
        size_t choice = map_choice_at(g, x, y);
        double from = x_at(f, map_edge(&g->x, x)), to = x_at(f, map_edge(&g->x, end));
        if (!g->map->choices.at[choice].nothing)
            svg_box(f->html, class_of(f->html, g->map, choice), from, top, to - from, bottom - top);
        if (x > 0)
            svg_line(f->html, "edge", from, top, from, bottom);
    }
}

/* Lines between a row and the one below it, each as long as it goes. */
static void put_edges(struct picture *f, size_t y)
{
    const struct map_plane *g = &f->plane;
    double at = y_at(f, map_edge(&g->y, y));
    for (size_t x = 0; x < g->x.n; x++) {
        size_t from = x;
        while (x < g->x.n && map_choice_at(g, x, y) != map_choice_at(g, x, y - 1))
            x++;
        if (x > from)
            svg_line(f->html, "edge", x_at(f, map_edge(&g->x, from)), at,
                     x_at(f, map_edge(&g->x, x)), at);
    }
}

static bool has_letter(const struct picture *f, size_t choice)
{
    for (size_t i = 0; i < f->letters.n; i++)
        if (f->letters.at[i].choice == choice)
            return true;
    return false;
}

/* Where today and its word stand. */
static bool is_at_today(const struct picture *f, double x, double y)
{
    const struct map_plane *g = &f->plane;
    if (!map_shows_today(g))
        return false;
    return fabs(x - x_at(f, map_place(&g->x, g->map->today_x))) < TODAY_ACROSS &&
           fabs(y - y_at(f, map_place(&g->y, g->map->today_y))) < TODAY_ALONG;
}

static bool is_crowded(const struct picture *f, size_t choice, double x, double y)
{
    for (size_t i = 0; i < f->letters.n; i++) {
        const struct letter *l = &f->letters.at[i];
        bool own = l->choice == choice;
        double across = own ? LETTER_ACROSS : SVG_FONT, along = own ? LETTER_ALONG : SVG_FONT;
        if (fabs(l->x - x) < across && fabs(l->y - y) < along)
            return true;
    }
    return is_at_today(f, x, y);
}

/* In the middle of runs that have room for them; of choices that have none there (`last`), in
 * the first run that there is. */
static void find_letters(struct picture *f, bool last)
{
    const struct map_plane *g = &f->plane;
    for (size_t y = 0; y < g->y.n; y++) {
        double middle = y_at(f, (map_edge(&g->y, y) + map_edge(&g->y, y + 1)) / 2);
        for (size_t x = 0, end; x < g->x.n; x = end) {
            end = run_end(g, x, y);
            size_t choice = map_choice_at(g, x, y);
            double from = x_at(f, map_edge(&g->x, x)), to = x_at(f, map_edge(&g->x, end));
            double at = (from + to) / 2;
            bool wanted = last ? !has_letter(f, choice)
                               : to - from >= LETTER_ROOM && !is_crowded(f, choice, at, middle);
            if (wanted)
                *array_push(f->html->page.arena, &f->letters) = (struct letter){choice, at, middle};
        }
    }
}

static void put_areas(struct picture *f)
{
    const struct map_plane *g = &f->plane;
    for (size_t y = 0; y < g->y.n; y++)
        put_runs(f, y);
    for (size_t y = 1; y < g->y.n; y++)
        put_edges(f, y);
    find_letters(f, false);
    find_letters(f, true);
    for (size_t i = 0; i < f->letters.n; i++) {
        const struct letter *l = &f->letters.at[i];
        svg_text(f->html, "letter", l->x, l->y + 0.36 * SVG_FONT, "middle", g->signs[l->choice]);
    }
}

/* --- today --- */

static void put_today(struct picture *f)
{
    const struct map_plane *g = &f->plane;
    if (!map_shows_today(g))
        return;
    double x = x_at(f, map_place(&g->x, g->map->today_x));
    double y = y_at(f, map_place(&g->y, g->map->today_y));
    double width = svg_text_width("today") + 4, height = SVG_FONT + 2;
    bool room = x + SVG_MARK + 2 + width < f->left + f->width;
    struct place_box label = {room ? x + SVG_MARK + 2 : x - SVG_MARK - 2 - width, y - height / 2,
                              width, height};
    svg_mark(f->html, SVG_DISC, x, y, "today");
    svg_label(f->html, "today", &label, x, y);
}

/* --- the picture and its key --- */

static const char *words_of(const struct picture *f, const char *x, const char *y)
{
    const struct map_plane *g = &f->plane;
    return arena_printf(f->html->page.arena,
                        "To the right: %s. Upwards: %s. Choices: %zu, each with a letter and a "
                        "shade. The table below tells them.",
                        x, y, g->map->choices.n);
}

static void put_picture(struct picture *f, const char *title)
{
    struct html *h = f->html;
    struct lines above =
        page_wrap(&h->page, curve_x_words(&h->page, &f->plane.y.scale), WORDS_COLUMNS);
    measure(f, above.n);
    const char *x = curve_x_words(&h->page, &f->plane.x.scale); /* ticks have chosen the unit */
    const char *y = curve_x_words(&h->page, &f->plane.y.scale);
    above = page_wrap(&h->page, y, WORDS_COLUMNS);
    struct lines below = page_wrap(&h->page, x, WORDS_COLUMNS);
    double bottom = f->top + PLANE_HEIGHT;
    html_open_scroll(h, "picture", title, true);
    svg_open(h, (int)(bottom + 28 + (double)below.n * SVG_LINE), title, words_of(f, x, y));
    put_words(f, &above, 0, SVG_FONT, "start");
    put_areas(f);
    put_axes(f);
    put_today(f);
    put_words(f, &below, f->left + f->width / 2, bottom + 20 + SVG_LINE + 3, "middle");
    html_raw(h, "</svg>\n</div>\n");
}

static void put_key(struct html *h, const struct map_plane *g)
{
    const char **signs = NEW_ARRAY(h->page.arena, g->map->choices.n, const char *);
    for (size_t i = 0; i < g->map->choices.n; i++)
        signs[i] = svg_box_sample(h, class_of(h, g->map, i), g->signs[i]);
    html_table(h, map_key_choices(g), NULL, NULL, signs);
    if (g->map->has_today) {
        const char *sign = svg_mark_sample(h, SVG_DISC);
        html_table(h, map_key_today(g), NULL, NULL, &sign);
    }
    struct lines remarks = map_key_remarks(g);
    for (size_t i = 0; i < remarks.n; i++)
        html_remark(h, remarks.at[i], NULL);
}

void html_map(struct html *h, const struct block *b, const char *id)
{
    struct picture f = {.html = h};
    html_open_figure(h, b, id);
    if (map_is_whole(b->map)) {
        map_open(&f.plane, &h->page, b->map);
        put_picture(&f, html_picture_title(h, b));
        put_key(h, &f.plane);
    } else {
        html_raw(h, "<p>(no cells)</p>\n");
    }
    html_raw(h, "</figure>\n");
}
