/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Ticks of a curve's axes and their labels. Labels of a linear axis have as many digits
 * as tell neighbours apart, and one exponent for all of them; those of a log axis have the
 * style's own. Owns nothing. */
#include <math.h>
#include <stdlib.h>

#include "base/utf8.h"
#include "math/elementary.h"
#include "report/curve_plane.h"
#include "report/number.h"

enum { LEAST_TICKS = 4, MOST_TICKS = 8, BETWEEN_LABELS = 2 };

/* Rounding must not cost a tick. */
static const double tiny = 1e-9;

/* --- labels --- */

/* How the numbers of a linear axis are written. */
struct form {
    int shift, exponent, digits;
};

static int shift_for(const struct curve_axis *axis, int largest, int smallest)
{
    if (axis->style == STYLE_PERCENT)
        return -2;
    return axis->style == STYLE_MONEY && *axis->unit ? money_shift(largest, smallest) : 0;
}

/* One exponent for all labels, where the style would give one to the step or the largest. */
static struct form form_for(const struct curve_axis *axis, double step, double largest)
{
    int small = number_exponent(step), large = number_exponent(largest);
    struct form f = {.shift = shift_for(axis, large, small), .digits = large - small + 3};
    int low = axis->style == STYLE_FREQUENCY ? -1 : axis->style == STYLE_MONEY ? -3 : -2;
    int high = axis->style == STYLE_MONEY || axis->style == STYLE_YEAR ? 9 : 5;
    if (small - f.shift < low || large - f.shift >= high)
        f.exponent = small - f.shift;
    return f;
}

static const char *form_text(const struct form *f, double x, struct arena *a)
{
    char buf[32];
    number_digits(buf, x, f->digits, f->shift + f->exponent);
    return f->exponent && x != 0 ? arena_printf(a, "%se%d", buf, f->exponent) : arena_str(a, buf);
}

static void label_linear(struct curve_scale *s, double step, struct arena *a)
{
    double largest = step;
    for (size_t i = 0; i < s->ticks.n; i++)
        largest = fmax(largest, fabs(s->ticks.at[i].value));
    struct form f = form_for(s->axis, step, largest);
    s->shift = f.shift;
    for (size_t i = 0; i < s->ticks.n; i++)
        s->ticks.at[i].label = form_text(&f, s->ticks.at[i].value, a);
}

static void label_log(struct curve_scale *s, struct arena *a)
{
    char buf[32];
    if (s->ticks.n == 0)
        return;
    s->shift = shift_for(s->axis, number_exponent(s->ticks.at[s->ticks.n - 1].value),
                         number_exponent(s->ticks.at[0].value));
    for (size_t i = 0; i < s->ticks.n; i++) {
        number_scaled(buf, s->ticks.at[i].value, s->axis->style, s->shift);
        s->ticks.at[i].label = arena_str(a, buf);
    }
}

/* --- choosing --- */

static void add_tick(struct curve_scale *s, double value, struct arena *a)
{
    *array_push(a, &s->ticks) = (struct curve_tick){.value = value, .at = curve_cell_of(s, value)};
}

void curve_tick_evenly(struct curve_scale *s, double first, double step, int n, struct arena *a)
{
    s->ticks.n = 0;
    for (int i = 0; i < n; i++) {
        double value = (first + i) * step;
        add_tick(s, s->axis->log ? math_pow(10, value) : value, a);
    }
    if (s->axis->log)
        label_log(s, a);
    else
        label_linear(s, step, a);
}

/* At most 8, and apart. */
static bool do_fit(const struct curve_scale *s)
{
    if (s->ticks.n > MOST_TICKS)
        return false;
    int end = -BETWEEN_LABELS - CURVE_ROWS;
    for (size_t i = 0; i < s->ticks.n; i++) {
        int columns = (int)utf8_columns(s->ticks.at[i].label);
        int from = s->ticks.at[i].at - columns / 2;
        if (from < end + BETWEEN_LABELS)
            return false;
        end = from + columns;
    }
    return true;
}

static double number_at(const struct curve_scale *s, double place)
{
    return s->axis->log ? math_pow(10, place) : place;
}

/* Multiples of `step` between the ends. */
static bool try_step(struct curve_scale *s, double step, struct arena *a)
{
    double low = number_at(s, s->low), high = number_at(s, s->high);
    double first = ceil(low / step - tiny), last = floor(high / step + tiny);
    s->ticks.n = 0;
    if (last - first >= MOST_TICKS)
        return false;
    for (double k = first; k <= last; k++)
        add_tick(s, k == 0 ? 0 : k * step, a);
    label_linear(s, step, a);
    return do_fit(s);
}

/* Steps of 1, 2, 5 and so on; where 5 leaves too few, 4. Years are whole where there are
 * two of them. */
static void tick_linearly(struct curve_scale *s, struct arena *a)
{
    static const double sizes[] = {1, 2, 5};
    double span = number_at(s, s->high) - number_at(s, s->low);
    bool whole = s->axis->style == STYLE_YEAR && span >= 2;
    for (double k = floor(math_log10(span)) - 1;; k++) {
        double decade = math_pow(10, k);
        for (size_t i = 0; i < sizeof sizes / sizeof *sizes; i++) {
            if ((whole && sizes[i] * decade < 1) || !try_step(s, sizes[i] * decade, a))
                continue;
            if (sizes[i] == 5 && s->ticks.n < LEAST_TICKS && !try_step(s, 4 * decade, a))
                try_step(s, 5 * decade, a);
            return;
        }
    }
}

/* 10^k times each of the n sizes, between the ends. */
static void tick_decades(struct curve_scale *s, const double *sizes, size_t n, int every,
                         struct arena *a)
{
    s->ticks.n = 0;
    for (int k = (int)floor(s->low); k <= (int)ceil(s->high); k++) {
        for (size_t i = 0; i < n && k % every == 0; i++) {
            double at = k + math_log10(sizes[i]);
            if (at >= s->low - tiny && at <= s->high + tiny)
                add_tick(s, sizes[i] * math_pow(10, k), a);
        }
    }
    label_log(s, a);
}

static bool try_decades(struct curve_scale *s, const double *sizes, size_t n, size_t least,
                        struct arena *a)
{
    tick_decades(s, sizes, n, 1, a);
    return s->ticks.n >= least && do_fit(s);
}

/* Powers of 10, all or some. */
static bool try_powers(struct curve_scale *s, size_t least, struct arena *a)
{
    static const int every[] = {1, 2, 3, 5, 10, 20, 30, 50, 100, 200};
    static const double one = 1;
    for (size_t i = 0; i < sizeof every / sizeof *every; i++) {
        tick_decades(s, &one, 1, every[i], a);
        if (s->ticks.n < least)
            return false;
        if (do_fit(s))
            return true;
    }
    return false;
}

/* Doubling, among the numbers that three digits show exactly: 0.125 to 512. */
static bool try_doubling(struct curve_scale *s, struct arena *a)
{
    s->ticks.n = 0;
    if (s->low < -1 || s->high > 3)
        return false;
    for (double x = 0.125; x <= 512; x *= 2)
        if (math_log10(x) >= s->low - tiny && math_log10(x) <= s->high + tiny)
            add_tick(s, x, a);
    label_log(s, a);
    return s->ticks.n >= LEAST_TICKS && do_fit(s);
}

static bool try_log(struct curve_scale *s, struct arena *a)
{
    static const double sizes[] = {1, 2, 5}, fewer[] = {1, 3};
    return try_doubling(s, a) || try_powers(s, LEAST_TICKS, a) ||
           try_decades(s, sizes, 3, LEAST_TICKS, a) || try_decades(s, fewer, 2, LEAST_TICKS, a);
}

/* A log axis of few decades has even steps, that of a few more what powers there are. */
void curve_tick_x(struct curve_scale *s, struct arena *a)
{
    static const double fewer[] = {1, 3};
    if (s->axis->log && try_log(s, a))
        return;
    tick_linearly(s, a);
    if (!s->axis->log || s->ticks.n >= LEAST_TICKS - 1)
        return;
    if (!try_decades(s, fewer, 2, LEAST_TICKS - 1, a) && !try_powers(s, 2, a))
        tick_linearly(s, a);
}
