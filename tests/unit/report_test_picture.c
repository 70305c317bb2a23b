/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reads the picture of a grid back, and says where its marks must be: in long double,
 * from the logarithms and the labels of the axes alone. Owns nothing. */
#include "report_test_picture.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/text.h"

char cell_at(const struct picture *p, int x, int y)
{
    const char *line = p->lines.at[p->top + (size_t)y];
    size_t at = p->axis + 1 + (size_t)x;
    return x >= 0 && x < p->columns && at < strlen(line) ? line[at] : ' ';
}

static bool is_axis_line(const char *line, size_t axis)
{
    return strlen(line) > axis + 4 && strspn(line + axis, "+-") == strlen(line + axis)
        && line[axis] == '+' && line[axis + 1] == '+' && strchr(line + axis, '-');
}

/* The power that the label before the axis ends in: "1e-3 +". */
int picture_power(const char *line, size_t axis)
{
    size_t from = axis - 1;
    while (from > 0 && line[from - 1] != ' ')
        from--;
    ck_assert_msg(text_starts(line + from, "1e"), "no power: %s", line);
    return atoi(line + from + 2);
}

/* Reads "100", "1 k", "0.1", "1e12", "10 MEUR/a". */
int picture_exponent(const char *s)
{
    char *end;
    double x = strtod(s, &end);
    const char *prefix = end[0] == ' ' && end[1] ? strchr("kMG", end[1]) : NULL;
    double factor = !prefix ? 1 : *prefix == 'k' ? 1e3 : *prefix == 'M' ? 1e6 : 1e9;
    ck_assert_msg(end != s, "no amount: %s", s);
    return (int)lround(log10(x * factor));
}

struct picture picture_read(struct arena *a, const char *s)
{
    struct picture p = {.lines = lines_of(a, s)};
    while (!text_equal(p.lines.at[p.top], "frequency, per year"))
        p.top++;
    p.top++;
    const char *first = p.lines.at[p.top];
    p.axis = strcspn(first, "+");
    while (!is_axis_line(p.lines.at[p.top + (size_t)p.rows], p.axis))
        p.rows++;
    const char *below = p.lines.at[p.top + (size_t)p.rows] + p.axis + 1;
    p.columns = (int)strlen(below);
    p.wide = 1 + (int)strcspn(below + 1, "+");
    for (p.high = 1; p.lines.at[p.top + (size_t)p.high][p.axis] != '+';)
        p.high++;
    p.frequency_high = picture_power(first, p.axis);
    p.frequency_low = p.frequency_high - (p.rows - 1) / p.high;
    const char *damages = p.lines.at[p.top + (size_t)p.rows + 1];
    ck_assert(text_starts(damages, "damage, EUR "));
    damages += strlen("damage, EUR");
    p.damage_low = picture_exponent(damages + strspn(damages, " "));
    p.damage_high = p.damage_low + (p.columns - 1) / p.wide;
    return p;
}

long double picture_column(const struct picture *p, double damage)
{
    return (log10l(damage) - p->damage_low) * p->wide;
}

long double picture_row(const struct picture *p, double frequency)
{
    return (p->frequency_high - log10l(frequency)) * p->high;
}

static int cell_of(long double x, int n)
{
    long double rounded = floorl(x + 0.5L);
    return rounded < 0 ? 0 : rounded > n - 1 ? n - 1 : (int)rounded;
}

bool picture_holds(const struct grid_mark *m)
{
    return m->frequency > 0 && m->damage > 0;
}

struct where picture_where(const struct picture *p, const struct grid_mark *m)
{
    return (struct where){cell_of(picture_column(p, m->damage), p->columns),
                          cell_of(picture_row(p, m->frequency), p->rows)};
}
