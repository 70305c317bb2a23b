/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Years of the horizon on the page: calendar years, dates, and curves that go in steps. */
#include <math.h>

#include "figure/horizon.h"
#include "work/show.h"

enum { DAYS = 365 }; /* of a year, as figure/horizon.h counts */

/* Where in its calendar year the horizon begins. */
static double start_part(const struct job *j, int *year)
{
    day start = horizon_start(j->model->settings);
    *year = date_year(start);
    return (double)(start - date_of(*year, 1, 1)) / DAYS;
}

double calendar_year(const struct job *j, double years)
{
    int year;
    double part = start_part(j, &year);
    return year + part + years;
}

const char *calendar_date(struct job *j, double years)
{
    char date[DATE_TEXT];
    int first;
    double since = start_part(j, &first) + years;
    double whole = floor(since + 0.5 / DAYS);
    int days = (int)floor((since - whole) * DAYS + 0.5);
    return arena_str(j->arena, date_write(date, date_of(first + (int)whole, 1, 1) + days));
}

/* --- steps --- */

static double value_in(const struct job *j, const struct year_steps *s, uint32_t year)
{
    return figure_value(j->figures, s->yearly[s->of_year[year]]);
}

struct extremes {
    uint32_t least, most; /* years; the first of equals */
};

static struct extremes find_extremes(const struct job *j, const struct year_steps *s)
{
    struct extremes x = {0, 0};
    for (uint32_t y = 1; y < horizon_length(j->model->settings); y++) {
        x.least = value_in(j, s, y) < value_in(j, s, x.least) ? y : x.least;
        x.most = value_in(j, s, y) > value_in(j, s, x.most) ? y : x.most;
    }
    return x;
}

static void draw_steps(struct job *j, const struct year_steps *s)
{
    struct report *r = j->report;
    uint32_t years = horizon_length(j->model->settings);
    struct block *b = report_curve(r, s->key, s->title);
    curve_set_x(r, b, "year", "Year", "", STYLE_YEAR);
    curve_set_y(r, b, "value", s->head, s->unit, s->style);
    struct curve_line *line = curve_add_line(r, b, s->head, "*");
    for (uint32_t y = 0; y < years; y++) {
        curve_add_point(r, line, calendar_year(j, y), value_in(j, s, y));
        curve_add_point(r, line, calendar_year(j, y + 1), value_in(j, s, y));
    }
}

static void year_pair(struct job *j, struct block *b, const struct year_steps *s,
                      const char *format, uint32_t year)
{
    figure_id id = s->yearly[s->of_year[year]];
    const char *label = horizon_label(j->arena, j->model->settings, year);
    struct row *row = block_pair(j->report, b, arena_printf(j->arena, "%s, in %s", format, label));
    pair_number(j->report, row, figure_value(j->figures, id), s->unit, s->style,
                figure_name(j->figures, j->arena, id));
}

void part_years(struct job *j, const struct year_steps *s)
{
    struct report *r = j->report;
    if (!s->of_year)
        return;
    struct extremes x = find_extremes(j, s);
    if (value_in(j, s, x.least) == value_in(j, s, x.most))
        return;
    draw_steps(j, s);
    struct block *b = report_pairs(r, arena_printf(j->arena, "%s-mean", s->key), NULL);
    struct row *mean = block_pair(r, b, "Mean over the horizon");
    pair_number(r, mean, figure_value(j->figures, s->mean), s->unit, s->style,
                figure_name(j->figures, j->arena, s->mean));
    year_pair(j, b, s, "Least", x.least);
    year_pair(j, b, s, "Most", x.most);
}
