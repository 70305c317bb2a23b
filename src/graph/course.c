/* SPDX-License-Identifier: GPL-3.0-or-later */
/* COURSE: a probability over time (graph.h). Owns nothing.
 *
 * With y = s x, h = start exp(-y) + rate x phi(y), where phi(y) = (1 - exp(-y)) / y and phi(0) = 1:
 * no difference of near numbers, so that the smallest probabilities keep their digits. The same
 * for m. Its slope phi' = (exp(-y) - phi) / y would cancel near 0; a series takes its place. */
#include "graph/course.h"

#include "math/elementary.h"

#include <math.h>

struct stretch course_stretch(const struct course *c, double t)
{
    if (!(t >= c->first))
        return (struct stretch){c->from, c->first, c->fresh};
    double k = floor((t - c->first) / c->every);
    if (c->first + k * c->every > t)
        k--;
    if (c->first + (k + 1) * c->every <= t)
        k++;
    return (struct stretch){c->first + k * c->every, c->first + (k + 1) * c->every, false};
}

/* exp(-y) and phi(y), from one function where that keeps all digits. */
struct decay {
    double left, phi;
};

static struct decay decay_of(double y)
{
    double lost = math_expm1(-y);
    return (struct decay){y < 1 ? 1 + lost : math_exp(-y), y == 0 ? 1 : -lost / y};
}

/* phi'(y) = sum over k >= 1 of (-1)^k k y^(k-1) / (k + 1)!: these terms reach below rounding for
 * y < 0.5. */
static double phi_slope(double y, struct decay d)
{
    static const double terms[] = {
        -0.5,
        0.3333333333333333,
        -0.125,
        0.03333333333333333,
        -0.006944444444444444,
        0.0011904761904761906,
        -0.00017361111111111112,
        2.2045855379188714e-05,
        -2.48015873015873e-06,
        2.505210838544172e-07,
        -2.296443268665491e-08,
        1.9270852604185937e-09,
        -1.4911969277048643e-10,
        1.0706029224547743e-11,
        -7.169215998581078e-13,
        4.498331606952833e-14,
    };
    if (!(fabs(y) < 0.5))
        return (d.left - d.phi) / y;
    double sum = 0;
    for (size_t k = sizeof terms / sizeof *terms; k-- > 0;)
        sum = sum * y + terms[k];
    return sum;
}

/* What follows du/dx = rate (1 - u) - ending u from `start`. */
static double rising(double start, double rate, double ending, double x)
{
    if (start == 0 && rate == 0)
        return 0;
    struct decay d = decay_of((rate + ending) * x);
    return start * d.left + rate * x * d.phi;
}

double course_change(const double x[COURSE_ARGS], bool fresh, double since, double age)
{
    double start = fresh ? 0 : x[COURSE_LEFT];
    double h = rising(start, x[COURSE_RATE], x[COURSE_ENDING], since);
    if (x[COURSE_UNRESET] == 0)
        return h;
    return h + rising(0, x[COURSE_UNRESET], x[COURSE_ENDING], age) * (1 - h);
}

struct slopes {
    double value, start, rate, ending;
};

static struct slopes rising_slopes(double start, double rate, double ending, double x)
{
    double y = (rate + ending) * x, common = 0;
    struct decay d = decay_of(y);
    if (start != 0)
        common -= start * x * d.left;
    if (rate != 0)
        common += rate * x * x * phi_slope(y, d);
    return (struct slopes){start * d.left + rate * x * d.phi, d.left, x * d.phi + common, common};
}

double course_change_slopes(const double x[COURSE_ARGS], bool fresh, double since, double age,
                            double slope[COURSE_ARGS])
{
    double ending = x[COURSE_ENDING];
    struct slopes h = rising_slopes(fresh ? 0 : x[COURSE_LEFT], x[COURSE_RATE], ending, since);
    struct slopes m = rising_slopes(0, x[COURSE_UNRESET], ending, age);
    slope[COURSE_STANDING] = 0;
    slope[COURSE_RATE] = (1 - m.value) * h.rate;
    slope[COURSE_ENDING] = (1 - m.value) * h.ending + (1 - h.value) * m.ending;
    slope[COURSE_LEFT] = fresh ? 0 : (1 - m.value) * h.start;
    slope[COURSE_UNRESET] = (1 - h.value) * m.rate;
    return h.value + m.value * (1 - h.value);
}

double course_at(const struct course *c, const double x[COURSE_ARGS], double t)
{
    struct stretch s = course_stretch(c, t);
    double change = course_change(x, s.fresh, fmax(t - s.origin, 0), fmax(t - c->born, 0));
    return x[COURSE_STANDING] + change * (1 - x[COURSE_STANDING]);
}

void course_backward(const struct course *c, const double x[COURSE_ARGS], double w, double *back)
{
    struct stretch s = course_stretch(c, 0);
    double slope[COURSE_ARGS];
    double change = course_change_slopes(x, s.fresh, fmax(-s.origin, 0), fmax(-c->born, 0), slope);
    for (int i = 0; i < COURSE_ARGS; i++)
        back[i] += w * (1 - x[COURSE_STANDING]) * slope[i];
    back[COURSE_STANDING] += w * (1 - change);
}
