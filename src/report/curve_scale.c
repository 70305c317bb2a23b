/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The ranges of a curve's axes. Owns nothing.
 * Invariant: high > low, and every value that has a place lies between them. */
#include <math.h>

#include "math/elementary.h"
#include "report/curve_plane.h"

/* Rounding must not cost a step. */
static const double tiny = 1e-9;

bool curve_has_place(const struct curve_axis *axis, double value)
{
    return !axis->log || value > 0;
}

static double on_scale(const struct curve_axis *axis, double value)
{
    return axis->log ? math_log10(value) : value;
}

double curve_place(const struct curve_scale *s, double value)
{
    return (on_scale(s->axis, value) - s->low) / (s->high - s->low) * s->cells;
}

int curve_cell_of(const struct curve_scale *s, double value)
{
    double at = floor(curve_place(s, value) + 0.5);
    return at < 0 ? 0 : at > s->cells ? s->cells : (int)at;
}

/* Values that only rounding tells apart count as equal: half of their size more and less. */
static void part_equal(const struct curve_scale *s, double *low, double *high)
{
    double size = fmax(fabs(*low), fabs(*high));
    if (*high - *low > tiny * size && *high - *low > 1e-290)
        return;
    bool year = s->axis->style == STYLE_YEAR;
    double room = s->axis->log || size < 1e-280 || year ? 1 : size / 2;
    *low -= room;
    *high += room;
}

void curve_scale_x(struct curve_scale *s, double least, double greatest, int cells)
{
    s->cells = cells;
    s->low = on_scale(s->axis, least);
    s->high = on_scale(s->axis, greatest);
    part_equal(s, &s->low, &s->high);
}

/* Steps of a round size around low .. high. */
struct steps {
    double size, first; /* the axis begins at `first` sizes */
    int n;
};

static void try_steps(struct steps *best, double size, double low, double high)
{
    static const int counts[] = {4, 3, 2, 6}; /* of two that reach as far, the former */
    double first = floor(low / size + tiny);
    for (size_t i = 0; i < sizeof counts / sizeof *counts; i++) {
        double reach = size * counts[i];
        if ((first + counts[i]) * size < high - tiny * size)
            continue;
        if (best->n == 0 || reach < best->size * best->n * (1 - tiny))
            *best = (struct steps){size, first, counts[i]};
    }
}

static struct steps linear_steps(double low, double high)
{
    static const double sizes[] = {1, 2, 2.5, 5};
    struct steps best = {0};
    double decade = floor(math_log10(high - low));
    for (double k = decade - 1; k <= decade + 1; k++)
        for (size_t i = 0; i < sizeof sizes / sizeof *sizes; i++)
            try_steps(&best, sizes[i] * math_pow(10, k), low, high);
    return best;
}

/* Whole decades; half ones within a single one. */
static struct steps log_steps(double low, double high)
{
    static const double sizes[] = {1, 2, 5, 10, 20, 50, 100, 200};
    struct steps best = {0};
    double first = floor(low + tiny);
    if (first + 1 >= high - tiny)
        return (struct steps){0.5, 2 * first, 2};
    for (size_t i = 0; i < sizeof sizes / sizeof *sizes; i++)
        try_steps(&best, sizes[i], low, high);
    return best;
}

void curve_scale_y(struct curve_scale *s, double least, double greatest, struct arena *a)
{
    bool zero = !s->axis->log && !s->axis->from_data;
    double low = zero ? fmin(least, 0) : on_scale(s->axis, least);
    double high = zero ? fmax(greatest, 0) : on_scale(s->axis, greatest);
    if (zero && high - low < 1e-290)
        high = 1;
    if (!zero && !s->axis->log)
        part_equal(s, &low, &high);
    struct steps steps = s->axis->log ? log_steps(low, high) : linear_steps(low, high);
    s->cells = CURVE_ROWS;
    s->low = steps.first * steps.size;
    s->high = (steps.first + steps.n) * steps.size;
    curve_tick_evenly(s, steps.first, steps.size, steps.n + 1, a);
}
